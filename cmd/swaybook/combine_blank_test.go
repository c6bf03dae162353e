package main

import (
	"bytes"
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// overwriteTable writes over the page of a table by which SQLite comes to its rows.
func overwriteTable(t *testing.T, path, table string) {
	t.Helper()
	raw := openRaw(t, path)
	var page, size int64
	err := raw.QueryRowContext(t.Context(), "SELECT rootpage, page_size FROM sqlite_schema, pragma_page_size WHERE name = ?", table).Scan(&page, &size)
	if err != nil {
		t.Fatal(err)
	}
	if err := raw.Close(); err != nil {
		t.Fatal(err)
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

// leaves fails the test unless these files, and no others, are left of a store.
func leaves(t *testing.T, store string, want ...string) {
	t.Helper()
	left, err := filepath.Glob(store + "*")
	if err != nil {
		t.Fatal(err)
	}
	if strings.Join(left, " ") != strings.Join(want, " ") {
		t.Errorf("left of %s: %v, want %v", store, left, want)
	}
}

// A combination that fails before anything has come out of a shard leaves no store where none
// was; one that fails later leaves what the next one goes on with.
func TestFailedCombinationLeavesNoEmptyStore(t *testing.T) {
	a := newSeenArchive(t)
	none := filepath.Join(a.dir, "none.db")
	overwriteTable(t, a.shards[0], "intake")
	combines(t, exitFailed, none, a.shards...)
	leaves(t, none)
	link := filepath.Join(a.dir, "link.db")
	if err := os.Symlink(none, link); err != nil {
		t.Log(err)
	} else {
		combines(t, exitFailed, link, a.shards...)
		leaves(t, none)
		leaves(t, link, link)
	}
	a.anew(1)
	overwriteTable(t, a.shards[1], "intake")
	combines(t, exitFailed, none, a.shards...)
	leaves(t, none, none)
	a.anew(2)
	combines(t, exitDone, none, a.shards...)
	if got := digestOfStore(t, none); got != a.before {
		t.Errorf("digest %s, want %s", got, a.before)
	}
	overwriteTable(t, a.shards[0], "intake")
	combines(t, exitFailed, none, a.shards...)
	if got := digestOfStore(t, none); got != a.before {
		t.Error("what was combined before has changed")
	}
}

// Shards that do not fit are refused before there is a store, also where only comparing what
// they saw tells.
func TestRefusedSightingsLeaveNoStore(t *testing.T) {
	a := newSeenArchive(t)
	a.catalogue("a.csv", "B")
	a.again(1)
	none := filepath.Join(a.dir, "none.db")
	if text := combines(t, exitFailed, none, a.shards...); !strings.Contains(text, "with another catalogue") {
		t.Errorf("%q", text)
	}
	leaves(t, none)
}

// A study's combination leaves no store either, and its state tells of no run that nobody can
// ask for.
func TestFailedCombinationOfAStudyLeavesNoStore(t *testing.T) {
	a := newSeenArchive(t)
	file, store := filepath.Join(a.dir, "study.toml"), filepath.Join(a.dir, "study.db")
	study := func(recipe string) {
		t.Helper()
		text := fmt.Sprintf("name = \"A study\"\nstore = \"study.db\"\nsources = [\"archive\"]\nperiods = [0.1]\ndampings = [\"5%%\"]\nstate = \"state.json\"\nrecipe = %q\n", recipe)
		if err := os.WriteFile(file, []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	reprocesses := func(code int, args ...string) string {
		t.Helper()
		var stdout, stderr bytes.Buffer
		if got := run(t.Context(), append([]string{"swaybook", "--quiet", "reprocess", file}, args...), &stdout, &stderr); got != code {
			t.Fatalf("%v: exit code %d, want %d: %s", args, got, code, &stderr)
		}
		return stderr.String()
	}
	first, second := filepath.Join(a.dir, "study.shard-1-of-2.db"), filepath.Join(a.dir, "study.shard-2-of-2.db")
	study("standard")
	reprocesses(exitDone, "--shard", "1/2")
	reprocesses(exitDone, "--shard", "2/2")
	study("as-delivered")
	for _, c := range []struct {
		want string
		do   func()
	}{
		{"say otherwise how to compute", func() {}},
		{"shard-1-of-2.db: the file is damaged", func() { study("standard"); overwriteTable(t, first, "intake") }},
		{"shard-2-of-2.db: the file is not a swaybook store", func() {
			if err := os.WriteFile(second, []byte("something else"), 0o666); err != nil {
				t.Fatal(err)
			}
		}},
	} {
		c.do()
		if text := reprocesses(exitFailed, "--combine", "2"); !strings.Contains(text, c.want) {
			t.Errorf("%q does not say %q", text, c.want)
		}
		leaves(t, store)
		text, err := os.ReadFile(filepath.Join(a.dir, "state.json"))
		if err != nil {
			t.Fatal(err)
		}
		var got studyState
		if err := json.Unmarshal(text, &got); err != nil || got.Outcome != outcomeFailed || got.Run != nil {
			t.Errorf("%s: state has outcome %s and run %v, want failed and none (%v)", c.want, got.Outcome, got.Run, err)
		}
	}
}
