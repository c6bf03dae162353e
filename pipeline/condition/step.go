package condition

import (
	"errors"
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"

	"swaybook/pipeline/signal"
)

// Kind is what a step does.
type Kind string

// The kinds of steps.
const (
	KindMean       Kind = "mean"              // takes off the mean of Window, or of FromS to ToS
	KindTrend      Kind = "trend"             // takes off the polynomial of Degree that fits Window, or FromS to ToS, best
	KindOffset     Kind = "offset"            // takes off a step of the baseline of at least Share of PGA
	KindTaper      Kind = "taper"             // cosine bells over Share of the length at either end, outside the motion
	KindTrim       Kind = "trim"              // keeps what lies from FromS to ToS
	KindPad        Kind = "pad"               // zeros over BeforeS and AfterS
	KindHighPass   Kind = "high-pass"         // acausal Butterworth filter
	KindLowPass    Kind = "low-pass"          // acausal Butterworth filter
	KindBandPass   Kind = "band-pass"         // acausal Butterworth filter
	KindOversample Kind = "oversample"        // band-limited samples on a step Factor times finer
	KindCheck      Kind = "integration-check" // changes nothing, notes what VelocityShare and DisplacementShare do not allow
)

// Window is the part of a component that a step looks at.
type Window string

// The windows.
const (
	WindowWhole    Window = "whole"
	WindowPreEvent Window = "pre-event" // before the onset, the whole where there is too little
	WindowStated   Window = "stated"    // from FromS to ToS, counted from the first sample
)

// Step is one step. Fields that its kind does not use are zero.
type Step struct {
	Do       Kind       `json:"do" toml:"do"`
	Window   Window     `json:"window,omitempty" toml:"window"`
	Degree   int        `json:"degree,omitempty" toml:"degree"`
	Share    float64    `json:"share,omitempty" toml:"share"`
	FromS    float64    `json:"from_s,omitempty" toml:"from_s"`
	ToS      float64    `json:"to_s,omitempty" toml:"to_s"`
	BeforeS  float64    `json:"before_s,omitempty" toml:"before_s"`
	AfterS   float64    `json:"after_s,omitempty" toml:"after_s"`
	Order    int        `json:"order,omitempty" toml:"order"` // of one of both passages
	CornerHz float64    `json:"corner_hz,omitempty" toml:"corner_hz"`
	LowHz    float64    `json:"low_hz,omitempty" toml:"low_hz"`
	HighHz   float64    `json:"high_hz,omitempty" toml:"high_hz"`
	ByNoise  *NoiseRule `json:"by_noise,omitempty" toml:"by_noise"`
	Factor   int        `json:"factor,omitempty" toml:"factor"`
	// VelocityShare of PGV and DisplacementShare of PGD are what may be left at the end;
	// 0 stands for no limit.
	VelocityShare     float64 `json:"velocity_share,omitempty" toml:"velocity_share"`
	DisplacementShare float64 `json:"displacement_share,omitempty" toml:"displacement_share"`
}

// NoiseRule chooses a corner where the motion begins to stand out of the noise before
// it: the ratio of their smoothed Fourier amplitudes, each for its length, is at least
// Ratio from the corner to the frequency where the motion is strongest. The corner stays
// within LeastHz and MostHz, and a low one is none below the lowest frequency of which
// noise and motion hold a cycle. Where there is too little before the onset to compare with,
// a low corner is that by what there is of it and by what follows the motion, but none below
// ElseHz; it is ElseHz where neither tells anything, as a high one is. 0 stands for no filter.
type NoiseRule struct {
	Ratio   float64 `json:"ratio" toml:"ratio"`
	LeastHz float64 `json:"least_hz" toml:"least_hz"`
	MostHz  float64 `json:"most_hz" toml:"most_hz"`
	ElseHz  float64 `json:"else_hz" toml:"else_hz"`
}

// uses are the fields that a kind of step takes.
var uses = map[Kind][]string{
	KindMean: {"window", "from_s", "to_s"}, KindTrend: {"degree", "window", "from_s", "to_s"}, KindOffset: {"share"}, KindTaper: {"share"}, KindTrim: {"from_s", "to_s"}, KindPad: {"before_s", "after_s"},
	KindHighPass: {"order", "corner_hz", "by_noise"}, KindLowPass: {"order", "corner_hz", "by_noise"}, KindBandPass: {"order", "low_hz", "high_hz"}, KindOversample: {"factor"},
	KindCheck: {"velocity_share", "displacement_share"},
}

func (s Step) validate() error {
	fields, ok := uses[s.Do]
	if !ok {
		return fmt.Errorf("do: unknown step; known: mean, trend, offset, taper, trim, pad, high-pass, low-pass, band-pass, oversample, integration-check")
	}
	set := s.set()
	for _, name := range slices.Sorted(maps.Keys(set)) {
		if set[name] && !slices.Contains(fields, name) {
			return fmt.Errorf("%s: not a field of this step; it takes %s", name, strings.Join(fields, ", "))
		}
	}
	switch s.Do {
	case KindMean:
		return s.validateWindow()
	case KindTrend:
		return s.validateTrend()
	case KindOffset:
		return within("share", s.Share, 0.001, 1)
	case KindTaper:
		return within("share", s.Share, 0.001, 0.5)
	case KindTrim:
		return s.validateTrim()
	case KindPad:
		return s.validatePad()
	case KindOversample:
		return within("factor", float64(s.Factor), 2, maxFactor)
	case KindBandPass:
		return s.validateBand()
	case KindCheck:
		return s.validateCheck()
	}
	return s.validateFilter()
}

func (s Step) validateWindow() error {
	if err := oneOf("window", s.Window, WindowWhole, WindowPreEvent, WindowStated); err != nil {
		return err
	}
	if s.Window == WindowStated {
		if s.ToS == 0 {
			return errors.New("to_s: missing")
		}
		return s.validateTrim()
	}
	if s.FromS != 0 || s.ToS != 0 {
		return fmt.Errorf(`from_s, to_s: of window = "stated" only, not %q`, s.Window)
	}
	return nil
}

// validateTrend lets no parabola be continued: it would run away.
func (s Step) validateTrend() error {
	if s.Window == "" || s.Window == WindowWhole {
		s.Window = WindowWhole
		return errors.Join(s.validateWindow(), within("degree", float64(s.Degree), 1, signal.MaxDegree))
	}
	return errors.Join(s.validateWindow(), within("degree", float64(s.Degree), 1, 1))
}

// maxFactor bounds how much finer steps become, by one step of a recipe and by all.
const maxFactor = 10

func (s Step) validateTrim() error {
	if err := within("from_s", s.FromS, 0, 1e6); err != nil {
		return err
	}
	if s.ToS != 0 && !(s.ToS > s.FromS) {
		return fmt.Errorf("to_s: %g s is not after from_s", s.ToS)
	}
	return within("to_s", s.ToS, 0, 1e6)
}

// maxPadS bounds the zeros at either end in s.
const maxPadS = 1000

func (s Step) validatePad() error {
	if s.BeforeS == 0 && s.AfterS == 0 {
		return errors.New("before_s, after_s: one at least is needed")
	}
	return errors.Join(within("before_s", s.BeforeS, 0, maxPadS), within("after_s", s.AfterS, 0, maxPadS))
}

func (s Step) validateCheck() error {
	if s.VelocityShare == 0 && s.DisplacementShare == 0 {
		return errors.New("velocity_share, displacement_share: one at least is needed")
	}
	return errors.Join(within("velocity_share", s.VelocityShare, 0, 1), within("displacement_share", s.DisplacementShare, 0, 1))
}

func (s Step) validateFilter() error {
	if err := within("order", float64(s.Order), 1, signal.MaxOrder); err != nil {
		return err
	}
	if (s.ByNoise == nil) == (s.CornerHz == 0) {
		return errors.New("corner_hz, by_noise: one of both is needed")
	}
	if s.ByNoise == nil {
		return within("corner_hz", s.CornerHz, leastCornerHz, maxCornerHz)
	}
	n := s.ByNoise
	if err := errors.Join(within("by_noise.ratio", n.Ratio, 1, 100), within("by_noise.least_hz", n.LeastHz, leastCornerHz, maxCornerHz)); err != nil {
		return err
	}
	if n.ElseHz != 0 {
		if err := within("by_noise.else_hz", n.ElseHz, leastCornerHz, maxCornerHz); err != nil {
			return err
		}
	}
	return within("by_noise.most_hz", n.MostHz, n.LeastHz, maxCornerHz)
}

func (s Step) validateBand() error {
	err := errors.Join(
		within("order", float64(s.Order), 1, signal.MaxOrder),
		within("low_hz", s.LowHz, leastCornerHz, maxCornerHz), within("high_hz", s.HighHz, leastCornerHz, maxCornerHz),
	)
	if err == nil && !(s.HighHz > s.LowHz) {
		err = fmt.Errorf("high_hz: %g Hz is not above low_hz", s.HighHz)
	}
	if least := s.LowHz / (longShare * shortShare); err == nil && !(s.HighHz > least) {
		err = fmt.Errorf("high_hz: %g Hz leaves no usable period, which it does above %g Hz", s.HighHz, least)
	}
	return err
}

// maxCornerHz is half the finest sampling rate that is read.
const maxCornerHz = 1000

// leastCornerHz bounds the length of pads.
const leastCornerHz = 0.01

func (s Step) set() map[string]bool {
	return map[string]bool{
		"window": s.Window != "", "degree": s.Degree != 0, "share": s.Share != 0, "from_s": s.FromS != 0, "to_s": s.ToS != 0,
		"before_s": s.BeforeS != 0, "after_s": s.AfterS != 0,
		"order": s.Order != 0, "corner_hz": s.CornerHz != 0, "low_hz": s.LowHz != 0, "high_hz": s.HighHz != 0, "by_noise": s.ByNoise != nil, "factor": s.Factor != 0,
		"velocity_share": s.VelocityShare != 0, "displacement_share": s.DisplacementShare != 0,
	}
}

func within(name string, x, least, most float64) error {
	if !(x >= least && x <= most) || math.IsInf(x, 0) {
		return fmt.Errorf("%s: %g is outside %g to %g", name, x, least, most)
	}
	return nil
}

func oneOf[T ~string](name string, x T, known ...T) error {
	if slices.Contains(known, x) {
		return nil
	}
	words := make([]string, len(known))
	for i, k := range known {
		words[i] = string(k)
	}
	return fmt.Errorf("%s: unknown word %q; known: %s", name, string(x), strings.Join(words, ", "))
}
