package quality

import (
	"math"
	"testing"

	"swaybook/pipeline/signal"
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

// A false trigger is noise throughout, whatever sample is taken for an arrival: white noise
// is always found, pink noise, which is uneven, the more often the longer it is.
func TestNoiseThroughout(t *testing.T) {
	for _, test := range []struct {
		name    string
		lengthS float64
		of      func(seed uint64, deviation float64) func(i, n int) float64
		least   int // of 40
	}{
		{"white", 30, white, 40}, {"white", 60, white, 40}, {"white", 180, white, 40},
		{"pink", 30, pink, 20}, {"pink", 60, pink, 30}, {"pink", 180, pink, 40},
	} {
		found := 0
		for seed := range uint64(40) {
			x := edit(make([]float64, int(test.lengthS/stepS)), test.of(seed, 0.002))
			if lowSignal(edit(x, func(int, int) float64 { return 0.03 }), int(seed)) {
				found++
			}
		}
		t.Logf("%s noise, %g s: %d of 40", test.name, test.lengthS, found)
		if found < test.least {
			t.Errorf("%s noise, %g s: %d of 40, want %d", test.name, test.lengthS, found, test.least)
		}
	}
}

// Motion is not as even: none that begins late, or is cut, is taken for noise.
func TestMotionIsUneven(t *testing.T) {
	for _, cut := range []struct {
		name     string
		from, to float64 // shares of the squares
	}{
		{"begins late", 0.05, 1}, {"begins in the strong motion", 0.3, 1}, {"begins in the coda", 0.8, 1},
		{"ends early", 0.0005, 0.95}, {"ends in the strong motion", 0.0005, 0.7}, {"cut at both ends", 0.05, 0.95},
	} {
		all, least := 0, math.Inf(1)
		for _, x := range recorded(1e-3) {
			from, to := after(x, cut.from), after(x, cut.to)
			part := x[from:min(len(x), max(to, from+unevenS/stepS))] // nothing is looked for in less
			if float64(len(part))*stepS < unevenS {
				continue
			}
			all++
			least = min(least, unevenness(settled(part, stepS)))
			if lowSignal(part, 0) {
				t.Errorf("%s: taken for noise", cut.name)
			}
		}
		if t.Logf("%s: the strongest part of %d has %.3g times the quietest at least", cut.name, all, least); all < 10 {
			t.Errorf("%s: %d motions only", cut.name, all)
		}
	}
}

// What begins in the strong motion has no noise before it: too little precedes the arrival,
// and the motion is not measured by its own beginning.
func TestLateTriggersAreNoNoise(t *testing.T) {
	for _, share := range []float64{0.005, 0.05, 0.2} {
		found, all := has{}, 0
		for _, x := range recorded(1e-3) {
			y := x[after(x, share):]
			onset := signal.Arrival(y, stepS)
			found.count(Assess(y, stepS, onset))
			all++
		}
		t.Logf("less %g of the squares: of %d %v", share, all, found)
		if found[FlagLowSignal] > 0 || found[FlagNoPreEvent] < found[FlagLateStart] {
			t.Errorf("less %g of the squares: of %d %v", share, all, found)
		}
	}
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
