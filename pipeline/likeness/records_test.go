package likeness

import (
	"math"
	"os"
	"path/filepath"
	"testing"

	"swaybook/ingest"
)

// recordings reads the channels of corrected accelerograms (V2) that the California
// Strong Motion Instrumentation Program (California Geological Survey) distributes,
// where they exist.
func recordings(t *testing.T) (names []string, channels []ingest.Channel) {
	t.Helper()
	const root = "../../../shared/records/csmip"
	files, err := filepath.Glob(filepath.Join(filepath.FromSlash(root), "*", "*.V2"))
	if err != nil {
		t.Fatal(err)
	}
	if len(files) == 0 {
		t.Skipf("no recordings at %s", root)
	}
	for _, file := range files {
		data, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		_, parsed, err := ingest.Parse(file, data, ingest.Hints{})
		if err != nil {
			t.Fatal(err)
		}
		for _, c := range parsed {
			names, channels = append(names, filepath.Base(filepath.Dir(file))+"/"+filepath.Base(file)), append(channels, c)
		}
	}
	return names, channels
}

// TestRecordings compares all recordings with each other, none of which is there
// twice, three directions of one instrument among them; and each with forms of itself
// that an archive may hold beside it.
func TestRecordings(t *testing.T) {
	names, channels := recordings(t)
	var list []*Motion
	for _, c := range channels {
		list = append(list, motion(t, c.Acceleration, c.StepS))
	}
	var comparer Comparer
	most := 0.0
	for i, a := range list {
		x, n := channels[i].Acceleration, len(channels[i].Acceleration)
		for j, b := range list[:i] {
			if v := comparer.Compare(a, b); v.Kind != Different {
				t.Errorf("%s and %s: %+v", names[i], names[j], v)
			}
			if a.stepS == b.stepS {
				comparer.search.load(a, b, 1, a.stepS)
				if lag, found := comparer.search.best(); found {
					most = max(most, math.Abs(comparer.search.at(lag).correlation))
				}
			}
		}
		for _, c := range []struct {
			name    string
			other   *Motion
			atLeast Kind
			lag     int
		}{
			{"itself", a, Identical, 0},
			{"in gal, with an offset", motion(t, changed(x, 100, 1), a.stepS), Scaled, 0},
			{"cut", motion(t, x[50:n-n/8], a.stepS), Identical, -50},
			{"every second sample", motion(t, everyNth(x[1:], 2), 2*a.stepS), Identical, -1},
		} {
			if v := comparer.Compare(a, c.other); v.Kind != c.atLeast || v.Lag != c.lag {
				t.Errorf("%s %s: %+v, want %v at lag %d", names[i], c.name, v, c.atLeast, c.lag)
			}
		}
		if a.stepS != stepS { // the filter of these tests
			continue
		}
		v := comparer.Compare(a, motion(t, zeroPhase(x, 0.1, 25), a.stepS))
		t.Logf("%s band-passed 0.1–25 Hz: %v, correlation %.4f", names[i], v.Kind, v.Correlation)
		if v.Kind < Similar {
			t.Errorf("%s band-passed 0.1–25 Hz: %+v", names[i], v)
		}
	}
	t.Logf("greatest correlation of two recordings at one step %.3f", most)
}
