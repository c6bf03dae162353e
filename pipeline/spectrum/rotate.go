package spectrum

import (
	"math"
	"slices"

	"swaybook/pipeline/internal/kernel"
)

// Directions is the number of directions of RotD50 and RotD100, 1° apart.
const Directions = kernel.Directions

// RotD returns for each oscillator the median (RotD50) and the maximum
// (RotD100), over directions θ = 0°, 1°, … 179° from the first component, of the
// spectral displacement
//
//	D(θ) = max|u₁(t)·cos θ + u₂(t)·sin θ|
//
// of a pair of horizontal components at a right angle. The median of an even
// number of values is the mean of the middle two.
//
// first and second are accelerations in m/s² as for SD and of equal length;
// sdFirst and sdSecond are their SD by this solver, which are D(0°) and D(90°).
// RotD panics if lengths differ. The results are in m, in the order of the
// oscillators. NaN or infinite samples make all results NaN.
//
// Source: D. M. Boore, "Orientation-independent, nongeometric-mean measures of
// seismic intensity from two horizontal components of motion", Bulletin of the
// Seismological Society of America 100(4), 2010, 1830–1835.
func (s *Solver) RotD(first, second, sdFirst, sdSecond []float64) (rotd50, rotd100 []float64) {
	if len(first) != len(second) {
		panic("spectrum: components of a pair differ in length")
	}
	if len(sdFirst) != s.oscillators || len(sdSecond) != s.oscillators {
		panic("spectrum: number of known SD is not the number of oscillators")
	}
	if s.method != NigamJennings {
		return s.solveDirections(first, second)
	}
	rotd50, rotd100 = make([]float64, s.oscillators), make([]float64, s.oscillators)
	r := s.pairs.Get().(*rotation)
	defer func() {
		if r.isLight() {
			s.pairs.Put(r)
		}
	}()
	if known, done := r.load(first, second); done {
		for i := range rotd50 {
			rotd50[i], rotd100[i] = known, known
		}
		return rotd50, rotd100
	}
	r.prepare(s.strides)
	exponent := r.pair[0].exponent
	if inRange(sdFirst, sdSecond) {
		r.first, r.second = s.unscaled(r.first, sdFirst, exponent), s.unscaled(r.second, sdSecond, exponent)
	} else { // the scaled motions have D with all digits
		r.first, r.second = s.unscaled(r.first, s.SD(nil, r.pair[0].a), 0), s.unscaled(r.second, s.SD(nil, r.pair[1].a), 0)
	}
	for i := range s.slow {
		s.slow[i].rotate(r, rotd50, rotd100)
	}
	for i := range s.fast {
		s.fast[i].rotate(r, rotd50, rotd100)
	}
	for i := range rotd50 {
		rotd50[i] = math.Ldexp(rotd50[i]*s.stepS*s.stepS, exponent)
		rotd100[i] = max(math.Ldexp(rotd100[i]*s.stepS*s.stepS, exponent), sdFirst[i], sdSecond[i])
	}
	return rotd50, rotd100
}

// inRange reports whether D, of which one may be 0, are neither too small nor too
// great for their digits; NaN are in range, since they come from samples.
func inRange(first, second []float64) bool {
	for i, d := range first {
		if d = max(d, second[i]); d < 0x1p-900 || math.IsInf(d, 0) {
			return false
		}
	}
	return true
}

// unscaled sets dst to D in the units of a motion.
func (s *Solver) unscaled(dst, sd []float64, exponent int) []float64 {
	dst = resize(dst, len(sd))
	for i, d := range sd {
		dst[i] = math.Ldexp(d, -exponent) / s.stepS / s.stepS
	}
	return dst
}

// solveDirections is RotD by the D of every direction, of motions scaled by a power
// of two so that turning them cannot overflow.
func (s *Solver) solveDirections(first, second []float64) (rotd50, rotd100 []float64) {
	first, second, exponent := scaledPair(first, second)
	all := make([][]float64, Directions)
	for k := range all {
		all[k] = s.SD(nil, turned(first, second, k))
	}
	rotd50, rotd100 = make([]float64, s.oscillators), make([]float64, s.oscillators)
	d := make([]float64, Directions)
	for i := range rotd50 {
		for k := range d {
			d[k] = all[k][i]
		}
		slices.Sort(d)
		rotd50[i], rotd100[i] = math.Ldexp(middle(d), exponent), math.Ldexp(d[Directions-1], exponent)
	}
	return rotd50, rotd100
}

// scaledPair returns two components divided by a power of two 2^exponent that
// brings the greatest sample into [1/2, 1), which is exact; without a finite one
// that is not 0 they are as they were.
func scaledPair(first, second []float64) (x, y []float64, exponent int) {
	top := max(greatest(first), greatest(second))
	if !(top > 0) {
		return first, second, 0
	}
	var a, b motion
	a.scale(first, top)
	b.scale(second, top)
	return a.a, b.a, a.exponent
}

// middle returns the median of one number a direction, in order.
func middle(d []float64) float64 { return float64(0.5 * (d[half-1] + d[half])) }

// turned returns the component in direction k.
func turned(first, second []float64, k int) []float64 {
	cos, sin := compass.Cos[k], compass.Sin[k]
	out := make([]float64, len(first))
	for i, a := range first {
		out[i] = toward(a, second[i], cos, sin)
	}
	return out
}
