package spectrum

import (
	"errors"
	"math"
	"slices"
	"strconv"
	"testing"
)

func TestDefaultGrid(t *testing.T) {
	g := DefaultGrid()
	if err := g.Validate(); err != nil {
		t.Fatal(err)
	}
	if len(g.PeriodsS) != 251 || g.PeriodsS[0] != 0.01 || g.PeriodsS[250] != 10 {
		t.Fatalf("%d periods from %v to %v, want 251 from 0.01 to 10", len(g.PeriodsS), g.PeriodsS[0], g.PeriodsS[len(g.PeriodsS)-1])
	}
	for i, p := range g.PeriodsS {
		// The nearest float to a decimal of four places prints as no more than that.
		rounded, _ := strconv.ParseFloat(strconv.FormatFloat(p, 'f', 4, 64), 64)
		if p != rounded {
			t.Errorf("period %d is %v, not the float nearest to %.4f", i+1, p, p)
		}
		if i > 0 && p/g.PeriodsS[i-1] > 1.0500001 {
			t.Errorf("period %v is more than 5 %% beyond %v", p, g.PeriodsS[i-1])
		}
	}
	for _, p := range []float64{0.0105, 0.02, 0.021, 0.05, 0.052, 0.1, 0.105, 0.2, 0.21, 0.3, 0.5, 0.52, 0.7, 1, 1.05, 2, 2.1, 9.9} {
		if !slices.Contains(g.PeriodsS, p) {
			t.Errorf("period %v is not in the grid", p)
		}
	}
	if want := []float64{0, 0.02, 0.05, 0.1, 0.2}; !slices.Equal(g.Dampings, want) {
		t.Errorf("dampings %v, want %v", g.Dampings, want)
	}
	list := g.Oscillators()
	if len(list) != 1255 || list[251+3] != (Oscillator{g.PeriodsS[3], 0.02}) {
		t.Errorf("%d oscillators, number 255 is %+v", len(list), list[254])
	}
}

func TestGridValidate(t *testing.T) {
	tests := []struct {
		name string
		grid Grid
		want error
	}{
		{"empty", Grid{}, ErrGrid},
		{"no damping", Grid{PeriodsS: []float64{1}}, ErrGrid},
		{"no period", Grid{Dampings: []float64{0}}, ErrGrid},
		{"repeated period", Grid{[]float64{1, 1}, []float64{0}}, ErrGrid},
		{"falling period", Grid{[]float64{1, 0.5}, []float64{0}}, ErrGrid},
		{"repeated damping", Grid{[]float64{1}, []float64{0.05, 0.05}}, ErrGrid},
		{"period NaN", Grid{[]float64{1, math.NaN()}, []float64{0}}, ErrOscillator},
		{"period infinite", Grid{[]float64{math.Inf(1)}, []float64{0}}, ErrOscillator},
		{"critical", Grid{[]float64{1}, []float64{0, 1}}, ErrOscillator},
		{"negative damping", Grid{[]float64{1}, []float64{-0.01}}, ErrOscillator},
		{"good", Grid{[]float64{0.1, 1}, []float64{0, 0.99}}, nil},
	}
	for _, tt := range tests {
		if err := tt.grid.Validate(); !errors.Is(err, tt.want) {
			t.Errorf("%s: Validate() = %v, want %v", tt.name, err, tt.want)
		}
	}
}

func TestParseMethod(t *testing.T) {
	for _, m := range []Method{NigamJennings, NewmarkAverage} {
		if got, err := ParseMethod(m.String()); got != m || err != nil {
			t.Errorf("ParseMethod(%q) = %v, %v", m, got, err)
		}
	}
	if _, err := ParseMethod("central-difference"); err == nil {
		t.Error("an unknown name was accepted")
	}
	if got := Method(-1).String(); got != "Method(-1)" {
		t.Errorf("Method(-1) prints as %q", got)
	}
}

func TestPseudoSpectra(t *testing.T) {
	// T = 2π s has ω = 1/s: the three ordinates are one number.
	if v, a := PSV(2*math.Pi, 0.3), PSA(2*math.Pi, 0.3); v != 0.3 || a != 0.3 {
		t.Errorf("PSV, PSA at ω = 1 are %v, %v, want 0.3", v, a)
	}
	if v, a := PSV(0.5, 0.1), PSA(0.5, 0.1); off(v, 0.4*math.Pi) > 1e-15 || off(a, 1.6*math.Pi*math.Pi) > 1e-15 {
		t.Errorf("PSV, PSA at T = 0.5 s, D = 0.1 m are %v, %v", v, a)
	}
}
