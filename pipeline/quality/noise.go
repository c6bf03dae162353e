package quality

import (
	"math"

	"swaybook/pipeline/signal"
)

// standsOut looks whether the motion stands out of the noise before the arrival.
func (a *assessment) standsOut() {
	if noise := a.noise(); noise > 0 {
		if s := signal.Greatest(a.y) / noise; s < leastSignal {
			a.add(FlagLowSignal, s, leastSignal, "the peak is %.2g times the noise before the arrival", s)
		}
	}
}

// noise is the standard deviation before the arrival, 0 where less than preEventS
// precedes it.
func (a *assessment) noise() float64 {
	if a.quietS() < preEventS {
		return 0
	}
	quiet := a.y[:a.onset]
	return math.Sqrt(squaresAbout(quiet, signal.Mean(quiet)) / float64(len(quiet)))
}
