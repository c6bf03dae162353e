package condition

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"swaybook/pipeline/signal"
)

// Component is one component as it was delivered.
type Component struct {
	Acceleration []float64 // m/s², not changed
	StepS        float64
	State        string // of processing
	// LowCutHz and HighCutHz are the corners that the header states, NaN where it does
	// not.
	LowCutHz, HighCutHz float64
}

// Conditioned is a component after a recipe.
type Conditioned struct {
	// Acceleration in m/s² is that of the component itself where nothing was done.
	Acceleration []float64
	StepS        float64
	// LeadS is how much earlier than the component's first sample the first one here is,
	// in s; negative after a trim.
	LeadS float64
	// LowCutHz and HighCutHz are the corners of all filters that the motion has behind
	// it, here or before, NaN where none is known.
	LowCutHz, HighCutHz float64
	// Oversampled is by how much the step is finer than the component's.
	Oversampled int
	// LongS is the longest period in s that the recipe's own high-pass filter leaves and
	// the length of what was recorded can tell, +Inf where nothing was done.
	LongS float64
	// Exceeded are the limits of the recipe's steps that the motion exceeds.
	Exceeded []Excess
	// IsChanged is false where the component was left as it was delivered.
	IsChanged bool
}

// SamplesBefore is by how many samples c begins before d, which has the same step,
// where the components that they were made of began together; negative where it begins
// after d.
func (c Conditioned) SamplesBefore(d Conditioned) int {
	return int(math.Round((c.LeadS - d.LeadS) / c.StepS))
}

// Apply carries out the recipe. The error says which step cannot be done and why.
func (r Recipe) Apply(c Component) (Conditioned, error) {
	out := Conditioned{
		Acceleration: c.Acceleration, StepS: c.StepS, LowCutHz: c.LowCutHz, HighCutHz: c.HighCutHz, Oversampled: 1, LongS: math.Inf(1),
	}
	if !r.AppliesTo(c.State) || len(r.Steps) == 0 {
		return out, nil
	}
	w := &work{Conditioned: out, headerLowHz: c.LowCutHz, resolution: signal.Resolution(c.Acceleration)}
	w.asks = slices.ContainsFunc(r.Steps, func(s Step) bool { return s.ByNoise != nil })
	w.IsChanged = true
	w.Acceleration = slices.Clone(c.Acceleration)
	for i, s := range r.Steps {
		if err := w.do(s); err != nil {
			return out, &StepError{Step: i + 1, Kind: s.Do, Err: err}
		}
	}
	w.LongS = lengthShare * float64(len(w.recorded())) * w.StepS
	if w.highPassed {
		w.LongS = min(w.LongS, cmp.Or(r.LongShare, longShare)/w.LowCutHz)
	}
	w.cutPads()
	return w.Conditioned, nil
}

// work is a motion between two steps: before and after are the zeros that stand for
// the time before and after what was recorded.
type work struct {
	Conditioned
	before, after int
	// keepBefore and keepAfter of them are there because a step asks for them.
	keepBefore, keepAfter int
	// noise is how far the motion stands out, by frequency, once a step has asked, until a
	// step changes motion and noise otherwise than filters do, which change both alike.
	noise ratios
	asked bool
	// onsetAt is the onset, once the step at hand has asked for it.
	onsetAt  int
	hasOnset bool
	// asks says that a step of the recipe will.
	asks bool
	// highPassed says that a high-pass filter was applied here.
	highPassed bool
	// headerLowHz is the corner that the header states, NaN where it does not.
	headerLowHz float64
	// resolution is that of the component as delivered in m/s².
	resolution float64
	// tapered is the number of recorded samples at the beginning that a taper has made
	// small.
	tapered int
}

// cornerOf is the fixed corner, or what choose makes of the noise.
func (w *work) cornerOf(s Step, choose func(ratios, NoiseRule) float64) float64 {
	if s.ByNoise == nil {
		return s.CornerHz
	}
	w.ask()
	return choose(w.noise, *s.ByNoise)
}

// ask looks at the noise unless that of the motion at hand is known.
func (w *work) ask() {
	if !w.asked {
		w.noise = w.ratios()
		w.asked = true
	}
}

// recorded is the motion without its pads.
func (w *work) recorded() []float64 {
	return w.Acceleration[w.before : len(w.Acceleration)-w.after]
}

// nyquist is half the sampling rate in Hz as delivered: a finer step brings nothing above it.
func (w *work) nyquist() float64 { return 0.5 / (w.StepS * float64(w.Oversampled)) }

func (w *work) do(s Step) error {
	w.onsetAt, w.hasOnset = 0, false
	switch s.Do {
	case KindHighPass, KindLowPass, KindBandPass, KindPad, KindCheck, KindTaper:
	default:
		w.asked = false
	}
	switch s.Do {
	case KindMean:
		return w.takeOff(s, 0)
	case KindTrend:
		return w.takeOff(s, s.Degree)
	case KindOffset:
		w.takeOffset(s)
	case KindTaper:
		if w.asks {
			w.ask() // before bells make the noise small
		}
		w.taper(s.Share)
	case KindPad:
		w.keepBefore, w.keepAfter = max(w.keepBefore, w.samplesOf(s.BeforeS)), max(w.keepAfter, w.samplesOf(s.AfterS))
		w.pad(w.keepBefore, w.keepAfter)
	case KindTrim:
		return w.trim(s.FromS, s.ToS)
	case KindOversample:
		w.oversample(s.Factor)
	case KindCheck:
		w.check(s)
	case KindHighPass:
		return w.highPass(s)
	case KindBandPass:
		return w.bandPass(s)
	case KindLowPass:
		return w.lowPass(s)
	}
	return nil
}

// takeOff takes off the polynomial that fits the step's window best.
func (w *work) takeOff(s Step, degree int) error {
	x := w.recorded()
	from, to := 0, len(x)
	switch s.Window {
	case WindowPreEvent:
		if quiet, onset := w.quiet(); onset > 0 {
			from, to = quiet, onset
		}
	case WindowStated:
		from, to = int(math.Round(s.FromS/w.StepS)), int(math.Round(s.ToS/w.StepS))+1
		if to > len(x) || to-from < leastSamples {
			return fmt.Errorf("the window takes samples %d to %d of %d, which must be there and %d at least", from+1, to, len(x), leastSamples)
		}
	}
	signal.DetrendBy(x, from, to, degree)
	return nil
}

// samplesOf is the number of steps that cover the time in s; rounding makes none more.
func (w *work) samplesOf(timeS float64) int {
	return int(math.Ceil(timeS/w.StepS - 1e-6))
}

// trim keeps the recorded samples from fromS on, and up to toS where that is not 0.
func (w *work) trim(fromS, toS float64) error {
	x := w.recorded()
	from, to := int(math.Round(fromS/w.StepS)), len(x)
	if toS > 0 {
		to = min(to, int(math.Round(toS/w.StepS))+1)
	}
	if to-from < leastSamples {
		return fmt.Errorf("%d samples would be left of %d", max(0, to-from), len(x))
	}
	w.Acceleration = w.Acceleration[w.before+from : w.before+to]
	w.LeadS -= float64(float64(w.before+from) * w.StepS)
	w.before, w.after, w.keepBefore, w.keepAfter = 0, 0, 0, 0
	w.tapered = max(0, w.tapered-from)
	return nil
}

// leastSamples is the shortest motion that a trim leaves, and the shortest window stated.
const leastSamples = 10

func (w *work) oversample(factor int) {
	// Pads of a tenth of a second keep the ends from ringing into each other.
	w.pad(int(math.Ceil(0.1/w.StepS)), int(math.Ceil(0.1/w.StepS)))
	w.Acceleration = signal.Resample(w.Acceleration, factor)
	w.StepS /= float64(factor)
	w.Oversampled *= factor
	w.tapered *= factor
	w.before *= factor
	w.keepBefore, w.keepAfter = w.keepBefore*factor, w.keepAfter*factor
	w.after = w.after*factor + factor - 1 // zeros between the last sample and the first pad
}

// pad sees to it that so many zeros at least stand at either end.
func (w *work) pad(before, after int) {
	before, after = max(0, before-w.before), max(0, after-w.after)
	if before+after == 0 {
		return
	}
	n := len(w.Acceleration)
	x := make([]float64, before+n+after)
	copy(x[before:], w.Acceleration)
	w.Acceleration = x
	w.LeadS += float64(float64(before) * w.StepS)
	w.before, w.after = w.before+before, w.after+after
}

func (w *work) highPass(s Step) error {
	corner := w.cornerOf(s, ratios.lowCorner)
	if corner == 0 {
		return nil
	}
	return w.passAbove(s.Order, corner)
}

// passAbove filters no lower than the header says: what is below is gone.
func (w *work) passAbove(order int, corner float64) error {
	if w.headerLowHz > corner {
		corner = w.headerLowHz
	}
	f, err := signal.HighPass(order, corner, w.StepS)
	if err != nil {
		return err
	}
	w.filter(f)
	w.cutBelow(corner)
	return nil
}

// bandPass is a high-pass filter where the motion has nothing above the band.
func (w *work) bandPass(s Step) error {
	if !w.hasAbove(s.HighHz) {
		return w.passAbove(s.Order, s.LowHz)
	}
	low := s.LowHz
	if w.headerLowHz > low {
		low = w.headerLowHz
	}
	f, err := signal.BandPass(s.Order, low, s.HighHz, w.StepS)
	if err != nil {
		return err
	}
	w.filter(f)
	w.cutBelow(low)
	w.HighCutHz = s.HighHz
	return nil
}

// cutBelow notes a high-pass filter; of several the highest corner counts.
func (w *work) cutBelow(corner float64) {
	if !(w.LowCutHz > corner) {
		w.LowCutHz = corner
	}
	w.highPassed = true
}

// lowPass leaves a motion alone that has nothing above the corner.
func (w *work) lowPass(s Step) error {
	corner := w.cornerOf(s, ratios.highCorner)
	if corner == 0 || !w.hasAbove(corner) {
		return nil
	}
	f, err := signal.LowPass(s.Order, corner, w.StepS)
	if err != nil {
		return err
	}
	w.filter(f)
	w.HighCutHz = corner
	return nil
}

// hasAbove reports whether the motion has anything above the corner in Hz: no header states
// a lower one, and its sampling is fine enough.
func (w *work) hasAbove(corner float64) bool {
	return !(corner >= w.HighCutHz) && corner < w.nyquist()*maxNyquistShare
}

// maxNyquistShare is the share of half the sampling rate from which on a low-pass
// filter has nothing to do that the recorder's has not done (common practice).
const maxNyquistShare = 0.8

func (w *work) filter(f signal.Filter) {
	pad := int(math.Ceil(f.PadS() / w.StepS))
	w.pad(pad, pad)
	f.TwoWay(w.Acceleration)
}

// quietShare is the share of PGA below which the ends of pads say nothing, and restShare
// the share of PGD that may be lost where the motion is taken to begin at rest: by the
// displacement there, or by the velocity there until the end.
const (
	quietShare = 1e-5
	restShare  = 1e-3
)

// cutPads takes the ends of the pads off that hold next to nothing and that no step asks
// for.
func (w *work) cutPads() {
	n := len(w.Acceleration)
	from, to := 0, n
	limit := quietShare * signal.Greatest(w.Acceleration)
	if w.before > 0 {
		v := signal.Integrate(nil, w.Acceleration, w.StepS)
		d := signal.Integrate(nil, v, w.StepS)
		lost, lengthS := restShare*signal.Greatest(d), float64(n)*w.StepS
		isRest := func(i int) bool {
			return math.Abs(w.Acceleration[i]) <= limit && math.Abs(d[i]) <= lost && math.Abs(v[i])*lengthS <= lost
		}
		for from < w.before-w.keepBefore && isRest(from) {
			from++
		}
	}
	for to > n-w.after+w.keepAfter && math.Abs(w.Acceleration[to-1]) <= limit {
		to--
	}
	w.Acceleration = w.Acceleration[from:to]
	w.LeadS -= float64(float64(from) * w.StepS)
	w.before, w.after = w.before-from, w.after-(n-to)
}
