package query

import (
	"math"
	"testing"
)

// What changed comes in the order of how much, by hand: 0.2 to 0.25 is a quarter, 8 motions
// to 6 a loss of a quarter, 6 to 8 a third more and no loss, a lost percentile is infinite.
func TestDrifts(t *testing.T) {
	nan := math.NaN()
	before := []Figure{{"1 s", "p50", 0.2}, {"1 s", "count", 8}, {"2 s", "p50", 0.1}, {"2 s", "count", 6}, {"3 s", "p84", 0.4}, {"4 s", "p84", nan}, {"5 s", "p50", 0}}
	after := []Figure{{"1 s", "p50", 0.25}, {"1 s", "count", 6}, {"2 s", "p50", 0.1}, {"2 s", "count", 8}, {"3 s", "p84", nan}, {"4 s", "p84", 0.3}, {"5 s", "p50", 0}, {"6 s", "p50", 1}}
	got := Drifts(before, after)
	want := []struct {
		of, name    string
		ratio, loss float64
	}{
		{"3 s", "p84", math.Inf(1), math.Inf(1)}, {"2 s", "count", 1. / 3, 0}, {"1 s", "p50", 0.25, 0.25}, {"1 s", "count", -0.25, 0.25},
	}
	if len(got) != len(want) {
		t.Fatalf("%d changes, want %d: %+v", len(got), len(want), got)
	}
	for i, w := range want {
		if d := got[i]; d.Of != w.of || d.Name != w.name || math.Abs(d.Ratio()-w.ratio) > 1e-15 || math.Abs(d.Loss()-w.loss) > 1e-15 {
			t.Errorf("%d: %+v changes by %v, loss %v, want %+v", i, d, d.Ratio(), d.Loss(), w)
		}
	}
	if gone := Drifts(before[:2], nil); len(gone) != 2 || !math.IsInf(gone[0].Loss(), 1) || !math.IsInf(gone[1].Loss(), 1) {
		t.Errorf("a figure that is gone: %+v", gone)
	}
}
