package likeness

import (
	"math"
	"math/rand/v2"
	"testing"
)

// bruteForce correlates x[j] with y[lag + ratio·j] at every lag by definition and
// returns where ρ² is greatest under the rules of the package comment, for wholes and for
// fragments.
func bruteForce(x, y []float64, ratio int) (whole, part peak) {
	shorter := min(len(x), (len(y)-1)/ratio+1)
	for k := -ratio * len(x); k <= len(y); k++ {
		var px, py, phase []float64
		for j := range x {
			if i := k + ratio*j; i >= 0 && i < len(y) {
				px, py = append(px, x[j]), append(py, y[i])
			}
		}
		for i := range y {
			if (i-k)%ratio == 0 {
				phase = append(phase, y[i])
			}
		}
		if len(px) < 2 || float64(len(px)) < 0.8*float64(shorter) {
			continue
		}
		xx, yy, xy := moments(px, py)
		shareX, shareY := xx/squares(x), yy/squares(phase)
		switch most, least := max(shareX, shareY), min(shareX, shareY); {
		case least >= 0.8:
			whole.take(k, xy*xy/(xx*yy))
		case most >= 0.8 && least >= 0.1:
			part.take(k, xy*xy/(xx*yy))
		}
	}
	return whole, part
}

func moments(x, y []float64) (xx, yy, xy float64) {
	var mx, my float64
	for i := range x {
		mx += x[i] / float64(len(x))
		my += y[i] / float64(len(x))
	}
	for i := range x {
		xx += (x[i] - mx) * (x[i] - mx)
		yy += (y[i] - my) * (y[i] - my)
		xy += (x[i] - mx) * (y[i] - my)
	}
	return xx, yy, xy
}

func squares(x []float64) float64 {
	sum := 0.0
	for _, v := range x {
		sum += v * v
	}
	return sum
}

// TestSearchIsItsDefinition compares the search with the definition on short noise of
// all lengths, where ends and the way round of the transform matter.
func TestSearchIsItsDefinition(t *testing.T) {
	rng := rand.New(rand.NewPCG(31, 0))
	noise := func(n int) []float64 {
		x := make([]float64, n)
		for i := range x {
			x[i] = rng.NormFloat64()
		}
		return x
	}
	wholes, fragments := 0, 0
	var s search
	for range 400 {
		ratio := 1 + rng.IntN(4)
		x, y := noise(8+rng.IntN(40)), noise(8+rng.IntN(120))
		if rng.IntN(2) == 0 { // a copy within, at a lag
			for j := range x {
				if i := ratio*j + rng.IntN(ratio); i < len(y) {
					y[i] += 3 * x[j]
				}
			}
		}
		a, b := motion(t, x, float64(ratio)), motion(t, y, 1)
		s.load(a, b, ratio, 1)
		whole, part := s.best()
		wantWhole, wantPart := bruteForce(a.centred(nil), b.centred(nil), ratio)
		for _, c := range []struct{ got, want peak }{{whole, wantWhole}, {part, wantPart}} {
			if c.got.found != c.want.found || c.got.lag != c.want.lag || !near(c.got.r2, c.want.r2, 1e-9) {
				t.Errorf("%d and %d samples, ratio %d: %+v, want %+v", len(x), len(y), ratio, c.got, c.want)
			}
		}
		if whole.found {
			wholes++
			if rho := s.at(whole.lag).correlation; !near(rho*rho, whole.r2, 1e-9) {
				t.Errorf("%d and %d samples, ratio %d: ρ %v where ρ² is %v", len(x), len(y), ratio, rho, whole.r2)
			}
		}
		if part.found {
			fragments++
		}
	}
	if wholes < 100 || fragments < 100 {
		t.Errorf("only %d of 400 pairs share most of both, %d of one", wholes, fragments)
	}
}

// TestOtherStep decimates an invented motion without a filter: every sample of the
// coarser one is in the finer.
func TestOtherStep(t *testing.T) {
	x := invented(t, 6, 30e3, 1)
	a := motion(t, x, stepS)
	for _, n := range []int{2, 3, 4, 5} {
		for _, first := range []int{0, 1, 407} {
			y := everyNth(x[first:], n)
			v := compareBoth(t, a, motion(t, changed(y, -3, 0), float64(n)*stepS))
			if v.Kind != Scaled || v.Lag != -first || v.LagStepS != stepS || !near(v.Scale, -3, 1e-9) || v.Common != len(y) {
				t.Errorf("every %d-th sample from %d: %+v", n, first, v)
			}
		}
	}
}

// waves is a band-limited motion in closed form: seven decaying cosines of 0.7 to 9 Hz
// at any time.
func waves(seconds float64) float64 {
	sum := 0.0
	for i, hz := range []float64{0.7, 1.3, 2.1, 3.4, 4.6, 6.3, 9} {
		sum += math.Cos(2*math.Pi*hz*seconds + float64(i*i))
	}
	return sum * seconds * math.Exp(-seconds/4)
}

func sampledWaves(n int, firstS, stepS float64) []float64 {
	x := make([]float64, n)
	for i := range x {
		x[i] = waves(firstS + float64(i)*stepS)
	}
	return x
}

// TestStepsWithoutWholeRatio samples one motion at two steps whose ratio is not whole.
// The lag is that of the starts, to the nearest step.
func TestStepsWithoutWholeRatio(t *testing.T) {
	for _, c := range []struct {
		stepA, stepB, firstB float64
		lagStepS             float64
	}{
		{0.01, 1.0 / 128, 0, 0.005},
		{1.0 / 120, 0.005, 0.5, 1.0 / 240},
		{0.02, 0.0125, 1, 0.01},
		{0.01, 0.01 * 1.01, 0, 0.01 * 1.01 / 2},
	} {
		a := motion(t, sampledWaves(int(30/c.stepA), 0, c.stepA), c.stepA)
		b := motion(t, sampledWaves(int(25/c.stepB), c.firstB, c.stepB), c.stepB)
		v := compareBoth(t, a, b)
		if v.Kind < Similar || !near(v.Scale, 1, 0.01) || !near(v.LagStepS, c.lagStepS, 1e-12) ||
			math.Abs(float64(v.Lag)*v.LagStepS+c.firstB) > 0.51*v.LagStepS {
			t.Errorf("%+v: %+v", c, v)
		}
	}
}

// TestRoundedStep: 120 Hz as 0.008333 s, which over the whole series is a small part of
// a step, is the same step; 0.0083 s is another, and the same samples are then faster.
func TestRoundedStep(t *testing.T) {
	x := sampledWaves(2000, 0, 1.0/120)
	a := motion(t, x, 1.0/120)
	if v := compareBoth(t, a, motion(t, x, 0.008333)); v.Kind != Identical || v.LagStepS != 0.008333 {
		t.Errorf("0.008333 s: %+v", v)
	}
	if v := compareBoth(t, a, motion(t, x, 0.0083)); v.Kind > Near || v.LagStepS != 1.0/240 {
		t.Errorf("0.0083 s: %+v", v)
	}
}

// TestResampledCubic: a cubic polynomial comes back exactly, whatever the step.
func TestResampledCubic(t *testing.T) {
	cubic := func(at float64) float64 { return 2 - at + 0.3*at*at - 0.01*at*at*at }
	for n := 4; n < 30; n++ {
		x := make([]float64, n)
		for i := range x {
			x[i] = cubic(float64(i))
		}
		for _, step := range []float64{1, 0.99, 0.8, 0.64, 1.0 / 3} {
			y := resampled(nil, x, step)
			if last := float64(len(y)-1) * step; last > float64(n-1) || last+step < float64(n-1)-1e-9 {
				t.Errorf("%d samples at %v: the last of %d at %v", n, step, len(y), last)
			}
			for i, got := range y {
				if want := cubic(float64(i) * step); math.Abs(got-want) > 1e-11 {
					t.Errorf("%d samples at %v: %v at %d, want %v", n, step, got, i, want)
				}
			}
		}
	}
}
