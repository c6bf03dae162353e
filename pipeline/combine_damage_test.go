package pipeline

import (
	"bytes"
	"database/sql"
	"errors"
	"fmt"
	"os"
	"slices"
	"strings"
	"testing"

	"swaybook/db"
)

// What a store keeps of a shard, and has lost, is found, told, and taken over again, without
// which no combination goes on.
func TestDamagedIntakeIsTakenOverAgain(t *testing.T) {
	opts := options(recordFiles(t, 6))
	shards := shardsOf(t, 2, opts)
	store := newStore(t)
	combined := func(paths ...string) error {
		_, err := combineInto(t.Context(), t, store, paths, opts)
		return err
	}
	if err := combined(shards...); err != nil {
		t.Fatal(err)
	}
	want := dump(t, store)
	published, err := db.Digest(t.Context(), store.Path())
	if err != nil {
		t.Fatal(err)
	}
	const last = `(SELECT max(id) FROM intake WHERE shard = 2)`
	for _, damage := range []string{
		`UPDATE intake SET said = CAST(said || x'00' AS BLOB) WHERE id = ` + last,
		`UPDATE intake_series SET channel = channel + 7 WHERE intake_id = ` + last,
		`UPDATE intake_series SET samples = samples + 1 WHERE intake_id = ` + last,
	} {
		execute(t, store.Path(), damage)
		if v := verify(t, store); !slices.ContainsFunc(v.Faults, func(f db.Fault) bool { return f.Table == "intake" && strings.HasPrefix(f.Text, "shard 2, ") }) {
			t.Errorf("%s: faults %v, want one of intake", damage, v.Faults)
		}
		execute(t, store.Path(), `UPDATE shard SET state = 'changed'`)
		if err := combined(shards...); err == nil || !strings.Contains(err.Error(), "it is forgotten: combine shard 2 of 2 again") {
			t.Errorf("%s: %v", damage, err)
		}
		if shown, err := db.Digest(t.Context(), store.Path()); err != nil || shown != published {
			t.Errorf("%s: something else is shown: %v", damage, err)
		}
		if err := combined(shards[0]); err == nil || !strings.Contains(err.Error(), "shard 2 of 2 was being taken over") {
			t.Errorf("%s: without the shard: %v", damage, err)
		}
		if err := combined(shards...); err != nil {
			t.Fatal(err)
		}
		if got := dump(t, store); !slices.Equal(got, want) {
			t.Errorf("%s: another result", damage)
		}
		if v := verify(t, store); len(v.Faults) != 0 {
			t.Errorf("%s: faults %v", damage, v.Faults)
		}
	}
}

// What a store has lost of the files of a shard, with all that tells of it, is missed: by verify, and
// by a combination, which either has the shard and takes them over again, or asks for it.
func TestLostIntakeIsMissed(t *testing.T) {
	opts := options(recordFiles(t, 6))
	shards := shardsOf(t, 2, opts)
	store := newStore(t)
	if _, err := combineInto(t.Context(), t, store, shards, opts); err != nil {
		t.Fatal(err)
	}
	want := dump(t, store)
	const first = `(SELECT min(id) FROM intake WHERE shard = 1)`
	lost := `DELETE FROM intake_series WHERE intake_id = ` + first + `; DELETE FROM intake WHERE id = ` + first
	for _, c := range []struct {
		damage string
		given  []string
		asked  string // "" where the combination mends it
	}{
		{lost, shards, ""},
		{lost, shards[1:], "the files of shards [1] of 2"},
		{lost, shards[:1], ""},
		{`DELETE FROM intake_series`, shards, ""},
		{`UPDATE intake SET shard = 0 WHERE id = ` + first, shards, ""},
		{`UPDATE intake SET shard = 99 WHERE id = ` + first, shards, ""},
		{`UPDATE intake SET shard = 99 WHERE id = ` + first, shards[1:], "the files of shards [1] of 2"},
		{`UPDATE intake SET shard = 2 WHERE id = ` + first, shards, ""},
		{`UPDATE intake SET shard = 2 WHERE id = ` + first, shards[:1], "the files of shards [2] of 2"},
		{`UPDATE intake SET path = path || 'x' WHERE id = ` + first, shards[1:], "the files of shards [1] of 2"},
	} {
		execute(t, store.Path(), strings.Split(c.damage, "; ")...)
		if v := verify(t, store); !slices.ContainsFunc(v.Faults, func(f db.Fault) bool { return f.Table == "intake" }) {
			t.Errorf("%s: faults %v, want one of intake", c.damage, v.Faults)
		}
		_, err := combineInto(t.Context(), t, store, c.given, opts)
		if c.asked == "" && err != nil || c.asked != "" && (err == nil || !strings.Contains(err.Error(), c.asked)) {
			t.Errorf("%s, combined with %v: %v", c.damage, c.given, err)
		}
		if err != nil {
			if _, err := combineInto(t.Context(), t, store, shards, opts); err != nil {
				t.Fatal(c.damage, err)
			}
		}
		if got := dump(t, store); !slices.Equal(got, want) {
			t.Errorf("%s: another result", c.damage)
		}
		if v := verify(t, store); len(v.Faults) != 0 {
			t.Errorf("%s: faults %v", c.damage, v.Faults)
		}
	}
}

// A shard of which pages were overwritten, or in which rows are lost, is told from the store
// that takes it over: the error names its file, says that it is damaged, and what to do.
func TestDamagedShardIsNamed(t *testing.T) {
	opts := options(recordFiles(t, 6))
	shards := shardsOf(t, 2, opts)
	for _, path := range shards {
		execute(t, path, "PRAGMA wal_checkpoint(TRUNCATE)")
	}
	whole, err := os.ReadFile(shards[1])
	if err != nil {
		t.Fatal(err)
	}
	for _, damage := range []struct {
		name string
		do   func()
	}{
		{"intake", func() { overwriteTable(t, shards[1], "intake") }},
		{"series", func() { overwriteTable(t, shards[1], "series") }},
		{"computation", func() { overwriteTable(t, shards[1], "computation") }},
		{"spectrum", func() { overwriteTable(t, shards[1], "spectrum") }},
		{"measure", func() { overwriteTable(t, shards[1], "measure") }},
		{"samples of a file", func() {
			execute(t, shards[1], "DELETE FROM intake_series WHERE intake_id = (SELECT max(id) FROM intake)")
		}},
		{"all files", func() { execute(t, shards[1], "DELETE FROM intake_series", "DELETE FROM intake") }},
		{"a file", func() {
			execute(t, shards[1], "DELETE FROM intake_series WHERE intake_id = (SELECT max(id) FROM intake)", "DELETE FROM intake WHERE id = (SELECT max(id) FROM intake)")
		}},
		{"a file of another shard", func() { execute(t, shards[1], "UPDATE intake SET shard = 1 WHERE id = (SELECT max(id) FROM intake)") }},
		{"events", func() { execute(t, shards[1], "DELETE FROM intake_events") }},
		{"a file that its index has lost", func() { loseLast(t, shards[1], "sqlite_autoindex_intake_1") }},
		{"a row of samples", func() { execute(t, shards[1], "DELETE FROM series WHERE id = (SELECT max(id) FROM series)") }},
	} {
		if err := os.WriteFile(shards[1], whole, 0o666); err != nil {
			t.Fatal(err)
		}
		damage.do()
		_, err := combineInto(t.Context(), t, newStore(t), shards, opts)
		for _, want := range []string{shards[1] + ": ", "damaged", "swaybook verify", "run shard 2 of 2 again"} {
			if err == nil || !strings.Contains(err.Error(), want) {
				t.Errorf("%s: %v, want %q in it", damage.name, err, want)
			}
		}
	}
}

// A store that is damaged itself is named, too, and not taken for the shard that comes into it.
func TestDamagedStoreIsNoDamagedShard(t *testing.T) {
	opts := options(recordFiles(t, 6))
	shards, store := shardsOf(t, 2, opts), newStore(t)
	if _, err := combineInto(t.Context(), t, store, shards, opts); err != nil {
		t.Fatal(err)
	}
	path := store.Path()
	contentOf(t, store)
	overwriteTable(t, path, "intake")
	store, err := db.Create(t.Context(), path, SolverVersion)
	if err != nil {
		t.Fatal(err)
	}
	defer store.Close()
	_, err = combineInto(t.Context(), t, store, shards, opts)
	if err == nil || !strings.Contains(err.Error(), path+": the file is damaged") {
		t.Errorf("%v, want the store to be named", err)
	}
	if err != nil && strings.Contains(err.Error(), "remove the file") {
		t.Errorf("%v blames the shard", err)
	}
}

// overwriteTable writes over the page of a table by which SQLite comes to its rows.
func overwriteTable(t *testing.T, path, table string) {
	t.Helper()
	changePage(t, path, table, func(page []byte) { copy(page, bytes.Repeat([]byte{0xff}, len(page))) })
}

// loseLast takes the last entry out of an index of one page.
func loseLast(t *testing.T, path, index string) {
	t.Helper()
	const leafOfIndex = 10 // a page's first byte; the number of its cells is in those from 3 on
	changePage(t, path, index, func(page []byte) {
		if page[0] != leafOfIndex || page[4] == 0 {
			t.Fatalf("%s has more pages than one, or no entry", index)
		}
		page[4]--
	})
}

// changePage changes the page by which SQLite comes to a table or an index.
func changePage(t *testing.T, path, name string, change func(page []byte)) {
	t.Helper()
	raw, err := sql.Open("sqlite", "file:"+path+"?mode=ro")
	if err != nil {
		t.Fatal(err)
	}
	defer raw.Close()
	var number, size int64
	if err := raw.QueryRowContext(t.Context(), "SELECT rootpage, page_size FROM sqlite_schema, pragma_page_size WHERE name = ?", name).Scan(&number, &size); err != nil {
		t.Fatal(fmt.Errorf("%s: %w", name, err))
	}
	f, err := os.OpenFile(path, os.O_RDWR, 0)
	if err != nil {
		t.Fatal(err)
	}
	page := make([]byte, size)
	_, err = f.ReadAt(page, (number-1)*size)
	if err == nil {
		change(page)
		_, err = f.WriteAt(page, (number-1)*size)
	}
	if err := errors.Join(err, f.Close()); err != nil {
		t.Fatal(err)
	}
}
