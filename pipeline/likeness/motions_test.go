package likeness

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"swaybook/pipeline/stochastic"
)

// invented returns an invented motion of magnitude m at a distance in m, sampled at
// 200 Hz, with the noise of a recorder: shaped white noise (package stochastic).
func invented(t testing.TB, m, distanceM float64, seed uint64) []float64 {
	t.Helper()
	p := stochastic.Params{
		Source: stochastic.Source{Magnitude: m, StressDropPa: 8e6, ShearVelocityMPS: 3500, DensityKGM3: 2800,
			Partition: stochastic.HorizontalPartition},
		Path: stochastic.Path{DistanceM: stochastic.EffectiveDistance(m, distanceM), BreakM: 70e3, FarExponent: 0.5,
			Q0: 150, QExponent: 0.5, VelocityMPS: 3500, DurationSPerM: 5e-5},
		Site:     stochastic.Site{Vs30MPS: 450, KappaS: 0.035},
		Window:   stochastic.StandardWindow(),
		LowCutHz: 0.03, HighCutHz: 80, OnsetS: 10,
	}
	if err := p.Validate(); err != nil {
		t.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(seed, 4242))
	x := stochastic.Simulate(make([]float64, int((p.SpanS()+10)*200)), stepS, p, rng)
	peak := greatest(x)
	for i := range x {
		x[i] += 1e-4 * peak * rng.NormFloat64()
	}
	return x
}

// stepS is the step of invented motions.
const stepS = 0.005

func greatest(x []float64) float64 {
	peak := 0.0
	for _, v := range x {
		peak = max(peak, math.Abs(v))
	}
	return peak
}

// butterworth returns x through a filter of fourth order with a corner at a
// frequency, passing what lies above it or below it: two sections of second order
// by the bilinear transform with the corner prewarped.
func butterworth(x []float64, cornerHz float64, high bool) []float64 {
	w := math.Tan(math.Pi * cornerHz * stepS)
	y := slices.Clone(x)
	for _, angle := range []float64{math.Pi / 8, 3 * math.Pi / 8} {
		damping := 2 * math.Cos(angle)
		a0, a1, a2 := 1+damping*w+w*w, 2*(w*w-1), 1-damping*w+w*w
		b0, b1 := w*w, 2*w*w
		if high {
			b0, b1 = 1, -2
		}
		var x1, x2, y1, y2 float64
		for i, v := range y {
			u := (b0*v + b1*x1 + b0*x2 - a1*y1 - a2*y2) / a0
			x1, x2, y1, y2 = v, x1, u, y1
			y[i] = u
		}
	}
	return y
}

// bandPass filters forward only, as recorders and real-time processing do.
func bandPass(x []float64, lowHz, highHz float64) []float64 {
	return butterworth(butterworth(x, lowHz, true), highHz, false)
}

// bothWays filters forward and backward, as offline processing does.
func bothWays(x []float64, lowHz, highHz float64) []float64 {
	y := bandPass(x, lowHz, highHz)
	slices.Reverse(y)
	y = bandPass(y, lowHz, highHz)
	slices.Reverse(y)
	return y
}

func motion(t testing.TB, x []float64, stepS float64) *Motion {
	t.Helper()
	m, err := NewMotion(x, stepS)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// changed returns scale·x + offset.
func changed(x []float64, scale, offset float64) []float64 {
	y := make([]float64, len(x))
	for i, v := range x {
		y[i] = scale*v + offset
	}
	return y
}

// everyNth returns every n-th sample from the first on.
func everyNth(x []float64, n int) []float64 {
	var y []float64
	for i := 0; i < len(x); i += n {
		y = append(y, x[i])
	}
	return y
}
