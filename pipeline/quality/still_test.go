package quality

import (
	"math"
	"testing"

	"swaybook/pipeline/signal"
)

// Zeros, or the last sample again and again, up to the end are lost data where there was
// motion, but for a few that pass the level just then, and rest behind a motion that has ended, was tapered, or is told coarsely.
func TestLostAtTheEnd(t *testing.T) {
	level := func(x []float64, from int, value float64) []float64 {
		for i := from; i < len(x); i++ {
			x[i] = value
		}
		return x
	}
	for _, test := range []struct {
		name string
		of   func(x []float64) []float64
		want float64 // share of the motions
	}{
		{"as it was", func(x []float64) []float64 { return x }, 0},
		{"zeros in the strong motion", func(x []float64) []float64 { return level(x, after(x, 0.5), 0) }, 1},
		{"zeros in the coda", func(x []float64) []float64 { return level(x, after(x, 0.95), 0) }, 0.9},
		{"zeros beside an offset", func(x []float64) []float64 {
			return level(edit(x, func(int, int) float64 { return 0.3 }), after(x, 0.9), 0)
		}, 1},
		{"held", func(x []float64) []float64 { at := after(x, 0.8); return level(x, at, x[at]) }, 0.8},
		{"a tenth of a second", func(x []float64) []float64 { at := after(x, 0.9); return level(x[:at+10], at, 0) }, 0},
		{"zeros after the motion", func(x []float64) []float64 { return level(x, len(x)-1000, 0) }, 0},
		{"tapered over 2 s, and zeros", func(x []float64) []float64 {
			at := after(x, 0.95)
			signal.Taper(x[:at], 0, 200)
			return level(x, at, 0)
		}, 0},
		{"a hundredth of the peak is a step", func(x []float64) []float64 {
			for i, v := range x {
				x[i] = math.Round(v*100) / 100
			}
			return x
		}, 0},
		{"twenty steps, which end with the motion", func(x []float64) []float64 {
			for i, v := range x {
				x[i] = math.Round(v*20) / 20
			}
			return x[:after(x, 0.97)]
		}, 0},
	} {
		found, all := has{}, 0
		for _, x := range recorded(1e-3) {
			all++
			y := test.of(x)
			found.count(Assess(y, stepS, signal.Arrival(y, stepS)))
		}
		t.Logf("%s: %d of %d", test.name, found[FlagLostData], all)
		got := float64(found[FlagLostData]) / float64(all)
		if test.want == 0 && got > 0 || got < test.want {
			t.Errorf("%s: %d of %d", test.name, found[FlagLostData], all)
		}
	}
}
