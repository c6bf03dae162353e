package pipeline

import (
	"bytes"
	"database/sql"
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
	execute(t, store.Path(), `UPDATE intake SET said = CAST(said || x'00' AS BLOB) WHERE id = (SELECT max(id) FROM intake WHERE shard = 2)`)
	if v := verify(t, store); len(v.Faults) != 1 || v.Faults[0].Table != "intake" {
		t.Errorf("faults %v, want one of intake", v.Faults)
	}
	execute(t, store.Path(), `UPDATE shard SET state = 'changed'`)
	if err := combined(shards...); err == nil || !strings.Contains(err.Error(), "it is forgotten: combine shard 2 of 2 again") {
		t.Errorf("damaged: %v", err)
	}
	if shown, err := db.Digest(t.Context(), store.Path()); err != nil || shown != published {
		t.Errorf("something else is shown: %v", err)
	}
	if err := combined(shards[0]); err == nil || !strings.Contains(err.Error(), "shard 2 of 2 was being taken over") {
		t.Errorf("without the shard: %v", err)
	}
	if err := combined(shards...); err != nil {
		t.Fatal(err)
	}
	if got := dump(t, store); !slices.Equal(got, want) {
		t.Error("another result")
	}
	if v := verify(t, store); len(v.Faults) != 0 {
		t.Errorf("faults %v", v.Faults)
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
		{"a row of samples", func() { execute(t, shards[1], "DELETE FROM series WHERE id = (SELECT max(id) FROM series)") }},
	} {
		if err := os.WriteFile(shards[1], whole, 0o666); err != nil {
			t.Fatal(err)
		}
		damage.do()
		_, err := combineInto(t.Context(), t, newStore(t), shards, opts)
		for _, want := range []string{shards[1] + ": the file is damaged", "swaybook verify", "run shard 2 of 2 again"} {
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
	raw, err := sql.Open("sqlite", "file:"+path+"?mode=ro")
	if err != nil {
		t.Fatal(err)
	}
	defer raw.Close()
	var page, size int64
	if err := raw.QueryRowContext(t.Context(), "SELECT rootpage, page_size FROM sqlite_schema, pragma_page_size WHERE name = ?", table).Scan(&page, &size); err != nil {
		t.Fatal(fmt.Errorf("table %s: %w", table, err))
	}
	f, err := os.OpenFile(path, os.O_WRONLY, 0)
	if err == nil {
		_, err = f.WriteAt(bytes.Repeat([]byte{0xff}, int(size)), (page-1)*size)
	}
	if err == nil {
		err = f.Close()
	}
	if err != nil {
		t.Fatal(err)
	}
}
