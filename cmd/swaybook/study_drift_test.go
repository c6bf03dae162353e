package main

import (
	"bytes"
	"database/sql"
	"encoding/json"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/query"
)

// What happened to motions, by hand: of A another component was delivered, B went, C and D
// changed in their metadata or their event's, I in its station's, E and F are chosen otherwise, G is computed
// anew by one of its horizontals, H is as it was.
func TestCausesOf(t *testing.T) {
	motion := func(record, event string) query.Motion {
		return query.Motion{Record: record, Role: "rotd50", Members: []string{"h1", "h2"}, Event: event}
	}
	before := []query.Motion{motion("B", "e1"), motion("D", "e2"), motion("F", "e1"), motion("G", "e1"), motion("H", "e1"), motion("I", "e1")}
	after := []query.Motion{motion("A", "e1"), motion("C", "e1"), motion("E", "e1"), motion("G", "e1"), motion("H", "e1")}
	changes := &db.Changes{
		Records:    db.Change{Removed: []string{"B"}, Changed: []string{"C"}},
		Components: db.Change{Added: []string{"A h2", "E v"}},
		Events:     db.Change{Changed: []string{"e2"}},
		Stations:   db.Change{Changed: []string{"X.ONE"}},
		Recomputed: []string{"G h2", "H v"},
	}
	got := map[string][]string{}
	compared := &comparison{changes: changes, stations: map[string]string{"I": "X.ONE", "H": "X.TWO"}}
	for _, c := range compared.causes(before, after) {
		got[c.Cause] = c.Codes
	}
	want := map[string][]string{
		causeAdded: {"A rotd50"}, causeRemoved: {"B rotd50"}, causeJoined: {"C rotd50"}, causeLeft: {"D rotd50", "I rotd50"},
		causeSelected: {"E rotd50"}, causeForgotten: {"F rotd50"}, causeComputed: {"G rotd50"},
	}
	if !reflect.DeepEqual(got, want) {
		t.Errorf("causes %v, want %v", got, want)
	}
}

const driftStudy = `name = "Moles"
store = "moles.db"
sources = "records"
exclude = "*damaged*"
recipe = "as-delivered"
periods = [0.2, 0.5, 1]
dampings = "5%"
max-drift = "5%"
state = "state.json"

[spectrum.all]
component = "each"
files = "all.csv"
`

// driftingStudy is a study whose first run has ended, and its folder.
func driftingStudy(t *testing.T) (dir, file string) {
	t.Helper()
	dir = t.TempDir()
	file = filepath.Join(dir, "moles.toml")
	records := filepath.Join(dir, "records")
	if err := os.CopyFS(records, os.DirFS(filepath.Join("..", "..", "testdata", "records", "at2"))); err != nil {
		t.Fatal(err)
	}
	makeOld(t, records)
	if err := os.WriteFile(file, []byte(driftStudy), 0o666); err != nil {
		t.Fatal(err)
	}
	reprocessed(t, file, exitDone)
	return dir, file
}

// makeOld has the files of a folder look as if nobody had touched them for a day.
func makeOld(t *testing.T, dir string) {
	t.Helper()
	old := time.Now().Add(-24 * time.Hour)
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		if err := os.Chtimes(filepath.Join(dir, e.Name()), old, old); err != nil {
			t.Fatal(err)
		}
	}
}

// reprocessed runs a study and returns the state that it left.
func reprocessed(t *testing.T, file string, code int, args ...string) studyState {
	t.Helper()
	var stdout, stderr bytes.Buffer
	if got := run(t.Context(), append([]string{"swaybook", "--quiet", "reprocess", file, "--json"}, args...), &stdout, &stderr); got != code {
		t.Fatalf("exit code %d, want %d: %s", got, code, stderr.String())
	}
	var s, left studyState
	text, err := os.ReadFile(filepath.Join(filepath.Dir(file), "state.json"))
	if err == nil {
		err = json.Unmarshal(text, &left)
	}
	if err == nil {
		err = json.Unmarshal(stdout.Bytes(), &s)
	}
	if err != nil || !reflect.DeepEqual(s, left) {
		t.Fatalf("printed %s, left %s, %v", stdout.String(), text, err)
	}
	return s
}

// An edition of an earlier solver is compared as it was computed, though no question could
// read it: here the same solver under another name, so that nothing drifts.
func TestDriftSinceAnEarlierSolver(t *testing.T) {
	dir, file := driftingStudy(t)
	store, err := sql.Open("sqlite", filepath.Join(dir, "moles.db"))
	if err != nil {
		t.Fatal(err)
	}
	defer store.Close()
	if _, err := store.Exec(`UPDATE generation SET solver = 'earlier'`); err != nil {
		t.Fatal(err)
	}
	s := reprocessed(t, file, exitDone)
	if s.IsRead || s.Drift == nil || s.Drift.SolverBefore != "earlier" || s.Drift.Solver == "earlier" || s.Changes.Recomputed.Count == 0 {
		t.Errorf("after a new solver: %+v", s)
	}
	for _, p := range s.Drift.Products {
		if p.Changed != 0 || len(p.Causes) != 1 || p.Causes[0].Cause != causeComputed {
			t.Errorf("%s: changed %d for %v, the same ordinates", p.Product, p.Changed, p.Causes)
		}
	}
}

// A run that finds nothing changed reads no file, and says what is still rejected.
func TestUnchangedStudy(t *testing.T) {
	dir, file := driftingStudy(t)
	broken := filepath.Join(dir, "records", "broken.V2")
	if err := os.WriteFile(broken, []byte("This file is none.\n"), 0o666); err != nil {
		t.Fatal(err)
	}
	makeOld(t, filepath.Join(dir, "records"))
	first := reprocessed(t, file, exitRejected)
	if !first.IsRead || *first.Rejected != 1 || first.Outcome != outcomePublished {
		t.Errorf("a rejected file: %+v", first)
	}
	again := reprocessed(t, file, exitRejected)
	if again.IsRead || again.Ingest != nil || *again.Rejected != 1 || again.Outcome != outcomeUnchanged || *again.Published != *first.Published || again.Drift != nil {
		t.Errorf("unchanged: %+v", again)
	}
	var stdout, stderr bytes.Buffer
	run(t.Context(), []string{"swaybook", "reprocess", file}, &stdout, &stderr)
	for _, line := range []string{"No file has changed since the last run.\n", "Files rejected: 1; see: swaybook --store "} {
		if !strings.Contains(stdout.String(), line) {
			t.Errorf("it says %q", stdout.String())
		}
	}
}
