package ingest

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"reflect"
	"runtime"
	"strings"
	"testing"
	"time"
)

// TestReadMetadata reads a folder, and documents that contradict nothing.
func TestReadMetadata(t *testing.T) {
	dir := recordsDir("miniseed")
	m, err := ReadMetadata(t.Context(), []string{filepath.Join(dir, "events.xml"), dir, filepath.Join(dir, "station.xml")})
	if err != nil {
		t.Fatal(err)
	}
	want := []CatalogueEvent{{
		Event: Event{
			ID: "tarn2041", Name: "Tarn Ridge", Origin: time.Date(2041, 3, 4, 8, 12, 0, 500_000_000, time.UTC), Latitude: Known(30.125), Longitude: Known(150.25),
			DepthKM: Known(25), Magnitude: Known(5.7), MagnitudeType: "Mw",
		},
		PublicID: "smi:example.org/event/tarn2041",
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
		if _, err := ReadMetadata(t.Context(), []string{k.path}); err == nil || err.Error() != k.want {
			t.Errorf("ReadMetadata(%s): %v, want %q", k.path, err, k.want)
		}
	}
	if _, err := ReadMetadata(t.Context(), []string{filepath.Join(dir, "none")}); err == nil {
		t.Error("a path that is not there: no error")
	}
	_, _, err := Parse(t.Context(), "f", []byte("<FDSNStationXML/>"), Hints{})
	if not, ok := errors.AsType[*NotMotionError](err); !ok || not.Reason != "StationXML, not used: only files named *.xml are, alone or in archives named as such, and those of --metadata" {
		t.Errorf("StationXML as a record: %v", err)
	}
}

// readDocument returns what one document says.
func readDocument(t *testing.T, text string) (*Metadata, string) {
	t.Helper()
	m := &Metadata{}
	if _, err := m.Add(t.Context(), "doc.xml", []byte(text)); err != nil {
		t.Fatal(err)
	}
	var notes []string
	for _, n := range m.Notes() {
		notes = append(notes, fmt.Sprintf("%s:%d: %s", n.Path, n.Line, n.Text))
	}
	return m, strings.Join(notes, "\n")
}

// quakeML is a document with one event a line, from line 2 on; each is what stands
// in its start tag, its origin time, its latitude and its other elements.
func quakeML(events ...[4]string) string {
	text := `<quakeml xmlns="http://quakeml.org/xmlns/bed/1.2"><eventParameters>`
	for _, e := range events {
		text += fmt.Sprintf("\n<event%s><origin><time><value>%s</value></time><latitude><value>%s</value></latitude><longitude><value>14</value></longitude></origin>%s</event>", e[0], e[1], e[2], e[3])
	}
	return text + "</eventParameters></quakeml>"
}

// A station at 0, 0 is nowhere, and a channel that cannot be used loses no other.
func TestStationMetadataWithDoubts(t *testing.T) {
	text := string(readFile(t, filepath.Join(recordsDir("miniseed"), "station.xml")))
	if strings.Count(text, ">30.5<") < 2 {
		t.Fatal("no coordinates to damage")
	}
	m, notes := readDocument(t, strings.Replace(strings.Replace(text, ">30.5<", ">0<", 1), ">149.75<", ">0<", 1))
	s, ok := m.Station(&Channel{Station: Station{Network: "XX", Code: "TARN"}, Start: mseedStart})
	if !ok || s.Latitude.Known || s.Longitude.Known || s.ElevationM != Known(212) || !strings.Contains(notes, "station XX.TARN: latitude and longitude are 0: position taken as unknown") {
		t.Errorf("%+v, %v; notes %s", s, ok, notes)
	}
	code := strings.Index(text, `code="HNE"`)
	at := code + strings.Index(text[code:], "<Latitude>")
	m, notes = readDocument(t, text[:at]+strings.Replace(text[at:], "<Latitude>30.5</Latitude>", "", 1))
	if !strings.HasSuffix(notes, "channel XX.TARN.00.HNE: no latitude or no longitude: left out") {
		t.Errorf("notes %q", notes)
	}
	if _, channels, err := Parse(t.Context(), "f", mseedFixtures()["three-channels.mseed"], Hints{Metadata: m}); len(channels) != 2 || err == nil {
		t.Errorf("%d channels, %v; want two beside the one without metadata", len(channels), err)
	}
}

// A run that is stopped is no fault of a document.
func TestMetadataStopped(t *testing.T) {
	ctx, stop := context.WithCancel(t.Context())
	stop()
	var events [][4]string
	for i := range 200 {
		events = append(events, [4]string{fmt.Sprintf(` publicID="%d"`, i), "2041-03-04T08:12:00Z", "41", ""})
	}
	m := &Metadata{}
	if used, err := m.Add(ctx, "doc.xml", []byte(quakeML(events...))); err != context.Canceled || used != "" || !m.IsEmpty() {
		t.Errorf("Add = %q, %v", used, err)
	}
}

// FuzzMetadata adds a document twice: no panic, errors with a line, memory bounded by
// the size of the input, nothing new the second time. What package xml drops at once
// is not counted.
func FuzzMetadata(f *testing.F) {
	for _, name := range []string{"station.xml", "events.xml"} {
		f.Add(readFile(f, filepath.Join(recordsDir("miniseed"), name)))
	}
	f.Add([]byte(quakeML([4]string{"", "2041-03-04T08:00:00Z", "41", ""}, [4]string{"", "", "", ""})))
	f.Fuzz(func(t *testing.T, data []byte) {
		var start, end runtime.MemStats
		runtime.ReadMemStats(&start)
		m := &Metadata{}
		used, err := m.Add(t.Context(), "a.xml", data)
		runtime.ReadMemStats(&end)
		if end.TotalAlloc-start.TotalAlloc > 1<<20+maxAllocated*uint64(len(data)) {
			runtime.GC()
			runtime.ReadMemStats(&end)
			checkAllocated(t, max(end.HeapAlloc, start.HeapAlloc)-start.HeapAlloc, data)
		}
		if _, ok := errors.AsType[*ParseError](err); err != nil && (!ok || used != "" || !m.IsEmpty()) {
			t.Fatalf("Add = %q, %v", used, err)
		}
		events, stations, channels := len(m.Events()), len(m.inventory.Stations), len(m.inventory.Channels)
		if m.Add(t.Context(), "b.xml", data); len(m.Events()) != events || len(m.inventory.Stations) != stations || len(m.inventory.Channels) != channels {
			t.Fatalf("%d events, %d stations and %d channels after the same once more", len(m.Events()), len(m.inventory.Stations), len(m.inventory.Channels))
		}
		for _, e := range m.Events() {
			c := Channel{Event: e.Event}
			if dropImplausible(&c); e.PublicID == "" || e.Origin.IsZero() || !e.Latitude.Known || c.Event != e.Event {
				t.Fatalf("event %+v", e)
			}
		}
	})
}

// BenchmarkAddEvents adds events one document each, the latest first.
func BenchmarkAddEvents(b *testing.B) {
	const n = 2000
	var documents [][]byte
	size := 0
	for i := range n {
		at := mseedStart.Add(-time.Duration(i) * time.Minute).Format(time.RFC3339)
		d := []byte(quakeML([4]string{fmt.Sprintf(` publicID="%d"`, i), at, "41", ""}))
		documents, size = append(documents, d), size+len(d)
	}
	b.SetBytes(int64(size))
	b.ReportAllocs()
	for b.Loop() {
		m := &Metadata{}
		for _, d := range documents {
			if _, err := m.Add(b.Context(), "doc.xml", d); err != nil {
				b.Fatal(err)
			}
		}
		if len(m.Events()) != n {
			b.Fatal(len(m.Events()))
		}
	}
}

// A folder that holds no document is noted.
func TestMetadataOfAnEmptyFolder(t *testing.T) {
	empty, other := t.TempDir(), t.TempDir()
	for name, text := range map[string]string{"page.xml": "<page/>", "station.txt": ""} {
		if err := os.WriteFile(filepath.Join(other, name), []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	m, err := ReadMetadata(t.Context(), []string{empty, other})
	if err != nil || len(m.Notes()) != 2 || m.Notes()[0].Text != "no *.xml in this folder is StationXML or QuakeML; folders below it are not read" {
		t.Errorf("%v, %+v", err, m)
	}
	if m, err := ReadMetadata(t.Context(), []string{filepath.Join("..", "testdata", "records", "miniseed")}); err != nil || len(m.Notes()) > 0 {
		t.Errorf("%v, %+v", err, m.Notes())
	}
}
