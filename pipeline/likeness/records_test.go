package likeness

import (
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
		_, parsed, err := ingest.Parse(t.Context(), file, data, ingest.Hints{})
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
	most, mostInBand := 0.0, 0.0
	for i, a := range list {
		x, n := channels[i].Acceleration, len(channels[i].Acceleration)
		for j, b := range list[:i] {
			if v := comparer.Compare(a, b); v.Kind != Different {
				t.Errorf("%s and %s: %+v", names[i], names[j], v)
			}
			if a.stepS == b.stepS {
				most = max(most, correlated(&comparer, a, b))
				mostInBand = max(mostInBand, correlated(&comparer, a.inBand(), b.inBand()))
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
		v := comparer.Compare(a, motion(t, bothWays(x, 0.1, 25), a.stepS))
		t.Logf("%s band-passed 0.1–25 Hz: %v, correlation %.4f", names[i], v.Kind, v.Correlation)
		if v.Kind < Similar {
			t.Errorf("%s band-passed 0.1–25 Hz: %+v", names[i], v)
		}
		for _, d := range []disturb{ramp, baseline, swell} {
			raw := d.at(x, 0.2, nil)
			v := comparer.Compare(motion(t, raw, stepS), motion(t, everyNth(bothWays(raw, 0.3, 20), 2), 2*stepS))
			t.Logf("%s with %s, corrected 0.3–20 Hz at 100 Hz: %v, correlation %.4f, in band %.4f", names[i], d.name, v.Kind, v.Correlation, v.InBand)
			if v.Kind != Similar {
				t.Errorf("%s with %s, corrected: %+v", names[i], d.name, v)
			}
		}
	}
	t.Logf("greatest correlation of two recordings at one step %.3f, in band %.3f", most, mostInBand)
}
