package intensity

import (
	"math"

	"swaybook/pipeline/signal"
)

// The band of frequencies, and the widest step between them, of a mean period, in Hz.
const (
	meanPeriodFromHz = 0.25
	meanPeriodToHz   = 20
	meanPeriodStepHz = 0.05
)

// MeanPeriod returns the mean period in s,
//
//	Tm = Σ(C²/f) / ΣC²,  0.25 ≤ f ≤ 20 Hz,
//
// C the Fourier amplitudes of a, no more than 0.05 Hz apart: zeros follow a as far as
// that takes. It is NaN of a motion without amplitude in that band, and of one whose
// sampling rate is below 40 Hz, which does not reach its end.
//
// Source: E. M. Rathje, N. A. Abrahamson and J. D. Bray, Simplified Frequency Content
// Estimates of Earthquake Ground Motions, J. Geotech. Geoenviron. Eng. 124(2), 1998.
func MeanPeriod(a []float64, stepS float64) float64 {
	if stepS > 0.5/meanPeriodToHz*(1+1e-9) || len(a) == 0 {
		return math.NaN()
	}
	n := signal.FastLength(max(len(a), int(math.Ceil(1/(meanPeriodStepHz*stepS)))))
	widthHz := 1 / (float64(n) * stepS)
	over, under := 0.0, 0.0
	for k, c := range signal.Transform(a, n) {
		f := float64(k) * widthHz
		if f < meanPeriodFromHz || f > meanPeriodToHz {
			continue
		}
		square := float64(real(c)*real(c)) + float64(imag(c)*imag(c))
		over += square / f
		under += square
	}
	if !(under > 0) {
		return math.NaN()
	}
	return over / under
}

// The periods in s, and the damping ratio, of a spectrum intensity.
const (
	spectrumIntensityFromS = 0.1
	spectrumIntensityToS   = 2.5
	// SpectrumIntensityDamping is that of the spectrum that SpectrumIntensity takes.
	SpectrumIntensityDamping = 0.2
)

// SpectrumIntensity returns the integral of PSV, in m/s, over periods from 0.1 to 2.5 s,
// in m: by trapezoids between the periods, which rise, with the ends of the range
// interpolated between their neighbours. It is NaN where the periods do not span it.
//
// Source: G. W. Housner, Spectrum Intensities of Strong-Motion Earthquakes, Proc.
// Symposium on Earthquake and Blast Effects on Structures, 1952, with 20 % of damping.
func SpectrumIntensity(periodsS, psv []float64) float64 {
	n := len(periodsS)
	if n < 2 || periodsS[0] > spectrumIntensityFromS || periodsS[n-1] < spectrumIntensityToS {
		return math.NaN()
	}
	sum := 0.0
	for i := 1; i < n; i++ {
		from, to := max(periodsS[i-1], spectrumIntensityFromS), min(periodsS[i], spectrumIntensityToS)
		if from >= to {
			continue
		}
		at := func(t float64) float64 {
			share := (t - periodsS[i-1]) / (periodsS[i] - periodsS[i-1])
			return psv[i-1] + float64(share*(psv[i]-psv[i-1]))
		}
		sum += float64((to - from) / 2 * (at(from) + at(to)))
	}
	return sum
}
