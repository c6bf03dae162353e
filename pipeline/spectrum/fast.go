package spectrum

import "math"

// fast is an oscillator whose period is short against the step. In a step in
// which the ground acceleration is a + d·t, t in steps and φ = ω·dt, a straight
// line solves the equation of motion,
//
//	φ³·p(t) = −φ·(a + d·t) + 2ζ·d,
//
// and u − p is a free vibration y, with z its velocity over φ. Both march in
// units of φ⁻³, in which a change of slope at a sample changes y by −2ζ and z by
// 1 times that change. The march of a block keeps the greatest y² + z².
//
// Where the period is long against the step u is a small difference of p and y;
// hence the slow form.
type fast struct {
	index   int
	phase   float64
	turn    turn
	cube    float64 // φ³
	curve   float64 // (1 + 2ζ)·φ²
	cuts    int     // pieces that a step is cut into for series
	piece   slow    // the same oscillator, a piece being its step
	parts   int     // those that rotations cut it into
	part    slow    // and the oscillator for them
	ringing ringing
}

// turn takes the free vibration (y, z) through one step and over the change of
// slope at its end:
//
//	y' = yy·y + yz·z − jump·bend
//	z' = zy·y + zz·z + bend
type turn struct{ yy, yz, zy, zz, jump float64 }

func newFast(index int, phase, damping float64) fast {
	r := respond(phase, damping)
	one := double{1, 0}
	cuts := cutsOf(phase, damping)
	return fast{
		index: index, phase: phase,
		turn: turn{
			yy:   one.sub(r.square.mul(r.step)).hi,
			yz:   r.impulse.times(phase).hi,
			zy:   -r.impulse.times(phase).hi,
			zz:   one.sub(r.drop).hi,
			jump: 2 * damping,
		},
		cube:    float64(phase*phase) * phase,
		curve:   (1 + float64(2*damping)) * float64(phase*phase),
		cuts:    cuts,
		piece:   newPiece(phase/float64(cuts), damping),
		parts:   partsOf(phase, damping),
		part:    newPiece(phase/float64(partsOf(phase, damping)), damping),
		ringing: newRinging(damping),
	}
}

// first returns the free vibration that, with the line of step 0, is rest.
func (o *fast) first(m *motion) state {
	slope := m.a[1] - m.a[0]
	return state{float64(o.phase*m.a[0]) - float64(o.turn.jump*slope), slope}
}

// bound returns a bound on |u| in steps in which |φ³p| <= line and y² + z² is at
// most square at their starts: damping only takes energy away, so that |y| stays
// within √square.
func (o *fast) bound(line, square float64) float64 {
	return (line + math.Sqrt(square)) / o.cube
}

func (o *fast) displacement(s state, a, slope float64) float64 {
	return (s.x + (float64(o.turn.jump*slope) - float64(o.phase*a))) / o.cube
}

func (o *fast) velocity(s state, slope float64) float64 {
	return (s.y - slope) / float64(o.phase*o.phase)
}

// step returns the greater of best and the greatest |u| of the step from sample
// a to next, from the free vibration s.
//
// It looks into the step only if a bound on |u| exceeds best. The straight line
// is within its ends. y is within its ends too unless z changes sign, and then
// goes to one side only, up to √(y² + z²), if the phase is less than π; else to
// both. The other bound is that of a slow oscillator's step, with |ü| <= (1 +
// 2ζ)·φ²·√(y² + z²) in units of y.
func (o *fast) step(best float64, s state, a, next float64) float64 {
	slope := next - a
	shift := float64(o.turn.jump * slope)
	p, pEnd := shift-float64(o.phase*a), shift-float64(o.phase*next)
	y := float64(o.turn.yy*s.x) + float64(o.turn.yz*s.y)
	z := float64(o.turn.zy*s.x) + float64(o.turn.zz*s.y)
	least, most, size := min(s.x, y), max(s.x, y), reach(s.x, s.y)
	switch {
	case o.phase >= math.Pi:
		least, most = -size, size
	case s.y > 0 && z <= 0:
		most = size
	case s.y < 0 && z >= 0:
		least = -size
	}
	limit := float64(best * o.cube)
	if max(max(p, pEnd)+most, -(min(p, pEnd)+least)) <= limit {
		return best
	}
	u, end := p+s.x, pEnd+y
	curve := float64(o.curve * size)
	part := max(0, 0.5-math.Abs(end-u)/curve)
	if max(math.Abs(u), math.Abs(end))+float64(float64(curve*0.5)*float64(part*part)) <= limit {
		return best
	}
	return o.follow(best, o.displacement(s, a, slope), o.velocity(s, slope), a, slope)
}

// cutsOf returns into how many pieces a step is cut: phases of at most
// seriesPhase, and of less than 1/(2ζ), where func bounds holds.
func cutsOf(phase, damping float64) int {
	return int(math.Ceil(phase * max(1/seriesPhase, 2.01*damping)))
}

// partPhase is the greatest phase of the parts that rotations cut steps into,
// unless there were more than maxParts: the shorter they are, the closer bounds on
// them, and the more there are.
const (
	partPhase = 0.22
	maxParts  = 24
)

func partsOf(phase, damping float64) int {
	return max(cutsOf(phase, damping), min(int(math.Ceil(phase/partPhase)), maxParts))
}

// newPiece returns what follow needs of an oscillator for steps of the given
// phase, such as cutsOf gives.
func newPiece(phase, damping float64) slow {
	r := respond(phase, damping)
	reach, growth, _ := bounds(phase, damping)
	return slow{
		phase: phase, damping: damping, exact: r.recurrence(), inverse: 1 / r.impulse.hi,
		series: newSeries(phase, damping), reach: reach, growth: growth,
	}
}

// follow takes one step in pieces short enough for their series.
func (o *fast) follow(best, u, v, a, slope float64) float64 {
	n := float64(o.cuts)
	square := 1 / float64(n*n)
	v /= n
	rise := float64(slope / n * square)
	for j := range o.cuts {
		at := float64((a + float64(slope*(float64(j)/n))) * square)
		next := at + rise
		end := u + o.piece.change(u, v, at, next)
		vEnd := o.piece.arrival(u, v, at, next)
		best = o.piece.within(best, u, v, end, vEnd, at, next)
		u, v = end, vEnd
	}
	return best
}
