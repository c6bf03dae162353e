package main

import (
	"bytes"
	"context"
	"database/sql"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"swaybook/db"
	"swaybook/pipeline/demo"
)

// sealedStore ingests the fixtures of all formats and some invented records, in two runs that
// each leave an edition. It returns the folder of the records too.
func sealedStore(t *testing.T) (path, records string) {
	t.Helper()
	dir := t.TempDir()
	path, records = filepath.Join(dir, "store.db"), filepath.Join(dir, "records")
	if _, err := demo.Write(records, demo.Options{Events: 2, Stations: 2, Seed: 3}); err != nil {
		t.Fatal(err)
	}
	if err := os.CopyFS(filepath.Join(records, "fixtures"), os.DirFS(filepath.Join("..", "..", "testdata", "records"))); err != nil {
		t.Fatal(err)
	}
	ingest := []string{"ingest", records, "--periods", "0.1,0.5,1", "--dampings", "5%"}
	did(t, path, exitRejected, ingest...)
	did(t, path, exitRejected, append(ingest, "--catalogue", filepath.Join(records, "catalogue.csv"))...)
	return path, records
}

// did runs a command on a store, which must end so.
func did(t *testing.T, store string, code int, args ...string) {
	t.Helper()
	var stderr bytes.Buffer
	if args[0] != "reprocess" { // of which the study names it
		args = append([]string{"--store", store}, args...)
	}
	if got := run(t.Context(), append([]string{"swaybook", "--quiet"}, args...), io.Discard, &stderr); got != code {
		t.Fatalf("%v: exit code %d, want %d: %s", args, got, code, &stderr)
	}
}

// sealedQuestions together read everything that editions show.
var sealedQuestions = [][]string{
	{"query", "spectrum", "--damping", "5%", "--siting", "all", "--screen", "strict", "--component", "each", "--format", "json"},
	{"query", "spectrum", "--damping", "5%", "--component", "h1", "--periods", "0.3", "--format", "json"},
	{"query", "spectrum", "--damping", "5%", "--where", "magnitude > 1 and pga_g > 0 and arias_m_s > 0", "--balance", "event", "--format", "json"},
	{"query", "records", "--component", "all", "--siting", "all", "--format", "json"},
	{"query", "records", "--rejected"},
	{"query", "records", "--conflicts"},
	{"query", "records", "--as-of", "1", "--format", "json"},
	{"export", "ordinates"},
	{"export", "measures"},
	{"runs", "show", "2", "--json"},
}

// replied is what a question gives: stdout, and stderr where it fails.
type replied struct {
	code        int
	out, reason string
}

func asked(ctx context.Context, store string, question []string) replied {
	var stdout, stderr bytes.Buffer
	code := run(ctx, append([]string{"swaybook", "--store", store}, question...), &stdout, &stderr)
	return replied{code, stdout.String(), stderr.String()}
}

func repliesOf(t *testing.T, store string) (out []replied) {
	t.Helper()
	for _, q := range sealedQuestions {
		r := asked(t.Context(), store, q)
		if r.code != exitDone {
			t.Fatalf("%v: %d: %s", q, r.code, r.reason)
		}
		out = append(out, r)
	}
	return out
}

// openRaw opens the file for changes that no program makes.
func openRaw(t *testing.T, store string) *sql.DB {
	t.Helper()
	raw, err := sql.Open("sqlite", "file:"+store)
	if err != nil {
		t.Fatal(err)
	}
	raw.SetMaxOpenConns(1)
	return raw
}

// altered returns a copy of the store that a statement has changed.
func altered(t *testing.T, whole []byte, statement string) (path string) {
	t.Helper()
	path = filepath.Join(t.TempDir(), "altered.db")
	if err := os.WriteFile(path, whole, 0o644); err != nil {
		t.Fatal(err)
	}
	raw := openRaw(t, path)
	defer raw.Close()
	r, err := raw.ExecContext(t.Context(), statement)
	if err != nil {
		t.Fatalf("%s: %v", statement, err)
	}
	if n, err := r.RowsAffected(); n == 0 || err != nil {
		t.Fatalf("%s: %d rows, %v", statement, n, err)
	}
	return path
}

// faultsIn are the tables in which verify finds faults, of what has seals.
func faultsIn(t *testing.T, store string) (tables []string) {
	t.Helper()
	err := db.Inspect(t.Context(), store, func(f db.Fault) { tables = append(tables, f.Table) }, func(i *db.Inspection) error {
		_, err := i.Editions(t.Context())
		return errors.Join(err, i.Seals(t.Context()))
	})
	if err != nil {
		t.Fatal(err)
	}
	return tables
}

// refused checks that no question answers otherwise than before, and that some fail, saying in
// which store what is damaged; and that verify lists it.
func refused(t *testing.T, store, what, name, table string, want []replied) {
	t.Helper()
	failed := 0
	for i, q := range sealedQuestions {
		got := asked(t.Context(), store, q)
		switch {
		case got.code == exitDone && got.out == want[i].out:
		case got.code == exitDone:
			t.Errorf("%s: %v answers otherwise: %s", what, q, firstDifference(got.out, want[i].out))
		case got.out != "":
			t.Errorf("%s: %v fails behind a part of an answer", what, q)
		case !strings.Contains(got.reason, store+": ") || !strings.Contains(got.reason, "the store is damaged: edition ") || !strings.Contains(got.reason, name):
			t.Errorf("%s: %v fails by: %s", what, q, got.reason)
		default:
			failed++
		}
	}
	if failed == 0 {
		t.Errorf("%s: no question fails", what)
	}
	if faults := faultsIn(t, store); !slices.Contains(faults, table) {
		t.Errorf("%s: verify finds faults in %v, want one in %s", what, faults, table)
	}
}

// otherwise is another value of a column's type.
const otherwise = `CASE typeof(%[1]s) WHEN 'text' THEN %[1]s || 'x' WHEN 'integer' THEN %[1]s + 1 WHEN 'real' THEN %[1]s * 1.0000000000000007 + 1e-300
	ELSE CASE (SELECT type FROM pragma_table_info('%[2]s') WHERE name = '%[1]s') WHEN 'TEXT' THEN 'x' ELSE 7 END END`

// TestChangesOfEditionsAreRefused: every column of what the newest edition shows.
func TestChangesOfEditionsAreRefused(t *testing.T) {
	if testing.Short() {
		t.Skip("some seconds")
	}
	path, _ := sealedStore(t)
	whole, want := contentOf(t, path), repliesOf(t, path)
	raw := openRaw(t, path)
	defer raw.Close()
	for table, key := range map[string]string{"event": "id", "station": "id", "record": "id", "source_file": "id", "component": "id", "finding": "component_id, flag",
		"computed": "role, record_id", "rejection": "id", "statement": "subject, subject_id, attribute, stated_by, value", "likeness": "first_id, second_id"} {
		name, said := "edition_"+table, table
		if table == "computed" {
			said = "comput" // what computations have does not come to its place either
		}
		last := fmt.Sprintf(`(until, %[1]s) = (SELECT until, %[1]s FROM %[2]s ORDER BY until DESC, %[3]s DESC LIMIT 1)`, key, name, strings.ReplaceAll(key, ", ", " DESC, "))
		refused(t, altered(t, whole, `DELETE FROM `+name+` WHERE `+last), "a row of "+name+" is gone", said, name, want)
		rows, err := raw.QueryContext(t.Context(), `SELECT name FROM pragma_table_info(?)`, name)
		if err != nil {
			t.Fatal(err)
		}
		var columns []string
		for rows.Next() {
			var column string
			if err := rows.Scan(&column); err != nil {
				t.Fatal(err)
			}
			columns = append(columns, column)
		}
		if err := errors.Join(rows.Err(), rows.Close()); err != nil {
			t.Fatal(err)
		}
		for _, column := range columns {
			value := fmt.Sprintf(otherwise, column, name)
			if column == "until" {
				value = "until - 1" // no longer in the newest
			}
			refused(t, altered(t, whole, `UPDATE `+name+` SET `+column+` = `+value+` WHERE `+last), name+"."+column, said, name, want)
		}
	}
}

// TestChangesBesideEditionsAreRefused: of what was computed, of recipe and grid, and of the seals
// themselves.
func TestChangesBesideEditionsAreRefused(t *testing.T) {
	path, _ := sealedStore(t)
	whole, want := contentOf(t, path), repliesOf(t, path)
	const shown = ` WHERE computation_id = (SELECT max(k.computation_id) FROM edition_computed k JOIN conditioning c USING (computation_id))`
	for _, c := range []struct{ change, name, table string }{
		{`UPDATE measure SET value = value * 1.0000000000000003` + shown + ` AND name = 'pga_m_s2'`, "peaks", "measure"},
		{`DELETE FROM measure` + shown + ` AND name = 'pgd_m'`, "peaks", "measure"},
		{`UPDATE measure SET value = value * 1.0000000000000003` + shown + ` AND name = 'arias_m_s'`, "measures", "measure"},
		{`DELETE FROM measure` + shown + ` AND name = 'arias_m_s'`, "measures", "measure"},
		{`UPDATE measure SET name = 'arias'` + shown + ` AND name = 'arias_m_s'`, "measures", "measure"},
		{`UPDATE measure SET value = value * 1.0000000000000003 WHERE name = 'pgv_m_s' AND computation_id = (SELECT max(computation_id) FROM edition_computed WHERE role = 'rotd50')`, "peaks", "measure"},
		{`UPDATE conditioning SET step_s = step_s * 2` + shown, "conditioning", "conditioning"},
		{`UPDATE conditioning SET samples = samples + 1` + shown, "conditioning", "conditioning"},
		{`UPDATE conditioning SET lead_s = lead_s + 1` + shown, "conditioning", "conditioning"},
		{`UPDATE conditioning SET low_cut_hz = coalesce(low_cut_hz, 0) + 1` + shown, "conditioning", "conditioning"},
		{`UPDATE conditioning SET high_cut_hz = coalesce(high_cut_hz, 0) + 1` + shown, "conditioning", "conditioning"},
		{`UPDATE conditioning SET long_s = coalesce(long_s, 0) + 1` + shown, "conditioning", "conditioning"},
		{`DELETE FROM conditioning` + shown, "conditioning", "conditioning"},
		{`UPDATE computation SET failure = 'none'` + strings.Replace(shown, "computation_id", "id", 1), "", "computation"},
		{`UPDATE recipe SET name = 'other'`, "generation", "edition_seal"},
		{`UPDATE edition_seal SET sums = replace(sums, '1', '2') WHERE edition_id = 2 AND name = 'component'`, "component", "edition_component"},
		{`UPDATE edition_seal SET rows = rows + 1 WHERE edition_id = 2 AND name = 'record'`, "record", "edition_record"},
		{`DELETE FROM edition_seal WHERE edition_id = 2 AND name = 'computed' AND part = 'h1'`, "computed", "edition_computed"},
	} {
		if c.name != "" {
			refused(t, altered(t, whole, c.change), c.change, c.name, c.table, want)
			continue
		}
		store := altered(t, whole, c.change) // which nobody reads
		if got := repliesOf(t, store); !slices.Equal(got, want) {
			t.Errorf("%s: answers are others", c.change)
		}
		if faults := faultsIn(t, store); !slices.Contains(faults, c.table) {
			t.Errorf("%s: verify finds faults in %v, want one in %s", c.change, faults, c.table)
		}
	}
	for _, change := range []string{`UPDATE grid_period SET period_s = 0.25 WHERE position = 1`, `UPDATE grid_damping SET damping = 0.04`, `UPDATE recipe SET steps = replace(steps, '1', '2')`} {
		store := altered(t, whole, change)
		for _, q := range sealedQuestions {
			if r := asked(t.Context(), store, q); r.code == exitDone || !strings.Contains(r.reason, store+": the store is damaged: edition ") {
				t.Errorf("%s: %v: %d: %s", change, q, r.code, r.reason)
			}
		}
	}
}

// TestSealsAreKept: whatever runs do, verify finds all as it was stored.
func TestSealsAreKept(t *testing.T) {
	path, records := sealedStore(t)
	whole := func(after string) {
		t.Helper()
		if faults := faultsIn(t, path); len(faults) > 0 {
			t.Errorf("after %s: faults in %v", after, faults)
		}
		for _, q := range sealedQuestions {
			if r := asked(t.Context(), path, q); strings.Contains(r.reason, "damaged") {
				t.Errorf("after %s: %v: %s", after, q, r.reason)
			}
		}
	}
	whole("two runs")
	catalogue := filepath.Join(records, "catalogue.csv")
	text, err := os.ReadFile(catalogue)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(catalogue, bytes.ReplaceAll(text, []byte("Mw"), []byte("ML")), 0o644); err != nil {
		t.Fatal(err)
	}
	did(t, path, exitRejected, "ingest", records, "--catalogue", catalogue)
	whole("another catalogue")
	did(t, path, exitDone, "ingest", "--recipe", "as-delivered")
	whole("another recipe")
	did(t, path, exitDone, "query", "spectrum", "--damping", "3%", "--periods", "0.3")
	whole("a question off the grid")
	did(t, path, exitDone, "runs", "publish", "3")
	whole("publishing an earlier run")
	did(t, path, exitDone, "prune", "--keep", "3")
	whole("a prune")
	study := filepath.Join(filepath.Dir(path), "study.toml")
	settings := fmt.Sprintf("name = \"s\"\nstore = %q\nsources = [%q]\ncatalogue = %q\nrecipe = \"standard\"\n", path, records, catalogue)
	if err := os.WriteFile(study, []byte(settings), 0o644); err != nil {
		t.Fatal(err)
	}
	did(t, path, exitRejected, "reprocess", study)
	whole("a study")
	if err := os.RemoveAll(filepath.Join(records, "fixtures", "knet")); err != nil {
		t.Fatal(err)
	}
	did(t, path, exitRejected, "reprocess", study)
	whole("a study without some files")
}

// contentOf is the store's file, with all of its log.
func contentOf(t *testing.T, store string) []byte {
	t.Helper()
	raw := openRaw(t, store)
	defer raw.Close()
	if _, err := raw.ExecContext(t.Context(), `PRAGMA wal_checkpoint(TRUNCATE)`); err != nil {
		t.Fatal(err)
	}
	whole, err := os.ReadFile(store)
	if err != nil {
		t.Fatal(err)
	}
	return whole
}

// TestLostEditionsAreRefused: a run names the edition that it left as long as that is kept.
func TestLostEditionsAreRefused(t *testing.T) {
	path, _ := sealedStore(t)
	store := altered(t, contentOf(t, path), `PRAGMA foreign_keys = OFF; DELETE FROM edition WHERE id = 1`)
	for _, q := range [][]string{{"runs", "--json"}, {"runs", "show", "1"}, {"query", "records", "--as-of", "1"}} {
		if r := asked(t.Context(), store, q); r.code != exitFailed || r.out != "" || !strings.Contains(r.reason, "the store is damaged: run 1 ") {
			t.Errorf("%v: %d %s%s", q, r.code, r.out, r.reason)
		}
	}
}

// TestChangesOfRunsAreRefused: what a run left is found by its row, and told by it.
func TestChangesOfRunsAreRefused(t *testing.T) {
	path, _ := sealedStore(t)
	whole := contentOf(t, path)
	for _, column := range []string{"kind", "program", "started_at", "ended_at", "outcome", "counts", "edition_id"} {
		value := map[string]string{"outcome": "'failed'", "counts": "'{}'", "edition_id": "3 - edition_id"}[column]
		if value == "" {
			value = column + " || 'x'"
		}
		store := altered(t, whole, `DROP TRIGGER run_changed; UPDATE run SET `+column+` = `+value+` WHERE id = 1`)
		for _, q := range [][]string{{"runs", "--json"}, {"runs", "show", "1"}, {"query", "records", "--as-of", "1"}} {
			r := asked(t.Context(), store, q)
			if r.code != exitFailed || r.out != "" || !strings.Contains(r.reason, store+": ") || !strings.Contains(r.reason, "the store is damaged: run 1 ") {
				t.Errorf("%s: %v: %d %s%s", column, q, r.code, r.out, r.reason)
			}
		}
		if faults := faultsIn(t, store); !slices.Contains(faults, "run") {
			t.Errorf("%s: verify finds faults in %v", column, faults)
		}
	}
}
