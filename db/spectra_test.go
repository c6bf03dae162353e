package db

import (
	"context"
	"errors"
	"fmt"
	"maps"
	"slices"
	"strings"
	"testing"
)

// tiledGrid has three parts of periods, the last of them short.
var tiledGrid = Grid{
	PeriodsS: []float64{0.01, 0.02, 0.03, 0.04, 0.05, 0.06, 0.07, 0.08, 0.09, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1},
	Dampings: []float64{0.02, 0.05, 0.1},
}

// tiledStore holds records of two components, of which that of h2 is 0.5 more, as many in each of
// several transactions.
func tiledStore(t *testing.T, transactions ...int) (s *Store, g Generation) {
	t.Helper()
	s = newStore(t)
	n := 0
	for i, records := range transactions {
		update(t, s, func(ctx context.Context, tx *Tx) (err error) {
			if i == 0 {
				_, err = tx.StartRun(ctx, "ingest", "test", startsAt)
			}
			if err == nil {
				g, err = tx.PutGeneration(ctx, Recipe{Name: "as-delivered", Steps: "[]"}, tiledGrid, testSolver)
			}
			for range records {
				n++
				code := fmt.Sprintf("R%04d", n)
				err = errors.Join(err, add(ctx, tx, g, code, RoleH1, 100*float64(n)), add(ctx, tx, g, code, RoleH2, 100*float64(n)+0.5))
			}
			return err
		})
	}
	return s, g
}

// spectraOf reads a role by record, nil what is damaged.
func spectraOf(t *testing.T, s *Store, role string, damping int, periods Span) map[int64][]float64 {
	t.Helper()
	out := map[int64][]float64{}
	viewed(t, s, func(v *Snapshot) {
		err := v.Spectra(t.Context(), role, damping, periods, func(id int64, sd []float64) error {
			if _, again := out[id]; again {
				t.Errorf("record %d comes twice", id)
			}
			out[id] = slices.Clone(sd)
			return nil
		})
		if err != nil {
			t.Fatal(err)
		}
	})
	return out
}

// tiledSD is what tiledStore has of a record.
func tiledSD(record int64, role string, damping int, periods Span) (sd []float64) {
	base := 100 * float64(record)
	if role == RoleH2 {
		base += 0.5
	}
	for p := periods.From; p < periods.To; p++ {
		sd = append(sd, base+float64(10*damping+p))
	}
	return sd
}

// Every span of every damping is read as it was stored, in whatever tiles that is.
func TestSpectraOfManyTiles(t *testing.T) {
	s, _ := tiledStore(t, 1, 70, 32, 3)
	if got, want := fmt.Sprint(tilesOf(t, s)), "[2 63 63 14 63 1 6]"; got != want {
		t.Errorf("tiles of %s motions, want %s", got, want)
	}
	for from := range tiledGrid.PeriodsS {
		for to := from + 1; to <= len(tiledGrid.PeriodsS); to++ {
			periods, role, damping := Span{from, to}, []string{RoleH1, RoleH2}[to%2], (from+to)%3
			got := spectraOf(t, s, role, damping, periods)
			if len(got) != 106 {
				t.Fatalf("%s at %v: %d records, want 106", role, periods, len(got))
			}
			for id, sd := range got {
				if want := tiledSD(id, role, damping, periods); !slices.Equal(sd, want) {
					t.Fatalf("%s of record %d at %v, damping %d: %v, want %v", role, id, periods, damping, sd, want)
				}
			}
		}
	}
}

// tilesOf are how many motions the tiles have.
func tilesOf(t *testing.T, s *Store) []int {
	t.Helper()
	rows, err := s.read.QueryContext(t.Context(), `SELECT motions FROM tile ORDER BY id`)
	if err != nil {
		t.Fatal(err)
	}
	out, err := collect(rows, func(n *int) []any { return []any{n} })
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// Some of the spectra are read in whatever order they are wanted.
func TestSpectraOfSome(t *testing.T) {
	s, _ := tiledStore(t, 40, 40)
	wanted := []RoleSpectrum{{80, RoleH2}, {3, RoleH1}, {3, RoleH2}, {4, RoleH1}, {81, RoleH1}, {0, RoleH1}, {79, RoleH2}, {3, RoleRotD50}, {41, RoleV}, {40, RoleH1}}
	viewed(t, s, func(v *Snapshot) {
		var found []int
		err := v.SpectraOf(t.Context(), wanted, 2, Span{7, 18}, func(i int, sd []float64) error {
			found = append(found, i)
			if want := tiledSD(wanted[i].RecordID, wanted[i].Role, 2, Span{7, 18}); !slices.Equal(sd, want) {
				t.Errorf("%v: %v, want %v", wanted[i], sd, want)
			}
			return nil
		})
		if slices.Sort(found); err != nil || !slices.Equal(found, []int{0, 1, 2, 3, 6, 9}) {
			t.Errorf("found %v, %v", found, err)
		}
		stop := errors.New("stop")
		if err := v.SpectraOf(t.Context(), wanted, 2, Span{7, 18}, func(int, []float64) error { return stop }); err != stop {
			t.Errorf("%v, want the error of who reads", err)
		}
	})
}

// A row that was lost, of a record that is asked for or not, is seen.
func TestSpectraOfALostRow(t *testing.T) {
	s, _ := tiledStore(t, 9)
	if _, err := s.write.ExecContext(t.Context(), `DELETE FROM edition_column; DELETE FROM edition_computed WHERE record_id = 7`); err != nil {
		t.Fatal(err)
	}
	nothing := func(int, []float64) error { return nil }
	err := s.View(t.Context(), func(v *Snapshot) error {
		return v.SpectraOf(t.Context(), []RoleSpectrum{{2, RoleH1}}, 0, Span{0, 1}, nothing)
	})
	if !errors.Is(err, ErrAltered) {
		t.Errorf("%v, want a store that was altered", err)
	}
}

// What is damaged is told from what is whole, motion by motion and period by period, to who reads
// some periods and to who reads all.
func TestDamagedTiles(t *testing.T) {
	const records = 40 // of which the tiles have h1 and h2 of 31 and h1 of one more, and the rest
	second := partID(1, 1, 1)
	every, first := make([]int64, records), []int64(nil)
	for i := range every {
		every[i] = int64(i + 1)
	}
	first = every[:32]
	for damage, want := range map[string]struct{ early, late []int64 }{ // h1 at damping 1, periods 1 to 8 and 9 to 12
		fmt.Sprintf(`UPDATE tile_part SET sd_m = substr(sd_m, 1, length(sd_m) - 8) WHERE id = %d`, second):                                                                       {nil, first},
		fmt.Sprintf(`UPDATE tile_part SET (sd_m, crc32c) = (SELECT d, crc32c(d) FROM (SELECT substr(sd_m, 9) AS d)) WHERE id = %d`, second):                                      {nil, first},
		fmt.Sprintf(`UPDATE tile_part SET sd_m = CAST(substr(sd_m, 2) || substr(sd_m, 1, 1) AS BLOB) WHERE id = %d`, second):                                                     {nil, first},
		fmt.Sprintf(`UPDATE tile_part SET crc32c = crc32c + 1 WHERE id = %d`, second):                                                                                            {nil, first},
		fmt.Sprintf(`DELETE FROM tile_part WHERE id = %d`, second):                                                                                                               {nil, first},
		fmt.Sprintf(`UPDATE tile_part SET (sd_m, crc32c) = (SELECT d, crc32c(d) FROM (SELECT CAST(x'ffffffffffffffff' || substr(sd_m, 9) AS BLOB) AS d)) WHERE id = %d`, second): {nil, []int64{1}},
		`DELETE FROM tile WHERE id = 1`:                                               {first, first},
		`UPDATE tile SET motions = 64 WHERE id = 1`:                                   {first, first},
		`UPDATE tile SET motions = 1 WHERE id = 1`:                                    {first, first},
		`DELETE FROM tile_part WHERE id >> 20 = 1`:                                    {first, first},
		`UPDATE spectrum SET place = 70 WHERE (tile_id, place) = (1, 2)`:              {[]int64{2}, []int64{2}},
		`UPDATE spectrum SET tile_id = 2, place = 50 WHERE (tile_id, place) = (1, 2)`: {[]int64{2}, []int64{2}},
		`UPDATE spectrum SET place = -1 WHERE (tile_id, place) = (1, 2)`:              {[]int64{2}, []int64{2}},
		`UPDATE spectrum SET crc32c = 0 WHERE (tile_id, place) = (1, 2)`:              {[]int64{2}, []int64{2}},
	} {
		s, _ := tiledStore(t, records)
		if _, err := s.write.ExecContext(t.Context(), damage); err != nil {
			t.Fatal(damage, err)
		}
		ofRows := !strings.Contains(damage, "tile_part") // columns still say where all is
		if _, err := s.write.ExecContext(t.Context(), `DELETE FROM edition_column WHERE ?`, ofRows); err != nil {
			t.Fatal(err)
		}
		for periods, want := range map[Span][]int64{{0, 8}: want.early, {3, 4}: want.early, {8, 12}: want.late, {0, 19}: want.late} {
			got := spectraOf(t, s, RoleH1, 1, periods)
			var damaged []int64
			for id, sd := range got {
				if sd == nil {
					damaged = append(damaged, id)
				} else if !slices.Equal(sd, tiledSD(id, RoleH1, 1, periods)) {
					t.Errorf("%s: record %d at %v: %v", damage, id, periods, sd)
				}
			}
			if slices.Sort(damaged); len(got) != records || !slices.Equal(damaged, want) {
				t.Errorf("%s: at %v %d spectra, of which %v are damaged, want %v", damage, periods, len(got), damaged, want)
			}
		}
		if whole := wholeH1(t, s); !slices.Equal(whole, want.late) {
			t.Errorf("%s: read whole %v are damaged, want %v", damage, whole, want.late)
		}
	}
}

// wholeH1 are the records of which h1, read whole, is damaged at damping 1.
func wholeH1(t *testing.T, s *Store) (damaged []int64) {
	t.Helper()
	tiles := &tileReader{q: s.read}
	of := map[int64]int64{}
	viewed(t, s, func(v *Snapshot) {
		var err error
		if of, err = v.computations(t.Context(), RoleH1); err != nil {
			t.Fatal(err)
		}
	})
	for _, record := range slices.Sorted(maps.Keys(of)) {
		sd, err := tiles.whole(t.Context(), of[record])
		if err != nil || len(sd) != 3 {
			t.Fatalf("%d dampings, %v", len(sd), err)
		}
		if sd[1] == nil {
			damaged = append(damaged, record)
		} else if !slices.Equal(sd[1], encodeOrdinates(nil, tiledSD(record, RoleH1, 1, Span{0, 19}))) {
			t.Errorf("record %d: another spectrum", record)
		}
	}
	return damaged
}

// A tile has computations of one generation and one transaction.
func TestTilesOfOneGeneration(t *testing.T) {
	s, g := tiledStore(t, 3)
	var other Generation
	update(t, s, func(ctx context.Context, tx *Tx) (err error) {
		if other, err = tx.PutGeneration(ctx, Recipe{Name: "other", Steps: `["other"]`}, tiledGrid, testSolver); err != nil {
			return err
		}
		for i, generation := range []int64{other.ID, other.ID, g.ID, other.ID} {
			u := Unsolved{RecordID: int64(1 + i), Role: RoleH1}
			if generation == g.ID {
				err = errors.Join(err, add(ctx, tx, g, "more", RoleH1, 9))
				continue
			}
			err = errors.Join(err, tx.AddSolved(ctx, u, generation, NewSpectra([][]float64{make([]float64, 19), make([]float64, 19), make([]float64, 19)}, nil, nil)))
		}
		return err
	})
	if got := fmt.Sprint(tilesOf(t, s)); got != "[6 2 1 1]" {
		t.Errorf("tiles of %s motions, want [6 2 1 1]", got)
	}
	if n := count(t, s, `SELECT count(*) FROM (SELECT s.tile_id FROM spectrum s JOIN computation x ON x.id = s.computation_id GROUP BY 1 HAVING min(x.generation_id) <> max(x.generation_id))`); n != 0 {
		t.Errorf("%d tiles of several generations", n)
	}
	stop := errors.New("stop")
	if err := s.Update(t.Context(), func(tx *Tx) error { return errors.Join(add(t.Context(), tx, g, "gone", RoleH1, 1), stop) }); !errors.Is(err, stop) {
		t.Fatal(err)
	}
	if got := len(tilesOf(t, s)); got != 4 {
		t.Errorf("%d tiles after a transaction that was taken back, want 4", got)
	}
}

// A grid that parts have no numbers for is refused.
func TestGridOfTooManyPeriods(t *testing.T) {
	s := newStore(t)
	grid := Grid{Dampings: []float64{0.05}}
	for p := range mostPeriods + 1 {
		grid.PeriodsS = append(grid.PeriodsS, float64(1+p))
	}
	err := s.Update(t.Context(), func(tx *Tx) error {
		_, err := tx.PutGeneration(t.Context(), Recipe{Name: "as-delivered", Steps: "[]"}, grid, testSolver)
		return err
	})
	if want := "put grid: 32769 periods, a store holds at most 32768"; err == nil || err.Error() != want {
		t.Errorf("error %v, want %q", err, want)
	}
}
