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
		g.PGV, g.PGD = float64(g.PGV*stepS), float64(g.PGD*stepS)*stepS
	}
	return rotd50, rotd100
}

// groundPath is the motion of the ground in the plane at the samples, from rest at
// the first, time in steps.
type groundPath struct{ a, v, u []kernel.Point }

func newGroundPath(first, second []float64) groundPath {
	n := len(first)
	p := groundPath{make([]kernel.Point, n), make([]kernel.Point, n), make([]kernel.Point, n)}
	for k := range n {
		p.a[k] = kernel.Point{X: first[k], Y: second[k]}
		if k+1 < n {
			x, y := p.step(k, 1, 0), p.step(k, 0, 1)
			x.slope, y.slope = first[k+1]-first[k], second[k+1]-second[k]
			p.v[k+1] = kernel.Point{X: x.velocityAt(1), Y: y.velocityAt(1)}
			p.u[k+1] = kernel.Point{X: x.displacementAt(1), Y: y.displacementAt(1)}
		}
	}
	return p
}

// step returns step k in a direction.
func (p *groundPath) step(k int, cos, sin float64) groundStep {
	toward := func(q kernel.Point) float64 { return math.FMA(cos, q.X, float64(sin*q.Y)) }
	s := groundStep{u: toward(p.u[k]), v: toward(p.v[k]), a: toward(p.a[k])}
	if k+1 < len(p.a) {
		s.slope = toward(p.a[k+1]) - s.a
	}
	return s
}

// peaks returns the median and the maximum over the directions of the greatest
// length of a quantity. Within a step it is peak, and exceeds that at both ends by
// an eighth of the greatest length of its second derivative, bend, at most.
//
// Only steps that can matter are looked into: see polygon.
func (p *groundPath) peaks(points []kernel.Point, peak func(*groundStep) float64, bend func(k int) float64) (rotd50, rotd100 float64) {
	var outline polygon
	outline.widen(points)
	outline.raise(12)
	for k := 0; peak != nil && k+1 < len(points); k++ {
		excess := float64(bend(k) * 0.125)
		if max(reach(points[k].X, points[k].Y), reach(points[k+1].X, points[k+1].Y))+excess <= outline.floor {
			continue
		}
		for i := range outline.reach[:Directions] {
			cos, sin := compass.Cos[i], compass.Sin[i]
			end := max(math.Abs(math.FMA(cos, points[k].X, float64(sin*points[k].Y))),
				math.Abs(math.FMA(cos, points[k+1].X, float64(sin*points[k+1].Y))))
			if end+excess > outline.reach[i] {
				s := p.step(k, cos, sin)
				outline.reach[i] = max(outline.reach[i], peak(&s))
			}
		}
	}
	d := outline.reach[:Directions]
	slices.Sort(d)
	return middle(d), d[Directions-1]
}
