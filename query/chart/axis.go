package chart

import (
	"math"
	"strconv"

	"gonum.org/v1/plot/vg"
)

// axis maps values to the unit interval.
type axis struct {
	from, to float64
	isLog    bool
	label    string
	ticks    []tick
}

// tick is a line of the grid.
type tick struct {
	at     float64
	name   string
	isMain bool // is named even where there is no room for all names
}

// named says which ticks have names on an axis of a length: all where they have room, or
// else the main ones.
func (a *axis) named(length, room vg.Length) func(i int) bool {
	hasRoom := true
	for i := 1; i < len(a.ticks); i++ {
		hasRoom = hasRoom && length*vg.Length(a.at(a.ticks[i].at)-a.at(a.ticks[i-1].at)) >= room
	}
	return func(i int) bool { return hasRoom || a.ticks[i].isMain }
}

// at is where a value lies, 0 at the axis's begin and 1 at its end.
func (a *axis) at(x float64) float64 {
	if a.isLog {
		return math.Log(x/a.from) / math.Log(a.to/a.from)
	}
	return (x - a.from) / (a.to - a.from)
}

// has reports whether a value lies on the axis.
func (a *axis) has(x float64) bool { return x >= a.from && x <= a.to }

// newAxis is an axis of round numbers around values from lowest to highest, both positive
// where it is logarithmic. A linear one begins at zero.
func newAxis(label string, lowest, highest float64, isLog bool) axis {
	if isLog {
		return logAxis(label, lowest, highest)
	}
	return linearAxis(label, highest)
}

// logSteps are the numbers within a decade at which an axis may begin and end, and has ticks.
var logSteps = []float64{1, 2, 5}

// logAxis goes from a step of a decade to another.
func logAxis(label string, lowest, highest float64) axis {
	a := axis{from: stepBelow(lowest), to: stepAbove(highest), isLog: true, label: label}
	if a.from == a.to {
		a.to = stepAbove(1.01 * a.to)
	}
	for decade := math.Floor(math.Log10(a.from)); decade <= math.Ceil(math.Log10(a.to)); decade++ {
		for _, step := range logSteps {
			if x := decimal(step, int(decade)); a.has(x) {
				a.ticks = append(a.ticks, tick{x, strconv.FormatFloat(x, 'f', -1, 64), step == 1})
			}
		}
	}
	return a
}

// decimal is step·10^exponent, as exactly as doubles have it.
func decimal(step float64, exponent int) float64 {
	x, _ := strconv.ParseFloat(strconv.FormatFloat(step, 'f', -1, 64)+"e"+strconv.Itoa(exponent), 64)
	return x
}

// stepBelow is the greatest step that is not above a value.
func stepBelow(x float64) float64 {
	best := 0.0
	for decade := int(math.Floor(math.Log10(x))) - 1; decade <= int(math.Ceil(math.Log10(x))); decade++ {
		for _, step := range logSteps {
			if v := decimal(step, decade); v <= x*(1+1e-9) {
				best = v
			}
		}
	}
	return best
}

// stepAbove is the least step that is not below a value.
func stepAbove(x float64) float64 {
	for decade := int(math.Floor(math.Log10(x))); ; decade++ {
		for _, step := range logSteps {
			if v := decimal(step, decade); v >= x*(1-1e-9) {
				return v
			}
		}
	}
}

// linearAxis goes from zero over four to nine equal steps.
func linearAxis(label string, highest float64) axis {
	step := stepAbove(highest / 8)
	n := int(math.Ceil(highest/step - 1e-9))
	a := axis{to: float64(n) * step, label: label}
	for i := range n + 1 {
		x := float64(i) * step
		a.ticks = append(a.ticks, tick{x, strconv.FormatFloat(x, 'g', 4, 64), true})
	}
	return a
}

// spanAxis goes from one value to another, whatever they are, with round ticks.
func spanAxis(label string, from, to float64) axis {
	a := axis{from: from, to: to, label: label}
	if !(to > from) {
		return a
	}
	step := stepAbove((to - from) / 8)
	for i := math.Ceil(from/step - 1e-9); i*step <= to+1e-9*step; i++ {
		x := i*step + 0 // -0 is 0
		a.ticks = append(a.ticks, tick{x, strconv.FormatFloat(x, 'g', 4, 64), true})
	}
	return a
}
