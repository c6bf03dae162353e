package beside

import (
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
)

// fillWith writes a file in a folder of the folder.
func fillWith(s string) func(string) error {
	return func(folder string) error {
		inner := filepath.Join(folder, "inner")
		return errors.Join(os.Mkdir(inner, 0o777), os.WriteFile(filepath.Join(inner, "file"), []byte(s), 0o666))
	}
}

func wantFile(t *testing.T, when, folder, want string) {
	t.Helper()
	got, err := os.ReadFile(filepath.Join(folder, "inner", "file"))
	if err != nil || string(got) != want {
		t.Errorf("%s: %q, %v, want %q", when, got, err, want)
	}
}

func TestFoldersAppearWhole(t *testing.T) {
	dir := t.TempDir()
	folder := filepath.Join(dir, "out")
	alone := map[string]string{"out": "a folder"}
	must(t, WriteFolder(folder, nil, fillWith("first")))
	wantFile(t, "new", folder, "first")
	wantTree(t, "new", dir, alone)

	if err := WriteFolder(folder, nil, fillWith("second")); !errors.Is(err, fs.ErrExist) || !strings.Contains(err.Error(), folder) {
		t.Errorf("error %v, want that it is there", err)
	}
	refusal := errors.New("not mine")
	if err := WriteFolder(folder, func(string) error { return refusal }, fillWith("second")); !errors.Is(err, refusal) {
		t.Errorf("error %v, want %v", err, refusal)
	}
	wantFile(t, "refused", folder, "first")
	wantTree(t, "refused", dir, alone)

	must(t, WriteFolder(folder, func(name string) error {
		if filepath.Base(name) != "out" {
			t.Errorf("asked whether %s may be replaced", name)
		}
		return nil
	}, fillWith("second")))
	wantFile(t, "replaced", folder, "second")
	wantTree(t, "replaced", dir, alone)

	empty := filepath.Join(dir, "empty")
	must(t, os.Mkdir(empty, 0o777), WriteFolder(empty, nil, fillWith("third")))
	wantFile(t, "of an empty one", empty, "third")
}

func TestFailuresLeaveFoldersAsTheyAre(t *testing.T) {
	dir := t.TempDir()
	folder := filepath.Join(dir, "out")
	failure := errors.New("disk full")
	fail := func(s string) func(string) error {
		return func(folder string) error { return errors.Join(fillWith(s)(folder), failure) }
	}
	if err := WriteFolder(folder, nil, fail("x")); !errors.Is(err, failure) || err.Error() != failure.Error() {
		t.Errorf("error %v, want %v", err, failure)
	}
	wantTree(t, "failed", dir, nil)
	must(t, WriteFolder(folder, nil, fillWith("first")))
	if err := WriteFolder(folder, func(string) error { return nil }, fail("x")); !errors.Is(err, failure) {
		t.Errorf("error %v, want %v", err, failure)
	}
	wantFile(t, "failed", folder, "first")

	// Something comes while it is written.
	other := filepath.Join(dir, "other")
	err := WriteFolder(other, nil, func(part string) error { return errors.Join(fillWith("x")(part), fillFolder(other)) })
	if !errors.Is(err, fs.ErrExist) {
		t.Errorf("error %v, want that it is there", err)
	}
	wantFile(t, "came meanwhile", other, "theirs")

	file := filepath.Join(dir, "file")
	must(t, os.WriteFile(file, []byte("mine"), 0o666))
	if err := WriteFolder(file, func(string) error { return nil }, fillWith("x")); err == nil {
		t.Error("a file was replaced by a folder")
	}
	if err := WriteFolder(filepath.Join(dir, "none", "out"), nil, fillWith("x")); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("error %v, want that there is no folder around it", err)
	}
	wantTree(t, "all", dir, map[string]string{"out": "a folder", "other": "a folder", "file": "mine"})
}

func fillFolder(path string) error {
	return errors.Join(os.Mkdir(path, 0o777), fillWith("theirs")(path))
}

func TestFoldersBehindLinks(t *testing.T) {
	if runtime.GOOS == "windows" {
		t.Skip("links need a right there")
	}
	dir := t.TempDir()
	real, link := filepath.Join(dir, "real"), filepath.Join(dir, "link")
	must(t, os.Mkdir(real, 0o750), os.Symlink("real", link), WriteFolder(link, nil, fillWith("x")))
	wantFile(t, "through a link", real, "x")
	if info, err := os.Stat(real); err != nil || info.Mode().Perm() != 0o750 {
		t.Errorf("the folder has another mode: %v, %v", info.Mode(), err)
	}
	if info, err := os.Lstat(link); err != nil || info.Mode()&fs.ModeSymlink == 0 {
		t.Errorf("the link is gone: %v", err)
	}
}
