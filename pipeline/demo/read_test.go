package demo

import (
	"bytes"
	"errors"
	"fmt"
	"io/fs"
	"math"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"swaybook/ingest"
)

// read parses the files of a record by swaybook's own readers and returns the
// channels north, east, up. Any warning but those allowed fails the test.
func read(t *testing.T, r *record, format string, allowed ...string) []ingest.Channel {
	t.Helper()
	var all []ingest.Channel
	for _, f := range r.station.network.encode(r) {
		got, channels, err := ingest.Parse(t.Context(), f.name, f.data, ingest.Hints{})
		if err != nil {
			t.Fatal(err)
		}
		if got != format {
			t.Fatalf("%s is read as %s, want %s", f.name, got, format)
		}
		all = append(all, channels...)
	}
	if len(all) != 3 {
		t.Fatalf("%d channels, want 3", len(all))
	}
	for _, c := range all {
		for _, w := range c.Warnings {
			if !slices.ContainsFunc(allowed, func(s string) bool { return strings.Contains(w, s) }) {
				t.Errorf("warning %q", w)
			}
		}
	}
	return all
}

// samples compares what was read with the motion, within a tolerance in m/s²
// and a relative one.
func samples(t *testing.T, r *record, channels []ingest.Channel, absolute, relative float64) {
	t.Helper()
	for i, c := range r.columns() {
		got := channels[i].Acceleration
		if len(got) != len(c.motion) {
			t.Fatalf("%s: %d samples, want %d", c.compass, len(got), len(c.motion))
		}
		for j, v := range c.motion {
			want := float64(v) / stepsPerMPS2
			if math.Abs(got[j]-want) > absolute+relative*math.Abs(want) {
				t.Fatalf("%s: sample %d is %.9g m/s², want %.9g", c.compass, j, got[j], want)
			}
		}
	}
}

// facts are what a format states of a record, in print. What it leaves out is
// "-".
type facts struct {
	event, station, start, siting, place, filter string
	peak                                         bool // the header states the peaks
}

func known(n ingest.Number, format string) string {
	if !n.Known {
		return "-"
	}
	return fmt.Sprintf(format, n.Value)
}

func orDash(s string) string {
	if s == "" {
		return "-"
	}
	return s
}

func stated(c *ingest.Channel) facts {
	e, s := c.Event, c.Station
	origin, start := "-", "-"
	if !e.Origin.IsZero() {
		origin = e.Origin.Format(time.RFC3339)
	}
	if !c.Start.IsZero() {
		start = c.Start.Format(time.RFC3339)
	}
	return facts{
		event: strings.Join([]string{orDash(e.ID), orDash(e.Name), origin, known(e.Latitude, "%.3f"), known(e.Longitude, "%.3f"),
			known(e.DepthKM, "%g"), known(e.Magnitude, "%.1f")}, " "),
		station: strings.Join([]string{orDash(s.Network), orDash(s.Code), orDash(s.Name), known(s.Latitude, "%.3f"),
			known(s.Longitude, "%.3f"), known(s.ElevationM, "%g"), known(s.Vs30, "%g")}, " "),
		start: start, siting: string(c.Siting), place: orDash(c.Instrument),
		filter: known(c.LowCutHz, "%g") + " " + known(c.HighCutHz, "%g"),
		peak:   c.HeaderPeak.Known,
	}
}

// Every format is read back by its reader: the samples within the digits
// printed, and all that the format has room for.
// knetOff is how far raw samples may be off the motion in m/s²: six standard deviations of
// the noise, the drift, and its mean.
const knetOff = (6*noiseGal + 2*driftGal) / 100

func TestFilesAreReadBack(t *testing.T) {
	e := builtInEvents()[0]
	list := builtInStations()
	for _, c := range []struct {
		name, format       string
		station            int
		place              int // index of the place of instruments
		absolute, relative float64
		allowed            string
		want               facts
	}{
		// Four decimals of cm/s² are the samples themselves.
		{"V2", "california-v2", 0, 0, 0, 1e-14, "none", facts{
			"- Feldrassa 2012-05-04T10:15:32Z 38.081 170.353 12 6.1",
			"- 71011 Kellowane - Harbour Yard 37.812 169.948 - -",
			"", "free-field", "Free field", "0.15 20", true}},
		{"V2 roof", "california-v2", 5, 1, 0, 1e-14, "none", facts{
			"- Feldrassa 2012-05-04T10:15:32Z 38.081 170.353 12 6.1",
			"- 71013 Hesperlin - School 38.118 170.096 - -",
			"", "structure", "Roof: Centre", "0.15 40", true}},
		{"COSMOS", "cosmos", 1, 0, 0, 1e-14, "none", facts{
			"- Feldrassa 2012-05-04T10:15:32Z 38.081 170.353 12 6.1",
			"Q2 CULM Culmarra Observatory 38.204 170.318 212 640",
			"", "free-field", "Free field", "0.15 40", true}},
		{"K-NET", "knet", 2, 0, knetOff, 0, "none", facts{
			"- - 2012-05-04T10:15:32Z 38.081 170.353 12 6.1",
			"- QVA001 - 38.047 170.622 38 -",
			"", "free-field", "-", "- -", true}},
		{"K-NET surface over a borehole", "knet", 7, 0, knetOff, 0, "none", facts{
			"- - 2012-05-04T10:15:32Z 38.081 170.353 12 6.1",
			"- QVAH02 - 38.285 170.803 167 -",
			"", "free-field", "surface", "- -", true}},
		{"K-NET borehole", "knet", 7, 1, knetOff, 0, "nominal", facts{
			"- - 2012-05-04T10:15:32Z 38.081 170.353 12 6.1",
			"- QVAH02 - 38.285 170.803 167 -",
			"", "borehole", "borehole", "- -", true}},
		// Seven digits below one: half a unit of the last in 0.1000000.
		{"AT2", "at2", 3, 0, 0, 5e-7, "none", facts{
			"- Feldrassa - - - - -",
			"- - Sorvath Campus - - - -",
			"-", "unknown", "-", "0.15 40", false}},
		{"plain", "plain", 4, 0, 0, 1e-14, "none", facts{
			"20120504T101532 Feldrassa - - - - -",
			"Q5 YVA1 Ythmere Quay - - - -",
			"", "unknown", "-", "- -", false}},
	} {
		t.Run(c.name, func(t *testing.T) {
			r := simulate(&e, &list[c.station], generator(0, uint64(10+c.station)))[c.place]
			channels := read(t, r, c.format, c.allowed)
			samples(t, r, channels, c.absolute, c.relative)
			if c.want.start == "" {
				c.want.start = r.start.Format(time.RFC3339)
			}
			for i := range channels {
				ch := &channels[i]
				if got := stated(ch); got != c.want {
					t.Errorf("channel %d states\n%+v, want\n%+v", i+1, got, c.want)
				}
				if math.Abs(ch.StepS-r.stepS()) > 1e-15 {
					t.Errorf("channel %d: step %g s, want %g", i+1, ch.StepS, r.stepS())
				}
			}
			directions(t, channels)
		})
	}
}

// directions checks that the channels point north, east and up.
func directions(t *testing.T, channels []ingest.Channel) {
	t.Helper()
	for i, want := range []ingest.Number{ingest.Known(0), ingest.Known(90), {}} {
		o := channels[i].Orientation
		axis := ingest.AxisHorizontal
		if i == 2 {
			axis = ingest.AxisVertical
		}
		if o.Axis != axis || o.AzimuthDeg != want {
			t.Errorf("channel %d has axis %v, azimuth %v, want %v, %v", i+1, o.Axis, o.AzimuthDeg, axis, want)
		}
	}
}

// The damaged files are refused, each for its own reason.
func TestDamagedFilesAreRefused(t *testing.T) {
	dir, _ := write(t, small)
	for name, want := range map[string]string{
		"truncated.AT2":    "announced",
		"unknown-unit.csv": "unit",
	} {
		data := readFile(t, dir, "damaged", name)
		if _, _, err := ingest.Parse(t.Context(), name, data, ingest.Hints{}); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%s: %v, want an error with %q", name, err, want)
		} else {
			t.Log(err)
		}
	}
}

// With the catalogue, records of all networks belong to one event and have all
// that a ground-motion study asks for, and every row of it is of use.
func TestCatalogueCompletesTheRecords(t *testing.T) {
	dir, _ := write(t, small)
	table, err := ingest.ReadCatalogue("catalogue.csv", bytes.NewReader(readFile(t, dir, "catalogue.csv")))
	if err != nil {
		t.Fatal(err)
	}
	if len(table.UnknownColumns) > 0 {
		t.Errorf("unknown columns: %v", table.UnknownColumns)
	}
	sitings := map[ingest.Siting]int{}
	components := map[string]int{}
	for _, rel := range recordFiles(t, dir) {
		_, channels, err := ingest.Parse(t.Context(), rel, readFile(t, dir, filepath.FromSlash(rel)), table.Hints(rel, ingest.Hints{}))
		if err != nil {
			t.Fatal(err)
		}
		for i := range channels {
			c := &channels[i]
			table.Apply(rel, c)
			sitings[c.Siting]++
			id, stated := ingest.RecordID(c, rel)
			if !stated {
				t.Errorf("%s: record id %s is that of the file name", rel, id)
			}
			components[id]++
			complete(t, rel, c)
		}
	}
	if sitings[ingest.SitingFreeField] != 30 || sitings[ingest.SitingStructure] != 3 || sitings[ingest.SitingBorehole] != 3 {
		t.Errorf("sitings are %v, want 30 channels free-field, 3 on a structure, 3 in a borehole", sitings)
	}
	if len(components) != 12 {
		t.Errorf("%d records, want 12", len(components))
	}
	for id, n := range components {
		if n != 3 {
			t.Errorf("record %s has %d components, want 3", id, n)
		}
	}
	if lines := table.Unmatched(); len(lines) > 0 {
		t.Errorf("rows of lines %v fit no file", lines)
	}
}

// What lies beside the records is passed over, not refused.
func TestTextsAreNoRecords(t *testing.T) {
	dir, sum := write(t, small)
	if reason := ingest.SkipByName("README.txt"); reason == "" {
		t.Error("README.txt is taken for a record")
	}
	_, _, err := ingest.Parse(t.Context(), "catalogue.csv", readFile(t, sum.Catalogue), ingest.Hints{})
	if _, ok := errors.AsType[*ingest.NotMotionError](err); !ok {
		t.Errorf("Parse(catalogue.csv) = %v, want a *NotMotionError", err)
	}
	readFile(t, dir, "README.txt")
}

// recordFiles returns the relative paths of the record files, but for the
// damaged ones.
func recordFiles(t *testing.T, dir string) []string {
	t.Helper()
	var files []string
	err := filepath.WalkDir(dir, func(path string, d fs.DirEntry, err error) error {
		rel, _ := filepath.Rel(dir, path)
		if rel = filepath.ToSlash(rel); err == nil && strings.HasPrefix(rel, "q") && !d.IsDir() {
			files = append(files, rel)
		}
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return files
}

// complete checks what the catalogue and the header together say of the first
// event and its stations.
func complete(t *testing.T, rel string, c *ingest.Channel) {
	t.Helper()
	e := builtInEvents()[0]
	list := builtInStations()
	at := slices.IndexFunc(list, func(s station) bool { return s.code == c.Station.Code })
	if at < 0 {
		t.Fatalf("%s: station %q is none of ours", rel, c.Station.Code)
	}
	s := list[at]
	km, _ := epicentral(&e, &s)
	if code := ingest.EventCode(c); code != e.code() {
		t.Errorf("%s: event code %s, want %s", rel, code, e.code())
	}
	want := ingest.Event{ID: c.Event.ID, Name: e.name, Origin: e.origin, Date: c.Event.Date, Magnitude: ingest.Known(e.magnitude), MagnitudeType: "Mw",
		Latitude: ingest.Known(e.latitude), Longitude: ingest.Known(e.longitude), DepthKM: ingest.Known(e.depthKM)}
	if c.Event != want {
		t.Errorf("%s: event is %+v, want %+v", rel, c.Event, want)
	}
	site := ingest.Station{Network: s.network.code, Code: s.code, Name: s.name, Latitude: ingest.Known(s.latitude),
		Longitude: ingest.Known(s.longitude), ElevationM: ingest.Known(s.elevationM), Vs30: ingest.Known(s.vs30)}
	if c.Station != site {
		t.Errorf("%s: station is %+v, want %+v", rel, c.Station, site)
	}
	if c.DistanceKM != ingest.Known(km) {
		t.Errorf("%s: distance is %v, want %g km", rel, c.DistanceKM, km)
	}
}
