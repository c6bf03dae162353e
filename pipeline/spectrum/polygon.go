package spectrum

import (
	"math"
	"math/bits"

	"swaybook/pipeline/internal/kernel"
)

// half is the number of directions of which a lower median is the greatest of
// the rest: as many exceed the lower of the middle two values, and the upper.
const half = Directions / 2

// polygon is what is known of the motion of one oscillator in the plane: lower
// bounds L(θ) of D(θ), and which points can still matter to the median of D and
// to its maximum.
//
// Let floor be a number that D exceeds in more than half of the directions, 91 of
// 180, because L does or because begin knows it. Then the lower of the middle two
// values of D exceeds it, and |u| up to it changes neither that value nor any
// above it. So a point matters only if in some direction it is farther out than
// max(L(θ), floor). The fence surrounds a region without such points.
type polygon struct {
	reach kernel.Outline // L
	floor float64
	fence [kernel.Sides]kernel.Point // normals of sides over their distances
	least float64                    // of those
	set   kernel.Above               // here, as form, because what kernels use must not be allocated
	form  kernel.Form
}

// begin sets what is known from the D of both components. The motion has a point
// at a distance of at least the greater one, which has more than 0.69 of that in
// all directions up to 46° from its own.
func (p *polygon) begin(first, second float64) {
	p.reach = kernel.Outline{}
	p.reach[0], p.reach[half] = first, second
	p.floor = float64(0.69 * max(first, second))
}

// sweep is the angle between the directions of a kernel.Sweep, in degrees.
const sweep = Directions / kernel.Sweeps

// settle takes in the greatest distances h of a set of points in the directions of
// a sweep, in units of unit. Let n be a direction of it, m the one before, and θ a
// direction i degrees beyond n. n is made of θ and m with sines for weights, and no
// distance exceeds the sum of those of which its direction is made:
//
//	h(n)·sin(sweep + i) <= h(θ)·sin(sweep) + h(m)·sin(i)
//
// which bounds h(θ) from below, and likewise from the other side. Rounding is taken
// off.
func (p *polygon) settle(tops *kernel.Sweep, l int, unit float64) {
	var h [kernel.Sweeps + 3]float64 // from the last, and two more at the end
	for k := range h {
		h[k] = float64(unit * tops[(k+kernel.Sweeps-1)%kernel.Sweeps][l])
	}
	for k := range kernel.Sweeps {
		before, at, next, after := h[k], h[k+1], h[k+2], h[k+3]
		reach := p.reach[k*sweep : (k+1)*sweep]
		reach[0] = max(reach[0], at)
		for i := 1; i < sweep; i++ {
			w := &sweepWeights[i]
			reach[i] = max(reach[i],
				lessRounding(float64(w.near*at), float64(w.far*before)),
				lessRounding(float64(w.nearEnd*next), float64(w.farEnd*after)))
		}
	}
	p.repeat()
	p.raise(10)
	p.enclose()
}

// lessRounding returns x − y, both not negative, less what rounding of them can
// have added.
func lessRounding(x, y float64) float64 { return (x - y) - float64(0x1p-48*(x+y)) }

// repeat copies the last direction to those beyond it.
func (p *polygon) repeat() {
	for i := Directions; i < len(p.reach); i++ {
		p.reach[i] = p.reach[Directions-1]
	}
}

// sweepWeights are those of the distances i degrees after a direction of a sweep:
// of that and the one before, and of the next and the one after.
var sweepWeights = func() (list [sweep]struct{ near, far, nearEnd, farEnd float64 }) {
	whole := compass.Sin[sweep]
	for i := range list {
		w := &list[i]
		w.near, w.far = compass.Sin[sweep+i]/whole, compass.Sin[i]/whole
		w.nearEnd, w.farEnd = compass.Sin[2*sweep-i]/whole, compass.Sin[sweep-i]/whole
	}
	return list
}()

var sweepCompass = func() (c kernel.SweepCompass) {
	for k := range c {
		for i := range c[k].Cos {
			c[k].Cos[i], c[k].Sin[i] = compass.Cos[k*sweep], compass.Sin[k*sweep]
		}
	}
	return c
}()

// widen takes in points of the motion.
func (p *polygon) widen(points []kernel.Point) { kernel.Widen(&p.reach, &compass, points) }

// raise lifts the floor by so many bisections, and returns the greatest L.
func (p *polygon) raise(bisections int) (top float64) {
	top = kernel.Greatest(&p.reach)
	most := top
	for range bisections {
		middle := float64(0.5 * (p.floor + most))
		if p.above(middle) > half {
			p.floor = middle
		} else {
			most = middle
		}
	}
	return top
}

// enclose sets the fence, and least.
func (p *polygon) enclose() {
	var tangent [kernel.Sides + 1]float64
	share := p.tangents(tangent[:])
	p.least = math.Inf(1)
	const side = Directions / kernel.Sides
	for k := range p.fence {
		distance := float64(share * tangent[k])
		p.fence[k] = kernel.Point{X: compass.Cos[k*side] / distance, Y: compass.Sin[k*side] / distance}
		p.least = min(p.least, distance)
	}
}

// tangents sets list to max(L(θ), floor) in evenly spaced directions, the first
// again at the end, and returns the share that they are to be drawn in by so that
// their corners keep within it in the directions between. Between two of them, n
// degrees apart, the corner's distance in direction θ is that of both, weighed
// with sines.
func (p *polygon) tangents(list []float64) (share float64) {
	last := len(list) - 1
	n := Directions / last
	for k := range last {
		list[k] = max(p.reach[k*n], p.floor)
	}
	list[last] = list[0]
	share = 1
	whole := compass.Sin[n]
	for k := range last {
		from, to := list[k]/whole, list[k+1]/whole
		for i := 1; i < n; i++ {
			corner := float64(from*compass.Sin[n-i]) + float64(to*compass.Sin[i])
			if x := max(p.reach[k*n+i], p.floor); x < float64(share*corner) {
				share = x / corner
			}
		}
	}
	return share
}

// isBeyond reports whether a point is not within a share of the fence. The nearest
// sides are least away, which settles most points.
func (p *polygon) isBeyond(x, y, share float64) bool {
	if inner := float64(share * p.least); share > 0 && float64(x*x)+float64(y*y) < float64(inner*inner) {
		return false
	}
	for i := range p.fence {
		if math.Abs(toward(x, y, p.fence[i].X, p.fence[i].Y)) > share {
			return true
		}
	}
	return false
}

// above returns how many of L exceed x.
func (p *polygon) above(x float64) int {
	set := &p.set
	p.reach.Above(x, set)
	return bits.OnesCount64(set[0]) + bits.OnesCount64(set[1]) + bits.OnesCount64(set[2])
}

// surrounds reports whether the sum of a free vibration in the plane, from (x, y)
// with velocities (vx, vy) over ω, and of a motion on the straight line between two
// points cannot matter: in direction θ it is at most
//
//	√((x·cos θ + y·sin θ)² + (vx·cos θ + vy·sin θ)²)
//
// from that line, the square of which is a constant with a cosine and a sine of
// 2θ. The constant is raised by what rounding can take from the square where it
// is small.
func (p *polygon) surrounds(x, vx, y, vy float64, from, to kernel.Point) bool {
	first, second := float64(x*x)+float64(vx*vx), float64(y*y)+float64(vy*vy)
	p.form = kernel.Form{
		Middle: float64((0.5 + 0x1p-48) * (first + second)), Cosine: float64(0.5 * (first - second)),
		Sine: float64(x*y) + float64(vx*vy), Floor: p.floor, Points: [2]kernel.Point{from, to},
	}
	return !p.reach.Exceeds(&compass, &twice, &p.form)
}

// compass holds the cosines and sines of the directions, twice those of double
// the angles.
var compass, twice = func() (single, double kernel.Compass) {
	for k := range single.Cos {
		sin, cos := sinCosDegrees(min(k, Directions-1))
		single.Sin[k], single.Cos[k] = sin, cos
		double.Sin[k], double.Cos[k] = float64(2*float64(sin*cos)), float64((cos-sin)*(cos+sin))
	}
	return single, double
}()

// toward returns the component of (x, y) in a direction.
func toward(x, y, cos, sin float64) float64 { return math.FMA(cos, x, float64(sin*y)) }

// sinCosDegrees returns the sine and cosine of k degrees, 0 <= k < 180, rounded
// from twice the precision, so that their bits depend on no library.
func sinCosDegrees(k int) (sin, cos float64) {
	rest := k % 90
	s, c := sinCosWithin(min(rest, 90-rest))
	if rest > 45 {
		s, c = c, s
	}
	if k >= 90 {
		s, c = c, -s
	}
	return s, c
}

// sinCosWithin does it up to 45°, by Taylor series.
func sinCosWithin(k int) (sin, cos float64) {
	x := double{math.Pi, 1.2246467991473532e-16}.times(float64(k)).over(180)
	term, s, c := double{1, 0}, double{}, double{}
	for n := range 26 {
		switch n % 4 {
		case 0:
			c = c.add(term)
		case 1:
			s = s.add(term)
		case 2:
			c = c.sub(term)
		case 3:
			s = s.sub(term)
		}
		term = term.mul(x).over(float64(n + 1))
	}
	return s.hi, c.hi
}
