package condition

import (
	"slices"
	"testing"
)

// byNoise are filters whose corners follow the noise, the low-pass filter's from 5 Hz on.
func byNoise() (high, low Step) {
	high = Step{Do: KindHighPass, Order: 4, ByNoise: &NoiseRule{Ratio: 3, LeastHz: 0.05, MostHz: 2}}
	low = Step{Do: KindLowPass, Order: 4, ByNoise: &NoiseRule{Ratio: 3, LeastHz: 5, MostHz: 60}}
	return high, low
}

func corners(t *testing.T, x []float64, stepS float64, steps ...Step) (lowHz, highHz float64) {
	t.Helper()
	got, err := Recipe{Name: "own", States: []string{"raw"}, Steps: steps}.Apply(raw(x, stepS))
	if err != nil {
		t.Fatal(err)
	}
	return got.LowCutHz, got.HighCutHz
}

// A corner follows the noise of the motion that the filter is applied to: after a trim that
// of the part that is left, whatever a filter before the trim has asked.
func TestNoiseIsOfTheMotionAtHand(t *testing.T) {
	const stepS = 0.01
	x := recorded(1, motion(1, stepS, 40, 0.4, 12))
	rough := motion(9, stepS, 0, 0.3, 3)
	for i := range 2000 {
		x[i] += 0.02 * rough[i+500] // another noise in the first 20 s
	}
	high, low := byNoise()
	trim := Step{Do: KindTrim, FromS: 25}
	whole, _ := corners(t, x, stepS, high)
	part, _ := corners(t, x[2500:], stepS, high)
	if !(part > 1.2*whole) {
		t.Fatalf("corner of the whole %g Hz, of its part %g Hz: no example", whole, part)
	}
	if got, _ := corners(t, x, stepS, trim, high); got != part {
		t.Errorf("after a trim %g Hz, want %g", got, part)
	}
	_, alone := corners(t, x[2500:], stepS, low)
	wideLow := *low.ByNoise
	wideLow.LeastHz = 45 // has nothing to do, and asks for the noise
	if got, _ := corners(t, x, stepS, Step{Do: KindLowPass, Order: 4, ByNoise: &wideLow}, trim, high); got != part {
		t.Errorf("asked before the trim %g Hz, want %g", got, part)
	}
	if _, got := corners(t, x, stepS, trim, low); got != alone {
		t.Errorf("after a trim low-pass at %g Hz, want %g", got, alone)
	}
}

// Finer steps bring nothing above half the sampling rate as delivered, and no corner there;
// those below stay where they are.
func TestNoiseAtFinerSteps(t *testing.T) {
	const stepS = 0.01
	high, low := byNoise()
	finer := Step{Do: KindOversample, Factor: 4}
	for seed := range uint64(4) {
		x := recorded(seed, motion(seed, stepS, 20, 0.4, 12))
		wantLow, wantHigh := corners(t, x, stepS, high, low)
		for _, steps := range [][]Step{{finer, high, low}, {high, finer, low}, {high, low, finer}} {
			gotLow, gotHigh := corners(t, x, stepS, steps...)
			if !(gotLow > 0.85*wantLow && gotLow < 1.15*wantLow && gotHigh > 0.85*wantHigh && gotHigh < 1.15*wantHigh) {
				t.Errorf("seed %d, oversampled at step %d: %g to %g Hz, want %g to %g", seed, slices.Index([]Kind{steps[0].Do, steps[1].Do, steps[2].Do}, KindOversample)+1, gotLow, gotHigh, wantLow, wantHigh)
			}
		}
		// A corner at 0.9 of half the rate as delivered has nothing to do at any step.
		if _, got := corners(t, x, stepS, finer, Step{Do: KindLowPass, Order: 4, CornerHz: 45}); got == 45 {
			t.Errorf("a filter at %g Hz where nothing is above 50 Hz", got)
		}
	}
}
