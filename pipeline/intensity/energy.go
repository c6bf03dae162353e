package intensity

import (
	"math"
	"slices"
)

// StandardGravity is g in m/s², exact by definition (3rd CGPM, 1901).
const StandardGravity = 9.80665

// Energy is the running integral of the square of an acceleration,
//
//	E[0] = 0,  E[i] = E[i-1] + stepS/3·(a[i-1]² + a[i-1]·a[i] + a[i]²),
//
// in m²/s³: the build-up from which Arias intensity, significant durations and root mean
// squares follow.
type Energy struct {
	sums  []float64
	stepS float64
}

// EnergyOf integrates the square of a.
func EnergyOf(a []float64, stepS float64) Energy {
	sums := make([]float64, len(a))
	for i := 1; i < len(a); i++ {
		p, q := a[i-1], a[i]
		sums[i] = sums[i-1] + float64(stepS/3*(float64(p*p)+float64(p*q)+float64(q*q)))
	}
	return Energy{sums, stepS}
}

func (e Energy) total() float64 {
	if len(e.sums) == 0 {
		return 0
	}
	return e.sums[len(e.sums)-1]
}

// Arias returns Arias intensity in m/s: π/(2g) times the integral of the square.
//
// Source: A. Arias, A Measure of Earthquake Intensity, in R. J. Hansen (ed.), Seismic
// Design for Nuclear Power Plants, MIT Press, 1970.
func (e Energy) Arias() float64 { return math.Pi / (2 * StandardGravity) * e.total() }

// Shares returns the share of the whole that has come by each sample, NaN where there is
// none: the build-up of Arias intensity.
//
// Source: R. L. Husid, Características de Terremotos, Análisis General, Revista del IDIEM 8,
// 1969, 21–42 (from memory).
func (e Energy) Shares() []float64 {
	out := make([]float64, len(e.sums))
	for i, sum := range e.sums {
		out[i] = sum / e.total()
	}
	return out
}

// When returns the time in s, from the first sample, by which a share of the whole has
// come, 0 where there is none. Between samples the build-up is taken for linear.
func (e Energy) When(share float64) float64 {
	want := float64(share * e.total())
	i, found := slices.BinarySearch(e.sums, want)
	if i == 0 || i == len(e.sums) {
		return 0
	}
	if found {
		return float64(i) * e.stepS
	}
	part := (want - e.sums[i-1]) / (e.sums[i] - e.sums[i-1])
	return (float64(i-1) + part) * e.stepS
}

// SignificantDuration returns the time in s from one share of the whole to another:
// 0.05 and 0.95 or 0.75.
//
// Source: M. D. Trifunac and A. G. Brady, A Study on the Duration of Strong Earthquake
// Ground Motion, BSSA 65(3), 1975.
func (e Energy) SignificantDuration(from, to float64) float64 { return e.When(to) - e.When(from) }

// RootMeanSquare returns that of the acceleration, in m/s², between the times by which
// 5 and 95 % of the whole have come, 0 where these are one.
//
// Source: M. W. McCann and H. C. Shah, Determining Strong-Motion Duration of
// Earthquakes, BSSA 69(4), 1979, for the root mean square of an accelerogram; the window
// of 5 to 95 % is common practice.
func (e Energy) RootMeanSquare() float64 {
	d := e.SignificantDuration(0.05, 0.95)
	if !(d > 0) {
		return 0
	}
	return math.Sqrt(0.9 * e.total() / d)
}
