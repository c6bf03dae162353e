package spectrum

import "math"

// slow is an oscillator whose period is long against the step. It marches on
// the difference equation or its train (train.go), with displacement in units of
// its scale.
type slow struct {
	index   int
	phase   float64
	damping float64
	exact   recurrence
	inverse float64 // 1/exact.uv
	eq      difference
	series  series
	ringing ringing
	reach   float64 // α: the displacement that unit ground acceleration can add between samples
	growth  float64 // β: what between samples multiplies
	parts   int     // those that rotations cut a step into
	part    *slow   // the oscillator for them, if more than one
	tail    int     // steps of free ringing for sampled maxima, 0 for exact ones
	norm    energy  // of such ringing
}

// state is the pair of numbers that a march carries per oscillator.
type state struct{ x, y float64 }

// maxGrowth is the greatest β of a slow oscillator, period about 5 steps. Beyond
// it the bound lets too many blocks through; 1.25 was the best of 1.12, 1.25 and
// 1.4 on the default grid (BenchmarkSD), if by little.
const maxGrowth = 1.25

// bounds returns α and β of the bound on |u| within a step,
//
//	max|u| <= β·(m + α·max|a|),  α = 1/(8(1 − ζφ)),  β = 1/(1 − φ²α),  φ = ω·dt,
//
// where m is the greater |u| at its ends. Let |u| have its greatest value U in
// the step at an inner time t*, where the velocity is zero, and let s be the
// nearer end, at most half a step away. Between s and t*, with M the greatest
// |ü| there, |u̇| <= M/2, so that the equation of motion gives
// M <= max|a| + 2ζφ·M/2 + φ²U, and Taylor's theorem about t* gives
// U <= |u(s)| + M/8. Eliminate M.
//
// ok tells whether the bound holds and is tight enough to be used.
func bounds(phase, damping float64) (reach, growth float64, ok bool) {
	rest := 1 - float64(damping*phase)
	if !(rest > 0.5) {
		return 0, 0, false
	}
	reach = 1 / (8 * rest)
	growth = 1 / (1 - float64(float64(phase*phase)*reach))
	return reach, growth, growth > 0 && growth <= maxGrowth
}

// Oscillators of so little damping ring on at nearly the same amplitude, so that
// at phases above freePhase, where the bound on a step is loose, it lets all their
// peaks through: their free vibration (type fast) shows best that it grows no more.
const freeDamping = 0.005

const freePhase = 0.62

// newSlow returns the exact slow form, or false if the fast one is called for.
func newSlow(index int, phase, damping float64) (slow, bool) {
	reach, growth, ok := bounds(phase, damping)
	if !ok || damping < freeDamping && phase > freePhase {
		return slow{}, false
	}
	r := respond(phase, damping)
	o := slow{
		index: index, phase: phase, damping: damping,
		exact: r.recurrence(), inverse: 1 / r.impulse.hi, eq: r.difference(),
		series: newSeries(phase, damping), ringing: newRinging(damping),
		reach: reach, growth: growth, parts: partsOf(phase, damping),
	}
	if o.parts > 1 {
		part := newPiece(phase/float64(o.parts), damping)
		o.part = &part
	}
	return o, true
}

// first returns the state at sample 1. The oscillator is at rest at sample 0,
// and step 0 is taken by itself because the difference equation needs two
// samples before the next.
func (o *slow) first(m *motion) state {
	u := (float64(o.exact.pu*m.a[0]) + float64(o.exact.qu*m.a[1])) / o.eq.scale
	return state{u, u}
}

// slowSamples returns the samples that the march of a block needs: from the one
// before the start of its first step to the end of its last. Block 0 starts at
// step 1.
func (m *motion) slowSamples(b int) []float64 {
	from, to := m.block(b)
	return m.a[max(from, 1)-1 : to+1]
}

// bound is the bound of func bounds for |u| <= u at the samples and the greater
// of two ground accelerations.
func (o *slow) bound(u, a, b float64) float64 {
	return o.growth * (u + float64(o.reach*max(a, b)))
}

// step returns the greater of best and the greatest |u| of the step from u under
// ground acceleration a to end under next.
//
// The relative acceleration ü of a step is a free vibration, so that with M =
// β·max|ü| of the step's ends, |ü| stays within M (func bounds with a = 0). u
// departs from its chord by at most M·s(1 − s)/2 at part s of the step. |u| thus
// stays within its ends if the chord is steeper than M/2, and else exceeds the
// greater end by at most M/2·(1/2 − |end − u|/M)².
func (o *slow) step(best, u, end, a, next float64) float64 {
	v := o.velocity(u, end-u, a, next)
	return o.within(best, u, v, end, o.arrival(u, v, a, next), a, next)
}

// within is step with the velocities at both ends given.
func (o *slow) within(best, u, v, end, vEnd, a, next float64) float64 {
	w := -math.FMA(o.series.linear, v, math.FMA(o.series.square, u, a))
	wEnd := -math.FMA(o.series.linear, vEnd, math.FMA(o.series.square, end, next))
	best = max(best, math.Abs(u), math.Abs(end))
	curve := float64(o.growth * max(math.Abs(w), math.Abs(wEnd)))
	spare := float64(curve*0.5) - math.Abs(end-u)
	if spare <= 0 {
		return best
	}
	over := best - max(math.Abs(u), math.Abs(end))
	if float64(spare*spare) <= float64(float64(2*curve)*over) {
		return best
	}
	turns, bends := opposite(v, vEnd), opposite(w, wEnd)
	if !turns && !bends {
		return best // ü has no zero (see peak), so that the velocity has none either
	}
	if bends {
		best, _, _ = o.series.peak(best, u, v, a, next-a)
		return best
	}
	h := newHermite(v, w, vEnd, wEnd)
	t := h.rest(vEnd)
	if h.reach(u, t)+float64(o.fourth(w, wEnd, curve)*hermiteError) <= best {
		return best
	}
	var p polynomial
	o.series.expand(&p, u, v, a, next-a)
	_, top := p.rest(t, 0, 1, vEnd)
	return max(best, math.Abs(top))
}

// fourth returns a bound on the fourth derivative of the velocity in a step, with
// ü from w to wEnd at its ends and |ü| <= curve. ü is a free vibration. Its first
// derivative differs from its chord's by at most half the second, K, so that
//
//	K·(1 − ζφ) <= 2ζφ·|wEnd − w| + φ²·curve,
//
// and the third is 2ζφ times the second and φ² times the first.
func (o *slow) fourth(w, wEnd, curve float64) float64 {
	linear, square, chord := o.series.linear, o.series.square, math.Abs(wEnd-w)
	k := (float64(linear*chord) + float64(square*curve)) / (1 - float64(linear*0.5))
	return float64(linear*k) + float64(square*(chord+float64(k*0.5)))
}

// velocity returns the velocity at a sample from the displacement u there and
// its change to the next sample.
func (o *slow) velocity(u, change, a, next float64) float64 {
	r := &o.exact
	forced := float64(r.pu*a) + float64(r.qu*next)
	return float64(o.inverse * (change - (float64(r.uu*u) + forced)))
}

// change returns the change of displacement over a step from displacement u and
// velocity v under ground acceleration from a to next.
func (o *slow) change(u, v, a, next float64) float64 {
	r := &o.exact
	return (float64(r.uu*u) + float64(r.uv*v)) + (float64(r.pu*a) + float64(r.qu*next))
}

// arrival returns the velocity at the next sample from displacement u and
// velocity v at this one.
func (o *slow) arrival(u, v, a, next float64) float64 {
	r := &o.exact
	forced := float64(r.pv*a) + float64(r.qv*next)
	return v + (float64(r.vu*u) + float64(r.vv*v) + forced)
}

// ending returns displacement and velocity at the last sample.
func (o *slow) ending(m *motion, end state) state {
	n := m.steps()
	a, next := m.a[n-1], m.a[n]
	u := float64(o.eq.scale * (end.x - end.y))
	v := o.velocity(u, float64(o.eq.scale*end.y), a, next)
	return state{float64(o.eq.scale * end.x), o.arrival(u, v, a, next)}
}
