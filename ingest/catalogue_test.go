package ingest

import (
	"bytes"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"reflect"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"
)

func openCatalogue(t testing.TB, name string) (*Catalogue, error) {
	t.Helper()
	f, err := os.Open(filepath.Join("..", "testdata", "catalogue", name))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	return ReadCatalogue(name, f)
}

// catalogueOf reads a catalogue of a header and rows.
func catalogueOf(t testing.TB, lines ...string) *Catalogue {
	t.Helper()
	c, err := ReadCatalogue("c.csv", strings.NewReader(strings.Join(lines, "\n")))
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func TestCatalogueFixture(t *testing.T) {
	c, err := openCatalogue(t, "catalogue.csv")
	if err != nil || len(c.UnknownColumns) != 0 {
		t.Fatalf("%v, unknown columns %v", err, c)
	}
	const rel = "plain/silent.txt"
	hints := c.Hints(rel, Hints{Unit: "gal", UnitFrom: "--unit"})
	if want := (Hints{Unit: "g", UnitFrom: "catalogue line 3", StepS: 0.01, StepFrom: "catalogue line 3"}); !reflect.DeepEqual(hints, want) {
		t.Errorf("Hints = %+v, want %+v", hints, want)
	}
	ch := readFixture(t, "plain", "silent.txt", hints)
	if _, ok := c.Apply(rel, &ch); !ok {
		t.Error("Apply fitted no row")
	}
	event := Event{ID: "nwt2041", Name: "Northwater", Origin: time.Date(2041, 3, 3, 23, 12, 0, 0, time.UTC), Latitude: Known(30.125), Longitude: Known(150.25),
		DepthKM: Known(24), Magnitude: Known(5.8), MagnitudeType: "Mw"}
	if ch.Event != event {
		t.Errorf("event %+v, want %+v", ch.Event, event)
	}
	if ch.DistanceKM != Known(61.5) || ch.Siting != SitingGround || ch.Station.Code != "CDH9" || ch.Orientation.Label != "NS" {
		t.Errorf("distance %+v (the file's row before the pair's), siting %s, station %+v, orientation %+v", ch.DistanceKM, ch.Siting, ch.Station, ch.Orientation)
	}
	if got := c.Unmatched(); !slices.Equal(got, []int{4, 5, 7}) {
		t.Errorf("Unmatched = %v, want lines 4, 5 and 7", got)
	}
	at := readFixture(t, "at2", "NWT_CDH000.AT2", Hints{})
	c.Apply("at2/NWT_CDH000.AT2", &at)
	if id, _ := RecordID(&at, ""); id != "nwt2041_CDH" || at.Station.Vs30 != Known(410) || at.DistanceKM != Known(58.25) || at.Siting != SitingFreeField {
		t.Errorf("%s, %+v, distance %+v, siting %s", id, at.Station, at.DistanceKM, at.Siting)
	}
	if got := c.Unmatched(); !slices.Equal(got, []int{5}) {
		t.Errorf("Unmatched = %v, want line 5", got)
	}
}

func TestCatalogueSemicolons(t *testing.T) {
	_, err := openCatalogue(t, "semicolons.csv")
	if err != nil {
		t.Fatalf("an unknown column is read: %v", err)
	}
	c, _ := openCatalogue(t, "semicolons.csv")
	if got := fmt.Sprint(c.UnknownColumns); got != "[magnitud (did you mean magnitude?)]" {
		t.Errorf("unknown columns %s", got)
	}
	if h := c.Hints("deep/down/silent.txt", Hints{}); h.Unit != "m/s^2" || h.StepS != 0.02 {
		t.Errorf("Hints = %+v", h)
	}
}

// TestCatalogueDecimalCommas has what spreadsheets write where the comma is the
// decimal mark: in files with semicolons alone, in numbers alone, and never beside
// a point, since one of the two would stand between thousands.
func TestCatalogueDecimalCommas(t *testing.T) {
	c := catalogueOf(t, "# Ereignisse; erfunden, alle", "file;event_name;magnitude;depth_km;vs30_m_s;dt_s;station_latitude;station_longitude;distance_km;jb_km",
		"a.txt;Moor, Nord;5,8;12.5;410;0,005;-30,125;150,25;-999,0;7,5e1")
	ch := Channel{DistanceKM: Known(3)}
	c.Apply("a.txt", &ch)
	e, s := ch.Event, ch.Station
	if e.Name != "Moor, Nord" || e.Magnitude != Known(5.8) || e.DepthKM != Known(12.5) || s.Vs30 != Known(410) || s.Latitude != Known(-30.125) || s.Longitude != Known(150.25) {
		t.Errorf("event %+v, station %+v", e, s)
	}
	if step := c.Hints("a.txt", Hints{}).StepS; step != 0.005 || ch.DistanceKM != Known(3) || ch.Distances.JoynerBooreKM != Known(75) {
		t.Errorf("step %g, distance %+v, %+v", step, ch.DistanceKM, ch.Distances)
	}
	for text, want := range map[string]string{
		"file;magnitude\na;5,8,1\n":                              `c.csv:2: magnitude: expected a number, found "5,8,1"`,
		"file;depth_km\nb;5,8\na;1.234,5\n":                      `c.csv:3: depth_km: expected a number, found "1.234,5"`,
		"file;depth_km\na;1234,5\n":                              `c.csv:2: depth_km: 1234.5 is outside -10 to 800`,
		"file;depth_km\na;x,y\n":                                 `c.csv:2: depth_km: expected a number, found "x,y"`,
		"station;station_latitude;station_longitude\nc;1,5S;2,5": `c.csv:2: station_latitude: expected a number, found "1,5S"`,
		"file;dt_s\na;0,5\n":                                     `c.csv:2: dt_s: 0.5 is outside 0.0005 to 0.1`,
		"file,magnitude\na,\"5,8\"\n":                            `c.csv:2: magnitude: expected a number, found "5,8"`,
		"file;magnitude\na,5\n":                                  `c.csv:2: 1 fields, the header has 2`,
		"file,magnitude\na;5,8;7;8;9;10;11;\n":                   `c.csv:2: magnitude: expected a number, found "8;7;8;9;10;11;"`,
	} {
		if _, err := ReadCatalogue("c.csv", strings.NewReader(text)); err == nil || err.Error() != want {
			t.Errorf("%q: error %v, want %q", text, err, want)
		}
	}
}

func TestCatalogueErrors(t *testing.T) {
	_, err := openCatalogue(t, "damaged-cells.csv")
	want := []string{
		`damaged-cells.csv:2: origin_time: expected a time as 2006-01-02T15:04:05Z or a date as 2006-01-02, found "yesterday"`,
		`damaged-cells.csv:2: magnitude: expected a number, found "big"`,
		`damaged-cells.csv:2: siting: expected free-field, ground, structure, borehole or unknown, found "roof"`,
		`damaged-cells.csv:2: unit: unknown unit "bar"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`,
		`damaged-cells.csv:2: dt_s: 0 is outside 0.0005 to 0.1`,
		`damaged-cells.csv:2: event_latitude: 91 is outside -90 to 90`,
		`damaged-cells.csv:3: the row states neither file nor event nor station`,
		`damaged-cells.csv:4: unit and dt_s need a file, since they are wanted before a file is read`,
		`damaged-cells.csv:6: the row speaks of the same as line 5`,
		`damaged-cells.csv:7: 3 fields, the header has 9`,
	}
	if err == nil || err.Error() != strings.Join(want, "\n") {
		t.Errorf("error\n%v\nwant\n%s", err, strings.Join(want, "\n"))
	}
	if _, ok := errors.AsType[*ParseError](err); !ok {
		t.Error("no *ParseError in the error")
	}
	cases := map[string]string{
		"":                                     "c.csv: file is empty",
		"# nothing\n":                          "c.csv: no header row",
		"magnitude,unit\n5,g\n":                "c.csv:1: none of the columns file, event and station",
		"file,unit,file\n":                     "c.csv:1: file: the column is there twice",
		"file\n[a\n":                           `c.csv:2: file: "[a" is no pattern of file names`,
		"file,event\n\"a,b\n":                  `c.csv:2: column 5: extraneous or missing " in quoted-field`,
		"station,magnitude\ns,5\n":             "c.csv:2: the event's columns need an event or a file",
		"event,vs30_m_s\ne,300\n":              "c.csv:2: the station's columns need a station or a file",
		"event,distance_km\ne,30\n":            "c.csv:2: distance_km, low_cut_hz and high_cut_hz need event and station, or a file",
		"event,network\ne,CE\n":                "c.csv:2: network needs a station",
		"event,event_latitude\ne,30\n":         "c.csv:2: event_latitude and event_longitude need each other",
		"file,station_longitude\ne,30\n":       "c.csv:2: station_latitude and station_longitude need each other",
		"file,low_cut_hz,high_cut_hz\na,40,.1": "c.csv:2: low_cut_hz 40 is not below high_cut_hz 0.1",
		"file,unit\na,counts\n":                "c.csv:2: unit: raw counts need a scale; convert them to a unit of acceleration first",
		"station,site_class\ns,soft rock\n":    `c.csv:2: site_class: expected a ground type of EN 1998-1, A to E, S1 or S2, found "soft rock"`,
		"station,site_class\ns,F\n":            `c.csv:2: site_class: expected a ground type of EN 1998-1, A to E, S1 or S2, found "F"`,
		"file\n\x00\x01\n":                     "c.csv: file is binary, not a text record",
	}
	for text, want := range cases {
		if _, err := ReadCatalogue("c.csv", strings.NewReader(text)); err == nil || err.Error() != want {
			t.Errorf("%q: error %v, want %q", text, err, want)
		}
	}
	many := "file,magnitude\n" + strings.Repeat("a,x\n", 25)
	_, err = ReadCatalogue("c.csv", strings.NewReader(many))
	lines := strings.Split(err.Error(), "\n")
	if len(lines) != 21 || lines[20] != "c.csv: 5 more errors" {
		t.Errorf("%d lines of errors, the last %q", len(lines), lines[len(lines)-1])
	}
}

func TestCatalogueColumns(t *testing.T) {
	c := catalogueOf(t, "file,vs30,mag,latitude,Magnitude Type,azimut_deg,zzzzzz,,distance_km_note", "a,1,2,3,Mw,4,5,6,7")
	want := "[vs30 (did you mean vs30_m_s?) mag (did you mean magnitude?) latitude azimut_deg (did you mean azimuth_deg?) zzzzzz column 8 distance_km_note (did you mean distance_km?)]"
	if got := fmt.Sprint(c.UnknownColumns); got != want {
		t.Errorf("unknown columns\n%s\nwant\n%s", got, want)
	}
	// Every column must reach the channel or the hints.
	var header, row []string
	for name := range catalogueColumns {
		cell := map[string]string{"origin_time": "2041-03-04", "siting": "ground", "unit": "g", "file": "a.txt", "component": "NS",
			"dt_s": "0.01", "site_class": "S1*", "low_cut_hz": "0.2"}[name]
		if cell == "" {
			cell = "7"
		}
		header, row = append(header, name), append(row, cell)
	}
	ch := Channel{}
	catalogueOf(t, strings.Join(header, ","), strings.Join(row, ",")).Apply("a.txt", &ch)
	seven := Known(7)
	full := Channel{
		Event: Event{ID: "7", Name: "7", Date: time.Date(2041, 3, 4, 0, 0, 0, 0, time.UTC), Latitude: seven, Longitude: seven, DepthKM: seven,
			Magnitude: seven, MagnitudeType: "7"},
		Station:    Station{Network: "7", Code: "7", Name: "7", Latitude: seven, Longitude: seven, ElevationM: seven, Vs30: seven, SiteClass: "S1"},
		Instrument: "7", Siting: SitingGround, Orientation: Orientation{Axis: AxisHorizontal, AzimuthDeg: seven, Label: "NS"},
		DistanceKM: seven,
		Distances:  Distances{EpicentralKM: seven, HypocentralKM: seven, RuptureKM: seven, JoynerBooreKM: seven},
		LowCutHz:   Known(0.2), HighCutHz: seven,
	}
	if fmt.Sprintf("%+v", ch) != fmt.Sprintf("%+v", full) {
		t.Errorf("channel %+v\nwant    %+v", ch, full)
	}
}

// TestCataloguePrecedence states magnitude in rows of every rank and takes them
// away one by one from the strongest.
func TestCataloguePrecedence(t *testing.T) {
	header := "file,event,station,component,magnitude,magnitude_type"
	rows := []string{ // strong first
		"sub/a.txt,,,NS,1,",
		"sub/a.txt,,,,2,",
		"a.txt,,,NS,3,",
		"a.txt,,,,4,",
		"sub/*.txt,,,N,5,",
		"*.txt,,,,6,",
		"?.txt,,,,7,",
		",e1,s1,,8,",
	}
	// Later lines come before earlier ones of the same rank.
	for from := range rows {
		ordered := slices.Clone(rows[from:])
		slices.Reverse(ordered)
		ch := Channel{Event: Event{ID: "e1", Magnitude: Known(0), MagnitudeType: "ML"}, Station: Station{Code: "s1"}, Orientation: Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(0), Label: "N-S"}}
		if _, ok := catalogueOf(t, append([]string{header}, ordered...)...).Apply("sub/a.txt", &ch); !ok {
			t.Fatal("no row fits")
		}
		if ch.Event.Magnitude != Known(float64(from+1)) || ch.Event.MagnitudeType != "" {
			t.Errorf("without the first %d rows: magnitude %+v %q, want %d of unknown type", from, ch.Event.Magnitude, ch.Event.MagnitudeType, from+1)
		}
	}
	pair := Channel{Event: Event{ID: "e1"}, Station: Station{Code: "s1"}, Orientation: Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(0), Label: "N-S"}}
	catalogueOf(t, "event,station,component,distance_km", "E1,S1,,9", "e1,s1,NS,8").Apply("sub/a.txt", &pair)
	if pair.DistanceKM != Known(8) {
		t.Errorf("distance %+v, want that of the row that names the component", pair.DistanceKM)
	}
	c := catalogueOf(t, header, "b.txt,,,,1,", "sub2/a.txt,,,,1,", "a.txt,,,EW,1,", ",e2,,,1,", ",e1,s2,,1,", ",,,,,")
	ch := Channel{Event: Event{ID: "e1"}, Station: Station{Code: "s1"}, Orientation: vertical}
	if _, ok := c.Apply("sub/a.txt", &ch); ok || !slices.Equal(c.Unmatched(), []int{2, 3, 4, 5, 6}) {
		t.Errorf("rows of others fit: %+v, unmatched %v", ch, c.Unmatched())
	}
}

// Two rows that contradict each other in an event or a station are refused: the
// order of the files would decide between them.
func TestCatalogueContradictions(t *testing.T) {
	cases := map[string]string{
		"file,event,magnitude\na,E1,6.1\nb,e1,6.1\nc,E1,6.5":                       "c.csv:4: magnitude: event E1: 6.5 here, 6.1 in line 2",
		"file,event,origin_time\na,E1,2041-03-03T23:12:07Z\n,E1,2041-03-03":        "c.csv:3: origin_time: event E1: 2041-03-03T00:00:00Z here, 2041-03-03T23:12:07Z in line 2",
		"event,station,network,vs30_m_s\nE1,S1,XX,300\nE2,S1,XX,310":               "c.csv:3: vs30_m_s: station XX.S1: 310 here, 300 in line 2",
		"event,station,network,vs30_m_s\nE1,S1,XX,300\nE2,S1,YY,310\nE3,S1,XX,300": "",
	}
	for text, want := range cases {
		_, err := ReadCatalogue("c.csv", strings.NewReader(text))
		if got := fmt.Sprint(err); want == "" && err != nil || want != "" && got != want {
			t.Errorf("%q: %v, want %s", text, err, want)
		}
	}
}

func TestCatalogueMatching(t *testing.T) {
	header := "file,event,station,network,component,instrument"
	ch := Channel{Event: Event{Name: "North Water", Date: time.Date(2041, 3, 4, 0, 0, 0, 0, time.UTC)}, Station: Station{Network: "CE", Code: "54730"},
		Orientation: Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(35), Label: "35 Deg"}}
	cases := map[string]bool{
		"a.txt,,,,,x": true, "*.txt,,,,,x": true, "sub/a.txt,,,,,x": true, `sub\a.txt,,,,,x`: true, "./sub/a.txt,,,,,x": true, "*/a.txt,,,,,x": true, "[ab].txt,,,,,x": true,
		"a.*,,,,,x": true, "a.t[x]t,,,,,x": true, "sub/?.txt,,,,,x": true, "su?/a.txt,,,,,x": true, "sub/a.txt*,,,,,x": true, "b.*,,,,,x": false, "su/?.txt,,,,,x": false, "sub/a.txt?,,,,,x": false,
		"b.txt,,,,,x": false, "sub,,,,,x": false, "*/*/a.txt,,,,,x": false, "A.TXT,,,,,x": false, "*,,,,,x": true,
		",,54730,,,x": true, ",,ce54730,,,x": true, ",,CE.54730,,,x": true, ",,54730,CE,,x": true, ",,54730,ce,,x": true, ",,54730,NC,,x": false, ",,5473,,,x": false,
		",,54730,,35,x": true, ",,54730,,90,x": false, ",,54730,,UP,x": false, ",,54730,,35 DEG,x": true,
		",north water,54730,,,x": true, ",north-water-20410304,54730,,,x": true, ",other,54730,,,x": false, ",North Water,1,,,x": false,
	}
	for row, want := range cases {
		got := ch
		c := catalogueOf(t, header, row)
		if _, matched := c.Apply("sub/a.txt", &got); matched != want || (got.Instrument == "x") != want || (len(c.Unmatched()) == 0) != want {
			t.Errorf("row %q: matched %v, instrument %q, unmatched %v, want %v", row, matched, got.Instrument, c.Unmatched(), want)
		}
	}
}

// TestCatalogueFilesInArchives has the names by which a row may call a member.
func TestCatalogueFilesInArchives(t *testing.T) {
	const deep, shallow = "sub/a.zip!in/b.tar!dir/x.EW", "a.zip!x.EW"
	for _, tt := range []struct {
		file          string
		deep, shallow bool
	}{
		{"x.EW", true, true}, {"*.EW", true, true}, {"[!x].EW", true, true}, {"dir/x.EW", true, false}, {"in/b.tar!dir/x.EW", true, false}, {deep, true, false},
		{shallow, false, true}, {"a.zip!*", false, true}, {"x.*", true, true}, {"dir/x*", true, false}, {"in/b.tar!dir/?.EW", true, false}, {"sub/a.zip!in/*!dir/x.EW", true, false}, {"sub/in/d*/x.EW", true, false}, {"a.zip!y*", false, false}, {"sub/in/dir/x.EW", true, false}, {"sub/*/*/x.EW", true, false}, {"*/*!*/*!dir/*.EW", true, false},
		{"in/dir/x.EW", false, false}, {"a.zip", false, false}, {"sub/a.zip", false, false}, {"b.tar", false, false}, {"*.zip", false, false},
	} {
		for rel, want := range map[string]bool{deep: tt.deep, shallow: tt.shallow} {
			if _, got := catalogueOf(t, "file,instrument", tt.file+",x").Apply(rel, &Channel{}); got != want {
				t.Errorf("row for %s matches %s: %v, want %v", tt.file, rel, got, want)
			}
		}
	}
}

// TestCatalogueKeepsEventCode refines the very things an event's code is made
// of: the code must stay, and the row must join again.
func TestCatalogueKeepsEventCode(t *testing.T) {
	c := catalogueOf(t, "event,event_name,origin_time", "20410303T231200,Northwater,2041-03-03T23:12:07Z")
	ch := Channel{Event: Event{Origin: time.Date(2041, 3, 3, 23, 12, 0, 0, time.UTC)}, Station: Station{Code: "SWB001"}}
	for range 2 {
		if _, ok := c.Apply("x", &ch); !ok || EventCode(&ch) != "20410303T231200" || ch.Event.Origin.Second() != 7 {
			t.Errorf("event %+v has the code %s", ch.Event, EventCode(&ch))
		}
	}
}

// TestCatalogueDirections gives directions to channels without any.
func TestCatalogueDirections(t *testing.T) {
	c := catalogueOf(t, "file,component,azimuth_deg", "a.txt,H2,", "b.txt,NS,", "b.txt,EW,", "c.txt,,360", "d.txt,,35")
	for rel, want := range map[string]string{"a.txt": "h #2", "b.txt": "", "c.txt": "h 0", "d.txt": "h 35", "e.txt": ""} {
		ch := Channel{}
		c.Apply(rel, &ch)
		if got := short(ch.Orientation); got != want {
			t.Errorf("%s: orientation %q, want %q", rel, got, want)
		}
	}
	up := Channel{Orientation: vertical}
	c.Apply("d.txt", &up)
	if up.Orientation != vertical {
		t.Errorf("an azimuth turned a vertical into %+v", up.Orientation)
	}
}

// TestCatalogueConcurrent is for the race detector.
func TestCatalogueConcurrent(t *testing.T) {
	c := catalogueOf(t, "file,event,magnitude,unit", "*.txt,,5,g", ",e,6,")
	var all sync.WaitGroup
	for range 8 {
		all.Go(func() {
			for i := range 100 {
				rel := fmt.Sprintf("%d.txt", i)
				ch := Channel{Event: Event{ID: "e"}}
				c.Hints(rel, Hints{})
				if c.Apply(rel, &ch); ch.Event.Magnitude != Known(5) {
					t.Errorf("magnitude %+v", ch.Event.Magnitude)
				}
				c.Unmatched()
			}
		})
	}
	all.Wait()
}

func FuzzCatalogue(f *testing.F) {
	for _, name := range []string{"catalogue.csv", "semicolons.csv", "damaged-cells.csv"} {
		data, err := os.ReadFile(filepath.Join("..", "testdata", "catalogue", name))
		if err != nil {
			f.Fatal(err)
		}
		f.Add(data)
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		before := bytes.Clone(data)
		c, err := ReadCatalogue("c.csv", bytes.NewReader(data))
		if !bytes.Equal(data, before) {
			t.Error("the input changed")
		}
		if err != nil {
			if _, ok := errors.AsType[*ParseError](err); !ok || c != nil {
				t.Errorf("error of type %T", err)
			}
			return
		}
		ch := Channel{Event: Event{ID: "nwt2041"}, Station: Station{Code: "CDH"}}
		c.Apply("plain/silent.txt", &ch)
		h := c.Hints("plain/silent.txt", Hints{})
		if _, err := ParseUnit(h.Unit); h.Unit != "" && err != nil {
			t.Errorf("hint of unit %q: %v", h.Unit, err)
		}
		if len(c.Unmatched()) > len(c.rows) {
			t.Error("more rows unmatched than there are")
		}
	})
}

// BenchmarkCatalogue joins one file with a catalogue of 100 000 rows.
func BenchmarkCatalogue(b *testing.B) {
	lines := []string{"file,event,station,unit,distance_km"}
	for i := range 100000 {
		lines = append(lines, fmt.Sprintf("%d.txt,e%d,s%d,g,%d", i, i%100, i, i%300))
	}
	c := catalogueOf(b, lines...)
	for b.Loop() {
		ch := Channel{}
		c.Hints("x/777.txt", Hints{})
		if _, ok := c.Apply("x/777.txt", &ch); !ok || ch.Event.ID != "e77" {
			b.Fatal("not joined")
		}
	}
}
