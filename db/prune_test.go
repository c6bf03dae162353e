package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"slices"
	"testing"
)

// editions makes an edition of each of the invented changes, after one of none, and returns
// the runs and what each showed.
func editions(t *testing.T) (s *Store, runs []int64, want []string) {
	t.Helper()
	s, g := pairStore(t)
	putRotated(t, s, g, 2, 7)
	for i := -1; i < len(inventedChanges); i++ {
		if i >= 0 {
			changed(t, s, inventedChanges[i])
		}
		run, _ := editionOf(t, s, true)
		runs, want = append(runs, run), append(want, shownNow(t, s))
	}
	return s, runs, want
}

// unused counts what prune should have removed, each kind in words of its own.
func unused(t *testing.T, s *Store) map[string]int {
	t.Helper()
	out := map[string]int{
		"computations": count(t, s, `SELECT count(*) FROM computation WHERE id NOT IN (SELECT computation_id FROM computed) AND id NOT IN (SELECT computation_id FROM edition_computed)`),
		"series":       count(t, s, `SELECT count(*) FROM series WHERE id NOT IN (SELECT series_id FROM component WHERE series_id NOT NULL UNION SELECT series_id FROM edition_component WHERE series_id NOT NULL)`),
		"spectra":      count(t, s, `SELECT count(*) FROM spectrum WHERE computation_id NOT IN (SELECT id FROM computation)`),
		"tiles":        count(t, s, `SELECT count(*) FROM tile WHERE id NOT IN (SELECT tile_id FROM spectrum)`),
		"parts":        count(t, s, `SELECT count(*) FROM tile_part WHERE id >> 20 NOT IN (SELECT id FROM tile)`),
		"measures":     count(t, s, `SELECT count(*) FROM measure WHERE computation_id NOT IN (SELECT id FROM computation)`),
		"recipes":      count(t, s, `SELECT count(*) FROM recipe WHERE id NOT IN (SELECT recipe_id FROM generation)`),
		"grids":        count(t, s, `SELECT count(*) FROM grid_period WHERE grid_id NOT IN (SELECT grid_id FROM generation)`),
		"blocks":       count(t, s, `SELECT count(*) FROM off_grid_block WHERE id NOT IN (SELECT block_id FROM off_grid)`),
		"foreign keys": count(t, s, `SELECT count(*) FROM pragma_foreign_key_check`),
	}
	for _, table := range shownTables {
		out["rows of "+table.name] = count(t, s, fmt.Sprintf(`SELECT count(*) FROM edition_%s t WHERE (SELECT count(*) FROM edition e WHERE e.id BETWEEN t.since AND t.until - 1) = 0`, table.name))
	}
	for kind, n := range out {
		if n == 0 {
			delete(out, kind)
		}
	}
	return out
}

// What is kept stays as it was, however much of the rest goes, and nothing else stays.
func TestPruneKeepsWhatIsKept(t *testing.T) {
	for keep := 1; keep <= 8; keep++ {
		t.Run(fmt.Sprint(keep), func(t *testing.T) {
			s, runs, want := editions(t)
			changed(t, s, func(ctx context.Context, tx *Tx) error { return tx.Publish(ctx, runs[1]) })
			p, err := s.Prune(t.Context(), keep)
			if err != nil {
				t.Fatal(err)
			}
			for i, run := range runs {
				if i == 1 || i >= len(runs)-keep {
					if got := shownAsOf(t, s, run); got != want[i] {
						t.Errorf("as of run %d:\n%s\nwant\n%s", run, got, want[i])
					}
				} else if err := s.ViewAsOf(t.Context(), run, func(*Snapshot) error { return nil }); !errors.Is(err, ErrNoEdition) || i > 0 && !slices.Contains(p.Editions, run) { // the first made none of its own
					t.Errorf("run %d is still there, or not reported: %v, %+v", run, err, p)
				}
			}
			if now := shownNow(t, s); now != want[1] {
				t.Errorf("published:\n%s\nwant\n%s", now, want[1])
			}
			if left := unused(t, s); len(left) > 0 {
				t.Errorf("left behind: %v", left)
			}
			if again, err := s.Prune(t.Context(), keep); err != nil || again.Rows+again.Computations+again.Series+again.Blocks+len(again.Editions) > 0 {
				t.Errorf("once more: %+v, %v", again, err)
			}
			// The next run goes on from where the last was.
			if _, isNew := editionOf(t, s, true); isNew {
				t.Error("what was pruned makes a difference to the next run")
			}
		})
	}
}

// A generation of which no edition is kept goes with all that was computed in it, one that
// is only begun does not, nor do ordinates off the grid that have their place.
func TestPruneGenerations(t *testing.T) {
	s, g := keptStore(t)
	editionOf(t, s, true)
	generations := map[string]Generation{"first": g}
	for _, name := range []string{"second", "begun"} {
		changed(t, s, func(ctx context.Context, tx *Tx) (err error) {
			other, err := tx.PutGeneration(ctx, Recipe{Name: name, Steps: `["` + name + `"]`}, g.Grid, testSolver)
			generations[name] = other
			for _, role := range []string{RoleH1, RoleH2} {
				err = errors.Join(err, tx.AddSolved(ctx, Unsolved{RecordID: 2, Role: role}, other.ID, NewSpectra([][]float64{{3, 2, 1}, {6, 5, 4}}, map[string]float64{MeasurePGA: 9}, nil)))
			}
			return err
		})
	}
	changed(t, s, func(ctx context.Context, tx *Tx) error {
		run, err := tx.StartRun(ctx, "ingest", "test", startsAt)
		_, err2 := tx.PutEdition(ctx, run, generations["second"].ID)
		return errors.Join(err, err2, tx.Publish(ctx, run), tx.FinishRun(ctx, run, "done", struct{}{}, startsAt))
	})
	var block []OffGridBlock
	viewed(t, s, func(v *Snapshot) {
		var ok bool
		if block, ok = v.ReserveOffGrid(t.Context(), nil, [][]Oscillator{{{0.3, 0.05}}, {{0.9, 0.05}}}, 2); !ok || !v.KeepOffGrid(t.Context(), block[:1], invented(block[:1], RoleH1, RoleH2)) {
			t.Fatal(s.Unkept())
		}
	})
	changed(t, s, func(ctx context.Context, tx *Tx) error { return tx.exec(ctx, `UPDATE off_grid_block SET kept = 1000`) })
	want, others := shownNow(t, s), count(t, s, `SELECT count(*) FROM edition WHERE generation_id = 1`)
	p, err := s.Prune(t.Context(), 1)
	if err != nil || p.Generations != 1 || len(p.Editions) != others || p.OffGridRows != 8 || p.Blocks != 3 {
		t.Errorf("%+v, %v", p, err)
	}
	if now := shownNow(t, s); now != want {
		t.Errorf("published:\n%s\nwant\n%s", now, want)
	}
	if left := unused(t, s); len(left) > 0 {
		t.Errorf("left behind: %v", left)
	}
	if n := count(t, s, `SELECT count(*) FROM computed k JOIN generation g ON g.id = k.generation_id JOIN recipe r ON r.id = g.recipe_id AND r.name = 'begun'`); n != 2 {
		t.Errorf("of a generation that is begun %d components are left, want 2", n)
	}
	if kept := count(t, s, `SELECT sum(kept) FROM off_grid_block`); kept != 2*(1+offGridRowCost) {
		t.Errorf("%d values are counted, want %d", kept, 2*(1+offGridRowCost))
	}
	if at, _ := keptOf(t, s, RoleH1, []int64{2}, []int64{block[0].ID}); len(at) != 1 {
		t.Error("what is kept off the grid is lost")
	}
	var on int
	if err := s.write.QueryRowContext(t.Context(), `PRAGMA foreign_keys`).Scan(&on); err != nil || on != 1 {
		t.Errorf("foreign keys are checked no more: %d, %v", on, err)
	}
}

// A prune that was cut short leaves whole answers, and the next one what an undisturbed one
// leaves.
func TestPruneCanBeCutShort(t *testing.T) {
	undisturbed, _, _ := editions(t)
	if _, err := undisturbed.Prune(t.Context(), 2); err != nil {
		t.Fatal(err)
	}
	sizes := func(s *Store) string {
		return fmt.Sprint(count(t, s, `SELECT count(*) FROM computation`), count(t, s, `SELECT count(*) FROM spectrum`), count(t, s, `SELECT count(*) FROM tile_part`), count(t, s, `SELECT count(*) FROM edition_computed`), count(t, s, `SELECT count(*) FROM edition_component`))
	}
	stops := []func(s *Store) error{
		func(s *Store) error {
			return s.Update(t.Context(), func(tx *Tx) error { return tx.pruneEditions(t.Context(), 2, &Pruned{}) })
		},
		func(s *Store) error { // within the first transaction
			err := s.Update(t.Context(), func(tx *Tx) error { return errors.Join(tx.pruneEditions(t.Context(), 2, &Pruned{}), sql.ErrTxDone) })
			if !errors.Is(err, sql.ErrTxDone) {
				return errors.New("it went through")
			}
			return nil
		},
		func(s *Store) error { // between batches of one
			n := 0
			err := s.Update(t.Context(), func(tx *Tx) error { return tx.pruneEditions(t.Context(), 2, &Pruned{}) })
			err = errors.Join(err, s.inBatches(t.Context(), 1, unusedComputations, func(tx *Tx, ids string) error {
				if n++; n > 1 {
					return context.Canceled
				}
				return tx.pruneComputations(t.Context(), ids, &Pruned{})
			}))
			if !errors.Is(err, context.Canceled) {
				return fmt.Errorf("after %d batches: %w", n, err)
			}
			return nil
		},
	}
	for i, stop := range stops {
		s, runs, want := editions(t)
		if err := stop(s); err != nil {
			t.Fatalf("stop %d: %v", i, err)
		}
		for k := len(runs) - 2; k < len(runs); k++ {
			if got := shownAsOf(t, s, runs[k]); got != want[k] {
				t.Errorf("stop %d, as of run %d:\n%s\nwant\n%s", i, runs[k], got, want[k])
			}
		}
		if _, err := s.Prune(t.Context(), 2); err != nil {
			t.Fatal(err)
		}
		if got, want := sizes(s), sizes(undisturbed); got != want {
			t.Errorf("stop %d: %s, want %s", i, got, want)
		}
		if left := unused(t, s); len(left) > 0 {
			t.Errorf("stop %d left behind: %v", i, left)
		}
	}
}

// What is free can be given back, and everything is still there.
func TestShrink(t *testing.T) {
	s, runs, want := editions(t)
	enlarge(t, s, 1)
	changed(t, s, func(ctx context.Context, tx *Tx) error { return tx.exec(ctx, `DROP TABLE ballast`) })
	before, err := s.Size(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	if err := s.Shrink(t.Context()); err != nil {
		t.Fatal(err)
	}
	after, err := s.Size(t.Context())
	if err != nil || after.File != after.Used || after.File > before.File-stepPages*4096 {
		t.Errorf("%+v, %v, before %+v", after, err, before)
	}
	for i, run := range runs {
		if got := shownAsOf(t, s, run); got != want[i] {
			t.Errorf("as of run %d:\n%s\nwant\n%s", run, got, want[i])
		}
	}
	reader := must(Open(t.Context(), s.Path(), testSolver))
	defer reader.Close()
	if _, err := reader.Prune(t.Context(), 1); err == nil {
		t.Error("a store that is open for reading was pruned")
	}
}

// A tile goes when nobody has spectra in it any more: what others have in it keeps it whole.
func TestPruneKeepsSharedTiles(t *testing.T) {
	s, _ := tiledStore(t, 3, 2)
	viewed(t, s, func(*Snapshot) {}) // makes an edition
	prune := func(condition string) (p Pruned) {
		changed(t, s, func(ctx context.Context, tx *Tx) error {
			var ids string
			err := tx.tx.QueryRowContext(ctx, `SELECT json_group_array(computation_id) FROM spectrum WHERE `+condition).Scan(&ids)
			for _, table := range []string{"computed", "edition_computed"} {
				err = errors.Join(err, tx.exec(ctx, `DELETE FROM `+table+` WHERE computation_id IN (SELECT value FROM json_each(?))`, ids))
			}
			return errors.Join(err, tx.pruneComputations(ctx, ids, &p))
		})
		return p
	}
	parts := count(t, s, `SELECT count(*) FROM tile_part`)
	if p := prune(`place = 1`); p.Spectra != 6 || p.Computations != 2 || fmt.Sprint(tilesOf(t, s)) != "[6 4]" || count(t, s, `SELECT count(*) FROM tile_part`) != parts {
		t.Errorf("%+v, tiles of %v motions", p, tilesOf(t, s))
	}
	if p := prune(`tile_id = 1`); p.Spectra != 15 || p.Computations != 5 || fmt.Sprint(tilesOf(t, s)) != "[4]" || count(t, s, `SELECT count(*) FROM tile_part`) != parts/2 {
		t.Errorf("%+v, tiles of %v motions", p, tilesOf(t, s))
	}
	if left := unused(t, s); len(left) > 0 {
		t.Errorf("left behind: %v", left)
	}
}
