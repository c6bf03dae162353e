package kernel

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// visit is what the functions for lanes with a ground of their own take and make,
// each in a block of its own, so that guards can lie round all of them.
type visit struct {
	slow          *Slow
	start         *Mark
	from          *[Lanes]int
	ground, each  []Row
	at            *Row // of the greatest of some marks
	rowTop, rowAt *Row
	turn          *Turning
	factors       []Row
	fast          *Fast
	phase         *Row
	screen        *FastScreen
	marks         []Mark
	flags         []uint32
}

// newVisit spreads lanes over the ground of a case and has series of 5 to MaxTerms
// terms, some of which end up to two terms before.
func newVisit(c *testCase) *visit {
	n := len(c.ground) / (2 * GatherUnit) * GatherUnit
	v := &visit{
		slow: &c.slow, start: &c.start, from: new([Lanes]int), ground: make([]Row, n), each: make([]Row, max(n-2, 0)),
		at: new(Row), rowTop: new(Row), rowAt: new(Row),
		turn: new(Turning), factors: make([]Row, 5+len(c.ground)%(MaxTerms-4)),
	}
	*v.turn = c.turn
	v.fast, v.phase, v.marks, v.flags = &c.fast, &c.stride.VU, make([]Mark, max(n-2, 0)), make([]uint32, max(n-3, 0))
	v.screen = &FastScreen{Limit: c.steps.Best, Curve: c.steps.Curve, Phase: *v.phase}
	for l := range Lanes {
		v.from[l] = l * l % (len(c.ground) - n + 1)
		for k := range len(v.factors) - l%3 {
			v.factors[k][l] = 1 / math.Gamma(float64(k+1))
		}
	}
	return v
}

// run returns all that is made.
func (v *visit) run(a []float64) []Row {
	Gather(v.ground, a, v.from)
	TraceEach(v.slow, v.start, v.ground, v.each)
	GreatestRows(v.rowTop, v.rowAt, v.each)
	Turn(v.turn, v.factors)
	t, states := v.turn, make([]Row, 0, 3*len(v.marks))
	if len(v.ground) > 0 {
		TraceFastEach(v.fast, v.phase, v.start, v.ground, v.marks)
		ScreenFast(v.screen, v.marks, v.ground[:len(v.marks)], v.flags)
	}
	for _, m := range v.marks {
		states = append(states, m.X, m.Y, m.Peak)
	}
	flags := make([]Row, len(v.flags)) // as numbers
	for i := range flags {
		flags[i][0] = float64(v.flags[i])
	}
	return slices.Concat(states, flags, v.ground, v.each, []Row{*v.rowTop, *v.rowAt, t.Top, t.Time, t.Move, t.Velocity, t.Bend}, t.C[:])
}

// TestVisitIsItsDefinition checks the portable kernel's gathering, tracing and
// maxima against what they stand for.
func TestVisitIsItsDefinition(t *testing.T) {
	use(t, Portable)
	c := newCase(11, 100)
	v := newVisit(c)
	v.run(c.ground)
	for l := range Lanes {
		a := c.ground[v.from[l]:][:len(v.ground)]
		rows := make([]Row, len(a)-2)
		TraceSlow(&c.slow, &c.start, a, rows, 1<<l)
		top, at := 0.0, 0
		for i := range a {
			if v.ground[i][l] != a[i] {
				t.Fatalf("lane %d: row %d = %v, want sample %v", l, i, v.ground[i][l], a[i])
			}
		}
		for i := range rows {
			if v.each[i][l] != rows[i][l] {
				t.Fatalf("lane %d: trace %d = %v, want %v", l, i, v.each[i][l], rows[i][l])
			}
			if x := math.Abs(rows[i][l]); x > top {
				top, at = x, i
			}
		}
		if v.rowTop[l] != top || v.rowAt[l] != float64(at) {
			t.Errorf("lane %d: the greatest is %v in row %v, want %v in %d", l, v.rowTop[l], v.rowAt[l], top, at)
		}
	}
}

// TestFastVisitIsItsDefinition does so for the fast form, against the march of one
// ground and, for the screen, against the two bounds with √(y² + z²) itself: it lets
// all through that these do, and none that they would not with 1.083 of it, the most
// that s exceeds it by.
func TestFastVisitIsItsDefinition(t *testing.T) {
	use(t, Portable)
	c := newCase(14, 130)
	v := newVisit(c)
	v.run(c.ground)
	passed, held := 0, 0
	for l := range Lanes {
		a := c.ground[v.from[l]:][:len(v.ground)]
		bend, rows := make([]float64, len(a)-2), make([]Mark, len(a)-2)
		for k := range bend {
			bend[k] = (a[k+2] - a[k+1]) - (a[k+1] - a[k])
		}
		TraceFast(&c.fast, &c.start, bend, rows, 1<<l)
		jump, phase, limit, curve := c.fast.Jump[l], v.phase[l], v.screen.Limit[l], v.screen.Curve[l]
		for k := range rows {
			got := &v.marks[k]
			x := rows[k].X[l] + jump*(a[k+1]-a[k]) - phase*a[k]
			if got.X[l] != rows[k].X[l] || got.Y[l] != rows[k].Y[l] || math.Abs(got.Peak[l]-x) > 1e-14*(1+math.Abs(x)) {
				t.Fatalf("lane %d: trace %d = %v %v %v, want %v %v %v", l, k, got.X[l], got.Y[l], got.Peak[l], rows[k].X[l], rows[k].Y[l], x)
			}
		}
		for k := range v.flags {
			x, end := v.marks[k].Peak[l], v.marks[k+1].Peak[l]
			line := jump*(a[k+1]-a[k]) - phase*a[k]
			last := line - phase*(a[k+1]-a[k])
			can := func(size float64) bool {
				spare := max(0, curve*size/2-math.Abs(end-x))
				return max(math.Abs(line), math.Abs(last))+size > limit &&
					spare*spare > 2*curve*size*(limit-max(math.Abs(x), math.Abs(end)))
			}
			size := math.Hypot(rows[k].X[l], rows[k].Y[l])
			got := v.flags[k]>>l&1 == 1
			if !got && can(size*(1-1e-12)) || got && !can(size*1.083) {
				t.Errorf("lane %d, step %d: flag %v", l, k, got)
			}
			if got {
				passed++
			} else {
				held++
			}
		}
	}
	if passed == 0 || held == 0 {
		t.Errorf("%d flags and %d without, so that the test shows nothing", passed, held)
	}
}

// TestGreatestPeaksOfNone: without marks all is zero.
func TestGreatestPeaksOfNone(t *testing.T) {
	top, at := Row{1}, Row{1}
	if GreatestPeaks(&top, &at, nil); top != (Row{}) || at != (Row{}) {
		t.Errorf("the greatest of none are %v at %v", top, at)
	}
}

// TestTurnFindsTurningPoints compares turning points with those of the closed form
// of a damped oscillator under ground acceleration that is a straight line, where
// they lie within the time that series are for.
//
// u(t) = p + q·t + e^(−ζφt)·(A·cos ωt + B·sin ωt), ω = φ·√(1 − ζ²); where q = 0 the
// velocity is zero at tan ωt = (ωB − ζφA)/(ωA + ζφB).
func TestTurnFindsTurningPoints(t *testing.T) {
	const seed, tries = 12, 200
	r := rand.New(rand.NewPCG(seed, 1))
	factors := make([]Row, MaxTerms)
	for k := range factors {
		for l := range Lanes {
			factors[k][l] = 1 / math.Gamma(float64(k+1))
		}
	}
	found := 0
	for range tries {
		var turn Turning
		var top, at Row
		for l := range Lanes {
			phase, damping := 0.2+r.Float64(), 0.5*r.Float64()
			if l%2 == 0 {
				damping = 0
			}
			p, a, when := r.NormFloat64(), 1+r.Float64(), 0.9*r.Float64()
			decay, omega := damping*phase, phase*math.Sqrt(1-damping*damping)
			// B such that the velocity is zero then.
			tan := math.Tan(omega * when)
			b := a * (decay + omega*tan) / (omega - decay*tan)
			turn.U[l], turn.V[l] = p+a, omega*b-decay*a
			turn.Force[l] = phase * phase * p
			turn.Linear[l], turn.Square[l] = 2*decay, phase*phase
			sin, cos := math.Sincos(omega * when)
			at[l], top[l] = when, p+math.Exp(-decay*when)*(a*cos+b*sin)
		}
		Turn(&turn, factors)
		for l := range Lanes {
			if math.Abs(turn.Move[l]) > 1e-5 {
				continue // not settled, as the caller sees
			}
			found++
			if math.Abs(turn.Time[l]-at[l]) > 1e-9 || math.Abs(turn.Top[l]-top[l]) > 1e-14*(math.Abs(top[l])+4) {
				t.Fatalf("seed %d, lane %d: u = %v at %v, want %v at %v", seed, l, turn.Top[l], turn.Time[l], top[l], at[l])
			}
		}
	}
	if found < tries*Lanes*9/10 {
		t.Errorf("settled %d times of %d", found, tries*Lanes)
	}
}

// TestTurnEnds: velocity and bend are those of the series' sum at t = 1.
func TestTurnEnds(t *testing.T) {
	c := newCase(13, 40)
	v := newVisit(c)
	v.run(c.ground)
	for l := range Lanes {
		velocity, bend := 0.0, 0.0
		for k := range len(v.factors) {
			velocity += float64(k) * v.turn.C[k][l]
			bend += float64(k*(k-1)) / 2 * v.turn.C[k][l]
		}
		for _, pair := range [][2]float64{{v.turn.Velocity[l], velocity}, {v.turn.Bend[l], bend}} {
			if math.Abs(pair[0]-pair[1]) > 1e-12*(1+math.Abs(pair[1])) {
				t.Errorf("lane %d: velocity and bend end at %v, want %v", l, pair[0], pair[1])
			}
		}
	}
}

// TestVisitRefuses: lengths that kernels could not keep to are a programmer's error.
func TestVisitRefuses(t *testing.T) {
	a, rows := make([]float64, 20), make([]Row, 16)
	for name, call := range map[string]func(){
		"rows that are not whole units": func() { Gather(rows[:9], a, new([Lanes]int)) },
		"rows beyond the samples":       func() { Gather(rows, a, &[Lanes]int{3: 5}) },
		"rows before the samples":       func() { Gather(rows, a, &[Lanes]int{3: -1}) },
		"one row too many":              func() { TraceEach(new(Slow), new(Mark), rows, rows[:15]) },
		"no steps beyond the end":       func() { MarchTrain(new(Train), new(Mark), new(Mark), a[:1]) },
		"too few terms":                 func() { Turn(new(Turning), rows[:4]) },
		"too many terms":                func() { Turn(new(Turning), make([]Row, MaxTerms+1)) },
	} {
		t.Run(name, func(t *testing.T) {
			defer func() {
				if recover() == nil {
					t.Error("no panic")
				}
			}()
			call()
		})
	}
}
