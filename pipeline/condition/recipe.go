package condition

import (
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"maps"
	"math"
	"regexp"
	"slices"
	"strings"

	"swaybook/pipeline/signal"
)

// Recipe is a list of steps for components in some states of processing; components in
// other states stay as they were delivered.
type Recipe struct {
	Name    string   `json:"name" toml:"name"`
	Explain string   `json:"-" toml:"explain"` // for people; no part of the hash
	States  []string `json:"states" toml:"states"`
	// LongShare times the period of the high-pass filter's corner is where the usable band
	// ends; 0 stands for 0.8.
	LongShare float64 `json:"long_share,omitempty" toml:"long_share"`
	Steps     []Step  `json:"steps" toml:"step"`
}

// Kind is what a step does.
type Kind string

// The kinds of steps.
const (
	KindMean       Kind = "mean"       // takes off the mean of Window
	KindTrend      Kind = "trend"      // takes off the polynomial of Degree that fits best
	KindTaper      Kind = "taper"      // cosine bells over Share of the length at either end
	KindTrim       Kind = "trim"       // keeps what lies from FromS to ToS
	KindHighPass   Kind = "high-pass"  // acausal Butterworth filter
	KindLowPass    Kind = "low-pass"   // acausal Butterworth filter
	KindOversample Kind = "oversample" // band-limited samples on a step Factor times finer
)

// Window is the part of a component that a step looks at.
type Window string

// The windows.
const (
	WindowWhole    Window = "whole"
	WindowPreEvent Window = "pre-event" // before the onset, the whole where there is too little
)

// Step is one step. Fields that its kind does not use are zero.
type Step struct {
	Do       Kind       `json:"do" toml:"do"`
	Window   Window     `json:"window,omitempty" toml:"window"`
	Degree   int        `json:"degree,omitempty" toml:"degree"`
	Share    float64    `json:"share,omitempty" toml:"share"`
	FromS    float64    `json:"from_s,omitempty" toml:"from_s"`
	ToS      float64    `json:"to_s,omitempty" toml:"to_s"`
	Order    int        `json:"order,omitempty" toml:"order"` // of one of both passages
	CornerHz float64    `json:"corner_hz,omitempty" toml:"corner_hz"`
	ByNoise  *NoiseRule `json:"by_noise,omitempty" toml:"by_noise"`
	Factor   int        `json:"factor,omitempty" toml:"factor"`
}

// NoiseRule chooses a corner where the motion begins to stand out of the noise before
// it: the ratio of their smoothed Fourier amplitudes, each for its length, is at least
// Ratio from the corner to the frequency where the motion is strongest. The corner stays
// within LeastHz and MostHz. It is ElseHz where there is too little before the onset to
// compare with; 0 stands for no filter.
type NoiseRule struct {
	Ratio   float64 `json:"ratio" toml:"ratio"`
	LeastHz float64 `json:"least_hz" toml:"least_hz"`
	MostHz  float64 `json:"most_hz" toml:"most_hz"`
	ElseHz  float64 `json:"else_hz" toml:"else_hz"`
}

// states are those of processing, as components have them.
var states = []string{"raw", "mean-removed", "corrected", "unknown"}

// AsDelivered changes nothing.
func AsDelivered() Recipe {
	return Recipe{
		Name: "as-delivered", States: []string{},
		Explain: "nothing is changed, whatever the state of processing", Steps: []Step{},
	}
}

// Standard makes raw components fit for spectra of periods up to about 10 s and leaves
// others as they were delivered.
//
// At the corner's period times 0.6 both passages of the high-pass filter leave 98.3 % of
// the amplitude, at 0.8 of it 86 %; recipes that say nothing keep to common practice, 0.8.
//
// The limits are common practice; filters are acausal with pads after D. M. Boore and
// J. J. Bommer, Processing of strong-motion accelerograms: needs, options and
// consequences, Soil Dyn. Earthquake Eng. 25(2), 2005 (from memory).
func Standard() Recipe {
	return Recipe{
		Name: "standard", States: []string{"raw", "mean-removed"}, LongShare: 0.6,
		Explain: "raw components: parabolic trend, tapers, high-pass and low-pass filter with corners by signal to noise; others as delivered",
		Steps: []Step{
			{Do: KindTrend, Degree: 2},
			{Do: KindTaper, Share: 0.02},
			{Do: KindHighPass, Order: 4, ByNoise: &NoiseRule{Ratio: 3, LeastHz: 0.05, MostHz: 1, ElseHz: 0.1}},
			{Do: KindLowPass, Order: 4, ByNoise: &NoiseRule{Ratio: 3, LeastHz: 15, MostHz: 50, ElseHz: 0}},
		},
	}
}

// BuiltIn are the recipes that need no file, by name.
func BuiltIn() []Recipe { return []Recipe{AsDelivered(), Standard()} }

// AppliesTo reports whether the steps are for components in this state of processing.
func (r Recipe) AppliesTo(state string) bool { return slices.Contains(r.States, state) }

// Canonical returns the JSON from which the hash is made, and from which a recipe can be
// read back: all but what is there for people.
func (r Recipe) Canonical() string {
	text, err := json.Marshal(canonical{Version, r})
	if err != nil {
		panic("condition: " + err.Error()) // numbers are finite, see Validate
	}
	return string(text)
}

// Version is that of what steps do. It is part of every recipe's hash: raise it with a
// change that moves bits, so that what was computed before stays a generation of its own.
const Version = 1

type canonical struct {
	Version int `json:"version"`
	Recipe
}

// ErrOtherVersion says that a recipe is of a program whose steps do otherwise.
var ErrOtherVersion = errors.New("recipe of another version of this program; have it computed anew with ingest --recipe")

// FromCanonical reads what Canonical wrote. The error wraps ErrOtherVersion for what
// another version of the program wrote.
func FromCanonical(text string) (Recipe, error) {
	var c canonical
	if err := json.Unmarshal([]byte(text), &c); err != nil {
		return c.Recipe, fmt.Errorf("read recipe: %w", err)
	}
	if c.Version != Version {
		return c.Recipe, fmt.Errorf("%s: %w", c.Name, ErrOtherVersion)
	}
	return c.Recipe, c.Validate()
}

// Hash identifies what a recipe does: the SHA-256 of its canonical form, in hexadecimal.
func (r Recipe) Hash() string {
	sum := sha256.Sum256([]byte(r.Canonical()))
	return hex.EncodeToString(sum[:])
}

var recipeName = regexp.MustCompile(`^[a-z0-9][a-z0-9._-]{0,63}$`)

// Validate checks every field. The error names the step and its field.
func (r Recipe) Validate() error {
	if !recipeName.MatchString(r.Name) {
		return fmt.Errorf("name: %q is no name of small letters, digits, dots, dashes and underscores", r.Name)
	}
	for _, s := range r.States {
		if !slices.Contains(states, s) {
			return fmt.Errorf("states: unknown state of processing %q; known: %s", s, strings.Join(states, ", "))
		}
	}
	if len(r.States) == 0 && len(r.Steps) > 0 {
		return errors.New("states: the states of processing to which the steps apply are missing")
	}
	if r.LongShare != 0 {
		if err := within("long_share", r.LongShare, 0.1, 1); err != nil {
			return err
		}
	}
	finer := 1
	for i, s := range r.Steps {
		err := s.validate()
		if finer *= max(1, s.Factor); err == nil && finer > maxFactor {
			err = fmt.Errorf("factor: %d times finer with the steps before, more than %d", finer, maxFactor)
		}
		if err != nil {
			return &StepError{Step: i + 1, Kind: s.Do, Err: err}
		}
	}
	return nil
}

// StepError is a mistake in one step, counted from 1.
type StepError struct {
	Step int
	Kind Kind
	Err  error
}

// Error returns "step 3 (taper): cause".
func (e *StepError) Error() string { return fmt.Sprintf("step %d (%s): %v", e.Step, e.Kind, e.Err) }

// Unwrap returns the cause.
func (e *StepError) Unwrap() error { return e.Err }

// uses are the fields that a kind of step takes.
var uses = map[Kind][]string{
	KindMean: {"window"}, KindTrend: {"degree"}, KindTaper: {"share"}, KindTrim: {"from_s", "to_s"},
	KindHighPass: {"order", "corner_hz", "by_noise"}, KindLowPass: {"order", "corner_hz", "by_noise"}, KindOversample: {"factor"},
}

func (s Step) validate() error {
	fields, ok := uses[s.Do]
	if !ok {
		return fmt.Errorf("do: unknown step; known: mean, trend, taper, trim, high-pass, low-pass, oversample")
	}
	set := s.set()
	for _, name := range slices.Sorted(maps.Keys(set)) {
		if set[name] && !slices.Contains(fields, name) {
			return fmt.Errorf("%s: not a field of this step; it takes %s", name, strings.Join(fields, ", "))
		}
	}
	switch s.Do {
	case KindMean:
		return oneOf("window", s.Window, WindowWhole, WindowPreEvent)
	case KindTrend:
		return within("degree", float64(s.Degree), 1, signal.MaxDegree)
	case KindTaper:
		return within("share", s.Share, 0.001, 0.5)
	case KindTrim:
		return s.validateTrim()
	case KindOversample:
		return within("factor", float64(s.Factor), 2, maxFactor)
	}
	return s.validateFilter()
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

func (s Step) validateFilter() error {
	if err := within("order", float64(s.Order), 1, signal.MaxOrder); err != nil {
		return err
	}
	if (s.ByNoise == nil) == (s.CornerHz == 0) {
		return errors.New("corner_hz, by_noise: one of both is needed")
	}
	if s.ByNoise == nil {
		return within("corner_hz", s.CornerHz, leastCornerHz, 1000)
	}
	n := s.ByNoise
	if err := errors.Join(within("by_noise.ratio", n.Ratio, 1, 100), within("by_noise.least_hz", n.LeastHz, leastCornerHz, 1000)); err != nil {
		return err
	}
	if n.ElseHz != 0 {
		if err := within("by_noise.else_hz", n.ElseHz, leastCornerHz, 1000); err != nil {
			return err
		}
	}
	return within("by_noise.most_hz", n.MostHz, n.LeastHz, 1000)
}

// leastCornerHz bounds the length of pads.
const leastCornerHz = 0.01

func (s Step) set() map[string]bool {
	return map[string]bool{
		"window": s.Window != "", "degree": s.Degree != 0, "share": s.Share != 0, "from_s": s.FromS != 0, "to_s": s.ToS != 0,
		"order": s.Order != 0, "corner_hz": s.CornerHz != 0, "by_noise": s.ByNoise != nil, "factor": s.Factor != 0,
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
