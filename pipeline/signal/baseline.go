package signal

import "math"

// Mean returns the mean of x, which is not empty, summed from its first sample: the
// offset is taken off before the rest is summed, so that counts on a large offset keep
// their digits.
func Mean(x []float64) float64 {
	first, sum := x[0], 0.0
	for _, v := range x {
		sum += v - first
	}
	return first + sum/float64(len(x))
}

// Greatest returns the greatest |x|, 0 of none.
func Greatest(x []float64) float64 {
	top := 0.0
	for _, v := range x {
		top = max(top, math.Abs(v))
	}
	return top
}

// Subtract takes offset from every sample of x.
func Subtract(x []float64, offset float64) {
	for i := range x {
		x[i] -= offset
	}
}

// MaxDegree is the highest degree of a trend.
const MaxDegree = 2

// Detrend takes from x its best polynomial of a degree from 0 to MaxDegree in the sense
// of least squares; of fewer samples than the polynomial has coefficients nothing is
// left. It panics for another degree.
func Detrend(x []float64, degree int) { DetrendBy(x, 0, len(x), degree) }

// DetrendBy takes from all of x the polynomial that is best for x[from:to], continued to
// either side.
//
// The polynomials 1, t and t² - c are orthogonal over equal steps that lie symmetrical
// about their middle, so each coefficient is a quotient of two sums. With h = (n-1)/2
// and t = -h … h, the sum of t² is n(n²-1)/12, c is (n²-1)/12, and the sum of (t²-c)²
// is n(n²-1)(n²-4)/180.
//
// Source: P. G. Guest, Numerical Methods of Curve Fitting, 1961, chapter 7, for the
// orthogonal polynomials of equal steps (from memory).
func DetrendBy(x []float64, from, to, degree int) {
	if degree < 0 || degree > MaxDegree {
		panic("signal: degree of a trend out of range")
	}
	part := x[from:to]
	if len(part) == 0 {
		return
	}
	Subtract(x, Mean(part))
	n := float64(len(part))
	square := float64(n * n)
	if degree >= 1 && len(part) > 1 {
		takeOff(x, from, to, 12/(n*(square-1)), func(t float64) float64 { return t })
	}
	if degree >= 2 && len(part) > 2 {
		middle := float64((square - 1) / 12)
		takeOff(x, from, to, 180/(n*(square-1)*(square-4)), func(t float64) float64 { return float64(t*t) - middle })
	}
}

// takeOff takes from x the part of x[from:to] along a polynomial of t = -h … h there, one
// over whose sum of squares is given.
func takeOff(x []float64, from, to int, scale float64, polynomial func(t float64) float64) {
	half := float64(float64(to-from-1) / 2)
	sum := 0.0
	for i, v := range x[from:to] {
		sum += float64(v * polynomial(float64(i)-half))
	}
	sum *= scale
	for i := range x {
		x[i] -= float64(sum * polynomial(float64(i-from)-half))
	}
}
