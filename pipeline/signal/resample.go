package signal

import "gonum.org/v1/gonum/dsp/fourier"

// Resample returns x on a step that is factor times finer, with nothing above half the
// rate of x: its Fourier series continued by zeros. Of n samples it returns n·factor;
// sample i·factor is sample i of x. Zeros follow x up to FastLength, and the series is
// periodic, so that what does not begin and end near 0 rings there: taper x, or give it
// zeros. Resample panics for a factor below 1.
//
// What is at half the sampling rate itself, of an even length, is split between both
// signs of the frequency.
//
// Between samples the motion is that of the sampling theorem, whereas lines between
// samples lose amplitude near half the sampling rate.
//
// Source: C. E. Shannon, Communication in the Presence of Noise, Proc. IRE 37, 1949;
// D. M. Boore and C. A. Goulet, The effect of sampling rate and anti-aliasing filters
// on high-frequency response spectra, Bull. Earthquake Eng. 12, 2014, for what lines
// between samples do to short periods (from memory).
func Resample(x []float64, factor int) []float64 {
	if factor < 1 {
		panic("signal: factor below 1")
	}
	if factor == 1 || len(x) < 2 {
		return append([]float64(nil), x...)
	}
	n := FastLength(len(x))
	narrow := Transform(x, n)
	wide := make([]complex128, n*factor/2+1)
	copy(wide, narrow)
	if n%2 == 0 {
		wide[n/2] /= 2
	}
	out := fourier.NewFFT(n*factor).Sequence(nil, wide)[:len(x)*factor]
	for i := range out {
		out[i] /= float64(n)
	}
	return out
}

// FastLength returns the least number from n on that has no prime factor above 5: the
// cost of a transform grows with the sum of the prime factors of its length.
func FastLength(n int) int {
	for ; ; n++ {
		rest := n
		for _, prime := range [...]int{2, 3, 5} {
			for rest > 1 && rest%prime == 0 {
				rest /= prime
			}
		}
		if rest <= 1 {
			return n
		}
	}
}
