package ingest

import "math"

// The limits outside which a number is taken for a mistake in unit or header.
const (
	// MinSamples is the shortest series that is read as a record.
	MinSamples = 10
	// MaxStepS is the coarsest sampling read, in s: 0.1 s carries nothing above
	// 5 Hz.
	MaxStepS = 0.1
	// MinStepS is the finest sampling read, in s (2 kHz): recorders of strong
	// motion take 50 to 1000 samples a second (common practice).
	MinStepS = 0.0005
	// MaxPeakG is the largest peak read, in g.
	MaxPeakG = 20
	// DoubtfulPeakG is the peak in g above which a warning asks for the unit.
	DoubtfulPeakG = 5
)

// check holds a channel to the invariants that every reader owes.
func check(c *Channel) error {
	if n := len(c.Acceleration); n < MinSamples {
		return refuse(c.Line, "samples", "%d values; a record needs at least %d", n, MinSamples)
	}
	if !(c.StepS > 0) || math.IsInf(c.StepS, 0) {
		return refuse(c.Line, "dt", "time step %g s is not positive", c.StepS)
	}
	if c.StepS > MaxStepS || c.StepS < MinStepS {
		return refuse(c.Line, "dt", "time step %g s is outside %g to %g s", c.StepS, MinStepS, MaxStepS)
	}
	dropImplausible(c)
	return checkSamples(c)
}

// channelName is how a message tells a channel from the others of its file.
func channelName(c *Channel) string { return orElse(c.ChannelCode, c.Orientation.Label) }

// checkSamples refuses series that are not finite, dead or beyond any motion, and
// notes what else looks wrong with them.
func checkSamples(c *Channel) error {
	low, high := math.Inf(1), math.Inf(-1)
	for i, a := range c.Acceleration {
		if !(math.Abs(a) <= math.MaxFloat64) {
			return refuse(c.Line, "samples", "value %d is not finite", i+1)
		}
		c.Acceleration[i] = a + 0 // a negative zero is a zero
		if a < low {
			low = a
		}
		if a > high {
			high = a
		}
	}
	peak := max(-low, high)
	if err := checkMarks(c, low, high); err != nil {
		return err
	}
	switch {
	case low == high:
		return refuse(c.Line, "samples", "all %d values are equal: a dead channel", len(c.Acceleration))
	case peak > MaxPeakG*StandardGravity:
		return refuse(c.Line, "samples", "peak of %.3g g is beyond %d g: wrong unit %q or scale?", peak/StandardGravity, MaxPeakG, c.Unit)
	case peak > DoubtfulPeakG*StandardGravity:
		c.warn("peak above %d g: check the unit", DoubtfulPeakG)
	}
	flagQuality(c, low, high)
	return checkHeaderPeak(c, peak)
}

// How far the samples' peak may be from the one that the header states, relative
// to that: headers round it, or took it from another stage of processing; a
// wrong unit or damage is farther off.
const (
	doubtfulPeakOff = 0.02
	maxPeakOff      = 0.20
)

// checkHeaderPeak compares the samples' peak with the one that the header
// states.
func checkHeaderPeak(c *Channel, peak float64) error {
	if !c.HeaderPeak.Known || c.HeaderPeak.Value == 0 {
		return nil
	}
	stated := math.Abs(c.HeaderPeak.Value)
	off := math.Abs(peak-stated) / stated
	switch {
	case off > maxPeakOff:
		return refuse(c.Line, "peak", "samples reach %.5g m/s², the header says %.5g m/s²", peak, stated)
	case off > doubtfulPeakOff:
		c.find(FlagPeakMismatch, off, doubtfulPeakOff, "peak of the samples and of the header differ by more than %g %%", 100*doubtfulPeakOff)
	}
	return nil
}
