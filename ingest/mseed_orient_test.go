package ingest

import (
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

// TestMiniSEEDOrientation changes what metadata say of HNE.
func TestMiniSEEDOrientation(t *testing.T) {
	const given = "<Azimuth>90</Azimuth><Dip>0</Dip>"
	data := func(code string) []byte { r := mseedRecord(code, 0, 9000); return r.Series(3) }
	cases := []struct {
		name, code, by string
		want           Orientation
		warning        string
	}{
		{"azimuth", "HNE", "<Azimuth>93</Azimuth><Dip>0</Dip>", Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(93), Label: "E"}, ""},
		{"azimuth of 360", "HNE", "<Azimuth>360</Azimuth><Dip>0</Dip>", Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(0), Label: "E"}, "a channel E with an azimuth of 0°: the azimuth taken"},
		{"neither", "HNE", "", Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(90), Label: "E"}, ""},
		{"neither, 1", "HN1", "", Orientation{Label: "1"}, ""},
		{"dip alone, 1", "HN1", "<Dip>0</Dip>", Orientation{Axis: AxisHorizontal, Label: "1"}, ""},
		{"dip alone, 3", "HN3", "<Dip>-90</Dip>", Orientation{Axis: AxisVertical, Label: "3"}, ""},
		{"azimuth alone, Z", "HNZ", "<Azimuth>0</Azimuth>", Orientation{Axis: AxisVertical, Label: "Z"}, ""},
		{"azimuth alone, 2", "HN2", "<Azimuth>200</Azimuth>", Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(200), Label: "2"}, ""},
		{"azimuth alone, 3", "HN3", "<Azimuth>200</Azimuth>", Orientation{Label: "3"}, "an azimuth of 200° and no dip: a channel 3 need not be horizontal"},
		{"azimuth alone, U", "HNU", "<Azimuth>200</Azimuth>", Orientation{Label: "U"}, "an azimuth of 200° and no dip: a channel U need not be horizontal"},
		{"a level A", "HNA", "<Azimuth>200</Azimuth><Dip>0</Dip>", Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(200), Label: "A"}, ""},
		{"off the horizontal, a little", "HN2", "<Azimuth>200</Azimuth><Dip>-5</Dip>", Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(200), Label: "2"}, ""},
		{"off the horizontal, as far as may be", "HN2", "<Azimuth>200</Azimuth><Dip>-15</Dip>", Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(200), Label: "2"}, "a dip of -15°: taken for horizontal"},
		{"off the vertical, as far as may be", "HN2", "<Azimuth>200</Azimuth><Dip>75</Dip>", Orientation{Axis: AxisVertical, Label: "2"}, "a dip of 75°: taken for vertical"},
		{"off the vertical, a little", "HN2", "<Azimuth>200</Azimuth><Dip>-85</Dip>", Orientation{Axis: AxisVertical, Label: "2"}, ""},
		{"a Z that is none quite", "HNZ", "<Dip>-75</Dip>", Orientation{Axis: AxisVertical, Label: "Z"}, "a dip of -75°: taken for vertical"},
	}
	for _, k := range cases {
		replace := []string{given, k.by, `code="HNE"`, `code="` + k.code + `"`}
		if k.code == "HNZ" {
			replace = append([]string{`code="HNZ" locationCode="00"`, `code="HNX" locationCode="00"`}, replace...)
		}
		c := parseMiniSEED(t, data(k.code), stationHints(t, replace...))[0]
		if c.Orientation != k.want || strings.Join(c.Warnings, "; ") != k.warning {
			t.Errorf("%s: %+v, warnings %q, want %+v, %q", k.name, c.Orientation, c.Warnings, k.want, k.warning)
		}
	}
}

// TestMiniSEEDDipAgainstLetter has dips that contradict the channels' letters: neither is
// believed, and the other channels of the file are read.
func TestMiniSEEDDipAgainstLetter(t *testing.T) {
	e, n, z := mseedRecord("HNE", 0, 9000), mseedRecord("HNN", 0, 9000), mseedRecord("HNZ", 0, 9000)
	data := slices.Concat(e.Series(3), n.Series(3), z.Series(3))
	for _, k := range []struct{ code, old, dip, want string }{
		{"HNZ", "-90", "0", "26 states a dip of 0°, horizontal, for a channel Z, which is vertical"},
		{"HNZ", "-90", "-15", "26 states a dip of -15°, horizontal, for a channel Z, which is vertical"},
		{"HNE", "0", "-90", "12 states a dip of -90°, vertical, for a channel E, which is horizontal"},
		{"HNN", "0", "75", "19 states a dip of 75°, vertical, for a channel N, which is horizontal"},
	} {
		text := string(readFile(t, filepath.Join(recordsDir("miniseed"), "station.xml")))
		at := strings.Index(text, `code="`+k.code+`"`)
		text = text[:at] + strings.Replace(text[at:], "<Dip>"+k.old+"<", "<Dip>"+k.dip+"<", 1)
		m := &Metadata{}
		if _, err := m.Add(t.Context(), "s.xml", []byte(text)); err != nil {
			t.Fatal(err)
		}
		_, channels, err := Parse(t.Context(), "f", data, Hints{Metadata: m})
		want := "f: XX.TARN.00." + k.code + ": s.xml:" + k.want + ": correct whichever is wrong"
		if err == nil || err.Error() != want || len(channels) != 2 || slices.ContainsFunc(channels, func(c Channel) bool { return c.ChannelCode == k.code }) {
			t.Errorf("%s: %d channels,\n%v, want\n%s", k.code, len(channels), err, want)
		}
	}
}

// TestMiniSEEDTilted has sensors that are neither horizontal nor vertical, one
// alone, and three at the angle of a symmetric triaxial arrangement, whose
// tangent is 1/√2: they stand for no direction of the ground. Others of the file
// are read.
func TestMiniSEEDTilted(t *testing.T) {
	const given, words = "<Azimuth>90</Azimuth><Dip>0</Dip>", "° is neither horizontal (up to 15°) nor vertical (from 75°): the three channels of the sensor must be turned into vertical, north and east first"
	one, n := mseedRecord("HN2", 0, 9000), mseedRecord("HNN", 0, 9000)
	for dip, refused := range map[string]bool{
		"15": false, "15.01": true, "35.26": true, "-35.26": true, "45": true, "-74.99": true, "75": false, "-75": false,
	} {
		hints := stationHints(t, given, "<Azimuth>90</Azimuth><Dip>"+dip+"</Dip>", `code="HNE"`, `code="HN2"`)
		_, channels, err := Parse(t.Context(), "case", append(one.Series(3), n.Series(3)...), hints)
		want := "case: XX.TARN.00.HN2: a dip of " + dip + words
		switch {
		case !refused && (err != nil || len(channels) != 2):
			t.Errorf("dip %s: %d channels, %v", dip, len(channels), err)
		case refused && (err == nil || err.Error() != want || len(channels) != 1 || channels[0].ChannelCode != "HNN"):
			t.Errorf("dip %s: %d channels,\n%v, want\n%s", dip, len(channels), err, want)
		}
		if _, channels, err = Parse(t.Context(), "case", one.Series(3), hints); refused && (err == nil || err.Error() != want || len(channels) > 0) {
			t.Errorf("dip %s alone: %d channels, %v", dip, len(channels), err)
		}
	}
}

// TestMiniSEEDTriaxialCodes has axes that stand on a corner by their codes, whatever
// azimuth metadata give them: without a dip, with neither, and without metadata.
func TestMiniSEEDTriaxialCodes(t *testing.T) {
	const given = "<Azimuth>90</Azimuth><Dip>0</Dip>"
	for _, letter := range []string{"A", "B", "C"} {
		want := "case: XX.TARN.00.HN" + letter + ": orientation code " + letter +
			" is an axis of a symmetric triaxial sensor, neither horizontal nor vertical, and no dip is stated: the three channels of the sensor must be turned into vertical, north and east first"
		r := mseedRecord("HN"+letter, 0, 9000)
		for _, by := range []string{"<Azimuth>120</Azimuth>", ""} {
			hints := stationHints(t, given, by, `code="HNE"`, `code="HN`+letter+`"`)
			if _, channels, err := Parse(t.Context(), "case", r.Series(3), hints); err == nil || err.Error() != want || len(channels) > 0 {
				t.Errorf("%s, %q: %d channels, %v, want %s", letter, by, len(channels), err, want)
			}
		}
		r.Encoding = encodedFloat32
		if _, _, err := Parse(t.Context(), "case", r.Series(3), Hints{Unit: "gal"}); err == nil || err.Error() != want {
			t.Errorf("%s, without metadata: %v, want %s", letter, err, want)
		}
	}
}
