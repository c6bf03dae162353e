package spectrum

import (
	"math"
	"math/rand/v2"
	"testing"

	"swaybook/pipeline/internal/kernel"
)

// TestBlockBounds searches every block to the end and finds no |u| beyond the
// bound by which the solver would have left it out.
func TestBlockBounds(t *testing.T) {
	for seed := range uint64(6) {
		m := newMotion()
		a := seededMotion(seed, 5*blockSteps)
		switch seed {
		case 0:
			for i := range a {
				a[i] *= float64(1 - 2*(i%2)) // steep slopes through zero
			}
		case 1:
			// A straight line that ends at zero just inside block 1, where the
			// slope is all that the block's own samples do not tell.
			clear(a)
			for i := blockSteps - 20; i <= blockSteps; i++ {
				a[i] = float64(i - blockSteps - 1)
			}
		}
		m.load(a)
		for _, ratio := range ratios {
			for _, damping := range dampings {
				phase := Omega(ratio)
				worst := 0.0
				if o, ok := newSlow(0, phase, damping); ok {
					worst = slowExcess(m, &o)
				} else {
					o := newFast(0, phase, damping)
					worst = fastExcess(m, &o)
				}
				if worst > 1+1e-12 {
					t.Errorf("seed %d T/dt %g damping %g: |u| is %.6g of a block's bound", seed, ratio, damping, worst)
				}
			}
		}
	}
}

func slowExcess(m *motion, o *slow) (worst float64) {
	g := newSlowGroups([]slow{*o})[0]
	g.march(m)
	for b := range m.blocks() {
		bound := o.trainBound() * m.marks[b].Peak[0]
		from, to := m.block(b)
		a, rows := m.a[from:to+1], m.rows[:to-from+1]
		g.trace(m, b, rows, 1)
		for k := range len(rows) - 1 {
			u, end := o.eq.scale*rows[k][0], o.eq.scale*rows[k+1][0]
			top, _, _ := o.series.peak(0, u, o.velocity(u, end-u, a[k], a[k+1]), a[k], a[k+1]-a[k])
			worst = max(worst, share(top, bound))
		}
	}
	return worst
}

func fastExcess(m *motion, o *fast) (worst float64) {
	g := newFastGroups([]fast{*o})[0]
	g.march(m)
	for b := range m.blocks() {
		line := o.phase*m.blockLines[b].First + o.turn.jump*m.blockLines[b].Second
		bound := o.bound(line, m.marks[b].Peak[0])
		from, to := m.block(b)
		states := m.states[:to-from]
		kernel.TraceFast(g.turn, &m.marks[b], m.bend[from:to], states, 1)
		for k := range states {
			// Every step is followed when best is below its bound.
			s := state{states[k].X[0], states[k].Y[0]}
			worst = max(worst, share(o.step(-1, s, m.a[from+k], m.a[from+k+1]), bound))
		}
	}
	return worst
}

// share returns u/bound, and 0 for vibrations that have died away so far that
// their squares underflow. Motions have peaks near 1.
func share(u, bound float64) float64 {
	if u < 1e-100 {
		return 0
	}
	return u / bound
}

// TestSeriesPeak compares the peak of single steps, from states of every kind,
// with dense sampling of the closed form, and makes sure that it is found even
// where all that is known to be reached lies just below it.
func TestSeriesPeak(t *testing.T) {
	const seed = 17
	r := rand.New(rand.NewPCG(seed, 0))
	twice := 0
	for range 3000 {
		phase, damping := seriesPhase*math.Sqrt(r.Float64()), 0.99*r.Float64()*r.Float64()
		s := newSeries(phase, damping)
		// Velocity and acceleration near zero together make the odd cases.
		u, v := r.NormFloat64(), r.NormFloat64()*math.Pow(10, -2*r.Float64())
		w, slope := r.NormFloat64()*math.Pow(10, -2*r.Float64()), 4*r.NormFloat64()
		a := -(w + s.linear*v + s.square*u)
		got, uEnd, vEnd := s.peak(0, u, v, a, slope)
		dense, turns, uWant, vWant := densePeak(phase, damping, u, v, a, slope)
		if turns == 2 {
			twice++
		}
		if math.Abs(uEnd-uWant) > 1e-11 || math.Abs(vEnd-vWant) > 1e-11 {
			t.Fatalf("seed %d phase %v damping %v from %v %v under %v %v: end %v %v, want %v %v", seed, phase, damping, u, v, a, slope, uEnd, vEnd, uWant, vWant)
		}
		if math.Abs(got-dense) > 1e-9 {
			t.Fatalf("seed %d phase %v damping %v from %v %v under %v %v: peak %v, want %v", seed, phase, damping, u, v, a, slope, got, dense)
		}
		if again, _, _ := s.peak(got*(1-1e-10), u, v, a, slope); again < got*(1-1e-13) {
			t.Fatalf("seed %d phase %v damping %v from %v %v under %v %v: peak %v is missed when %v is known", seed, phase, damping, u, v, a, slope, got, again)
		}
	}
	if twice < 20 {
		t.Errorf("seed %d: %d steps with two turning points, too few to test them", seed, twice)
	}
}

// densePeak marches through 200 pieces of a step with the oracle's closed form.
func densePeak(phase, damping, u, v, a, slope float64) (peak float64, turns int, uEnd, vEnd float64) {
	const pieces = 200
	exact := newOracleStep(bigf(phase/pieces), bigf(damping))
	f := fineMarch{step: exact.rounded(), piece: 1. / pieces, u: u, v: v / pieces, best: math.Abs(u)}
	for j := range pieces {
		before := f.v
		f.march(1, a+slope*float64(j)/pieces, slope)
		if before*f.v < 0 {
			turns++
		}
	}
	return f.best, turns, f.u, f.v * pieces
}

// TestShortMotions has the greatest |u| within the first step, in the last, and
// in the ringing.
func TestShortMotions(t *testing.T) {
	const seed = 23
	r := rand.New(rand.NewPCG(seed, 0))
	for i := range 400 {
		a := make([]float64, 2+i%3)
		for j := range a {
			a[j] = r.NormFloat64()
		}
		if i%4 == 0 {
			// From rest up, and nearly back to rest within the step.
			a = []float64{1, -1 - 0.4*r.Float64()}
		}
		ratio, damping := math.Exp(math.Log(4.9)+0.5*r.NormFloat64()), 0.5*r.Float64()
		got, want := solveOne(t, 1, ratio, damping, a), oracleSD(Omega(ratio), damping, a)
		if !(off(got, want) <= 1e-9) {
			t.Errorf("seed %d T/dt %v damping %v motion %v: D = %v, want %v", seed, ratio, damping, a, got, want)
		}
	}
}
