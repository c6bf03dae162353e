package spectrum

import (
	"math"
	"slices"

	"swaybook/pipeline/internal/kernel"
)

// GroundPeaks are PGA in m/s², PGV in m/s and PGD in m.
type GroundPeaks struct{ PGA, PGV, PGD float64 }

// RotDPeaks returns the median and the maximum over the directions of RotD of the
// peaks of a pair of components at a right angle, each as Peaks takes them. It
// panics if lengths differ.
func RotDPeaks(stepS float64, first, second []float64) (rotd50, rotd100 GroundPeaks) {
	if len(first) != len(second) {
		panic("spectrum: components of a pair differ in length")
	}
	first, second, exponent := scaledPair(first, second) // squares of lengths must not overflow
	if math.IsNaN(greatest(first) + greatest(second)) {
		nan := GroundPeaks{math.NaN(), math.NaN(), math.NaN()}
		return nan, nan
	}
	p := newGroundPath(first, second)
	rotd50.PGA, rotd100.PGA = p.peaks(p.a, nil, nil)
	rotd50.PGV, rotd100.PGV = p.peaks(p.v, (*groundStep).peakVelocity, func(k int) float64 {
		return reach(first[k+1]-first[k], second[k+1]-second[k])
	})
	rotd50.PGD, rotd100.PGD = p.peaks(p.u, (*groundStep).peakDisplacement, func(k int) float64 {
		return max(reach(first[k], second[k]), reach(first[k+1], second[k+1]))
	})
	for _, g := range []*GroundPeaks{&rotd50, &rotd100} {
		g.PGA = math.Ldexp(g.PGA, exponent)
		g.PGV = math.Ldexp(float64(g.PGV*stepS), exponent)
		g.PGD = math.Ldexp(float64(g.PGD*stepS)*stepS, exponent)
	}
	return rotd50, rotd100
}

// groundPath is the motion of the ground in the plane at the samples, from rest at
// the first, time in steps.
type groundPath struct{ a, v, u []kernel.Point }

func newGroundPath(first, second []float64) groundPath {
	n := len(first)
	p := groundPath{make([]kernel.Point, n), make([]kernel.Point, n), make([]kernel.Point, n)}
	var x, y groundStep
	for k := range first {
		x.a, y.a = first[k], second[k]
		p.a[k], p.v[k], p.u[k] = kernel.Point{X: x.a, Y: y.a}, kernel.Point{X: x.v, Y: y.v}, kernel.Point{X: x.u, Y: y.u}
		if k+1 < n {
			x.slope, y.slope = first[k+1]-x.a, second[k+1]-y.a
			x.u, x.v = x.displacementAt(1), x.velocityAt(1)
			y.u, y.v = y.displacementAt(1), y.velocityAt(1)
		}
	}
	return p
}

// step returns step k in a direction.
func (p *groundPath) step(k int, cos, sin float64) groundStep {
	a, v, u, next := p.a[k], p.v[k], p.u[k], p.a[k+1]
	s := groundStep{u: toward(u.X, u.Y, cos, sin), v: toward(v.X, v.Y, cos, sin), a: toward(a.X, a.Y, cos, sin)}
	s.slope = toward(next.X, next.Y, cos, sin) - s.a
	return s
}

// peaks returns the median and the maximum over the directions of the greatest
// length of a quantity. Within a step it is peak, and exceeds that at both ends by
// an eighth of the greatest length of its second derivative, bend, at most.
//
// Only steps that can matter are looked into: see polygon.
func (p *groundPath) peaks(points []kernel.Point, peak func(*groundStep) float64, bend func(k int) float64) (rotd50, rotd100 float64) {
	outline := new(polygon)
	outline.widen(points)
	outline.raise(12)
	for k := 0; peak != nil && k+1 < len(points); k++ {
		excess := float64(bend(k) * 0.125)
		if reach(points[k].X, points[k].Y)+excess <= outline.floor && reach(points[k+1].X, points[k+1].Y)+excess <= outline.floor {
			continue
		}
		if !outline.surrounds(&outline.reach, outline.floor, excess, 0, 0, excess, points[k], points[k+1]) {
			p.look(outline, k, points, excess, peak)
		}
	}
	d := outline.reach[:Directions]
	slices.Sort(d)
	return middle(d), d[Directions-1]
}

// look raises the outline to the peaks of step k where they can exceed it.
func (p *groundPath) look(outline *polygon, k int, points []kernel.Point, excess float64, peak func(*groundStep) float64) {
	for i := range outline.reach[:Directions] {
		cos, sin := compass.Cos[i], compass.Sin[i]
		end := max(math.Abs(toward(points[k].X, points[k].Y, cos, sin)), math.Abs(toward(points[k+1].X, points[k+1].Y, cos, sin)))
		if end+excess > outline.reach[i] {
			s := p.step(k, cos, sin)
			outline.reach[i] = max(outline.reach[i], peak(&s))
		}
	}
	outline.repeat()
}
