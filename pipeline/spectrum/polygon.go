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
// above it. Let ceiling be a number that both middle values are taken not to
// exceed, which is seen at the end. Then a direction with L(θ) >= ceiling is above
// them whatever else the motion does in it. So a point matters only if in some
// direction it is farther out than the limit there: the greatest L where L has
// reached the ceiling, and max(L(θ), floor) elsewhere. The fence surrounds a region
// without such points.
type polygon struct {
	reach          kernel.Outline          // L
	limits         kernel.Outline          // of all directions, as enclose found them
	round          [Directions + 1]float64 // the limits from the first side round to it again
	floor, ceiling float64
	fence          [kernel.Sides]side
	slack          float64      // what the fence has needed
	least          float64      // the least distance of a side
	set            kernel.Above // here, as form, because what kernels use must not be allocated
	form           kernel.Form
}

// side is one of a fence: its distance along a direction.
type side struct {
	direction int
	distance  float64
}

// begin sets what is known from the D of both components. The motion has a point
// at a distance of at least the greater one, which has more than 0.69 of that in
// all directions up to 46° from its own.
func (p *polygon) begin(first, second float64) {
	p.reach = kernel.Outline{}
	p.reach[0], p.reach[half] = first, second
	p.floor, p.ceiling, p.slack = float64(0.69*max(first, second)), math.Inf(1), leastSlack
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

// enclose sets the limits and the fence.
func (p *polygon) enclose() {
	top := kernel.Greatest(&p.reach)
	first := 0
	for i, x := range &p.reach {
		if x >= p.ceiling {
			x, first = top, i+1 // a fence best begins where limits fall
		}
		p.limits[i] = max(x, p.floor)
	}
	if first >= Directions {
		first = 0
	}
	n := copy(p.round[:], p.limits[first:Directions])
	copy(p.round[n:], p.limits[:first+1])
	for !p.wrap(first) {
		p.slack *= 2
	}
}

// leastSlack is the share by which corners of a fence may be beyond the limits, so
// that the whole is drawn in by it, at least; widestSide is the greatest angle
// between two sides in degrees.
const (
	leastSlack = 0.01
	widestSide = 45
)

// wrap draws a fence that begins at direction first, with corners beyond the limits
// by the slack at most, and reports whether it had sides enough.
//
// Between sides at directions i and j no point of the plane within both is farther
// out than their corner. On the line of side i the corner is at a distance
//
//	t(j) = ℓ(j)/sin(j − i) − ℓ(i)/tan(j − i)
//
// from the foot of i, and within the limit ℓ(m) of a direction between if and only
// if t(j) <= t(m). Each side is followed by the last one up to which that holds, ℓ(m)
// raised by the slack.
func (p *polygon) wrap(first int) bool {
	share := 1 / (1 + p.slack)
	p.least = math.Inf(1)
	at := 0
	for n := range p.fence {
		distance := p.round[at]
		p.fence[n] = side{(first + at) % Directions, float64(share * distance)}
		p.least = min(p.least, p.fence[n].distance)
		next, most := at+1, math.Inf(1)
		for j, x := range p.round[at+1 : min(at+widestSide, Directions)+1] {
			a := &angles[j+1]
			t := float64(x*a.cosecant) - float64(distance*a.cotangent)
			if t > most {
				break
			}
			next, most = at+1+j, min(most, t+float64(p.slack*float64(x*a.cosecant)))
		}
		if at = next; at == Directions {
			for n++; n < len(p.fence); n++ {
				p.fence[n] = p.fence[0]
			}
			return true
		}
	}
	return false
}

// angles holds 1/sin and 1/tan of the angles between sides, from 1°.
var angles = func() (list [widestSide + 1]struct{ cosecant, cotangent float64 }) {
	for i := 1; i < len(list); i++ {
		list[i].cosecant, list[i].cotangent = 1/compass.Sin[i], compass.Cos[i]/compass.Sin[i]
	}
	return list
}()

// normal returns the direction of a side over its distance.
func (s *side) normal() (x, y float64) {
	return compass.Cos[s.direction] / s.distance, compass.Sin[s.direction] / s.distance
}

// isBeyond reports whether a point is not within a share of the fence. The least
// distance settles most points.
func (p *polygon) isBeyond(x, y, share float64) bool {
	if inner := float64(share * p.least); share > 0 && float64(x*x)+float64(y*y) < float64(inner*inner) {
		return false
	}
	for i := range p.fence {
		s := &p.fence[i]
		if math.Abs(toward(x, y, compass.Cos[s.direction], compass.Sin[s.direction])) > float64(share*s.distance) {
			return true
		}
	}
	return false
}

// above returns how many of L exceed x.
func (p *polygon) above(x float64) int {
	p.reach.Above(x, &p.set)
	return countOf(&p.set)
}

func countOf(set *kernel.Above) int {
	return bits.OnesCount64(set[0]) + bits.OnesCount64(set[1]) + bits.OnesCount64(set[2])
}

// surrounds reports whether the sum of a free vibration in the plane, from (x, y)
// with velocities (vx, vy) over ω, and of a motion on the straight line between two
// points keeps within limits, each at least the floor: in direction θ it is at most
//
//	√((x·cos θ + y·sin θ)² + (vx·cos θ + vy·sin θ)²)
//
// from that line, the square of which is a constant with a cosine and a sine of
// 2θ. The constant is raised by what rounding can take from the square where it
// is small.
func (p *polygon) surrounds(limits *kernel.Outline, floor, x, vx, y, vy float64, from, to kernel.Point) bool {
	first, second := float64(x*x)+float64(vx*vx), float64(y*y)+float64(vy*vy)
	p.form = kernel.Form{
		Middle: float64((0.5 + 0x1p-48) * (first + second)), Cosine: float64(0.5 * (first - second)),
		Sine: float64(x*y) + float64(vx*vy), Floor: floor, Points: [2]kernel.Point{from, to},
	}
	return !limits.Exceeds(&compass, &twice, &p.form)
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
