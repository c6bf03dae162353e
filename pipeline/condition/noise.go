package condition

import (
	"math"

	"swaybook/pipeline/signal"
)

const (
	// smoothing is the half width of the band over which power is averaged: a sixth of
	// an octave to either side.
	smoothing = 1.122462048309373
	// cornersADecade is how finely corners are looked for.
	cornersADecade = 20
)

// ratios are the amplitudes of motion over noise, each for its length, at frequencies
// that rise by equal factors up to half the sampling rate as delivered.
type ratios struct {
	frequencyHz, ratio []float64
	strongest          int // where the smoothed motion has its greatest amplitude
}

// ratios begin at leastCornerHz, or at the lowest frequency of which both the noise and the
// motion hold a cycle, where that is higher, and end at half the sampling rate as
// delivered, above which there is nothing. The noise is that of rounding at least. The
// motion is followed by its length again, so that an end cut off does not look like
// long periods. ok is false without noise to compare with.
func (w *work) ratios() (r ratios, ok bool) {
	quiet, from := w.quiet()
	if from == 0 {
		return r, false
	}
	x, nyquist := w.recorded(), w.nyquist()
	end := w.endOf(quiet, from)
	to := min(len(x), max(2*end-from, from+w.samplesOf(leastNoiseS)))
	shortestS := float64(min(from-quiet, to-from)) * w.StepS
	fromHz := min(max(leastCornerHz, 1/shortestS), nyquist/2)
	steps := int(math.Ceil(cornersADecade * math.Log10(nyquist/fromHz)))
	for k := range steps + 1 {
		r.frequencyHz = append(r.frequencyHz, fromHz*math.Pow(nyquist/fromHz, float64(k)/float64(steps)))
	}
	noise := signal.PowerOf(x[quiet:from], w.StepS).Smooth(r.frequencyHz, smoothing)
	motion := signal.PowerOf(x[from:to], w.StepS).Smooth(r.frequencyHz, smoothing)
	rounding := roundingPower(w.resolution) / nyquist
	stalls := w.stalls(quiet, from)
	top := 0.0
	for k := range r.frequencyHz {
		other := max(noise[k], rounding)
		if stalls {
			other += stallPower(w.resolution, r.frequencyHz[k], float64(to-from)*w.StepS)
		}
		r.ratio = append(r.ratio, math.Sqrt(motion[k]/other))
		if motion[k] > top {
			top, r.strongest = motion[k], k
		}
	}
	return r, true
}

// stalls reports whether the noise from one sample to another is too weak to keep the level
// that rounding takes: its standard deviation, slow changes left out, is below half a step.
func (w *work) stalls(from, to int) bool {
	return signal.QuickDeviation(w.recorded()[from:to], w.StepS) < w.resolution/2
}

// lowCorner is the lowest frequency from which on the motion stands out, which is none
// below the lowest that lengths can tell.
func (r ratios) lowCorner(n NoiseRule) float64 {
	if !(r.ratio[r.strongest] >= n.Ratio) {
		return n.MostHz
	}
	k := r.strongest
	for k > 0 && r.ratio[k-1] >= n.Ratio {
		k--
	}
	return min(max(r.frequencyHz[k], n.LeastHz), n.MostHz)
}

// highCorner is the highest frequency up to which the motion stands out, 0 where that is
// as far as it was sampled.
func (r ratios) highCorner(n NoiseRule) float64 {
	k := r.strongest
	for k+1 < len(r.ratio) && r.ratio[k+1] >= n.Ratio {
		k++
	}
	if k+1 == len(r.ratio) {
		return 0
	}
	return min(max(r.frequencyHz[k], n.LeastHz), n.MostHz)
}
