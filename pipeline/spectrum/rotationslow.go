package spectrum

import (
	"math"
	"math/bits"

	"swaybook/pipeline/internal/kernel"
)

// rotate puts RotD50 and RotD100 of the members into dst50 and dst100, in units
// of the motion.
func (g *slowGroup) rotate(r *rotation, dst50, dst100 []float64) {
	r.cut, r.loose = 0, 0
	for l := range g.members {
		g.begin(r, l)
	}
	r.levels = r.lanesByEvery(g.live())
	r.every = r.leastEvery()
	lines := r.blockNorms
	if g.stride != nil {
		lines = r.strideNorms[g.level]
	}
	r.solve(g, lines, dst50, dst100)
}

// closeness is what the ground and the spring may add between the ends of a
// piece of several steps, as a share of D.
const closeness = 0.004

// maxEvery is the greatest number of steps in a piece, 2 to the power of maxLevel
// and a divisor of blockSteps.
const (
	maxLevel = 4
	maxEvery = 1 << maxLevel
)

// begin chooses the pieces of a lane.
func (g *slowGroup) begin(r *rotation, l int) {
	o := &g.members[l]
	lane := r.begin(l, o.index, o.phase, &o.ringing)
	lane.unit = math.Abs(o.eq.scale)
	lane.one, lane.cuts = o, 1
	if o.parts > 1 {
		lane.one, lane.cuts = o.part, o.parts
	} else {
		lane.every = everyOf(o.phase, r.peak, max(r.first[o.index], r.second[o.index]))
	}
	lane.whole = newLine(o.phase, o.damping)
	lane.rows = newSpan(o.phase, o.damping, float64(lane.every))
	lane.part = newSpan(lane.one.phase, o.damping, 1)
	lane.piece = lane.rows
	if lane.cuts > 1 {
		lane.piece = bent
		r.cut |= 1 << l
	}
	if lane.isLoose() {
		r.loose |= 1 << l
		setVibration(r.vibration, l, o, &lane.whole)
	}
}

// setVibration sets what makes free vibrations about the straight-line solutions of
// steps (type line), with velocities over ω, of what an oscillator's rows hold.
func setVibration(q *kernel.Vibration, l int, o *slow, w *line) {
	scale, exact := o.eq.scale, &o.exact
	speed := float64(o.inverse * w.inverse)
	q.Scale[l], q.Level[l], q.Slope[l] = scale, w.square, -float64(w.square*w.lag)
	q.Carry[l], q.Change[l] = -float64(speed*exact.uu)*scale, float64(speed*scale)
	q.Push[l] = -float64(speed * (exact.pu + exact.qu))
	q.Bend[l] = float64(w.inverse*w.square) - float64(speed*exact.qu)
}

// everyOf returns a number of steps, a power of two, over which the bound of func
// bounds exceeds what it bounds by a share of at most closeness or so, where |u|
// is near to D.
func everyOf(phase, ground, d float64) int {
	share := (float64(phase*phase) + ground/d) / (8 * closeness) // of one step
	every := 1
	for every < maxEvery && float64(float64(4*every*every)*share) <= 1 {
		every *= 2
	}
	return every
}

// limitPair is limit with the floor in place of best.
func (g *slowGroup) limitPair(r *rotation) {
	m := r.pair[0]
	for l := range g.members {
		m.screen.Limit[l], m.screen.First[l] = g.limitOf(l, r.lane[l].floor)
	}
}

// areSquares tells that peaks of marks are not squares.
func (g *slowGroup) areSquares() bool { return false }

// traceBoth marches a block of both motions again, for the lanes flagged, and
// returns the first sample and their number.
func (g *slowGroup) traceBoth(r *rotation, b int, flags uint32) (from, rows int) {
	from, to := r.pair[0].block(b)
	rows = to - from + 1
	for _, m := range r.pair {
		g.trace(m, b, m.rows[:rows], flags)
	}
	return from, rows
}

// sweep marches a block of both motions again and sweeps their samples.
func (g *slowGroup) sweep(r *rotation, b int) {
	_, rows := g.traceBoth(r, b, g.live())
	r.sweep.Add(&sweepCompass, r.pair[0].rows[:rows], r.pair[1].rows[:rows], r.every)
}

// gather marches a block of both motions again and collects the pieces that can
// matter, for the lanes flagged.
func (g *slowGroup) gather(r *rotation, b int, flags uint32) {
	if flags == 0 {
		return
	}
	from, rows := g.traceBoth(r, b, flags)
	x, y, rowFlags := r.pair[0].rows[:rows], r.pair[1].rows[:rows], r.pair[0].rowFlags[:rows]
	g.setFence(r, flags, r.blockNorms[b].First)
	if rows <= blockSteps { // in a block that is not whole pieces are steps
		kernel.ScreenFence(r.fence, x, y, 1, rowFlags, flags)
		g.gatherPieces(r, from, rows, 1, flags)
		return
	}
	kernel.ScreenFence(r.fence, x, y, r.every, rowFlags, flags)
	for i, level := range r.levels {
		if chosen := flags & level; chosen != 0 {
			g.gatherPieces(r, from, rows, 1<<i, chosen)
		}
	}
}

// lanesByEvery flags the lanes whose pieces have 2ⁱ steps.
func (r *rotation) lanesByEvery(live uint32) (levels [maxLevel + 1]uint32) {
	for ; live != 0; live &= live - 1 {
		l := bits.TrailingZeros32(live)
		levels[bits.TrailingZeros(uint(r.lane[l].every))] |= 1 << l
	}
	return levels
}

// leastEvery returns the least number of steps in a piece.
func (r *rotation) leastEvery() int {
	for i, lanes := range r.levels {
		if lanes != 0 {
			return 1 << i
		}
	}
	return 1
}

// setFence sets the limits of lanes for a block with ground accelerations up to a.
func (g *slowGroup) setFence(r *rotation, flags uint32, a float64) {
	for ; flags != 0; flags &= flags - 1 {
		l := bits.TrailingZeros32(flags)
		lane := &r.lane[l]
		r.fence.Limit[l] = lane.within(&lane.rows, a)
		if lane.fenced {
			continue
		}
		lane.fenced = true
		scale := g.members[l].eq.scale
		for k := range lane.fence {
			x, y := lane.fence[k].normal()
			r.fence.Sides[k].X[l], r.fence.Sides[k].Y[l] = float64(scale*x), float64(scale*y)
		}
		if r.loose>>l&1 == 1 {
			w := &lane.whole
			r.setOrbits(l, 1, -w.square, float64(w.square*w.lag))
		}
	}
}

// gatherPieces collects the pieces of so many steps that are not within the fence.
func (g *slowGroup) gatherPieces(r *rotation, from, rows, every int, flags uint32) {
	if cut := flags & r.cut; cut != 0 {
		g.gatherSteps(r, from, rows, cut)
		flags &^= cut
	}
	x, y, rowFlags := r.pair[0].rows[:rows], r.pair[1].rows[:rows], r.pair[0].rowFlags[:rows]
	for k := 0; k+every < rows; k += every {
		for left := (rowFlags[k] | rowFlags[k+every]) & flags; left != 0; left &= left - 1 {
			l := bits.TrailingZeros32(left)
			scale, lane := g.members[l].eq.scale, &r.lane[l]
			lane.pieces = append(lane.pieces, piece{
				sample: from + k, every: every, bend: greatestLine(r.stepNorms[from+k : from+k+every]),
				x: float64(scale * x[k][l]), y: float64(scale * y[k][l]),
				xNext: float64(scale * x[k+1][l]), yNext: float64(scale * y[k+1][l]),
				xEnd: float64(scale * x[k+every][l]), yEnd: float64(scale * y[k+every][l])})
		}
	}
}

// gatherSteps collects the parts of steps that are not within the fence.
func (g *slowGroup) gatherSteps(r *rotation, from, rows int, flags uint32) {
	rowFlags, stepFlags := r.pair[0].rowFlags[:rows], r.pair[0].stepFlags[:rows-1]
	loose, some := flags&r.loose, uint32(0)
	for k := range stepFlags {
		stepFlags[k] = (rowFlags[k] | rowFlags[k+1]) & loose
		some |= stepFlags[k]
	}
	if some != 0 {
		for _, m := range r.pair {
			kernel.Vibrate(m.states[:rows-1], r.vibration, m.rows[:rows], m.a[from:from+rows], some)
		}
		r.screenOrbits(from, stepFlags)
	}
	for k := range stepFlags {
		for left := stepFlags[k] | (rowFlags[k]|rowFlags[k+1])&flags&^loose; left != 0; left &= left - 1 {
			g.gatherStep(r, bits.TrailingZeros32(left), from+k, k)
		}
	}
}

// greatestLine returns the greatest first number of lines, none negative.
func greatestLine(lines []kernel.Line) (top float64) {
	for i := range lines {
		top = max(top, lines[i].First)
	}
	return top
}

// gatherStep collects the parts of a step from row k.
func (g *slowGroup) gatherStep(r *rotation, l, sample, k int) {
	o := &g.members[l]
	var both [2]groundedStep
	for i, m := range r.pair {
		u, end := float64(o.eq.scale*m.rows[k][l]), float64(o.eq.scale*m.rows[k+1][l])
		a, next := m.a[sample], m.a[sample+1]
		both[i] = groundedStep{u: u, v: o.velocity(u, end-u, a, next), a: a, next: next}
	}
	r.lane[l].gatherStep(sample, both[0], both[1], r.stepNorms[sample].First)
}
