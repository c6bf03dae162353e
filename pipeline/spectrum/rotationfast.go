package spectrum

import (
	"math/bits"

	"swaybook/pipeline/internal/kernel"
)

// rotate puts RotD50 and RotD100 of the members into dst50 and dst100, in units
// of the motion.
func (g *fastGroup) rotate(r *rotation, dst50, dst100 []float64) {
	for l := range g.members {
		o := &g.members[l]
		lane := r.begin(l, o.index, o.phase, &o.ringing)
		lane.one, lane.cuts, lane.whole = &o.part, o.parts, newLine(o.phase, o.part.damping)
		r.displaced.Scale[l], r.displaced.Slope[l], r.displaced.Level[l] = 1/o.cube, o.turn.jump/o.cube, -o.phase/o.cube
		lane.part, lane.piece = newSpan(o.part.phase, o.part.damping, 1), bent
	}
	r.solve(g, r.blockNorms, dst50, dst100)
}

// limitPair is limit with the floor in place of best.
func (g *fastGroup) limitPair(r *rotation) {
	screen := r.pair[0].screen
	for l := range g.members {
		o := &g.members[l]
		screen.Limit[l] = float64(r.lane[l].floor * o.cube)
		screen.First[l], screen.Second[l] = o.phase, o.turn.jump
	}
}

// areSquares tells that peaks of marks are squares.
func (g *fastGroup) areSquares() bool { return true }

// trace marches a block of both motions again, for the lanes flagged, and returns
// its first step and the first after it.
func (g *fastGroup) trace(r *rotation, b int, flags uint32) (from, to int) {
	from, to = r.pair[0].block(b)
	for _, m := range r.pair {
		kernel.TraceFast(g.turn, &m.marks[b], m.bend[from:to], m.states[:to-from], flags)
	}
	return from, to
}

// sweep marches a block of both motions again and sweeps their samples.
func (g *fastGroup) sweep(r *rotation, b int) {
	from, to := g.trace(r, b, g.live())
	n := to - from
	for _, m := range r.pair {
		kernel.Displace(m.rows[:n], r.displaced, m.states[:n], m.a[from:to+1])
	}
	r.sweep.Add(&sweepCompass, r.pair[0].rows[:n], r.pair[1].rows[:n], 1)
}

// gather marches a block of both motions again and collects the parts of steps
// that can matter, for the lanes flagged.
func (g *fastGroup) gather(r *rotation, b int, flags uint32) {
	if flags == 0 {
		return
	}
	from, to := g.trace(r, b, flags)
	n := to - from
	stepFlags := r.pair[0].stepFlags[:n]
	g.setFence(r, flags)
	for k := range stepFlags {
		stepFlags[k] = flags
	}
	r.screenOrbits(from, stepFlags)
	for k := range stepFlags {
		for left := stepFlags[k]; left != 0; left &= left - 1 {
			g.gatherStep(r, bits.TrailingZeros32(left), from+k, k)
		}
	}
}

// setFence sets the region of free vibrations that, with the straight-line
// solution of a step, stay within the fence of a lane.
func (g *fastGroup) setFence(r *rotation, flags uint32) {
	for ; flags != 0; flags &= flags - 1 {
		l := bits.TrailingZeros32(flags)
		lane, o := &r.lane[l], &g.members[l]
		if lane.fenced {
			continue
		}
		lane.fenced = true
		r.setOrbits(l, o.cube, -o.phase, o.turn.jump)
	}
}

// gatherStep collects the parts of a step from row k.
func (g *fastGroup) gatherStep(r *rotation, l, sample, k int) {
	d, w, jump := r.displaced, &r.lane[l].whole, g.members[l].turn.jump
	var both [2]groundedStep
	for i, m := range r.pair {
		a, next := m.a[sample], m.a[sample+1]
		shift := float64(jump*(next-a)) - float64(g.members[l].phase*a)
		both[i] = groundedStep{
			u: float64(d.Scale[l] * (m.states[k].X[l] + shift)),
			v: float64(w.square * (m.states[k].Y[l] - (next - a))),
			a: a, next: next,
		}
	}
	r.lane[l].gatherStep(sample, both[0], both[1], r.stepNorms[sample].First)
}
