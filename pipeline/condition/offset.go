package condition

import (
	"fmt"
	"math"

	"swaybook/pipeline/signal"
)

// By these a step of the baseline is told from motions of long periods: of 540 invented ones
// without a step, of periods up to 20 s, whole or cut in their coda, none was taken to have
// one; of 340 of periods up to 7 s that had one of 2.5 % of PGA it was found in all.
const (
	// offsetGain is by what factor at least a step must lessen the squares of the velocity
	// that remains beside a parabola.
	offsetGain = 10
	// jumpShare is how much of the motion's greatest velocity a step that is noted, where it
	// cannot be taken off, must make.
	jumpShare = 0.1
	// offsetQuietS and offsetRestS are the least lengths before and behind the motion in s.
	offsetQuietS = 10.0
	offsetRestS  = 20.0
)

// takeOffset takes off a step of the baseline of at least the step's share of PGA, where
// there is one, and notes where the velocity behind the motion is not that before it and no
// such step is the cause: several steps, one outside the motion, or a slow one. Where a
// polynomial of as many coefficients fits better the level drifts.
func (w *work) takeOffset(s Step) {
	x := w.recorded()
	_, quiet := w.quiet()
	if float64(quiet)*w.StepS < offsetQuietS {
		return
	}
	rest := signal.EndOf(x, w.StepS, restFrom)
	if float64(len(x)-rest)*w.StepS < offsetRestS {
		return
	}
	o, ok := signal.FindOffset(x, w.StepS, quiet, rest)
	switch {
	case o.Gain < offsetGain:
	case ok && math.Abs(o.Size) >= s.Share*signal.Greatest(x):
		for i := int(math.Ceil(o.TimeS / w.StepS)); i < len(x); i++ {
			x[i] -= o.Size
		}
	case o.OverSmooth >= 1 && o.Velocity >= jumpShare*o.Peak:
		share := o.Velocity / o.Peak
		w.Exceeded = append(w.Exceeded, Excess{FlagBaselineStep, share, jumpShare, fmt.Sprintf("the level changes in the motion: the velocity behind it is off by up to %.2g of PGV", share)})
	}
}
