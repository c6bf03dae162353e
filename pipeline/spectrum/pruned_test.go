package spectrum

import (
	"math"
	"math/rand/v2"
	"testing"
)

// The series of a step ends where the exact recurrence does, at every period:
// the slope of the ground, not the displacement, sets the size of what is left
// out where the period is long.
func TestSeriesEndsWhereTheRecurrenceDoes(t *testing.T) {
	for _, phase := range []float64{1e-6, 6e-5, 5e-4, 6e-4, 1e-3, 3e-3, 0.01, 0.05, 0.2, 0.5} {
		for _, damping := range []float64{0, 0.02, 0.2, 0.99} {
			r := respond(phase, damping)
			exact := r.recurrence()
			for _, ground := range [][2]float64{{1, -1}, {0, 1}, {1, 1}, {-0.3, 0.9}} {
				a, next := ground[0], ground[1]
				want := float64(exact.pu*a) + float64(exact.qu*next)
				var p polynomial
				s := newSeries(phase, damping)
				s.expand(&p, 0, 0, a, next-a)
				if got, _, _ := p.at(1); math.Abs(got-want) > 1e-15 {
					t.Errorf("phase %g, damping %g, ground %v: the series ends at %.17g, want %.17g", phase, damping, ground, got, want)
				}
			}
		}
	}
}

// Entering only the blocks and steps whose bounds allow it gives the D that
// entering all gives. The motions have many blocks nearly as great as the
// greatest: alternations at and near the oscillator's period.
func TestPrunedSearchFindsWhatTheWholeSearchDoes(t *testing.T) {
	const seed = 5
	rng := rand.New(rand.NewPCG(1, seed))
	worst := 0.0
	for i := range 3000 {
		a := make([]float64, 140+rng.IntN(300))
		for j := range a {
			if j%(1+i%7) == 0 {
				a[j] = float64(1-2*rng.IntN(2)) * (1 + float64(0.001*rng.NormFloat64()))
			}
		}
		if i%2 == 0 {
			last := 0.0
			for j := range a {
				a[j], last = a[j]-last, a[j]
			}
		}
		period, damping := 5+float64(rng.Float64()*6), 0.99*rng.Float64()
		if i%3 == 0 { // long enough for strides
			period, damping = 168*(1+float64(2*rng.Float64())), 0.3*damping
		}
		o, ok := newSlow(0, Omega(period), damping)
		if !ok {
			continue
		}
		pruned, whole := solveOne(t, 1, period, damping, a), enterAll(o, a)
		if e := off(pruned, whole); e > 1e-11 {
			t.Errorf("seed %d, motion %d, period %g steps, damping %g: D %g, want %g", seed, i, period, damping, pruned, whole)
		} else {
			worst = max(worst, e)
		}
	}
	t.Logf("worst %.2g", worst)
}

// enterAll returns D for samples one unit of time apart with every block and
// step of the slow form entered.
func enterAll(o slow, a []float64) float64 {
	m := newMotion()
	m.load(a)
	g := &newSlowGroups([]slow{o})[0]
	g.march(m)
	g.sampled(m)
	m.best[0] = 0
	for b := range m.blocks() {
		g.add(m, 0, b)
		g.visit(m, false)
	}
	last := g.last(m, 0)
	return math.Ldexp(o.ringing.peak(m.best[0], last.x, last.y/o.phase), m.exponent)
}
