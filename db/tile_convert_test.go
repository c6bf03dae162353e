package db

import (
	"database/sql"
	"fmt"
	"path/filepath"
	"slices"
	"testing"
)

// migrated brings a store up to this migration.
func migrated(t *testing.T, handle *sql.DB, last int) {
	t.Helper()
	all, err := steps()
	for done := false; !done && err == nil; {
		done, err = applyNext(t.Context(), handle, all[:last], AnySolver)
	}
	if err != nil {
		t.Fatal(err)
	}
}

// olderStore is a store of the last schema with a row a spectrum, of as many computations in each
// of two generations, by turns, on grids of 19 and 3 periods.
func olderStore(t *testing.T, computations int) (path string, handle *sql.DB) {
	t.Helper()
	path = filepath.Join(t.TempDir(), "older.db")
	handle, err := sql.Open("sqlite", path)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { handle.Close() })
	handle.SetMaxOpenConns(1)
	migrated(t, handle, 22)
	do := func(query string, args ...any) {
		if _, err := handle.ExecContext(t.Context(), query, args...); err != nil {
			t.Fatal(query, err)
		}
	}
	do(`INSERT INTO recipe (id, hash, name, steps) VALUES (1, 'r', 'r', '[]')`)
	for g, grid := range olderGrids {
		do(`INSERT INTO grid (id, hash) VALUES (?, ?)`, 1+g, grid.Hash())
		do(`INSERT INTO generation (id, recipe_id, grid_id, solver) VALUES (?, 1, ?, ?)`, 1+g, 1+g, testSolver)
		for p, x := range grid.PeriodsS {
			do(`INSERT INTO grid_period (grid_id, position, period_s, omega_rad_s) VALUES (?, ?, ?, 1)`, 1+g, p, x)
		}
		for d, x := range grid.Dampings {
			do(`INSERT INTO grid_damping (grid_id, position, damping) VALUES (?, ?, ?)`, 1+g, d, x)
		}
	}
	for i := range 2 * computations {
		id, grid := int64(1+i), olderGrids[i%2]
		do(`INSERT INTO computation (id, generation_id, inputs) VALUES (?, ?, ?)`, id, 1+i%2, fmt.Sprint(id))
		for d := range grid.Dampings {
			sd := encodeOrdinates(nil, tiledSD(id, RoleH1, d, Span{0, len(grid.PeriodsS)}))
			do(`INSERT INTO spectrum (id, sd_m, crc32c) VALUES (?, ?, ?)`, 256*id+int64(d), sd, sealOf(sd))
		}
	}
	return path, handle
}

var olderGrids = []Grid{tiledGrid, testGrid}

// Spectra that each were a row come into tiles of one generation, in the order of computations,
// bit for bit; what was damaged stays so, and what was lost is lost.
func TestSpectraBecomeTiles(t *testing.T) {
	const computations = 100 // of each generation
	_, handle := olderStore(t, computations)
	for _, damage := range []string{
		`UPDATE spectrum SET crc32c = crc32c + 1 WHERE id = 256 * 7 + 1`,
		`UPDATE spectrum SET (sd_m, crc32c) = (SELECT d, crc32c(d) FROM (SELECT substr(sd_m, 9) AS d)) WHERE id = 256 * 8`,
		`UPDATE spectrum SET (sd_m, crc32c) = (SELECT d, crc32c(d) FROM (SELECT CAST(sd_m || x'0000000000000000' AS BLOB) AS d)) WHERE id = 256 * 9`,
		`UPDATE spectrum SET (sd_m, crc32c) = (x'', -1) WHERE id = 256 * 10 + 1`,
		`DELETE FROM spectrum WHERE id = 256 * 11 + 1`,
		`DELETE FROM spectrum WHERE id = 256 * 12`,
	} {
		if _, err := handle.ExecContext(t.Context(), damage); err != nil {
			t.Fatal(damage, err)
		}
	}
	damaged := map[string]bool{"7 1": true, "8 0": true, "9 0": true, "10 1": true, "11 1": true}
	if err := migrate(t.Context(), handle, AnySolver); err != nil {
		t.Fatal(err)
	}
	tiles := &tileReader{q: handle}
	for id := int64(1); id <= 2*computations; id++ {
		sd, err := tiles.whole(t.Context(), id)
		if err != nil {
			t.Fatal(err)
		}
		if id == 12 {
			if len(sd) != 0 {
				t.Errorf("computation 12, whose first spectrum was lost, has %d", len(sd))
			}
			continue
		}
		grid := olderGrids[(id-1)%2]
		if len(sd) != len(grid.Dampings) {
			t.Fatalf("computation %d: %d dampings", id, len(sd))
		}
		for d := range sd {
			want := encodeOrdinates(nil, tiledSD(id, RoleH1, d, Span{0, len(grid.PeriodsS)}))
			if damaged[fmt.Sprint(id, d)] {
				want = nil
			}
			if !slices.Equal(sd[d], want) {
				t.Errorf("computation %d, damping %d: %d bytes, want %d", id, d, len(sd[d]), len(want))
			}
		}
	}
	s := &Store{read: handle}
	if got := fmt.Sprint(tilesOf(t, s)); got != "[63 37 63 36]" {
		t.Errorf("tiles of %s motions, want [63 37 63 36]", got)
	}
	for _, none := range []string{
		`SELECT count(*) FROM spectrum WHERE crc32c <> crc32c(computation_id, tile_id, place)`,
		`SELECT count(*) FROM tile_part WHERE crc32c <> crc32c(sd_m)`,
		`SELECT count(*) FROM tile_part WHERE length(sd_m) > 4032`,
		`SELECT count(*) FROM pragma_integrity_check WHERE integrity_check <> 'ok'`,
	} {
		if n := count(t, s, none); n != 0 {
			t.Errorf("%s: %d", none, n)
		}
	}
	if n, want := count(t, s, `SELECT count(*) FROM tile_part`), 2*(3*3+2*1); n != want {
		t.Errorf("%d parts, want %d", n, want)
	}
}

// Tiles get a checksum where their motions go with their parts; what is in others is lost.
func TestTilesAreSealed(t *testing.T) {
	_, handle := olderStore(t, 100)
	migrated(t, handle, 24)
	for _, damage := range []string{
		`UPDATE tile SET motions = motions - 1 WHERE id = 1`,
		`UPDATE tile SET motions = motions + (1 << 58) WHERE id = 2`,
		`DELETE FROM tile_part WHERE id = 3 << 20`,
	} {
		if _, err := handle.ExecContext(t.Context(), damage); err != nil {
			t.Fatal(damage, err)
		}
	}
	if err := migrate(t.Context(), handle, AnySolver); err != nil {
		t.Fatal(err)
	}
	s := &Store{read: handle}
	for id, want := range []int{1: 0, 2: 0, 3: 0, 4: 1} {
		if n := count(t, s, fmt.Sprintf(`SELECT count(*) FROM tile t WHERE id = %d AND %s`, id, isSealedTile)); n != want {
			t.Errorf("tile %d: sealed %d times, want %d", id, n, want)
		}
	}
	tiles := &tileReader{q: handle}
	sd, err := tiles.whole(t.Context(), 200) // in tile 4
	if want := encodeOrdinates(nil, tiledSD(200, RoleH1, 0, Span{0, 3})); err != nil || len(sd) != 2 || !slices.Equal(sd[0], want) {
		t.Errorf("what is in a tile that is whole: %v, %v", sd, err)
	}
}
