package spectrum

import (
	"math"

	"swaybook/pipeline/internal/kernel"
)

// blockSteps is the number of steps between the states that a march keeps.
// Shorter blocks are bounded more closely but cost more to keep: of 32, 64 and
// 128 the second was fastest on the default grid (BenchmarkSD).
const blockSteps = 64

// lanes is the number of oscillators marched side by side.
const lanes = kernel.Lanes

// motion is a component made ready for marching, with the work space of one
// call. Acceleration is divided by a power of two that brings its peak into
// [1/2, 1), which is exact and keeps squares from overflowing and underflowing.
type motion struct {
	exponent int
	a        []float64 // samples
	padded   []float64 // samples and zeros, so that whole blocks can be gathered
	bend     []float64 // change of slope at the end of each step; 0 for the last
	// What bounds on |u| are made of: of each block of steps and each step the
	// greatest |a|, ends included, and the greatest |a' − a|.
	blockLines, stepLines []kernel.Line
	strides               [len(strides)]stride
	search
}

// search is the work space of one block of oscillators. What kernels use is
// allocated by itself, which aligns it to whole vectors: fields in the middle of
// a struct need not be, and vectors across two cache lines cost twice.
type search struct {
	marks      []kernel.Mark // of each block of steps, and the state at the end
	flags      []uint32      // of each block of steps: the lanes that it may hold the maximum of
	done       []uint32      // of each block of steps: the lanes that it was searched for
	rows       []kernel.Row  // slow: u at each sample of a block
	rowFlags   []uint32      // of each sample of a block: the lanes that can matter there
	states     []kernel.Mark // fast: the state at the start of each step of a block
	stepFlags  []uint32      // of each step of a block: the lanes that may have the maximum there
	screen     *kernel.Screen
	top, at    *kernel.Row  // the greatest peak of each lane and the first block that has it
	start      *kernel.Mark // the state that a block of strides is marched again from
	slowVisits *slowVisits
	fastVisits *fastVisits
	best       [lanes]float64
}

func newMotion() *motion {
	return &motion{search: search{
		rows: make([]kernel.Row, blockSteps+1), rowFlags: make([]uint32, blockSteps+1),
		states: make([]kernel.Mark, blockSteps), stepFlags: make([]uint32, blockSteps), screen: new(kernel.Screen),
		top: new(kernel.Row), at: new(kernel.Row), start: new(kernel.Mark), slowVisits: newSlowVisits(), fastVisits: newFastVisits(),
	}}
}

// load prepares the samples. It returns the D that every oscillator has without
// marching, and whether there is such: 0 for fewer than two samples or for no
// motion at all, NaN where a sample is not finite.
func (m *motion) load(samples []float64) (known float64, done bool) {
	top := greatest(samples)
	if math.IsNaN(top) {
		return math.NaN(), true
	}
	if len(samples) < 2 || top == 0 {
		return 0, true
	}
	m.scale(samples, top)
	m.measure()
	return 0, false
}

// greatest returns the greatest |a|, NaN where one is not finite.
func greatest(samples []float64) float64 {
	top := uint64(0)
	for _, a := range samples {
		top = max(top, magnitude(a))
	}
	if top >= magnitude(math.Inf(1)) {
		return math.NaN()
	}
	return math.Float64frombits(top)
}

// magnitude orders numbers by their absolute value, NaN last: the greatest of
// integers is found faster than that of numbers that can be NaN.
func magnitude(x float64) uint64 { return math.Float64bits(x) &^ (1 << 63) }

func (m *motion) scale(samples []float64, top float64) {
	_, m.exponent = math.Frexp(top)
	// In two halves, because 2^1074 is out of range.
	half := -m.exponent / 2
	f, g := math.Ldexp(1, half), math.Ldexp(1, -m.exponent-half)
	m.padded = resize(m.padded, len(samples)+gatheredRows)
	m.a = m.padded[:len(samples)]
	clear(m.padded[len(samples):])
	scaled := m.a[:len(samples)]
	for i, a := range samples {
		scaled[i] = float64(a*f) * g
	}
}

func (m *motion) measure() {
	steps, blocks := m.steps(), m.blocks()
	m.bend = resize(m.bend, steps)
	m.stepLines = resize(m.stepLines, steps)
	m.blockLines = resize(m.blockLines, blocks)
	m.marks = resize(m.marks, blocks+1)
	m.flags, m.done = resize(m.flags, blocks), resize(m.done, blocks)
	for b := range m.blockLines {
		from, to := m.block(b)
		m.blockLines[b] = measureSteps(m.stepLines[from:to], m.bend[from:to], m.a[from:to+1])
		if to < steps {
			m.bend[to-1] = (m.a[to+1] - m.a[to]) - (m.a[to] - m.a[to-1])
		}
	}
}

// measureSteps sets lines of steps and changes of slope, 0 for that after the
// last, from the samples, and returns the greatest of the lines.
func measureSteps(lines []kernel.Line, bend, a []float64) (top kernel.Line) {
	lines, bend = lines[:len(a)-1], bend[:len(a)-1]
	at, before := a[0], 0.0
	size, greatest, steepest := magnitude(at), uint64(0), uint64(0)
	for k, next := range a[1:] {
		d := next - at
		if k > 0 {
			bend[k-1] = d - before
		}
		sizeNext, rise := magnitude(next), magnitude(d)
		ends := max(size, sizeNext)
		lines[k] = kernel.Line{First: math.Float64frombits(ends), Second: math.Float64frombits(rise)}
		greatest, steepest = max(greatest, ends), max(steepest, rise)
		at, before, size = next, d, sizeNext
	}
	bend[len(bend)-1] = 0
	return kernel.Line{First: math.Float64frombits(greatest), Second: math.Float64frombits(steepest)}
}

// findTops sets top and at of the lanes.
func (m *motion) findTops() { kernel.GreatestPeaks(m.top, m.at, m.marks[:m.blocks()]) }

// flagTops finds the greatest peak of each lane and flags the first block that has
// it.
func (m *motion) flagTops(flags []uint32) {
	m.findTops()
	clear(flags)
	for l, b := range m.at {
		flags[int(b)] |= 1 << l
	}
}

// final is the state of a lane at the end of its march.
func (m *motion) final(l int) state {
	end := &m.marks[m.blocks()]
	return state{end.X[l], end.Y[l]}
}

// steps is the number of intervals between samples.
func (m *motion) steps() int { return len(m.a) - 1 }

func (m *motion) blocks() int { return (m.steps() + blockSteps - 1) / blockSteps }

// block returns the first step of a block and the first after it. Step k runs
// from sample k to sample k+1.
func (m *motion) block(b int) (from, to int) {
	return b * blockSteps, min((b+1)*blockSteps, m.steps())
}

// resize returns a slice of length n, in the space of x if that is enough. Its
// content is left to the caller.
func resize[T any](x []T, n int) []T {
	if cap(x) < n {
		return make([]T, n)
	}
	return x[:n]
}
