package kernel

import (
	"math"
	"math/bits"
	"unsafe"
)

// Directions is the number of directions of an Outline; outlineWidth fills whole
// vectors.
const (
	Directions   = 180
	outlineWidth = 192
)

// Outline holds one number for each direction, and in the rest copies of the
// last.
type Outline [outlineWidth]float64

// Compass holds the cosines and sines of the directions, and copies of the last.
type Compass struct{ Cos, Sin Outline }

// Point is a point of the plane.
type Point struct{ X, Y float64 }

// Widen raises each number of an outline to the greatest |x·cos θ + y·sin θ| of
// the points in its direction. Of numbers that are not finite it makes numbers
// that are unspecified.
func Widen(o *Outline, c *Compass, points []Point) {
	if len(points) > 0 {
		current.widen(o, c, &points[0], len(points))
	}
}

// Above is a set of directions of an outline: bit i%64 of word i/64.
type Above [3]uint64

// Above sets set to the directions of which the numbers exceed x >= 0.
func (o *Outline) Above(x float64, set *Above) {
	current.above(o, x, set)
	set[Directions/64] &= 1<<(Directions%64) - 1
}

// Exceeds reports whether in some direction
//
//	Middle + Cosine·cos 2θ + Sine·sin 2θ > max(0, max(x, Floor) − p)²
//
// with x the number of the outline and p the greater |X·cos θ + Y·sin θ| of the
// form's two points; twice is the compass of the double angles.
func (o *Outline) Exceeds(c, twice *Compass, f *Form) bool {
	return current.exceeds(o, c, twice, f) != 0
}

// Form holds the coefficients of Exceeds.
type Form struct {
	Middle, Cosine, Sine, Floor float64
	Points                      [2]Point
}

// Greatest returns the greatest of the numbers of an outline, none negative.
func Greatest(o *Outline) float64 { return current.greatestOf(o) }

// Project sets lane l of rows[i] to x·Cos + y·Sin of point i and the direction of
// the lane, for the lanes whose bits want has; other lanes of rows are
// unspecified. It panics if lengths differ.
func Project(rows []Row, rays *Rays, points []Point, want uint32) {
	checkLines(len(rows), len(points), len(points))
	if len(rows) > 0 {
		current.project(&rows[0], rays, &points[0], len(rows), want)
	}
}

// Sweeps is the number of directions of a Sweep, evenly spaced over half a turn.
const Sweeps = 18

// Sweep holds for each of its directions the greatest distance in it, of each
// lane.
type Sweep [Sweeps]Row

// SweepCompass holds the cosines and sines of a Sweep's directions, each in all
// lanes of a vector.
type SweepCompass [Sweeps]struct{ Cos, Sin [8]float64 }

// Add raises the distances to the greatest |x·cos θ + y·sin θ| of the first of
// every so many rows. It panics if lengths differ or every is less than 1.
func (s *Sweep) Add(c *SweepCompass, x, y []Row, every int) {
	checkLines(len(x), len(y), len(y))
	if n := countOf(len(x), every); n > 0 {
		current.sweep(s, c, &x[0], &y[0], n, every)
	}
}

// countOf returns the number of rows 0, every, 2·every, … of n.
func countOf(n, every int) int {
	if every < 1 {
		panic("kernel: distance between rows is not positive")
	}
	return (n + every - 1) / every
}

// Displaced holds for each lane what makes displacements of free vibrations.
type Displaced struct{ Scale, Slope, Level Row }

// Displace sets rows[i] to Scale·states[i].X + Slope·(a[i+1] − a[i]) + Level·a[i].
// It panics unless there is one row a state, and one more of a.
func Displace(rows []Row, q *Displaced, states []Mark, a []float64) {
	checkLines(len(rows), len(states), len(a)-1)
	if len(rows) > 0 {
		current.displace(&rows[0], q, &states[0], &a[0], len(rows))
	}
}

// Vibration holds for each lane what makes free vibrations of displacements at the
// ends of a step.
type Vibration struct{ Scale, Level, Slope, Carry, Change, Push, Bend Row }

// Vibrate sets, with s = a[i+1] − a[i], for the lanes whose bits want has
//
//	states[i].X = Scale·rows[i] + Slope·s + Level·a[i]
//	states[i].Y = Change·(rows[i+1] − rows[i]) + Carry·rows[i] + Bend·s + Push·a[i]
//
// Other lanes of states are unspecified, and peaks are left alone. It panics unless
// there is one state a step, and one more of rows and of a.
func Vibrate(states []Mark, q *Vibration, rows []Row, a []float64, want uint32) {
	checkLines(len(states), len(rows)-1, len(a)-1)
	if len(states) > 0 {
		current.vibrate(&states[0], q, &rows[0], &a[0], len(states), want)
	}
}

// Rays holds a direction for each lane.
type Rays struct{ Cos, Sin Row }

// Sides is the number of pairs of sides of a Fence and of an OrbitFence.
const Sides = 12

// Fence holds for each lane the region in which all of
//
//	|x·X[i] + y·Y[i]| <= Limit
//
// hold.
type Fence struct {
	Sides [Sides]struct{ X, Y Row }
	Limit Row
}

// ScreenFence sets bit l of flags[i] where (x[i][l], y[i][l]) is not within the
// fence of lane l, i is 0 or a multiple of every, and l is one of the bits of want,
// and clears it elsewhere. It panics if lengths differ or every is less than 1.
func ScreenFence(f *Fence, x, y []Row, every int, flags []uint32, want uint32) {
	checkLines(len(x), len(y), len(flags))
	clear(flags)
	if n := countOf(len(x), every); n > 0 {
		current.screenFence(f, &x[0], &y[0], every, &flags[0], n, want)
	}
}

// OrbitFence holds for each lane the region of steps in which the sum of a straight
// line with the middle (mx, my), m = Level·(a[i] + a[i+1]) + Slope·(a[i+1] − a[i]),
// and of a free vibration (x, y) with displacements X and velocities Y satisfies, for
// all sides,
//
//	XX·(x.X² + x.Y²) + XY·(x.X·y.X + x.Y·y.Y) + YY·(y.X² + y.Y²) <= max(0, 1 − |X·mx + Y·my| − Rise·line.Second)²
//
// or Inner·(x.X² + x.Y² + y.X² + y.Y²) <= max(0, 1 − First·line.First − Second·line.Second)².
type OrbitFence struct {
	Sides                [Sides]struct{ XX, XY, YY, X, Y Row }
	First, Second, Inner Row
	Level, Slope, Rise   Row
}

// Orbits are the free vibrations of two motions at the start of each step, their
// ground accelerations, and of each step the line for an OrbitFence.
type Orbits struct {
	X, Y             []Mark
	GroundX, GroundY []float64
	Lines            []Line
}

// ScreenOrbits clears bit l of flags[i] where step i is within the region of lane l. It
// panics unless there is one flag, free vibration and line a step, and one more of
// the ground.
func ScreenOrbits(f *OrbitFence, o *Orbits, flags []uint32) {
	n := len(flags)
	checkLines(len(o.X), len(o.Y), n)
	checkLines(len(o.GroundX)-1, len(o.GroundY)-1, n)
	checkLines(len(o.Lines), n, n)
	if n > 0 {
		current.screenOrbits(f, &o.X[0], &o.Y[0], &o.GroundX[0], &o.GroundY[0], &o.Lines[0], &flags[0], n)
	}
}

// JoinPeaks sets the peak of each mark of sums to the sum of the squares of the
// peaks of a pair of marks, or of the peaks where they are squares, and a number so
// small that it only keeps the sum above 0. It panics if lengths differ. sums may
// be one of the others.
func JoinPeaks(sums, first, second []Mark, squares bool) {
	checkLines(len(sums), len(first), len(second))
	for i := range sums {
		x, y, sum := &first[i].Peak, &second[i].Peak, &sums[i].Peak
		if squares {
			for l := range sum {
				sum[l] = (x[l] + y[l]) + aboveZero
			}
			continue
		}
		for l := range sum {
			sum[l] = math.FMA(x[l], x[l], float64(y[l]*y[l])) + aboveZero
		}
	}
}

// aboveZero is the least normal number.
const aboveZero = 0x1p-1022

func widenGeneric(o *Outline, c *Compass, points *Point, n int) {
	list := unsafe.Slice(points, n)
	for i := range o {
		top, cos, sin := o[i], c.Cos[i], c.Sin[i]
		for _, p := range list {
			if x := math.Abs(math.FMA(cos, p.X, float64(sin*p.Y))); x > top {
				top = x
			}
		}
		o[i] = top
	}
}

func aboveGeneric(o *Outline, x float64, set *Above) {
	*set = Above{}
	for i, y := range o {
		if y > x {
			set[i/64] |= 1 << (i % 64)
		}
	}
}

func exceedsGeneric(o *Outline, c, twice *Compass, f *Form) uint64 {
	found := uint64(0)
	for i, x := range o {
		if !(x > f.Floor) {
			x = f.Floor
		}
		p := math.Abs(math.FMA(c.Cos[i], f.Points[0].X, float64(c.Sin[i]*f.Points[0].Y)))
		if q := math.Abs(math.FMA(c.Cos[i], f.Points[1].X, float64(c.Sin[i]*f.Points[1].Y))); !(p > q) {
			p = q
		}
		x -= p
		if !(x > 0) {
			x = 0
		}
		if math.FMA(f.Sine, twice.Sin[i], math.FMA(f.Cosine, twice.Cos[i], f.Middle)) > float64(x*x) {
			found = 1
		}
	}
	return found
}

func greatestOfGeneric(o *Outline) float64 {
	top := 0.0
	for _, x := range o {
		top = max(top, x)
	}
	return top
}

func projectGeneric(rows *Row, rays *Rays, points *Point, n int, want uint32) {
	list, out := unsafe.Slice(points, n), unsafe.Slice(rows, n)
	for left := want; left != 0; left &= left - 1 {
		l := bits.TrailingZeros32(left)
		cos, sin := rays.Cos[l], rays.Sin[l]
		for i, p := range list {
			out[i][l] = math.FMA(cos, p.X, float64(sin*p.Y))
		}
	}
}

func screenFenceGeneric(f *Fence, x, y *Row, every int, flags *uint32, n int, want uint32) {
	last := (n - 1) * every
	xs, ys, out := unsafe.Slice(x, last+1), unsafe.Slice(y, last+1), unsafe.Slice(flags, last+1)
	for left := want; left != 0; left &= left - 1 {
		l := bits.TrailingZeros32(left)
		for i := 0; i <= last; i += every {
			u, v, top := xs[i][l], ys[i][l], 0.0
			for k := range f.Sides {
				side := &f.Sides[k]
				top = max(top, math.Abs(math.FMA(side.X[l], u, float64(side.Y[l]*v))))
			}
			if top > f.Limit[l] {
				out[i] |= 1 << l
			}
		}
	}
}

func screenOrbitsGeneric(f *OrbitFence, x, y *Mark, groundX, groundY *float64, lines *Line, flags *uint32, n int) {
	xs, ys := unsafe.Slice(x, n), unsafe.Slice(y, n)
	ax, ay := unsafe.Slice(groundX, n+1), unsafe.Slice(groundY, n+1)
	list, out := unsafe.Slice(lines, n), unsafe.Slice(flags, n)
	for i, line := range list {
		for left := out[i]; left != 0; left &= left - 1 {
			l := bits.TrailingZeros32(left)
			a, b, c, d := xs[i].X[l], xs[i].Y[l], ys[i].X[l], ys[i].Y[l]
			xx, xy, yy := math.FMA(a, a, float64(b*b)), math.FMA(a, c, float64(b*d)), math.FMA(c, c, float64(d*d))
			r := math.FMA(-f.Second[l], line.Second, math.FMA(-f.First[l], line.First, 1))
			if !(r > 0) {
				r = 0
			}
			if !(float64(f.Inner[l]*(xx+yy)) > float64(r*r)) {
				out[i] &^= 1 << l
				continue
			}
			dx, dy := ax[i+1]-ax[i], ay[i+1]-ay[i]
			mx := math.FMA(f.Level[l], ax[i]+ax[i+1], float64(f.Slope[l]*dx))
			my := math.FMA(f.Level[l], ay[i]+ay[i+1], float64(f.Slope[l]*dy))
			room, top := math.FMA(-f.Rise[l], line.Second, 1), 0.0
			for k := range f.Sides {
				side := &f.Sides[k]
				r := room - math.Abs(math.FMA(side.X[l], mx, float64(side.Y[l]*my)))
				if !(r > 0) {
					r = 0
				}
				orbit := math.FMA(side.XX[l], xx, math.FMA(side.XY[l], xy, float64(side.YY[l]*yy)))
				if over := orbit - float64(r*r); over > top {
					top = over
				}
			}
			if !(top > 0) {
				out[i] &^= 1 << l
			}
		}
	}
}

// sweepGeneric passes over rows within a circle that all distances have reached.
func sweepGeneric(s *Sweep, c *SweepCompass, x, y *Row, n, every int) {
	last := (n - 1) * every
	xs, ys := unsafe.Slice(x, last+1), unsafe.Slice(y, last+1)
	for l := range Lanes {
		inner := s[0][l]
		for k := range s {
			inner = min(inner, s[k][l])
		}
		inner = min(float64(inner*inner)*withinRounding, math.MaxFloat64)
		for i := 0; i <= last; i += every {
			u, v := xs[i][l], ys[i][l]
			if !(math.FMA(u, u, math.FMA(v, v, aboveZero)) > inner) {
				continue
			}
			for k := range s {
				if d := math.Abs(math.FMA(c[k].Cos[0], u, float64(c[k].Sin[0]*v))); d > s[k][l] {
					s[k][l] = d
				}
			}
		}
	}
}

// withinRounding makes the square of a distance so much less that rounding cannot
// take what exceeds the distance in some direction for less.
const withinRounding = 1 - 0x1p-40

func displaceGeneric(rows *Row, q *Displaced, states *Mark, a *float64, n int) {
	out, list, ground := unsafe.Slice(rows, n), unsafe.Slice(states, n), unsafe.Slice(a, n+1)
	for i := range out {
		level, slope := ground[i], ground[i+1]-ground[i]
		for l := range out[i] {
			out[i][l] = math.FMA(q.Scale[l], list[i].X[l], math.FMA(q.Slope[l], slope, float64(q.Level[l]*level)))
		}
	}
}

func vibrateGeneric(states *Mark, q *Vibration, rows *Row, a *float64, n int, want uint32) {
	out, list, ground := unsafe.Slice(states, n), unsafe.Slice(rows, n+1), unsafe.Slice(a, n+1)
	for left := want; left != 0; left &= left - 1 {
		l := bits.TrailingZeros32(left)
		for i := range out {
			level, slope, u := ground[i], ground[i+1]-ground[i], list[i][l]
			out[i].X[l] = math.FMA(q.Scale[l], u, math.FMA(q.Slope[l], slope, float64(q.Level[l]*level)))
			forced := math.FMA(q.Bend[l], slope, float64(q.Push[l]*level))
			out[i].Y[l] = math.FMA(q.Change[l], list[i+1][l]-u, math.FMA(q.Carry[l], u, forced))
		}
	}
}
