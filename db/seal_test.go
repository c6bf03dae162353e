package db

import (
	"context"
	"errors"
	"slices"
	"strings"
	"testing"
)

// TestSealsHaveAllColumns: a column that a migration adds to an edition's table is sealed too.
func TestSealsHaveAllColumns(t *testing.T) {
	s := newStore(t)
	for _, table := range shownTables {
		columns, err := columnsOf(t.Context(), s.read, "edition_"+table.name)
		if err != nil {
			t.Fatal(err)
		}
		if got, want := sealedTables[table.name].columns, append([]string{"since"}, columns...); !slices.Equal(got, want) {
			t.Errorf("%s: sealed are %v, want %v", table.name, got, want)
		}
	}
	if len(sealedTables) != len(shownTables) {
		t.Errorf("%d tables are sealed, want %d", len(sealedTables), len(shownTables))
	}
}

// TestSumsTellPlaces: values that change places, rows that come twice and those that are lost
// change the sums; the order of rows does not.
func TestSumsTellPlaces(t *testing.T) {
	sums := func(rows ...string) string {
		s := newStore(t)
		var text string
		err := s.read.QueryRowContext(t.Context(), `SELECT column_sums(1, column1, column1, column2, column3) FROM (VALUES `+strings.Join(rows, ", ")+`)`).Scan(&text)
		if err != nil {
			t.Fatal(err)
		}
		return text
	}
	want := sums(`(1, 'a', 0.5)`, `(2, 'b', NULL)`)
	if got := sums(`(2, 'b', NULL)`, `(1, 'a', 0.5)`); got != want {
		t.Errorf("sums in another order %s, want %s", got, want)
	}
	for _, rows := range [][]string{
		{`(1, 'b', 0.5)`, `(2, 'a', NULL)`}, {`(1, 'a', NULL)`, `(2, 'b', 0.5)`}, {`(1, 'a', 0.5)`}, {`(1, 'a', 0.5)`, `(2, 'b', NULL)`, `(2, 'b', NULL)`},
		{`(1, 'a', 0.5)`, `(2, 'b', 0.0)`}, {`(1, x'61', 0.5)`, `(2, 'b', NULL)`}, {`(1, 'a', 0.5000000000000001)`, `(2, 'b', NULL)`}, {`(1, 'a', 0.5)`, `(3, 'b', NULL)`},
	} {
		if got := sums(rows...); got == want {
			t.Errorf("sums of %v are those of others", rows)
		}
	}
}

// TestEditionsAreKnownBySeals: an edition that has become another is none.
func TestEditionsAreKnownBySeals(t *testing.T) {
	s, _ := pairStore(t)
	editionOf(t, s, true)
	changed(t, s, inventedChanges[0])
	editionOf(t, s, true)
	look := func() error { return s.View(t.Context(), func(*Snapshot) error { return nil }) }
	if err := look(); err != nil {
		t.Fatal(err)
	}
	if _, err := s.write.ExecContext(t.Context(), `PRAGMA foreign_keys = 0; DELETE FROM edition WHERE state = 'superseded'; UPDATE edition SET id = 1`); err != nil {
		t.Fatal(err)
	}
	if err := look(); !errors.Is(err, ErrAltered) || !strings.Contains(err.Error(), s.Path()) {
		t.Errorf("view of an edition that has another's number: %v", err)
	}
}

// conditionedStore is a pairStore with an edition, of which one component is conditioned and one
// has failed.
func conditionedStore(t *testing.T) *Store {
	t.Helper()
	conditioning := &Conditioning{StepS: 0.01, Samples: 100, LowCutHz: number(0.1),
		Findings: []Finding{{Flag: "drift", Value: 2, Bound: 1, Words: "it drifts"}, {Flag: "offset", Value: 3, Bound: 1, Words: "it is off"}}}
	s, g := pairStore(t)
	changed(t, s, func(ctx context.Context, tx *Tx) error {
		err := tx.DescribeComponent(ctx, 2, Component{Axis: "horizontal", LowCutHz: number(1)})
		solved := NewSpectra([][]float64{{3, 2, 1}, {6, 5, 4}}, map[string]float64{MeasurePGA: 9, MeasurePGV: 9, MeasurePGD: 9}, conditioning)
		err = errors.Join(err, tx.AddSolved(ctx, Unsolved{RecordID: 2, Role: RoleH2}, g.ID, solved))
		err = errors.Join(err, tx.DescribeComponent(ctx, 3, Component{Axis: "vertical", LowCutHz: number(1)}))
		return errors.Join(err, tx.AddFailure(ctx, Unsolved{RecordID: 2, Role: RoleV}, g.ID, "too short"))
	})
	editionOf(t, s, true)
	return s
}

// TestChangesOfComputationsAreRefused: of findings in conditioned motions and of failures, by
// lists and by screens.
func TestChangesOfComputationsAreRefused(t *testing.T) {
	for statement, isScreened := range map[string]bool{
		`UPDATE conditioned_finding SET flag = 'drift2' WHERE flag = 'drift'`:       true,
		`UPDATE conditioned_finding SET computation_id = 1 WHERE flag = 'drift'`:    true,
		`DELETE FROM conditioned_finding WHERE flag = 'drift'`:                      true,
		`UPDATE conditioned_finding SET value = value * 2 WHERE flag = 'drift'`:     false,
		`UPDATE conditioned_finding SET bound = bound * 2 WHERE flag = 'drift'`:     false,
		`UPDATE conditioned_finding SET words = words || '.' WHERE flag = 'drift'`:  false,
		`UPDATE computation SET failure = failure || '.' WHERE failure IS NOT NULL`: false,
		`UPDATE computation SET failure = NULL WHERE failure IS NOT NULL`:           false,
		`UPDATE computation SET failure = 'it fails' WHERE failure IS NULL`:         false,
	} {
		s := conditionedStore(t)
		ask := func() (screen, list error) {
			screen = s.View(t.Context(), func(v *Snapshot) error {
				components, err := v.Components(t.Context(), DetailBand)
				if err == nil {
					err = v.Flag(t.Context(), components, []string{"drift"})
				}
				if n := slices.IndexFunc(components, func(c HeldComponent) bool { return c.Conditioning != nil && len(c.Conditioning.Findings) == 1 }); err == nil && n < 0 {
					t.Errorf("%s: nothing is flagged", statement)
				}
				return err
			})
			list = s.View(t.Context(), func(v *Snapshot) error {
				_, err := v.Components(t.Context(), AllDetails)
				if err == nil {
					_, err = v.Rejections(t.Context())
				}
				if err == nil {
					_, err = v.Unsolved(t.Context())
				}
				return err
			})
			return screen, list
		}
		if screen, list := ask(); screen != nil || list != nil {
			t.Fatalf("before: %v, %v", screen, list)
		}
		if _, err := s.write.ExecContext(t.Context(), `DELETE FROM edition_column; `+statement); err != nil {
			t.Fatal(err)
		}
		screen, list := ask()
		if errors.Is(screen, ErrAltered) != isScreened || !isScreened && screen != nil || !errors.Is(list, ErrAltered) || !strings.Contains(list.Error(), s.Path()) {
			t.Errorf("%s: a screen fails by %v, a list by %v", statement, screen, list)
		}
	}
}
