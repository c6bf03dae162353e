package condition

import (
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"regexp"
	"slices"
	"strings"
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
		Explain: "raw components: a step of the baseline, parabolic trend, tapers, high-pass and low-pass filter with corners by signal to noise; others as delivered",
		Steps: []Step{
			{Do: KindOffset, Share: 0.005},
			{Do: KindTrend, Degree: 2},
			{Do: KindTaper, Share: 0.02},
			{Do: KindHighPass, Order: 4, ByNoise: &NoiseRule{Ratio: 3, LeastHz: 0.05, MostHz: 1, ElseHz: 0.1}},
			{Do: KindLowPass, Order: 4, ByNoise: &NoiseRule{Ratio: 3, LeastHz: 15, MostHz: 50, ElseHz: 0}},
			{Do: KindCheck, VelocityShare: 0.01, DisplacementShare: 0.05},
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
// change that moves bits, so that what was computed before stays a generation of its own, with
// a migration that renews AsDelivered, of which no bit moves.
const Version = 4

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
