package pipeline

import (
	"strings"
	"testing"

	"swaybook/db"
)

// A pair that cannot be rotated is named with its reason in each run, and stops
// nothing.
func TestPairsThatCannotBeRotated(t *testing.T) {
	dir, store := t.TempDir(), newStore(t)
	horizontals(t, dir, "steps", "090", 0.02, 300)
	horizontals(t, dir, "near", "020", 0.01, 600)
	horizontals(t, dir, "damaged", "090", 0.01, 600)
	horizontals(t, dir, "garbled", "090", 0.01, 600)
	horizontals(t, dir, "sound", "090", 0.01, 600)
	put(t, dir, "single.AT2", at2("Invented", "single", "000", 5))
	opts := options(dir)
	opts.SkipRotation = true
	run(t, store, opts)
	for station, damage := range map[string]string{
		"damaged": `UPDATE series SET data = substr(data, 1, 40) WHERE id = (SELECT c.series_id FROM component c JOIN record r ON r.id = c.record_id WHERE r.code GLOB ? AND c.role = 'h2')`,
		"garbled": `UPDATE tile_part SET (sd_m, crc32c) = (SELECT d, crc32c(d) FROM (SELECT CAST(substr(sd_m, 1, 8 * s.place) || x'ffffffffffffffff' || substr(sd_m, 8 * s.place + 9) AS BLOB) AS d
			FROM computed k JOIN record r ON r.id = k.record_id JOIN spectrum s ON s.computation_id = k.computation_id WHERE k.role = 'h1' AND r.code GLOB ?1))
			WHERE id = (SELECT s.tile_id << 20 FROM computed k JOIN record r ON r.id = k.record_id JOIN spectrum s ON s.computation_id = k.computation_id WHERE k.role = 'h1' AND r.code GLOB ?1)`,
	} {
		if _, err := client(t, store).ExecContext(t.Context(), damage, "*"+station); err != nil {
			t.Fatal(err)
		}
	}
	for i, rotated := range []int{1, 0} {
		got, said := reasons(t, meddling{store, func(p db.Pair) {
			if strings.HasSuffix(p.Code, "steps") || strings.HasSuffix(p.Code, "near") {
				t.Errorf("run %d: %s was read, although it makes no pair", i, p.Code)
			}
		}}, options(dir))
		if got.Rotated != rotated || got.NotRotated != 2 || got.Damaged != 2 || !got.Complete() {
			t.Errorf("run %d: summary = %+v", i, got)
		}
		for station, want := range map[string]string{
			"steps": "horizontal components of different time steps: 0.01 s and 0.02 s", "near": "horizontal components too near in direction: azimuths 0° and 20°",
			"damaged": "damaged in the store: h2: ", "garbled": "damaged in the store: h1: ",
		} {
			if r := said["invented-20260312_"+station]; !strings.HasPrefix(r.Reason+": "+r.Detail, want) || r.Total != rotated+4 || r.Damaged != strings.HasPrefix(want, "damaged") {
				t.Errorf("run %d: %s: %+v, want %q", i, station, r, want)
			}
		}
	}
}
