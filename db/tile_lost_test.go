package db

import (
	"context"
	"errors"
	"fmt"
	"reflect"
	"slices"
	"testing"
)

// putTiled stores what is computed of components, as tiledStore has it.
func putTiled(ctx context.Context, tx *Tx, g Generation, list []Unsolved) (err error) {
	for _, u := range list {
		err = errors.Join(err, tx.AddSolved(ctx, u, g.ID, allOfTiled(u.RecordID, u.Role)))
	}
	return err
}

// allOfTiled is all that tiledStore has of a component.
func allOfTiled(record int64, role string) Spectra {
	var sd [][]float64
	for d := range tiledGrid.Dampings {
		sd = append(sd, tiledSD(record, role, d, Span{0, len(tiledGrid.PeriodsS)}))
	}
	base := sd[0][0]
	return NewSpectra(sd, map[string]float64{MeasurePGA: base, MeasurePGV: 2 * base, MeasurePGD: 3 * base}, nil)
}

// putPairs stores what is computed of pairs: here, what their components have.
func putPairs(ctx context.Context, tx *Tx, g Generation, list []Pair) (err error) {
	for _, p := range list {
		err = errors.Join(err, tx.AddRotated(ctx, p.RecordID, g.ID, allOfTiled(p.RecordID, RoleH1), allOfTiled(p.RecordID, RoleH2)))
	}
	return err
}

// unsolvedOf are the components that lack spectra.
func unsolvedOf(t *testing.T, s *Store, g Generation) []Unsolved {
	t.Helper()
	out, err := s.Unsolved(t.Context(), g.ID)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// faultsOf are those of where spectra are.
func faultsOf(t *testing.T, s *Store) (out []string) {
	t.Helper()
	err := Inspect(t.Context(), s.Path(), func(f Fault) { out = append(out, f.String()) }, func(i *Inspection) error {
		_, err := i.Editions(t.Context())
		return errors.Join(i.Spectra(t.Context()), i.Orphans(t.Context()), err)
	})
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// What is lost of where spectra are is found and computed again, of components and of pairs, and
// nothing else is; what nobody has any more goes. Until then an unchanged run keeps what questions
// read.
func TestLostPlacesAreComputedAgain(t *testing.T) {
	const records = 40                          // tiles 1 and 2 have 63 and 17 of components, 3 and 4 as many of pairs
	for damage, ofOne := range map[string]bool{ // of tile %[1]d, in which computation %[2]d is
		`DELETE FROM tile_part WHERE id = %[1]d << 20`:                                                                 false,
		`DELETE FROM tile_part WHERE id >> 20 = %[1]d`:                                                                 false,
		`DELETE FROM tile WHERE id = %[1]d`:                                                                            false,
		`DELETE FROM tile WHERE id = %[1]d; DELETE FROM tile_part WHERE id >> 20 = %[1]d`:                              false,
		`UPDATE tile SET id = 9 WHERE id = %[1]d`:                                                                      false,
		`UPDATE tile SET id = (1 << 50) + %[1]d WHERE id = %[1]d`:                                                      false,
		`UPDATE tile SET motions = 62 WHERE id = %[1]d`:                                                                false,
		`UPDATE tile SET motions = 0 WHERE id = %[1]d`:                                                                 false,
		`UPDATE tile SET motions = 63 + (1 << 58) WHERE id = %[1]d`:                                                    false,
		`UPDATE tile SET crc32c = -1 WHERE id = %[1]d`:                                                                 false,
		`UPDATE spectrum SET crc32c = crc32c + 1 WHERE tile_id = %[1]d`:                                                false,
		`UPDATE spectrum SET crc32c = crc32c + 1 WHERE computation_id = %[2]d`:                                         true,
		`UPDATE spectrum SET place = 70 WHERE computation_id = %[2]d`:                                                  true,
		`UPDATE spectrum SET tile_id = 1 << 50 WHERE computation_id = %[2]d`:                                           true,
		`UPDATE spectrum SET tile_id = (1 << 44) + 2 WHERE computation_id = %[2]d`:                                     true,
		`UPDATE spectrum SET tile_id = -1 WHERE computation_id = %[2]d`:                                                true,
		`UPDATE spectrum SET tile_id = 5 WHERE computation_id = %[2]d`:                                                 true,
		`DELETE FROM spectrum WHERE computation_id = %[2]d`:                                                            true,
		`UPDATE spectrum SET (place, crc32c) = (63, crc32c(computation_id, tile_id, 63)) WHERE computation_id = %[2]d`: true,
	} {
		for _, ofPairs := range []bool{false, true} {
			s, g := tiledStore(t, records)
			update(t, s, func(ctx context.Context, tx *Tx) error { return putPairs(ctx, tx, g, unrotatedOf(t, s, g)) })
			editionOf(t, s, true)
			tile, computation := 1, 2
			if ofPairs {
				tile, computation = 3, 2*records+2
			}
			do := fmt.Sprintf(damage+" -- %[1]d %[2]d", tile, computation)
			roles := []string{RoleH1, RoleH2, RoleRotD50, RoleRotD100}
			want := map[string]map[int64][]float64{}
			for _, role := range roles {
				want[role] = spectraOf(t, s, role, 1, Span{8, 19})
			}
			if faults := faultsOf(t, s); len(faults) != 0 {
				t.Fatal(faults)
			}
			if _, err := s.write.ExecContext(t.Context(), do); err != nil {
				t.Fatal(do, err)
			}
			if faults := faultsOf(t, s); len(faults) == 0 {
				t.Errorf("%s: no fault", do)
			}
			_, isNew := editionOf(t, s, true)
			for _, role := range roles {
				got := spectraOf(t, s, role, 1, Span{8, 19})
				for id, sd := range got {
					if sd != nil && !slices.Equal(sd, want[role][id]) {
						t.Errorf("%s: %s of record %d is %v, want %v", do, role, id, sd, want[role][id])
					}
				}
				if isNew || len(got) != records {
					t.Errorf("%s: the next run shows %d %s, new %v", do, len(got), role, isNew)
				}
			}
			components, pairs := unsolvedOf(t, s, g), unrotatedOf(t, s, g)
			if components, pairs := lostOf(damage, ofOne, ofPairs); components != len(unsolvedOf(t, s, g)) || pairs != len(unrotatedOf(t, s, g)) {
				t.Errorf("%s: %d components and %d pairs lack spectra, want %d and %d", do, len(unsolvedOf(t, s, g)), len(unrotatedOf(t, s, g)), components, pairs)
			}
			update(t, s, func(ctx context.Context, tx *Tx) error {
				return errors.Join(putTiled(ctx, tx, g, components), putPairs(ctx, tx, g, pairs))
			})
			if _, isNew := editionOf(t, s, true); isNew {
				t.Errorf("%s: what was computed again is another edition", do)
			}
			for _, role := range roles {
				if got := spectraOf(t, s, role, 1, Span{8, 19}); !reflect.DeepEqual(got, want[role]) {
					t.Errorf("%s: %s is not what it was", do, role)
				}
			}
			if faults := faultsOf(t, s); len(faults) != 0 {
				t.Errorf("%s: afterwards %q", do, faults)
			}
		}
	}
}

// lostOf is how many components and pairs lack spectra after a damage.
func lostOf(damage string, ofOne, ofPairs bool) (components, pairs int) {
	switch {
	case ofOne && ofPairs:
		pairs = 1
	case ofOne:
		components = 1
	case ofPairs:
		pairs = 32
	default:
		components = 63
	}
	return components, pairs
}

// What was put into the tile at hand is not taken for lost.
func TestBegunTilesAreNotLost(t *testing.T) {
	s, g := tiledStore(t, 5)
	update(t, s, func(ctx context.Context, tx *Tx) error { return putPairs(ctx, tx, g, unrotatedOf(t, s, g)) })
	if _, err := s.write.ExecContext(t.Context(), `DELETE FROM tile_part WHERE id IN (1 << 20, 2 << 20)`); err != nil {
		t.Fatal(err)
	}
	components, pairs := unsolvedOf(t, s, g), unrotatedOf(t, s, g)
	if len(components) != 10 || len(pairs) != 5 {
		t.Fatalf("%d components and %d pairs lack spectra, want 10 and 5", len(components), len(pairs))
	}
	solve := func(components []Unsolved, pairs []Pair) {
		update(t, s, func(ctx context.Context, tx *Tx) (err error) {
			for _, want := range []bool{true, false} {
				for _, u := range components {
					if is, errIs := tx.IsUnsolved(ctx, g.ID, u); is != want || errIs != nil {
						t.Errorf("%s %s is unsolved: %v, %v", u.Code, u.Role, is, errIs)
					}
				}
				for _, p := range pairs {
					if is, errIs := tx.IsUnrotated(ctx, g.ID, p); is != want || errIs != nil {
						t.Errorf("%s is unrotated: %v, %v", p.Code, is, errIs)
					}
				}
				err = errors.Join(err, putTiled(ctx, tx, g, components), putPairs(ctx, tx, g, pairs))
			}
			return err
		})
	}
	solve(components[:4], pairs[:1])
	if got := fmt.Sprint(tilesOf(t, s)); got != "[10 10 6]" {
		t.Errorf("tiles of %s motions, want [10 10 6]", got)
	}
	solve(components[4:], pairs[1:])
	if got := fmt.Sprint(tilesOf(t, s)); got != "[6 14]" {
		t.Errorf("tiles of %s motions, want [6 14]", got)
	}
	if n := count(t, s, `SELECT count(*) FROM tile_part WHERE id < 3 << 20`); n != 0 {
		t.Errorf("%d parts of the lost tiles are left", n)
	}
}

// A tile gets no number that anybody speaks of: what is damaged aside, but columns too, which are
// read until the run has ended.
func TestNumbersOfTilesAreGivenOnce(t *testing.T) {
	for damage, want := range map[string]int64{
		``: 3,
		`DELETE FROM spectrum; DELETE FROM tile; DELETE FROM tile_part`:                                    3,
		`DELETE FROM edition_column; DELETE FROM tile; DELETE FROM tile_part`:                              3,
		`DELETE FROM edition_column; DELETE FROM tile; DELETE FROM spectrum`:                               3,
		`DELETE FROM edition_column; DELETE FROM tile_part; DELETE FROM tile; DELETE FROM spectrum`:        1,
		`UPDATE tile SET id = 1 << 50 WHERE id = 2`:                                                        3,
		`UPDATE spectrum SET tile_id = 1 << 50 WHERE computation_id = 2`:                                   3,
		`UPDATE spectrum SET tile_id = 3 WHERE computation_id = 2`:                                         4,
		`INSERT INTO tile_part SELECT 4398046511103 << 20, sd_m, crc32c FROM tile_part WHERE id = 1 << 20`: 3,
	} {
		s, _ := tiledStore(t, 40)
		editionOf(t, s, true)
		if _, err := s.write.ExecContext(t.Context(), damage); err != nil {
			t.Fatal(damage, err)
		}
		update(t, s, func(ctx context.Context, tx *Tx) error {
			got, err := tx.nextTile(ctx)
			if got != want {
				t.Errorf("%s: tile %d, want %d", damage, got, want)
			}
			return err
		})
	}
}

// A tile that has nobody's spectra goes, whatever its number, and no other.
func TestTilesOfNobodyGo(t *testing.T) {
	s, _ := tiledStore(t, 40)
	update(t, s, func(ctx context.Context, tx *Tx) error {
		return errors.Join(
			tx.exec(ctx, `INSERT INTO tile (id, motions, crc32c) VALUES ((1 << 44) + 2, 1, 0), (77, 1, crc32c(77, 1))`),
			tx.exec(ctx, `INSERT INTO tile_part SELECT x << 20, sd_m, p.crc32c FROM tile_part p, (SELECT 77 AS x UNION SELECT 4398046511103 UNION SELECT 8796093022207 UNION SELECT -3) WHERE id = 1 << 20`),
			tx.dropTiles(ctx))
	})
	if got := fmt.Sprint(tilesOf(t, s)); got != "[63 17]" {
		t.Errorf("tiles of %s motions, want [63 17]", got)
	}
	if n := count(t, s, `SELECT count(*) FROM tile_part`); n != 2*3*3 {
		t.Errorf("%d parts, want 18", n)
	}
}

// SQL and Go make the same checksums of where spectra are.
func TestPlacesAreSealed(t *testing.T) {
	s, _ := tiledStore(t, 40)
	if n := count(t, s, `SELECT (SELECT count(*) FROM spectrum WHERE crc32c <> crc32c(computation_id, tile_id, place)) + (SELECT count(*) FROM tile WHERE crc32c <> crc32c(id, motions))`); n != 0 {
		t.Errorf("%d rows have another checksum", n)
	}
}
