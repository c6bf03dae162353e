package spectrum

import "math"

// slow is an oscillator whose period is long against the step. It marches on
// the difference equation, with displacement in units of its scale. The march
// of a block keeps the greatest sampled |u|.
type slow struct {
	index   int
	phase   float64
	step    recurrence
	eq      difference
	series  series
	ringing ringing
	reach   float64 // α: the displacement that unit ground acceleration can add between samples
	growth  float64 // β: what between samples multiplies
	tail    int     // steps of free ringing for sampled maxima, 0 for exact ones
}

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

// newSlow returns the exact slow form, or false if the fast one is called for.
func newSlow(index int, phase, damping float64) (slow, bool) {
	reach, growth, ok := bounds(phase, damping)
	if !ok {
		return slow{}, false
	}
	r := respond(phase, damping)
	return slow{
		index: index, phase: phase,
		step: r.recurrence(), eq: r.difference(),
		series: newSeries(phase, damping), ringing: newRinging(damping),
		reach: reach, growth: growth,
	}, true
}

// newNewmark returns the slow form of the method of average acceleration.
func newNewmark(index int, phase, damping float64) slow {
	step, eq := newmarkAverage(phase, damping)
	// The undamped phase per step is 2·atan(φ/2) >= φ/(1 + φ/2), so one period
	// takes at most 2π/φ + π steps. With damping later peaks are lower.
	tail := int(math.Ceil(2*math.Pi/phase)) + 4
	return slow{index: index, phase: phase, step: step, eq: eq, tail: tail}
}

// marchSlow takes one oscillator through the samples a[2:] from the state at
// a[1], and returns the greatest |u| of the steps.
func marchSlow(q *difference, s *state, a []float64) float64 {
	loss, stiffness, middle, oldest := q.loss, q.stiffness, q.middle, q.oldest
	u, w := s.x, s.y
	var peak uint64
	for i := 2; i < len(a); i++ {
		f := (a[i] + float64(middle*a[i-1])) + float64(oldest*a[i-2])
		w += (f - float64(loss*w)) - float64(stiffness*u)
		u += w
		peak = max(peak, math.Float64bits(u)<<1)
	}
	s.x, s.y = u, w
	return math.Float64frombits(peak >> 1)
}

// marchSlowLanes is marchSlow for four oscillators, the same operations each.
// Magnitudes are compared as integers, without the sign bit: it leaves the
// floating-point units to the recurrence.
func marchSlowLanes(q *[lanes]difference, s *[lanes]state, a []float64, peaks *[lanes]float64) {
	u0, u1, u2, u3 := s[0].x, s[1].x, s[2].x, s[3].x
	w0, w1, w2, w3 := s[0].y, s[1].y, s[2].y, s[3].y
	var p0, p1, p2, p3 uint64
	x, y := a[0], a[1]
	for _, z := range a[2:] {
		f0 := (z + float64(q[0].middle*y)) + float64(q[0].oldest*x)
		f1 := (z + float64(q[1].middle*y)) + float64(q[1].oldest*x)
		f2 := (z + float64(q[2].middle*y)) + float64(q[2].oldest*x)
		f3 := (z + float64(q[3].middle*y)) + float64(q[3].oldest*x)
		x, y = y, z
		w0 += (f0 - float64(q[0].loss*w0)) - float64(q[0].stiffness*u0)
		w1 += (f1 - float64(q[1].loss*w1)) - float64(q[1].stiffness*u1)
		w2 += (f2 - float64(q[2].loss*w2)) - float64(q[2].stiffness*u2)
		w3 += (f3 - float64(q[3].loss*w3)) - float64(q[3].stiffness*u3)
		u0 += w0
		u1 += w1
		u2 += w2
		u3 += w3
		p0 = max(p0, math.Float64bits(u0)<<1)
		p1 = max(p1, math.Float64bits(u1)<<1)
		p2 = max(p2, math.Float64bits(u2)<<1)
		p3 = max(p3, math.Float64bits(u3)<<1)
	}
	s[0], s[1], s[2], s[3] = state{u0, w0}, state{u1, w1}, state{u2, w2}, state{u3, w3}
	for i, p := range [lanes]uint64{p0, p1, p2, p3} {
		peaks[i] = math.Float64frombits(p >> 1)
	}
}

// first returns the state at sample 1. The oscillator is at rest at sample 0,
// and step 0 is taken by itself because the difference equation needs two
// samples before the next.
func (o *slow) first(m *motion) state {
	u := (float64(o.step.pu*m.a[0]) + float64(o.step.qu*m.a[1])) / o.eq.scale
	return state{u, u}
}

// samples returns the samples that the march of a block needs: from the one
// before the start of its first step to the end of its last. Block 0 starts at
// step 1.
func (o *slow) samples(m *motion, b int) []float64 {
	from, to := m.block(b)
	return m.a[max(from, 1)-1 : to+1]
}

// solveSlow marches one oscillator and returns its D in units of the motion.
func (m *motion) solveSlow(o *slow) float64 {
	s := o.first(m)
	for b := range m.peak {
		k := &m.marks[b*lanes]
		k.start = s
		k.peak = marchSlow(&o.eq, &s, o.samples(m, b))
	}
	return o.settle(m, 0, s)
}

// solveSlowLanes does it for four, and puts their D into d.
func (m *motion) solveSlowLanes(o []slow, d *[lanes]float64) {
	var q [lanes]difference
	var s [lanes]state
	for i := range q {
		q[i], s[i] = o[i].eq, o[i].first(m)
	}
	var peaks [lanes]float64
	for b := range m.peak {
		k := m.marks[b*lanes : (b+1)*lanes]
		for i := range k {
			k[i].start = s[i]
		}
		marchSlowLanes(&q, &s, o[0].samples(m, b), &peaks)
		for i := range k {
			k[i].peak = peaks[i]
		}
	}
	for i := range d {
		d[i] = o[i].settle(m, i, s[i])
	}
}

// settle returns D from the marks of a lane and the state at the last sample.
func (o *slow) settle(m *motion, lane int, end state) float64 {
	scale := math.Abs(o.eq.scale)
	u1 := float64(scale * math.Abs(o.first(m).x))
	best := u1
	for b := range m.peak {
		best = max(best, float64(scale*m.marks[b*lanes+lane].peak))
	}
	if o.tail > 0 {
		return o.ring(best, o.ending(m, end))
	}
	if o.bound(u1, math.Abs(m.a[0]), math.Abs(m.a[1])) > best {
		best, _, _ = o.series.peak(best, 0, 0, m.a[0], m.a[1]-m.a[0])
	}
	best = m.refine(best,
		func(b int) float64 {
			k := &m.marks[b*lanes+lane]
			return o.bound(float64(scale*max(math.Abs(k.start.x), k.peak)), m.peak[b], 0)
		},
		func(best float64, b int) float64 {
			return o.search(best, m, b, m.marks[b*lanes+lane].start)
		})
	last := o.ending(m, end)
	return o.ringing.peak(best, last.x, last.y/o.phase)
}

// bound is the bound of func bounds for |u| <= u at the samples and the greater
// of two ground accelerations.
func (o *slow) bound(u, a, b float64) float64 {
	return o.growth * (u + float64(o.reach*max(a, b)))
}

// search marches a block again and looks into the steps that can beat best.
func (o *slow) search(best float64, m *motion, b int, s state) float64 {
	from, to := m.block(b)
	scale := math.Abs(o.eq.scale)
	for k := max(from, 1); k < to; k++ {
		before := s
		marchSlow(&o.eq, &s, m.a[k-1:k+2])
		a, next := m.a[k], m.a[k+1]
		ends := float64(scale * max(math.Abs(before.x), math.Abs(s.x)))
		if o.bound(ends, math.Abs(a), math.Abs(next)) <= best {
			continue
		}
		u := float64(o.eq.scale * before.x)
		v := o.velocity(u, float64(o.eq.scale*s.y), a, next)
		best, _, _ = o.series.peak(best, u, v, a, next-a)
	}
	return best
}

// velocity returns the velocity at a sample from the displacement u there and
// its change to the next sample.
func (o *slow) velocity(u, change, a, next float64) float64 {
	r := &o.step
	forced := float64(r.pu*a) + float64(r.qu*next)
	return (change - (float64(r.uu*u) + forced)) / r.uv
}

// ending returns displacement and velocity at the last sample.
func (o *slow) ending(m *motion, end state) state {
	n, r := m.steps(), &o.step
	a, next := m.a[n-1], m.a[n]
	u := float64(o.eq.scale * (end.x - end.y))
	v := o.velocity(u, float64(o.eq.scale*end.y), a, next)
	forced := float64(r.pv*a) + float64(r.qv*next)
	return state{float64(o.eq.scale * end.x), v + (float64(r.vu*u) + float64(r.vv*v) + forced)}
}

// ring follows the free ringing of Newmark's method among samples. The method
// never gains energy, so that |u| stays within √(u² + v²/φ²).
func (o *slow) ring(best float64, s state) float64 {
	if reach(s.x, s.y/o.phase) <= best {
		return best
	}
	r := &o.step
	for range o.tail {
		u := s.x + (float64(r.uu*s.x) + float64(r.uv*s.y))
		s.y += float64(r.vu*s.x) + float64(r.vv*s.y)
		s.x = u
		best = max(best, math.Abs(u))
	}
	return best
}
