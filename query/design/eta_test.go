package design

import (
	"math"
	"testing"
)

func near(got, want, relative float64) bool {
	return math.Abs(got-want) <= relative*math.Abs(want)
}

// Expression (3.6) by hand, ξ in %: √(10/(5+ξ)).
func TestEta(t *testing.T) {
	for _, c := range []struct{ damping, want float64 }{
		{0, math.Sqrt2},
		{0.02, math.Sqrt(10. / 7)},
		{0.10, math.Sqrt(2. / 3)}, // 0.816
		{0.20, math.Sqrt(2. / 5)},
		{0.25, math.Sqrt(1. / 3)},   // 0.577
		{0.28, math.Sqrt(10. / 33)}, // 0.5505, just above the bound
	} {
		if got := Eta(c.damping); !near(got, c.want, 1e-15) {
			t.Errorf("Eta(%v) = %v, want %v", c.damping, got, c.want)
		}
	}
	if got := Eta(0.05); got != 1 {
		t.Errorf("Eta(0.05) = %v", got)
	}
	for _, damping := range []float64{0.281, 0.3, 0.9, math.Inf(1)} {
		if got := Eta(damping); got != 0.55 {
			t.Errorf("Eta(%v) = %v, want the bound", damping, got)
		}
	}
	for _, damping := range []float64{-0.01, math.NaN()} {
		if got := Eta(damping); !math.IsNaN(got) {
			t.Errorf("Eta(%v) = %v, want NaN", damping, got)
		}
	}
}
