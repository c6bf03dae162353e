package spectrum

import (
	"math"
	"math/bits"

	"swaybook/pipeline/internal/kernel"
)

// visits are blocks of a group of oscillators that are marched again side by side,
// with every step kept. Each takes a lane, so that lanes may hold different blocks,
// and the same member more than once.
type visits struct {
	n      int
	member [lanes]int
	from   [lanes]int   // the first sample
	start  *kernel.Mark // the state that the march starts from
	ground []kernel.Row // of each lane
	top    *kernel.Row  // the greatest |u| at samples
	at     *kernel.Row  // the row that has it
}

// gatheredRows is the number of samples of a block and the next two, made up to
// whole units.
const gatheredRows = (blockSteps + 2 + kernel.GatherUnit - 1) / kernel.GatherUnit * kernel.GatherUnit

func newVisits() visits {
	return visits{start: new(kernel.Mark), ground: make([]kernel.Row, gatheredRows), top: new(kernel.Row), at: new(kernel.Row)}
}

// add takes a lane for a member and returns it.
func (v *visits) add(member, from int) int {
	i := v.n
	v.n++
	v.member[i], v.from[i] = member, from
	return i
}

// gather sets the ground of all lanes.
func (v *visits) gather(m *motion) {
	clear(v.from[v.n:])
	kernel.Gather(v.ground, m.padded, &v.from)
}

// slowVisits are those of slow oscillators, whose march starts at the second sample
// of a block.
type slowVisits struct {
	visits
	eq       *kernel.Slow
	screen   *kernel.StepScreen
	lines    []kernel.Line // what screens steps: ones
	turning  *kernel.Turning
	turnStep [lanes]int // the step that a turning point is sought in; it can be beside the block
	seen     []uint32   // of each step: the lanes that it is done with
}

func newSlowVisits() *slowVisits {
	v := &slowVisits{
		visits: newVisits(), eq: new(kernel.Slow), screen: new(kernel.StepScreen), lines: make([]kernel.Line, blockSteps),
		turning: new(kernel.Turning), seen: make([]uint32, blockSteps),
	}
	for i := range v.lines {
		v.lines[i].First = 1
	}
	return v
}

// add has a block of a member visited next.
func (g *slowGroup) add(m *motion, l, b int) {
	from, _ := m.block(b)
	v, q := m.slowVisits, g.eq
	i := v.add(l, from)
	v.eq.Decay[i], v.eq.Stiffness[i] = q.Decay[l], q.Stiffness[l]
	v.eq.Middle[i], v.eq.Oldest[i] = q.Middle[l], q.Oldest[l]
	v.screen.Force[i] = float64(g.screen.Force[l] * m.blockLines[b].First)
	v.screen.Curve[i], v.screen.Slope[i] = g.screen.Curve[l], g.screen.Slope[l]
	m.rows[0][i], v.start.X[i], v.start.Y[i] = g.secondSample(m, l, b)
}

// visit marches the blocks that were added again and looks into the steps that can
// beat best: first into that beside the greatest sample, if they are those of the
// members' greatest samples in order.
func (g *slowGroup) visit(m *motion, first bool) {
	v := m.slowVisits
	if v.n == 0 {
		return
	}
	rows := m.rows[:blockSteps+1]
	g.traceVisits(m, rows)
	clear(v.seen)
	if first {
		kernel.GreatestRows(v.top, v.at, rows)
		g.turn(m, rows)
	}
	for i, l := range v.member[:v.n] {
		v.screen.Best[i] = m.best[l] / math.Abs(g.members[l].eq.scale)
	}
	kernel.ScreenSteps(v.screen, rows, v.lines, m.stepFlags, ^uint32(0)>>(lanes-v.n))
	for k, flags := range m.stepFlags {
		for left := flags &^ v.seen[k]; left != 0; left &= left - 1 {
			i := bits.TrailingZeros32(left)
			l, sample := v.member[i], v.from[i]+k
			if sample < m.steps() {
				m.best[l] = g.members[l].between(m.best[l], rows[k][i], rows[k+1][i], m.a[sample], m.a[sample+1])
			}
		}
	}
	v.n = 0
}

// traceVisits sets rows to u at the samples of the blocks. Beyond the last sample
// of the motion u stays what it is there.
func (g *slowGroup) traceVisits(m *motion, rows []kernel.Row) {
	v := m.slowVisits
	v.gather(m)
	rows[1] = v.start.X
	kernel.TraceEach(v.eq, v.start, v.ground[:len(rows)], rows[2:])
	for i, from := range v.from[:v.n] {
		last := m.steps() - from
		for k := last + 1; k < len(rows); k++ {
			rows[k][i] = rows[last][i]
		}
	}
}

// between is step for the rows x and end.
func (o *slow) between(best, x, end, a, next float64) float64 {
	return o.step(best, float64(o.eq.scale*x), float64(o.eq.scale*end), a, next)
}

// turn raises best to the turning point beside each lane's greatest sample, if one
// is found, and marks the step that has it.
func (g *slowGroup) turn(m *motion, rows []kernel.Row) {
	v := m.slowVisits
	for i := range v.n {
		g.aim(m, rows, i)
	}
	kernel.Turn(v.turning, g.factors)
	for i, l := range v.member[:v.n] {
		if !v.hasTurned(i) {
			continue
		}
		m.best[l] = max(m.best[l], math.Abs(v.turning.Top[i]))
		if k := v.turnStep[i]; k >= 0 && k < blockSteps {
			v.seen[k] |= 1 << i
		}
	}
}

// aim sets lane i of the turning to the step from its greatest sample on, or, where
// |u| falls off from there, to the step before it, back in time, which turns the
// signs of velocity and damping.
func (g *slowGroup) aim(m *motion, rows []kernel.Row, i int) {
	v, o := m.slowVisits, &g.members[m.slowVisits.member[i]]
	t, k := v.turning, int(v.at[i])
	sample := v.from[i] + k
	u, velocity := o.motionAt(rows, i, k, m.a, sample)
	linear, other := o.series.linear, sample+1
	v.turnStep[i] = k
	if float64(u*velocity) < 0 {
		velocity, linear, other = -velocity, -linear, sample-1
		v.turnStep[i] = k - 1
	}
	if other < 0 || other > m.steps() {
		velocity, other = 0, sample // no step, and no turning point
	}
	m.best[v.member[i]] = max(m.best[v.member[i]], math.Abs(u))
	t.U[i], t.V[i], t.Force[i], t.Rise[i] = u, velocity, -m.a[sample], m.a[sample]-m.a[other]
	t.Linear[i], t.Square[i] = linear, o.series.square
}

// motionAt returns displacement and velocity in row k of lane i, at a sample: from
// the next row, or at the end of rows or samples from the row before.
func (o *slow) motionAt(rows []kernel.Row, i, k int, a []float64, sample int) (u, v float64) {
	u = float64(o.eq.scale * rows[k][i])
	if k+1 < len(rows) && sample+1 < len(a) {
		return u, o.velocity(u, float64(o.eq.scale*rows[k+1][i])-u, a[sample], a[sample+1])
	}
	before := float64(o.eq.scale * rows[k-1][i])
	v = o.velocity(before, u-before, a[sample-1], a[sample])
	return u, o.arrival(before, v, a[sample-1], a[sample])
}

// hasTurned reports whether lane i has come to the one turning point of its step.
// There is one if the velocity has opposite signs at both ends, and no other if ü
// has the same sign there (see peak); of the last correction see turnTolerance.
func (v *slowVisits) hasTurned(i int) bool {
	t := v.turning
	return math.Abs(t.Move[i]) <= turnTolerance && t.Time[i] >= 0 && t.Time[i] <= 1 &&
		opposite(t.V[i], t.Velocity[i]) && float64(t.C[2][i]*t.Bend[i]) > 0
}

// factorsOf returns the factors of the members' series for kernel.Turn.
func factorsOf(members []slow) []kernel.Row {
	most := 5
	for l := range members {
		most = max(most, members[l].series.terms)
	}
	factors := make([]kernel.Row, most)
	for l := range members {
		for k := range members[l].series.terms {
			factors[k][l] = inverseFactorial[k]
		}
	}
	return factors
}
