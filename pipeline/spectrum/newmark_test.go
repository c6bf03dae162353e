package spectrum

import (
	"math"
	"testing"
)

// averageAcceleration is Newmark's method as usually written, with the
// acceleration carried along and unit mass, on samples and n steps of rest.
//
// Source: A. K. Chopra, Dynamics of Structures, table 5.4.2, γ = 1/2, β = 1/4,
// from memory.
func averageAcceleration(step, period, damping float64, a []float64, n int) float64 {
	omega := 2 * math.Pi / period
	c, k := 2*damping*omega, omega*omega
	stiff := k + 2*c/step + 4/(step*step)
	u, v, best := 0.0, 0.0, 0.0
	acc := -a[0]
	advance := func(next float64) {
		load := -next + (4/(step*step)*u + 4/step*v + acc) + c*(2/step*u+v)
		u1 := load / stiff
		v1 := 2/step*(u1-u) - v
		acc = -next - c*v1 - k*u1
		u, v = u1, v1
		best = max(best, math.Abs(u))
	}
	for _, next := range a[1:] {
		advance(next)
	}
	acc = -c*v - k*u // the ground stops
	for range n {
		advance(0)
	}
	return best
}

func TestNewmarkAverage(t *testing.T) {
	for _, step := range []float64{0.005, 0.02} {
		a := shaken(31, 900)
		for _, period := range []float64{0.01, 0.05, 0.1, 0.3, 1, 3, 10} {
			for _, damping := range []float64{0, 0.05, 0.2} {
				got := mustSolve(t, NewmarkAverage, step, []Oscillator{{period, damping}}, a)[0]
				tail := int(math.Ceil(period/step)) + 4
				want := averageAcceleration(step, period, damping, a, tail)
				if off(got, want) > 1e-9 {
					t.Errorf("dt %g T %g damping %g: D = %v, want %v", step, period, damping, got, want)
				}
			}
		}
	}
}

// TestNewmarkTail: with a pulse so short that the peak comes in the ringing, D is
// that of samples, within a sample's shortfall of the exact one.
func TestNewmarkTail(t *testing.T) {
	a := []float64{0, 1, 0}
	for _, ratio := range []float64{30, 100, 1000} {
		for _, damping := range []float64{0, 0.1} {
			o := []Oscillator{{ratio, damping}}
			got, exact := mustSolve(t, NewmarkAverage, 1, o, a)[0], mustSolve(t, NigamJennings, 1, o, a)[0]
			if off(got, exact) > 10/(ratio*ratio) {
				t.Errorf("T/dt %g damping %g: D = %v, exact %v", ratio, damping, got, exact)
			}
		}
	}
}

// TestNewmarkPeriod: the peak response to a long sine is where the method's own
// period, longer by (φ/2)/atan(φ/2), meets the sine's.
func TestNewmarkPeriod(t *testing.T) {
	const n, cycles = 12, 60
	a := samplesOf(n*cycles, func(x float64) float64 { return math.Sin(2 * math.Pi * cycles * x) })
	best, at := 0.0, 0.0
	for i := range 2000 {
		period := n * (0.9 + 0.0001*float64(i))
		if d := PSA(period, mustSolve(t, NewmarkAverage, 1, []Oscillator{{period, 0}}, a)[0]); d > best {
			best, at = d, period
		}
	}
	phase := 2 * math.Pi / at
	if own := at * (phase / 2) / math.Atan(phase/2); off(own, n) > 2e-3 {
		t.Errorf("resonance at T = %v, lengthened to %v; the sine has %d", at, own, n)
	}
	if off(at, n) < 5e-3 {
		t.Errorf("resonance at T = %v: the period is not lengthened", at)
	}
}

// TestNewmarkConverges: halving the step of one broken line brings D to the
// exact one with the square of the step. How near a sample comes to the peak is
// chance, so that the order shows only in the mean over many oscillators.
func TestNewmarkConverges(t *testing.T) {
	a := shaken(8, 400)
	var list []Oscillator
	for i := range 60 {
		list = append(list, Oscillator{0.2 + 0.02*float64(i), 0.05})
	}
	exact := mustSolve(t, NigamJennings, 0.01, list, a)
	previous := 0.0
	for _, factor := range []int{4, 8, 16, 32} {
		mean := 0.0
		for i, d := range mustSolve(t, NewmarkAverage, 0.01/float64(factor), list, interpolate(a, factor)) {
			mean += off(d, exact[i]) / float64(len(list))
		}
		if order := math.Log2(previous / mean); previous > 0 && math.Abs(order-2) > 0.25 {
			t.Errorf("factor %d: order %.2f, want 2 (mean error %.3g)", factor, order, mean)
		}
		previous = mean
	}
}
