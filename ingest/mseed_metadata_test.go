package ingest

import (
	"path/filepath"
	"reflect"
	"strings"
	"testing"
)

// TestMiniSEEDContradiction has two documents that contradict each other: counts cannot be
// read, and a further document would not help; floats in a unit that is stated are taken
// without them. Documents that agree, as far as they go, are one.
func TestMiniSEEDContradiction(t *testing.T) {
	text := string(readFile(t, filepath.Join(recordsDir("miniseed"), "station.xml")))
	add := func(replace ...string) Hints {
		m := &Metadata{}
		for _, d := range [][2]string{{"a.xml", text}, {"b.xml", strings.NewReplacer(replace...).Replace(text)}} {
			if _, err := m.Add(t.Context(), d[0], []byte(d[1])); err != nil {
				t.Fatal(err)
			}
		}
		return Hints{Metadata: m}
	}
	r := mseedRecord("HNE", 0, 9000)
	counts := r.Series(2)
	differ := add("<Value>200000<", "<Value>100000<", "<Azimuth>90<", "<Azimuth>60<")
	const say = "a.xml:12 and b.xml:12 say sensitivity 200000 counts per m/s**2 / 100000 counts per m/s**2; azimuth 90° / 60°"
	const want = "f: XX.TARN.00.HNE: station metadata contradict each other at 2041-03-04T08:12:09.5Z: " + say
	if _, channels, err := Parse(t.Context(), "f", counts, differ); err == nil || err.Error() != want || len(channels) > 0 {
		t.Errorf("%d channels, %v, want %s", len(channels), err, want)
	}
	for _, same := range []Hints{add("Tarn Head", "TARN HEAD", `startDate="2040-01-01T00:00:00Z"`, `startDate="2039-01-01T00:00:00Z"`), add("<Azimuth>90</Azimuth>", "")} {
		if c := parseMiniSEED(t, counts, same)[0]; c.Orientation.AzimuthDeg != Known(90) || c.Station.Name != "Tarn Head" || len(c.Warnings) > 0 {
			t.Errorf("of documents that agree: %+v, %q, warnings %q", c.Orientation, c.Station.Name, c.Warnings)
		}
	}
	deeper := parseMiniSEED(t, counts, add("<Depth>1<", "<Depth>30<"))[0]
	if deeper.Siting != SitingBorehole || len(deeper.Warnings) != 1 || !strings.HasPrefix(deeper.Warnings[0], "station metadata differ: a.xml:12 and b.xml:12 say depth 1 m / 30 m (30 m taken)") {
		t.Errorf("of two depths: %s, warnings %q", deeper.Siting, deeper.Warnings)
	}
	r.Encoding, differ.Unit = encodedFloat32, "mm/s2"
	warnings := parseMiniSEED(t, r.Series(2), differ)[0].Warnings
	if want := []string{"station metadata contradict each other, and are not used: " + say}; !reflect.DeepEqual(warnings, want) {
		t.Errorf("floats: warnings %q, want %q", warnings, want)
	}
}
