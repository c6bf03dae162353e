package ingest

import (
	"context"
	"flag"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

var updateRing = flag.Bool("update-ring", false, "rewrite the fixtures made of ringing series")

// recordsDir returns the folder of the fixtures of one format.
func recordsDir(format string) string { return filepath.Join("..", "testdata", "records", format) }

// ring returns n samples of two damped oscillations that start together, each
// by the recurrence
//
//	x[i] = a·x[i-1] - b·x[i-2],
//
// scaled so that the largest sample is peak, in the unit of the fixture. All
// products are rounded one by one, so that every machine makes the same series.
func ring(n int, peak, a, b float64) []float64 {
	x := make([]float64, n)
	u0, u1 := 0.0, 1.0
	v0, v1 := 0.0, -0.35
	for i := range x {
		x[i] = u0 + v0
		u0, u1 = u1, float64(a*u1)-float64(b*u0)
		v0, v1 = v1, float64(0.6*a*v1)-float64(b*v0)
	}
	top, _ := peakOf(x)
	for i := range x {
		x[i] = x[i] / top * peak
	}
	return x
}

// asPrinted returns x rounded to what the format prints, which is what a reader
// must find.
func asPrinted(t testing.TB, x []float64, format string) []float64 {
	t.Helper()
	out := make([]float64, len(x))
	for i, v := range x {
		var ok bool
		if out[i], ok = parseNumber([]byte(strings.TrimSpace(fmt.Sprintf(format, v)))); !ok {
			t.Fatalf("%s of %g is no number", format, v)
		}
	}
	return out
}

func peakOf(x []float64) (peak float64, at int) {
	for i, v := range x {
		if math.Abs(v) > math.Abs(peak) {
			peak, at = v, i
		}
	}
	return peak, at
}

// fixed prints x in lines of perLine fields; a leading zero before the point is
// dropped as Fortran programs of the time did, where short is set.
func fixed(x []float64, format string, perLine int, short bool) []string {
	var lines []string
	for i := 0; i < len(x); i += perLine {
		line := ""
		for _, v := range x[i:min(i+perLine, len(x))] {
			s := fmt.Sprintf(format, v)
			if short {
				s = dropZero(s)
			}
			line += s
		}
		lines = append(lines, line)
	}
	return lines
}

func dropZero(s string) string {
	width := len(s)
	trimmed := strings.TrimSpace(s)
	if rest, ok := strings.CutPrefix(trimmed, "0."); ok {
		trimmed = "." + rest
	} else if rest, ok := strings.CutPrefix(trimmed, "-0."); ok {
		trimmed = "-." + rest
	}
	return fmt.Sprintf("%*s", width, trimmed)
}

// integers prints values in lines of perLine fields of the given width.
func integers(x []int, width, perLine int) []string {
	var lines []string
	for i := 0; i < len(x); i += perLine {
		line := ""
		for _, v := range x[i:min(i+perLine, len(x))] {
			line += fmt.Sprintf("%*d", width, v)
		}
		lines = append(lines, line)
	}
	return lines
}

// ringFixture is a committed file and the lines that make it.
type ringFixture struct {
	format, name string
	lines        []string
	ending       string
}

// TestRingFixtures compares the committed files with what their generator
// makes; with -update-ring it rewrites them.
func TestRingFixtures(t *testing.T) {
	for _, f := range slices.Concat(v2Fixtures(t), cosmosFixtures(t), esmFixtures(t), jmaFixtures(t), smcFixtures(t), nzFixtures(t), v1Fixtures(t)) {
		path := filepath.Join(recordsDir(f.format), f.name)
		want := strings.Join(f.lines, f.ending) + f.ending
		if *updateRing {
			if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
				t.Fatal(err)
			}
			if err := os.WriteFile(path, []byte(want), 0o644); err != nil {
				t.Fatal(err)
			}
			continue
		}
		if got := readFile(t, path); string(got) != want {
			t.Errorf("%s is not what its generator makes; run go test ./ingest -run TestRingFixtures -update-ring and read the difference", path)
		}
	}
}

// edit returns the lines with the first occurrence of old in line n, counted
// from 1, replaced. It fails the test where there is none, so that no case
// passes by damaging nothing.
func edit(t testing.TB, lines []string, n int, old, new string) []string {
	t.Helper()
	if n < 1 || n > len(lines) || !strings.Contains(lines[n-1], old) {
		t.Fatalf("line %d does not contain %q", n, old)
	}
	out := append([]string(nil), lines...)
	out[n-1] = strings.Replace(out[n-1], old, new, 1)
	return out
}

// without returns the lines but those from first to last, counted from 1.
func without(lines []string, first, last int) []string {
	out := append([]string(nil), lines[:first-1]...)
	return append(out, lines[last:]...)
}

// fixtureLines returns the lines of a committed file.
func fixtureLines(t testing.TB, format, name string) []string {
	t.Helper()
	data := strings.ReplaceAll(string(readFile(t, filepath.Join(recordsDir(format), name))), "\r\n", "\n")
	return strings.Split(strings.TrimSuffix(data, "\n"), "\n")
}

func parseLines(lines []string, hints Hints) (string, []Channel, error) {
	return Parse(context.Background(), "case", []byte(strings.Join(lines, "\n")+"\n"), hints)
}

// equalSeries reports whether both hold the same bits.
func equalSeries(a, b []float64) bool {
	if len(a) != len(b) {
		return false
	}
	for i := range a {
		if math.Float64bits(a[i]) != math.Float64bits(b[i]) {
			return false
		}
	}
	return true
}
