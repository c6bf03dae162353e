package spectrum

import (
	"fmt"
	"math"
	"testing"
)

// Closed forms of elementary dynamics: A. K. Chopra, Dynamics of Structures,
// ch. 3 (harmonic) and 4 (step, ramp, pulses); the same results stand in J. M.
// Biggs, Introduction to Structural Dynamics, ch. 2. Formulas are quoted from
// memory and those of pulses can be had from the Fourier integral of the pulse.
// Deformation factors are R = ω²D/a₀ = A/a₀.

// samplesOf returns shape at n+1 samples from 0 to 1.
func samplesOf(n int, shape func(x float64) float64) []float64 {
	a := make([]float64, n+1)
	for i := range a {
		a[i] = shape(float64(i) / float64(n))
	}
	return a
}

func constant(float64) float64    { return 1 }
func triangle(x float64) float64  { return 1 - math.Abs(2*x-1) }
func halfSine(x float64) float64  { return math.Sin(math.Pi * x) }
func saw(x float64) float64       { return 1 - x }
func sinc(x float64) float64      { return math.Sin(x) / x }
func overshoot(ζ float64) float64 { return 1 + math.Exp(-math.Pi*ζ/math.Sqrt(1-ζ*ζ)) }

// factor returns R for a motion of unit peak, steps of 1 s.
func factor(t *testing.T, period, damping float64, a []float64) float64 {
	t.Helper()
	return PSA(period, solveOne(t, 1, period, damping, a))
}

// TestStep: under a suddenly applied constant acceleration R = 1 + e^(−πζ/√(1−ζ²)),
// for every damping; it lasts for 20 periods, at whose end a
// damped oscillator stands nearly still, and then rings by less.
func TestStep(t *testing.T) {
	for _, period := range []float64{0.05, 0.37, 1, 3.3, 5, 17.3, 400, 5e3} {
		a := samplesOf(int(math.Ceil(20*period))+1, constant)
		for _, damping := range []float64{0.05, 0.1, 0.2, 0.5, 0.8, 0.95} {
			if got, want := factor(t, period, damping, a), overshoot(damping); off(got, want) > 1e-12 {
				t.Errorf("T/dt %g damping %g: R = %v, want %v", period, damping, got, want)
			}
		}
	}
}

// TestRectangularPulse: undamped, R = 2·sin(π·d/T) for a duration d < T/2, and 2
// for longer ones.
func TestRectangularPulse(t *testing.T) {
	for _, n := range []int{1, 3, 40, 1000} {
		a := samplesOf(n, constant)
		for _, ratio := range []float64{1e-3, 0.05, 0.2, 0.4999, 0.5001, 0.77, 1, 3.3} {
			want := 2.0
			if ratio < 0.5 {
				want = 2 * math.Sin(math.Pi*ratio)
			}
			if got := factor(t, float64(n)/ratio, 0, a); off(got, want) > 1e-11 {
				t.Errorf("n %d d/T %g: R = %v, want %v", n, ratio, got, want)
			}
		}
	}
}

// TestTriangularPulse: undamped, the free vibration after a symmetric triangle
// of duration d has R = (ωd/2)·sinc²(ωd/4), the greatest of the motion for short
// pulses.
func TestTriangularPulse(t *testing.T) {
	for _, n := range []int{2, 20, 600} {
		a := samplesOf(n, triangle)
		for _, ratio := range []float64{1e-3, 0.05, 0.2, 0.4, 0.5} {
			x := 2 * math.Pi * ratio
			want := x / 2 * sinc(x/4) * sinc(x/4)
			if got := factor(t, float64(n)/ratio, 0, a); off(got, want) > 1e-11 {
				t.Errorf("n %d d/T %g: R = %v, want %v", n, ratio, got, want)
			}
		}
	}
}

// TestDecayingRamp: undamped, under an acceleration that jumps up and falls off
// in a straight line over d, ω²u/a₀ = 1 − cos ωt + sin(ωt)/(ωd) − t/d, whose
// first peak is where tan(ωt/2) = ωd, for d > 0.371T or so.
func TestDecayingRamp(t *testing.T) {
	for _, n := range []int{1, 50, 777} {
		a := samplesOf(n, saw)
		for _, ratio := range []float64{0.5, 1, 2.5, 10} {
			x := 2 * math.Pi * ratio
			at := 2 * math.Atan(x)
			want := 1 - math.Cos(at) + math.Sin(at)/x - at/x
			if got := factor(t, float64(n)/ratio, 0, a); off(got, want) > 1e-11 {
				t.Errorf("n %d d/T %g: R = %v, want %v", n, ratio, got, want)
			}
		}
	}
}

// TestRampToConstant: undamped, R = 1 + |sin(πr/T)|/(πr/T) for a rise over r.
// The motion is let down over whole periods, which adds no vibration.
func TestRampToConstant(t *testing.T) {
	for _, period := range []int{4, 5, 6, 32, 500} {
		for _, rise := range []int{1, 3, 7, 33, 650} {
			var a []float64
			for i := range rise + 3*period {
				a = append(a, min(1, float64(i)/float64(rise)))
			}
			for i := range 2*period + 1 {
				a = append(a, 1-float64(i)/float64(2*period))
			}
			x := math.Pi * float64(rise) / float64(period)
			want := 1 + math.Abs(math.Sin(x))/x
			if got := factor(t, float64(period), 0, a); off(got, want) > 1e-11 {
				t.Errorf("T/dt %d rise %d: R = %v, want %v", period, rise, got, want)
			}
		}
	}
}

// halfSineFactor is R of an undamped oscillator under half a sine of duration
// d = ratio·T: the free vibration for d < T/2, else the greatest forced peak.
func halfSineFactor(ratio float64) float64 {
	if ratio < 0.5 {
		return math.Abs(2 * ratio * 2 * math.Cos(math.Pi*ratio) / (1 - 4*ratio*ratio))
	}
	k := 1 / (2 * ratio)
	best := 0.0
	for l := 1.0; ; l++ {
		part := 2 * l / (1 + 2*ratio) // t/d of the l-th peak
		if part > 1 {
			return best
		}
		u := (math.Sin(math.Pi*part) - k*math.Sin(2*math.Pi*part*ratio)) / (1 - k*k)
		best = max(best, math.Abs(u))
	}
}

// TestHalfSine: half a sine is no broken line, and R converges to the closed
// form with the square of the step.
func TestHalfSine(t *testing.T) {
	for _, ratio := range []float64{0.1, 0.3, 0.45, 0.6, 1, 1.6, 2.7} {
		want := halfSineFactor(ratio)
		var previous float64
		for _, n := range []int{50, 100, 200, 400, 800} {
			e := off(factor(t, float64(n)/ratio, 0, samplesOf(n, halfSine)), want)
			if bound := 1.1 * math.Pi * math.Pi / 12 / float64(n*n); e > bound {
				t.Errorf("d/T %g n %d: R is off by %.3g, a broken line explains %.3g", ratio, n, e, bound)
			}
			if order := math.Log2(previous / e); previous > 0 && math.Abs(order-2) > 0.05 {
				t.Errorf("d/T %g n %d: order %.3f, want 2", ratio, n, order)
			}
			previous = e
		}
	}
}

// lineGain is the factor by which a broken line through n samples a period
// shortens the sine that it stands for, sinc²(π/n), the first coefficient of its
// Fourier series. What else it holds is at n − 1 times the frequency and above.
func lineGain(n int) float64 { return sinc(math.Pi/float64(n)) * sinc(math.Pi/float64(n)) }

// TestResonance: after c periods of a sine at its own frequency an undamped
// oscillator has R = πc, and rings with it.
func TestResonance(t *testing.T) {
	for _, c := range []int{1, 5, 40} {
		for _, n := range []int{25, 200, 1000} {
			a := samplesOf(n*c, func(x float64) float64 { return math.Sin(2 * math.Pi * float64(c) * x) })
			want := math.Pi * float64(c) * lineGain(n)
			got := factor(t, float64(n), 0, a)
			// The higher terms of the broken line are off resonance: at most 2 in R
			// times their share, (n−1)⁻² of the sine, times (n−1)⁻¹ of the response.
			if math.Abs(got-want) > 4/math.Pow(float64(n-1), 3) {
				t.Errorf("%d periods of %d samples: R = %v, want %v", c, n, got, want)
			}
		}
	}
}

// TestSteadyState: under a sine of frequency ratio r, R = 1/√((1 − r²)² + (2ζr)²)
// once the transient is gone. The sine swells and falls off over 600 periods,
// which leaves no transient; the bend of the swell takes up to 3e-4 of a sharp
// resonance.
func TestSteadyState(t *testing.T) {
	const n, periods = 60, 600
	for _, r := range []float64{0.2, 0.5, 0.9, 1, 1.2, 2, 4} {
		for _, damping := range []float64{0.05, 0.2, 0.7} {
			a := samplesOf(n*periods, func(x float64) float64 {
				swell := math.Pow(math.Sin(math.Pi*x), 2)
				return swell * math.Sin(2*math.Pi*periods*x)
			})
			want := lineGain(n) / math.Hypot(1-r*r, 2*damping*r)
			if got := factor(t, r*n, damping, a); off(got, want) > 5e-4 {
				t.Errorf("r %g damping %g: R = %v, want %v", r, damping, got, want)
			}
		}
	}
}

// TestPeaksClosedForms: the pulses have elementary integrals. Durations are 1.
func TestPeaksClosedForms(t *testing.T) {
	tests := []struct {
		name     string
		shape    func(x float64) float64
		v, u, by float64
	}{
		{"constant", constant, 1, 0.5, 1e-14},
		{"triangle", triangle, 0.5, 0.25, 1e-14},
		{"saw", saw, 0.5, 1. / 3, 1e-14},
		// One full sine: v = (1 − cos 2πx)/2π, u = (x − sin(2πx)/2π)/2π.
		{"sine", func(x float64) float64 { return math.Sin(2 * math.Pi * x) }, 1 / math.Pi, 1 / (2 * math.Pi), 1e-4},
		// v = x − 2x², greatest in size at the end; u = x²/2 − 2x³/3, at its inner
		// turning point x = 1/2 and at the end −1/6.
		{"through zero", func(x float64) float64 { return 1 - 4*x }, 1, 1. / 6, 1e-14},
		// v = x − x², greatest 1/4 at 1/2; u = x²/2 − x³/3.
		{"back to rest", func(x float64) float64 { return 1 - 2*x }, 0.25, 1. / 6, 1e-14},
	}
	for _, tt := range tests {
		for _, n := range []int{2, 7, 100} {
			if tt.by > 1e-10 && n < 100 {
				continue
			}
			if tt.name == "triangle" && n%2 == 1 {
				continue // its tip must be a sample
			}
			for _, step := range []float64{0.01, 2} {
				a := samplesOf(n, tt.shape)
				d := step * float64(n)
				pga, pgv, pgd := Peaks(step, a)
				top := 0.0
				for _, x := range a {
					top = max(top, math.Abs(x))
				}
				tol := tt.by * 10
				if pga != top || off(pgv, tt.v*d) > tol || off(pgd, tt.u*d*d) > tol {
					t.Errorf("%s, %d steps of %g s: Peaks = %v %v %v, want %v %v %v", tt.name, n, step, pga, pgv, pgd, top, tt.v*d, tt.u*d*d)
				}
			}
		}
	}
}

// TestPeaksInnerTurningPoint puts both maxima between samples.
func TestPeaksInnerTurningPoint(t *testing.T) {
	// One step from 1 to −3: v = t − 2t² turns at 1/4 with 1/8 and ends at −1;
	// then −3 to 5 brings v back: v = −1 − 3t + 4t², least −25/16 at 3/8.
	_, pgv, pgd := Peaks(1, []float64{1, -3, 5})
	// u = t²/2 − 2t³/3 ends the first step at −1/6; in the second it is
	// −1/6 − t − 3t²/2 + 4t³/3, falling to −4/3 at its end where v = 0.
	if off(pgv, 25./16) > 1e-15 || off(pgd, 4./3) > 1e-15 {
		t.Errorf("Peaks = %v, %v, want 25/16 and 4/3", pgv, pgd)
	}
	// v = −1 + t after a first step of −1: u turns only where v passes zero.
	_, _, pgd = Peaks(1, []float64{-1, -1, 4, 4})
	// Step 1: v = −t, u = −t²/2. Step 2: v = −1 − t + 5t²/2, zero at (1+√11)/5;
	// u = −1/2 − t − t²/2 + 5t³/6 there, −1.2625…; step 3 rises from −7/6 through 0.
	x := (1 + math.Sqrt(11)) / 5
	inner := math.Abs(-0.5 - x - x*x/2 + 5*x*x*x/6)
	end := -0.5 - 1 - 0.5 + 5./6 + 0.5 + 2
	if want := max(inner, end); off(pgd, want) > 1e-15 || want != inner && want != end {
		t.Errorf("pgd = %v, want %v (inner %v, end %v)", pgd, want, inner, end)
	}
}

func TestPeaksOddInput(t *testing.T) {
	if a, v, u := Peaks(0.01, nil); a != 0 || v != 0 || u != 0 {
		t.Errorf("Peaks of nothing = %v %v %v", a, v, u)
	}
	if a, v, u := Peaks(0.01, []float64{-3}); a != 3 || v != 0 || u != 0 {
		t.Errorf("Peaks of one sample = %v %v %v, want 3 0 0", a, v, u)
	}
	if a, v, u := Peaks(0.01, []float64{1, math.NaN(), 1}); !math.IsNaN(a) || !math.IsNaN(v) || !math.IsNaN(u) {
		t.Errorf("Peaks with NaN = %v %v %v", a, v, u)
	}
	if a, v, u := Peaks(0.01, []float64{0, 0, 0}); a != 0 || v != 0 || u != 0 {
		t.Errorf("Peaks of rest = %v %v %v", a, v, u)
	}
}

func ExampleSolver_SD() {
	// A made-up pulse of 3 m/s², a triangle over 0.4 s in steps of 0.02 s.
	a := samplesOf(20, func(x float64) float64 { return 3 * triangle(x) })
	oscillators := []Oscillator{{PeriodS: 0.2, Damping: 0.05}, {PeriodS: 2, Damping: 0.05}}
	s, err := NewSolver(NigamJennings, 0.02, oscillators)
	if err != nil {
		fmt.Println(err)
		return
	}
	for i, d := range s.SD(nil, a) {
		t := oscillators[i].PeriodS
		fmt.Printf("T = %.1f s: D = %.2f mm, A = %.3f m/s²\n", t, 1000*d, PSA(t, d))
	}
	// Output:
	// T = 0.2 s: D = 3.09 mm, A = 3.046 m/s²
	// T = 2.0 s: D = 171.24 mm, A = 1.690 m/s²
}
