package ingest

import (
	"errors"
	"path/filepath"
	"reflect"
	"testing"
	"time"
)

// TestReadMetadata reads a folder, and documents that contradict nothing.
func TestReadMetadata(t *testing.T) {
	dir := recordsDir("miniseed")
	m, err := ReadMetadata([]string{filepath.Join(dir, "events.xml"), dir, filepath.Join(dir, "station.xml")})
	if err != nil {
		t.Fatal(err)
	}
	want := []CatalogueEvent{{
		Event: Event{
			ID: "tarn2041", Name: "Tarn Ridge", Origin: time.Date(2041, 3, 4, 8, 12, 0, 500_000_000, time.UTC), Latitude: Known(30.125), Longitude: Known(150.25),
			DepthKM: Known(25), Magnitude: Known(5.7), MagnitudeType: "Mw",
		},
		PublicID: "smi:example.org/event/tarn2041", Kind: "earthquake",
	}}
	if got := m.Events(); !reflect.DeepEqual(got, want) {
		t.Errorf("events %+v, want %+v", got, want)
	}
	for id, want := range map[string]string{
		"quakeml:example.org/query?eventid=ab12&format=quakeml": "ab12", "smi:example.org/event#42": "42", "plain": "plain", "": "",
	} {
		if got := lastOfID(id); got != want {
			t.Errorf("lastOfID(%q) = %q, want %q", id, got, want)
		}
	}
}

func TestStation(t *testing.T) {
	m := mseedHints(t).Metadata
	all := Station{Network: "XX", Code: "TARN", Name: "Tarn Head", Latitude: Known(30.5), Longitude: Known(149.75), ElevationM: Known(212)}
	for name, k := range map[string]struct {
		start time.Time
		is    Station
		want  Station
	}{
		"covered":         {mseedStart, Station{Network: "XX", Code: "TARN", Name: "Own name", Latitude: Known(1), Longitude: Known(2)}, all},
		"no time":         {time.Time{}, Station{Network: "XX", Code: "TARN"}, all},
		"other network":   {mseedStart, Station{Network: "YY", Code: "TARN"}, Station{}},
		"no network":      {mseedStart, Station{Code: "TARN"}, Station{}},
		"before it stood": {mseedStart.AddDate(-5, 0, 0), Station{Network: "XX", Code: "TARN"}, Station{}},
	} {
		got, ok := m.Station(&Channel{Station: k.is, Start: k.start})
		if got != k.want || ok != (k.want != Station{}) {
			t.Errorf("%s: %+v, %v, want %+v", name, got, ok, k.want)
		}
	}
}

func TestMetadataRefusals(t *testing.T) {
	dir := t.TempDir()
	write := func(name, text string) string {
		path := filepath.Join(dir, name)
		writeFile(t, path, text)
		return path
	}
	page, broken := write("page.txt", "no XML"), write("broken.XML", "<FDSNStationXML xmlns=\"http://www.fdsn.org/xml/station/1\">\n<Network>")
	for _, k := range []struct{ path, want string }{
		{page, page + ": neither StationXML nor QuakeML"},
		{broken, broken + ":2: unexpected EOF"},
		{dir, broken + ":2: unexpected EOF"},
	} {
		if _, err := ReadMetadata([]string{k.path}); err == nil || err.Error() != k.want {
			t.Errorf("ReadMetadata(%s): %v, want %q", k.path, err, k.want)
		}
	}
	if _, err := ReadMetadata([]string{filepath.Join(dir, "none")}); err == nil {
		t.Error("a path that is not there: no error")
	}
	_, _, err := Parse("f", []byte("<FDSNStationXML/>"), Hints{})
	if not, ok := errors.AsType[*NotMotionError](err); !ok || not.Reason != "StationXML, not used: only files named *.xml are, alone or in archives named as such, and those of --metadata" {
		t.Errorf("StationXML as a record: %v", err)
	}
}
