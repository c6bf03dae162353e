package pipeline

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"hash/crc32"
	"path/filepath"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/pipeline/spectrum"
)

// measures are the store's measures, as another SQLite client sees them.
func measures(t *testing.T, store *db.Store) (out []string) {
	t.Helper()
	client := client(t, store)
	rows, err := client.QueryContext(t.Context(), `SELECT r.code, k.role, m.name, m.value FROM measure m JOIN computed k ON k.computation_id = m.computation_id JOIN record r ON r.id = k.record_id ORDER BY 1, 2, 3`)
	if err != nil {
		t.Fatal(err)
	}
	defer rows.Close()
	for rows.Next() {
		var code, role, name string
		var value float64
		if err := rows.Scan(&code, &role, &name, &value); err != nil {
			t.Fatal(err)
		}
		out = append(out, fmt.Sprint(code, " ", role, " ", name, " ", value))
	}
	if err := rows.Err(); err != nil {
		t.Fatal(err)
	}
	return out
}

func client(t *testing.T, store *db.Store) *sql.DB {
	t.Helper()
	client, err := sql.Open("sqlite", store.Path())
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { client.Close() })
	return client
}

// rotated are the codes of the records that have rotated spectra.
func rotated(t *testing.T, store *db.Store) []string {
	t.Helper()
	var out []string
	for _, line := range measures(t, store) {
		if f := strings.Fields(line); f[1] == db.RoleRotD100 && f[2] == db.MeasurePGA {
			out = append(out, f[0])
		}
	}
	return out
}

// horizontals writes two horizontals of a station, 000 and what else is asked.
func horizontals(t *testing.T, dir, station, other string, stepS float64, n int) {
	t.Helper()
	seed := 2 * uint64(crc32.ChecksumIEEE([]byte(station))) // stations have other motions
	put(t, dir, station+"_000.AT2", at2("Invented", station, "000", seed))
	put(t, dir, station+"_other.AT2", at2Of("Invented", station, other, stepS, n, seed+1))
}

// reasons runs the pipeline and returns beside the summary what was said of each
// record.
func reasons(t *testing.T, store Store, opts Options) (Summary, map[string]Rotated) {
	t.Helper()
	said := map[string]Rotated{}
	opts.Rotated = func(r Rotated) { said[r.Record] = r }
	return run(t, store, opts), said
}

// What is stored is what the solver gives for the samples and spectra as read
// from the files, whatever has to be done to make a pair of the two.
func TestRotatedSpectraAreThoseOfThePair(t *testing.T) {
	tests := []struct {
		name, other string
		n           int
		between     float64
		assumed     bool
	}{
		{"right angle", "090", 600, 90, false},
		{"the other right angle", "270", 600, 270, false},
		{"oblique", "120", 600, 120, false},
		{"shorter second", "090", 450, 90, false},
		{"longer second, oblique", "060", 700, 60, false},
		{"direction without azimuth", "TRAN", 600, 90, true},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			dir, store := t.TempDir(), newStore(t)
			horizontals(t, dir, "ST1", test.other, 0.01, test.n)
			got, _ := reasons(t, store, options(dir))
			want := Summary{Files: 2, Stored: 2, StoredFiles: 2, Records: 1, Rotated: 1}
			if test.assumed {
				want.Assumed = 1
			}
			if got != want {
				t.Errorf("summary = %+v, want %+v", got, want)
			}
			compareRotated(t, store, at2Samples(t, dir, "ST1_000.AT2"), at2Samples(t, dir, "ST1_other.AT2"), test.between)
		})
	}
}

func at2Samples(t *testing.T, dir, name string) []float64 {
	t.Helper()
	data, _, err := ingest.Read(filepath.Join(dir, name))
	if err != nil {
		t.Fatal(err)
	}
	_, channels, err := ingest.Parse(t.Context(), name, data, ingest.Hints{})
	if err != nil {
		t.Fatal(err)
	}
	return channels[0].Acceleration
}

// compareRotated compares the store's only record with the solver.
func compareRotated(t *testing.T, store *db.Store, first, second []float64, between float64) {
	t.Helper()
	solver, err := spectrum.NewSolver(spectrum.NigamJennings, 0.01, spectrum.Grid{PeriodsS: testGrid.PeriodsS, Dampings: testGrid.Dampings}.Oscillators())
	if err != nil {
		t.Fatal(err)
	}
	p := spectrum.NewPair(first, second, 0, between)
	sd50, sd100 := solver.RotD(p.A, p.B, solver.SD(nil, p.A), solver.SD(nil, p.B))
	peaks50, peaks100 := p.Peaks(0.01)
	for role, want := range map[string][]float64{db.RoleRotD50: sd50, db.RoleRotD100: sd100} {
		if got := stored(t, store, role); !slices.Equal(got, want) {
			t.Errorf("%s = %v, want %v", role, got, want)
		}
	}
	var got []string
	for _, line := range measures(t, store) {
		if strings.Contains(line, " rotd") {
			got = append(got, line[strings.Index(line, " ")+1:])
		}
	}
	want := []string{
		fmt.Sprint("rotd100 pga_m_s2 ", peaks100.PGA), fmt.Sprint("rotd100 pgd_m ", peaks100.PGD), fmt.Sprint("rotd100 pgv_m_s ", peaks100.PGV),
		fmt.Sprint("rotd50 pga_m_s2 ", peaks50.PGA), fmt.Sprint("rotd50 pgd_m ", peaks50.PGD), fmt.Sprint("rotd50 pgv_m_s ", peaks50.PGV),
	}
	if !slices.Equal(got, want) {
		t.Errorf("measures = %v, want %v", got, want)
	}
}

// stored is the SD of the role in the store's only record, dampings outside.
func stored(t *testing.T, store *db.Store, role string) (out []float64) {
	t.Helper()
	err := store.View(t.Context(), func(v *db.Snapshot) error {
		for d := range v.Generation.Grid.Dampings {
			err := v.Spectra(t.Context(), role, d, db.Span{To: len(v.Generation.Grid.PeriodsS)}, func(_ int64, sd []float64) error {
				out = append(out, sd...)
				return nil
			})
			if err != nil {
				return err
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// However the files come, the store is that of one undisturbed run.
func TestRotationDoesNotDependOnTheRuns(t *testing.T) {
	const records = 7
	dir := recordFiles(t, records)
	undisturbed := newStore(t)
	run(t, undisturbed, options(dir))
	want := dump(t, undisturbed)
	if n := len(rotated(t, undisturbed)); n != records {
		t.Fatalf("%d records rotated, want %d", n, records)
	}
	const later = "EV1_ST03090.AT2"
	tests := map[string]func(t *testing.T, store *db.Store) (before int){
		"late partners": func(t *testing.T, store *db.Store) int {
			paths, err := filepath.Glob(filepath.Join(dir, "*000.AT2"))
			if err != nil {
				t.Fatal(err)
			}
			run(t, store, options(paths...))
			return 0
		},
		"one late partner": func(t *testing.T, store *db.Store) int {
			paths, err := filepath.Glob(filepath.Join(dir, "*.AT2"))
			if err != nil {
				t.Fatal(err)
			}
			run(t, store, options(slices.DeleteFunc(paths, func(p string) bool { return filepath.Base(p) == later })...))
			return records - 1
		},
		"a run without rotation": func(t *testing.T, store *db.Store) int {
			opts := options(dir)
			opts.SkipRotation = true
			if got := run(t, store, opts); got.Rotated != 0 || got.Unrotated != records {
				t.Errorf("summary = %+v", got)
			}
			return 0
		},
		"a stop between the stages": func(t *testing.T, store *db.Store) int {
			stopped(t, store, options(dir), func(opts *Options, cancel func()) {
				opts.Progress = func(p Progress) {
					if p.Done == p.Total {
						cancel()
					}
				}
			})
			return 0
		},
		"a stop after a batch of the second stage": func(t *testing.T, store *db.Store) int {
			summary := stopped(t, store, options(dir), func(opts *Options, cancel func()) {
				opts.Clock = ticking(600 * time.Millisecond) // one item a batch
				opts.Rotated = func(Rotated) { cancel() }
			})
			if summary.Unrotated != records-summary.Rotated {
				t.Errorf("summary = %+v, want the rest of %d to be left", summary, records)
			}
			if summary.Rotated == 0 || summary.Rotated == records {
				t.Fatalf("%d records rotated before the stop; the test wants some but not all", summary.Rotated)
			}
			return summary.Rotated
		},
	}
	for name, before := range tests {
		t.Run(name, func(t *testing.T) {
			store := newStore(t)
			n := before(t, store)
			if got := len(rotated(t, store)); got != n {
				t.Errorf("%d records rotated before the last run, want %d", got, n)
			}
			if got := run(t, store, options(dir)); got.Rotated != records-n || got.NotRotated != 0 || got.Unrotated != 0 {
				t.Errorf("summary of the last run = %+v, want %d rotated", got, records-n)
			}
			if !reflect.DeepEqual(dump(t, store), want) {
				t.Error("another store than that of one undisturbed run")
			}
		})
	}
}

// ticking is a clock that goes on by step whenever it is read.
func ticking(step time.Duration) func() time.Time {
	at := time.Now()
	return func() time.Time {
		at = at.Add(step)
		return at
	}
}

// stopped runs the pipeline until something in it cancels the context.
func stopped(t *testing.T, store Store, opts Options, arrange func(opts *Options, cancel func())) Summary {
	t.Helper()
	ctx, cancel := context.WithCancel(t.Context())
	defer cancel()
	arrange(&opts, cancel)
	summary, err := Run(ctx, store, opts)
	if !errors.Is(err, context.Canceled) {
		t.Fatalf("Run = %v, want Canceled", err)
	}
	return summary
}

// What the catalogue changes of the horizontals of a record is rotated again, to
// what a store has that knew the catalogue from the beginning.
func TestTurnedPairsAreRotatedAgain(t *testing.T) {
	tests := map[string]struct {
		text    string
		rotated int
	}{
		"the roles change places":       {"file,azimuth_deg\nST00000.AT2,80\nST00090.AT2,170\n", 1},
		"another azimuth, equal roles":  {"file,azimuth_deg\nST00090.AT2,120\n", 1},
		"what is known already":         {"file,azimuth_deg\nST00090.AT2,90\n", 0},
		"another azimuth of a vertical": {"file,azimuth_deg\nST00UP.AT2,90\n", 0},
	}
	for name, test := range tests {
		t.Run(name, func(t *testing.T) {
			dir, store, fresh := recordFiles(t, 2), newStore(t), newStore(t)
			text := strings.ReplaceAll(test.text, "ST", "EV1_ST")
			run(t, store, options(dir))
			for i, rotated := range []int{test.rotated, 0} {
				opts := options(dir)
				opts.Catalogue = catalogue(t, text)
				if got := run(t, store, opts); got.Rotated != rotated {
					t.Errorf("run %d: summary = %+v, want %d rotated", i, got, rotated)
				}
			}
			opts := options(dir)
			opts.Catalogue = catalogue(t, text)
			run(t, fresh, opts)
			if !reflect.DeepEqual(dump(t, store), dump(t, fresh)) {
				t.Error("another store than one that knew the catalogue from the beginning")
			}
		})
	}
}

// meddling is a store in which another process is at work while pairs are read.
type meddling struct {
	*db.Store
	meddle func(db.Pair)
}

func (m meddling) ReadPair(ctx context.Context, g db.Generation, p db.Pair) (first, second db.StoredMotion, err error) {
	first, second, err = m.Store.ReadPair(ctx, g, p)
	m.meddle(p)
	return first, second, err
}

// A pair that became another one while it was rotated is left to the next run.
func TestAPairThatChangedMeanwhileIsNotStored(t *testing.T) {
	dir, store := recordFiles(t, 3), newStore(t)
	swap := func(p db.Pair) {
		if !strings.HasSuffix(p.Code, "01") {
			return
		}
		err := change(t.Context(), store, func(tx *db.Tx) error {
			return tx.SetRoles(t.Context(), p.RecordID, map[string]string{db.RoleH1: db.RoleH2, db.RoleH2: db.RoleH1})
		})
		if err != nil {
			t.Error(err)
		}
	}
	if got := run(t, meddling{store, swap}, options(dir)); got.Rotated != 2 || got.NotRotated != 0 {
		t.Errorf("summary = %+v", got)
	}
	if n := len(rotated(t, store)); n != 2 {
		t.Errorf("%d records rotated, want 2", n)
	}
	if got := run(t, store, options(dir)); got.Rotated != 1 {
		t.Errorf("summary of the next run = %+v", got)
	}
}

// A failing store ends the second stage too, and says why.
func TestAStoreThatFailsInTheSecondStage(t *testing.T) {
	full := errors.New("disk full")
	store := &failing{Store: newStore(t), before: func(n int) error {
		if n == 3 { // after the run's begin and the files
			return full
		}
		return nil
	}}
	summary, err := Run(t.Context(), store, options(recordFiles(t, 3)))
	if !errors.Is(err, full) || summary.Stored != 9 || summary.Rotated != 0 {
		t.Errorf("Run = %+v, %v", summary, err)
	}
}
