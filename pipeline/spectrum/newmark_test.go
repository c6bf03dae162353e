package spectrum

import (
	"errors"
	"math"
	"math/big"
	"math/rand/v2"
	"strings"
	"testing"

	"swaybook/pipeline/internal/kernel"
)

var newmarkMethods = []Method{NewmarkAverage, NewmarkLinear}

// textbookNewmark is Newmark's method as usually written, with the acceleration
// carried along and unit mass, on samples and n steps of rest.
//
// Source: A. K. Chopra, Dynamics of Structures, table 5.4.2, with γ = 1/2 and β
// = 1/4 or 1/6, from memory.
func textbookNewmark(m Method, step, period, damping float64, a []float64, n int) float64 {
	const gamma = 0.5
	beta := map[Method]float64{NewmarkAverage: 1. / 4, NewmarkLinear: 1. / 6}[m]
	omega := 2 * math.Pi / period
	c, k := 2*damping*omega, omega*omega
	a1 := 1/(beta*step*step) + gamma*c/(beta*step)
	a2 := 1/(beta*step) + (gamma/beta-1)*c
	a3 := (1/(2*beta) - 1) + step*(gamma/(2*beta)-1)*c
	u, v, best := 0.0, 0.0, 0.0
	acc := -a[0]
	advance := func(next float64) {
		u1 := (-next + a1*u + a2*v + a3*acc) / (k + a1)
		v = gamma/(beta*step)*(u1-u) + (1-gamma/beta)*v + step*(1-gamma/(2*beta))*acc
		u = u1
		acc = -next - c*v - k*u
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

func TestNewmark(t *testing.T) {
	for _, m := range newmarkMethods {
		for _, step := range []float64{0.005, 0.02} {
			a := shaken(31, 900)
			for _, period := range []float64{0.01, 0.037, 0.05, 0.1, 0.3, 1, 3, 10} {
				if m == NewmarkLinear && period < 1.82*step {
					continue
				}
				for _, damping := range []float64{0, 0.05, 0.2, 0.99} {
					got := mustSolve(t, m, step, []Oscillator{{period, damping}}, a)[0]
					tail := int(math.Ceil(period/step)) + 4
					want := textbookNewmark(m, step, period, damping, a, tail)
					if off(got, want) > 1e-9 {
						t.Errorf("%v dt %g T %g damping %g: D = %v, want %v", m, step, period, damping, got, want)
					}
				}
			}
		}
	}
}

// TestNewmarkLinearWithoutCoupling: at ζφ = √3 the displacement of the next
// sample does not depend on the velocity, which therefore cannot be told from
// displacements.
func TestNewmarkLinearWithoutCoupling(t *testing.T) {
	a := []float64{0, 3, -1, 2, 1}
	for _, damping := range []float64{0.51, 0.6, 0.8, 0.99} {
		period := 2 * math.Pi * damping / math.Sqrt(3)
		got := mustSolve(t, NewmarkLinear, 1, []Oscillator{{period, damping}}, a)[0]
		want := textbookNewmark(NewmarkLinear, 1, period, damping, a, int(math.Ceil(period))+4)
		if off(got, want) > 1e-13 {
			t.Errorf("damping %g: D = %v, want %v", damping, got, want)
		}
	}
}

// TestNewmarkLinearLimit: the period must exceed π/√3 steps, at which an undamped
// oscillator begins to swing up by itself.
func TestNewmarkLinearLimit(t *testing.T) {
	limit := math.Pi / math.Sqrt(3)
	for _, damping := range []float64{0, 0.2, 0.99} {
		for _, factor := range []float64{0.01, 0.5, 0.999, 1 - 1e-14} {
			_, err := NewSolver(NewmarkLinear, 0.02, []Oscillator{{0.02 * limit * factor, damping}})
			if !errors.Is(err, ErrOscillator) || !strings.Contains(err.Error(), "π/√3 = 1.8138 steps") {
				t.Errorf("damping %g, %g of the limit: error %v", damping, factor, err)
			}
		}
		const factor = 1 + 1e-12
		if _, err := NewSolver(NewmarkLinear, 0.02, []Oscillator{{0.02 * limit * factor, damping}}); err != nil {
			t.Errorf("damping %g, just above the limit: %v", damping, err)
		}
	}
	// Free motion of 20000 steps on both sides of the limit, from unit
	// displacement.
	for _, c := range []struct {
		phase   float64
		bounded bool
	}{{2*math.Sqrt(3) - 1e-3, true}, {2*math.Sqrt(3) + 1e-3, false}} {
		r, _ := NewmarkLinear.newmark(c.phase, 0)
		if top := freeMotion(&r, 1, 0, 20000); top < 2 != c.bounded {
			t.Errorf("phase %v: |u| reaches %v", c.phase, top)
		}
	}
}

// freeMotion returns the greatest |u| of n free steps.
func freeMotion(r *recurrence, u, v float64, n int) float64 {
	top := math.Abs(u)
	for range n {
		u, v = u+(r.uu*u+r.uv*v), v+(r.vu*u+r.vv*v)
		top = max(top, math.Abs(u))
	}
	return top
}

// TestNewmarkEnergy: the norm never grows, is kept without damping, and bounds
// |u|, as close as the phases of samples allow.
func TestNewmarkEnergy(t *testing.T) {
	const seed = 77
	rng := rand.New(rand.NewPCG(seed, 0))
	for _, m := range newmarkMethods {
		most := 0.0
		for i := range 2000 {
			phase, damping := 3.46*rng.Float64(), 0.99*rng.Float64()
			if i%2 == 0 {
				damping = 0
			}
			r, _ := m.newmark(phase, damping)
			e := m.energy(phase, damping)
			u, v := rng.NormFloat64(), rng.NormFloat64()*phase
			start := e.bound(u, v)
			if top := freeMotion(&r, u, v, 300); top > start*(1+1e-12) {
				t.Fatalf("seed %d %v phase %v damping %v: |u| reaches %v beyond %v", seed, m, phase, damping, top, start)
			} else {
				most = max(most, top/start)
			}
			end := e.bound(u+(r.uu*u+r.uv*v), v+(r.vu*u+r.vv*v))
			if end > start*(1+1e-13) || damping == 0 && off(end, start) > 1e-11 {
				t.Fatalf("seed %d %v phase %v damping %v: norm from %v to %v", seed, m, phase, damping, start, end)
			}
		}
		if most < 0.9999 {
			t.Errorf("%v: the bound is %v times what is reached at least", m, 1/most)
		}
	}
}

// newmarkOracle returns the coefficients of a step in multiple precision, from
// Newmark's definition: every quantity is a sum of multiples of u, v, a and a'.
func newmarkOracle(m Method, phase, damping float64) map[string]*big.Float {
	beta := bquo(bigf(1), bigf(newmarkParts[m]))
	half := bigf(0.5)
	c, k := btwice(bmul(bigf(phase), bigf(damping))), bmul(bigf(phase), bigf(phase))
	linear := func(x *big.Float, p [4]*big.Float, y *big.Float, q [4]*big.Float) (r [4]*big.Float) {
		for i := range r {
			r[i] = badd(bmul(x, p[i]), bmul(y, q[i]))
		}
		return r
	}
	zero, one := bigf(0), bigf(1)
	minus := bigf(-1)
	u, v := [4]*big.Float{one, zero, zero, zero}, [4]*big.Float{zero, one, zero, zero}
	a, next := [4]*big.Float{zero, zero, one, zero}, [4]*big.Float{zero, zero, zero, one}
	acc := linear(one, linear(bmul(minus, k), u, bmul(minus, c), v), minus, a)
	// What the next u and v are without the next acceleration w, then w itself.
	uPart := linear(one, linear(one, u, one, v), bsub(half, beta), acc)
	vPart := linear(one, v, half, acc)
	w := linear(one, linear(bmul(minus, k), uPart, bmul(minus, c), vPart), minus, next)
	q := bquo(one, badd(one, badd(bmul(half, c), bmul(beta, k))))
	du := linear(one, linear(one, uPart, minus, u), bmul(beta, q), w)
	dv := linear(one, linear(one, vPart, minus, v), bmul(half, q), w)
	return map[string]*big.Float{
		"uu": du[0], "uv": du[1], "pu": du[2], "qu": du[3],
		"vu": dv[0], "vv": dv[1], "pv": dv[2], "qv": dv[3],
	}
}

// TestNewmarkCoefficients: coefficients keep their digits at small phases. Those
// that go through zero at great phases are held to a tenth of their size there.
func TestNewmarkCoefficients(t *testing.T) {
	for _, m := range newmarkMethods {
		for _, phase := range []float64{1e-6, 1e-4, 0.01, 0.3, 1, math.Sqrt(6), 3, 3.46} {
			for _, damping := range []float64{0, 1e-6, 0.05, 0.5, 0.9, 0.99} {
				r, d := m.newmark(phase, damping)
				got := map[string]float64{
					"uu": r.uu, "uv": r.uv, "pu": r.pu, "qu": r.qu,
					"vu": r.vu, "vv": r.vv, "pv": r.pv, "qv": r.qv,
				}
				want := newmarkOracle(m, phase, damping)
				for name, x := range want {
					floor := map[string]float64{"uv": 0.1, "vu": 0.1 * phase * phase, "vv": 0.1 * phase * phase, "pv": 0.1}[name]
					if e := relative(got[name], x, floor); !(e <= 2e-15) {
						t.Errorf("%v phase %g damping %g: %s is off by %.2g", m, phase, damping, name, e)
					}
				}
				if e := relative(d.scale, want["qu"], 0); e > 1e-15 {
					t.Errorf("%v phase %g damping %g: scale is off by %.2g", m, phase, damping, e)
				}
			}
		}
	}
}

// TestNewmarkTail: with a pulse so short that the peak comes in the ringing, D is
// that of samples, within a sample's shortfall of the exact one.
func TestNewmarkTail(t *testing.T) {
	a := []float64{0, 1, 0}
	for _, m := range newmarkMethods {
		for _, ratio := range []float64{30, 100, 1000} {
			for _, damping := range []float64{0, 0.1} {
				o := []Oscillator{{ratio, damping}}
				got, exact := mustSolve(t, m, 1, o, a)[0], mustSolve(t, NigamJennings, 1, o, a)[0]
				if off(got, exact) > 10/(ratio*ratio) {
					t.Errorf("%v T/dt %g damping %g: D = %v, exact %v", m, ratio, damping, got, exact)
				}
			}
		}
	}
}

// elongation is the undamped period of a method over the true one, in closed
// form: φ/θ with θ the angle of the eigenvalues of a step.
func elongation(m Method, phase float64) float64 {
	switch m {
	case NewmarkAverage:
		return (phase / 2) / math.Atan(phase/2)
	case NewmarkLinear:
		square := phase * phase
		return phase / math.Acos((1-square/3)/(1+square/6))
	}
	return 1
}

// marchedElongation is the same measured on the free vibration that a method's
// march makes after a pulse: a sine of θ a step has second differences of
// −4·sin²(θ/2) times itself.
func marchedElongation(m Method, phase float64) float64 {
	o := mustSlow(2 * math.Pi / phase)
	if m.isNewmark() {
		o = m.newNewmark(0, phase, 0)
	}
	pulse := newMotion()
	pulse.load(append([]float64{0, 1}, make([]float64, 3000)...))
	g := newSlowGroups([]slow{o})[0]
	var start kernel.Mark
	start.X[0] = o.first(pulse).x
	start.Y[0] = start.X[0]
	rows := make([]kernel.Row, len(pulse.a)-2)
	kernel.TraceSlow(g.eq, &start, pulse.a, rows, 1)
	rows = rows[2:] // beyond the pulse
	var bend, square float64
	for i := 1; i+1 < len(rows); i++ {
		u := rows[i][0]
		bend += u * ((rows[i+1][0] - u) - (u - rows[i-1][0]))
		square += u * u
	}
	return phase / (2 * math.Asin(math.Sqrt(-bend/square)/2))
}

// TestPeriodElongation: the periods of the methods' own marches are those of the
// closed forms, which tend to 1 + φ²/12 and 1 + φ²/24, and the published error
// curves. The exact method has none.
//
// Source of the curves: Bathe and Wilson (1973); K.-J. Bathe, Finite Element
// Procedures, §9.4; A. K. Chopra, Dynamics of Structures, fig. 5.5.2. The values
// are from memory, as read off a figure, to half a per cent of the period.
func TestPeriodElongation(t *testing.T) {
	published := map[float64][2]float64{0.05: {1, 0.5}, 0.1: {3, 1.5}, 0.2: {12, 6}} // per cent
	t.Log("lengthening of the period in per cent\n dt/T  average   linear    exact")
	for _, ratio := range []float64{0.01, 0.02, 0.05, 0.1, 0.15, 0.2, 0.3, 0.4, 0.5} {
		phase := 2 * math.Pi * ratio
		var percent [3]float64
		for i, m := range []Method{NewmarkAverage, NewmarkLinear, NigamJennings} {
			got, want := marchedElongation(m, phase), elongation(m, phase)
			if math.Abs(got-want) > 1e-11 {
				t.Errorf("%v dt/T %g: the period is %v times the true one, want %v", m, ratio, got, want)
			}
			percent[i] = 100 * (got - 1)
			if curve, ok := published[ratio]; ok && i < 2 && math.Abs(percent[i]-curve[i]) > 0.5 {
				t.Errorf("%v dt/T %g: the period is %.2f %% longer, published %g %%", m, ratio, percent[i], curve[i])
			}
			if share := [3]float64{1. / 12, 1. / 24}[i]; i < 2 && ratio <= 0.02 && off((got-1)/(phase*phase), share) > 0.02 {
				t.Errorf("%v dt/T %g: lengthening %v of φ², want %v", m, ratio, (got-1)/(phase*phase), share)
			}
		}
		t.Logf("%5.2f %8.3f %8.3f %8.1g", ratio, percent[0], percent[1], percent[2])
	}
}

// TestNewmarkPeriod: the peak response to a long sine is where the method's own
// period meets the sine's.
func TestNewmarkPeriod(t *testing.T) {
	const n, cycles = 12, 60
	a := samplesOf(n*cycles, func(x float64) float64 { return math.Sin(2 * math.Pi * cycles * x) })
	for _, m := range newmarkMethods {
		best, at := 0.0, 0.0
		for i := range 2000 {
			period := n * (0.9 + 0.0001*float64(i))
			if d := PSA(period, mustSolve(t, m, 1, []Oscillator{{period, 0}}, a)[0]); d > best {
				best, at = d, period
			}
		}
		if own := at * elongation(m, 2*math.Pi/at); off(own, n) > 2e-3 {
			t.Errorf("%v: resonance at T = %v, lengthened to %v; the sine has %d", m, at, own, n)
		}
		if off(at, n) < 5e-3 {
			t.Errorf("%v: resonance at T = %v: the period is not lengthened", m, at)
		}
	}
}

// TestNewmarkConverges: halving the step of one broken line brings D to the
// exact one with the square of the step. How near a sample comes to the peak is
// chance, so that the order shows only in the mean over many oscillators.
func TestNewmarkConverges(t *testing.T) {
	a := shaken(8, 400)
	var list []Oscillator
	for i := range 240 {
		list = append(list, Oscillator{0.2 + 0.005*float64(i), 0.05})
	}
	exact := mustSolve(t, NigamJennings, 0.01, list, a)
	for _, m := range newmarkMethods {
		previous := 0.0
		for _, factor := range []int{4, 8, 16, 32} {
			mean := 0.0
			for i, d := range mustSolve(t, m, 0.01/float64(factor), list, interpolate(a, factor)) {
				mean += off(d, exact[i]) / float64(len(list))
			}
			if order := math.Log2(previous / mean); previous > 0 && math.Abs(order-2) > 0.25 {
				t.Errorf("%v factor %d: order %.2f, want 2 (mean error %.3g)", m, factor, order, mean)
			}
			previous = mean
		}
	}
}
