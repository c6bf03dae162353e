package ingest

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
)

// tree makes files below a new folder and makes it the working directory.
func tree(t *testing.T, files ...string) {
	t.Helper()
	t.Chdir(t.TempDir())
	for _, f := range files {
		if err := os.MkdirAll(filepath.Dir(filepath.FromSlash(f)), 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(filepath.FromSlash(f), []byte(f), 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

// listing writes what was found as "path=rel" with slashes.
func listing(found []Found) string {
	var out []string
	for _, f := range found {
		s := filepath.ToSlash(f.Path) + "=" + f.Rel
		if f.Err != nil {
			s += "!"
		}
		out = append(out, s)
	}
	return strings.Join(out, " ")
}

func TestDiscover(t *testing.T) {
	tree(t, "b/2.v2", "b/1.v2", "b/sub/3.v2", "a.v2", "b/.hidden/4.v2", "b/.5.v2", "c/6.v2")
	const all = "a.v2=a.v2 b/.5.v2=.5.v2 b/1.v2=1.v2 b/2.v2=2.v2 b/sub/3.v2=sub/3.v2"
	for _, paths := range [][]string{
		{"a.v2", "b"}, {"b", "a.v2"}, {"b/sub", "b/1.v2", "./b/", "a.v2", "a.v2", "b/../b"},
	} {
		found, err := Discover(paths)
		if got := listing(found); got != all || err != nil {
			t.Errorf("Discover(%q) = %s, %v, want %s", paths, got, err, all)
		}
	}
	found, err := Discover([]string{"b/sub/3.v2", "b/.hidden"})
	if got, want := listing(found), "b/.hidden/4.v2=4.v2 b/sub/3.v2=3.v2"; got != want || err != nil {
		t.Errorf("Discover of a file and a hidden folder = %s, %v, want %s", got, err, want)
	}
	if found, err := Discover([]string{"."}); len(found) != 6 || err != nil || found[0].Rel != "a.v2" || found[5].Rel != "c/6.v2" {
		t.Errorf("Discover(.) = %s, %v", listing(found), err)
	}
}

func TestDiscoverRefuses(t *testing.T) {
	tree(t, "a.v2")
	for _, paths := range [][]string{{"a.v2", "missing"}, {""}} {
		found, err := Discover(paths)
		if err == nil || found != nil || !strings.HasPrefix(err.Error(), "find records: ") {
			t.Errorf("Discover(%q) = %v, %v, want an error", paths, found, err)
		}
	}
	if _, err := Discover([]string{"missing"}); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("error %v is not that of a missing file", err)
	}
	if found, err := Discover(nil); len(found) != 0 || err != nil {
		t.Errorf("Discover of nothing = %v, %v", found, err)
	}
}

// TestDiscoverLinks has links to a file, to a folder, to nothing, and two that
// lead back up.
func TestDiscoverLinks(t *testing.T) {
	tree(t, "data/1.v2", "data/sub/2.v2", "other/3.v2")
	for link, target := range map[string]string{
		"data/file": filepath.Join("..", "other", "3.v2"), "data/folder": filepath.Join("..", "other"), "data/gone": "nowhere",
		"data/sub/up": "..", "other/round": filepath.Join("..", "data"),
	} {
		if err := os.Symlink(target, filepath.FromSlash(link)); err != nil {
			t.Skipf("no symbolic links here: %v", err)
		}
	}
	found, err := Discover([]string{"data"})
	if got, want := listing(found), "data/1.v2=1.v2 data/file=file data/folder/3.v2=folder/3.v2 data/gone=gone! data/sub/2.v2=sub/2.v2"; got != want || err != nil {
		t.Errorf("Discover(data) = %s, %v, want %s", got, err, want)
	}
	// With both folders given, neither is listed through a link.
	for _, paths := range [][]string{{"data", "other"}, {"other", "data"}} {
		found, err = Discover(paths)
		if got, want := listing(found), "data/1.v2=1.v2 data/file=file data/gone=gone! data/sub/2.v2=sub/2.v2 other/3.v2=3.v2"; got != want || err != nil {
			t.Errorf("Discover(%q) = %s, %v, want %s", paths, got, err, want)
		}
	}
}

func TestDiscoverUnreadableFolder(t *testing.T) {
	if runtime.GOOS == "windows" || os.Getuid() == 0 {
		t.Skip("permissions do not keep this user out of a folder")
	}
	tree(t, "data/1.v2", "data/shut/2.v2")
	if err := os.Chmod("data/shut", 0); err != nil {
		t.Fatal(err)
	}
	defer os.Chmod("data/shut", 0o755)
	found, err := Discover([]string{"data"})
	if got, want := listing(found), "data/1.v2=1.v2 data/shut=shut!"; got != want || err != nil {
		t.Errorf("Discover = %s, %v, want %s", got, err, want)
	}
}

func TestRead(t *testing.T) {
	tree(t, "a.v2")
	data, info, err := Read("a.v2")
	if string(data) != "a.v2" || err != nil || info.Size() != 4 || info.ModTime().IsZero() {
		t.Errorf("Read = %q, %v, %v", data, info, err)
	}
	if data, _, err := readLimited("a.v2", 4); string(data) != "a.v2" || err != nil {
		t.Errorf("a file of the limit's size: %q, %v", data, err)
	}
	for path, want := range map[string]string{
		"a.v2": "a.v2: file of 4 bytes is larger than the limit of 3", ".": ".: not a regular file",
	} {
		_, _, err := readLimited(path, 3)
		if err == nil || err.Error() != want {
			t.Errorf("Read(%s): error %v, want %q", path, err, want)
		}
	}
	_, _, err = Read("missing")
	if pe, ok := errors.AsType[*ParseError](err); !ok || pe.Path != "missing" || !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("Read(missing): %v", err)
	}
}

func BenchmarkDiscover(b *testing.B) {
	root := b.TempDir()
	for i := range 10000 {
		dir := filepath.Join(root, fmt.Sprint(i/500))
		if i%500 == 0 {
			if err := os.Mkdir(dir, 0o755); err != nil {
				b.Fatal(err)
			}
		}
		if err := os.WriteFile(filepath.Join(dir, fmt.Sprint(i)), nil, 0o644); err != nil {
			b.Fatal(err)
		}
	}
	for b.Loop() {
		found, err := Discover([]string{root})
		if err != nil || len(found) != 10000 {
			b.Fatal(len(found), err)
		}
	}
	b.ReportMetric(float64(b.N)*10000/b.Elapsed().Seconds(), "files/s")
}
