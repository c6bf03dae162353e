package query

import (
	"context"
	"database/sql"
	"io"
	"slices"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// cutAll leaves no samples from which anything could be computed.
const cutAll = `UPDATE series SET data = substr(data, 1, 20)`

// keptRecords are pairs, one with a vertical component and one with other steps.
func keptRecords() []inventedRecord {
	one := pulses("one", inventedComponent{peak: 2, level: 1}, inventedComponent{level: 1})
	one.components = append(one.components, inventedComponent{role: db.RoleV, peak: 0.5, level: 1})
	out := []inventedRecord{
		one,
		pulses("other", inventedComponent{peak: 3, stepS: 0.005, level: 1}, inventedComponent{stepS: 0.005, level: 1}),
		pulses("third", inventedComponent{level: 1}, inventedComponent{peak: 5, level: 1}),
	}
	for i := range out {
		out[i].unrotated = false
	}
	return out
}

type answerText interface {
	Write(io.Writer, Format, Units) error
}

// keptQuestions need ordinates off the grid.
var keptQuestions = map[string]func(context.Context, *db.Store) (answerText, error){
	"rotated": func(ctx context.Context, s *db.Store) (answerText, error) {
		return SpectrumQuestion{Damping: 0.03, PeriodsS: []float64{0.7, 0.3}}.Ask(ctx, s)
	},
	"single": func(ctx context.Context, s *db.Store) (answerText, error) {
		return SpectrumQuestion{Selection: Selection{Component: ComponentEach}, Damping: 0.03}.Ask(ctx, s)
	},
	"combined": func(ctx context.Context, s *db.Store) (answerText, error) {
		return SpectrumQuestion{Selection: Selection{Component: ComponentGeomean}, Damping: 0.03}.Ask(ctx, s)
	},
	"vertical over horizontal": func(ctx context.Context, s *db.Store) (answerText, error) {
		return SpectrumQuestion{Selection: Selection{Component: ComponentGeomean}, Damping: 0.07, Measure: MeasureVH}.Ask(ctx, s)
	},
	"over 5%": func(ctx context.Context, s *db.Store) (answerText, error) {
		return SpectrumQuestion{Damping: 0.01, PeriodsS: []float64{0.7}, Measure: MeasureEta}.Ask(ctx, s)
	},
	"demand over a band": func(ctx context.Context, s *db.Store) (answerText, error) {
		return DemandQuestion{Structure: Structure{PeriodS: 0.7, Damping: 0.03}, BandWidth: 0.2}.Ask(ctx, s)
	},
	"portfolio": func(ctx context.Context, s *db.Store) (answerText, error) {
		list := make([]PortfolioStructure, 150) // of more than two blocks
		for i := range list {
			list[i] = PortfolioStructure{Structure: Structure{PeriodS: 0.5 + 0.01*float64(i%140), Damping: 0.04}, ID: "s"}
		}
		return PortfolioQuestion{Structures: list}.Ask(ctx, s)
	},
}

func askText(t *testing.T, store *db.Store, ask func(context.Context, *db.Store) (answerText, error)) string {
	t.Helper()
	answer, err := ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	if err := store.Unkept(); err != nil {
		t.Error(err)
	}
	return written(t, answer, FormatJSON, UnitsSI)
}

// keptRows counts what is kept.
func keptRows(t *testing.T, store *db.Store) (n int) {
	t.Helper()
	client, err := sql.Open("sqlite", store.Path())
	if err != nil {
		t.Fatal(err)
	}
	defer client.Close()
	if err := client.QueryRowContext(t.Context(), `SELECT count(*) FROM off_grid`).Scan(&n); err != nil {
		t.Fatal(err)
	}
	return n
}

// The same question again has the same answer, to the bit, without the samples.
func TestOrdinatesAreComputedOnce(t *testing.T) {
	for name, ask := range keptQuestions {
		t.Run(name, func(t *testing.T) {
			store := newStore(t, handGrid, keptRecords())
			first := askText(t, store, ask)
			rows := keptRows(t, store)
			if rows == 0 {
				t.Fatal("nothing kept")
			}
			if again := askText(t, store, ask); again != first {
				t.Errorf("again:\n%s\nwant\n%s", again, first)
			}
			alter(t, store, cutAll)
			if again := askText(t, store, ask); again != first {
				t.Errorf("without samples:\n%s\nwant\n%s", again, first)
			}
			if now := keptRows(t, store); now != rows {
				t.Errorf("%d rows, at first %d", now, rows)
			}
		})
	}
}

// Questions in any order answer as they do alone: blocks of other oscillators or,
// from a process at the same time, of the same, records that came later, and rows that are
// damaged make no difference.
func TestKeptOrdinatesComplete(t *testing.T) {
	records := keptRecords()
	whole := map[string]string{}
	for name, ask := range keptQuestions {
		whole[name] = askText(t, newStore(t, handGrid, records), ask)
	}
	for range 3 { // orders of a map differ
		store := newStore(t, handGrid, records[:2])
		for _, ask := range keptQuestions {
			askText(t, store, ask)
		}
		addRecord(t, store, records[2])
		alter(t, store, `INSERT INTO off_grid_block (generation_id, oscillators) SELECT generation_id, oscillators FROM off_grid_block`)
		alter(t, store, `UPDATE off_grid SET sd_m = substr(sd_m, 1, 7) WHERE computation_id IN (SELECT computation_id FROM computed WHERE record_id = 1 AND role <> 'v')`)
		alter(t, store, `UPDATE series SET data = substr(data, 1, 20) WHERE id IN (SELECT series_id FROM component WHERE record_id = 2)`)
		for name, ask := range keptQuestions {
			if got := askText(t, store, ask); got != whole[name] {
				t.Errorf("%s:\n%s\nwant\n%s", name, got, whole[name])
			}
		}
		alter(t, store, cutAll)
		for name, ask := range keptQuestions {
			if got := askText(t, store, ask); got != whole[name] {
				t.Errorf("%s, without samples:\n%s\nwant\n%s", name, got, whole[name])
			}
		}
	}
}

func addRecord(t *testing.T, store *db.Store, r inventedRecord) {
	t.Helper()
	err := change(t.Context(), store, func(tx *db.Tx) error {
		run, err := tx.StartRun(t.Context(), "ingest", "test", time.Date(2026, 1, 3, 3, 4, 5, 0, time.UTC))
		if err != nil {
			return err
		}
		g, _, err := tx.Current(t.Context())
		if err != nil {
			return err
		}
		return r.put(t.Context(), tx, run, g)
	})
	if err != nil {
		t.Fatal(err)
	}
}

// Ordinates by another method than the store's are never kept, and kept ones never taken
// for them.
func TestOtherMethodsAreNotKept(t *testing.T) {
	store := newStore(t, handGrid, keptRecords())
	exact := SpectrumQuestion{Damping: 0.03, PeriodsS: []float64{0.7}, Measure: MeasureSD}
	newmark := exact
	newmark.Method = spectrum.NewmarkAverage
	alone := askSpectrum(t, store, newmark).Reductions[0].Max
	if n := keptRows(t, store); n != 0 {
		t.Errorf("%d rows kept", n)
	}
	kept := askSpectrum(t, store, exact).Reductions[0].Max
	if again := askSpectrum(t, store, newmark).Reductions[0].Max; again != alone || again == kept {
		t.Errorf("newmark %v, then %v beside exact %v", alone, again, kept)
	}
}

// An oscillator that comes twice has its ordinates twice.
func TestOscillatorsThatComeAgain(t *testing.T) {
	store := newStore(t, handGrid, keptRecords())
	for range 2 { // computed, then kept
		err := view(t.Context(), store, &Selection{}, func(snapshot *db.Snapshot) error {
			p, err := pick(t.Context(), snapshot, Selection{Component: ComponentH1, Siting: SitingGround}, db.DetailMotion)
			if err != nil {
				return err
			}
			s := source{snapshot: snapshot}
			o, _, err := s.loadMotions(t.Context(), p.motions, dampedBy(0.03, []float64{0.7, 0.3, 0.7}))
			if err == nil && (!slices.Equal(o.at(0), o.at(2)) || slices.Equal(o.at(0), o.at(1)) || !(o.at(2)[0] > 0)) {
				t.Errorf("%v", o.sd)
			}
			return err
		})
		if err != nil {
			t.Fatal(err)
		}
	}
}

// What nobody asked for is not computed: periods of other questions of one record make no
// difference to a question of all.
func TestNothingElseIsComputed(t *testing.T) {
	store := newStore(t, handGrid, keptRecords())
	ask := func(where string, periods ...float64) {
		t.Helper()
		askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Where: where}, Damping: 0.03, PeriodsS: periods})
	}
	var many []float64
	for i := range 150 {
		many = append(many, 0.3+0.01*float64(i))
	}
	ask(`record == "one"`, many...)
	ask("", many[3], many[77], many[140])
	if got, want := keptValues(t, store), 150+2*3; got != want {
		t.Errorf("%d values kept, want %d", got, want)
	}
	ask("", append(many, 2.5)...)
	if got, want := keptValues(t, store), 3*151; got != want {
		t.Errorf("%d values kept, want %d", got, want)
	}
}

func keptValues(t *testing.T, store *db.Store) (n int) {
	t.Helper()
	client, err := sql.Open("sqlite", store.Path())
	if err != nil {
		t.Fatal(err)
	}
	defer client.Close()
	if err := client.QueryRowContext(t.Context(), `SELECT sum(length(sd_m) - 4) / 8 FROM off_grid`).Scan(&n); err != nil {
		t.Fatal(err)
	}
	return n
}
