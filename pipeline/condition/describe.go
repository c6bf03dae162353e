package condition

import (
	"encoding/json"
	"fmt"
	"strings"
)

// Description is a step of a recipe for people.
type Description struct {
	Do, Words string
	Source    string // where the method is published, or that it is common practice
}

// Describe tells the steps of what Canonical wrote, and for which components they are. What
// another version of the program did in a step is not known here, so that its fields are told
// as they are.
func Describe(text string) (applies string, steps []Description) {
	r, err := FromCanonical(text)
	if err != nil {
		return r.Applies(), asStored(text)
	}
	out := make([]Description, len(r.Steps))
	for i, s := range r.Steps {
		out[i] = Description{string(s.Do), s.Words(), s.Source()}
	}
	return r.Applies(), out
}

// asStored tells steps of which no more is known.
func asStored(text string) []Description {
	const unknown = "not described here: of another version of the program"
	var stored struct {
		Version int               `json:"version"`
		Steps   []json.RawMessage `json:"steps"`
	}
	if err := json.Unmarshal([]byte(text), &stored); err != nil {
		return []Description{{"-", unknown + "; as stored: " + text, "-"}}
	}
	out := make([]Description, len(stored.Steps))
	for i, step := range stored.Steps {
		var named struct {
			Do string `json:"do"`
		}
		if json.Unmarshal(step, &named) != nil || named.Do == "" {
			named.Do = "-"
		}
		out[i] = Description{named.Do, fmt.Sprintf("%s, whose steps have version %d, here %d; as stored: %s", unknown, stored.Version, Version, step), "-"}
	}
	return out
}

// Source says where what the step does is published.
func (s Step) Source() string {
	var of []string
	add := func(isUsed bool, source string) {
		if isUsed {
			of = append(of, source)
		}
	}
	isFilter := s.Do == KindHighPass || s.Do == KindLowPass || s.Do == KindBandPass
	add(isFilter, "Butterworth 1930; pads after Boore 2005, Boore and Bommer 2005")
	add(s.ByNoise != nil, "noise before the onset by Maeda 1985, power after Bendat and Piersol 2010; the limits of corners are common practice")
	add(s.Do == KindTrend, "least squares by orthogonal polynomials, Guest 1961")
	add(s.Do == KindOffset, "after Boore 2001")
	add(s.Do == KindTaper, "Tukey 1967; onset by Maeda 1985, end after Page 1954; lengths are common practice")
	add(s.Do == KindPad, "Boore 2005")
	add(s.Do == KindOversample, "Shannon 1949")
	add(s.Window == WindowPreEvent, "onset by Maeda 1985")
	add(s.Do == KindMean || s.Do == KindTrim || s.Do == KindCheck, "common practice")
	return strings.Join(of, "; ")
}
