package demo

import (
	"crypto/sha256"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"testing"
)

// tree returns a digest of the names and contents of all files under dir, in
// order, and their number and size.
func tree(t *testing.T, dir string) (digest string, files int, size int64) {
	t.Helper()
	h := sha256.New()
	err := filepath.WalkDir(dir, func(path string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() {
			return err
		}
		data, err := os.ReadFile(path)
		rel, _ := filepath.Rel(dir, path)
		fmt.Fprintf(h, "%s %d\n", filepath.ToSlash(rel), len(data))
		h.Write(data)
		files++
		size += int64(len(data))
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return fmt.Sprintf("%x", h.Sum(nil)[:8]), files, size
}

func write(t *testing.T, opts Options) (string, Summary) {
	t.Helper()
	dir := t.TempDir()
	sum, err := Write(dir, opts)
	if err != nil {
		t.Fatal(err)
	}
	return dir, sum
}

// small is a region that shows all there is: every format, the roof, the
// borehole, the damaged files.
var small = Options{Events: 1, Stations: 10, Seed: 4, Damaged: true}

// The bytes depend on the options alone: not on the run, nor on the number of
// processors, nor on the machine. The digest was made by this test on amd64; it
// came out the same with GOAMD64=v3, which fuses multiply-add, and on arm64 (in
// emulation). It guards against unnoticed change, not against a wrong motion.
func TestWriteIsDeterministic(t *testing.T) {
	const want = "1b17a00d4099bc9c"
	for _, processors := range []int{1, 4} {
		before := runtime.GOMAXPROCS(processors)
		dir, _ := write(t, small)
		runtime.GOMAXPROCS(before)
		if got, _, _ := tree(t, dir); got != want {
			t.Errorf("digest with %d processors is %s, want %s", processors, got, want)
		}
	}
	other := small
	other.Seed++
	dir, _ := write(t, other)
	if got, _, _ := tree(t, dir); got == want {
		t.Error("another seed writes the same files")
	}
}

func TestWriteSummary(t *testing.T) {
	dir, sum := write(t, small)
	// Ten stations, a roof and a borehole; V2 and COSMOS put three channels into
	// one file.
	want := Summary{
		Events: 1, Stations: 10, Records: 12, Channels: 36, Files: 2 + 1 + 2 + 3*(2+1) + 3*2 + 3*2, Damaged: 2,
		Bytes: sum.Bytes, Catalogue: filepath.Join(dir, "catalogue.csv"),
	}
	if sum != want {
		t.Errorf("summary is %+v, want %+v", sum, want)
	}
	if _, files, size := tree(t, dir); files != sum.Files+sum.Damaged+2 || size != sum.Bytes {
		t.Errorf("%d files of %d bytes, the summary says %d and %d", files, size, sum.Files+sum.Damaged+2, sum.Bytes)
	}
}

// The default region: 240 records of the ground and 24 of roof and borehole, in
// less than 60 MB.
func TestWriteDefaultSize(t *testing.T) {
	if testing.Short() {
		t.Skip("writes 55 MB")
	}
	_, sum := write(t, Options{})
	if sum.Records != 264 || sum.Channels != 792 || sum.Damaged != 0 {
		t.Errorf("summary is %+v, want 264 records, 792 channels, no damaged files", sum)
	}
	if sum.Bytes < 20e6 || sum.Bytes > 60e6 {
		t.Errorf("%d bytes, want 20 to 60 MB", sum.Bytes)
	}
}

// More stations and events than have names of their own.
func TestWriteGenerated(t *testing.T) {
	dir, sum := write(t, Options{Events: 1, Stations: 26, Damaged: true})
	if sum.Stations != 26 || sum.Records != 28 {
		t.Errorf("summary is %+v, want 26 stations and 28 records", sum)
	}
	names, err := filepath.Glob(filepath.Join(dir, "q1-california-v2", "*_72025.V2"))
	if err != nil || len(names) != 1 {
		t.Errorf("generated station 72025 has files %v, want one", names)
	}
}

func TestWriteErrors(t *testing.T) {
	for _, c := range []struct {
		opts Options
		want string
	}{
		{Options{Events: -1}, "events: -1 earthquakes; 1 to 999 can be made"},
		{Options{Stations: 1000}, "stations: 1000 stations; 1 to 999 can be made"},
	} {
		if _, err := Write(t.TempDir(), c.opts); err == nil || err.Error() != c.want {
			t.Errorf("Write(%+v) = %v, want %q", c.opts, err, c.want)
		}
	}
	dir := t.TempDir()
	if err := os.WriteFile(filepath.Join(dir, "mine.txt"), []byte("mine"), 0o666); err != nil {
		t.Fatal(err)
	}
	if _, err := Write(dir, small); !errors.Is(err, ErrNotEmpty) {
		t.Errorf("Write into a folder with files = %v, want ErrNotEmpty", err)
	}
	if _, files, _ := tree(t, dir); files != 1 {
		t.Errorf("%d files after the refusal, want the one that was there", files)
	}
	if _, err := Write(filepath.Join(dir, "mine.txt", "below"), small); err == nil || errors.Is(err, ErrNotEmpty) {
		t.Errorf("Write below a file = %v, want an error of the file system", err)
	}
}

func BenchmarkWrite(b *testing.B) {
	var size int64
	for b.Loop() {
		sum, err := Write(b.TempDir(), Options{})
		if err != nil {
			b.Fatal(err)
		}
		size = sum.Bytes
	}
	b.SetBytes(size)
}

func readFile(t *testing.T, parts ...string) []byte {
	t.Helper()
	data, err := os.ReadFile(filepath.Join(parts...))
	if err != nil {
		t.Fatal(err)
	}
	return data
}
