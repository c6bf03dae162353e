package fdsnxml

import (
	"bytes"
	"context"
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"
	"unicode/utf16"
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

func known(v float64) Number { return Number{v, true} }

func TestReadStations(t *testing.T) {
	v, err := ReadStations(t.Context(), read(t, "station.xml"))
	if err != nil {
		t.Fatal(err)
	}
	stations := []Station{{"XX", "CULM", "Culmination Reef", known(30.5), known(149.75), known(12), day(2035, 1, 1, 0), time.Time{}}}
	if !reflect.DeepEqual(v.Stations, stations) {
		t.Errorf("stations %+v, want %+v", v.Stations, stations)
	}
	base := Channel{Network: "XX", Station: "CULM", Location: "00", Code: "HNE", SiteName: "Culmination Reef", Latitude: known(30.5), Longitude: known(149.75), ElevationM: known(12)}
	first, second, third := base, base, base
	first.Line, second.Line, third.Line = 13, 21, 36
	first.Start, first.End = day(2035, 1, 1, 0), day(2038, 6, 30, 12)
	first.AzimuthDeg, first.DipDeg, first.RateHz = known(90), known(0), 100
	first.Sensitivity = Sensitivity{known(213000), "m/s**2", "counts"}
	second.Start = first.End
	second.Latitude, second.Longitude, second.ElevationM, second.DepthM = known(30.5001), known(149.7501), known(10), 2
	second.AzimuthDeg, second.DipDeg, second.RateHz = known(93), known(-1.5), 200
	second.Sensitivity = Sensitivity{known(-428000.5), "M/S**2", "counts"}
	second.StageGain = -1.02
	second.StageGain *= 419608
	third.Location, third.Code, third.Polynomial = "", "HNZ", true
	if len(v.Notes) > 0 {
		t.Errorf("notes %v", v.Notes)
	}
	if want := []Channel{first, second, third}; !reflect.DeepEqual(v.Channels, want) {
		t.Errorf("channels %+v, want %+v", v.Channels, want)
	}
}

func TestReadEvents(t *testing.T) {
	events, left, err := ReadEvents(t.Context(), read(t, "events.xml"))
	if err != nil || len(left) > 0 {
		t.Fatal(left, err)
	}
	want := []Event{
		{
			PublicID: "smi:example.org/event/sb2041eswk", Code: "2041eswk", Name: "Culmination Reef",
			Origin: day(2041, 3, 4, 8).Add(12*time.Minute + 250*time.Millisecond), Latitude: 30.125, Longitude: 150.25,
			DepthM: known(25000), Magnitude: known(5.7), MagnitudeType: "Mw", Line: 5,
		},
		{
			PublicID: "smi:example.org/event/second", Origin: day(2041, 3, 4, 22).Add(time.Second), Latitude: -3.1, Longitude: 10.1,
			Magnitude: known(4.3), MagnitudeType: "Mwr", Line: 22, Created: day(2041, 3, 5, 0),
			Warnings: []string{
				"of 2 origins none is preferred: the newest taken, manual ones first",
				"of 2 magnitudes none is preferred: a moment magnitude taken, else the first",
			},
		},
		{
			PublicID: "smi:example.org/event/third", Origin: day(2041, 3, 7, 10), Latitude: 1, Longitude: 2, Line: 30,
			Warnings: []string{"the preferred origin is not in the document"},
		},
	}
	if !reflect.DeepEqual(events, want) {
		t.Errorf("events %+v, want %+v", events, want)
	}
	realtime := bytes.ReplaceAll(read(t, "events.xml"), []byte("xmlns/bed/1.2"), []byte("xmlns/bed-rt/1.2"))
	if again, _, err := ReadEvents(t.Context(), realtime); err != nil || !reflect.DeepEqual(again, want) {
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
	v, err := ReadStations(t.Context(), read(t, "station.xml"))
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
		{"two epochs", "00", "HNE", change, change, 0, ":13 and :21 say sensitivity 213000 counts per m/s**2 / -428000.5 counts per m/s**2; azimuth 90° / 93°; dip 0° / -1.5°; sample rate 100 Hz / 200 Hz"},
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
	v, _ := ReadStations(t.Context(), read(t, "station.xml"))
	again, _ := ReadStations(t.Context(), read(t, "station.xml"))
	v.Merge(again, "b.xml")
	if len(v.Channels) != 3 || len(v.Stations) != 1 {
		t.Errorf("%d channels and %d stations after the same document twice, want 3 and 1", len(v.Channels), len(v.Stations))
	}
	if s, ok := v.Site("XX", "CULM", time.Time{}); !ok || s.Latitude != known(30.5) {
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
	higher, _ := ReadStations(t.Context(), []byte(`<FDSNStationXML><Network code="XX"><Station code="CULM" startDate="2039-01-01">`+
		`<Latitude>30.5003</Latitude><Longitude>149.7503</Longitude><Elevation>42</Elevation></Station></Network></FDSNStationXML>`))
	v.Merge(higher, "b.xml")
	if s, ok := v.Site("XX", "CULM", time.Time{}); !ok || s.Latitude != known(30.5003) || s.ElevationM.Known || s.Name == "" {
		t.Errorf("of two elevations at one place Site gives %+v, %v", s, ok)
	}
	moved, _ := ReadStations(t.Context(), bytes.Replace(read(t, "station.xml"), []byte(">30.5<"), []byte(">31.5<"), 1))
	v.Merge(moved, "c.xml")
	if s, ok := v.Site("XX", "CULM", time.Time{}); ok || len(v.Stations) != 3 {
		t.Errorf("of two places Site gives %+v", s)
	}
}

// damaged returns a document in which old is replaced.
func damaged(t *testing.T, name string, replace ...string) []byte {
	t.Helper()
	text := string(read(t, name))
	for i := 0; i < len(replace); i += 2 {
		if !strings.Contains(text, replace[i]) {
			t.Fatalf("no %q to damage", replace[i])
		}
		text = strings.Replace(text, replace[i], replace[i+1], 1)
	}
	return []byte(text)
}

// encoded returns a document in another encoding, and declares it: bytes for the
// characters of Windows-1252 or of ISO-8859-1, or, for UTF-16, units behind the mark.
func encoded(t testing.TB, text, declared string, order binary.AppendByteOrder) []byte {
	t.Helper()
	text = strings.Replace(text, `encoding="UTF-8"`, `encoding="`+declared+`"`, 1)
	if order != nil {
		out := order.AppendUint16(nil, 0xfeff)
		for _, u := range utf16.Encode([]rune(text)) {
			out = order.AppendUint16(out, u)
		}
		return out
	}
	var out []byte
	for _, r := range text {
		switch {
		case r < 0x100:
			out = append(out, byte(r))
		case r == '–': // U+2013, by the table of Windows-1252
			out = append(out, 0x96)
		case r == '€':
			out = append(out, 0x80)
		default:
			t.Fatalf("no byte for %q", r)
		}
	}
	return out
}

// TestEncodings reads the same of a document in every encoding that is read, and
// names the others.
func TestEncodings(t *testing.T) {
	station := string(damaged(t, "station.xml", "Culmination Reef", "Überfluß – Cañón"))
	event := strings.Replace(string(read(t, "events.xml")), "<q:quakeml", "<!-- Größe –€ -->\n<q:quakeml", 1)
	wantStations, err := ReadStations(t.Context(), []byte(station))
	if err != nil || wantStations.Stations[0].Name != "Überfluß – Cañón" {
		t.Fatal(err, wantStations)
	}
	wantEvents, _, err := ReadEvents(t.Context(), []byte(event))
	if err != nil {
		t.Fatal(err)
	}
	const other = ` is not read (UTF-8, ISO-8859-1, Windows-1252 and, with a byte order mark, UTF-16 are): save it as UTF-8`
	little, big := binary.LittleEndian, binary.BigEndian
	for _, k := range []struct {
		declared string
		order    binary.AppendByteOrder
		prefix   string
		want     string // the error
	}{
		{declared: "windows-1252"}, {declared: "Windows-1252"}, {declared: "ISO-8859-1"}, {declared: "iso-8859-1"}, {declared: "latin1"}, {declared: "CP1252"},
		{declared: "UTF-16", order: little}, {declared: "UTF-16", order: big}, {declared: "utf-16le", order: little}, {declared: "UTF-8", order: little},
		{declared: "ISO-8859-2", want: `line 1: encoding "ISO-8859-2"` + other},
		{declared: "Shift_JIS", want: `line 1: encoding "Shift_JIS"` + other},
		{declared: "UTF-32", want: `line 1: encoding "UTF-32"` + other},
		{declared: "UTF-16", want: `line 1: declares the encoding "UTF-16" and has no byte order mark: save it as UTF-8`},
		{declared: "ISO-8859-1", order: big, want: `line 1: declares the encoding "ISO-8859-1" and begins with the byte order mark of UTF-16`},
		{declared: "ISO-8859-1", prefix: "\xef\xbb\xbf", want: `line 1: declares the encoding "ISO-8859-1" and begins with the byte order mark of UTF-8`},
	} {
		prepared := func(text string) []byte { return append([]byte(k.prefix), encoded(t, text, k.declared, k.order)...) }
		name := fmt.Sprint(k.declared, " ", k.order)
		stations, err := ReadStations(t.Context(), prepared(station))
		if k.want != "" && (err == nil || err.Error() != k.want) || k.want == "" && (err != nil || !reflect.DeepEqual(stations, wantStations)) {
			t.Errorf("%s: stations %v, want %s", name, err, k.want)
		}
		events, _, err := ReadEvents(t.Context(), prepared(event))
		if k.want != "" && (err == nil || err.Error() != k.want) || k.want == "" && (err != nil || !reflect.DeepEqual(events, wantEvents)) {
			t.Errorf("%s: events %v, want %s", name, err, k.want)
		}
		// Whatever the encoding, a document is known for what it is.
		if a, b := Kind(prepared(station)), Kind(prepared(event)); a != Stations || b != Events {
			t.Errorf("%s: kinds %q and %q", name, a, b)
		}
	}
}

// TestEncodedBounds holds documents in other encodings to what holds for those in
// UTF-8.
func TestEncodedBounds(t *testing.T) {
	for _, k := range []struct{ name, old, by, want string }{
		{"document type", "<!--", `<!DOCTYPE a [<!ENTITY b "c">]><!--`, "line 2: the document declares a type or entities, which is refused"},
		{"deep", "<Site>", strings.Repeat("<Site>", 60), "line 12: elements are nested deeper than 40"},
		{"declared twice", "<Site>", `<?xml version="1.0" encoding="latin1"?><Site>`, "line 12: the encoding is declared twice"},
		{"number", "<Latitude>", "<Latitude>–", ""},
	} {
		text := string(damaged(t, "station.xml", k.old, k.by))
		for _, data := range [][]byte{encoded(t, text, "ISO-8859-1", nil), encoded(t, text, "UTF-16", binary.LittleEndian)} {
			v, err := ReadStations(t.Context(), data)
			if k.want == "" && (err != nil || len(v.Notes) != 1) || k.want != "" && (err == nil || err.Error() != k.want) {
				t.Errorf("%s: error %v, want %q", k.name, err, k.want)
			}
		}
	}
	// Declarations in a row would each wrap what reads the one before.
	many := []byte(strings.Repeat(`<?xml version="1.0" encoding="latin1"?>`, 10_000))
	checkHeld(t, many, func() any { v, _ := ReadStations(t.Context(), many); return v })
	checkHeld(t, many, func() any { return Kind(many) })
	if Kind(many) != "" {
		t.Error("declarations alone are a document")
	}
}

// TestRefusals compares whole messages of documents that are refused.
func TestRefusals(t *testing.T) {
	stations, events := read(t, "station.xml"), read(t, "events.xml")
	change := func(replace ...string) []byte { return damaged(t, "station.xml", replace...) }
	cases := []struct {
		name string
		text []byte
		want string
	}{
		{"document type", change("<!--", `<!DOCTYPE a [<!ENTITY b "c">]><!--`), "line 2: the document declares a type or entities, which is refused"},
		{"document type inside", change("<Site>", `<!DOCTYPE a><Site>`), "line 12: the document declares a type or entities, which is refused"},
		{"entity", change("Culmination Reef", "&reef;"), "line 12: invalid character entity &reef;"},
		{"truncated", stations[:1500], "line 25: unexpected EOF"},
		{"empty", nil, "line 1: no root element FDSNStationXML of the namespace http://www.fdsn.org/xml/station/1"},
		{"other root", events, "line 37: no root element FDSNStationXML of the namespace http://www.fdsn.org/xml/station/1"},
		{"deep", change("<Site>", strings.Repeat("<Site>", 60)), "line 12: elements are nested deeper than 40"},
		{"junk behind", append(bytes.Clone(stations), '<'), "line 43: unexpected EOF"},
	}
	for _, k := range cases {
		_, err := ReadStations(t.Context(), k.text)
		if e := new(Error); err == nil || err.Error() != k.want || !errors.As(err, &e) {
			t.Errorf("%s: error %v, want %q", k.name, err, k.want)
		}
	}
}

// TestLeftOut damages one element and finds the others, and what was noted.
func TestLeftOut(t *testing.T) {
	for _, k := range []struct {
		name     string
		replace  []string
		want     string
		stations int
		channels int
	}{
		{"number", []string{"213000", "many"}, `13 channel XX.CULM.00.HNE: Value: expected a number, found "many": left out`, 1, 2},
		{"not finite", []string{"213000", "NaN"}, `13 channel XX.CULM.00.HNE: Value: expected a number, found "NaN": left out`, 1, 2},
		{"gain", []string{"419608", "x"}, `21 channel XX.CULM.00.HNE: Value: expected a number, found "x": left out`, 1, 2},
		{"epoch", []string{"2038-06-30T12:00:00", "2034-06-30T12:00:00"}, "13 channel XX.CULM.00.HNE: endDate 2034-06-30T12:00:00 is before startDate 2035-01-01T00:00:00: left out", 1, 2},
		{"date", []string{"2038-06-30T12:00:00", "June"}, `13 channel XX.CULM.00.HNE: endDate: expected a time, found "June": left out`, 1, 2},
		{"dip", []string{">-1.5<", ">-91.5<"}, "21 channel XX.CULM.00.HNE: dip -91.5 is outside -90 to 90: left out", 1, 2},
		{"channel without coordinates", []string{"<Longitude>149.7501</Longitude><Latitude>30.5001</Latitude>", ""}, "21 channel XX.CULM.00.HNE: no latitude or no longitude: left out", 1, 2},
		{"station without longitude", []string{"<Longitude>149.75</Longitude>\n", "\n"}, "7 station XX.CULM: no latitude or no longitude: left out", 0, 3},
		{"elevation of a station", []string{"<Elevation>12<", "<Elevation>high<"}, `7 station XX.CULM: Elevation: expected a number, found "high": left out`, 0, 3},
		{"latitude", []string{">30.5001<", ">300.5<"}, "21 channel XX.CULM.00.HNE: latitude 300.5 is outside -90 to 90: position taken as unknown", 1, 3},
		{"zeros", []string{">30.5<", ">0<", ">149.75<", ">0.0<"}, "7 station XX.CULM: latitude and longitude are 0: position taken as unknown", 1, 3},
		{"all the way round", []string{">149.75<", ">200.25<"}, "", 1, 3},
	} {
		v, err := ReadStations(t.Context(), damaged(t, "station.xml", k.replace...))
		if err != nil || len(v.Stations) != k.stations || len(v.Channels) != k.channels || listed(v.Notes) != k.want {
			t.Errorf("%s: %+v, %v; want %q, %d stations and %d channels", k.name, v, err, k.want, k.stations, k.channels)
			continue
		}
		for _, s := range v.Stations {
			if want := map[string]Number{"zeros": {}, "all the way round": known(-159.75)}[k.name]; s.Longitude != want && s.Longitude != known(149.75) {
				t.Errorf("%s: longitude %v", k.name, s.Longitude)
			}
		}
	}
	const second, third = "22 event smi:example.org/event/second: ", "30 event smi:example.org/event/third: "
	for _, k := range []struct {
		name    string
		replace []string
		want    string
	}{
		{"no origin", []string{`<origin publicID="c">`, `<focus publicID="c">`, "</origin>\n    </event>\n  </eventP", "</focus>\n    </event>\n  </eventP"}, third + "no origin: left out"},
		{"no time", []string{"2041-03-07T10:00:00Z", ""}, third + "its origin has no time: left out"},
		{"time", []string{"2041-03-07T10:00:00Z", "noon"}, third + `expected a time, found "noon": left out`},
		{"no latitude", []string{"<latitude><value>1</value></latitude>", ""}, third + "no latitude or no longitude: left out"},
		{"zeros", []string{"<value>1</value>", "<value>0</value>", "<value>2</value>", "<value>0</value>"}, third + "latitude and longitude are 0: left out"},
		{"longitude", []string{"<value>2</value>", "<value>362</value>"}, third + "longitude 362 is outside -180 to 180: left out"},
		{"magnitude", []string{">4.3<", ">big<"}, second + `value: expected a number, found "big": left out`},
		{"none", []string{"quarry blast", "not existing"}, third + `its type is "not existing": left out`},
		{"nowhere", []string{"quarry blast", "not locatable"}, third + `its type is "not locatable": left out`},
	} {
		events, left, err := ReadEvents(t.Context(), damaged(t, "events.xml", k.replace...))
		stand := slices.DeleteFunc(events, func(e Event) bool { return e.Withdrawn })
		if err != nil || len(stand) != 2 || listed(left) != k.want {
			t.Errorf("%s: %d events, %v, %v; want 2, %q", k.name, len(stand), left, err, k.want)
		}
	}
}

func listed(notes []Note) string {
	var texts []string
	for _, n := range notes {
		texts = append(texts, fmt.Sprintf("%d %s", n.Line, n.Text))
	}
	return strings.Join(texts, "\n")
}

// A run that is stopped ends within a document.
func TestStopped(t *testing.T) {
	ctx, stop := context.WithCancel(t.Context())
	stop()
	stations := manyChannels(1000)
	events := manyEvents(1000)
	if _, err := ReadStations(ctx, stations); !errors.Is(err, context.Canceled) {
		t.Errorf("ReadStations: %v", err)
	}
	if _, _, err := ReadEvents(ctx, events); !errors.Is(err, context.Canceled) {
		t.Errorf("ReadEvents: %v", err)
	}
}

func FuzzReadStations(f *testing.F) {
	f.Add(read(f, "station.xml"))
	f.Add(encoded(f, string(read(f, "station.xml")), "windows-1252", nil))
	f.Add(encoded(f, string(read(f, "station.xml")), "UTF-16", binary.LittleEndian))
	f.Fuzz(func(t *testing.T, data []byte) {
		before := bytes.Clone(data)
		var v *Inventory
		var err error
		checkHeld(t, data, func() any { v, err = ReadStations(t.Context(), data); return v })
		if !bytes.Equal(data, before) {
			t.Error("ReadStations changed its input")
		}
		if err != nil {
			checkError(t, err, data)
			return
		}
		checkNotes(t, v.Notes, data)
		for _, c := range v.Channels {
			if lat, lon := c.Latitude, c.Longitude; !(math.Abs(lat.Value) <= 90 && math.Abs(lon.Value) <= 180) || lat.Known != lon.Known {
				t.Fatalf("channel at %v, %v", lat, lon)
			}
			if a := c.AzimuthDeg.Value; !(a >= 0 && a < 360) {
				t.Fatalf("azimuth %g", a)
			}
			if !c.End.IsZero() && c.End.Before(c.Start) {
				t.Fatalf("epoch from %v to %v", c.Start, c.End)
			}
			if _, err := v.Lookup(c.Network, c.Station, c.Location, c.Code, c.Start, c.Start); errors.Is(err, ErrUnknown) {
				t.Fatalf("channel %+v is not found by its own codes", c)
			}
		}
		size := len(v.Channels)
		again, _ := ReadStations(t.Context(), data)
		if v.Merge(again, "b.xml"); len(v.Channels) != size {
			t.Fatalf("%d channels after merging %d with themselves", len(v.Channels), size)
		}
	})
}

func FuzzReadEvents(f *testing.F) {
	f.Add(read(f, "events.xml"))
	f.Add(encoded(f, string(read(f, "events.xml")), "ISO-8859-1", nil))
	f.Add(encoded(f, string(read(f, "events.xml")), "UTF-16", binary.BigEndian))
	f.Fuzz(func(t *testing.T, data []byte) {
		var events []Event
		var left []Note
		var err error
		checkHeld(t, data, func() any { events, left, err = ReadEvents(t.Context(), data); return events })
		if err != nil {
			checkError(t, err, data)
			return
		}
		for _, e := range events {
			if e.Origin.IsZero() || !(e.Latitude >= -90 && e.Latitude <= 90 && e.Longitude >= -180 && e.Longitude <= 180) {
				t.Fatalf("event %+v", e)
			}
		}
		checkNotes(t, left, data)
	})
}

func checkError(t *testing.T, err error, data []byte) {
	t.Helper()
	e := new(Error)
	if !errors.As(err, &e) || e.Line < 1 || e.Line > 1+bytes.Count(data, []byte("\n")) {
		t.Fatalf("error of type %T: %v", err, err)
	}
}

func checkNotes(t *testing.T, notes []Note, data []byte) {
	t.Helper()
	for _, n := range notes {
		if n.Line < 1 || n.Line > 1+bytes.Count(data, []byte("\n")) || n.Text == "" {
			t.Fatalf("note %+v", n)
		}
	}
}

// A version dates from what the event says, else from its origin; a text that is no time
// loses no event.
func TestCreated(t *testing.T) {
	const origin = `<origin><time><value>2041-03-04T08:12:00Z</value></time><latitude><value>1</value></latitude><longitude><value>2</value></longitude>%s</origin>`
	const info = "<creationInfo><creationTime>%s</creationTime></creationInfo>"
	for _, test := range []struct {
		event, origin string
		want          time.Time
	}{
		{"2041-03-06T00:00:00Z", "2041-03-05T00:00:00Z", day(2041, 3, 6, 0)},
		{"soon", "2041-03-05T01:00:00+01:00", day(2041, 3, 5, 0)},
		{"", "", time.Time{}},
	} {
		text := `<quakeml xmlns="http://quakeml.org/xmlns/bed/1.2"><eventParameters><event publicID="a">` +
			fmt.Sprintf(info, test.event) + fmt.Sprintf(origin, fmt.Sprintf(info, test.origin)) + `</event></eventParameters></quakeml>`
		events, left, err := ReadEvents(t.Context(), []byte(text))
		if err != nil || len(left) > 0 || len(events) != 1 || !events[0].Created.Equal(test.want) {
			t.Errorf("%q, %q: %+v, %v, %v", test.event, test.origin, events, left, err)
		}
	}
}
