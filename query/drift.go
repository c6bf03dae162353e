package query

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// Drift is how a figure differs between two answers. A value that one of them lacks is NaN.
type Drift struct {
	Of, Name      string
	Before, After float64

	told quantityUnit
}

// DriftWords are a drift for people, in the words, digits and units of tables.
type DriftWords struct{ Of, Figure, Before, After, Unit, Change string }

// Words tells the drift in units.
func (d Drift) Words(units Units) DriftWords {
	unit, per := d.told.in(units)
	w := DriftWords{Of: printable(d.told.title), Figure: d.Name, Unit: unit, Change: "lost, or from 0"}
	if d.Name == figureCount {
		w.Before, w.After = orNone(d.Before, wholeNumber), orNone(d.After, wholeNumber)
	} else {
		w.Before, w.After = apart(d.Before/per, d.After/per)
	}
	if r := d.Ratio(); isDefined(r) {
		w.Change = fmt.Sprintf("%+.3g %%", 100*r)
	}
	return w
}

// apart writes two numbers as tables do or, where they would look alike, in more digits.
func apart(a, b float64) (string, string) {
	if x, y := orNone(a, figure), orNone(b, figure); x != y {
		return x, y
	}
	return fmt.Sprintf("%.9g", a), fmt.Sprintf("%.9g", b)
}

// orNone writes a number, or that there is none.
func orNone(x float64, write func(float64) string) string {
	if !isDefined(x) {
		return "none"
	}
	return write(x)
}

// Ratio is the change relative to the value before: 0 for none, infinite where the value
// was lost or came from 0, and 0 where there was none before.
func (d Drift) Ratio() float64 {
	switch {
	case math.IsNaN(d.Before) || d.Before == d.After:
		return 0
	case math.IsNaN(d.After) || d.Before == 0:
		return math.Inf(1)
	}
	return d.After/d.Before - 1
}

// Loss is what counts against a bound: the change of a value in either direction, and of a
// number of motions where there are fewer.
func (d Drift) Loss() float64 {
	r := d.Ratio()
	if d.Name == figureCount && !math.IsNaN(d.After) {
		return max(0, -r)
	}
	return math.Abs(r)
}

// Drifts sets the figures of two answers beside each other, the greatest change first, and
// leaves out what is equal. What only the later answer has is no change.
func Drifts(before, after []Figure) []Drift {
	type key struct{ of, name string }
	now := make(map[key]float64, len(after))
	for _, f := range after {
		now[key{f.Of, f.Name}] = f.Value
	}
	var out []Drift
	for _, f := range before {
		d := Drift{Of: f.Of, Name: f.Name, Before: f.Value, After: math.NaN(), told: f.told}
		if value, ok := now[key{f.Of, f.Name}]; ok {
			d.After = value
		}
		if d.Ratio() != 0 {
			out = append(out, d)
		}
	}
	slices.SortStableFunc(out, func(a, b Drift) int { return cmp.Compare(math.Abs(b.Ratio()), math.Abs(a.Ratio())) })
	return out
}
