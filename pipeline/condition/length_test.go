package condition

import (
	"math"
	"testing"
)

// A record can tell periods up to a fifth of its length, whatever the corner: of motions of
// periods up to 10 s, of which a part was recorded, the spectrum is that of the whole
// within 5 % there, and elsewhere it is not.
func TestLengthsBoundTheBand(t *testing.T) {
	const stepS, limit = 0.01, 0.05
	r := fixed(t)
	r.Steps[0].Degree, r.Steps[2].CornerHz = 2, 0.05
	worst, beyond := 0.0, 0.0
	for _, lengthS := range []float64{6.5, 10.5, 14.5, 22.5, 32.5} {
		periods := []float64{0.1 * lengthS, 0.15 * lengthS, 0.199 * lengthS, 0.4 * lengthS}
		for seed := range uint64(12) {
			clean := shaken(seed, stepS, 40, lengthS-2.5, 0.1, 10)
			part := clean[3750 : 3750+int(lengthS/stepS)]
			got, err := r.Apply(raw(part, stepS))
			if err != nil {
				t.Fatal(err)
			}
			_, toS := got.UsableBand()
			want, have := sd(t, periods, stepS, clean), sd(t, periods, got.StepS, got.Acceleration)
			for i, p := range periods {
				off := math.Abs(have[i]/want[i] - 1)
				if p > toS {
					beyond = max(beyond, off)
					continue
				}
				if worst = max(worst, off); off > limit {
					t.Errorf("%g s, seed %d, T = %.3g s of %.3g: off by %.2g", lengthS, seed, p, toS, off)
				}
			}
			if math.Abs(toS/lengthS-lengthShare) > 1e-3 {
				t.Errorf("of %g s usable to %.3g s", lengthS, toS)
			}
		}
	}
	t.Logf("off by at most %.2g, beyond %.2g", worst, beyond)
	if beyond < 2*limit {
		t.Errorf("beyond off by %.2g only", beyond)
	}
}

// Noise tells nothing of periods longer than itself: a corner by noise is not below.
func TestShortNoiseBoundsTheCorner(t *testing.T) {
	const stepS = 0.01
	for seed := range uint64(4) {
		whole := recorded(seed, motion(seed, stepS, 20, 0.15, 12))
		for _, noiseS := range []float64{3, 5, 10} {
			x := whole[2000-int(noiseS/stepS):]
			w := &work{Conditioned: Conditioned{Acceleration: x, StepS: stepS, Oversampled: 1}}
			from, to := w.quiet()
			if to == 0 {
				continue // the motion was found too early
			}
			got, _ := corners(t, x, stepS, Standard().Steps[3])
			if least := 1 / (float64(to-from) * stepS); got < 0.999*least {
				t.Errorf("seed %d, %.3g s of noise: corner at %g Hz, below %g", seed, float64(to-from)*stepS, got, least)
			}
		}
	}
}
