package quality

import (
	"fmt"
	"math"

	"swaybook/pipeline/internal/elementary"
	"swaybook/pipeline/signal"
)

// The flags that samples alone can raise.
const (
	FlagLostData      = "lost_data"      // the recording stands still before the motion ends
	FlagOffset        = "offset"         // the mean is not 0
	FlagBaselineStep  = "baseline_step"  // the level after the motion is not that before it
	FlagDrift         = "drift"          // the ground does not come to rest
	FlagNoPreEvent    = "no_pre_event"   // too little before the arrival to tell noise by
	FlagLateStart     = "late_start"     // begins in the strong motion
	FlagEarlyEnd      = "early_end"      // ends in it
	FlagSeveralEvents = "several_events" // strong motion twice, with rest between
	FlagLowSignal     = "low_signal"     // does not stand out of the noise
)

// Finding is a flag with what raised it.
type Finding struct {
	Flag  string
	Value float64 // what was measured
	Bound float64 // what it is beyond
	// Words is a sentence for people.
	Words string
}

// The limits. Shares of peaks, times in s.
const (
	offsetShare = 0.01 // of PGA
	stepShare   = 0.01 // of PGA
	levelErrors = 5    // how many standard errors a level must be off, besides
	restShare   = 0.25 // of PGV, by the mean velocity over the last tenth
	preEventS   = 2.0
	windowS     = 1.0  // of the root mean squares that follow
	startShare  = 0.3  // of the greatest, in the first second
	endShare    = 0.2  // of the greatest, in the last second
	restS       = 5.0  // between two events
	quietShare  = 0.05 // of the greatest, at rest
	againShare  = 0.3  // of the greatest, of another event
	leastSignal = 10.0 // the peak over the standard deviation of the noise
	unevenS     = 30.0 // of a record without noise before it, to tell it from noise
	unevenParts = 8
	uneven      = 1.5 // the strongest of them over the quietest, of noise
	stillS      = 0.2 // of equal samples at the end
	stillCount  = 10  // of them, besides
	overNoise   = 5.0 // the last second before them over the noise
	stopShare   = 0.5 // how far of that second's root mean square they are off what precedes
	stopSteps   = 12  // how many steps of the resolution, besides
)

// Assess returns what is found in acceleration in m/s², stepS apart in s, whose motion
// arrives at the sample onset, 0 where it begins within it. The findings are in the
// order of the flags above.
func Assess(acceleration []float64, stepS float64, onset int) []Finding {
	if len(acceleration) == 0 {
		return nil
	}
	a := &assessment{x: acceleration, stepS: stepS, onset: onset, peak: signal.Greatest(acceleration)}
	a.still()
	a.levels()
	a.rest()
	a.extent()
	a.standsOut()
	return a.found
}

// AssessConditioned returns which of FlagOffset, FlagBaselineStep and FlagDrift remain in a
// motion that a recipe has conditioned, with its pads: those are about the motion itself,
// and what is wrong there is in its spectrum.
func AssessConditioned(acceleration []float64, stepS float64, onset int) []Finding {
	if len(acceleration) == 0 {
		return nil
	}
	a := &assessment{x: acceleration, stepS: stepS, onset: onset, peak: signal.Greatest(acceleration)}
	a.levels()
	a.restOf(signal.Integrate(nil, a.x, a.stepS))
	return a.found
}

type assessment struct {
	x     []float64
	y     []float64 // x without drift, up to where it was lost
	stepS float64
	onset int
	peak  float64
	found []Finding
}

func (a *assessment) add(flag string, value, bound float64, words string, args ...any) {
	a.found = append(a.found, Finding{flag, value, bound, fmt.Sprintf(words, args...)})
}

// level is a mean with its standard error, of samples that may hang together: the
// variance is that of means of windows.
type level struct{ mean, deviation float64 }

// levelOf takes the mean of means over windows of windowS, and their deviation over the
// root of their number.
func levelOf(x []float64, stepS float64) level {
	n := max(1, int(math.Round(windowS/stepS)))
	var means []float64
	for len(x) >= n {
		means = append(means, signal.Mean(x[:n]))
		x = x[n:]
	}
	if len(means) < 2 {
		return level{math.NaN(), math.NaN()}
	}
	m, k := signal.Mean(means), float64(len(means))
	return level{m, math.Sqrt(squaresAbout(means, m) / (k - 1) / k)}
}

// squaresAbout is the sum of the squares of x about its mean.
func squaresAbout(x []float64, mean float64) float64 {
	sum := 0.0
	for _, v := range x {
		sum += float64((v - mean) * (v - mean))
	}
	return sum
}

// levels compares the mean with 0, and that of the last tenth with that before the
// arrival, or of the first tenth where there is none.
func (a *assessment) levels() {
	n := len(a.x)
	if l := levelOf(a.x, a.stepS); math.Abs(l.mean) > max(offsetShare*a.peak, levelErrors*l.deviation) {
		a.add(FlagOffset, math.Abs(l.mean)/a.peak, offsetShare, "the mean is %.2g of PGA", math.Abs(l.mean)/a.peak)
	}
	first := a.x[:n/10]
	if float64(a.onset)*a.stepS >= preEventS {
		first = a.x[:a.onset]
	}
	before, after := levelOf(first, a.stepS), levelOf(a.x[n-n/10:], a.stepS)
	step := math.Abs(after.mean - before.mean)
	if step > max(stepShare*a.peak, levelErrors*elementary.Hypot(before.deviation, after.deviation)) {
		a.add(FlagBaselineStep, step/a.peak, stepShare, "the level changes by %.2g of PGA from beginning to end", step/a.peak)
	}
}

// rest looks whether the ground, integrated from rest at the level before the arrival,
// comes back to it.
func (a *assessment) rest() {
	v := append([]float64(nil), a.x...)
	if float64(a.onset)*a.stepS >= preEventS {
		signal.Subtract(v, signal.Mean(v[:a.onset]))
	}
	a.restOf(signal.Integrate(v, v, a.stepS))
}

// restOf looks whether the mean of a velocity over its last tenth is small against its
// peak: it is the slope at which the displacement drifts.
func (a *assessment) restOf(v []float64) {
	last := v[len(v)-max(1, len(v)/10):]
	if share := math.Abs(signal.Mean(last)) / signal.Greatest(v); share > restShare {
		a.add(FlagDrift, share, restShare, "the displacement drifts at the end by %.2g of PGV", share)
	}
}
