package fdsnxml

import (
	"bytes"
	"errors"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
	"time"
)

func read(t testing.TB, name string) []byte {
	t.Helper()
	data, err := os.ReadFile(filepath.Join("testdata", name))
	if err != nil {
		t.Fatal(err)
	}
	return data
}

func day(year, month, day, hour int) time.Time {
	return time.Date(year, time.Month(month), day, hour, 0, 0, 0, time.UTC)
}

func known(v float64) *float64 { return &v }

func TestReadStations(t *testing.T) {
	v, err := ReadStations(read(t, "station.xml"))
	if err != nil {
		t.Fatal(err)
	}
	stations := []Station{{"XX", "CULM", "Culmination Reef", 30.5, 149.75, 12, day(2035, 1, 1, 0), time.Time{}}}
	if !reflect.DeepEqual(v.Stations, stations) {
		t.Errorf("stations %+v, want %+v", v.Stations, stations)
	}
	base := Channel{Network: "XX", Station: "CULM", Location: "00", Code: "HNE", SiteName: "Culmination Reef", Latitude: 30.5, Longitude: 149.75, ElevationM: 12}
	first, second, third := base, base, base
	first.Start, first.End = day(2035, 1, 1, 0), day(2038, 6, 30, 12)
	first.AzimuthDeg, first.DipDeg, first.RateHz = known(90), known(0), 100
	first.Sensitivity = &Sensitivity{213000, 1, "m/s**2", "counts"}
	second.Start = first.End
	second.Latitude, second.Longitude, second.ElevationM, second.DepthM = 30.5001, 149.7501, 10, 2
	second.AzimuthDeg, second.DipDeg, second.RateHz = known(93), known(-1.5), 200
	second.Sensitivity = &Sensitivity{-428000.5, 1, "M/S**2", "counts"}
	second.StageGain = -1.02
	second.StageGain *= 419608
	third.Location, third.Code, third.Polynomial = "", "HNZ", true
	if want := []Channel{first, second, third}; !reflect.DeepEqual(v.Channels, want) {
		t.Errorf("channels %+v, want %+v", v.Channels, want)
	}
}

func TestReadEvents(t *testing.T) {
	events, err := ReadEvents(read(t, "events.xml"))
	if err != nil {
		t.Fatal(err)
	}
	want := []Event{
		{
			PublicID: "smi:example.org/event/sb2041eswk", Code: "2041eswk", Type: "earthquake", Name: "Culmination Reef",
			Origin: day(2041, 3, 4, 8).Add(12*time.Minute + 250*time.Millisecond), Latitude: 30.125, Longitude: 150.25,
			DepthM: known(25000), Magnitude: known(5.7), MagnitudeType: "Mw",
		},
		{
			PublicID: "smi:example.org/event/second", Origin: day(2041, 3, 4, 22).Add(time.Second), Latitude: -3.1, Longitude: 10.1,
			Magnitude: known(4.3), MagnitudeType: "Mwr",
			Warnings: []string{
				"of 2 origins none is preferred: the newest taken, manual ones first",
				"of 2 magnitudes none is preferred: a moment magnitude taken, else the first",
			},
		},
		{
			PublicID: "smi:example.org/event/third", Type: "quarry blast", Origin: day(2041, 3, 7, 10), Latitude: 1, Longitude: 2,
			Warnings: []string{"the preferred origin is not in the document"},
		},
	}
	if !reflect.DeepEqual(events, want) {
		t.Errorf("events %+v, want %+v", events, want)
	}
	realtime := bytes.ReplaceAll(read(t, "events.xml"), []byte("xmlns/bed/1.2"), []byte("xmlns/bed-rt/1.2"))
	if again, err := ReadEvents(realtime); err != nil || !reflect.DeepEqual(again, want) {
		t.Errorf("in the namespace bed-rt: %d events, %v", len(again), err)
	}
}

func TestKind(t *testing.T) {
	for want, texts := range map[string][]string{
		Stations: {string(read(t, "station.xml")), "\ufeff" + string(read(t, "station.xml")), " \n<FDSNStationXML>"},
		Events:   {string(read(t, "events.xml"))},
		"":       {"", "plain text", "<html><FDSNStationXML/></html>", "<?xml version='1.0'?>", "<FDSN", "\x00\x01"},
	} {
		for _, text := range texts {
			if got := Kind([]byte(text)); got != want {
				t.Errorf("Kind(%.30q) = %q, want %q", text, got, want)
			}
		}
	}
}

func TestLookup(t *testing.T) {
	v, err := ReadStations(read(t, "station.xml"))
	if err != nil {
		t.Fatal(err)
	}
	const both = ": from 2035-01-01T00:00:00Z to 2038-06-30T12:00:00Z, from 2038-06-30T12:00:00Z on"
	change := day(2038, 6, 30, 12)
	cases := []struct {
		name, location, code string
		from, to             time.Time
		rate                 float64
		err                  string
	}{
		{"first epoch", "00", "HNE", day(2036, 1, 1, 0), day(2036, 1, 1, 1), 100, ""},
		{"up to its end", "00", "HNE", change.Add(-time.Hour), change, 100, ""},
		{"second epoch", "00", "HNE", change.Add(1), day(2600, 1, 1, 0), 200, ""},
		{"epochs without dates", "--", "HNZ", day(1990, 1, 1, 0), day(2041, 1, 1, 0), 0, ""},
		{"change", "00", "HNE", change.Add(-time.Hour), change.Add(time.Hour), 0, "the epoch changes between 2038-06-30T11:00:00Z and 2038-06-30T13:00:00Z" + both},
		{"before", "00", "HNE", day(2030, 1, 1, 0), day(2030, 1, 1, 1), 0, "no epoch covers 2030-01-01T00:00:00Z" + both},
		{"other location", "10", "HNE", day(2036, 1, 1, 0), day(2036, 1, 1, 1), 0, ErrUnknown.Error()},
		{"other channel", "00", "HNN", day(2036, 1, 1, 0), day(2036, 1, 1, 1), 0, ErrUnknown.Error()},
		{"two epochs", "00", "HNE", change, change, 0, "more than one epoch covers 2038-06-30T12:00:00Z" + both},
	}
	for _, k := range cases {
		c, err := v.Lookup("XX", "CULM", k.location, k.code, k.from, k.to)
		if k.err != "" {
			if err == nil || err.Error() != k.err {
				t.Errorf("%s: error %v, want %q", k.name, err, k.err)
			}
			continue
		}
		if err != nil || c.RateHz != k.rate {
			t.Errorf("%s: %+v, %v, want the epoch of %g Hz", k.name, c, err, k.rate)
		}
	}
}

func TestMergeAndSite(t *testing.T) {
	v, _ := ReadStations(read(t, "station.xml"))
	again, _ := ReadStations(read(t, "station.xml"))
	v.Merge(again)
	if len(v.Channels) != 3 || len(v.Stations) != 1 {
		t.Errorf("%d channels and %d stations after the same document twice, want 3 and 1", len(v.Channels), len(v.Stations))
	}
	if s, ok := v.Site("XX", "CULM", time.Time{}); !ok || s.Latitude != 30.5 {
		t.Errorf("Site = %+v, %v", s, ok)
	}
	for _, miss := range []struct {
		network, code string
		at            time.Time
	}{{"YY", "CULM", time.Time{}}, {"XX", "CUL", time.Time{}}, {"XX", "CULM", day(2030, 1, 1, 0)}} {
		if s, ok := v.Site(miss.network, miss.code, miss.at); ok {
			t.Errorf("Site(%v) = %+v, want none", miss, s)
		}
	}
	moved, _ := ReadStations(bytes.Replace(read(t, "station.xml"), []byte(">30.5<"), []byte(">31.5<"), 1))
	v.Merge(moved)
	if s, ok := v.Site("XX", "CULM", time.Time{}); ok || len(v.Stations) != 2 {
		t.Errorf("of two places Site gives %+v", s)
	}
}

// TestRefusals compares whole messages.
func TestRefusals(t *testing.T) {
	stations, events := string(read(t, "station.xml")), string(read(t, "events.xml"))
	change := func(text, old, new string) string {
		if !strings.Contains(text, old) {
			t.Fatalf("no %q to damage", old)
		}
		return strings.Replace(text, old, new, 1)
	}
	stationsOf := func(text string) error { _, err := ReadStations([]byte(text)); return err }
	eventsOf := func(text string) error { _, err := ReadEvents([]byte(text)); return err }
	cases := []struct {
		name, text, want string
		read             func(string) error
	}{
		{"document type", change(stations, "<!--", `<!DOCTYPE a [<!ENTITY b "c">]><!--`), "line 2: the document declares a type or entities, which is refused", stationsOf},
		{"document type inside", change(stations, "<Site>", `<!DOCTYPE a><Site>`), "line 12: the document declares a type or entities, which is refused", stationsOf},
		{"entity", change(stations, "Culmination Reef", "&reef;"), "line 12: invalid character entity &reef;", stationsOf},
		{"truncated", stations[:1500], "line 25: unexpected EOF", stationsOf},
		{"empty", "", "line 1: no root element FDSNStationXML of the namespace http://www.fdsn.org/xml/station/1", stationsOf},
		{"other root", events, "line 37: no root element FDSNStationXML of the namespace http://www.fdsn.org/xml/station/1", stationsOf},
		{"number", change(stations, "213000", "many"), `line 17: Value: expected a number, found "many"`, stationsOf},
		{"not finite", change(stations, "213000", "NaN"), `line 17: Value: expected a number, found "NaN"`, stationsOf},
		{"latitude", change(stations, ">30.5001<", ">300.5<"), "line 35: channel XX.CULM.00.HNE: latitude 300.5 is outside -90 to 90", stationsOf},
		{"no longitude", change(stations, "<Longitude>149.75</Longitude>\n", "\n"), "line 40: station XX.CULM: no latitude or no longitude", stationsOf},
		{"epoch", change(stations, "2038-06-30T12:00:00", "2034-06-30T12:00:00"), "line 20: channel XX.CULM.00.HNE: endDate 2034-06-30T12:00:00 is before startDate 2035-01-01T00:00:00", stationsOf},
		{"date", change(stations, "2038-06-30T12:00:00", "June"), `line 20: channel XX.CULM.00.HNE: endDate: expected a time, found "June"`, stationsOf},
		{"dip", change(stations, ">-1.5<", ">-91.5<"), "line 35: channel XX.CULM.00.HNE: dip -91.5 is outside -90 to 90", stationsOf},
		{"deep", change(stations, "<Site>", strings.Repeat("<Site>", 60)), "line 12: elements are nested deeper than 40", stationsOf},
		{"junk behind", stations + "<", "line 43: unexpected EOF", stationsOf},
		{"depth", change(events, "25000", "900000"), "line 21: event smi:example.org/event/sb2041eswk: depth in m 900000 is outside -10000 to 800000", eventsOf},
		{"longitude", change(events, "150.25", "350.25"), "line 21: event smi:example.org/event/sb2041eswk: longitude 350.25 is outside -180 to 180", eventsOf},
		{"no origin", change(change(events, `<origin publicID="c">`, `<focus publicID="c">`), "</origin>\n    </event>\n  </eventP", "</focus>\n    </event>\n  </eventP"), "line 34: event smi:example.org/event/third: no origin", eventsOf},
		{"no time", change(events, "2041-03-07T10:00:00Z", ""), "line 34: event smi:example.org/event/third: its origin has no time", eventsOf},
		{"time", change(events, "2041-03-07T10:00:00Z", "noon"), `line 34: event smi:example.org/event/third: expected a time, found "noon"`, eventsOf},
		{"magnitude", change(events, ">4.3<", ">43<"), "line 29: event smi:example.org/event/second: magnitude 43 is outside -3 to 11", eventsOf},
	}
	for _, k := range cases {
		err := k.read(k.text)
		if e := new(Error); err == nil || err.Error() != k.want || !errors.As(err, &e) {
			t.Errorf("%s: error %v, want %q", k.name, err, k.want)
		}
	}
}

func FuzzReadStations(f *testing.F) {
	f.Add(read(f, "station.xml"))
	f.Fuzz(func(t *testing.T, data []byte) {
		before := bytes.Clone(data)
		v, err := ReadStations(data)
		if !bytes.Equal(data, before) {
			t.Error("ReadStations changed its input")
		}
		if err != nil {
			checkError(t, err, data)
			return
		}
		for _, c := range v.Channels {
			if !(c.Latitude >= -90 && c.Latitude <= 90 && c.Longitude >= -180 && c.Longitude <= 180) {
				t.Fatalf("channel at %g, %g", c.Latitude, c.Longitude)
			}
			if a := c.AzimuthDeg; a != nil && !(*a >= 0 && *a < 360) {
				t.Fatalf("azimuth %g", *a)
			}
			if !c.End.IsZero() && c.End.Before(c.Start) {
				t.Fatalf("epoch from %v to %v", c.Start, c.End)
			}
			if _, err := v.Lookup(c.Network, c.Station, c.Location, c.Code, c.Start, c.Start); errors.Is(err, ErrUnknown) {
				t.Fatalf("channel %+v is not found by its own codes", c)
			}
		}
		size := len(v.Channels)
		again, _ := ReadStations(data)
		if v.Merge(again); len(v.Channels) != size {
			t.Fatalf("%d channels after merging %d with themselves", len(v.Channels), size)
		}
	})
}

func FuzzReadEvents(f *testing.F) {
	f.Add(read(f, "events.xml"))
	f.Fuzz(func(t *testing.T, data []byte) {
		events, err := ReadEvents(data)
		if err != nil {
			checkError(t, err, data)
			return
		}
		for _, e := range events {
			if e.Origin.IsZero() || !(e.Latitude >= -90 && e.Latitude <= 90 && e.Longitude >= -180 && e.Longitude <= 180) {
				t.Fatalf("event %+v", e)
			}
			if d := e.DepthM; d != nil && !(*d >= minDepthM && *d <= maxDepthM) {
				t.Fatalf("depth %g m", *d)
			}
		}
	})
}

func checkError(t *testing.T, err error, data []byte) {
	t.Helper()
	e := new(Error)
	if !errors.As(err, &e) || e.Line < 1 || e.Line > 1+bytes.Count(data, []byte("\n")) {
		t.Fatalf("error of type %T: %v", err, err)
	}
}
