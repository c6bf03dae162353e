package stochastic

import (
	"math"
	"math/bits"
	"math/rand/v2"

	"gonum.org/v1/gonum/dsp/fourier"
)

// Simulate sets dst to one realisation of ground acceleration in m/s², sampled
// every stepS seconds, and returns it. Gaussian white noise is windowed from
// OnsetS on, its spectrum is brought to a mean square of 1 and multiplied by
// FourierTarget, and the result is transformed back. The filters of the target
// are without phase shift, so a little motion precedes the onset; the first and
// last samples are tapered to zero over half the onset, at most 4 s.
//
// len(dst) is the number of samples; len(dst)·stepS should be at least
// Params.SpanS. Equal states of rng give equal motions; a call draws one normal
// deviate for each sample of the window. Simulate panics if dst is empty or stepS
// is not positive; p must be valid. It allocates two buffers of the next power of
// two of samples, and costs two transforms of that length.
//
// Source: Boore (2003), the procedure of its time-domain simulation.
func Simulate(dst []float64, stepS float64, p Params, rng *rand.Rand) []float64 {
	if len(dst) == 0 || !(stepS > 0) {
		panic("stochastic: no samples or no time step")
	}
	size := 1 << bits.Len(uint(len(dst)-1))
	series := make([]float64, max(size, 2))
	windowedNoise(series, stepS, p, rng)
	fft := fourier.NewFFT(len(series))
	spectrum := fft.Coefficients(nil, series)
	shape(spectrum, len(series), stepS, p)
	fft.Sequence(series, spectrum)
	copy(dst, series)
	taper(dst, int(math.Min(p.OnsetS/2, 4)/stepS))
	return dst
}

// windowedNoise fills series with white noise under the window.
func windowedNoise(series []float64, stepS float64, p Params, rng *rand.Rand) {
	length := p.SpanS() - p.OnsetS
	for i := range series {
		fraction := (float64(float64(i)*stepS) - p.OnsetS) / length
		if fraction > 1 {
			break
		}
		if w := p.Window.At(fraction); w > 0 {
			series[i] = w * rng.NormFloat64()
		}
	}
}

// shape brings the spectrum of noise to that of the motion: a mean square of 1
// over all frequencies but zero, then the target. The factor 1/stepS turns the
// continuous transform into a discrete one and 1/n is owed to the inverse.
func shape(spectrum []complex128, n int, stepS float64, p Params) {
	sum := 0.0
	for _, c := range spectrum[1:] {
		sum += float64(real(c)*real(c)) + float64(imag(c)*imag(c))
	}
	spectrum[0] = 0
	if sum == 0 { // no noise: the window lies outside the series
		return
	}
	rms := math.Sqrt(sum / float64(len(spectrum)-1))
	unit := 1 / (rms * stepS * float64(n))
	df := 1 / (float64(n) * stepS)
	t := newTarget(p)
	for k := 1; k < len(spectrum); k++ {
		y := unit * t.at(float64(k)*df)
		spectrum[k] = complex(real(spectrum[k])*y, imag(spectrum[k])*y)
	}
}

// taper brings the first and last n samples smoothly to zero with a raised
// cosine.
func taper(x []float64, n int) {
	n = min(n, len(x)/2)
	for i := range n {
		w := 0.5 - float64(0.5*math.Cos(math.Pi*float64(i)/float64(n)))
		x[i] *= w
		x[len(x)-1-i] *= w
	}
}
