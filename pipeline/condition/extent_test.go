package condition

import (
	"math"
	"math/rand/v2"
	"testing"

	"swaybook/pipeline/signal"
)

// shaken is a motion whose strong part takes some strongS.
func shaken(seed uint64, stepS, quietS, strongS, lowHz, highHz float64) []float64 {
	return shape(seed, stepS, quietS, lowHz, highHz, func(t float64) float64 {
		rise := 6 * t / strongS
		return math.Pow(rise, 1.5) * math.Exp(1.5*(1-rise))
	})
}

// longRecord is a motion of 80 s that arrives after quietS, in a file of lengthS with noise
// of a standard deviation in m/s².
func longRecord(clean []float64, stepS, lengthS, deviation float64) []float64 {
	random := rand.New(rand.NewPCG(7, 3))
	x := make([]float64, int(lengthS/stepS))
	copy(x, clean)
	for i := range x {
		x[i] += deviation * random.NormFloat64()
	}
	return x
}

// A taper takes nothing from the motion, however long the file is and however early the
// motion begins: PGA and spectrum are those of the motion, but for what the filter takes
// where short noise puts its corner near the motion's lowest frequencies.
func TestTaperLeavesTheMotion(t *testing.T) {
	const stepS = 0.01
	periods := []float64{0.1, 0.2, 0.3, 0.5, 0.7, 1}
	for _, test := range []struct {
		recipe Recipe
		limit  float64
	}{{fixed(t), 0.01}, {Standard(), 0.06}} {
		worst := 0.0
		for _, quietS := range []float64{2.6, 5, 20} {
			clean := shaken(uint64(quietS), stepS, quietS, 8, 0.4, 12)
			want := sd(t, periods, stepS, clean)
			for _, lengthS := range []float64{80, 600, 1800} {
				got, err := test.recipe.Apply(raw(longRecord(clean, stepS, lengthS, 0.0002), stepS))
				if err != nil {
					t.Fatal(err)
				}
				if share := signal.Greatest(got.Acceleration) / signal.Greatest(clean); math.Abs(share-1) > 0.02 {
					t.Errorf("%s, %g s after %g s: %.3f of PGA", test.recipe.Name, lengthS, quietS, share)
				}
				_, toS := got.UsableBand()
				for i, have := range sd(t, periods, got.StepS, got.Acceleration) {
					off := math.Abs(have/want[i] - 1)
					if periods[i] > toS {
						continue
					}
					if worst = max(worst, off); off > test.limit {
						t.Errorf("%s, %g s after %g s, T = %g s: off by %.3f", test.recipe.Name, lengthS, quietS, periods[i], off)
					}
				}
			}
		}
		t.Logf("%s: off by at most %.2g", test.recipe.Name, worst)
	}
}

// Corners by noise are those of the motion, however long the recorder ran on.
func TestCornersDoNotDependOnTheTail(t *testing.T) {
	const stepS = 0.01
	high, low := byNoise()
	for seed := range uint64(4) {
		clean := shaken(seed, stepS, 20, 8, 0.3, 20)
		wantLow, wantHigh := math.NaN(), math.NaN()
		for _, lengthS := range []float64{60, 300, 1200} {
			x := longRecord(clean, stepS, lengthS, 0.02)
			gotLow, gotHigh := corners(t, x, stepS, high, low)
			if lengthS == 60 {
				wantLow, wantHigh = gotLow, gotHigh
				continue
			}
			if math.Abs(gotLow/wantLow-1) > 0.15 || math.Abs(gotHigh/wantHigh-1) > 0.15 {
				t.Errorf("seed %d, %g s: %g to %g Hz, of 60 s %g to %g", seed, lengthS, gotLow, gotHigh, wantLow, wantHigh)
			}
		}
	}
}

// Noise that a taper has made small does not count: corners behind it are those without.
func TestTaperedNoiseDoesNotCount(t *testing.T) {
	const stepS = 0.01
	high, low := byNoise()
	for seed := range uint64(4) {
		x := longRecord(shaken(seed, stepS, 8, 8, 0.3, 20), stepS, 400, 0.02)
		wantLow, wantHigh := corners(t, x, stepS, high, low)
		gotLow, gotHigh := corners(t, x, stepS, Step{Do: KindTaper, Share: 0.02}, high, low)
		if math.Abs(gotLow/wantLow-1) > 0.3 || math.Abs(gotHigh/wantHigh-1) > 0.3 {
			t.Errorf("seed %d: %g to %g Hz, without a taper %g to %g", seed, gotLow, gotHigh, wantLow, wantHigh)
		}
	}
}

// Noise below a digitiser's step is that of rounding, and a level between two steps is lost
// where the ground is quiet: in band the spectrum is within what a corner at three times
// the noise leaves, wherever zero lies between two steps and with noise that seldom reaches
// one, and the closer the more steps there are. Of few steps the corner lies in the motion's
// own band, and the filter takes as much as rounding does.
func TestRoundedMotions(t *testing.T) {
	const stepS = 0.01
	for _, test := range []struct{ steps, limit float64 }{{10, 0.2}, {20, 0.25}, {100, 0.1}, {400, 0.05}} {
		steps, limit := test.steps, test.limit
		for _, zero := range []float64{0, 0.3, 0.45} {
			for _, noise := range []float64{0, 0.05} {
				worst, count, shortest := 0.0, 0, math.Inf(1)
				for seed := range uint64(12) {
					random := rand.New(rand.NewPCG(seed, 4))
					clean := shaken(seed, stepS, 20, 18, 0.3, 20)
					step := signal.Greatest(clean) / steps
					x := make([]float64, len(clean))
					for i, v := range clean {
						x[i] = step * math.Round(v/step+zero+noise*random.NormFloat64())
					}
					got, err := Standard().Apply(raw(x, stepS))
					if err != nil {
						t.Fatal(err)
					}
					fromS, toS := got.UsableBand()
					shortest = min(shortest, toS)
					var periods []float64
					for p := max(fromS, 0.1); p <= toS; p *= 1.1 {
						periods = append(periods, p)
					}
					if len(periods) == 0 {
						continue
					}
					want, have := sd(t, periods, stepS, clean), sd(t, periods, got.StepS, got.Acceleration)
					for i, p := range periods {
						off := math.Abs(have[i]/want[i] - 1)
						if worst, count = max(worst, off), count+1; off > limit {
							t.Errorf("%g steps, zero at %g, noise %g, seed %d, T = %.3g s of %.3g: off by %.2g", steps, zero, noise, seed, p, toS, off)
						}
					}
				}
				t.Logf("%g steps, zero at %g, noise %g: %d ordinates off by at most %.2g, usable to %.3g s at least", steps, zero, noise, count, worst, shortest)
			}
		}
	}
}

// Of two filters each has its own corner, and the higher one counts.
func TestTwoHighPassFilters(t *testing.T) {
	x := recorded(3, motion(3, 0.01, 20, 0.4, 12))
	first, second := Step{Do: KindHighPass, Order: 2, CornerHz: 0.2}, Step{Do: KindHighPass, Order: 2, CornerHz: 0.1}
	apply := func(steps ...Step) Conditioned {
		got, err := Recipe{Name: "own", States: []string{"raw"}, Steps: steps}.Apply(raw(x, 0.01))
		if err != nil {
			t.Fatal(err)
		}
		return got
	}
	a, b := apply(first, second), apply(second, first)
	if a.LowCutHz != 0.2 || b.LowCutHz != 0.2 {
		t.Errorf("corners %g and %g Hz", a.LowCutHz, b.LowCutHz)
	}
	periods := []float64{1, 3, 5, 8, 12}
	of := sd(t, periods, 0.01, b.Acceleration)
	for i, have := range sd(t, periods, 0.01, a.Acceleration) {
		if math.Abs(have/of[i]-1) > 0.001 {
			t.Errorf("T = %g s: %g in one order, %g in the other", periods[i], have, of[i])
		}
	}
}
