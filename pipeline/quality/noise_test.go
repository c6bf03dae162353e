package quality

import (
	"math"
	"testing"
)

// lowSignal reports whether FlagLowSignal is raised.
func lowSignal(x []float64, onset int) bool {
	for _, f := range Assess(x, stepS, onset) {
		if f.Flag == FlagLowSignal {
			return true
		}
	}
	return false
}

// Before a motion that hardly moves the recorder there are equal samples, and noise that
// does not show.
func TestRoundingIsNoise(t *testing.T) {
	for _, test := range []struct {
		steps float64 // in the peak
		want  bool
	}{{2, true}, {10, false}, {100, false}} {
		for seed := range uint64(4) {
			x := invented(5, 20e3, seed)
			for i, v := range x {
				x[i] = math.Round(v*test.steps) / test.steps
			}
			if got := lowSignal(x, quietS/stepS); got != test.want {
				t.Errorf("a peak of %g steps: %s %v", test.steps, FlagLowSignal, got)
			}
		}
	}
}
