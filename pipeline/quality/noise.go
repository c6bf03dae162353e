package quality

import (
	"math"
	"slices"

	"swaybook/pipeline/signal"
)

// standsOut looks whether the motion stands out of the noise: of that before the arrival, or,
// where too little precedes it, whether there is anything but even noise. A record of less
// than unevenS may lie within the motion, which can be as even.
func (a *assessment) standsOut() {
	if noise := a.noise(); noise > 0 {
		if s := signal.Greatest(a.y) / noise; s < leastSignal {
			a.add(FlagLowSignal, s, leastSignal, "the peak is %.2g times the noise before the arrival", s)
		}
		return
	}
	if a.quietS() >= preEventS || float64(len(a.y))*a.stepS < unevenS || len(a.y) < unevenParts {
		return
	}
	if r := unevenness(a.y); r < uneven {
		a.add(FlagLowSignal, r, uneven, "noise throughout: the strongest eighth has %.2g times the quietest's root mean square", r)
	}
}

// unevenness is the greatest root mean square of a part of y over the least.
func unevenness(y []float64) float64 {
	parts := signal.RootMeanSquares(y, len(y)/unevenParts)[:unevenParts]
	return slices.Max(parts) / slices.Min(parts)
}

// noise is the standard deviation before the arrival, not less than that of rounding; 0
// where less than preEventS precedes it.
func (a *assessment) noise() float64 {
	if a.quietS() < preEventS {
		return 0
	}
	quiet := a.y[:min(a.onset, len(a.y))]
	return max(math.Sqrt(squaresAbout(quiet, signal.Mean(quiet))/float64(len(quiet))), signal.RoundingDeviation(signal.Resolution(a.x)))
}
