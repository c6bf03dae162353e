package condition

import (
	"fmt"
	"math"

	"swaybook/pipeline/signal"
)

// The flags that the steps of a recipe can raise.
const (
	FlagBaselineStep      = "baseline_step"      // a change of the level that is not taken off
	FlagFinalVelocity     = "final_velocity"     // the ground does not come to rest
	FlagFinalDisplacement = "final_displacement" // it comes to rest elsewhere, or drifts
)

// Excess is a limit of the recipe's steps that the motion exceeds.
type Excess struct {
	Flag  string
	Value float64 // what was measured
	Bound float64 // what it is beyond
	// Words is a sentence for people.
	Words string
}

// finalShare is the share of the motion at its end over which means are taken, so that a
// swing of the coda is no rest that is missing (common practice).
const finalShare = 0.1

// check integrates the motion as it is now, pads and all, from rest, and notes where the
// mean velocity or displacement of its last tenth exceeds the step's share of the peak.
// Nothing is changed: over short periods such a motion is as good as any.
func (w *work) check(s Step) {
	v := signal.Integrate(nil, w.Acceleration, w.StepS)
	if s.VelocityShare > 0 {
		w.limit(FlagFinalVelocity, v, s.VelocityShare, "the velocity ends at %.2g of PGV")
	}
	if s.DisplacementShare > 0 {
		w.limit(FlagFinalDisplacement, signal.Integrate(v, v, w.StepS), s.DisplacementShare, "the displacement ends at %.2g of PGD")
	}
}

func (w *work) limit(flag string, x []float64, bound float64, words string) {
	if len(x) == 0 {
		return
	}
	last := x[len(x)-max(1, int(finalShare*float64(len(x)))):]
	if share := math.Abs(signal.Mean(last)) / signal.Greatest(x); share > bound {
		w.Exceeded = append(w.Exceeded, Excess{flag, share, bound, fmt.Sprintf(words, share)})
	}
}
