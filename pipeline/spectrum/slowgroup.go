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
// by step.
type slowGroup struct {
	members []slow
	eq      *kernel.Slow
	screen  *kernel.StepScreen // all but Best
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
		g.screenSteps()
		groups, list = append(groups, g), list[n:]
	}
	return groups
}

// newStrideGroups does so for oscillators of one of strides.
func newStrideGroups(list []slow, level int) []slowGroup {
	groups := newSlowGroups(list)
	for i := range groups {
		g := &groups[i]
		g.stride, g.level = new(kernel.Stride), level
		for l := range g.members {
			o := &g.members[l]
			setStride(g.stride, l, o.phase, o.damping, strides[level])
		}
	}
	return groups
}

// live flags the lanes of members.
func (g *slowGroup) live() uint32 { return ^uint32(0) >> (lanes - len(g.members)) }

// unit returns the unit of the peaks of a lane.
func (g *slowGroup) unit(l int) float64 {
	if g.stride != nil {
		return 1
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
func (g *slowGroup) last(m *motion, l int) state { return g.members[l].ending(m, m.final(l)) }

// march sets the marks of all blocks.
func (g *slowGroup) march(m *motion) {
	if g.stride != nil {
		g.marchStrides(m)
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
	g.restart(m, last, ^uint32(0))
	kernel.MarchSlow(g.eq, m.start, &m.marks[last+1], m.a[from:to+1])
	for l := range g.members {
		scale := math.Abs(g.members[l].eq.scale)
		mark.Peak[l] = max(math.Abs(mark.X[l]), float64(scale*m.start.Peak[l]))
	}
	for l := len(g.members); l < lanes; l++ {
		mark.Peak[l] = 0
	}
}

// restart sets start to the state of the difference equation a step into a
// block, from displacement and velocity at its start, for the lanes flagged.
func (g *slowGroup) restart(m *motion, b int, flags uint32) {
	from, _ := m.block(b)
	a, next := m.a[from], m.a[from+1]
	mark := &m.marks[b]
	m.start.X, m.start.Y = kernel.Row{}, kernel.Row{}
	for left := flags & g.live(); left != 0; left &= left - 1 {
		l := bits.TrailingZeros32(left)
		o := &g.members[l]
		u := mark.X[l]
		change := o.change(u, mark.Y[l], a, next)
		m.start.X[l], m.start.Y[l] = (u+change)/o.eq.scale, change/o.eq.scale
	}
}

// sampled sets best to the greatest |u| at samples, and flags the blocks that
// have it.
func (g *slowGroup) sampled(m *motion) {
	m.flagTops(m.flags)
	*m.screen = kernel.Screen{}
	for l := range m.best {
		m.best[l] = 0
	}
	for l := range g.members {
		m.best[l] = float64(g.unit(l) * m.top[l])
	}
}

// refine raises best to the greatest |u| of the steps, beginning with the blocks
// of the greatest sample, which usually settle the others.
func (g *slowGroup) refine(m *motion) {
	*m.stepScreen = *g.screen
	live := g.live()
	for l := range g.members {
		o := &g.members[l]
		if g.stride != nil {
			break // the first step is one of block 0
		}
		first := float64(math.Abs(o.eq.scale) * math.Abs(m.marks[0].X[l]))
		if o.bound(first, math.Abs(m.a[0]), math.Abs(m.a[1])) > m.best[l] {
			m.best[l], _, _ = o.series.peak(m.best[l], 0, 0, m.a[0], m.a[1]-m.a[0])
		}
	}
	for b := range m.flags {
		m.done[b] = m.flags[b] & live
		g.enter(m, b, m.done[b], true)
	}
	g.limit(m)
	lines := m.blockLines
	if g.stride != nil {
		lines = m.strides[g.level].lines
	}
	kernel.ScreenPeaks(m.screen, m.marks[:m.blocks()], lines, m.flags)
	for b, flags := range m.flags {
		g.enter(m, b, flags&live&^m.done[b], false)
	}
}

// limit sets the screen so that a greatest sampled |u| passes if the bound of
// func bounds, or of func strideBound, exceeds best.
func (g *slowGroup) limit(m *motion) {
	for l := range g.members {
		o := &g.members[l]
		if g.stride != nil {
			over := float64(o.phase * float64(strides[g.level]))
			m.screen.Limit[l] = float64(m.best[l] * strideBound(over, o.damping))
			m.screen.First[l] = 1
			continue
		}
		scale := math.Abs(o.eq.scale)
		m.screen.Limit[l] = m.best[l] / float64(o.growth*scale)
		m.screen.First[l] = o.reach / scale
	}
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

// enter marches a block again and looks into the steps that can beat best, for
// the lanes flagged.
func (g *slowGroup) enter(m *motion, b int, flags uint32, first bool) {
	if flags == 0 {
		return
	}
	from, to := g.samples(m, b)
	a := m.a[from : to+1]
	rows, stepFlags := m.rows[:len(a)], m.stepFlags[:len(a)-1]
	g.trace(m, b, from, rows, flags)
	clear(m.seen)
	if first {
		g.enterTop(m, rows, a, flags)
	}
	for left := flags; left != 0; left &= left - 1 {
		l := bits.TrailingZeros32(left)
		m.stepScreen.Best[l] = m.best[l] / math.Abs(g.members[l].eq.scale)
	}
	kernel.ScreenSteps(m.stepScreen, rows, m.stepLines[from:to], stepFlags, flags)
	for k := range stepFlags {
		for left := stepFlags[k] &^ m.seen[k]; left != 0; left &= left - 1 {
			l := bits.TrailingZeros32(left)
			o := &g.members[l]
			m.best[l] = o.between(m.best[l], rows, l, k, a)
		}
	}
}

// samples returns the first and the last sample of a block of which a trace gives
// u: a march of steps begins at sample 1.
func (g *slowGroup) samples(m *motion, b int) (from, to int) {
	from, to = m.block(b)
	if g.stride == nil {
		from = max(from, 1)
	}
	return from, to
}

// trace sets rows to u at the samples of a block, of which from is the first,
// for the lanes flagged.
func (g *slowGroup) trace(m *motion, b, from int, rows []kernel.Row, flags uint32) {
	if g.stride == nil {
		rows[0] = m.marks[b].X
		kernel.TraceSlow(g.eq, &m.marks[b], m.a[from-1:from+len(rows)], rows[1:], flags)
		return
	}
	g.restart(m, b, flags)
	for left := flags; left != 0; left &= left - 1 {
		l := bits.TrailingZeros32(left)
		rows[0][l] = m.marks[b].X[l] / g.members[l].eq.scale
	}
	rows[1] = m.start.X
	kernel.TraceSlow(g.eq, m.start, m.a[from:from+len(rows)], rows[2:], flags)
}

// enterTop looks into the steps on both sides of the greatest sample, which
// raises best before the others are compared with it.
func (g *slowGroup) enterTop(m *motion, rows []kernel.Row, a []float64, flags uint32) {
	for left := flags; left != 0; left &= left - 1 {
		l := bits.TrailingZeros32(left)
		m.tops.Limit[l] = float64(m.top[l] * (g.unit(l) / math.Abs(g.members[l].eq.scale)) * (1 - 0x1p-40))
	}
	rowFlags := m.rowFlags[:len(rows)]
	kernel.ScreenRows(m.tops, rows, m.none[:len(rows)], rowFlags)
	var at [lanes]int
	for k, set := range rowFlags {
		for set &= flags; set != 0; set &= set - 1 {
			l := bits.TrailingZeros32(set)
			if u := math.Abs(rows[k][l]); u > m.tops.Limit[l] {
				at[l], m.tops.Limit[l] = k, u
			}
		}
	}
	for ; flags != 0; flags &= flags - 1 {
		l := bits.TrailingZeros32(flags)
		for k := max(at[l]-1, 0); k <= at[l] && k < len(rows)-1; k++ {
			m.seen[k] |= 1 << l
			m.best[l] = g.members[l].between(m.best[l], rows, l, k, a)
		}
	}
}

// between is step for step k of the rows of lane l. Row k is u at sample k of a.
func (o *slow) between(best float64, rows []kernel.Row, l, k int, a []float64) float64 {
	u, end := float64(o.eq.scale*rows[k][l]), float64(o.eq.scale*rows[k+1][l])
	return o.step(best, u, end, a[k], a[k+1])
}
