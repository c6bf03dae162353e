package condition

import (
	"math"

	"swaybook/pipeline/internal/elementary"
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
// that rise by equal factors up to half the sampling rate as delivered; none where there is
// no noise to compare with.
type ratios struct {
	frequencyHz, ratio []float64
	strongest          int // where the smoothed motion has its greatest amplitude
	// isDoubtful says that the noise is of parts that are no more than hints.
	isDoubtful bool
}

// ratios begin at leastCornerHz, or at the lowest frequency of which the motion, and noise
// that is enough, hold a cycle, where that is higher, and end at half the sampling rate as
// delivered, above which there is nothing. The noise is that of rounding at least. The
// motion is followed by its length again, so that an end cut off does not look like
// long periods.
func (w *work) ratios() (r ratios) {
	n := w.noiseParts()
	r.isDoubtful = n.areDoubtful
	if len(n.parts) == 0 {
		return r
	}
	x, nyquist := w.recorded(), w.nyquist()
	to := min(len(x), max(2*n.motion.to-n.motion.from, n.motion.from+w.samplesOf(leastNoiseS)))
	motionS := float64(to-n.motion.from) * w.StepS
	shortestS := motionS
	if !n.areDoubtful {
		shortestS = min(shortestS, w.seconds(n.parts[0]))
	}
	fromHz := min(max(leastCornerHz, 1/shortestS), nyquist/2)
	span := elementary.Log(nyquist / fromHz)
	steps := int(math.Ceil(cornersADecade / math.Ln10 * span))
	for k := range steps + 1 {
		r.frequencyHz = append(r.frequencyHz, fromHz*elementary.Exp(span*float64(k)/float64(steps)))
	}
	motion := signal.PowerOf(x[n.motion.from:to], w.StepS).Smooth(r.frequencyHz, smoothing)
	noise := w.noisePower(n.parts, r.frequencyHz)
	stalls := w.stalls(n.parts[0])
	top := 0.0
	for k := range r.frequencyHz {
		other := noise[k]
		if stalls {
			other += stallPower(w.resolution, r.frequencyHz[k], motionS)
		}
		r.ratio = append(r.ratio, math.Sqrt(motion[k]/other))
		if motion[k] > top {
			top, r.strongest = motion[k], k
		}
	}
	return r
}

// stalls reports whether the noise of a part is too weak to keep the level
// that rounding takes: its standard deviation, slow changes left out, is below half a step.
func (w *work) stalls(p part) bool {
	return signal.QuickDeviation(w.recorded()[p.from:p.to], w.StepS) < w.resolution/2
}

// lowCorner is the lowest frequency from which on the motion stands out, which is none
// below the lowest that lengths can tell, nor below ElseHz where the noise is doubtful.
func (r ratios) lowCorner(n NoiseRule) float64 {
	if len(r.ratio) == 0 || r.isDoubtful && n.ElseHz == 0 {
		return n.ElseHz
	}
	least := n.LeastHz
	if r.isDoubtful {
		least = n.ElseHz
	}
	if !(r.ratio[r.strongest] >= n.Ratio) {
		return max(n.MostHz, least)
	}
	k := r.strongest
	for k > 0 && r.ratio[k-1] >= n.Ratio {
		k--
	}
	return max(min(r.frequencyHz[k], n.MostHz), least)
}

// highCorner is the highest frequency up to which the motion stands out, 0 where that is
// as far as it was sampled, and ElseHz where the noise is doubtful.
func (r ratios) highCorner(n NoiseRule) float64 {
	if len(r.ratio) == 0 || r.isDoubtful {
		return n.ElseHz
	}
	k := r.strongest
	for k+1 < len(r.ratio) && r.ratio[k+1] >= n.Ratio {
		k++
	}
	if k+1 == len(r.ratio) {
		return 0
	}
	return min(max(r.frequencyHz[k], n.LeastHz), n.MostHz)
}
