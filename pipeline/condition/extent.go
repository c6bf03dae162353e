package condition

import (
	"math"

	"swaybook/pipeline/signal"
)

const (
	// guardS is the time before the arrival in s that counts neither as noise nor as
	// motion, since pickers are late; half of what precedes it where that is less.
	guardS = 0.5
	// leastNoiseS is the shortest noise in s that is enough.
	leastNoiseS = 2.0
	// endFactor is how many times the power of the noise the motion has up to its end:
	// twice the amplitude (common practice).
	endFactor = 4
	// restFrom is the share of the squares above 1 Hz behind which the ground is taken to
	// be at rest but for its coda.
	restFrom = 0.99
)

// onset is the recorded sample before which nothing is motion, a taper's first bell left
// out; a step looks for it once.
func (w *work) onset() int {
	if !w.hasOnset && w.tapered < len(w.recorded()) {
		arrival := signal.ArrivalOver(w.recorded()[w.tapered:], w.StepS, signal.RoundingDeviation(w.resolution))
		w.onsetAt = w.tapered + arrival - min(arrival-arrival/2, int(math.Ceil(guardS/w.StepS)))
		w.hasOnset = true
	}
	return w.onsetAt
}

// quiet are the recorded samples from which the noise is told: what a taper has made
// small is left out. They are none where they are too few.
func (w *work) quiet() (from, to int) {
	onset := w.onset()
	if float64(onset-w.tapered)*w.StepS < leastNoiseS {
		return 0, 0
	}
	return w.tapered, onset
}

// roundingPower is the mean square of what rounding to the resolution adds.
func roundingPower(resolution float64) float64 {
	d := signal.RoundingDeviation(resolution)
	return d * d
}

// stallPower is the power by frequency, over lengthS, of a level that is rounded away where
// the ground is quiet, and is there where it moves: a boxcar of half the resolution, the
// most there is, over the motion, which lasts lengthS. Its Fourier amplitude is
//
//	|B(f)| = resolution/2·|sin(π·f·lengthS)|/(π·f) ≤ resolution/2·min(lengthS, 1/(π·f)).
//
// Noise of half a step before the motion keeps the level (dither), and there is none.
func stallPower(resolution, frequencyHz, lengthS float64) float64 {
	amplitude := float64(resolution / 2 * min(lengthS, 1/(math.Pi*frequencyHz)))
	return 2 * amplitude * amplitude / lengthS
}

// endOf is the recorded sample at which a motion is lost in the noise, or in rounding; the
// samples from quiet to from are noise.
func (w *work) endOf(quiet, from int) int {
	return signal.EndAbove(w.recorded(), w.StepS, quiet, from, roundingPower(w.resolution), endFactor)
}

const (
	// mostBellS bounds the bells of a taper in s: drift and noise of longer periods are
	// what filters take off, not a taper (common practice).
	mostBellS = 5.0
	// leastBellS is the bell in s of a motion that begins or ends at once (common
	// practice).
	leastBellS = 0.1
)

// taper keeps its bells out of the motion.
func (w *work) taper(share float64) {
	x := w.recorded()
	if len(x) == 0 {
		return
	}
	onset := w.onset()
	first := w.bell(share, onset)
	end := min(w.endOf(0, onset), signal.EndOf(x, w.StepS, restFrom))
	signal.Taper(x, first, w.bell(share, len(x)-end))
	w.tapered = max(w.tapered, first)
}

// bell is the length of a bell where so many samples are no motion: half of them, within
// the limits.
func (w *work) bell(share float64, quiet int) int {
	n := len(w.recorded())
	most := min(int(share*float64(n)), int(mostBellS/w.StepS))
	return min(most, max(quiet/2, int(leastBellS/w.StepS)))
}
