package beside

import (
	"context"
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
	must(t, WriteFolder(t.Context(), folder, nil, fillWith("first")))
	wantFile(t, "new", folder, "first")
	wantTree(t, "new", dir, alone)

	if err := WriteFolder(t.Context(), folder, nil, fillWith("second")); !errors.Is(err, ErrNotEmpty) || !strings.Contains(err.Error(), folder) {
		t.Errorf("error %v, want that it is not empty", err)
	}
	refusal := errors.New("not mine")
	if err := WriteFolder(t.Context(), folder, func(string, fs.DirEntry) error { return refusal }, fillWith("second")); !errors.Is(err, refusal) {
		t.Errorf("error %v, want %v", err, refusal)
	}
	wantFile(t, "refused", folder, "first")
	wantTree(t, "refused", dir, alone)

	must(t, os.Mkdir(filepath.Join(folder, ".part-5"), 0o777), os.WriteFile(filepath.Join(folder, ".part-5", "torn"), nil, 0o666))
	must(t, WriteFolder(t.Context(), folder, func(name string, e fs.DirEntry) error {
		if name != filepath.Join("inner", "file") || e.Name() != "file" {
			t.Errorf("asked whether %s may be replaced", name)
		}
		return nil
	}, fillWith("second")))
	wantFile(t, "replaced", folder, "second")
	wantTree(t, "replaced", dir, alone)
}

// mayReplaceAll is no bar.
func mayReplaceAll(string, fs.DirEntry) error { return nil }

// An empty folder is filled: it stays the one that it is, as a process sees that works in it, and
// needs nothing of the folder around it.
func TestEmptyFoldersAreFilled(t *testing.T) {
	for what, mayReplace := range map[string]func(string, fs.DirEntry) error{"may replace nothing": nil, "may replace all": mayReplaceAll} {
		dir := t.TempDir()
		empty := filepath.Join(dir, "empty")
		must(t, os.Mkdir(empty, 0o777))
		before, err := os.Stat(empty)
		must(t, err)
		t.Chdir(empty)
		must(t, WriteFolder(t.Context(), ".", mayReplace, func(hidden string) error {
			wantTree(t, what+", around it meanwhile", dir, map[string]string{"empty": "a folder"})
			wantTree(t, what+", in it meanwhile", empty, map[string]string{filepath.Base(hidden): "a folder"})
			return errors.Join(fillWith("x")(hidden), os.WriteFile(filepath.Join(hidden, "file"), []byte("y"), 0o666))
		}))
		wantFile(t, what, ".", "x")
		wantTree(t, what, empty, map[string]string{"inner": "a folder", "file": "y"})
		if after, err := os.Stat(empty); err != nil || !os.SameFile(before, after) {
			t.Errorf("%s: it is another folder (%v)", what, err)
		}
	}
}

// What a process left that was killed while it filled a folder is nothing, and anything else
// something.
func TestLeftFoldersCountAsNothing(t *testing.T) {
	for name, isNothing := range map[string]bool{".part-123": true, ".part-": false, ".part-12x": false, "part-1": false, ".git": false} {
		folder := t.TempDir()
		must(t, os.Mkdir(filepath.Join(folder, name), 0o777), os.WriteFile(filepath.Join(folder, name, "torn"), nil, 0o666))
		err := WriteFolder(t.Context(), folder, nil, fillWith("x"))
		if (err == nil) != isNothing || err != nil && !errors.Is(err, ErrNotEmpty) {
			t.Errorf("%s: error %v", name, err)
		}
		if _, err := os.Stat(filepath.Join(folder, name, "torn")); err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
	folder := t.TempDir()
	must(t, os.WriteFile(filepath.Join(folder, ".part-123"), nil, 0o666))
	if err := WriteFolder(t.Context(), folder, nil, fillWith("x")); !errors.Is(err, ErrNotEmpty) {
		t.Errorf("a file: error %v", err)
	}
}

// An empty folder that could not be filled is empty again.
func TestFailuresLeaveEmptyFoldersEmpty(t *testing.T) {
	folder, failure := t.TempDir(), errors.New("disk full")
	if err := WriteFolder(t.Context(), folder, nil, func(hidden string) error { return errors.Join(fillWith("x")(hidden), failure) }); err == nil || err.Error() != failure.Error() {
		t.Errorf("error %v, want %v", err, failure)
	}
	wantTree(t, "failed", folder, nil)

	// Something comes while it is written.
	err := WriteFolder(t.Context(), folder, mayReplaceAll, func(hidden string) error {
		return errors.Join(fillWith("x")(hidden), os.WriteFile(filepath.Join(folder, "theirs"), nil, 0o666))
	})
	if !errors.Is(err, ErrNotEmpty) {
		t.Errorf("error %v, want that it is not empty", err)
	}
	wantTree(t, "came meanwhile", folder, map[string]string{"theirs": ""})

	// Something stands in the way of the last one.
	hidden := filepath.Join(folder, ".part-1")
	must(t, os.Mkdir(hidden, 0o777), fillWith("x")(hidden), os.WriteFile(filepath.Join(hidden, "file"), nil, 0o666), os.Mkdir(filepath.Join(hidden, "theirs"), 0o777))
	if err := moveUp(hidden, folder); err == nil {
		t.Error("a folder took the place of a file")
	}
	wantFile(t, "moved back", hidden, "x")
	wantTree(t, "moved back", hidden, map[string]string{"inner": "a folder", "file": "", "theirs": "a folder"})
	wantTree(t, "moved back", folder, map[string]string{"theirs": "", ".part-1": "a folder"})
}

func TestFailuresLeaveFoldersAsTheyAre(t *testing.T) {
	dir := t.TempDir()
	folder := filepath.Join(dir, "out")
	failure := errors.New("disk full")
	fail := func(s string) func(string) error {
		return func(folder string) error { return errors.Join(fillWith(s)(folder), failure) }
	}
	if err := WriteFolder(t.Context(), folder, nil, fail("x")); !errors.Is(err, failure) || err.Error() != failure.Error() {
		t.Errorf("error %v, want %v", err, failure)
	}
	wantTree(t, "failed", dir, nil)
	must(t, WriteFolder(t.Context(), folder, nil, fillWith("first")))
	if err := WriteFolder(t.Context(), folder, mayReplaceAll, fail("x")); !errors.Is(err, failure) {
		t.Errorf("error %v, want %v", err, failure)
	}
	wantFile(t, "failed", folder, "first")

	// Something comes while it is written.
	other := filepath.Join(dir, "other")
	err := WriteFolder(t.Context(), other, nil, func(part string) error { return errors.Join(fillWith("x")(part), fillFolder(other)) })
	if !errors.Is(err, ErrNotEmpty) {
		t.Errorf("error %v, want that it is not empty", err)
	}
	wantFile(t, "came meanwhile", other, "theirs")

	file := filepath.Join(dir, "file")
	must(t, os.WriteFile(file, []byte("mine"), 0o666))
	if err := WriteFolder(t.Context(), file, mayReplaceAll, fillWith("x")); err == nil {
		t.Error("a file was replaced by a folder")
	}
	if err := WriteFolder(t.Context(), filepath.Join(dir, "none", "out"), nil, fillWith("x")); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("error %v, want that there is no folder around it", err)
	}
	wantTree(t, "all", dir, map[string]string{"out": "a folder", "other": "a folder", "file": "mine"})
}

func fillFolder(path string) error {
	return errors.Join(os.Mkdir(path, 0o777), fillWith("theirs")(path))
}

// The current directory, and what it is in, are not replaced, and nothing is written for it; a
// folder beside it is.
func TestFoldersThatAreWorkedInStay(t *testing.T) {
	dir := t.TempDir()
	folder := filepath.Join(dir, "out")
	must(t, WriteFolder(t.Context(), folder, nil, fillWith("first")))
	before, err := os.Stat(folder)
	must(t, err)
	for _, here := range []string{folder, filepath.Join(folder, "inner")} {
		t.Chdir(here)
		err := WriteFolder(t.Context(), folder, mayReplaceAll, func(string) error {
			t.Errorf("%s: it was written", here)
			return nil
		})
		if err == nil || !strings.Contains(err.Error(), "current directory") {
			t.Errorf("%s: error %v", here, err)
		}
		wantFile(t, here, folder, "first")
		wantTree(t, here, dir, map[string]string{"out": "a folder"})
	}
	if after, err := os.Stat(folder); err != nil || !os.SameFile(before, after) {
		t.Errorf("it is another folder (%v)", err)
	}
	beside := filepath.Join(dir, "outer")
	must(t, os.Mkdir(beside, 0o777))
	t.Chdir(beside)
	must(t, WriteFolder(t.Context(), filepath.Join("..", "out"), mayReplaceAll, fillWith("second")))
	wantFile(t, "from beside", folder, "second")
}

func TestFoldersBehindLinks(t *testing.T) {
	if runtime.GOOS == "windows" {
		t.Skip("links need a right there")
	}
	dir := t.TempDir()
	real, link := filepath.Join(dir, "real"), filepath.Join(dir, "link")
	must(t, os.Mkdir(real, 0o750), os.Symlink("real", link), WriteFolder(t.Context(), link, nil, fillWith("first")))
	wantFile(t, "through a link", real, "first")
	must(t, WriteFolder(t.Context(), link, mayReplaceAll, fillWith("x")))
	wantFile(t, "through a link", real, "x")
	if info, err := os.Stat(real); err != nil || info.Mode().Perm() != 0o750 {
		t.Errorf("the folder has another mode: %v, %v", info.Mode(), err)
	}
	if info, err := os.Lstat(link); err != nil || info.Mode()&fs.ModeSymlink == 0 {
		t.Errorf("the link is gone: %v", err)
	}
}

// Who is stopped while files go to the disk leaves nothing.
func TestFoldersAreStopped(t *testing.T) {
	dir := t.TempDir()
	empty := filepath.Join(dir, "empty")
	must(t, os.Mkdir(empty, 0o777))
	for _, folder := range []string{empty, filepath.Join(dir, "new")} {
		ctx, cancel := context.WithCancel(t.Context())
		err := WriteFolder(ctx, folder, nil, func(folder string) error {
			cancel()
			return fillWith("x")(folder)
		})
		if !errors.Is(err, context.Canceled) {
			t.Errorf("%s: error %v", folder, err)
		}
	}
	wantTree(t, "stopped", dir, map[string]string{"empty": "a folder"})
	wantTree(t, "stopped", empty, nil)
}

// A link to nothing is no place for a folder, and stays.
func TestLinksToNothing(t *testing.T) {
	dir := t.TempDir()
	link := filepath.Join(dir, "link")
	if err := os.Symlink(filepath.Join("none", "out"), link); err != nil {
		t.Skip(err)
	}
	for _, path := range []string{link, link + string(filepath.Separator)} {
		err := WriteFolder(t.Context(), path, mayReplaceAll, func(string) error {
			t.Errorf("%s: it was written", path)
			return nil
		})
		if err == nil || !strings.Contains(err.Error(), "it is a link to "+filepath.Join("none", "out")) {
			t.Errorf("%s: error %v", path, err)
		}
		if to, err := os.Readlink(link); err != nil || to != filepath.Join("none", "out") {
			t.Errorf("%s: the link leads to %q, %v", path, to, err)
		}
	}
}
