package spectrum

import (
	"math"

	"swaybook/pipeline/internal/kernel"
)

// A slow oscillator without a stride marches as the response to a train of impulses,
// which has half the multiplications of the difference equation. Let x be the
// response of the oscillator to the impulses aₖ at the samples. A broken line is the
// train of its samples, each spread over the triangle of unit area from one step
// before it to one step after, and so is the response to it:
//
//	u(t) = −∫ (1 − |s|)·x(t − s) ds, s from −1 to 1.
//
// At samples, in units of the oscillator's scale and with x in units of its impulse
// response after a step, this is the sum of the ground's terms of the difference
// equation,
//
//	uₖ = xₖ₊₁ + middle·xₖ + oldest·xₖ₋₁,  xₖ₊₁ = xₖ + wₖ₊₁,
//	wₖ₊₁ = (1 − loss)·wₖ − stiffness·xₖ + aₖ = pole·wₖ − stiffness·xₖ₋₁ + aₖ.
//
// The mark of a block that begins with sample k holds xₖ₋₁ and wₖ, its peak is the
// greatest |x| from sample k − 1 to the one after the block's last. Before sample 0 x
// is the free vibration that leaves u at rest there: the first sample's triangle has
// a half before the motion begins.

// trainBound returns what times the peak of a block bounds |u| in it: |u| is no more
// than the greatest |x|, which between samples is a free vibration, no more than β
// times that at samples (func bounds with a = 0).
func (o *slow) trainBound() float64 { return float64(o.growth * o.exact.uv) }

func newTrain(members []slow) *kernel.Train {
	q := new(kernel.Train)
	for l := range members {
		q.Decay[l], q.Stiffness[l] = members[l].eq.pole, members[l].eq.stiffness
	}
	return q
}

// marchTrain sets the marks of all blocks.
func (g *slowGroup) marchTrain(m *motion) {
	start := &m.marks[0]
	start.X, start.Y = kernel.Row{}, kernel.Row{}
	for l := range g.members {
		rest := g.members[l].rest()
		start.X[l], start.Y[l] = float64(rest.x*m.a[0]), float64(rest.y*m.a[0])
	}
	for b := range m.blocks() {
		from, to := m.block(b)
		kernel.MarchTrain(g.train, &m.marks[b], &m.marks[b+1], m.padded[from:to+2])
	}
}

// rest returns x₋₁ and w₀ for a₀ = 1 such that u₀ is 0 and u₁ that of a motion from
// rest. By the equations above, with A = 1 + middle + oldest − stiffness, B = 1 +
// middle + pole and a₁ = 0,
//
//	u₀ = A·x₋₁ + B·w₀ + 1 = 0,  u₁ = A·(x₋₁ + w₀) + B·w₁ = ρ,
//	w₁ = pole·w₀ − stiffness·x₋₁ + 1.
func (o *slow) rest() state {
	q := &o.eq
	ratio := o.exact.pu / o.exact.qu // ρ, as scale is qu
	a := (1 + q.middle + q.oldest) - q.stiffness
	b := 1 + q.middle + q.pole
	// p·x₋₁ + r·w₀ = ρ − B
	p, r := a-float64(b*q.stiffness), a+float64(b*q.pole)
	determinant := float64(a*r) - float64(b*p)
	return state{(-r - float64(b*(ratio-b))) / determinant, (float64(a*(ratio-b)) + p) / determinant}
}

// resume returns u at sample k and the state of the difference equation a step later,
// from the mark of a block that begins there.
func (g *slowGroup) resume(m *motion, l, b, k int) (first, x, y float64) {
	q, mark := g.train, &m.marks[b]
	decay, stiffness := q.Decay[l], -q.Stiffness[l]
	middle, oldest := g.eq.Middle[l], g.eq.Oldest[l]
	before, w := mark.X[l], mark.Y[l]
	now := before + w
	next := math.FMA(decay, w, math.FMA(stiffness, before, m.padded[k]))
	after := math.FMA(decay, next, math.FMA(stiffness, now, m.padded[k+1]))
	first = math.FMA(middle, now, math.FMA(oldest, before, now+next))
	y = math.FMA(middle, next, math.FMA(oldest, w, after))
	return first, first + y, y
}

// trainEnd returns displacement and velocity at the last sample. That the samples go
// on with zeros changes neither.
func (g *slowGroup) trainEnd(m *motion, l int) state {
	n, o := m.steps(), &g.members[l]
	u, _, change := g.resume(m, l, m.blocks(), n)
	u = float64(o.eq.scale * u)
	return state{u, o.velocity(u, float64(o.eq.scale*change), m.a[n], m.padded[n+1])}
}
