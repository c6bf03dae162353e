package likeness

import (
	"fmt"
	"math"
	"slices"
	"sync"
)

const (
	shared    = 0.8   // part in common, of the samples of the shorter and of the energy of each
	fragment  = 0.1   // least part of the energy of one, where the other is Scaled of that part
	sameScale = 0.002 // from 1, of factors that a rounded g explains
	crossings = 16    // fewest of zero in common

	// longest is how many samples of both, at the finer step, are compared: gonum's
	// transforms have room for 2²⁶.
	longest = 1 << 25
)

// limits are the least |ρ| of each kind.
type limits struct{ near, similar, exact float64 }

var (
	asTheyAre      = limits{near: 0.97, similar: 0.97, exact: 0.99995}     // never Near
	betweenCorners = limits{near: 0.85, similar: 0.99, exact: math.Inf(1)} // never Scaled
)

// Motion is a series of samples with what is known of it before any comparison.
// It is safe for concurrent use.
type Motion struct {
	samples  []float64
	stepS    float64
	unit     float64        // 1 over the greatest |sample|
	mean     float64        // of samples times unit
	energy   float64        // Σ(sample·unit − mean)²
	extremes []int          // where the greatest swings are, the greatest first
	inBand   func() *Motion // between lowHz and cornerOf its step; nil where that leaves nothing
}

// NewMotion describes samples, in any unit, taken every stepS seconds. The slice is
// kept, not copied, and must not change while the Motion is in use.
//
// It is an error if there are no samples, if one is not finite, or if stepS is not
// positive and finite. Cost: some passes over the samples. A filtered copy, which
// costs three times that, is made and kept when a comparison first asks for it.
func NewMotion(samples []float64, stepS float64) (*Motion, error) {
	m, err := describe(samples, stepS)
	if err != nil {
		return nil, err
	}
	m.inBand = sync.OnceValue(func() *Motion { return m.banded(cornerOf(stepS)) })
	return m, nil
}

// describe is NewMotion without the part between the corners.
func describe(samples []float64, stepS float64) (*Motion, error) {
	if !(stepS > 0) || math.IsInf(stepS, 1) {
		return nil, fmt.Errorf("time step %v s is not positive", stepS)
	}
	if len(samples) == 0 {
		return nil, fmt.Errorf("no samples")
	}
	m := &Motion{samples: samples, stepS: stepS}
	peak := 0.0
	for i, x := range samples {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			return nil, fmt.Errorf("sample %d is %v", i, x)
		}
		peak = max(peak, math.Abs(x))
	}
	if m.unit = 1 / peak; math.IsInf(m.unit, 1) { // nothing, or next to it
		return m, nil
	}
	sum := 0.0
	for _, x := range samples {
		sum += float64(x * m.unit)
	}
	m.mean = sum / float64(len(samples))
	for _, x := range samples {
		y := m.at(x)
		m.energy += float64(y * y)
	}
	m.extremes = m.swings()
	return m, nil
}

// still reports whether the samples are all the same but for rounding.
func (m *Motion) still() bool {
	return !(m.energy > 1e-26*float64(len(m.samples)))
}

// at returns a sample without the mean, the greatest of all samples as unit.
func (m *Motion) at(x float64) float64 { return float64(x*m.unit) - m.mean }

// centred appends all samples so to dst.
func (m *Motion) centred(dst []float64) []float64 {
	dst = slices.Grow(dst, len(m.samples))
	for _, x := range m.samples {
		dst = append(dst, m.at(x))
	}
	return dst
}
