package pipeline

import (
	"context"
	"database/sql"
	"fmt"
	"io/fs"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/pipeline/condition"
	"swaybook/pipeline/demo"
)

// region writes invented records in several formats and returns their files and the
// catalogue.
func region(t *testing.T) (dir string, files []string) {
	t.Helper()
	dir = t.TempDir()
	if _, err := demo.Write(dir, demo.Options{Events: 3, Stations: 4, Seed: 5, Damaged: true}); err != nil {
		t.Fatal(err)
	}
	fixtures := filepath.Join("..", "testdata", "records")
	for _, format := range []string{"at2", "knet", "esm", "cosmos"} {
		if err := os.CopyFS(filepath.Join(dir, format), os.DirFS(filepath.Join(fixtures, format))); err != nil {
			t.Fatal(err)
		}
	}
	err := filepath.WalkDir(dir, func(path string, d fs.DirEntry, err error) error {
		if err == nil && !d.IsDir() && d.Name() != "catalogue.csv" {
			files = append(files, path)
		}
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return dir, files
}

func regionOptions(t *testing.T, dir string, workers int, paths ...string) Options {
	t.Helper()
	text, err := os.ReadFile(filepath.Join(dir, "catalogue.csv"))
	if err != nil {
		t.Fatal(err)
	}
	opts := options(paths...)
	opts.Workers, opts.Catalogue = workers, catalogue(t, string(text))
	return opts
}

func digestOf(t *testing.T, store *db.Store) string {
	t.Helper()
	digest, err := db.Digest(t.Context(), store.Path())
	if err != nil {
		t.Fatal(err)
	}
	return digest
}

func verify(t *testing.T, store *db.Store) Verification {
	t.Helper()
	v, err := Verify(t.Context(), store.Path(), VerifyOptions{Sample: -1, Clock: time.Now})
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// The digest depends on the content that is published, and on nothing else; and each of
// these stores is whole.
func TestDigestDependsOnContentAlone(t *testing.T) {
	dir, files := region(t)
	store := newStore(t)
	run(t, store, regionOptions(t, dir, 1, files...))
	want := digestOf(t, store)
	if v := verify(t, store); len(v.Faults)+len(v.Remarks) > 0 || v.Recomputed != v.Results || v.Results < 40 || v.Ordinates == 0 {
		t.Errorf("verification = %+v, want no fault", v)
	}
	check := func(what string, s *db.Store) {
		t.Helper()
		if got := digestOf(t, s); got != want {
			t.Errorf("%s: digest %s, want %s", what, got, want)
		}
		if v := verify(t, s); len(v.Faults)+len(v.Remarks) > 0 {
			t.Errorf("%s: %v %v", what, v.Faults, v.Remarks)
		}
	}
	for seed, runs := range []int{1, 2, 5, 9} {
		rng := rand.New(rand.NewPCG(uint64(seed), 8))
		rng.Shuffle(len(files), func(i, j int) { files[i], files[j] = files[j], files[i] })
		s := newStore(t)
		for part := range slices.Chunk(files, (len(files)+runs-1)/runs) {
			run(t, s, regionOptions(t, dir, 1+seed, part...))
		}
		check(fmt.Sprintf("%d runs", runs), s)
	}

	moved := filepath.Join(t.TempDir(), "other folder")
	if err := os.CopyFS(moved, os.DirFS(dir)); err != nil {
		t.Fatal(err)
	}
	s := newStore(t)
	run(t, s, regionOptions(t, moved, 2, moved))
	check("files in another folder", s)

	s = newStore(t)
	ctx, cancel := context.WithCancel(t.Context())
	opts := regionOptions(t, dir, 2, dir)
	opts.Progress = func(Progress) { cancel() }
	Run(ctx, s, opts)
	cancel()
	run(t, s, regionOptions(t, dir, 2, dir))
	check("stopped and finished", s)

	delivered := condition.AsDelivered()
	opts = regionOptions(t, dir, 2, dir)
	opts.Recipe = &delivered
	run(t, s, opts)
	if digestOf(t, s) == want {
		t.Error("another recipe: the same digest")
	}
	standard := condition.Standard()
	opts.Recipe = &standard
	run(t, s, opts)
	check("there and back", s)
}

// execute changes a store behind the program's back.
func execute(t *testing.T, path string, statements ...string) {
	t.Helper()
	raw, err := sql.Open("sqlite", "file:"+path+"?_pragma=foreign_keys(0)")
	if err != nil {
		t.Fatal(err)
	}
	defer raw.Close()
	for _, text := range statements {
		result, err := raw.ExecContext(t.Context(), text)
		if err != nil {
			t.Fatalf("%s: %v", text, err)
		}
		if n, err := result.RowsAffected(); err == nil && n == 0 && !strings.HasPrefix(text, "CREATE") && !strings.HasPrefix(text, "DROP") && !strings.HasPrefix(text, "PRAGMA") {
			t.Fatalf("%s changes nothing", text)
		}
	}
}

// countIn is the number that a query gives.
func countIn(t *testing.T, path, query string) (n int) {
	t.Helper()
	raw, err := sql.Open("sqlite", "file:"+path+"?mode=ro")
	if err != nil {
		t.Fatal(err)
	}
	defer raw.Close()
	if err := raw.QueryRowContext(t.Context(), query).Scan(&n); err != nil {
		t.Fatal(err)
	}
	return n
}

// contentOf closes the store and returns its file.
func contentOf(t *testing.T, store *db.Store) []byte {
	t.Helper()
	if err := store.Close(); err != nil {
		t.Fatal(err)
	}
	execute(t, store.Path(), "PRAGMA wal_checkpoint(TRUNCATE)")
	whole, err := os.ReadFile(store.Path())
	if err != nil {
		t.Fatal(err)
	}
	return whole
}

// columnsOfEdition are those of which any change must change the digest. What is missing are
// ids and times of editions, names that depend on the order of reading or on folders
// (record.code, source_file.path, statement.source), and what is derived of what is there
// (event.own_origin, edition_likeness).
var columnsOfEdition = map[string][]string{
	"event":       {"code", "name", "origin_time", "latitude_deg", "longitude_deg", "depth_km", "magnitude", "magnitude_type"},
	"station":     {"network", "code", "name", "latitude_deg", "longitude_deg", "elevation_m", "vs30_m_s", "site_class"},
	"record":      {"instrument", "siting", "start_at", "distance_km", "epicentral_km", "hypocentral_km", "rupture_km", "jb_km", "event_id", "station_id"},
	"source_file": {"sha256", "format"},
	"component": {"axis", "label", "rank", "azimuth_deg", "channel", "start_at", "step_s", "samples", "unit", "processing", "low_cut_hz", "high_cut_hz",
		"header_peak_m_s2", "warnings", "source_line", "role", "series_id", "motion_id"},
	"finding":   {"flag", "value", "bound", "words"},
	"statement": {"attribute", "stated_by", "value"},
	"computed":  {"computation_id"},
}

// another are values that a column does not have, by its type.
var another = map[string]string{
	"start_at": `'2001-02-03T04:05:06Z'`, "origin_time": `'2001-02-03T04:05:06Z'`, "warnings": `'["another"]'`,
	"event_id": "NULL", "station_id": "NULL", "axis": `'unknown'`, "role": `'v9'`, "siting": `'borehole'`, "rank": "9 + rank",
	"series_id": "(SELECT max(id) FROM series WHERE id <> series_id)", "motion_id": "iif(motion_id IS NULL, id, NULL)",
	"computation_id": "(SELECT max(id) FROM computation WHERE id <> computation_id)",
}

// Each change of one thing that questions show changes the digest.
func TestDigestTellsEveryChange(t *testing.T) {
	dir, files := region(t)
	store := newStore(t)
	run(t, store, regionOptions(t, dir, 2, files...))
	want, whole := digestOf(t, store), contentOf(t, store)
	changes := []string{
		`UPDATE tile_part SET sd_m = cast(substr(sd_m, 2) || substr(sd_m, 1, 1) AS BLOB) WHERE id = (SELECT min(id) FROM tile_part)`,
		`UPDATE tile_part SET sd_m = cast(substr(sd_m, 2) || substr(sd_m, 1, 1) AS BLOB) WHERE id = (SELECT max(id) FROM tile_part)`,
		`DELETE FROM tile_part WHERE id = (SELECT max(id) FROM tile_part)`,
		`DELETE FROM spectrum WHERE computation_id = 1`,
		`UPDATE spectrum SET place = 99 WHERE computation_id = 1`,
		`UPDATE tile SET motions = motions + 1 WHERE id = 1`,
		`UPDATE measure SET value = value * 1.0000000000000002 WHERE computation_id = 1 AND name = 'pga_m_s2'`,
		`DELETE FROM measure WHERE computation_id = 1 AND name = 'arias_m_s'`,
		`UPDATE conditioning SET lead_s = lead_s + 1 WHERE computation_id = (SELECT min(computation_id) FROM conditioning)`,
		`UPDATE conditioning SET long_s = 1.5 WHERE computation_id = (SELECT min(computation_id) FROM conditioning)`,
		`UPDATE computation SET failure = 'another' WHERE id = 1`,
		`UPDATE recipe SET steps = '{"another":1}'`,
		`UPDATE generation SET solver = 'another'`,
		`UPDATE grid_period SET period_s = 7 WHERE position = 1`,
		`UPDATE grid_damping SET damping = 0.5 WHERE position = 1`,
		`UPDATE series SET sha256 = 'another' WHERE id = 1`,
	}
	for table, columns := range columnsOfEdition {
		for _, column := range columns {
			value, ok := another[column]
			if !ok {
				value = fmt.Sprintf("CASE typeof(%[1]s) WHEN 'text' THEN %[1]s || '9' WHEN 'null' THEN 9 ELSE %[1]s + 1 END", column)
			}
			// One row of those that a record shows.
			changes = append(changes, fmt.Sprintf(`UPDATE edition_%s SET %s = %s WHERE %s`, table, column, value, oneRow[table]))
		}
	}
	for table, condition := range oneRow {
		if table != "event" && table != "station" && table != "record" && table != "source_file" {
			changes = append(changes, fmt.Sprintf(`DELETE FROM edition_%s WHERE %s`, table, condition))
		}
	}
	changed := filepath.Join(t.TempDir(), "changed.db")
	for _, change := range changes {
		if err := os.WriteFile(changed, whole, 0o644); err != nil {
			t.Fatal(err)
		}
		execute(t, changed, change)
		if got, err := db.Digest(t.Context(), changed); err == nil && got == want {
			t.Errorf("%s: the same digest", change)
		}
	}
	t.Logf("%d changes", len(changes))
}

// oneRow picks one row of an edition's table that records show.
var oneRow = map[string]string{
	"event":       "id = (SELECT event_id FROM edition_record WHERE event_id IS NOT NULL ORDER BY id LIMIT 1)",
	"station":     "id = (SELECT station_id FROM edition_record WHERE station_id IS NOT NULL ORDER BY id LIMIT 1)",
	"record":      "id = (SELECT min(id) FROM edition_record WHERE event_id IS NOT NULL AND station_id IS NOT NULL)",
	"source_file": "id = (SELECT source_id FROM edition_component ORDER BY id LIMIT 1)",
	"component":   "id = (SELECT min(id) FROM edition_component WHERE axis <> 'unknown')",
	"finding":     "(component_id, flag) = (SELECT component_id, flag FROM edition_finding LIMIT 1)",
	"statement": "(subject, subject_id, attribute, stated_by, value) = (SELECT subject, subject_id, attribute, stated_by, value FROM edition_statement\n" +
		"WHERE subject = 'event' AND subject_id IN (SELECT event_id FROM edition_record) LIMIT 1)",
	"computed": "(record_id, role) = (SELECT record_id, role FROM edition_computed LIMIT 1)",
}

// Every kind of fault is found, named by its table, and nothing is changed by looking.
func TestVerifyFindsFaults(t *testing.T) {
	dir, files := region(t)
	store := newStore(t)
	run(t, store, regionOptions(t, dir, 2, files...))
	keepOffGrid(t, store)
	whole := contentOf(t, store)
	const pair = `(SELECT computation_id FROM computed WHERE role = 'rotd50' LIMIT 1)`
	for _, c := range []struct{ table, change string }{
		{"series", `UPDATE series SET data = cast(data || x'7f7f' AS BLOB) WHERE id = 2`},
		{"series", `UPDATE series SET sha256 = 'another' WHERE id = 2`},
		{"series", `INSERT INTO series (sha256, data) VALUES ('of nobody', x'00')`},
		{"tile_part", `UPDATE tile_part SET sd_m = cast(substr(sd_m, 2) || substr(sd_m, 1, 1) AS BLOB) WHERE id = 1 << 20`},
		{"tile_part", `UPDATE tile_part SET sd_m = cast(substr(sd_m, 2) || substr(sd_m, 1, 1) AS BLOB) WHERE id = (SELECT tile_id << 20 FROM spectrum WHERE computation_id = ` + pair + `)`},
		{"tile_part", `UPDATE tile_part SET (sd_m, crc32c) = (SELECT d, crc32c(d) FROM (SELECT substr(sd_m, 2) AS d)) WHERE id = 1 << 20`},
		{"tile_part", `UPDATE tile_part SET (sd_m, crc32c) = (SELECT d, crc32c(d) FROM (SELECT CAST(x'ffffffffffffffff' || substr(sd_m, 9) AS BLOB) AS d)) WHERE id = 1 << 20`},
		{"tile_part", `DELETE FROM tile_part WHERE id = (1 << 20) + (1 << 12)`},
		{"tile_part", `INSERT INTO tile_part SELECT id + 4000, sd_m, crc32c FROM tile_part WHERE id = 1 << 20`},
		{"tile_part", `INSERT INTO tile_part SELECT id + (99999 << 20), sd_m, crc32c FROM tile_part WHERE id = 1 << 20`},
		{"tile", `INSERT INTO tile (id, motions, crc32c) VALUES (99999, 1, crc32c(99999, 1))`},
		{"tile", `INSERT INTO computation SELECT 99999, generation_id + 1, inputs, failure FROM computation WHERE id = 1; INSERT INTO spectrum VALUES (99999, 1, 62, 0)`},
		{"tile", `UPDATE tile SET motions = motions + 1 WHERE id = 1`},
		{"spectrum", `UPDATE tile SET motions = motions + (1 << 58) WHERE id = 1`},
		{"spectrum", `DELETE FROM tile WHERE id = 1`},
		{"spectrum", `DELETE FROM spectrum WHERE computation_id = 1`},
		{"spectrum", `UPDATE spectrum SET place = 62 WHERE computation_id = 1`},
		{"spectrum", `UPDATE spectrum SET (place, crc32c) = (62, crc32c(1, tile_id, 62)) WHERE computation_id = 1`},
		{"spectrum", `INSERT INTO spectrum (computation_id, tile_id, place, crc32c) VALUES (99999, 1, 62, crc32c(99999, 1, 62))`},
		{"spectrum", `UPDATE computation SET failure = 'another' WHERE id = 1`},
		{"measure", `UPDATE measure SET value = value * 1.0000000000000002 WHERE computation_id = 1 AND name = 'pga_m_s2'`},
		{"measure", `DELETE FROM measure WHERE computation_id = ` + pair + ` AND name = 'pgd_m'`},
		{"measure", `INSERT INTO measure (computation_id, name, value) VALUES (99999, 'pgd_m', 1)`},
		{"conditioning", `UPDATE conditioning SET samples = samples + 1 WHERE computation_id = (SELECT min(computation_id) FROM conditioning)`},
		{"conditioning", `DELETE FROM conditioning WHERE computation_id = (SELECT min(computation_id) FROM conditioning)`},
		{"conditioned_finding", `INSERT INTO conditioned_finding (computation_id, flag, value, bound, words) VALUES ((SELECT min(computation_id) FROM conditioning), 'another', 1, 1, '')`},
		{"conditioned_finding", `INSERT INTO conditioned_finding (computation_id, flag, value, bound, words) VALUES (99999, 'another', 1, 1, '')`},
		{"computation", `UPDATE computation SET failure = 'another' WHERE id = 1`},
		{"computed", `UPDATE computation SET inputs = replace(inputs, ' - - ', ' 1 - ') WHERE id = (SELECT min(id) FROM computation WHERE inputs LIKE '% - - %')`},
		{"computed", `DELETE FROM computed WHERE role = 'rotd50' AND record_id = (SELECT min(record_id) FROM computed WHERE role = 'rotd50')`},
		{"computed", `INSERT INTO computed SELECT record_id, 'v9', generation_id, computation_id FROM computed LIMIT 1`},
		{"off_grid", `UPDATE off_grid SET sd_m = cast(sd_m || x'00' AS BLOB)`},
		{"off_grid", `UPDATE off_grid SET sd_m = (SELECT o.sd_m FROM off_grid o WHERE o.sd_m <> off_grid.sd_m LIMIT 1) WHERE computation_id = (SELECT min(computation_id) FROM off_grid)`},
		{"off_grid_block", `UPDATE off_grid_block SET oscillators = x'00'`},
		{"power", `UPDATE power SET factor = 1.0000000000000002 * factor WHERE exponent = 1000`},
		{"power", `DELETE FROM power WHERE exponent = 0`},
		{"finding", `INSERT INTO finding (component_id, flag, value, bound, words) VALUES (99999, 'another', 1, 1, '')`},
		{"component", `UPDATE component SET source_id = 99999 WHERE id = 1`},
		{"edition", `UPDATE edition SET state = 'superseded'`},
		{"edition_component", `UPDATE edition_component SET step_s = 2 * step_s WHERE id = 1`},
		{"edition_event", `UPDATE event SET magnitude = 9 WHERE id = 1`},
		{"edition_record", `UPDATE edition_record SET since = since + 1 WHERE id = 1`},
		{"edition_record", `UPDATE edition_record SET until = since WHERE id = 1`},
		{"edition_record", `DELETE FROM edition_record WHERE id = 1`},
		{"edition_station", `INSERT INTO station (network, code) VALUES ('another', '')`},
		{"edition_computed", `UPDATE edition_computed SET computation_id = 2 WHERE computation_id = 1`},
		{"recipe", `UPDATE recipe SET steps = steps || ' '`},
		{"grid", `UPDATE grid_period SET period_s = 7 WHERE position = 1`},
		{"grid", `UPDATE grid_period SET omega_rad_s = 7 WHERE position = 1`},
		{"sqlite_schema", `DROP VIEW ordinate`},
		{"sqlite_schema", `DROP INDEX finding_flag`},
	} {
		path := filepath.Join(t.TempDir(), "faulty.db")
		if err := os.WriteFile(path, whole, 0o644); err != nil {
			t.Fatal(err)
		}
		execute(t, path, c.change)
		before, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		v, err := Verify(t.Context(), path, VerifyOptions{Sample: -1, Clock: time.Now})
		if err != nil || !slices.ContainsFunc(v.Faults, func(f db.Fault) bool { return f.Table == c.table }) {
			t.Errorf("%s: %v, %v; want a fault of %s", c.change, v.Faults, err, c.table)
		}
		after, err := os.ReadFile(path)
		if err != nil || !slices.Equal(before, after) {
			t.Errorf("%s: the file was changed by looking", c.change)
		}
		if beside, _ := filepath.Glob(path + "-*"); len(beside) > 0 {
			t.Errorf("%s: %v were left", c.change, beside)
		}
	}
}

// keepOffGrid keeps ordinates of two components off the grid, as questions do.
func keepOffGrid(t *testing.T, store *db.Store) {
	t.Helper()
	asked := []db.Oscillator{{PeriodS: 0.3, Damping: 0.05}, {PeriodS: 0.7, Damping: 0.05}}
	err := store.View(t.Context(), func(v *db.Snapshot) error {
		components, err := v.Components(t.Context(), 0)
		if err != nil {
			return err
		}
		blocks, ok := v.ReserveOffGrid(t.Context(), nil, [][]db.Oscillator{asked}, 100)
		if !ok {
			return store.Unkept()
		}
		c, err := newComputer(v.Generation)
		if err != nil {
			return err
		}
		for _, of := range components[:2] {
			m, err := v.Motion(t.Context(), of.ID)
			if err != nil {
				return err
			}
			motion, err := c.recipe.Apply(condition.Component(m))
			if err != nil {
				return err
			}
			solver, err := solverOf(asked, motion.StepS)
			if err != nil {
				return err
			}
			if !v.KeepOffGrid(t.Context(), blocks, []db.OffGridRow{{RecordID: of.RecordID, Role: of.Role, SD: solver.SD(nil, motion.Acceleration)}}) {
				return store.Unkept()
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	if v := verify(t, store); len(v.Faults) > 0 || v.OffGrid != 2 {
		t.Fatalf("%d rows off the grid, faults %v", v.OffGrid, v.Faults)
	}
}
