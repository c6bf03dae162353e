package kernel

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// planeCase is made-up data for the functions of the plane and what they make of
// it, each in a block of its own, so that guards can lie round all of them.
type planeCase struct {
	start         Outline
	outline       *Outline
	compass       *Compass
	twice         *Compass
	form          *Form
	limit         float64 // of Above
	rays          *Rays
	fence         *Fence
	orbits        *OrbitFence
	points        []Point
	rowsX, rowsY  []Row
	marksX, marks []Mark
	lines         []Line
	ground        []float64 // one more than points
	groundY       []float64
	compasses     *SweepCompass
	displaced     *Displaced
	vibration     *Vibration
	rowsEnd       []Row // rowsX and one more
	want          uint32
	every         int // of Sweep.Add and ScreenFence

	set      *Above
	exceeds  bool
	greatest float64
	rows     []Row
	level    []Row  // what Displace makes
	states   []Mark // what Vibrate makes
	sweep    *Sweep
	flags    [2][]uint32
	sums     [2][]Mark
}

// compassOf returns the cosines and sines of factor times the directions.
func compassOf(factor float64) *Compass {
	c := new(Compass)
	for i := range c.Cos {
		c.Sin[i], c.Cos[i] = math.Sincos(factor * float64(min(i, Directions-1)) * math.Pi / Directions)
	}
	return c
}

// newPlane makes noise of n points, rows and marks of which about half are
// within what is round them, with numbers drawn by next.
func newPlane(n int, want uint32, next func() float64) *planeCase {
	c := &planeCase{
		outline: new(Outline), compass: compassOf(1), twice: compassOf(2), form: new(Form),
		rays: new(Rays), fence: new(Fence), orbits: new(OrbitFence), set: new(Above),
		points: make([]Point, n), rowsX: make([]Row, n), rowsY: make([]Row, n),
		marksX: make([]Mark, n), marks: make([]Mark, n), lines: make([]Line, n),
		ground: make([]float64, n+1), groundY: make([]float64, n+1), compasses: new(SweepCompass), displaced: new(Displaced),
		vibration: new(Vibration), rowsEnd: make([]Row, n+1), states: make([]Mark, n),
		rows: make([]Row, n), level: make([]Row, n), sweep: new(Sweep), want: want, every: 1, limit: math.Abs(next()),
	}
	for i := range c.flags {
		c.flags[i], c.sums[i] = make([]uint32, n), make([]Mark, n)
	}
	c.drawOutline(next)
	c.drawRows(next)
	c.drawLanes(next)
	return c
}

func (c *planeCase) drawOutline(next func() float64) {
	for i := range c.start {
		c.start[i] = math.Abs(next())
		if i >= Directions {
			c.start[i] = c.start[Directions-1]
		}
	}
	f := c.form
	f.Middle, f.Cosine, f.Sine, f.Floor = next(), next(), next(), math.Abs(next())
	f.Points = [2]Point{{next(), next()}, {next(), next()}}
	for i := range c.compasses {
		sin, cos := math.Sincos(float64(i) * math.Pi / Sweeps)
		for l := range c.compasses[i].Cos {
			c.compasses[i].Cos[l], c.compasses[i].Sin[l] = cos, sin
		}
	}
}

func (c *planeCase) drawRows(next func() float64) {
	for i := range c.points {
		c.points[i] = Point{next(), next()}
		c.lines[i] = Line{math.Abs(0.5 * next()), math.Abs(0.5 * next())}
		for _, row := range []*Row{&c.rowsX[i], &c.rowsY[i], &c.marksX[i].X, &c.marksX[i].Y, &c.marks[i].X, &c.marks[i].Y} {
			for l := range row {
				row[l] = next()
			}
		}
		for l := range Lanes {
			c.marksX[i].Peak[l], c.marks[i].Peak[l] = math.Abs(next()), math.Abs(next())
		}
	}
	copy(c.rowsEnd, c.rowsX)
	for l := range Lanes {
		c.rowsEnd[len(c.points)][l] = next()
	}
	for i := range c.ground {
		c.ground[i], c.groundY[i] = next(), next()
	}
}

func (c *planeCase) drawLanes(next func() float64) {
	for l := range Lanes {
		c.rays.Cos[l], c.rays.Sin[l] = next(), next()
		c.displaced.Scale[l], c.displaced.Slope[l], c.displaced.Level[l] = next(), next(), next()
		v := c.vibration
		for _, row := range []*Row{&v.Scale, &v.Level, &v.Slope, &v.Carry, &v.Change, &v.Push, &v.Bend} {
			row[l] = next()
		}
		c.fence.Limit[l] = 2 * math.Abs(next())
		for k := range c.fence.Sides {
			c.fence.Sides[k].X[l], c.fence.Sides[k].Y[l] = next(), next()
		}
		o := c.orbits
		o.Level[l], o.Slope[l], o.Rise[l] = 0.3*next(), 0.3*next(), 0.3*math.Abs(next())
		o.First[l], o.Second[l], o.Inner[l] = 0.3*math.Abs(next()), 0.3*math.Abs(next()), math.Abs(next())
		for k := range o.Sides {
			x, y := 0.3*next(), 0.3*next()
			side := &o.Sides[k]
			side.XX[l], side.XY[l], side.YY[l], side.X[l], side.Y[l] = x*x, 2*x*y, y*y, x, y
		}
	}
}

// normal returns a source of seeded noise.
func normal(seed uint64) func() float64 {
	return rand.New(rand.NewPCG(seed, 11)).NormFloat64
}

// run calls every function of the plane.
func (c *planeCase) run() {
	*c.outline = c.start
	for k := range c.sweep {
		c.sweep[k] = Row(c.start[k : k+Lanes])
	}
	c.sweep.Add(c.compasses, c.rowsX, c.rowsY, c.every)
	Displace(c.level, c.displaced, c.marksX, c.ground)
	Vibrate(c.states, c.vibration, c.rowsEnd, c.ground, c.want)
	Widen(c.outline, c.compass, c.points)
	c.outline.Above(c.limit, c.set)
	c.exceeds = c.outline.Exceeds(c.compass, c.twice, c.form)
	c.greatest = Greatest(c.outline)
	Project(c.rows, c.rays, c.points, c.want)
	for i := range c.flags {
		for j := range c.flags[i] {
			c.flags[i][j] = []uint32{0xdeadbeef, c.want}[i]
		}
	}
	ScreenFence(c.fence, c.rowsX, c.rowsY, c.every, c.flags[0], c.want)
	ScreenOrbits(c.orbits, c.inOrbit(), c.flags[1])
	JoinPeaks(c.sums[0], c.marksX, c.marks, false)
	JoinPeaks(c.sums[1], c.marksX, c.marks, true)
	for i := range c.rows {
		for l := range Lanes {
			if c.want>>l&1 == 0 {
				c.rows[i][l], c.states[i].X[l], c.states[i].Y[l] = 0, 0, 0
			}
		}
	}
}

// inOrbit returns the marks as free vibrations.
func (c *planeCase) inOrbit() *Orbits {
	return &Orbits{c.marksX, c.marks, c.ground, c.groundY, c.lines}
}

// part is the bits of some of what run made.
type part struct {
	name string
	bits []uint64
}

// made returns the bits of all that run made.
func (c *planeCase) made() []part {
	numbers := func(name string, list ...float64) part {
		p := part{name: name}
		for _, x := range list {
			p.bits = append(p.bits, math.Float64bits(x))
		}
		return p
	}
	list := []part{
		numbers("outline", c.outline[:]...), {"above", c.set[:]}, numbers("greatest", c.greatest),
	}
	if c.exceeds {
		list = append(list, part{name: "exceeds"})
	}
	for k := range c.sweep {
		list = append(list, numbers(fmt.Sprint("sweep ", k), c.sweep[k][:]...))
	}
	for i := range c.points {
		list = append(list, numbers(fmt.Sprint("row ", i), c.rows[i][:]...), numbers(fmt.Sprint("level ", i), c.level[i][:]...),
			numbers(fmt.Sprint("vibration ", i), append(c.states[i].X[:], c.states[i].Y[:]...)...),
			part{fmt.Sprint("flags ", i), []uint64{uint64(c.flags[0][i]), uint64(c.flags[1][i])}},
			numbers(fmt.Sprint("sum of squares ", i), c.sums[0][i].Peak[:]...),
			numbers(fmt.Sprint("sum ", i), c.sums[1][i].Peak[:]...))
	}
	return list
}

// wantShapes returns sets of lanes of all shapes: none, all, single ones, those
// of whole vectors of either width, and a mixture.
func wantShapes() []uint32 {
	list := []uint32{0, ^uint32(0), 0x80000001, 0x5aa50ff0, 0x00ffff00}
	for l := range Lanes {
		list = append(list, 1<<l)
	}
	for l := 0; l < Lanes; l += 8 {
		list = append(list, 0xff<<l, 0xf<<l, 0xf0<<l)
	}
	return list
}

// everyPlane compares each kernel with the portable one.
func everyPlane(t *testing.T, label string, c *planeCase) {
	t.Helper()
	use(t, Portable)
	c.run()
	want := c.made()
	for _, name := range Names() {
		use(t, name)
		c.run()
		got := c.made()
		if len(got) != len(want) {
			t.Fatalf("%s %s: exceeds is %v", label, name, c.exceeds)
		}
		for i, got := range got {
			if !slices.Equal(got.bits, want[i].bits) {
				t.Fatalf("%s %s: %s\n%#x, want\n%#x", label, name, got.name, got.bits, want[i].bits)
			}
		}
	}
}

// TestPlaneKernelsAgree holds every kernel to the bits of the portable one, for
// all numbers of points from 0 to 70 and sets of lanes of all shapes.
func TestPlaneKernelsAgree(t *testing.T) {
	for n := range 71 {
		c := newPlane(n, 0, normal(uint64(n)))
		c.every = 1 + n%5
		for _, c.want = range wantShapes() {
			everyPlane(t, fmt.Sprintf("n %d want %#x", n, c.want), c)
		}
	}
}

// TestPlaneKernelsAgreeOnOddNumbers does so for zeros of both signs, and for
// subnormal and huge numbers, whose squares underflow or overflow.
func TestPlaneKernelsAgreeOnOddNumbers(t *testing.T) {
	for name, values := range map[string][]float64{
		"zeros":     {0, math.Copysign(0, -1)},
		"subnormal": {5e-324, -5e-324, 1e-310, -3e-320, 2.3e-308},
		"underflow": {1e-170, -3e-165, 1e-300, 7e-162},
		"large":     {1e150, -1e150, 3e153, -1e140, 2e154},
		"huge":      {1e300, -1e300, math.MaxFloat64, -math.MaxFloat64, 1e290},
		"mixed":     {1, -1e-300, 1e300, 0, 5e-324, -1e18},
		"unequal":   {1, -1e-9, 3, -1, 1e-160, 0.1},
	} {
		for _, want := range []uint32{^uint32(0), 0x00f0ff01} {
			r := rand.New(rand.NewPCG(17, 0))
			c := newPlane(66, want, func() float64 { return values[r.IntN(len(values))] })
			everyPlane(t, fmt.Sprintf("%s, want %#x", name, want), c)
		}
	}
}

// FuzzPlane compares all kernels on any bytes, finite.
func FuzzPlane(f *testing.F) {
	f.Add([]byte{1, 2, 3, 250, 0, 0, 7}, 5, ^uint32(0), 0)
	f.Add([]byte{255, 128, 0, 1}, 66, uint32(0x0f0ff001), -1070)
	f.Add([]byte{127, 129, 3}, 17, uint32(0xff00), 1010)
	f.Fuzz(func(t *testing.T, data []byte, n int, want uint32, exponent int) {
		if len(data) == 0 {
			data = []byte{0}
		}
		exponent = min(max(exponent, -1100), 1010)
		i := 0
		c := newPlane(int(uint(n)%71), want, func() float64 {
			i++
			return math.Ldexp(float64(int8(data[i%len(data)]))+float64(i%7)/8, exponent)
		})
		everyPlane(t, fmt.Sprintf("n %d exponent %d", n, exponent), c)
	})
}
