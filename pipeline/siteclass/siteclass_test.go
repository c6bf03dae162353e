package siteclass

import (
	"math"
	"testing"
)

// The tables of EN 1998-1:2004 (3.1) and of ASCE/SEI 7-10 (20.3-1), from memory: each
// limit, the doubles beside it, and a value within.
func TestClasses(t *testing.T) {
	below := func(x float64) float64 { return math.Nextafter(x, 0) }
	above := func(x float64) float64 { return math.Nextafter(x, math.Inf(1)) }
	cases := []struct {
		vs30          float64
		en1998, nehrp Class
	}{
		{math.SmallestNonzeroFloat64, "D", "E"},
		{90, "D", "E"},
		{below(180), "D", "E"},
		{180, "C", "D"},
		{270, "C", "D"},
		{below(360), "C", "D"},
		{360, "C", "D"},
		{above(360), "B", "C"},
		{560, "B", "C"},
		{760, "B", "C"},
		{above(760), "B", "B"},
		{800, "B", "B"},
		{above(800), "A", "B"},
		{1100, "A", "B"},
		{1500, "A", "B"},
		{above(1500), "A", "A"},
		{3200, "A", "A"},
		{math.MaxFloat64, "A", "A"},
	}
	for _, c := range cases {
		if got, err := EN1998(c.vs30); got != c.en1998 || err != nil {
			t.Errorf("EN1998(%v) = %q, %v, want %q", c.vs30, got, err, c.en1998)
		}
		if got, err := NEHRP(c.vs30); got != c.nehrp || err != nil {
			t.Errorf("NEHRP(%v) = %q, %v, want %q", c.vs30, got, err, c.nehrp)
		}
	}
}

func TestNoVelocity(t *testing.T) {
	for vs30, want := range map[float64]string{
		0:            "Vs30 0 m/s is not a positive velocity",
		-999:         "Vs30 -999 m/s is not a positive velocity",
		math.Inf(1):  "Vs30 +Inf m/s is not a positive velocity",
		math.Inf(-1): "Vs30 -Inf m/s is not a positive velocity",
		math.NaN():   "Vs30 NaN m/s is not a positive velocity",
	} {
		for name, classify := range map[string]func(float64) (Class, error){"EN1998": EN1998, "NEHRP": NEHRP} {
			if got, err := classify(vs30); err == nil || err.Error() != want || got != "" {
				t.Errorf("%s(%v) = %q, %v, want %q", name, vs30, got, err, want)
			}
		}
	}
}

// E, S1 and S2 are those that the package never gives.
func TestNeedsMoreThanVs30(t *testing.T) {
	for class, want := range map[Class]bool{"A": false, "B": false, "C": false, "D": false, "E": true, "S1": true, "S2": true, "": false} {
		if got := NeedsMoreThanVs30(class); got != want {
			t.Errorf("NeedsMoreThanVs30(%q) = %v", class, got)
		}
	}
}
