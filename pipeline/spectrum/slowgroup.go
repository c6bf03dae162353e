package spectrum

import (
	"math"
	"math/bits"

	"swaybook/pipeline/internal/kernel"
)

// slowGroup is a number of slow oscillators, one to a lane. Lanes without one
// rest at zero.
type slowGroup struct {
	members []slow
	eq      *kernel.Slow
}

// newSlowGroups splits a list into groups of as many as there are lanes.
func newSlowGroups(list []slow) []slowGroup {
	var groups []slowGroup
	for len(list) > 0 {
		n := min(lanes, len(list))
		g := slowGroup{list[:n:n], new(kernel.Slow)}
		for l := range g.members {
			q := &g.members[l].eq
			g.eq.Decay[l], g.eq.Stiffness[l] = 1-q.loss, q.stiffness
			g.eq.Middle[l], g.eq.Oldest[l] = q.middle, q.oldest
		}
		groups, list = append(groups, g), list[n:]
	}
	return groups
}

// solve puts the D of the members into dst, in units of the motion.
func (g *slowGroup) solve(dst []float64, m *motion) {
	g.march(m)
	g.sampled(m)
	if g.members[0].tail == 0 {
		g.refine(m)
	}
	end := &m.marks[m.blocks()]
	for l := range g.members {
		o := &g.members[l]
		last := o.ending(m, state{end.X[l], end.Y[l]})
		if o.tail > 0 {
			dst[o.index] = o.ring(m.best[l], last)
		} else {
			dst[o.index] = o.ringing.peak(m.best[l], last.x, last.y/o.phase)
		}
	}
}

// march sets the marks of all blocks.
func (g *slowGroup) march(m *motion) {
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

// sampled sets best to the greatest |u| at samples, and flags the blocks that
// have it.
func (g *slowGroup) sampled(m *motion) {
	marks := m.marks[:m.blocks()]
	kernel.GreatestPeaks(&m.top, marks)
	m.screen = kernel.Screen{}
	for l := range m.top {
		m.screen.Limit[l] = math.Nextafter(m.top[l], -1)
		m.best[l] = 0
	}
	for l := range g.members {
		m.best[l] = float64(math.Abs(g.members[l].eq.scale) * m.top[l])
	}
	kernel.ScreenPeaks(&m.screen, marks, m.blockLines, m.flags)
}

// refine raises best to the greatest |u| of the steps, beginning with the blocks
// of the greatest sample, which usually settle the others.
func (g *slowGroup) refine(m *motion) {
	live := ^uint32(0) >> (lanes - len(g.members))
	for l := range g.members {
		o := &g.members[l]
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
	kernel.ScreenPeaks(&m.screen, m.marks[:m.blocks()], m.blockLines, m.flags)
	for b, flags := range m.flags {
		g.enter(m, b, flags&live&^m.done[b], false)
	}
}

// limit sets the screen so that a greatest sampled |u| passes if the bound of
// func bounds exceeds best.
func (g *slowGroup) limit(m *motion) {
	for l := range g.members {
		o := &g.members[l]
		scale := math.Abs(o.eq.scale)
		m.screen.Limit[l] = m.best[l] / float64(o.growth*scale)
		m.screen.First[l] = o.reach / scale
	}
}

// limitSteps sets the screen of steps: |ü| within a step is at most M with
//
//	M·(1 − ζφ − φ²/8) = max|a| + 2ζφ·|end − u| + φ²·max(|u|, |end|),
//
// because |u̇| stays within |end − u| + M/2 and |u| within M/8 of its greater end.
func (g *slowGroup) limitSteps(m *motion) {
	for l := range g.members {
		o := &g.members[l]
		scale := math.Abs(o.eq.scale)
		linear, square := o.series.linear, o.series.square
		share := 1 / ((1 - float64(linear*0.5)) - float64(square*0.125))
		m.stepScreen.Best[l] = m.best[l] / scale
		m.stepScreen.Force[l] = share / scale
		m.stepScreen.Curve[l], m.stepScreen.Slope[l] = float64(share*square), float64(share*linear)
	}
}

// enter marches a block again and looks into the steps that can beat best, for
// the lanes flagged.
func (g *slowGroup) enter(m *motion, b int, flags uint32, first bool) {
	if flags == 0 {
		return
	}
	_, to := m.block(b)
	a := m.slowSamples(b)
	rows, stepFlags := m.rows[:len(a)-1], m.stepFlags[:len(a)-2]
	rows[0] = m.marks[b].X
	kernel.TraceSlow(g.eq, &m.marks[b], a, rows[1:])
	from := to - (len(rows) - 1)
	m.seen = [blockSteps]uint32{}
	if first {
		g.enterTop(m, rows, a, flags)
	}
	g.limitSteps(m)
	kernel.ScreenSteps(&m.stepScreen, rows, m.stepLines[from:to], stepFlags, flags)
	for k := range stepFlags {
		for left := stepFlags[k] &^ m.seen[k]; left != 0; left &= left - 1 {
			l := bits.TrailingZeros32(left)
			o := &g.members[l]
			m.best[l] = o.between(m.best[l], rows, l, k, a)
		}
	}
}

// enterTop looks into the steps on both sides of the greatest sample, which
// raises best before the others are compared with it.
func (g *slowGroup) enterTop(m *motion, rows []kernel.Row, a []float64, flags uint32) {
	for ; flags != 0; flags &= flags - 1 {
		l := bits.TrailingZeros32(flags)
		at, top := 0, 0.0
		for k := range rows {
			if u := math.Abs(rows[k][l]); u > top {
				at, top = k, u
			}
		}
		for k := max(at-1, 0); k <= at && k < len(rows)-1; k++ {
			m.seen[k] |= 1 << l
			m.best[l] = g.members[l].between(m.best[l], rows, l, k, a)
		}
	}
}

// between is step for step k of the rows of lane l. Row k is the state at sample
// k+1 of a.
func (o *slow) between(best float64, rows []kernel.Row, l, k int, a []float64) float64 {
	u, end := float64(o.eq.scale*rows[k][l]), float64(o.eq.scale*rows[k+1][l])
	return o.step(best, u, end, a[k+1], a[k+2])
}
