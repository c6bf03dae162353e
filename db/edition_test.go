package db

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"slices"
	"testing"
)

// editionOf publishes the working state, or holds it back, and returns the run.
func editionOf(t *testing.T, s *Store, publish bool) (run int64, isNew bool) {
	t.Helper()
	err := s.Update(t.Context(), func(tx *Tx) (err error) {
		if run, err = tx.StartRun(t.Context(), "ingest", "test", startsAt); err != nil {
			return err
		}
		if isNew, err = tx.PutEdition(t.Context(), run, 1); err == nil && isNew && publish {
			err = tx.Publish(t.Context(), run)
		}
		return errors.Join(err, tx.FinishRun(t.Context(), run, "done", struct{}{}, startsAt))
	})
	if err != nil {
		t.Fatal(err)
	}
	return run, isNew
}

// changed changes the working state, and publishes nothing.
func changed(t *testing.T, s *Store, f func(ctx context.Context, tx *Tx) error) {
	t.Helper()
	if err := s.Update(t.Context(), func(tx *Tx) error { return f(t.Context(), tx) }); err != nil {
		t.Fatal(err)
	}
}

// count is what a query counts.
func count(t *testing.T, s *Store, query string) (n int) {
	t.Helper()
	if err := s.read.QueryRowContext(t.Context(), query).Scan(&n); err != nil {
		t.Fatal(err)
	}
	return n
}

// all is everything that a snapshot shows.
func all(t *testing.T, v *Snapshot) string {
	t.Helper()
	components, err := v.Components(t.Context(), AllDetails)
	spectra := map[string][]string{}
	for _, role := range []string{RoleH1, RoleH2, RoleV, RoleRotD50} {
		err = errors.Join(err, v.Spectra(t.Context(), role, 1, Span{0, 3}, func(record int64, sd []float64) error {
			spectra[role] = append(spectra[role], fmt.Sprint(record, sd))
			return nil
		}))
		slices.Sort(spectra[role])
	}
	var peaks []string // some of them are lost, and no JSON
	for i := range components {
		peaks = append(peaks, fmt.Sprint(components[i].Peaks))
		components[i].Peaks = Peaks{}
	}
	rejections, errRejections := v.Rejections(t.Context())
	disputed, errDisputed := v.Disputed(t.Context())
	versions, errVersions := v.Versions(t.Context())
	text, errText := json.Marshal([]any{components, peaks, spectra, rejections, disputed, versions})
	if err := errors.Join(err, errRejections, errDisputed, errVersions, errText); err != nil {
		t.Fatal(err)
	}
	return string(text)
}

func shownNow(t *testing.T, s *Store) (text string) {
	viewed(t, s, func(v *Snapshot) { text = all(t, v) })
	return text
}

func shownAsOf(t *testing.T, s *Store, run int64) (text string) {
	t.Helper()
	if err := s.ViewAsOf(t.Context(), run, func(v *Snapshot) error { text = all(t, v); return nil }); err != nil {
		t.Fatal(err)
	}
	return text
}

// inventedChanges are one after the other made to a pairStore.
var inventedChanges = []func(ctx context.Context, tx *Tx) error{
	func(ctx context.Context, tx *Tx) error {
		return tx.SetRoles(ctx, 2, map[string]string{RoleH1: RoleH2, RoleH2: RoleH1})
	},
	func(ctx context.Context, tx *Tx) error {
		return tx.DescribeComponent(ctx, 4, Component{Axis: "horizontal", AzimuthDeg: number(31), LowCutHz: number(1), Label: "other"})
	},
	func(ctx context.Context, tx *Tx) error {
		return tx.AddSolved(ctx, Unsolved{RecordID: 2, Role: RoleH2}, 1, NewSpectra([][]float64{{3, 2, 1}, {6, 5, 4}}, map[string]float64{MeasurePGA: 9, MeasurePGV: 9, MeasurePGD: 9}, nil))
	},
	func(ctx context.Context, tx *Tx) error {
		return errors.Join(tx.Reject(ctx, Rejection{Path: "b", Line: 3, Cause: "truncated", SHA256: "s1"}, 1), tx.SetMotion(ctx, 1, 1), tx.SetMotion(ctx, 2, 1))
	},
	func(ctx context.Context, tx *Tx) error {
		_, err := tx.State(ctx, Statement{Subject: Subject{SubjectEvent, 1}, Attribute: AttributeName, By: ByHeader, Value: "Another", Source: "x"})
		_, err2 := tx.State(ctx, Statement{Subject: Subject{SubjectEvent, 1}, Attribute: AttributeName, By: ByHeader, Value: "One", Source: "y"})
		return errors.Join(err, err2, tx.ForgetRejections(ctx, "b", ""))
	},
	func(ctx context.Context, tx *Tx) error {
		g, err := generation(ctx, tx.tx, 1)
		return errors.Join(err, add(ctx, tx, g, "R9", RoleH1, 5), tx.PutLikeness(ctx, Likeness{FirstID: 1, SecondID: 2, Kind: "scaled", Scale: 2}))
	},
}

// What a run left stays as it was, whatever later runs change, and nothing is seen of what
// is not published.
func TestEditionsStay(t *testing.T) {
	s, _ := pairStore(t)
	first, _ := editionOf(t, s, true)
	runs, want := []int64{first}, []string{shownNow(t, s)}
	for i, change := range inventedChanges {
		before := shownNow(t, s)
		if err := s.Update(t.Context(), func(tx *Tx) error { return change(t.Context(), tx) }); err != nil {
			t.Fatalf("change %d: %v", i, err)
		}
		if shownNow(t, s) != before {
			t.Errorf("change %d shows before it is published", i)
		}
		run, isNew := editionOf(t, s, true)
		if now := shownNow(t, s); !isNew || now == before {
			t.Errorf("change %d makes no difference", i)
		}
		runs, want = append(runs, run), append(want, shownNow(t, s))
	}
	for i, run := range runs {
		if got := shownAsOf(t, s, run); got != want[i] {
			t.Errorf("as of run %d:\n%s\nwant\n%s", run, got, want[i])
		}
	}
	again, isNew := editionOf(t, s, true)
	if isNew || shownAsOf(t, s, again) != want[len(want)-1] {
		t.Errorf("a run that changes nothing: new edition %v", isNew)
	}
	if err := s.ViewAsOf(t.Context(), 99, func(*Snapshot) error { return nil }); !errors.Is(err, ErrNoEdition) {
		t.Errorf("as of a run that never was: %v", err)
	}
}

// What is held back shows to who asks for it, and to all once it is published; so does an
// earlier one.
func TestEditionsAreHeldAndPublished(t *testing.T) {
	s, _ := pairStore(t)
	first, _ := editionOf(t, s, true)
	before := shownNow(t, s)
	if err := s.Update(t.Context(), func(tx *Tx) error { return inventedChanges[1](t.Context(), tx) }); err != nil {
		t.Fatal(err)
	}
	held, isNew := editionOf(t, s, false)
	if !isNew || shownNow(t, s) != before {
		t.Fatal("what is held back shows")
	}
	after := shownAsOf(t, s, held)
	if after == before {
		t.Error("what is held back cannot be seen")
	}
	for id, want := range map[int64]string{held: after, first: before} {
		if err := s.Update(t.Context(), func(tx *Tx) error {
			e, ok, err := editionBy(t.Context(), tx.tx, `id = (SELECT edition_id FROM run WHERE id = ?)`, id)
			if err != nil || !ok {
				return errors.Join(err, ErrNoEdition)
			}
			return tx.Publish(t.Context(), e.ID)
		}); err != nil {
			t.Fatal(err)
		}
		if shownNow(t, s) != want {
			t.Errorf("run %d is not shown", id)
		}
	}
}

// Editions have the columns of the tables that they show.
func TestEditionsHaveAllColumns(t *testing.T) {
	s := newStore(t)
	update(t, s, func(ctx context.Context, tx *Tx) error {
		for _, table := range shownTables {
			want, err := columnsOf(ctx, tx.tx, table.name)
			if err != nil {
				return err
			}
			got, err := columnsOf(ctx, tx.tx, "edition_"+table.name)
			if err != nil {
				return err
			}
			want = slices.DeleteFunc(want, func(c string) bool { return c == "run_id" || table.name == "computed" && c == "generation_id" })
			slices.Sort(want)
			slices.Sort(got)
			if !slices.Equal(got, want) || len(got) == 0 {
				t.Errorf("edition_%s has %v, want %v", table.name, got, want)
			}
		}
		return nil
	})
}

// An edition of another solver could be read by nobody, and is not published.
func TestOtherSolversAreNotPublished(t *testing.T) {
	s, _ := pairStore(t)
	run, _ := editionOf(t, s, false)
	err := s.Update(t.Context(), func(tx *Tx) error {
		_, _, _, err := tx.PublishRun(t.Context(), run, "another")
		return err
	})
	if !errors.Is(err, ErrOtherGeneration) {
		t.Errorf("publish an edition of another solver: %v", err)
	}
}
