package kernel

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// use switches to a kernel for the rest of a test.
func use(t testing.TB, name string) {
	t.Helper()
	before := Name()
	if err := Use(name); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := Use(before); err != nil {
			t.Fatal(err)
		}
	})
}

// testCase is made-up data for every function. NaN stands on both sides of the
// ground, so that results show a kernel that uses what is beyond; TestGuardPages
// finds one that only reads it, or writes beyond anything.
type testCase struct {
	slow   Slow
	train  Train
	fast   Fast
	start  Mark
	screen Screen
	steps  StepScreen
	want   uint32 // lanes of ScreenSteps
	stride Stride
	shares []Input
	turn   Turning
	ground []float64
}

// newCase makes oscillators of all kinds, damped and not, and noise of n
// samples.
func newCase(seed uint64, n int) *testCase {
	r := rand.New(rand.NewPCG(seed, 3))
	c := new(testCase)
	for l := range Lanes {
		phase := math.Exp(-6 * r.Float64())
		damping := max(0, 0.3*r.Float64()-0.05)
		c.slow.Decay[l], c.slow.Stiffness[l] = 1-2*damping*phase, phase*phase
		c.train.Decay[l], c.train.Stiffness[l] = c.slow.Decay[l]-c.slow.Stiffness[l], c.slow.Stiffness[l]
		c.slow.Middle[l], c.slow.Oldest[l] = 4-r.Float64(), 1-0.3*r.Float64()
		decay, angle := math.Exp(-damping), 6*r.Float64()
		c.fast.YY[l], c.fast.YZ[l] = decay*math.Cos(angle), decay*math.Sin(angle)
		c.fast.ZY[l], c.fast.ZZ[l] = -decay*math.Sin(angle), decay*math.Cos(angle)
		c.fast.Jump[l] = 2 * damping
		c.start.X[l], c.start.Y[l] = r.NormFloat64(), r.NormFloat64()
		c.screen.Limit[l], c.screen.First[l], c.screen.Second[l] = 2*r.Float64(), r.Float64(), r.Float64()
	}
	for l := range Lanes {
		c.steps.Best[l], c.steps.Force[l] = 20*r.Float64(), r.Float64()
		c.steps.Curve[l], c.steps.Slope[l] = r.Float64(), r.Float64()
	}
	for l := range Lanes {
		c.stride.UU[l], c.stride.UV[l] = -0.2*r.Float64(), 1+r.Float64()
		c.stride.VU[l], c.stride.VV[l] = -0.2*r.Float64(), -0.2*r.Float64()
		for k := range c.stride.Weights {
			c.stride.Weights[k].U[l], c.stride.Weights[k].V[l] = r.NormFloat64(), r.NormFloat64()
		}
	}
	for l := range Lanes {
		c.turn.U[l], c.turn.V[l] = r.NormFloat64(), r.NormFloat64()
		c.turn.Force[l], c.turn.Rise[l] = r.NormFloat64(), r.NormFloat64()
		c.turn.Linear[l], c.turn.Square[l] = r.NormFloat64(), r.Float64()
	}
	c.shares = make([]Input, 2+seed%5)
	for j := range c.shares {
		for k := range c.shares[j] {
			c.shares[j][k] = r.NormFloat64()
		}
	}
	c.want = r.Uint32() >> (seed % 3 * 8) // all vectors, or not the last
	ground := make([]float64, n)
	for i := range ground {
		ground[i] = r.NormFloat64()
	}
	c.ground = guarded(ground, 0)
	return c
}

// guarded returns a copy of values between NaN, some numbers further on than
// where memory was allocated.
func guarded(values []float64, offset int) []float64 {
	memory := make([]float64, len(values)+24)
	for i := range memory {
		memory[i] = math.NaN()
	}
	from, to := 8+offset, 8+offset+len(values)
	copy(memory[from:], values)
	return memory[from:to:to]
}

// outcome is all that the functions of this package make of a case.
type outcome struct {
	slow, slowEnd, fast, fastEnd Mark
	stride, strideEnd            Mark
	train, trainEnd              Mark
	inputs                       []Input
	few                          []Row // traces of the lanes asked for only
	rows                         []Row
	marks                        []Mark
	flags                        []uint32
	top                          Row
	visit                        []Row // what is made of lanes with a ground of their own
}

func (c *testCase) run() *outcome {
	o := &outcome{slow: c.start, fast: c.start, stride: c.start, train: c.start}
	steps := max(len(c.ground)-2, 0)
	// Guards round what the kernels write.
	rows, marks := make([]Row, steps+2), make([]Mark, len(c.ground)+2)
	some, someMarks := make([]Row, steps+2), make([]Mark, len(c.ground)+2)
	lines, flags := make([]Line, len(c.ground)), make([]uint32, 2*len(c.ground)+2)
	for i := range flags {
		flags[i] = 0xdeadbeef
	}
	for i := range lines {
		lines[i] = Line{math.Abs(c.ground[i]), 0.1 * float64(i%7)}
	}
	MarchSlow(&c.slow, &o.slow, &o.slowEnd, c.ground)
	MarchFast(&c.fast, &o.fast, &o.fastEnd, c.ground)
	if len(c.ground) >= trainBeyond {
		MarchTrain(&c.train, &o.train, &o.trainEnd, c.ground)
	}
	TraceSlow(&c.slow, &c.start, c.ground, rows[1:steps+1], ^uint32(0))
	TraceSlow(&c.slow, &c.start, c.ground, some[1:steps+1], c.want)
	TraceFast(&c.fast, &c.start, c.ground, marks[1:len(c.ground)+1], ^uint32(0))
	TraceFast(&c.fast, &c.start, c.ground, someMarks[1:len(c.ground)+1], c.want)
	o.few = keep(some, someMarks, c.want)
	inner, n := marks[1:len(c.ground)+1], len(c.ground)
	ScreenPeaks(&c.screen, inner, lines, flags[1:1+n])
	ScreenSquares(&c.screen, inner, lines, flags[1+n:1+2*n])
	visit := newVisit(c)
	GreatestPeaks(&o.top, visit.at, inner)
	o.visit = append(visit.run(c.ground), *visit.at)
	steps = max(steps-1, 0)
	stepFlags := make([]uint32, steps+1)
	stepFlags[steps] = 0xdeadbeef
	if steps > 0 {
		ScreenSteps(&c.steps, rows[1:steps+2], lines[:steps], stepFlags[:steps], c.want)
	}
	flags = append(flags, stepFlags...)
	m := len(c.shares) - 1
	o.inputs = make([]Input, max(n-1, 0)/m+2)
	if strides := o.inputs[1 : len(o.inputs)-1]; n > 0 {
		Mix(strides, c.shares, c.ground[:len(strides)*m+1])
		MarchStride(&c.stride, &o.stride, &o.strideEnd, strides)
	}
	o.rows, o.marks, o.flags = rows, marks, flags
	return o
}

// keep returns all rows of traces without the lanes that want does not have.
func keep(rows []Row, marks []Mark, want uint32) []Row {
	all := append([]Row{}, rows...)
	for _, m := range marks {
		all = append(all, m.X, m.Y, m.Peak)
	}
	for i := range all {
		for l := range Lanes {
			if want>>l&1 == 0 {
				all[i][l] = 0
			}
		}
	}
	return all
}

func same(x, y float64) bool {
	return math.Float64bits(x) == math.Float64bits(y) || math.IsNaN(x) && math.IsNaN(y)
}

// compare reports the first difference of bits. Peaks are left out where states
// are not finite.
func (o *outcome) compare(t *testing.T, label string, want *outcome) {
	t.Helper()
	finite := true
	check := func(what string, got, want *Row) {
		t.Helper()
		for l := range got {
			if !same(got[l], want[l]) {
				t.Fatalf("%s: %s of lane %d = %v (%#x), want %v (%#x)", label, what, l,
					got[l], math.Float64bits(got[l]), want[l], math.Float64bits(want[l]))
			}
			finite = finite && got[l]-got[l] == 0
		}
	}
	for i := range want.rows {
		check(fmt.Sprintf("slow trace %d", i-1), &o.rows[i], &want.rows[i])
	}
	for i := range want.few {
		check(fmt.Sprintf("some lanes %d", i), &o.few[i], &want.few[i])
	}
	check("slow end x", &o.slowEnd.X, &want.slowEnd.X)
	check("slow end y", &o.slowEnd.Y, &want.slowEnd.Y)
	for i := range want.marks {
		check(fmt.Sprintf("fast trace x %d", i-1), &o.marks[i].X, &want.marks[i].X)
		check(fmt.Sprintf("fast trace y %d", i-1), &o.marks[i].Y, &want.marks[i].Y)
		check(fmt.Sprintf("fast trace square %d", i-1), &o.marks[i].Peak, &want.marks[i].Peak)
	}
	check("fast end x", &o.fastEnd.X, &want.fastEnd.X)
	check("fast end y", &o.fastEnd.Y, &want.fastEnd.Y)
	check("train end x", &o.trainEnd.X, &want.trainEnd.X)
	check("train end y", &o.trainEnd.Y, &want.trainEnd.Y)
	check("stride end x", &o.strideEnd.X, &want.strideEnd.X)
	check("stride end y", &o.strideEnd.Y, &want.strideEnd.Y)
	for i := range want.inputs {
		for k, x := range want.inputs[i] {
			if !same(o.inputs[i][k], x) {
				t.Fatalf("%s: input %d of stride %d = %v, want %v", label, k, i-1, o.inputs[i][k], x)
			}
		}
	}
	if finite {
		check("train peak", &o.train.Peak, &want.train.Peak)
		check("stride peak", &o.stride.Peak, &want.stride.Peak)
		check("slow peak", &o.slow.Peak, &want.slow.Peak)
		check("fast peak", &o.fast.Peak, &want.fast.Peak)
		check("greatest peak", &o.top, &want.top)
	}
	for i := range want.visit { // last, because time and correction need not be finite
		check(fmt.Sprintf("visit %d", i), &o.visit[i], &want.visit[i])
	}
	for i := range want.flags {
		if o.flags[i] != want.flags[i] {
			t.Fatalf("%s: flags %d = %#x, want %#x", label, i, o.flags[i], want.flags[i])
		}
	}
}

// everyKernel compares each kernel with the portable one, and the ground with a
// copy made before.
func everyKernel(t *testing.T, label string, c *testCase) {
	t.Helper()
	use(t, Portable)
	want, before := c.run(), append([]float64{}, c.ground...)
	for _, name := range Names() {
		use(t, name)
		c.run().compare(t, label+" "+name, want)
	}
	for i, a := range c.ground {
		if !same(a, before[i]) {
			t.Fatalf("%s: sample %d was changed from %v to %v", label, i, before[i], a)
		}
	}
}

// TestKernelsAgree holds every kernel to the bits of the portable one, for all
// lengths of the ground from 0 to 130 and all its offsets within a vector. All
// else lies where it happens to be allocated.
func TestKernelsAgree(t *testing.T) {
	for n := range 131 {
		c := newCase(uint64(n), n)
		for offset := range 8 {
			c.ground = guarded(c.ground, offset)
			everyKernel(t, fmt.Sprintf("n %d offset %d", n, offset), c)
		}
	}
}

// TestKernelsAgreeOnOddNumbers does so for zeros of both signs, subnormal, huge
// and non-finite samples and states, and for a long motion.
func TestKernelsAgreeOnOddNumbers(t *testing.T) {
	odd := map[string][]float64{
		"zeros":      {0, math.Copysign(0, -1)},
		"subnormal":  {5e-324, -5e-324, 1e-310, -3e-320, 2.3e-308},
		"underflow":  {1e-170, -3e-165, 1e-300, 7e-162},
		"huge":       {1e300, -1e300, math.MaxFloat64, -math.MaxFloat64, 1e290},
		"infinite":   {math.Inf(1), 1, 0, math.Inf(-1)},
		"not number": {math.NaN(), 1, -2},
		"mixed":      {1, -1e-300, 1e300, 0, 5e-324, -1e18},
	}
	for name, values := range odd {
		for _, states := range []bool{false, true} {
			c := newCase(5, 70)
			for i := range c.ground {
				c.ground[i] = values[(i*i+i/3)%len(values)]
			}
			if states {
				for l := range Lanes {
					c.start.X[l], c.start.Y[l] = values[l%len(values)], values[(l/2)%len(values)]
				}
			}
			everyKernel(t, fmt.Sprintf("%s, in states %v", name, states), c)
		}
	}
	everyKernel(t, "long", newCase(6, 20000))
}

// TestMarchIsItsDefinition checks the portable kernel against the equations of
// Slow and Fast written out lane by lane with rounding after every operation.
func TestMarchIsItsDefinition(t *testing.T) {
	use(t, Portable)
	c := newCase(7, 40)
	o := c.run()
	near := func(what string, l int, got, want float64) {
		t.Helper()
		if math.Abs(got-want) > 1e-11*max(1, math.Abs(want)) {
			t.Fatalf("%s of lane %d = %v, want %v", what, l, got, want)
		}
	}
	m := len(c.shares) - 1
	for l := range Lanes {
		s := &c.stride
		su, sv, most := c.start.X[l], c.start.Y[l], math.Abs(c.start.X[l])
		for i := 0; (i+1)*m < len(c.ground); i++ {
			f, g := s.UU[l]*su+s.UV[l]*sv, s.VU[l]*su+s.VV[l]*sv
			for k, w := range s.Weights {
				x := 0.0
				for j, share := range c.shares {
					x += share[k] * c.ground[i*m+j]
				}
				f, g = f+w.U[l]*x, g+w.V[l]*x
			}
			su, sv = su+f, sv+g
			most = max(most, math.Abs(su))
		}
		near("stride u", l, o.strideEnd.X[l], su)
		near("stride v", l, o.strideEnd.Y[l], sv)
		near("stride peak", l, o.stride.Peak[l], most)
		q := &c.slow
		u, w, peak := c.start.X[l], c.start.Y[l], math.Abs(c.start.X[l])
		for i, a := range c.ground[2:] {
			w = q.Decay[l]*w + (a + q.Middle[l]*c.ground[i+1] + q.Oldest[l]*c.ground[i]) - q.Stiffness[l]*u
			u += w
			peak = max(peak, math.Abs(u))
			near("slow trace", l, o.rows[i+1][l], u)
		}
		near("slow u", l, o.slowEnd.X[l], u)
		near("slow w", l, o.slowEnd.Y[l], w)
		near("slow peak", l, o.slow.Peak[l], peak)
		x, v, highest := c.start.X[l], c.start.Y[l], math.Abs(c.start.X[l])
		for i, a := range c.ground {
			if i == len(c.ground)-trainBeyond {
				near("train x", l, o.trainEnd.X[l], x)
				near("train w", l, o.trainEnd.Y[l], v)
			}
			x, v = x+v, c.train.Decay[l]*v+a-c.train.Stiffness[l]*x
			highest = max(highest, math.Abs(x))
		}
		near("train peak", l, o.train.Peak[l], highest)
		f := &c.fast
		y, z, top := c.start.X[l], c.start.Y[l], 0.0
		for i, b := range c.ground {
			top = max(top, y*y+z*z)
			near("fast trace y", l, o.marks[i+1].X[l], y)
			near("fast trace z", l, o.marks[i+1].Y[l], z)
			y, z = f.YY[l]*y+f.YZ[l]*z-f.Jump[l]*b, f.ZY[l]*y+f.ZZ[l]*z+b
		}
		near("fast y", l, o.fastEnd.X[l], y)
		near("fast z", l, o.fastEnd.Y[l], z)
		near("fast peak", l, o.fast.Peak[l], top)
		near("greatest peak", l, o.top[l], top)
	}
}

// TestUse chooses every kernel and refuses what is none.
func TestUse(t *testing.T) {
	use(t, "")
	if Name() != Names()[0] {
		t.Errorf("the kernel by default is %q, want %q", Name(), Names()[0])
	}
	for _, name := range Names() {
		use(t, name)
		if Name() != name {
			t.Errorf("Use(%q) chose %q", name, Name())
		}
	}
	before := Name()
	if err := Use("nonesuch"); err == nil || Name() != before {
		t.Errorf("Use of an unknown name: error %v, kernel %q, before it %q", err, Name(), before)
	}
	if names := Names(); names[len(names)-1] != Portable {
		t.Errorf("kernels %q do not end with the portable one", names)
	}
}

// FuzzKernels compares all kernels on any bytes.
func FuzzKernels(f *testing.F) {
	f.Add(uint64(1), []byte{1, 2, 3, 250, 0, 0, 7}, 0)
	f.Add(uint64(2), []byte{}, 900)
	f.Add(uint64(3), []byte{255, 128, 0, 1}, -1070)
	f.Fuzz(func(t *testing.T, seed uint64, data []byte, exponent int) {
		c := newCase(seed, min(len(data), 150))
		for i := range c.ground {
			c.ground[i] = math.Ldexp(float64(int8(data[i])), exponent)
		}
		everyKernel(t, fmt.Sprintf("seed %d", seed), c)
	})
}
