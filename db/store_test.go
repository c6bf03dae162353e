package db

import (
	"context"
	"errors"
	"fmt"
	"math"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"
)

// testGrid has values whose shortest decimals are known.
var testGrid = Grid{PeriodsS: []float64{0.1, 0.5, 1}, Dampings: []float64{0, 0.05}}

func number(x float64) *float64 { return &x }

func newStore(t *testing.T) *Store {
	t.Helper()
	s, err := Create(t.Context(), filepath.Join(t.TempDir(), "with space & sign?.db"), testSolver)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := s.Close(); err != nil {
			t.Error(err)
		}
	})
	return s
}

// update changes the working state and publishes it.
func update(t *testing.T, s *Store, f func(ctx context.Context, tx *Tx) error) {
	t.Helper()
	err := s.Update(t.Context(), func(tx *Tx) error {
		if err := f(t.Context(), tx); err != nil {
			return err
		}
		g, ok, err := tx.Current(t.Context())
		if err != nil || !ok {
			return err
		}
		run, err := tx.StartRun(t.Context(), "ingest", "test", startsAt)
		if err != nil {
			return err
		}
		isNew, err := tx.PutEdition(t.Context(), run, g.ID)
		if err != nil || !isNew {
			return err
		}
		return tx.Publish(t.Context(), run)
	})
	if err != nil {
		t.Fatal(err)
	}
}

func rejectionsOf(t *testing.T, s *Store) (found []Rejection, err error) {
	t.Helper()
	err = s.View(t.Context(), func(v *Snapshot) (err error) {
		found, err = v.Rejections(t.Context())
		return err
	})
	return found, err
}

// startsAt is when all invented components start.
var startsAt = time.Date(2026, 3, 12, 10, 15, 0, 250e6, time.UTC)

// add stores an invented component whose SD at damping d and period p is
// base + 10·d + p.
func add(ctx context.Context, tx *Tx, g Generation, code, role string, base float64) error {
	record, err := tx.PutRecord(ctx, Record{
		Code: code, Siting: "free-field", Start: time.Date(2026, 3, 12, 10, 15, 0, 0, time.UTC), Distances: Distances{BestKM: number(12.5)},
		Event:   &Event{Code: "EV1", Name: "Invented", Magnitude: number(6.1)},
		Station: &Station{Network: "XX", Code: "ST1", Vs30MPS: number(420)},
	}, false)
	if err != nil {
		return err
	}
	src, err := tx.AddSource(ctx, Source{Path: code + role, SHA256: code + role, Format: "invented", Modified: time.Now()}, 1)
	if err != nil {
		return err
	}
	samples := motion(100, 4, 1)
	samples[99] += 1e-9 * float64(src) // no two components have the same inputs
	data, digest := EncodeSamples(samples, 1)
	var computed [][]float64
	for d := range g.Grid.Dampings {
		var sd []float64
		for p := range g.Grid.PeriodsS {
			sd = append(sd, base+float64(10*d+p))
		}
		computed = append(computed, sd)
	}
	c := Component{Role: role, Axis: "horizontal", Label: role, StepS: 0.01, Samples: len(samples), Unit: "m/s2", Processing: "corrected",
		AzimuthDeg: number(30), Start: startsAt, SourceID: src, SourceLine: 5, Warnings: []string{"doubtful"}}
	return tx.AddComponent(ctx, record.ID, c, data, digest, g.ID,
		new(NewSpectra(computed, map[string]float64{MeasurePGA: base, MeasurePGV: 2 * base, MeasurePGD: 3 * base}, nil)))
}

func filledStore(t *testing.T) (*Store, Generation) {
	t.Helper()
	s := newStore(t)
	var g Generation
	update(t, s, func(ctx context.Context, tx *Tx) (err error) {
		if _, err = tx.StartRun(ctx, "ingest", "test", time.Now()); err != nil {
			return err
		}
		g, err = tx.PutGeneration(ctx, Recipe{Name: "as-delivered", Steps: "[]"}, testGrid, testSolver)
		return err
	})
	return s, g
}

func TestUpdateIsWholeOrNothing(t *testing.T) {
	s, g := filledStore(t)
	stop := errors.New("stop")
	err := s.Update(t.Context(), func(tx *Tx) error {
		if err := add(t.Context(), tx, g, "R1", RoleH1, 1); err != nil {
			return err
		}
		return stop
	})
	if !errors.Is(err, stop) {
		t.Fatalf("Update = %v", err)
	}
	err = s.View(t.Context(), func(v *Snapshot) error {
		cs, err := v.Components(t.Context(), AllDetails)
		if len(cs) != 0 {
			t.Errorf("%d components after a failed update", len(cs))
		}
		return err
	})
	if err != nil {
		t.Error(err)
	}
}

func TestComponentsAndSpectraComeBack(t *testing.T) {
	s, g := filledStore(t)
	update(t, s, func(ctx context.Context, tx *Tx) error {
		return errors.Join(add(ctx, tx, g, "R2", RoleH1, 2), add(ctx, tx, g, "R1", RoleH2, 1), add(ctx, tx, g, "R1", RoleH1, 0.5))
	})
	err := s.View(t.Context(), func(v *Snapshot) error {
		if !v.Generation.Grid.Equal(testGrid) || v.Generation.Solver != testSolver {
			t.Errorf("generation = %+v", v.Generation)
		}
		cs, err := v.Components(t.Context(), AllDetails)
		if err != nil {
			return err
		}
		var order []string
		for _, c := range cs {
			order = append(order, c.Record.Code+c.Role)
		}
		if got := strings.Join(order, " "); got != "R1h1 R1h2 R2h1" {
			t.Errorf("order = %s", got)
		}
		c := cs[0]
		if *c.Record.Event.Magnitude != 6.1 || *c.Record.Station.Vs30MPS != 420 || *c.Record.Distances.BestKM != 12.5 || c.PGA != 0.5 || c.PGD != 1.5 {
			t.Errorf("component = %+v", c)
		}
		if m, err := v.Motion(t.Context(), c.ID); err != nil || len(m.Acceleration) != 100 {
			t.Errorf("samples: %d, %v", len(m.Acceleration), err)
		}
		for _, periods := range []Span{{0, 3}, {1, 2}, {2, 3}, {0, 2}} {
			var ids []int64
			var sd []float64
			err = v.Spectra(t.Context(), RoleH2, 1, periods, func(id int64, read []float64) error {
				ids, sd = append(ids, id), slices.Clone(read)
				return nil
			})
			want := []float64{11, 12, 13}[periods.From:periods.To]
			if err != nil || !slices.Equal(ids, []int64{cs[1].RecordID}) || !slices.Equal(sd, want) {
				t.Errorf("%v: records %v, sd = %v, want %v; %v", periods, ids, sd, want, err)
			}
		}
		return nil
	})
	if err != nil {
		t.Error(err)
	}
}

// The view serves any SQLite client: one row an ordinate, PSV = ω·SD and
// PSA = ω²·SD/g.
func TestOrdinateView(t *testing.T) {
	s, g := filledStore(t)
	update(t, s, func(ctx context.Context, tx *Tx) error { return add(ctx, tx, g, "R1", RoleH1, 0.25) })
	rows, err := s.read.QueryContext(t.Context(), `SELECT record, component, damping, period_s, sd_m, psv_m_s, psa_g FROM ordinate
		WHERE damping = 0.05 AND period_s BETWEEN 0.4 AND 1.5 ORDER BY period_s`)
	if err != nil {
		t.Fatal(err)
	}
	type ordinate struct {
		record, component             string
		damping, period, sd, psv, psa float64
	}
	got, err := collect(rows, func(o *ordinate) []any {
		return []any{&o.record, &o.component, &o.damping, &o.period, &o.sd, &o.psv, &o.psa}
	})
	if err != nil {
		t.Fatal(err)
	}
	if len(got) != 2 {
		t.Fatalf("%d rows, want 2", len(got))
	}
	for i, period := range []float64{0.5, 1} {
		omega := 2 * math.Pi / period
		sd := 0.25 + 10 + float64(i+1)
		want := ordinate{"R1", RoleH1, 0.05, period, sd, sd * omega, sd * omega * omega / 9.80665}
		if got[i] != want {
			t.Errorf("row %d = %+v, want %+v", i, got[i], want)
		}
	}
}

func TestRolesChangePlaces(t *testing.T) {
	s, g := filledStore(t)
	update(t, s, func(ctx context.Context, tx *Tx) error {
		if err := errors.Join(add(ctx, tx, g, "R1", RoleH1, 1), add(ctx, tx, g, "R1", RoleH2, 2)); err != nil {
			return err
		}
		r, ok, err := tx.FindRecord(ctx, "R1")
		if err != nil || !ok {
			t.Fatalf("FindRecord = %v, %v", ok, err)
		}
		return tx.SetRoles(ctx, r.ID, map[string]string{RoleH1: RoleH2, RoleH2: RoleH1})
	})
	err := s.View(t.Context(), func(v *Snapshot) error {
		cs, err := v.Components(t.Context(), AllDetails)
		if err != nil {
			return err
		}
		if cs[0].Role != RoleH1 || cs[0].PGA != 2 || cs[0].Label != RoleH2 {
			t.Errorf("first component = %+v", cs[0])
		}
		return v.Spectra(t.Context(), RoleH1, 0, Span{0, 1}, func(_ int64, sd []float64) error {
			if !slices.Equal(sd, []float64{2}) {
				t.Errorf("sd = %v, want 2", sd)
			}
			return nil
		})
	})
	if err != nil {
		t.Error(err)
	}
}

func TestMetadataIsFilledInOrOverridden(t *testing.T) {
	s, _ := filledStore(t)
	first := Record{Code: "R", Siting: "unknown", Event: &Event{Code: "E", Magnitude: number(5)}}
	more := Record{Code: "R", Siting: "ground", Instrument: "Roof", Event: &Event{Code: "E2"}}
	read := func() (siting, instrument, event string) {
		t.Helper()
		err := s.read.QueryRowContext(t.Context(), `SELECT siting, instrument, e.code FROM record r JOIN event e ON e.id = r.event_id`).Scan(&siting, &instrument, &event)
		if err != nil {
			t.Fatal(err)
		}
		return siting, instrument, event
	}
	put := func(r Record, override bool) {
		update(t, s, func(ctx context.Context, tx *Tx) error {
			_, err := tx.PutRecord(ctx, r, override)
			return err
		})
	}
	put(first, false)
	put(more, false)
	if siting, instrument, event := read(); siting != "ground" || instrument != "" || event != "E" {
		t.Errorf("filled in: %s %q %s", siting, instrument, event)
	}
	put(more, true)
	if _, instrument, event := read(); instrument != "Roof" || event != "E2" {
		t.Errorf("overridden: %q %s", instrument, event)
	}
	put(Record{Code: "R", Siting: "unknown"}, true)
	if siting, instrument, event := read(); siting != "ground" || instrument != "Roof" || event != "E2" {
		t.Errorf("an override with nothing stated: %s %q %s", siting, instrument, event)
	}
}

func TestRejectionsAreKeptAndForgotten(t *testing.T) {
	s, _ := filledStore(t)
	update(t, s, func(ctx context.Context, tx *Tx) error {
		return errors.Join(
			tx.Reject(ctx, Rejection{Path: "b", Line: 3, Cause: "truncated", SHA256: "s1"}, 1),
			tx.Reject(ctx, Rejection{Path: "b", Line: 3, Cause: "truncated", SHA256: "s2"}, 1),
			tx.Reject(ctx, Rejection{Path: "a", Cause: "unreadable"}, 1))
	})
	got, err := rejectionsOf(t, s)
	if err != nil {
		t.Fatal(err)
	}
	want := []Rejection{{Path: "a", Cause: "unreadable"}, {Path: "b", Line: 3, Cause: "truncated", SHA256: "s2"}}
	if fmt.Sprint(got) != fmt.Sprint(want) {
		t.Errorf("rejections = %v, want %v", got, want)
	}
	update(t, s, func(ctx context.Context, tx *Tx) error {
		return errors.Join(tx.ForgetRejections(ctx, "b", "s2"), tx.ForgetRejections(ctx, "a", ""))
	})
	got, err = rejectionsOf(t, s)
	if err != nil || len(got) != 1 || got[0].Path != "b" {
		t.Errorf("rejections = %v, %v", got, err)
	}
}

// A snapshot shows one state whatever is committed meanwhile.
func TestViewIsOneState(t *testing.T) {
	s, g := filledStore(t)
	err := s.View(t.Context(), func(v *Snapshot) error {
		before, err := v.Components(t.Context(), AllDetails)
		if err != nil {
			return err
		}
		update(t, s, func(ctx context.Context, tx *Tx) error { return add(ctx, tx, g, "R1", RoleH1, 1) })
		after, err := v.Components(t.Context(), AllDetails)
		if len(before) != len(after) {
			t.Errorf("%d components, then %d in one snapshot", len(before), len(after))
		}
		return err
	})
	if err != nil {
		t.Error(err)
	}
}

// testSolver is the version of the solver in these tests.
const testSolver = "solver 1"
