package condition

import (
	"math"

	"swaybook/pipeline/signal"
)

const (
	// guardS is the time before the onset in s that counts neither as noise nor as
	// motion: pickers are late.
	guardS = 0.5
	// leastNoiseS is the shortest noise in s that is taken for such.
	leastNoiseS = 2.0
	// smoothing is the half width of the band over which power is averaged: a sixth of
	// an octave to either side.
	smoothing = 1.122462048309373
	// cornersADecade is how finely corners are looked for.
	cornersADecade = 20
)

// quietSamples is the number of samples before the onset, less the guard, 0 where they
// are too few.
func quietSamples(x []float64, stepS float64) int {
	n := signal.Arrival(x, stepS) - int(math.Ceil(guardS/stepS))
	if float64(n)*stepS < leastNoiseS {
		return 0
	}
	return n
}

// ratios are the amplitudes of motion over noise, each for its length, at frequencies
// that rise by equal factors up to half the sampling rate as delivered.
type ratios struct {
	frequencyHz, ratio []float64
	strongest          int // where the smoothed motion has its greatest amplitude
}

// ratiosOf begins at leastCornerHz, or at the lowest frequency of which the noise holds a
// cycle, where that is higher, and ends at nyquist in Hz, above which x has nothing. ok is
// false without noise to compare with.
func ratiosOf(x []float64, stepS, nyquist float64) (r ratios, ok bool) {
	quiet := quietSamples(x, stepS)
	if quiet == 0 {
		return r, false
	}
	fromHz := min(max(leastCornerHz, 1/(float64(quiet)*stepS)), nyquist/2)
	steps := int(math.Ceil(cornersADecade * math.Log10(nyquist/fromHz)))
	for k := range steps + 1 {
		r.frequencyHz = append(r.frequencyHz, fromHz*math.Pow(nyquist/fromHz, float64(k)/float64(steps)))
	}
	noise := signal.PowerOf(x[:quiet], stepS).Smooth(r.frequencyHz, smoothing)
	motion := signal.PowerOf(x[quiet:], stepS).Smooth(r.frequencyHz, smoothing)
	top := 0.0
	for k := range r.frequencyHz {
		r.ratio = append(r.ratio, math.Sqrt(motion[k]/noise[k]))
		if motion[k] > top {
			top, r.strongest = motion[k], k
		}
	}
	return r, true
}

// lowCorner is the lowest frequency from which on the motion stands out. Where it does
// so down to the lowest that the noise can tell, the corner is ElseHz if that is lower.
func (r ratios) lowCorner(n NoiseRule) float64 {
	if !(r.ratio[r.strongest] >= n.Ratio) {
		return n.MostHz
	}
	k := r.strongest
	for k > 0 && r.ratio[k-1] >= n.Ratio {
		k--
	}
	corner := r.frequencyHz[k]
	if k == 0 && n.ElseHz > 0 {
		corner = min(corner, n.ElseHz)
	}
	return min(max(corner, n.LeastHz), n.MostHz)
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
