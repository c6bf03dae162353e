package pipeline

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/ingest"
)

// shardsOf ingests the files in so many parts.
func shardsOf(t testing.TB, n int, opts Options) (paths []string) {
	t.Helper()
	dir := t.TempDir()
	for i := range n {
		path := filepath.Join(dir, fmt.Sprintf("%d.db", i+1))
		store, err := db.Create(t.Context(), path, SolverVersion)
		if err != nil {
			t.Fatal(err)
		}
		opts.Shard = db.Shard{Number: i + 1, Count: n}
		if _, err := Run(t.Context(), store, opts); err != nil {
			t.Fatal(err)
		}
		if err := store.Close(); err != nil {
			t.Fatal(err)
		}
		paths = append(paths, path)
	}
	return paths
}

func combineInto(ctx context.Context, t testing.TB, store *db.Store, paths []string, opts Options) (Combination, error) {
	t.Helper()
	var parts []*db.Part
	for _, path := range paths {
		part, err := db.OpenPart(context.WithoutCancel(ctx), path)
		if err != nil {
			t.Fatal(err)
		}
		defer part.Close()
		parts = append(parts, part)
	}
	return Combine(ctx, store, parts, opts, Study{Approve: func(context.Context, int64, int64) (bool, error) { return true, nil }})
}

// TestACombinationGoesOn stops combinations at every batch, in every stage, each time anew
// from where the last one was stopped: nothing is shown before the end, and the end is that of
// one which nobody stopped.
func TestACombinationGoesOn(t *testing.T) {
	opts := options(recordFiles(t, 12))
	whole := newStore(t)
	run(t, whole, opts)
	want := dump(t, whole)
	opts.SkipRotation = true // leaves something to compute to the last stage
	shards := shardsOf(t, 2, opts)
	opts.SkipRotation = false
	store, stops := newStore(t), 0
	alone := func() {
		t.Helper()
		if _, err := combineInto(t.Context(), t, store, shards[1:], opts); err == nil || !strings.Contains(err.Error(), "shard 1 of 2 was being taken over") {
			t.Errorf("half of shard 1 was combined: %v", err)
		}
	}
	for ; ; stops++ {
		ctx, cancel := context.WithCancel(t.Context())
		calls := 0
		stop := func() {
			if calls++; calls > stops {
				cancel()
			}
		}
		opts.Gathered = func(GatherProgress) { stop() }
		opts.Progress = func(Progress) { stop() }
		opts.Rotated = func(Rotated) { stop() }
		_, err := combineInto(ctx, t, store, shards, opts)
		cancel()
		if err == nil {
			break
		}
		if !errors.Is(err, context.Canceled) {
			t.Fatal(err)
		}
		if stops == 1 {
			alone()
		}
		if err := store.View(t.Context(), func(*db.Snapshot) error { return nil }); !errors.Is(err, db.ErrEmpty) && !errors.Is(err, db.ErrUnpublished) {
			t.Fatalf("stopped %d times, the store shows something: %v", stops+1, err)
		}
	}
	if got := dump(t, store); !slices.Equal(got, want) {
		t.Errorf("stopped %d times: another result", stops)
	}
	if stops < 8 {
		t.Errorf("stopped %d times only", stops)
	}
}

// TestDamagedShards holds that a shard's damaged results are computed again, and that damaged
// samples, and what was said of a file, are errors that leave what is combined as it was.
func TestDamagedShards(t *testing.T) {
	opts := options(recordFiles(t, 3))
	whole := newStore(t)
	run(t, whole, opts)
	want := dump(t, whole)
	other := t.TempDir() // of which nothing was computed that the shard has
	put(t, other, "EV1_ST50000.AT2", at2("Invented", "Site 50", "000", 500))
	former := shardsOf(t, 1, options(other))
	// damaged counts what a query finds among where spectra are: a tile is left behind whole.
	const one = `computation_id = 1`
	for _, c := range []struct{ damage, says, damaged string }{
		{`UPDATE tile_part SET sd_m = zeroblob(length(sd_m)) WHERE id = (SELECT max(id) FROM tile_part)`, "", `tile_id = (SELECT max(id) FROM tile)`},
		{`UPDATE tile_part SET sd_m = zeroblob(length(sd_m)) WHERE id = (SELECT min(id) FROM tile_part)`, "", `tile_id = 1`},
		{`UPDATE spectrum SET place = 99 WHERE computation_id = (SELECT max(computation_id) FROM spectrum)`, "", one},
		{`UPDATE measure SET value = value * 1.5 WHERE computation_id = (SELECT min(id) FROM computation) AND name = 'pga_m_s2'`, "", one},
		{`UPDATE series SET data = CAST(substr(data, 1, length(data) - 1) || x'00' AS BLOB) WHERE id = (SELECT min(id) FROM series)`, "samples of", ""},
		{`UPDATE intake SET said = CAST(said || x'00' AS BLOB) WHERE id = (SELECT min(id) FROM intake)`, "intake of", ""},
		{`UPDATE intake_events SET said = CAST(said || x'00' AS BLOB)`, "events of documents", ""},
		{`UPDATE run SET outcome = 'interrupted'`, "did not come to its end", ""},
	} {
		shards := shardsOf(t, 1, opts)
		execute(t, shards[0], c.damage)
		store := newStore(t)
		if _, err := combineInto(t.Context(), t, store, former, opts); err != nil {
			t.Fatal(err)
		}
		before := dump(t, store)
		var done Combination
		part, err := db.OpenPart(t.Context(), shards[0])
		if err == nil {
			part.Close()
			done, err = combineInto(t.Context(), t, store, shards, opts)
		}
		if c.says != "" && !slices.Equal(dump(t, store), before) {
			t.Errorf("%s: what was combined before has changed", c.damage)
		}
		switch {
		case c.says != "" && (err == nil || !strings.Contains(err.Error(), c.says) || !strings.Contains(err.Error(), shards[0])):
			t.Errorf("%s: %v, want an error with %q and the shard's name", c.damage, err, c.says)
		case c.says == "" && err != nil:
			t.Errorf("%s: %v", c.damage, err)
		case c.says == "":
			if got := dump(t, store); !slices.Equal(got, want) {
				t.Errorf("%s: another result", c.damage)
			}
			if want := countIn(t, shards[0], `SELECT count(*) FROM spectrum WHERE `+c.damaged); done.Gathered.Damaged != want || want == 0 {
				t.Errorf("%s: %d damaged results, want %d", c.damage, done.Gathered.Damaged, want)
			}
		}
	}
}

// TestEventsOfFormerRunsStay holds that a shard keeps what documents said when files come later
// that have none beside them.
func TestEventsOfFormerRunsStay(t *testing.T) {
	store, opts := newStore(t), options(recordFiles(t, 1))
	opts.Shard = db.Shard{Number: 1, Count: 1}
	first := &ingest.Metadata{}
	place := ingest.Event{ID: "1", Origin: time.Date(2040, 1, 2, 3, 4, 5, 0, time.UTC), Latitude: ingest.Known(10), Longitude: ingest.Known(20)}
	first.Tell([]ingest.CatalogueEvent{{PublicID: "quake/1", Event: place}, {PublicID: "quake/2", Event: place}})
	opts.Hints.Metadata = first
	run(t, store, opts)
	opts.Hints.Metadata = &ingest.Metadata{}
	opts.Hints.Metadata.Withdraw("quake/2", time.Time{})
	run(t, store, opts)
	err := store.Update(t.Context(), func(tx *db.Tx) error {
		m, err := eventsOf(t.Context(), tx)
		if events := m.Events(); err == nil && (len(events) != 1 || !reflect.DeepEqual(events, first.Events()[:1])) {
			t.Errorf("events %+v", events)
		}
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
}

// TestIntakeIsTheResult holds that a result of reading is the same when it was written down
// and read again.
func TestIntakeIsTheResult(t *testing.T) {
	r := &reader{store: newStore(t), share: share{Number: 1, Count: 1}, isLater: true, hints: ingest.Hints{Metadata: &ingest.Metadata{}}}
	src := newSource(discovered(t, filepath.Join("..", "testdata", "records")), withDefaults(Options{}))
	n := 0
	for it := range src.items(t.Context()) {
		res, err := r.process(t.Context(), it)
		if err != nil {
			t.Fatal(err)
		}
		if res.intake == nil {
			continue
		}
		n++
		got, err := resultOf(res.intake.Said)
		if err != nil {
			t.Fatal(err)
		}
		want := told(res)
		if got = told(got); !reflect.DeepEqual(got, want) {
			t.Errorf("%s: read again as\n%+v\nwant\n%+v", it.Path, got, want)
		}
	}
	if n < 20 {
		t.Errorf("%d files were read", n)
	}
}

func discovered(t *testing.T, dir string) []ingest.Found {
	t.Helper()
	files, err := ingest.Discover([]string{dir})
	if err != nil {
		t.Fatal(err)
	}
	return files
}

// told is a result but for what is kept beside what was said, errors as their words.
func told(res result) result {
	res.intake, res.key, res.elsewhere = nil, db.IntakeKey{}, 0
	res.source.Modified = res.source.Modified.UTC().Round(0)
	for i := range res.refused {
		c := causeOf(res.refused[i].Line, res.refused[i])
		res.refused[i] = &ingest.ParseError{Path: res.source.Path, Line: c.Line, Err: errorText(c.Text)}
	}
	if res.err != nil {
		c := causeOf(0, res.err)
		res.err = errorText(fmt.Sprint(c.Line, c.Text))
	}
	for i := range res.channels {
		res.channels[i].data, res.channels[i].record = nil, ""
	}
	return res
}

// BenchmarkCombine combines 300 records of three components of 8000 samples from four shards.
func BenchmarkCombine(b *testing.B) {
	dir := b.TempDir()
	for s := range 300 {
		for c, component := range []string{"000", "090", "UP"} {
			put(b, dir, fmt.Sprintf("EV1_ST%03d%s.AT2", s, component), at2Of("Invented", fmt.Sprintf("Site %03d", s), component, 0.005, 8000, uint64(10*s+c)))
		}
	}
	opts := options(dir)
	opts.Grid = db.Grid{}
	shards := shardsOf(b, 4, opts)
	stored := 0
	for b.Loop() {
		b.StopTimer()
		store, err := db.Create(b.Context(), filepath.Join(b.TempDir(), "store.db"), SolverVersion)
		if err != nil {
			b.Fatal(err)
		}
		b.StartTimer()
		done, err := combineInto(b.Context(), b, store, shards, opts)
		if err != nil {
			b.Fatal(err)
		}
		stored += done.Summary.Stored
		store.Close()
	}
	b.ReportMetric(float64(stored)/b.Elapsed().Minutes(), "components/min")
}
