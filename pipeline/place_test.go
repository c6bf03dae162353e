package pipeline

import (
	"fmt"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/ingest/archive"
)

// seat is a channel to place and where it shall come to stand.
type seat struct {
	channel ingest.Channel
	path    string
	want    string // record and role, or part of the error
	samples int    // 0: 1
}

func horizontal(azimuth float64) ingest.Orientation {
	return ingest.Orientation{Axis: ingest.AxisHorizontal, AzimuthDeg: ingest.Known(azimuth), Label: fmt.Sprint(azimuth)}
}

var vertical = ingest.Orientation{Axis: ingest.AxisVertical, Label: "Up"}

// at is a channel of invented event E at station S.
func at(o ingest.Orientation, code string, start time.Time) ingest.Channel {
	return ingest.Channel{
		Event: ingest.Event{ID: "E"}, Station: ingest.Station{Code: "S"}, Orientation: o, ChannelCode: code, Start: start,
		StepS: 0.01, Siting: ingest.SitingFreeField,
	}
}

func processed(c ingest.Channel, state ingest.Processing) ingest.Channel {
	c.Processing = state
	return c
}

func eventless(c ingest.Channel) ingest.Channel {
	c.Event = ingest.Event{}
	return c
}

func towards(c ingest.Channel, azimuth float64) ingest.Channel {
	c.Orientation = horizontal(azimuth)
	return c
}

func TestPlace(t *testing.T) {
	noon := time.Date(2026, 3, 12, 12, 0, 0, 0, time.UTC)
	var none time.Time
	anonymous := ingest.Channel{StepS: 0.01}
	tests := []struct {
		name  string
		seats []seat
	}{
		{"three components make one record", []seat{
			{at(horizontal(90), "2", noon), "a", "E_S h2", 0}, {at(vertical, "3", noon), "b", "E_S v", 0}, {at(horizontal(0), "1", noon), "c", "E_S h1", 0},
		}},
		{"starts within a second are one trigger", []seat{
			{at(horizontal(90), "", noon), "a", "E_S h2", 0}, {at(horizontal(0), "", noon.Add(time.Second)), "b", "E_S h1", 0},
		}},
		{"a second trigger is a record of its own", []seat{
			{at(horizontal(0), "", noon), "a", "E_S h1", 0}, {at(horizontal(0), "", noon.Add(40*time.Second)), "b", "E_S_T120040 h1", 0},
			{at(horizontal(90), "", noon.Add(40*time.Second)), "c", "E_S_T120040 h2", 0},
		}},
		{"versions of a channel are records of their own", []seat{
			{at(horizontal(0), "1", noon), "a", "E_S h1", 0}, {at(horizontal(0), "1", noon), "b", "E_S_v2 h1", 0}, {at(horizontal(0), "1", noon), "c", "E_S_v3 h1", 0},
			{at(horizontal(90), "2", noon), "d", "E_S h2", 0}, {at(horizontal(90), "2", noon), "e", "E_S_v2 h2", 0},
		}},
		{"versions of a vertical", []seat{
			{at(vertical, "", none), "a", "E_S v", 0}, {at(vertical, "", none), "b", "E_S_v2 v", 0},
		}},
		{"raw and corrected do not mix", []seat{
			{processed(at(horizontal(0), "1", noon), ingest.ProcessingRaw), "a", "E_S h1", 0},
			{processed(at(horizontal(90), "2", noon), ingest.ProcessingCorrected), "b", "E_S_v2 h2", 0},
			{processed(at(horizontal(90), "2", noon), ingest.ProcessingRaw), "c", "E_S h2", 0},
			{processed(at(horizontal(0), "1", noon), ingest.ProcessingCorrected), "d", "E_S_v2 h1", 0},
		}},
		{"another sensor in one direction is a record of its own", []seat{
			{at(horizontal(0), "1", noon), "a", "E_S h1", 0}, {at(horizontal(0), "9", noon), "b", "E_S_ch9 h1", 0}, {at(horizontal(0), "9", noon), "c", "E_S_ch9_v2 h1", 0},
		}},
		{"roles that collide follow the azimuths, whatever came first", []seat{
			{at(horizontal(40), "", noon), "a", "E_S h1", 0}, {at(horizontal(320), "", noon), "b", "E_S h2", 0},
		}},
		{"roles that collide follow the azimuths, in the other order", []seat{
			{at(horizontal(320), "", noon), "a", "E_S h2", 0}, {at(horizontal(40), "", noon), "b", "E_S h1", 0},
		}},
		{"components of a later trigger may straddle a second", []seat{
			{at(horizontal(0), "", noon), "a", "E_S h1", 0}, {at(horizontal(0), "", noon.Add(40*time.Second)), "b", "E_S_T120040 h1", 0},
			{at(horizontal(90), "", noon.Add(41*time.Second)), "c", "E_S_T120040 h2", 0}, {at(vertical, "", noon.Add(39*time.Second)), "d", "E_S_T120040 v", 0},
		}},
		{"equal stems in folders of one name", []seat{
			{anonymous, "EV1/records/run1.csv", "run1 h1", 0}, {anonymous, "EV2/records/run1.csv", "run1_ev2-records h1", 0},
			{anonymous, "EV3/records/run1.csv", "run1_ev3-records h1", 0}, {anonymous, "EV3/records/run1.txt", "states no direction", 0},
		}},
		{"components without identity join within a folder only", []seat{
			{towards(anonymous, 0), "EV1/ST07_N.csv", "ST07 h1", 0}, {towards(anonymous, 90), "EV2/ST07_E.csv", "ST07_ev2 h2", 0}, {towards(anonymous, 90), "EV1/ST07_E.csv", "ST07 h2", 0},
		}},
		{"folders of one name under several that are named", []seat{
			{towards(anonymous, 0), "a/EQ/rec_N.csv", "rec h1", 0}, {towards(anonymous, 0), "b/EQ/rec_N.csv", "rec_b-eq h1", 0}, {towards(anonymous, 90), "c/EQ/rec_E.csv", "rec_c-eq h2", 0},
		}},
		{"files of several archives", []seat{
			{towards(anonymous, 0), "in/s1.zip!d/rec_N.csv", "rec h1", 0}, {towards(anonymous, 0), "in/s2.zip!d/rec_N.csv", "rec_in-d h1", 0},
			{towards(anonymous, 90), "in/s3.zip!d/rec_E.csv", "rec_in-d-2 h2", 0}, {towards(anonymous, 90), "in/s1.zip!d/rec_E.csv", "rec h2", 0},
			{towards(anonymous, 90), "in/s2.zip!d/rec_E.csv", "rec_in-d h2", 0},
		}},
		{"files under a compressor lie where they would without", []seat{
			{towards(anonymous, 0), "in/rec_N.csv.gz!rec_N.csv", "rec h1", 0}, {towards(anonymous, 90), "in/rec_E.csv.gz!rec_E.csv", "rec h2", 0},
			{towards(anonymous, 0), "in/a.zip!x_N.csv.gz!x_N.csv", "x h1", 0}, {towards(anonymous, 90), "in/a.zip!x_E.csv", "x h2", 0},
		}},
		{"names that are a direction only go by the folder", []seat{
			{towards(anonymous, 0), "in/EQ2/N.csv", "eq2 h1", 0}, {towards(anonymous, 90), "in/EQ2/E.csv", "eq2 h2", 0}, {towards(anonymous, 90), "in/EQ3/E.csv", "eq3 h2", 0},
			{towards(anonymous, 0), "N.csv", "N h1", 0},
		}},
		{"directions in folders of their own that start some seconds apart", []seat{
			{at(horizontal(90), "HNE", noon), "E/a", "E_S h2", 2000}, {at(horizontal(0), "HNN", noon.Add(7*time.Second)), "N/a", "E_S h1", 2000},
			{at(vertical, "HNZ", noon.Add(-10*time.Second)), "Z/a", "E_S v", 2000},
		}},
		{"directions that start too far apart, or do not overlap", []seat{
			{at(horizontal(90), "HNE", noon), "E/a", "E_S h2", 500}, {at(horizontal(0), "HNN", noon.Add(7*time.Second)), "N/a", "E_S_T120007 h1", 2000},
			{at(vertical, "HNZ", noon.Add(-11*time.Second)), "Z/a", "E_S_T115949 v", 2000},
		}},
		{"two windows of which one starts some seconds later", []seat{
			{at(horizontal(90), "HNE", noon), "E/a", "E_S h2", 2000}, {at(horizontal(90), "HNE", noon.Add(5*time.Second)), "E/b", "E_S_T120005 h2", 2000},
			{at(horizontal(0), "HNN", noon.Add(5*time.Second)), "N/b", "E_S_T120005 h1", 2000}, {at(horizontal(0), "HNN", noon), "N/a", "E_S h1", 2000},
			{at(vertical, "HNZ", noon.Add(8*time.Second)), "Z/b", "E_S v", 2000},
		}},
		{"two deliveries of which one starts some seconds later", []seat{
			{at(horizontal(90), "HNE", noon), "a/E", "E_S h2", 2000}, {at(vertical, "HNZ", noon), "a/Z", "E_S v", 2000},
			{at(horizontal(0), "HNN", noon.Add(5*time.Second)), "b/N", "E_S_T120005 h1", 2000}, {at(horizontal(90), "HNE", noon.Add(5*time.Second)), "b/E", "E_S_T120005 h2", 2000},
		}},
		{"a delivery of which a lone one has joined another's record", []seat{
			{at(horizontal(90), "HNE", noon), "a/E", "E_S h2", 2000}, {at(horizontal(0), "HNN", noon.Add(5*time.Second)), "b/N", "E_S_v2 h1", 2000},
			{at(horizontal(90), "HNE", noon.Add(5*time.Second)), "b/E", "E_S_v2 h2", 2000}, {at(vertical, "HNZ", noon.Add(5*time.Second)), "b/Z", "E_S_v2 v", 2000},
		}},
		{"no earthquake stated, and starts in several seconds", []seat{
			{eventless(at(horizontal(90), "HNE", noon.Add(950*time.Millisecond))), "E/a", "20260312T120000_S h2", 2000},
			{eventless(at(horizontal(0), "HNN", noon.Add(1020*time.Millisecond))), "N/a", "20260312T120000_S h1", 2000},
			{eventless(at(vertical, "HNZ", noon.Add(-6*time.Second))), "Z/a", "20260312T120000_S v", 2000},
			{eventless(at(vertical, "HNZ", noon.Add(13*time.Second))), "Z/b", "20260312T120013_S v", 2000},
		}},
		{"another content of the same file", []seat{
			{at(horizontal(0), "", noon), "a", "E_S h1", 0}, {at(horizontal(0), "", noon), "a", "E_S h1", 0},
		}},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) { placeAll(t, tt.seats) })
	}
}

// What was delivered in one folder or file stays together, whichever delivery comes first
// and whichever lacks a horizontal.
func TestPlaceTogether(t *testing.T) {
	noon := time.Date(2026, 3, 12, 12, 0, 0, 0, time.UTC)
	north, east, up := at(horizontal(0), "", noon), at(horizontal(90), "", noon), at(vertical, "", noon)
	single := func(paths ...string) (out []delivery) {
		direction := map[byte]ingest.Channel{'N': north, 'E': east, 'Z': up, 'T': at(horizontal(10), "", noon), 'W': at(horizontal(280), "", noon)}
		for _, p := range paths {
			out = append(out, delivery{p, []ingest.Channel{direction[p[len(p)-1]]}})
		}
		return out
	}
	unstarted := single("y/N", "y/E")
	for i := range unstarted {
		unstarted[i].channels[0].Start = time.Time{}
	}
	later := single("z/Z")
	later[0].channels[0].Start = noon.Add(2 * time.Minute)
	for _, tt := range []struct {
		name  string
		files []delivery
		want  string
	}{
		{"two folders, one lacks a horizontal", single("x/N", "y/N", "y/E", "y/Z"), "[x/N] [y/E y/N y/Z]"},
		{"three folders that lack something", single("x/N", "x/E", "y/E", "y/Z", "z/N", "z/Z"), "[x/E x/N] [y/E y/Z] [z/N z/Z]"},
		{"a pair, and a lone one in line with its first", single("x/N", "y/T", "y/W"), "[x/N] [y/T y/W]"},
		{"a pair, and a lone one in line with its second", single("x/E", "y/T", "y/W"), "[x/E] [y/T y/W]"},
		{"two pairs in line", single("x/N", "x/E", "y/T", "y/W"), "[x/E x/N] [y/T y/W]"},
		{"lone ones in line", single("x/N", "y/T"), "[x/N] [y/T]"},
		{"a folder for each direction", single("N/N", "E/E", "Z/Z"), "[E/E N/N Z/Z]"},
		{"two in one folder", single("x/a_N", "x/a_E", "x/b_N", "x/b_E"), "[x/a_E x/a_N] [x/b_E x/b_N]"},
		{"one that states no start, and a later one", append(append(single("x/N", "x/E"), unstarted...), later...), "[x/E x/N] [y/E y/N] [z/Z]"},
		{"files of a folder", []delivery{{"x/one", []ingest.Channel{east}}, {"x/all", []ingest.Channel{north, east, up}}}, "[x/all x/all x/all] [x/one]"},
		{"a file, and single ones", append(single("x/Z"), delivery{"x/both", []ingest.Channel{north, east}}, single("y/E")[0]), "[x/Z x/both x/both] [y/E]"},
	} {
		for range 12 {
			rand.Shuffle(len(tt.files), func(i, j int) { tt.files[i], tt.files[j] = tt.files[j], tt.files[i] })
			if got := together(t, tt.files); got != tt.want {
				t.Errorf("%s in the order %v: %s, want %s", tt.name, tt.files, got, tt.want)
			}
		}
	}
}

type delivery struct {
	path     string
	channels []ingest.Channel
}

func (d delivery) String() string { return d.path }

// together lists the files of each record, in any order of the records' codes, and checks
// that what was computed of a component is where the component is.
func together(t *testing.T, files []delivery) string {
	t.Helper()
	store := newStore(t)
	run, err := begin(t.Context(), store, withDefaults(options()))
	if err != nil {
		t.Fatal(err)
	}
	w := newWriter(store, run, withDefaults(options()), newSource(nil, withDefaults(options())))
	for _, f := range files {
		res := result{source: db.Source{Path: f.path, SHA256: f.path, Format: "invented"}, rel: f.path, stem: stemOf(f.path), outcome: Stored}
		for i, c := range f.channels {
			c.DistanceKM = ingest.Known(float64(f.path[0]))
			res.channels = append(res.channels, solved{channel: c, samples: 1, digest: fmt.Sprint(f.path, i), data: []byte{0},
				accounts: []account{{by: db.ByHeader, source: f.path, channel: c}},
				spectra:  new(db.NewSpectra(nil, map[string]float64{db.MeasurePGA: c.Orientation.AzimuthDeg.Value, db.MeasurePGV: float64(i), db.MeasurePGD: 1}, nil))})
		}
		if err := w.storeBatch(t.Context(), []result{res}); err != nil {
			t.Fatal(err)
		}
	}
	records, distances := map[string][]string{}, map[string]*float64{}
	for _, c := range componentsOf(t, store) {
		records[c.Record.Code] = append(records[c.Record.Code], c.SourcePath)
		if want := orientationOf(c.Component).AzimuthDeg.Value; c.Peaks.PGA != want {
			t.Errorf("%v: %s %s has the PGA %v, want %v", files, c.Record.Code, c.Role, c.Peaks.PGA, want)
		}
		distances[c.Record.Code] = c.Record.Distances.BestKM
	}
	for code, km := range distances {
		if km == nil || !slices.ContainsFunc(records[code], func(path string) bool { return float64(path[0]) == *km }) {
			t.Errorf("%v: %s of %v has a distance that none of them states", files, code, records[code])
		}
	}
	var out []string
	for _, paths := range records {
		slices.Sort(paths)
		out = append(out, fmt.Sprint(paths))
	}
	slices.Sort(out)
	return strings.Join(out, " ")
}

// placeAll seats the channels one after the other in an empty store, and looks
// at the roles when all are seated.
func placeAll(t *testing.T, seats []seat) {
	t.Helper()
	store := newStore(t)
	run, err := begin(t.Context(), store, withDefaults(options()))
	if err != nil {
		t.Fatal(err)
	}
	w := newWriter(store, run, withDefaults(options()), newSource(nil, withDefaults(options())))
	refused := map[string]string{}
	for i, s := range seats {
		parts := archive.Split(s.path)
		res := result{
			source: db.Source{Path: s.path, SHA256: fmt.Sprint(i), Format: "invented"}, rel: s.path, stem: stemOf(parts[len(parts)-1]), outcome: Stored,
			channels: []solved{{channel: s.channel, samples: max(1, s.samples), digest: "-", data: []byte{0},
				spectra: new(db.NewSpectra(nil, map[string]float64{db.MeasurePGA: 1, db.MeasurePGV: 1, db.MeasurePGD: 1}, nil))}},
		}
		w.opts.Progress = func(p Progress) {
			for _, c := range p.File.Causes {
				refused[p.File.Path] = c.Text
			}
		}
		if err := w.storeBatch(t.Context(), []result{res}); err != nil {
			t.Fatal(err)
		}
	}
	seated := map[string]string{}
	for _, c := range componentsOf(t, store) {
		seated[c.SourcePath] = c.Record.Code + " " + c.Role
	}
	for _, s := range seats {
		if got := seated[s.path]; got != s.want && (got != "" || !strings.Contains(refused[s.path], s.want)) {
			t.Errorf("%s: %q %q, want %q", s.path, got, refused[s.path], s.want)
		}
	}
}

// Two channels of one file in one direction are not two contents of the file.
func TestTakenWithinOneFile(t *testing.T) {
	c := at(horizontal(0), "", time.Time{})
	rival := db.Component{Role: "h1", Axis: "horizontal", SourcePath: "a", SourceSHA256: "1"}
	for digest, want := range map[string]string{"1": "holds this direction already (h1, from a)", "2": "earlier content of this file"} {
		if err := takenError("E_S", rival, db.Source{Path: "a", SHA256: digest}, &c); !strings.Contains(err.Error(), want) {
			t.Errorf("digest %s: %v, want %s", digest, err, want)
		}
	}
}
