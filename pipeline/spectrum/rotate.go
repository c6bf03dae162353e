package spectrum

import (
	"errors"
	"fmt"
	"math"
	"slices"
)

// Directions is the number of directions of RotD50 and RotD100, 1° apart.
const Directions = 180

// ErrDirections is wrapped by the error of RightAngle for components whose
// directions are too near to each other.
var ErrDirections = errors.New("directions too near to each other")

// minSine is the least sine of the angle between two components that RightAngle
// accepts: below it errors of the components are more than doubled.
const minSine = 0.5

// RightAngle returns the component at a right angle to first, from second, which
// is measured betweenDeg degrees from first,
//
//	second⊥ = (second − first·cos α)/sin α,
//
// and second itself where the two are at a right angle already. The slices have
// equal length, or RightAngle panics; they keep their values. The error wraps
// ErrDirections.
func RightAngle(first, second []float64, betweenDeg float64) ([]float64, error) {
	if len(first) != len(second) {
		panic("spectrum: components of a pair differ in length")
	}
	if math.Remainder(betweenDeg-90, 180) == 0 {
		return second, nil
	}
	sin, cos := math.Sincos(betweenDeg * math.Pi / 180)
	if !(math.Abs(sin) >= minSine) {
		return nil, fmt.Errorf("%w: %g° apart", ErrDirections, betweenDeg)
	}
	out := make([]float64, len(second))
	for i, a := range second {
		out[i] = (a - float64(first[i]*cos)) / sin
	}
	return out, nil
}

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
	all := make([][]float64, Directions)
	for k := range all {
		all[k] = s.SD(nil, turned(first, second, k))
	}
	copy(all[0], sdFirst)
	copy(all[Directions/2], sdSecond)
	rotd50, rotd100 = make([]float64, s.oscillators), make([]float64, s.oscillators)
	d := make([]float64, Directions)
	for i := range rotd50 {
		for k := range d {
			d[k] = all[k][i]
		}
		slices.Sort(d)
		rotd50[i] = (d[Directions/2-1] + d[Directions/2]) / 2
		rotd100[i] = d[Directions-1]
	}
	return rotd50, rotd100
}

// turned returns the component in direction k.
func turned(first, second []float64, k int) []float64 {
	sin, cos := math.Sincos(float64(k) * math.Pi / Directions)
	out := make([]float64, len(first))
	for i, a := range first {
		out[i] = float64(a*cos) + float64(second[i]*sin)
	}
	return out
}

// GroundPeaks are PGA in m/s², PGV in m/s and PGD in m.
type GroundPeaks struct{ PGA, PGV, PGD float64 }

// RotDPeaks returns the median and the maximum over the directions of RotD of
// the peaks of a pair of components at a right angle, each as Peaks takes them.
// It panics if lengths differ.
func RotDPeaks(stepS float64, first, second []float64) (rotd50, rotd100 GroundPeaks) {
	if len(first) != len(second) {
		panic("spectrum: components of a pair differ in length")
	}
	var a, v, u [Directions]float64
	for k := range Directions {
		a[k], v[k], u[k] = Peaks(stepS, turned(first, second, k))
	}
	for _, list := range []*[Directions]float64{&a, &v, &u} {
		slices.Sort(list[:])
	}
	middle := func(list *[Directions]float64) float64 {
		return (list[Directions/2-1] + list[Directions/2]) / 2
	}
	const last = Directions - 1
	return GroundPeaks{middle(&a), middle(&v), middle(&u)}, GroundPeaks{a[last], v[last], u[last]}
}
