package spectrum

import (
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

// fastVisits are those of fast oscillators, whose march starts with a block.
type fastVisits struct {
	visits
	turn   *kernel.Fast
	phase  *kernel.Row
	screen *kernel.FastScreen
	rows   []kernel.Mark // states, and u in units of φ⁻³ in place of peaks
}

func newFastVisits() *fastVisits {
	return &fastVisits{
		visits: newVisits(), turn: new(kernel.Fast), phase: new(kernel.Row),
		screen: new(kernel.FastScreen), rows: make([]kernel.Mark, blockSteps+1),
	}
}

// add has a block of a member visited next.
func (g *fastGroup) add(m *motion, l, b int) {
	from, _ := m.block(b)
	v, q, o := m.fastVisits, g.turn, &g.members[l]
	i := v.add(l, from)
	v.turn.YY[i], v.turn.YZ[i] = q.YY[l], q.YZ[l]
	v.turn.ZY[i], v.turn.ZZ[i], v.turn.Jump[i] = q.ZY[l], q.ZZ[l], q.Jump[l]
	v.phase[i], v.screen.Phase[i], v.screen.Curve[i] = o.phase, o.phase, o.curve
	v.start.X[i], v.start.Y[i] = m.marks[b].X[l], m.marks[b].Y[l]
}

// refine sets best to the greatest |u| of the steps, beginning with the block of
// each lane's greatest free vibration, which usually settles the others.
func (g *fastGroup) refine(m *motion) {
	m.findTops()
	clear(m.done)
	for l := range g.members {
		b := int(m.at[l])
		m.best[l] = 0
		m.done[b] |= 1 << l
		g.add(m, l, b)
	}
	g.visit(m)
	*m.screen = kernel.Screen{}
	g.limit(m)
	kernel.ScreenSquares(m.screen, m.marks[:m.blocks()], m.blockLines, m.flags)
	for b, flags := range m.flags {
		for left := flags & g.live() &^ m.done[b]; left != 0; left &= left - 1 {
			if g.add(m, bits.TrailingZeros32(left), b); m.fastVisits.n == lanes {
				g.visit(m)
			}
		}
	}
	g.visit(m)
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

// visit marches the blocks that were added again and looks into the steps that can
// beat best.
func (g *fastGroup) visit(m *motion) {
	v := m.fastVisits
	if v.n == 0 {
		return
	}
	v.gather(m)
	kernel.TraceFastEach(v.turn, v.phase, v.start, v.ground[:len(v.rows)+2], v.rows)
	for i, from := range v.from[:v.n] {
		last := m.steps() - from
		for k := last + 1; k < len(v.rows); k++ {
			v.rows[k].Peak[i] = 0 // beyond the motion
		}
	}
	kernel.GreatestPeaks(v.top, v.at, v.rows)
	for i, l := range v.member[:v.n] {
		o := &g.members[l]
		m.best[l] = max(m.best[l], v.top[i]/o.cube)
		v.screen.Limit[i] = float64(m.best[l] * o.cube)
	}
	kernel.ScreenFast(v.screen, v.rows, v.ground[:len(v.rows)], m.stepFlags)
	some := ^uint32(0) >> (lanes - v.n)
	for k, flags := range m.stepFlags {
		for left := flags & some; left != 0; left &= left - 1 {
			i := bits.TrailingZeros32(left)
			l, sample := v.member[i], v.from[i]+k
			if sample < m.steps() {
				s := state{v.rows[k].X[i], v.rows[k].Y[i]}
				m.best[l] = g.members[l].step(m.best[l], s, m.a[sample], m.a[sample+1])
			}
		}
	}
	v.n = 0
}
