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
	cuts    int     // pieces that a step is cut into for series
	series  series  // of one piece
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
	cuts := int(math.Ceil(phase / seriesPhase))
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
		cuts:    cuts,
		series:  newSeries(phase/float64(cuts), damping),
		ringing: newRinging(damping),
	}
}

// marchFast takes one oscillator through steps with the given changes of slope
// at their ends, and returns the greatest y² + z² at their starts.
func marchFast(q *turn, s *state, bend []float64) float64 {
	yy, yz, zy, zz, jump := q.yy, q.yz, q.zy, q.zz, q.jump
	y, z := s.x, s.y
	var peak uint64
	for _, b := range bend {
		peak = max(peak, math.Float64bits(float64(y*y)+float64(z*z)))
		y, z = (float64(yy*y)+float64(yz*z))-float64(jump*b), (float64(zy*y)+float64(zz*z))+b
	}
	s.x, s.y = y, z
	return math.Float64frombits(peak)
}

// marchFastLanes is marchFast for four oscillators, the same operations each.
func marchFastLanes(q *[lanes]turn, s *[lanes]state, bend []float64, peaks *[lanes]float64) {
	y0, y1, y2, y3 := s[0].x, s[1].x, s[2].x, s[3].x
	z0, z1, z2, z3 := s[0].y, s[1].y, s[2].y, s[3].y
	var p0, p1, p2, p3 uint64
	for _, b := range bend {
		p0 = max(p0, math.Float64bits(float64(y0*y0)+float64(z0*z0)))
		p1 = max(p1, math.Float64bits(float64(y1*y1)+float64(z1*z1)))
		p2 = max(p2, math.Float64bits(float64(y2*y2)+float64(z2*z2)))
		p3 = max(p3, math.Float64bits(float64(y3*y3)+float64(z3*z3)))
		y0, z0 = (float64(q[0].yy*y0)+float64(q[0].yz*z0))-float64(q[0].jump*b), (float64(q[0].zy*y0)+float64(q[0].zz*z0))+b
		y1, z1 = (float64(q[1].yy*y1)+float64(q[1].yz*z1))-float64(q[1].jump*b), (float64(q[1].zy*y1)+float64(q[1].zz*z1))+b
		y2, z2 = (float64(q[2].yy*y2)+float64(q[2].yz*z2))-float64(q[2].jump*b), (float64(q[2].zy*y2)+float64(q[2].zz*z2))+b
		y3, z3 = (float64(q[3].yy*y3)+float64(q[3].yz*z3))-float64(q[3].jump*b), (float64(q[3].zy*y3)+float64(q[3].zz*z3))+b
	}
	s[0], s[1], s[2], s[3] = state{y0, z0}, state{y1, z1}, state{y2, z2}, state{y3, z3}
	for i, p := range [lanes]uint64{p0, p1, p2, p3} {
		peaks[i] = math.Float64frombits(p)
	}
}

// first returns the free vibration that, with the line of step 0, is rest.
func (o *fast) first(m *motion) state {
	slope := m.a[1] - m.a[0]
	return state{float64(o.phase*m.a[0]) - float64(o.turn.jump*slope), slope}
}

// solveFast marches one oscillator and returns its D in units of the motion.
func (m *motion) solveFast(o *fast) float64 {
	s := o.first(m)
	for b := range m.peak {
		from, to := m.block(b)
		k := &m.marks[b*lanes]
		k.start = s
		k.peak = marchFast(&o.turn, &s, m.bend[from:to])
	}
	return o.settle(m, 0, s)
}

// solveFastLanes does it for four, and puts their D into d.
func (m *motion) solveFastLanes(o []fast, d *[lanes]float64) {
	var q [lanes]turn
	var s [lanes]state
	for i := range q {
		q[i], s[i] = o[i].turn, o[i].first(m)
	}
	var peaks [lanes]float64
	for b := range m.peak {
		from, to := m.block(b)
		k := m.marks[b*lanes : (b+1)*lanes]
		for i := range k {
			k[i].start = s[i]
		}
		marchFastLanes(&q, &s, m.bend[from:to], &peaks)
		for i := range k {
			k[i].peak = peaks[i]
		}
	}
	for i := range d {
		d[i] = o[i].settle(m, i, s[i])
	}
}

// settle returns D from the marks of a lane and the state at the last sample,
// which is relative to the line of the last step, carried on.
func (o *fast) settle(m *motion, lane int, end state) float64 {
	best := m.refine(0,
		func(b int) float64 {
			return o.bound(o.line(m, b), m.marks[b*lanes+lane].peak)
		},
		func(best float64, b int) float64 {
			return o.search(best, m, b, m.marks[b*lanes+lane].start)
		})
	n := m.steps()
	slope := m.a[n] - m.a[n-1]
	u := o.displacement(end, m.a[n], slope)
	return o.ringing.peak(best, u, o.velocity(end, slope)/o.phase)
}

// line returns a bound on |φ³p| in the steps of a block.
func (o *fast) line(m *motion, b int) float64 {
	return float64(o.phase*m.peak[b]) + float64(o.turn.jump*m.slope[b])
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

// search marches a block again and looks into the steps that can beat best.
func (o *fast) search(best float64, m *motion, b int, s state) float64 {
	from, to := m.block(b)
	for k := from; k < to; k++ {
		a, next := m.a[k], m.a[k+1]
		slope := next - a
		shift := float64(o.turn.jump * slope)
		line := max(math.Abs(shift-float64(o.phase*a)), math.Abs(shift-float64(o.phase*next)))
		start := s
		square := marchFast(&o.turn, &s, m.bend[k:k+1])
		if o.bound(line, square) > best {
			best = o.follow(best, o.displacement(start, a, slope), o.velocity(start, slope), a, slope)
		}
	}
	return best
}

// follow takes one step in pieces short enough for their series.
func (o *fast) follow(best, u, v, a, slope float64) float64 {
	n := float64(o.cuts)
	square := 1 / float64(n*n)
	v /= n
	rise := slope / n * square
	for j := range o.cuts {
		at := (a + float64(slope*(float64(j)/n))) * square
		best, u, v = o.series.peak(best, u, v, at, rise)
	}
	return best
}
