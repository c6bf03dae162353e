package spectrum

// recurrence takes displacement u and velocity v from one sample to the next,
// time in steps:
//
//	u' = u + uu·u + uv·v + pu·a + qu·a'
//	v' = v + vu·u + vv·v + pv·a + qv·a'
//
// with a and a' the ground acceleration at the two samples. It holds the
// increments, not the matrix itself: where the step is short against the
// period, 1 + uu rounds away the digits of uu ≈ −(ω·dt)²/2 that fix the period.
type recurrence struct {
	uu, uv, vu, vv float64
	pu, qu, pv, qv float64
}

// difference is the same recurrence with the velocity eliminated. With w the
// change of u over the last step, and u and w in units of scale,
//
//	w' = w − loss·w − stiffness·u + a' + middle·a + oldest·a⁻
//	u' = u + w'
//
// where a⁻, a, a' are successive samples. It follows from the Cayley–Hamilton
// theorem with loss = 1 − det A and stiffness = det(A − I), A being the matrix
// of the recurrence. Written in changes like this it keeps the period's digits,
// as Reinsch's modification of Goertzel's algorithm does (J. Stoer and R.
// Bulirsch, Introduction to Numerical Analysis, §2.3).
type difference struct {
	loss, stiffness float64
	middle, oldest  float64
	scale           float64
	// pole is 1 − loss − stiffness, rounded once.
	pole float64
}

// responses are the exact responses at the end of one step, time in steps, of
// an oscillator with ω·dt = phase. With g the response to a unit initial
// velocity they are
//
//	ramp r = ∬g, step r' = ∫g, impulse g, and drop = 1 − g' = 2ζ·phase·g + phase²·r'.
//
// The last identity is the equation of motion of r', and makes every
// coefficient below a sum without cancellation at small phase.
type responses struct {
	ramp, step, impulse, drop double
	linear, square            double // 2ζ·phase and phase²
}

// seriesTerms is the number of terms of the Taylor series in respond. At its
// greatest phase of 1/4 the first term left out is below 0.25^20·20/23! = 7e-34
// of the first.
const seriesTerms = 20

// respond evaluates the responses for phase = ω·dt > 0 and 0 <= damping < 1. The
// coefficients formed from them are within 2e-15 of themselves for phases from
// 1e-9 to 7e3 (those that pass through zero, of a thousandth of their envelope),
// as the tests show against multiple precision. Cost: about 2 µs.
//
// The step is halved until the phase is at most 1/4, the series
//
//	r(t) = Σ eₖ, e₃ = t³/6, eₖ₊₁ = −(2ζ·phase·t·eₖ + (phase·t)²·eₖ₋₁/k)/(k+1)
//
// is summed, and the step is doubled back by composing the motion with itself.
func respond(phase, damping float64) responses {
	t := 1.0
	for phase*t > 0.25 {
		t /= 2
	}
	r := respondShort(phase*t, damping)
	// Back from time in units of t to time in steps; t is a power of two.
	r.impulse = r.impulse.times(t)
	r.step = r.step.times(t * t)
	r.ramp = r.ramp.times(t * t * t)
	r.linear = twoProduct(2*damping, phase)
	r.square = twoProduct(phase, phase)
	r.setDrop()
	for ; t < 1; t *= 2 {
		r.double(t)
	}
	return r
}

func respondShort(phase, damping float64) responses {
	linear, square := twoProduct(2*damping, phase), twoProduct(phase, phase)
	previous, term := double{}, double{1, 0}.over(6)
	var r responses
	for k := 3; k < 3+seriesTerms; k++ {
		n := float64(k)
		r.ramp = r.ramp.add(term)
		r.step = r.step.add(term.times(n))
		r.impulse = r.impulse.add(term.times(n * (n - 1)))
		next := linear.mul(term).add(square.mul(previous).over(n)).over(n + 1)
		previous, term = term, next.neg()
	}
	return r
}

func (r *responses) setDrop() {
	r.drop = r.linear.mul(r.impulse).add(r.square.mul(r.step))
}

// double takes the responses at time t to those at 2t. The state reached at t
// moves freely for another t, and the loading of the second half adds what the
// first half gave; a ramp also adds the step of height t that it has reached.
func (r *responses) double(t float64) {
	bend := r.square.mul(r.step)
	ramp := r.ramp.times(2).sub(bend.mul(r.ramp)).add(r.impulse.mul(r.step)).add(r.step.times(t))
	step := r.step.times(2).sub(bend.mul(r.step)).add(r.impulse.mul(r.impulse))
	impulse := r.impulse.mul(double{2, 0}.sub(bend).sub(r.drop))
	r.ramp, r.step, r.impulse = ramp, step, impulse
	r.setDrop()
}

func (r *responses) recurrence() recurrence {
	return recurrence{
		uu: -r.square.mul(r.step).hi,
		uv: r.impulse.hi,
		vu: -r.square.mul(r.impulse).hi,
		vv: -r.drop.hi,
		pu: r.ramp.sub(r.step).hi,
		qu: -r.ramp.hi,
		pv: r.step.sub(r.impulse).hi,
		qv: -r.step.hi,
	}
}

func (r *responses) difference() difference {
	bend := r.square.mul(r.step)
	stiffness := r.square.mul(r.drop.mul(r.step).add(r.impulse.mul(r.impulse)))
	loss := r.drop.add(bend).sub(stiffness)
	if r.linear.hi == 0 {
		loss = double{} // exactly, not to 106 bits: nothing is lost without damping
	}
	slope := double{1, 0}.sub(r.drop)
	middle := r.ramp.sub(r.step).sub(r.impulse.mul(r.step)).add(slope.mul(r.ramp))
	oldest := r.impulse.mul(r.step.sub(r.impulse)).add(slope.mul(r.step.sub(r.ramp)))
	return difference{
		loss:      loss.hi,
		pole:      double{1, 0}.sub(loss).sub(stiffness).hi,
		stiffness: stiffness.hi,
		middle:    -middle.hi / r.ramp.hi,
		oldest:    -oldest.hi / r.ramp.hi,
		scale:     -r.ramp.hi,
	}
}
