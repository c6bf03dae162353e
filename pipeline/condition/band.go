package condition

import "math"

// The shares of corners at which a band ends (common practice).
const (
	longShare  = 0.8
	shortShare = 0.8
	// lengthShare of what was recorded is the longest period that it can tell.
	lengthShare = 0.2
)

// DoubtfulSteps are the steps a period below which ordinates may be low, since the ground
// goes straight between samples (common practice).
const DoubtfulSteps = 10

// UsableBand returns the periods in s between which the component's spectrum can be
// believed:
//
//	toS   = 0.8/fl, fl the corner of the high-pass filters, +Inf where none is known, or
//	        the share that the recipe states of 1/fl, where that is less;
//	fromS = 1/(0.8·fh), fh the corner of the low-pass filters or half the sampling rate
//	        of the component as delivered, whichever is lower.
//
// fromS is not below toS where filters leave no band at all. The limits are common
// practice; for the long one see D. M. Boore and J. J. Bommer (2005).
func (c Conditioned) UsableBand() (fromS, toS float64) {
	high := 0.5 / (c.StepS * float64(c.Oversampled))
	if c.HighCutHz < high {
		high = c.HighCutHz
	}
	toS = math.Inf(1)
	if c.LowCutHz > 0 {
		toS = longShare / c.LowCutHz
	}
	return 1 / (shortShare * high), min(toS, c.LongS)
}
