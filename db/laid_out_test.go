package db

import (
	"context"
	"errors"
	"fmt"
	"reflect"
	"strings"
	"testing"
)

// seen is what questions read that is laid out.
type seen struct {
	Components, Screened []HeldComponent
	Versions             []Version
	Codes                map[int64]string
	Computed             map[int64]int64
}

func seenBy(ctx context.Context, v *Snapshot) (s seen, err error) {
	if s.Components, err = v.Components(ctx, AllDetails); err != nil {
		return s, err
	}
	for i := range s.Components { // what is lost is unlike itself
		if s.Components[i].AreDamaged() {
			s.Components[i].Peaks = Peaks{-1, -1, -1}
		}
	}
	if s.Screened, err = v.Components(ctx, DetailBand); err != nil {
		return s, err
	}
	if err = v.Flag(ctx, s.Screened, []string{"drift", "offset", FlagDuplicated, "nowhere"}); err != nil {
		return s, err
	}
	if s.Versions, err = v.versions(ctx); err != nil {
		return s, err
	}
	if s.Codes, err = v.recordCodes(ctx); err != nil {
		return s, err
	}
	s.Computed, err = v.computations(ctx, RoleH1)
	return s, err
}

// laidOutStore is a conditionedStore with more events than a piece has, some of them under
// another's code.
func laidOutStore(t *testing.T) *Store {
	t.Helper()
	s := conditionedStore(t)
	changed(t, s, func(ctx context.Context, tx *Tx) error {
		err := tx.exec(ctx, fmt.Sprintf(`INSERT INTO event (id, code, name, magnitude) WITH RECURSIVE n (i) AS (VALUES (100) UNION ALL SELECT i + 1 FROM n WHERE i < %d)
			SELECT i, 'E' || i, iif(i %% 3, 'Event ' || i, NULL), iif(i %% 2, i / 1000.0, NULL) FROM n`, 100+2*pieceRows))
		err = errors.Join(err, tx.exec(ctx, `UPDATE event SET primary_id = 100 WHERE id = 4711`))
		err = errors.Join(err, tx.exec(ctx, `UPDATE record SET event_id = id + 4709 WHERE event_id IS NULL`))
		twins, errTwins := tx.FlagTwins(ctx, 2, tx.digestOfTest(ctx, t))
		return errors.Join(err, errTwins, isNot(len(twins) == 0, "no component has the samples"))
	})
	editionOf(t, s, true)
	return s
}

func isNot(is bool, text string) error {
	if is {
		return errors.New(text)
	}
	return nil
}

// digestOfTest is the digest of the samples of a component of record 2.
func (t *Tx) digestOfTest(ctx context.Context, test *testing.T) (digest string) {
	if err := t.tx.QueryRowContext(ctx, `SELECT s.sha256 FROM series s JOIN component c ON c.series_id = s.id WHERE c.record_id = 2 LIMIT 1`).Scan(&digest); err != nil {
		test.Fatal(err)
	}
	return digest
}

// TestColumnsAreTheRows: whether an edition is laid out makes no difference to what is read.
func TestColumnsAreTheRows(t *testing.T) {
	s := laidOutStore(t)
	err := s.View(t.Context(), func(v *Snapshot) error {
		if !v.isLaidOut {
			t.Fatal("the edition is not laid out")
		}
		columns, err := seenBy(t.Context(), v)
		if err != nil {
			return err
		}
		rows, err := seenBy(t.Context(), v.ofRows())
		of, by := reflect.ValueOf(columns), reflect.ValueOf(rows)
		for i := range of.NumField() {
			if a, b := of.Field(i).Interface(), by.Field(i).Interface(); !reflect.DeepEqual(a, b) {
				t.Errorf("%s: columns give\n%+v\nrows\n%+v", of.Type().Field(i).Name, a, b)
			}
		}
		if err == nil {
			err = v.checkLayout(t.Context())
		}
		events, errEvents := v.events(t.Context(), "", nil)
		if len(events) <= 2*pieceRows || events[4711].Code != "E100" || events[4712].Code != "E4712" {
			t.Errorf("%d events, %v", len(events), events[4711])
		}
		return errors.Join(err, errEvents)
	})
	if err != nil {
		t.Fatal(err)
	}
	if n := count(t, s, `SELECT count(DISTINCT number) FROM edition_column WHERE name = 'event'`); n != 3 {
		t.Errorf("%d pieces of events, want 3", n)
	}
}

// TestNewestAndPublishedAreLaidOut, and nothing else; an earlier one that is published again, too.
func TestNewestAndPublishedAreLaidOut(t *testing.T) {
	s, _ := pairStore(t)
	laid := func(want ...int64) {
		t.Helper()
		rows, err := s.read.QueryContext(t.Context(), `SELECT DISTINCT edition_id FROM edition_column ORDER BY 1`)
		if err != nil {
			t.Fatal(err)
		}
		got, err := collect(rows, func(id *int64) []any { return []any{id} })
		if err != nil || !reflect.DeepEqual(got, want) {
			t.Errorf("laid out are %v, want %v; %v", got, want, err)
		}
	}
	change := 0
	next := func(publish bool) int64 {
		changed(t, s, inventedChanges[change])
		change++
		run, isNew := editionOf(t, s, publish)
		if !isNew {
			t.Fatal("nothing is new")
		}
		return run
	}
	first := next(true)
	laid(first)
	second := next(true)
	laid(second)
	held := next(false)
	laid(second, held)
	as := shownAsOf(t, s, first)
	changed(t, s, func(ctx context.Context, tx *Tx) error { return tx.Publish(ctx, first) })
	laid(first, held)
	if now := shownNow(t, s); now != as {
		t.Errorf("published again is\n%s\nit was\n%s", now, as)
	}
	if _, err := s.Prune(t.Context(), 1); err != nil {
		t.Fatal(err)
	}
	laid(first, held)
}

// TestDamagedColumnsAreRefused: and found by an inspection, and made again by the next run,
// unless rows are damaged too.
func TestDamagedColumnsAreRefused(t *testing.T) {
	s := laidOutStore(t)
	ask := func() (got seen, err error) {
		err = s.View(t.Context(), func(v *Snapshot) error {
			got, err = seenBy(t.Context(), v)
			return err
		})
		return got, err
	}
	want, err := ask()
	if err != nil {
		t.Fatal(err)
	}
	for _, statement := range []string{
		`UPDATE edition_column SET data = CAST(substr(data, 1, 9) || x'01' || substr(data, 11) AS BLOB) WHERE name = 'component' AND title = 'role'`,
		`UPDATE edition_column SET data = x'' WHERE name = 'record' AND title = 'siting'`,
		`UPDATE edition_column SET data = (SELECT data FROM edition_column WHERE name = 'event' AND title = 'name' AND number = 0) WHERE name = 'event' AND title = 'code' AND number = 0`,
		`UPDATE edition_column SET (data, crc32c) = (SELECT data, crc32c FROM edition_column WHERE name = 'event' AND title = 'code' AND number = 1) WHERE name = 'event' AND title = 'code' AND number = 0`,
		`UPDATE edition_column SET crc32c = crc32c + 1 WHERE name = 'finding' AND title = 'component_id'`,
		`DELETE FROM edition_column WHERE name = 'event' AND number = 2`,
		`DELETE FROM edition_column WHERE name = 'event' AND number = 0`,
		`DELETE FROM edition_column WHERE name = 'event' AND number = 2 AND title = 'name'`,
		`DELETE FROM edition_column WHERE name = 'component'`,
		`DELETE FROM edition_column WHERE name = 'flags' AND part = 'drift'`,
		`DELETE FROM edition_column WHERE name = 'computed' AND part = 'h1'`,
		`UPDATE edition_column SET number = 3 WHERE name = 'event' AND number = 2`,
		`UPDATE edition_column SET part = 'drift2' WHERE part = 'drift'`,
	} {
		if _, err := s.write.ExecContext(t.Context(), statement); err != nil {
			t.Fatal(err)
		}
		if _, err := ask(); !errors.Is(err, ErrAltered) || !strings.Contains(err.Error(), s.Path()) {
			t.Errorf("%s: %v", statement, err)
		}
		var faults []string
		if err := Inspect(t.Context(), s.Path(), func(f Fault) { faults = append(faults, f.String()) }, func(i *Inspection) error {
			_, err := i.Editions(t.Context())
			return err
		}); err != nil {
			t.Fatal(err)
		}
		if len(faults) != 1 || !strings.HasPrefix(faults[0], "edition_column: ") {
			t.Errorf("%s: faults %q", statement, faults)
		}
		if _, isNew := editionOf(t, s, true); isNew {
			t.Errorf("%s: the next run makes an edition", statement)
		}
		if got, err := ask(); err != nil || !reflect.DeepEqual(got, want) {
			t.Errorf("%s: after the next run %v", statement, err)
		}
	}
	lost := count(t, s, `SELECT computation_id FROM edition_computed WHERE role = 'h1' AND record_id = 2`)
	changed(t, s, func(ctx context.Context, tx *Tx) error {
		if err := tx.exec(ctx, `DELETE FROM tile_part WHERE id >> 20 = (SELECT tile_id FROM spectrum WHERE computation_id = ?)`, lost); err != nil {
			return err
		}
		return tx.AddSolved(ctx, Unsolved{RecordID: 2, Role: RoleH1}, 1, NewSpectra([][]float64{{3, 2, 1}, {6, 5, 4}}, map[string]float64{MeasurePGA: 1.1, MeasurePGV: 2.2, MeasurePGD: 3.3000000000000003}, nil))
	})
	spectrum := func() (out []float64) {
		t.Helper()
		err := s.View(t.Context(), func(v *Snapshot) error {
			return v.SpectraOf(t.Context(), []RoleSpectrum{{2, RoleH1}}, 0, Span{0, 3}, func(_ int, sd []float64) error {
				out = append(out, sd...)
				return nil
			})
		})
		if err != nil {
			t.Fatal(err)
		}
		return out
	}
	if sd := spectrum(); sd != nil {
		t.Errorf("what was lost is %v before the run has ended", sd)
	}
	if _, isNew := editionOf(t, s, true); isNew || !reflect.DeepEqual(spectrum(), []float64{3, 2, 1}) {
		t.Errorf("what was computed again is %v, new %v", spectrum(), isNew)
	}
	if _, err := s.write.ExecContext(t.Context(), `DELETE FROM edition_column; UPDATE edition_record SET siting = 'borehole'; UPDATE record SET siting = 'borehole'`); err != nil {
		t.Fatal(err)
	}
	editionOf(t, s, true)
	if _, err := ask(); !errors.Is(err, ErrAltered) {
		t.Errorf("of an edition whose rows are damaged there is an answer: %v", err)
	}
}
