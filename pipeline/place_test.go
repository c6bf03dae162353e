package pipeline

import (
	"fmt"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/ingest"
)

// seat is a channel to place and where it shall come to stand.
type seat struct {
	channel ingest.Channel
	path    string
	want    string // record and role, or part of the error
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
			{at(horizontal(90), "2", noon), "a", "E_S h2"}, {at(vertical, "3", noon), "b", "E_S v"}, {at(horizontal(0), "1", noon), "c", "E_S h1"},
		}},
		{"starts within a second are one trigger", []seat{
			{at(horizontal(90), "", noon), "a", "E_S h2"}, {at(horizontal(0), "", noon.Add(time.Second)), "b", "E_S h1"},
		}},
		{"a second trigger is a record of its own", []seat{
			{at(horizontal(0), "", noon), "a", "E_S h1"}, {at(horizontal(0), "", noon.Add(40*time.Second)), "b", "E_S_T120040 h1"},
			{at(horizontal(90), "", noon.Add(40*time.Second)), "c", "E_S_T120040 h2"},
		}},
		{"versions of a channel are records of their own", []seat{
			{at(horizontal(0), "1", noon), "a", "E_S h1"}, {at(horizontal(0), "1", noon), "b", "E_S_v2 h1"}, {at(horizontal(0), "1", noon), "c", "E_S_v3 h1"},
			{at(horizontal(90), "2", noon), "d", "E_S h2"}, {at(horizontal(90), "2", noon), "e", "E_S_v2 h2"},
		}},
		{"versions of a vertical", []seat{
			{at(vertical, "", none), "a", "E_S v"}, {at(vertical, "", none), "b", "E_S_v2 v"},
		}},
		{"raw and corrected do not mix", []seat{
			{processed(at(horizontal(0), "1", noon), ingest.ProcessingRaw), "a", "E_S h1"},
			{processed(at(horizontal(90), "2", noon), ingest.ProcessingCorrected), "b", "E_S_v2 h2"},
			{processed(at(horizontal(90), "2", noon), ingest.ProcessingRaw), "c", "E_S h2"},
			{processed(at(horizontal(0), "1", noon), ingest.ProcessingCorrected), "d", "E_S_v2 h1"},
		}},
		{"another sensor in one direction is a record of its own", []seat{
			{at(horizontal(0), "1", noon), "a", "E_S h1"}, {at(horizontal(0), "9", noon), "b", "E_S_ch9 h1"}, {at(horizontal(0), "9", noon), "c", "E_S_ch9_v2 h1"},
		}},
		{"roles that collide follow the azimuths, whatever came first", []seat{
			{at(horizontal(40), "", noon), "a", "E_S h1"}, {at(horizontal(320), "", noon), "b", "E_S h2"},
		}},
		{"roles that collide follow the azimuths, in the other order", []seat{
			{at(horizontal(320), "", noon), "a", "E_S h2"}, {at(horizontal(40), "", noon), "b", "E_S h1"},
		}},
		{"components of a later trigger may straddle a second", []seat{
			{at(horizontal(0), "", noon), "a", "E_S h1"}, {at(horizontal(0), "", noon.Add(40*time.Second)), "b", "E_S_T120040 h1"},
			{at(horizontal(90), "", noon.Add(41*time.Second)), "c", "E_S_T120040 h2"}, {at(vertical, "", noon.Add(39*time.Second)), "d", "E_S_T120040 v"},
		}},
		{"equal stems in folders of one name", []seat{
			{anonymous, "EV1/records/run1.csv", "run1 h1"}, {anonymous, "EV2/records/run1.csv", "run1_ev2-records h1"},
			{anonymous, "EV3/records/run1.csv", "run1_ev3-records h1"}, {anonymous, "EV3/records/run1.txt", "states no direction"},
		}},
		{"components without identity join within a folder only", []seat{
			{towards(anonymous, 0), "EV1/ST07_N.csv", "ST07 h1"}, {towards(anonymous, 90), "EV2/ST07_E.csv", "ST07_ev2 h2"}, {towards(anonymous, 90), "EV1/ST07_E.csv", "ST07 h2"},
		}},
		{"another content of the same file", []seat{
			{at(horizontal(0), "", noon), "a", "E_S h1"}, {at(horizontal(0), "", noon), "a", "E_S h1"},
		}},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) { placeAll(t, tt.seats) })
	}
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
	w := newWriter(store, run, withDefaults(options()), newSource(nil, nil))
	refused := map[string]string{}
	for i, s := range seats {
		res := result{
			source: db.Source{Path: s.path, SHA256: fmt.Sprint(i), Format: "invented"}, rel: s.path, stem: stemOf(s.path), outcome: Stored,
			channels: []solved{{channel: s.channel, samples: 1, digest: "-", data: []byte{0},
				spectra: db.NewSpectra(nil, map[string]float64{db.MeasurePGA: 1, db.MeasurePGV: 1, db.MeasurePGD: 1}, nil)}},
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
