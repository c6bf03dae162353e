package beside

import (
	"errors"
	"io"
	"os"
	"path/filepath"
	"runtime"
	"slices"
	"testing"
	"time"
)

func text(s string) func(io.Writer) error {
	return func(w io.Writer) error {
		_, err := io.WriteString(w, s)
		return err
	}
}

// tree is what lies in a folder, by name.
func tree(t *testing.T, dir string) map[string]string {
	t.Helper()
	out := map[string]string{}
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		name := filepath.Join(dir, e.Name())
		if content, err := os.ReadFile(name); err == nil {
			out[e.Name()] = string(content)
		} else {
			out[e.Name()] = "a folder"
		}
	}
	return out
}

func wantTree(t *testing.T, when, dir string, want map[string]string) {
	t.Helper()
	got := tree(t, dir)
	if len(got) != len(want) {
		t.Errorf("%s: %v, want %v", when, got, want)
		return
	}
	for name, content := range want {
		if got[name] != content {
			t.Errorf("%s: %v, want %v", when, got, want)
			return
		}
	}
}

func must(t *testing.T, errs ...error) {
	t.Helper()
	if err := errors.Join(errs...); err != nil {
		t.Fatal(err)
	}
}

// Files take their names together, keep their modes, and what stood beside them from a
// process that was killed goes.
func TestSwap(t *testing.T) {
	dir := t.TempDir()
	old, gone := filepath.Join(dir, "old.csv"), filepath.Join(dir, "gone.csv")
	must(t, os.WriteFile(old, []byte("1"), 0o640), os.WriteFile(gone, []byte("2"), 0o666),
		os.WriteFile(filepath.Join(dir, ".old.csv.part"), []byte("torn"), 0o666), os.WriteFile(filepath.Join(dir, ".gone.csv.before"), []byte("older"), 0o666))
	var s Set
	must(t, s.Write(old, text("3")), s.Write(filepath.Join(dir, "new.csv"), text("4")), s.Remove(gone), s.Remove(filepath.Join(dir, "never.csv")))
	if got := tree(t, dir); got["old.csv"] != "1" || got["gone.csv"] != "2" || got["new.csv"] != "" {
		t.Errorf("before the swap: %v", got)
	}
	must(t, s.Swap(), s.Close())
	wantTree(t, "after the swap", dir, map[string]string{"old.csv": "3", "new.csv": "4"})
	if info, err := os.Stat(old); err != nil || runtime.GOOS != "windows" && info.Mode().Perm() != 0o640 {
		t.Errorf("its mode is %v, %v", info.Mode(), err)
	}
	var below Set
	deep := filepath.Join(dir, "a", "b", "c.csv")
	must(t, below.Write(deep, text("5")), below.Swap(), below.Close())
	if got, err := os.ReadFile(deep); err != nil || string(got) != "5" {
		t.Errorf("in new folders: %q, %v", got, err)
	}
}

// What was swapped can be had back.
func TestUndo(t *testing.T) {
	dir := t.TempDir()
	before := map[string]string{"old.csv": "1", "gone.csv": "2"}
	for name, content := range before {
		must(t, os.WriteFile(filepath.Join(dir, name), []byte(content), 0o666))
	}
	var s Set
	must(t, s.Write(filepath.Join(dir, "old.csv"), text("3")), s.Write(filepath.Join(dir, "new.csv"), text("4")), s.Remove(filepath.Join(dir, "gone.csv")))
	must(t, s.Swap(), s.Undo(), s.Close())
	wantTree(t, "undone", dir, before)
}

// A file that cannot take its name leaves all as they were, and so does one that cannot be
// written whole.
func TestFailuresLeaveAll(t *testing.T) {
	dir := t.TempDir()
	first, second := filepath.Join(dir, "first.csv"), filepath.Join(dir, "second.csv")
	must(t, os.WriteFile(first, []byte("1"), 0o666))
	var s Set
	must(t, s.Write(first, text("2")), s.Write(second, text("3")), os.Mkdir(second, 0o777))
	if err := s.Swap(); err == nil {
		t.Error("a file took the place of a folder")
	}
	must(t, s.Close())
	wantTree(t, "a folder in the way", dir, map[string]string{"first.csv": "1", "second.csv": "a folder"})

	var torn Set
	broken := errors.New("broken")
	err := torn.Write(first, func(w io.Writer) error { return errors.Join(text("half")(w), broken) })
	if !errors.Is(err, broken) {
		t.Errorf("the error is %v", err)
	}
	must(t, torn.Close())
	wantTree(t, "torn", dir, map[string]string{"first.csv": "1", "second.csv": "a folder"})
	if err := new(Set).Write(filepath.Join(first, "below.csv"), text("4")); err == nil {
		t.Error("a file was written below a file")
	}
}

// A file that holds what it shall hold already keeps its time.
func TestEqualFilesStay(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "a.csv")
	old := time.Now().Add(-time.Hour).Truncate(time.Second)
	must(t, os.WriteFile(path, []byte("1\n2\n"), 0o666), os.Chtimes(path, old, old))
	must(t, WriteFile(path, text("1\n2\n")))
	if info, err := os.Stat(path); err != nil || !info.ModTime().Equal(old) {
		t.Errorf("equal content gave it the time %v, %v", info.ModTime(), err)
	}
	must(t, WriteFile(path, text("1\n3\n")))
	if info, err := os.Stat(path); err != nil || info.ModTime().Equal(old) {
		t.Errorf("other content left it at %v, %v", info.ModTime(), err)
	}
	wantTree(t, "written twice", dir, map[string]string{"a.csv": "1\n3\n"})
}

// A link stays one: what it leads to is replaced.
func TestLinksStay(t *testing.T) {
	dir := t.TempDir()
	target, link := filepath.Join(dir, "target.csv"), filepath.Join(dir, "link.csv")
	must(t, os.WriteFile(target, []byte("1"), 0o666))
	if err := os.Symlink("target.csv", link); err != nil {
		t.Skip(err)
	}
	var s Set
	must(t, s.Write(link, text("2")), s.Swap(), s.Close())
	if to, err := os.Readlink(link); err != nil || to != "target.csv" {
		t.Errorf("the link leads to %q, %v", to, err)
	}
	wantTree(t, "by a link", dir, map[string]string{"target.csv": "2", "link.csv": "2"})
}

// Where there are no hard links, what is there is copied.
func TestCopyFile(t *testing.T) {
	dir := t.TempDir()
	from, to := filepath.Join(dir, "from"), filepath.Join(dir, "to")
	must(t, os.WriteFile(from, []byte("1"), 0o600), copyFile(from, to, 0o600))
	if got := tree(t, dir); !slices.Equal([]string{got["from"], got["to"]}, []string{"1", "1"}) {
		t.Errorf("%v", got)
	}
	if err := copyFile(from, to, 0o600); err == nil {
		t.Error("what was there was written over")
	}
}
