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
	n := fastLength(len(x), factor)
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

// FastLength returns the least number from n on that has no prime factor above 5, since
// the cost of a transform grows with the sum of the prime factors of its length, and no
// more factors than a transform holds.
func FastLength(n int) int { return fastLength(n, 1) }

// mostFactors is how many factors of a length gonum's transforms have room for; beyond
// they panic. They count two twos as one four.
const mostFactors = 13

// fastLength is FastLength of n so that the transform of n·factor has room too.
func fastLength(n, factor int) int {
	for n = max(n, 1); ; n++ {
		if factors, rest := smooth(n); rest > 1 || factors > mostFactors {
			continue
		}
		// A factor of other primes is one of its own at most for each five.
		factors, rest := smooth(n * factor)
		for ; rest > 1; rest /= 5 {
			factors++
		}
		if factors <= mostFactors {
			return n
		}
	}
}

// smooth counts the factors 4, 2, 3 and 5 of n and returns what is left of it.
func smooth(n int) (factors, rest int) {
	rest = n
	for _, factor := range [...]int{4, 2, 3, 5} {
		for rest > 1 && rest%factor == 0 {
			rest /= factor
			factors++
		}
	}
	return factors, rest
}
