package condition

import (
	"math"
	"slices"

	"swaybook/pipeline/signal"
)

const (
	// leastHintS is the shortest part before the onset in s that hints at the noise where
	// there is not enough of it.
	leastHintS = 0.3
	// leastTailS is the shortest part behind the motion in s that does: a shorter one has as
	// much of its coda as of noise (common practice).
	leastTailS = 5.0
	// hintBand times the lowest frequency of which a part holds a cycle is the highest one
	// from which its level is taken.
	hintBand = 4.0
)

// part is what was recorded from one sample up to another.
type part struct{ from, to int }

// noise is where a motion is, and where there is noise beside it.
type noise struct {
	motion part
	parts  []part
	// areDoubtful says that the parts, if there are any, are what there is and not what is
	// needed.
	areDoubtful bool
}

// noiseParts are what precedes the motion where that is enough; else what there is of it, and
// what follows the motion, which may have some of it.
func (w *work) noiseParts() noise {
	quiet, from := w.quiet()
	if from > 0 {
		return noise{motion: part{from, w.endOf(quiet, from)}, parts: []part{{quiet, from}}}
	}
	before := part{w.tapered, max(w.tapered, w.onset())}
	n := noise{areDoubtful: true}
	x := w.recorded()
	if before.to >= len(x) {
		return n
	}
	floor := max(roundingPower(w.resolution), signal.QuietestPower(x[before.from:], w.StepS))
	n.motion = part{before.to, signal.EndAbove(x, w.StepS, before.from, before.to, floor, endFactor)}
	behind := part{n.motion.to, len(x)}
	if w.seconds(before) >= leastHintS {
		n.parts = append(n.parts, before)
	}
	if w.seconds(behind) >= leastTailS {
		n.parts = append(n.parts, behind)
	}
	return n
}

func (w *work) seconds(p part) float64 { return float64(p.to-p.from) * w.StepS }

// noisePower is the greatest power of any part at each frequency, and of rounding.
func (w *work) noisePower(parts []part, frequencyHz []float64) []float64 {
	out := slices.Repeat([]float64{roundingPower(w.resolution) / w.nyquist()}, len(frequencyHz))
	for _, p := range parts {
		power := signal.PowerOf(w.recorded()[p.from:p.to], w.StepS)
		leastHz := 1 / w.seconds(p)
		middleHz := leastHz * math.Sqrt(hintBand)
		level := power.Smooth([]float64{middleHz}, math.Sqrt(hintBand))[0]
		for k, smooth := range power.Smooth(frequencyHz, smoothing) {
			if f := frequencyHz[k]; f < leastHz {
				// At periods longer than the part that tells it, the power of noise is taken to
				// rise with the period, as that of flicker noise does (common practice).
				smooth = level * middleHz / f
			}
			out[k] = max(out[k], smooth)
		}
	}
	return out
}
