package spectrum

import "math"

// blockSteps is the number of steps between the states that a march keeps.
// Shorter blocks are bounded more closely but cost more to keep: of 24, 32, 48
// and 64 the last was fastest on the default grid (BenchmarkSD).
const blockSteps = 64

// lanes is the number of oscillators marched side by side: a single recurrence
// waits for its own last result most of the time. Four keep the adders busy and
// still fit their states into sixteen registers.
const lanes = 4

// state is the pair of numbers that a march carries per oscillator.
type state struct{ x, y float64 }

// mark is what a march keeps of one oscillator and block: the state at its
// start and the greatest measure within it.
type mark struct {
	start state
	peak  float64
}

// motion is a component made ready for marching, with the work space of one
// call. Acceleration is divided by a power of two that brings its peak into
// [1/2, 1), which is exact and keeps squares from overflowing and underflowing.
type motion struct {
	exponent int
	a        []float64 // samples
	bend     []float64 // change of slope at the end of each step; 0 for the last
	peak     []float64 // greatest |a| of each block of steps, both ends included
	slope    []float64 // greatest |a' − a| over a step of each block
	marks    []mark    // blocks × lanes
}

// load prepares the samples. It returns the D that every oscillator has without
// marching, and whether there is such: 0 for fewer than two samples or for no
// motion at all, NaN where a sample is not finite.
func (m *motion) load(samples []float64) (known float64, done bool) {
	top, sum := 0.0, 0.0
	for _, a := range samples {
		top = max(top, math.Abs(a))
		sum += a - a // 0, or NaN where a is not finite
	}
	if math.IsNaN(sum) {
		return math.NaN(), true
	}
	if len(samples) < 2 || top == 0 {
		return 0, true
	}
	m.scale(samples, top)
	m.measure()
	return 0, false
}

func (m *motion) scale(samples []float64, top float64) {
	_, m.exponent = math.Frexp(top)
	// In two halves, because 2^1074 is out of range.
	half := -m.exponent / 2
	f, g := math.Ldexp(1, half), math.Ldexp(1, -m.exponent-half)
	m.a = resize(m.a, len(samples))
	for i, a := range samples {
		m.a[i] = float64(a*f) * g
	}
}

func (m *motion) measure() {
	steps := m.steps()
	m.bend = resize(m.bend, steps)
	m.peak = resize(m.peak, m.blocks())
	m.slope = resize(m.slope, m.blocks())
	m.marks = resize(m.marks, m.blocks()*lanes)
	for b := range m.peak {
		from, to := m.block(b)
		peak, slope := math.Abs(m.a[from]), 0.0
		for k := from; k < to; k++ {
			d := m.a[k+1] - m.a[k]
			m.bend[k] = 0
			if k+1 < steps {
				m.bend[k] = (m.a[k+2] - m.a[k+1]) - d
			}
			peak, slope = max(peak, math.Abs(m.a[k+1])), max(slope, math.Abs(d))
		}
		m.peak[b], m.slope[b] = peak, slope
	}
}

// steps is the number of intervals between samples.
func (m *motion) steps() int { return len(m.a) - 1 }

func (m *motion) blocks() int { return (m.steps() + blockSteps - 1) / blockSteps }

// block returns the first step of a block and the first after it. Step k runs
// from sample k to sample k+1.
func (m *motion) block(b int) (from, to int) {
	return b * blockSteps, min((b+1)*blockSteps, m.steps())
}

// refine looks for the greatest |u| in the blocks whose bound exceeds best,
// beginning with the one of greatest bound, which usually settles the others.
func (m *motion) refine(best float64, bound func(b int) float64, search func(best float64, b int) float64) float64 {
	first, top := 0, math.Inf(-1)
	for b := range m.peak {
		if v := bound(b); v > top {
			first, top = b, v
		}
	}
	if !(top > best) {
		return best
	}
	best = search(best, first)
	for b := range m.peak {
		if b != first && bound(b) > best {
			best = search(best, b)
		}
	}
	return best
}

// resize returns a slice of length n, in the space of x if that is enough. Its
// content is left to the caller.
func resize[T any](x []T, n int) []T {
	if cap(x) < n {
		return make([]T, n)
	}
	return x[:n]
}
