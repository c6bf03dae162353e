package signal

import "swaybook/pipeline/internal/elementary"

// Taper multiplies the first and the last samples of x by half a cosine bell,
//
//	w[i] = (1 - cos(π·(i + ½)/n))/2,  i = 0 … n-1 from either end,
//
// so that they rise from nearly 0 to nearly 1: n = first at the beginning and n = last
// at the end, neither more than half of x, which panics.
//
// Source: J. W. Tukey, An introduction to the calculations of numerical spectrum
// analysis, 1967, for the cosine taper (from memory).
func Taper(x []float64, first, last int) {
	if first < 0 || last < 0 || 2*max(first, last) > len(x) {
		panic("signal: taper longer than half of the samples")
	}
	for i := range first {
		x[i] *= bell(i, first)
	}
	for i := range last {
		x[len(x)-1-i] *= bell(i, last)
	}
}

func bell(i, n int) float64 {
	s, _ := elementary.SincosPi((float64(i) + 0.5) / float64(2*n))
	return s * s
}
