package pipeline

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"math/rand/v2"
	"os"
	"path"
	"path/filepath"
	"reflect"
	"runtime"
	"slices"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/ingest/archive"
)

// testGrid is small, so that the tests are about the pipeline.
var testGrid = db.Grid{PeriodsS: []float64{0.1, 0.5, 1}, Dampings: []float64{0.02, 0.05}}

// at2 is an invented component in the .AT2 layout, in g.
func at2(event, station, component string, seed uint64) string {
	return at2Of(event, station, component, 0.01, 600, seed)
}

func at2Of(event, station, component string, stepS float64, n int, seed uint64) string {
	rng := rand.New(rand.NewPCG(seed, 3))
	var b strings.Builder
	fmt.Fprintf(&b, "INVENTED RECORD\n%s, 3/12/2026, %s, %s\nACCELERATION TIME SERIES IN UNITS OF G\nNPTS=  %d, DT=   %.4f SEC\n", event, station, component, n, stepS)
	for i := range n {
		fmt.Fprintf(&b, "%15.7E", 0.1*rng.NormFloat64())
		if i%5 == 4 || i == n-1 {
			b.WriteByte('\n')
		}
	}
	return b.String()
}

// recordFiles writes records of three components for so many stations, with a
// damaged file, a readme and a copy among them.
func recordFiles(t *testing.T, stations int) string {
	t.Helper()
	dir := t.TempDir()
	for s := range stations {
		for c, component := range []string{"000", "090", "UP"} {
			name := fmt.Sprintf("EV1_ST%02d%s.AT2", s, component)
			put(t, dir, name, at2("Invented", fmt.Sprintf("Site %02d", s), component, uint64(10*s+c)))
		}
	}
	put(t, dir, "README.txt", "Invented records.\n")
	put(t, dir, "sub/copy.txt", at2("Invented", "Site 00", "000", 0))
	put(t, dir, "bad/cut.AT2", at2("Invented", "Site 99", "000", 7)[:3000])
	put(t, dir, "bad/empty.AT2", "")
	return dir
}

func put(t testing.TB, dir, name, text string) {
	t.Helper()
	path := filepath.Join(dir, filepath.FromSlash(name))
	if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
		t.Fatal(err)
	}
}

func newStore(t *testing.T) *db.Store {
	t.Helper()
	s, err := db.Create(t.Context(), filepath.Join(t.TempDir(), "store.db"), SolverVersion)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { s.Close() })
	return s
}

func options(paths ...string) Options {
	return Options{Paths: paths, Grid: testGrid, Program: "test", Started: time.Now(), Clock: time.Now}
}

func run(t *testing.T, store Store, opts Options) Summary {
	t.Helper()
	s, err := Run(t.Context(), store, opts)
	if err != nil {
		t.Fatal(err)
	}
	s.Seconds = 0
	return s
}

// dump is all that a store says of its components and spectra, without the
// ids, which nobody sees.
func dump(t *testing.T, store *db.Store) []string {
	t.Helper()
	return append(shown(t, store), measures(t, store)...)
}

// shown is what questions see.
func shown(t *testing.T, store *db.Store) []string {
	t.Helper()
	var out []string
	err := store.View(t.Context(), func(v *db.Snapshot) error {
		components, err := v.Components(t.Context(), db.AllDetails)
		if err != nil {
			return err
		}
		code := map[int64]string{}
		for _, c := range components {
			code[c.RecordID] = c.Record.Code
			out = append(out, fmt.Sprint(c.Record.Code, c.Role, c.Label, c.AzimuthDeg == nil, c.Record.Siting, nameOf(c.SourcePath), c.PGA, c.PGV, c.PGD))
		}
		for d := range v.Generation.Grid.Dampings {
			for _, role := range []string{db.RoleH1, db.RoleH2, db.RoleV, db.RoleRotD50, db.RoleRotD100} {
				whole := db.Span{To: len(v.Generation.Grid.PeriodsS)}
				err := v.Spectra(t.Context(), role, d, whole, func(record int64, sd []float64) error {
					out = append(out, fmt.Sprint(d, code[record], role, sd))
					return nil
				})
				if err != nil {
					return err
				}
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	slices.Sort(out)
	return out
}

// nameOf is the base name of a source, in an archive or not.
func nameOf(source string) string { return path.Base(archive.InPlace(filepath.ToSlash(source))) }

func TestRunStoresAndHolds(t *testing.T) {
	dir, store := recordFiles(t, 4), newStore(t)
	got := run(t, store, options(dir))
	want := Summary{Files: 16, Stored: 12, StoredFiles: 12, Held: 1, Skipped: 1, Rejected: 2, Records: 4, Rotated: 4}
	if got != want {
		t.Errorf("first run = %+v, want %+v", got, want)
	}
	before := dump(t, store)
	got = run(t, store, options(dir))
	want = Summary{Files: 16, Held: 13, Skipped: 1, Rejected: 2}
	if got != want {
		t.Errorf("second run = %+v, want %+v", got, want)
	}
	if after := dump(t, store); !reflect.DeepEqual(before, after) {
		t.Error("the second run changed the store")
	}
	rejections, err := rejectionsOf(t, store)
	if err != nil || len(rejections) != 2 {
		t.Fatalf("rejections = %v, %v", rejections, err)
	}
	for _, r := range rejections {
		if !strings.Contains(r.Path, "bad") || r.Cause == "" {
			t.Errorf("rejection = %+v", r)
		}
	}
}

// A damaged file that is mended is stored and its rejection forgotten.
func TestAMendedFileLosesItsRejection(t *testing.T) {
	dir, store := recordFiles(t, 1), newStore(t)
	run(t, store, options(dir))
	put(t, dir, "bad/cut.AT2", at2("Invented", "Site 99", "000", 7))
	if got := run(t, store, options(dir)); got.Stored != 1 || got.Rejected != 1 {
		t.Errorf("run = %+v", got)
	}
	if rejections, err := rejectionsOf(t, store); err != nil || len(rejections) != 1 {
		t.Errorf("rejections = %v, %v", rejections, err)
	}
}

func TestResultsDependNeitherOnWorkersNorOnOrder(t *testing.T) {
	dir := recordFiles(t, 6)
	var want []string
	for _, workers := range []int{1, 2, 8} {
		for _, paths := range [][]string{{dir}, {filepath.Join(dir, "sub"), dir, filepath.Join(dir, "EV1_ST03UP.AT2")}} {
			store := newStore(t)
			opts := options(paths...)
			opts.Workers = workers
			run(t, store, opts)
			got := dump(t, store)
			if want == nil {
				want = got
			}
			if !reflect.DeepEqual(got, want) {
				t.Errorf("%d workers, paths %v: another store", workers, paths)
			}
		}
	}
}

// failing is a store whose updates fail from the nth on, or which calls a
// function before each.
type failing struct {
	*db.Store
	updates int
	before  func(n int) error
}

func (f *failing) Update(ctx context.Context, do func(*db.Tx) error) error {
	f.updates++
	if err := f.before(f.updates); err != nil {
		return err
	}
	return f.Store.Update(ctx, do)
}

// A run that is stopped keeps whole batches, and the next run finishes the
// rest, to the same store as an undisturbed one.
func TestAStoppedRunIsFinishedByTheNext(t *testing.T) {
	dir := recordFiles(t, 60)
	undisturbed := newStore(t)
	run(t, undisturbed, options(dir))

	store := newStore(t)
	ctx, cancel := context.WithCancel(t.Context())
	defer cancel()
	opts := options(dir)
	opts.Progress = func(Progress) { cancel() } // after the first batch
	summary, err := Run(ctx, store, opts)
	if !errors.Is(err, context.Canceled) {
		t.Fatalf("Run = %v, want Canceled", err)
	}
	if summary.Stored == 0 || summary.Stored >= 180 {
		t.Fatalf("%d components before the stop; the test wants some but not all", summary.Stored)
	}
	if held := len(componentsOf(t, store)); held != summary.Stored {
		t.Errorf("%d components held, the summary says %d", held, summary.Stored)
	}
	run(t, store, options(dir))
	if got, want := dump(t, store), dump(t, undisturbed); !reflect.DeepEqual(got, want) {
		t.Error("the finished store differs from an undisturbed one")
	}
}

// componentsOf are all that is stored, published or not.
func componentsOf(t *testing.T, store *db.Store) (out []db.HeldComponent) {
	t.Helper()
	if err := change(t.Context(), store, func(*db.Tx) error { return nil }); err != nil {
		t.Fatal(err)
	}
	err := store.View(t.Context(), func(v *db.Snapshot) (err error) {
		out, err = v.Components(t.Context(), db.AllDetails)
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// A store that fails ends the run: no file is read long after it.
func TestAFailingStoreStopsTheRun(t *testing.T) {
	full := errors.New("disk full")
	dir := recordFiles(t, 100)
	store := &failing{Store: newStore(t), before: func(n int) error {
		if n > 1 { // the first opens the run
			return full
		}
		return nil
	}}
	opts := options(dir)
	opts.Workers = 1
	if _, err := Run(t.Context(), store, opts); !errors.Is(err, full) {
		t.Fatalf("Run = %v, want %v", err, full)
	}
	if store.updates > 3 {
		t.Errorf("%d updates after the store had failed", store.updates)
	}
	if held := componentsOf(t, store.Store); len(held) != 0 {
		t.Errorf("%d components in a store that failed", len(held))
	}
	// The driver's own goroutines come and go; ours were waited for.
	stacks := make([]byte, 1<<20)
	stacks = stacks[:runtime.Stack(stacks, true)]
	for _, name := range []string{"pipeline.stage", "pipeline.(*writer)"} {
		if bytes.Contains(stacks, []byte(name)) {
			t.Errorf("%s runs on after the run", name)
		}
	}
}

func TestTheGridIsFixedByTheFirstRun(t *testing.T) {
	dir, store := recordFiles(t, 1), newStore(t)
	run(t, store, options(dir))
	opts := options(dir)
	opts.Grid.PeriodsS = []float64{0.3}
	if _, err := Run(t.Context(), store, opts); !errors.Is(err, db.ErrOtherGeneration) || !strings.Contains(err.Error(), "--store") {
		t.Errorf("another grid: %v", err)
	}
	opts.Grid = db.Grid{}
	run(t, store, opts) // none asked for: the store's own
	if _, err := client(t, store).ExecContext(t.Context(), `UPDATE generation SET solver = 'older'`); err != nil {
		t.Fatal(err)
	}
	held := len(componentsOf(t, store))
	if s := run(t, store, opts); s.Stored != 0 || s.Recomputed != held || s.Rotated != 1 {
		t.Errorf("another solver: %+v, want %d components computed anew", s, held)
	}
	err := store.View(t.Context(), func(v *db.Snapshot) error { return v.Generation.CheckSolver(SolverVersion) })
	if err != nil {
		t.Errorf("after another solver: %v", err)
	}
	opts.Grid.Dampings = []float64{-1}
	opts.Grid.PeriodsS = []float64{1}
	if _, err := Run(t.Context(), newStore(t), opts); err == nil {
		t.Error("no error for a negative damping")
	}
}

func catalogue(t *testing.T, text string) *ingest.Catalogue {
	t.Helper()
	c, err := ingest.ReadCatalogue("catalogue.csv", strings.NewReader(text))
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// What the catalogue states replaces what a header or an earlier run stored, at
// once: a second run with the same catalogue changes nothing.
func TestTheCatalogueOverridesWhatIsStored(t *testing.T) {
	dir, store := recordFiles(t, 1), newStore(t)
	opts := options(dir)
	opts.Catalogue = catalogue(t, "event,magnitude,magnitude_type\ninvented-20260312,5.0,ML\n")
	run(t, store, opts)
	put(t, dir, "later/ST7000.AT2", at2("Invented", "Site 7", "000", 77))
	magnitudes := func() (out []string) {
		for _, c := range componentsOf(t, store) {
			out = append(out, fmt.Sprint(*c.Record.Event.Magnitude, c.Record.Event.MagnitudeType))
		}
		return out
	}
	opts.Catalogue = catalogue(t, "event,magnitude\ninvented-20260312,7.1\n")
	for range 2 {
		run(t, store, opts)
		for _, m := range magnitudes() {
			if m != "7.1" {
				t.Errorf("magnitude and type = %q, want 7.1 of unknown type", m)
			}
		}
	}
}

// A file of held content gets what the catalogue says of it, whether its twin
// was stored in an earlier run or a moment ago.
func TestTheCatalogueDescribesTwins(t *testing.T) {
	text := "file,magnitude\ncopy.txt,7.7\n"
	for _, runs := range []int{1, 2} {
		dir, store := recordFiles(t, 1), newStore(t)
		for range runs {
			opts := options(dir)
			opts.Catalogue = catalogue(t, text)
			run(t, store, opts)
		}
		if m := componentsOf(t, store)[0].Record.Event.Magnitude; m == nil || *m != 7.7 {
			t.Errorf("after %d runs: magnitude %v, want 7.7", runs, m)
		}
	}
}

// A catalogue that comes later still describes what is held.
func TestTheCatalogueDescribesHeldRecords(t *testing.T) {
	dir, store := recordFiles(t, 2), newStore(t)
	run(t, store, options(dir))
	opts := options(dir)
	opts.Catalogue = catalogue(t, "event,station,magnitude,distance_km,vs30_m_s,siting,instrument,low_cut_hz\n"+
		"invented-20260312,site-01,6.2,17.5,350,structure,Roof,0.3\n")
	if got := run(t, store, opts); got.Stored != 0 {
		t.Errorf("run = %+v", got)
	}
	found := 0
	for _, c := range componentsOf(t, store) {
		if c.Record.Station.Code != "site-01" {
			continue
		}
		found++
		if c.Record.Distances.BestKM == nil || *c.Record.Distances.BestKM != 17.5 || c.Record.Event.Magnitude == nil || *c.Record.Event.Magnitude != 6.2 ||
			c.Record.Siting != "structure" || c.Record.Instrument != "Roof" || c.LowCutHz == nil || *c.LowCutHz != 0.3 || *c.Record.Station.Vs30MPS != 350 {
			t.Errorf("record = %+v, event %+v", c.Record, c.Record.Event)
		}
	}
	if found != 3 {
		t.Errorf("%d components of the station, want 3", found)
	}
	before := dump(t, store)
	run(t, store, opts)
	if !reflect.DeepEqual(before, dump(t, store)) {
		t.Error("the same catalogue again changed the store")
	}
}

// A fault of this program on one file is that file's rejection, and the others are read.
func TestAFaultStopsNoBatch(t *testing.T) {
	dir := t.TempDir()
	put(t, dir, "a000.AT2", at2("Invented", "Site 00", "000", 1))
	store := newStore(t)
	run, err := begin(t.Context(), store, withDefaults(options(dir)))
	if err != nil {
		t.Fatal(err)
	}
	run.reader.computer.solvers = solvers{} // without a grid, which it cannot do
	var cause string
	opts := withDefaults(options(dir))
	opts.Progress = func(p Progress) { cause = fmt.Sprint(p.File.Causes) }
	files, err := ingest.Discover([]string{dir})
	if err != nil {
		t.Fatal(err)
	}
	w := newWriter(store, run, opts, newSource(files, withDefaults(options())))
	if err := w.files(t.Context()); err != nil {
		t.Fatal(err)
	}
	if w.summary.Rejected != 1 || !strings.Contains(cause, "a fault of swaybook") {
		t.Errorf("%d files rejected for %s, want one for a fault of the program", w.summary.Rejected, cause)
	}
}

func rejectionsOf(t *testing.T, store *db.Store) (found []db.Rejection, err error) {
	t.Helper()
	err = store.View(t.Context(), func(v *db.Snapshot) (err error) {
		found, err = v.Rejections(t.Context())
		return err
	})
	return found, err
}

// change changes the store and publishes it, as a run does.
func change(ctx context.Context, store *db.Store, f func(*db.Tx) error) error {
	return store.Update(ctx, func(tx *db.Tx) error {
		if err := f(tx); err != nil {
			return err
		}
		g, ok, err := tx.Current(ctx)
		if err != nil || !ok {
			return err
		}
		run, err := tx.StartRun(ctx, "ingest", "test", time.Date(2026, 1, 2, 3, 4, 5, 0, time.UTC))
		if err != nil {
			return err
		}
		isNew, err := tx.PutEdition(ctx, run, g.ID)
		if err != nil || !isNew {
			return err
		}
		return tx.Publish(ctx, run)
	})
}
