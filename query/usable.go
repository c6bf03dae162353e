package query

import (
	"math"

	"swaybook/db"
	"swaybook/pipeline/condition"
)

// usable is the range of periods in s over which a motion's spectrum can be believed, and
// the period below which it may be low.
type usable struct{ fromS, toS, coarseS float64 }

// has reports whether the period is in the range, which includes its ends: quotients of
// decimals, which a period may miss by rounding.
func (u usable) has(periodS float64) bool {
	const rounding = 1e-9
	return periodS >= u.fromS*(1-rounding) && periodS <= u.toS*(1+rounding)
}

// usableBand is that of the motion's members together.
func (m *motion) usableBand() usable {
	u := usable{toS: math.Inf(1)}
	for _, c := range m.members {
		k := conditioned(c)
		fromS, toS := k.UsableBand()
		u = usable{max(u.fromS, fromS), min(u.toS, toS), max(u.coarseS, condition.DoubtfulSteps*k.StepS)}
	}
	return u
}

// conditioned is what decides of a component's usable band: the corners of all filters,
// by header, catalogue and recipe, and the steps.
func conditioned(c *db.HeldComponent) condition.Conditioned {
	out := condition.Conditioned{StepS: c.StepS, Oversampled: 1, LowCutHz: orNaN(c.LowCutHz), HighCutHz: orNaN(c.HighCutHz), LongS: math.Inf(1)}
	if k := c.Conditioning; k != nil {
		out.StepS, out.Oversampled = k.StepS, max(1, int(math.Round(c.StepS/k.StepS)))
		if k.LongS != nil {
			out.LongS = *k.LongS
		}
		if k.LowCutHz != nil && !(out.LowCutHz > *k.LowCutHz) {
			out.LowCutHz = *k.LowCutHz
		}
		if k.HighCutHz != nil && !(out.HighCutHz < *k.HighCutHz) {
			out.HighCutHz = *k.HighCutHz
		}
	}
	return out
}

// reasonUnusable leaves out motions of which no asked period can be believed.
const reasonUnusable = "outside the usable band of periods"

// keepUsable takes the ordinates out, as NaN, that lie outside their motion's usable
// band, and returns the motions, by position, that have none left, or none at the
// period of position must where that is not negative. partly counts the other motions
// that lost some, and coarse those that keep some of few steps a period.
func (o *ordinates) keepUsable(motions []motion, must int) (without map[int]string, partly, coarse int) {
	without = map[int]string{}
	for i := range motions {
		band := motions[i].usableBand()
		kept, isCoarse := 0, false
		for p, oscillator := range o.oscillators {
			t := oscillator.PeriodS
			if band.has(t) {
				kept++
				isCoarse = isCoarse || t < band.coarseS*(1-1e-9)
			} else {
				o.sd[p*o.motions+i] = math.NaN()
			}
		}
		switch {
		case kept == 0, must >= 0 && !band.has(o.oscillators[must].PeriodS):
			without[i] = reasonUnusable
			continue
		case kept < len(o.oscillators):
			partly++
		}
		if isCoarse {
			coarse++
		}
	}
	return without, partly, coarse
}
