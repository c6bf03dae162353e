package quality

import (
	"math"
	"slices"
	"testing"

	"swaybook/pipeline/signal"
)

// drifts are what a baseline does, in m/s² beside a motion of 1 m/s².
var drifts = []struct {
	name string
	add  func(i, n int) float64
}{
	{"none", func(int, int) float64 { return 0 }},
	{"offset", func(int, int) float64 { return 3 }},
	{"line", func(i, n int) float64 { return 0.4 * (float64(i)/float64(n) - 0.5) }},
	{"steep line", func(i, n int) float64 { return 2 * (float64(i)/float64(n) - 0.5) }},
	{"parabola", func(i, n int) float64 { u := float64(i)/float64(n) - 0.5; return 0.8 * u * u }},
	{"warming up", func(i, _ int) float64 { return 0.1 * math.Exp(-float64(i)*stepS/20) }},
	{"swing", func(i, _ int) float64 { return 0.05 * math.Sin(2*math.Pi*float64(i)*stepS/60) }},
}

// A baseline is no motion at the ends, no second motion and no noise.
func TestDriftIsNoMotion(t *testing.T) {
	for _, d := range drifts {
		found, all := has{}, 0
		for _, x := range recorded(1e-3) {
			all++
			y := edit(x, d.add)
			found.count(Assess(y, stepS, signal.Arrival(y, stepS)))
		}
		t.Logf("%s: of %d %v", d.name, all, found)
		for _, flag := range []string{FlagLateStart, FlagEarlyEnd, FlagSeveralEvents, FlagLowSignal, FlagLostData} {
			if found[flag] > 0 {
				t.Errorf("%s: %s in %d of %d", d.name, flag, found[flag], all)
			}
		}
	}
}

// Nor does a baseline hide motion that is cut, comes twice, or noise.
func TestDriftHidesNothing(t *testing.T) {
	for _, d := range drifts {
		found, all := has{}, len(motions())
		for _, x := range recorded(1e-3) {
			from, to := after(x, 0.3), after(x, 0.8)
			found.countOf(FlagLateStart, Assess(edit(x[from:], d.add), stepS, 0))
			found.countOf(FlagEarlyEnd, Assess(edit(x[:to], d.add), stepS, 0))
			found.countOf(FlagSeveralEvents, Assess(edit(slices.Concat(x, x), d.add), stepS, 0))
		}
		for _, x := range recorded(0.15) {
			y := edit(x, d.add)
			found.countOf(FlagLowSignal, Assess(y, stepS, signal.Arrival(y, stepS)))
		}
		t.Logf("%s: of %d %v", d.name, all, found)
		for _, flag := range []string{FlagLateStart, FlagEarlyEnd, FlagSeveralEvents, FlagLowSignal} {
			if found[flag] < all {
				t.Errorf("%s: %s in %d of %d", d.name, flag, found[flag], all)
			}
		}
	}
}
