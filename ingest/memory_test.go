package ingest

import (
	"bytes"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
)

// TestMemoryOfReaders fills files with what costs most for a byte: lines, values and
// keys as short as they can be, at the end and behind the first line. It grants no
// mebibyte beside the 64 bytes for one.
func TestMemoryOfReaders(t *testing.T) {
	readers := append(append([]Format{}, formats...), plain{})
	for _, path := range goodFixtures(t) {
		data := readFile(t, path)
		first := bytes.IndexByte(data, '\n') + 1
		for _, filler := range []string{"\n", "1\n", "1 ", "1,", "a: 1\n", "# a=1\n"} {
			fill := []byte(strings.Repeat(filler, (1<<16)/len(filler)))
			for where, at := range map[string]int{"end": len(data), "second line": first} {
				filled := bytes.Join([][]byte{data[:at], fill, data[at:]}, nil)
				for _, reader := range readers {
					used := allocated(func() {
						if content, _ := newContent(t.Context(), filled); reader.Sniff(content) != "" {
							reader.Parse(content, Hints{Unit: "g", UnitForAll: true, StepS: 0.01, StepForAll: true})
						}
					})
					if !raceDetector && used > maxAllocated*uint64(len(filled)) {
						t.Errorf("%s by %s, %q at the %s: %d bytes allocated for %d", filepath.Base(path), reader.Info().Name, filler, where, used, len(filled))
					}
				}
			}
		}
	}
}

// allocated is how many bytes f allocates.
func allocated(f func()) uint64 {
	var start, end runtime.MemStats
	runtime.ReadMemStats(&start)
	f()
	runtime.ReadMemStats(&end)
	return end.TotalAlloc - start.TotalAlloc
}

// goodFixtures names one file of every format.
func goodFixtures(t *testing.T) []string {
	t.Helper()
	folders, err := os.ReadDir(recordsDir(""))
	if err != nil {
		t.Fatal(err)
	}
	var paths []string
	for _, f := range folders {
		files, _ := filepath.Glob(filepath.Join(recordsDir(f.Name()), "*"))
		for _, p := range files {
			base := filepath.Base(p)
			if !strings.HasPrefix(base, "damaged") && base != "README.md" && filepath.Ext(base) != ".xml" {
				paths = append(paths, p)
				break
			}
		}
	}
	return paths
}
