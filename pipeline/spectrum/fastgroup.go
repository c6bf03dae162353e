package spectrum

import (
	"math"
	"math/bits"

	"swaybook/pipeline/internal/kernel"
)

// fastGroup is a number of fast oscillators, one to a lane. Lanes without one
// rest at zero.
type fastGroup struct {
	members []fast
	turn    *kernel.Fast
}

// newFastGroups splits a list into groups of as many as there are lanes.
func newFastGroups(list []fast) []fastGroup {
	var groups []fastGroup
	for len(list) > 0 {
		n := min(lanes, len(list))
		g := fastGroup{list[:n:n], new(kernel.Fast)}
		for l := range g.members {
			q := &g.members[l].turn
			g.turn.YY[l], g.turn.YZ[l] = q.yy, q.yz
			g.turn.ZY[l], g.turn.ZZ[l] = q.zy, q.zz
			g.turn.Jump[l] = q.jump
		}
		groups, list = append(groups, g), list[n:]
	}
	return groups
}

// live flags the lanes of members.
func (g *fastGroup) live() uint32 { return ^uint32(0) >> (lanes - len(g.members)) }

// solve puts the D of the members into dst, in units of the motion.
func (g *fastGroup) solve(dst []float64, m *motion) {
	g.march(m)
	g.refine(m)
	for l := range g.members {
		o := &g.members[l]
		last := g.last(m, l)
		dst[o.index] = o.ringing.peak(m.best[l], last.x, last.y/o.phase)
	}
}

// last returns displacement and velocity at the last sample. The state is
// relative to the line of the last step, carried on.
func (g *fastGroup) last(m *motion, l int) state {
	o, n, s := &g.members[l], m.steps(), m.final(l)
	slope := m.a[n] - m.a[n-1]
	return state{o.displacement(s, m.a[n], slope), o.velocity(s, slope)}
}

// march sets the marks of all blocks.
func (g *fastGroup) march(m *motion) {
	start := &m.marks[0]
	start.X, start.Y = kernel.Row{}, kernel.Row{}
	for l := range g.members {
		s := g.members[l].first(m)
		start.X[l], start.Y[l] = s.x, s.y
	}
	for b := range m.blocks() {
		from, to := m.block(b)
		kernel.MarchFast(g.turn, &m.marks[b], &m.marks[b+1], m.bend[from:to])
	}
}

// refine sets best to the greatest |u| of the steps, beginning with the blocks
// of the greatest free vibration, which usually settle the others.
func (g *fastGroup) refine(m *motion) {
	live := g.live()
	m.flagTops(m.flags)
	*m.screen = kernel.Screen{}
	for l := range m.best {
		m.best[l] = 0
	}
	for b := range m.flags {
		m.done[b] = m.flags[b] & live
		g.enter(m, b, m.done[b], true)
	}
	g.limit(m)
	kernel.ScreenSquares(m.screen, m.marks[:m.blocks()], m.blockLines, m.flags)
	for b, flags := range m.flags {
		g.enter(m, b, flags&live&^m.done[b], false)
	}
}

// limit sets the screen so that a free vibration passes if with the straight
// line it can exceed best.
func (g *fastGroup) limit(m *motion) {
	for l := range g.members {
		o := &g.members[l]
		m.screen.Limit[l] = float64(m.best[l] * o.cube)
		m.screen.First[l], m.screen.Second[l] = o.phase, o.turn.jump
	}
}

// enter marches a block again and looks into the steps that can beat best, for
// the lanes flagged.
func (g *fastGroup) enter(m *motion, b int, flags uint32, first bool) {
	if flags == 0 {
		return
	}
	from, to := m.block(b)
	states, stepFlags := m.states[:to-from], m.stepFlags[:to-from]
	kernel.TraceFast(g.turn, &m.marks[b], m.bend[from:to], states, flags)
	if first {
		g.sampled(m, from, states, flags)
	}
	g.limit(m)
	kernel.ScreenSquares(m.screen, states, m.stepLines[from:to], stepFlags)
	for k := range states {
		for left := stepFlags[k] & flags; left != 0; left &= left - 1 {
			l := bits.TrailingZeros32(left)
			s := state{states[k].X[l], states[k].Y[l]}
			m.best[l] = g.members[l].step(m.best[l], s, states[k].Peak[l], m.a[from+k], m.a[from+k+1])
		}
	}
}

// sampled raises best to the greatest |u| at the starts of steps.
func (g *fastGroup) sampled(m *motion, from int, states []kernel.Mark, flags uint32) {
	ground := m.a[from : from+len(states)+1]
	for ; flags != 0; flags &= flags - 1 {
		l := bits.TrailingZeros32(flags)
		o := &g.members[l]
		jump, phase, top := o.turn.jump, o.phase, uint64(0)
		a := ground[0]
		for k, next := range ground[1:] {
			u := states[k].X[l] + (float64(jump*(next-a)) - float64(phase*a))
			top, a = max(top, magnitude(u)), next
		}
		m.best[l] = max(m.best[l], math.Float64frombits(top)/o.cube)
	}
}
