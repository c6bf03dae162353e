package pipeline

import (
	"os"
	"path/filepath"
	"testing"

	"swaybook/db"
)

// What was computed and is lost, or nobody knows where it is, a run to which nothing else is new
// computes again: of components and of pairs, and the store is as it was.
func TestLostSpectraAreComputedAgain(t *testing.T) {
	dir, files := region(t)
	store := newStore(t)
	run(t, store, regionOptions(t, dir, 2, files...))
	want, whole := digestOf(t, store), contentOf(t, store)
	const pair = `(SELECT computation_id FROM computed WHERE role = 'rotd50' LIMIT 1)`
	const tile = `(SELECT tile_id FROM spectrum WHERE computation_id = ` + pair + `)`
	for damage, isOfPairs := range map[string]bool{
		`UPDATE tile SET motions = motions - 1 WHERE id = 1`:                                   false,
		`UPDATE tile SET motions = motions + (1 << 58) WHERE id = 1`:                           false,
		`DELETE FROM tile WHERE id = 1`:                                                        false,
		`DELETE FROM tile_part WHERE id = 1 << 20`:                                             false,
		`UPDATE spectrum SET crc32c = crc32c + 1 WHERE computation_id = 1`:                     false,
		`DELETE FROM spectrum WHERE computation_id = 1`:                                        false,
		`UPDATE tile SET motions = motions - 1 WHERE id = ` + tile:                             true,
		`DELETE FROM tile WHERE id = ` + tile:                                                  true,
		`DELETE FROM tile_part WHERE id >> 20 = ` + tile:                                       true,
		`UPDATE spectrum SET tile_id = 1 << 50 WHERE computation_id = ` + pair:                 true,
		`UPDATE spectrum SET place = 62 WHERE computation_id = ` + pair:                        true,
		`DELETE FROM spectrum WHERE computation_id = (1 + ` + pair + `)`:                       true,
		`DELETE FROM spectrum WHERE computation_id = ` + pair + `; DELETE FROM edition_column`: true,
	} {
		path := filepath.Join(t.TempDir(), "lost.db")
		if err := os.WriteFile(path, whole, 0o644); err != nil {
			t.Fatal(err)
		}
		execute(t, path, damage)
		lost, err := db.Create(t.Context(), path, db.AnySolver)
		if err != nil {
			t.Fatal(err)
		}
		again := run(t, lost, regionOptions(t, dir, 2, files...))
		if isOfPairs != (again.Rotated > 0) || isOfPairs != (again.Recomputed == 0) || again.Stored > 0 || again.Uncomputed+again.Unrotated > 0 {
			t.Errorf("%s: the next run did %+v", damage, again)
		}
		if v := verify(t, lost); len(v.Faults) > 0 || digestOf(t, lost) != want {
			t.Errorf("%s: afterwards faults %v, digest %s, want %s", damage, v.Faults, digestOf(t, lost), want)
		}
		if again := run(t, lost, regionOptions(t, dir, 2, files...)); again.Rotated+again.Recomputed > 0 {
			t.Errorf("%s: the run after that did %+v", damage, again)
		}
		lost.Close()
	}
}
