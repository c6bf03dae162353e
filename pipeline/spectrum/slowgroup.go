package spectrum

import (
	"math"
	"math/bits"

	"swaybook/pipeline/internal/kernel"
)

// slowGroup is a number of slow oscillators, one to a lane. Lanes without one hold
// numbers of no account.
//
// With a stride, the marks of all blocks but the last hold displacement and
// velocity, and their peaks |u| between strides; the last block is marched step
// by step. With a train, marks are those of train.go.
type slowGroup struct {
	members []slow
	eq      *kernel.Slow
	train   *kernel.Train      // nil for Newmark's methods
	screen  *kernel.StepScreen // all but Best, per unit of the ground acceleration
	factors []kernel.Row       // of series, as for kernel.Turn
	stride  *kernel.Stride     // nil for steps
	level   int                // of strides
}

// newSlowGroups splits a list into groups of as many as there are lanes.
func newSlowGroups(list []slow) []slowGroup {
	var groups []slowGroup
	for len(list) > 0 {
		n := min(lanes, len(list))
		g := slowGroup{members: list[:n:n], eq: new(kernel.Slow), screen: new(kernel.StepScreen)}
		for l := range g.members {
			q := &g.members[l].eq
			g.eq.Decay[l], g.eq.Stiffness[l] = 1-q.loss, q.stiffness
			g.eq.Middle[l], g.eq.Oldest[l] = q.middle, q.oldest
		}
		if list[0].tail == 0 {
			g.train = newTrain(g.members)
		}
		g.screenSteps()
		g.factors = factorsOf(g.members)
		groups, list = append(groups, g), list[n:]
	}
	return groups
}

// newStrideGroups does so for oscillators of one of strides.
func newStrideGroups(list []slow, level int) []slowGroup {
	groups := newSlowGroups(list)
	for i := range groups {
		g := &groups[i]
		g.train, g.stride, g.level = nil, new(kernel.Stride), level
		for l := range g.members {
			o := &g.members[l]
			setStride(g.stride, l, o.phase, o.damping, strides[level])
		}
	}
	return groups
}

// live flags the lanes of members.
func (g *slowGroup) live() uint32 { return ^uint32(0) >> (lanes - len(g.members)) }

// unit returns the unit of the peaks of a lane that are samples of u, 0 if none is.
func (g *slowGroup) unit(l int) float64 {
	switch {
	case g.stride != nil:
		return 1
	case g.train != nil:
		return 0
	}
	return math.Abs(g.members[l].eq.scale)
}

// solve puts the D of the members into dst, in units of the motion.
func (g *slowGroup) solve(dst []float64, m *motion) {
	g.march(m)
	g.sampled(m)
	if g.members[0].tail == 0 {
		g.refine(m)
	}
	for l := range g.members {
		o := &g.members[l]
		if o.tail > 0 {
			dst[o.index] = o.ring(m, m.best[l], m.final(l))
			continue
		}
		last := g.last(m, l)
		dst[o.index] = o.ringing.peak(m.best[l], last.x, last.y/o.phase)
	}
}

// last returns displacement and velocity at the last sample.
func (g *slowGroup) last(m *motion, l int) state {
	if g.train != nil {
		return g.trainEnd(m, l)
	}
	return g.members[l].ending(m, m.final(l))
}

// march sets the marks of all blocks.
func (g *slowGroup) march(m *motion) {
	switch {
	case g.stride != nil:
		g.marchStrides(m)
		return
	case g.train != nil:
		g.marchTrain(m)
		return
	}
	start := &m.marks[0]
	start.X, start.Y = kernel.Row{}, kernel.Row{}
	for l := range g.members {
		s := g.members[l].first(m)
		start.X[l], start.Y[l] = s.x, s.y
	}
	for b := range m.blocks() {
		kernel.MarchSlow(g.eq, &m.marks[b], &m.marks[b+1], m.slowSamples(b))
	}
}

func (g *slowGroup) marchStrides(m *motion) {
	start := &m.marks[0]
	start.X, start.Y = kernel.Row{}, kernel.Row{}
	inputs, n := m.strides[g.level].inputs, blockSteps/strides[g.level]
	last := m.blocks() - 1
	for b := range last {
		kernel.MarchStride(g.stride, &m.marks[b], &m.marks[b+1], inputs[b*n:(b+1)*n])
	}
	mark := &m.marks[last]
	from, to := m.block(last)
	m.start.X, m.start.Y = kernel.Row{}, kernel.Row{}
	for l := range g.members {
		m.start.X[l], m.start.Y[l] = g.members[l].restart(mark.X[l], mark.Y[l], m.a[from], m.a[from+1])
	}
	kernel.MarchSlow(g.eq, m.start, &m.marks[last+1], m.a[from:to+1])
	for l := range g.members {
		scale := math.Abs(g.members[l].eq.scale)
		mark.Peak[l] = max(math.Abs(mark.X[l]), float64(scale*m.start.Peak[l]))
	}
	for l := len(g.members); l < lanes; l++ {
		mark.Peak[l] = 0
	}
}

// restart returns the state of the difference equation after a step from
// displacement u and velocity v, under ground acceleration a and next.
func (o *slow) restart(u, v, a, next float64) (x, y float64) {
	change := o.change(u, v, a, next)
	return (u + change) / o.eq.scale, change / o.eq.scale
}

// sampled sets best to the greatest |u| at samples, if peaks are such.
func (g *slowGroup) sampled(m *motion) {
	m.findTops()
	for l := range g.members {
		m.best[l] = float64(g.unit(l) * m.top[l])
	}
}

// refine raises best to the greatest |u| of the steps, beginning with the block
// of each lane's greatest sample, which usually settles the others.
func (g *slowGroup) refine(m *motion) {
	clear(m.done)
	for l := range g.members {
		b := g.topBlock(m, l)
		m.done[b] |= 1 << l
		g.add(m, l, b)
	}
	g.visit(m, true)
	*m.screen = kernel.Screen{}
	g.limit(m)
	lines := m.blockLines
	if g.stride != nil {
		lines = m.strides[g.level].lines
	}
	kernel.ScreenPeaks(m.screen, m.marks[:m.blocks()], lines, m.flags)
	for b, flags := range m.flags {
		for left := flags & g.live() &^ m.done[b]; left != 0; left &= left - 1 {
			if g.add(m, bits.TrailingZeros32(left), b); m.slowVisits.n == lanes {
				g.visit(m, false)
			}
		}
	}
	g.visit(m, false)
}

// topBlock returns the block of the greatest sample of a lane. The last sample of
// a block is the first of the next: if it is the greatest, |u| goes on to grow in
// the one or the other.
func (g *slowGroup) topBlock(m *motion, l int) int {
	b := int(m.at[l])
	if next := &m.marks[b+1]; b+1 < m.blocks() && next.Peak[l] == m.top[l] && float64(next.X[l]*next.Y[l]) > 0 {
		return b + 1
	}
	return b
}

// limit sets the screen so that a peak passes if by its bound |u| can exceed best.
func (g *slowGroup) limit(m *motion) {
	for l := range g.members {
		m.screen.Limit[l], m.screen.First[l] = g.limitOf(l, m.best[l])
	}
}

// limitOf returns the limit of a peak beyond which, by func strideBound or
// trainBound, |u| can exceed best, and what of a block's line comes off it.
func (g *slowGroup) limitOf(l int, best float64) (limit, first float64) {
	o := &g.members[l]
	if g.stride != nil {
		over := float64(o.phase * float64(strides[g.level]))
		return float64(best * strideBound(over, o.damping)), 1
	}
	return best / o.trainBound(), 0
}

// screenSteps sets what screens steps but best: |ü| within a step is at most M
// with
//
//	M·(1 − ζφ − φ²/8) = max|a| + 2ζφ·|end − u| + φ²·max(|u|, |end|),
//
// because |u̇| stays within |end − u| + M/2 and |u| within M/8 of its greater end.
func (g *slowGroup) screenSteps() {
	for l := range g.members {
		o := &g.members[l]
		share, curve, slope := curvature(o.series.linear, o.series.square)
		g.screen.Force[l] = share / math.Abs(o.eq.scale)
		g.screen.Curve[l], g.screen.Slope[l] = curve, slope
	}
}

// curvature returns what M is made of, per unit of the ground acceleration, of the
// displacement and of its change, from 2ζφ and φ².
func curvature(linear, square float64) (force, curve, slope float64) {
	share := 1 / ((1 - float64(linear*0.5)) - float64(square*0.125))
	return share, float64(share * square), float64(share * linear)
}

// trace sets rows to u at the samples of a block, for the lanes flagged.
func (g *slowGroup) trace(m *motion, b int, rows []kernel.Row, flags uint32) {
	m.start.X, m.start.Y = kernel.Row{}, kernel.Row{}
	for left := flags & g.live(); left != 0; left &= left - 1 {
		l := bits.TrailingZeros32(left)
		rows[0][l], m.start.X[l], m.start.Y[l] = g.secondSample(m, l, b)
	}
	rows[1] = m.start.X
	from, _ := m.block(b)
	kernel.TraceSlow(g.eq, m.start, m.a[from:from+len(rows)], rows[2:], flags)
}

// secondSample returns u at the first sample of a block, and the state of the
// difference equation at the second.
func (g *slowGroup) secondSample(m *motion, l, b int) (first, x, y float64) {
	from, _ := m.block(b)
	if g.train != nil {
		return g.resume(m, l, b, from)
	}
	mark, o := &m.marks[b], &g.members[l]
	x, y = o.restart(mark.X[l], mark.Y[l], m.a[from], m.a[from+1])
	return mark.X[l] / o.eq.scale, x, y
}
