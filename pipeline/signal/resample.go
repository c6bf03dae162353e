package signal

// Resample returns x on a step that is factor times finer, with nothing above half the
// rate of x: its Fourier series continued by zeros. Of n samples it returns n·factor;
// sample i·factor is sample i of x. Zeros follow x up to FastLength, and the series is
// periodic, so that what does not begin and end near 0 rings there: taper x, or give it
// zeros. Resample panics for a factor below 1.
//
// What is at half the sampling rate itself is split between both signs of the frequency.
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
	wide := make([]complex128, n*factor/2+1)
	narrow := Transform(x, n)
	last := narrow[n/2]
	copy(wide, narrow)
	wide[n/2] = complex(real(last)/2, imag(last)/2)
	out := inverse(wide)[:len(x)*factor]
	for i := range out {
		out[i] /= float64(n)
	}
	return out
}

// FastLength returns the least even number from n on that has no prime factor above 5, since
// the cost of a transform grows with the sum of the prime factors of its length.
func FastLength(n int) int {
	for n = max(n+n%2, 2); ; n += 2 {
		rest := n
		for _, factor := range [...]int{2, 3, 5} {
			for rest%factor == 0 {
				rest /= factor
			}
		}
		if rest == 1 {
			return n
		}
	}
}
