package spectrum

import (
	"errors"
	"math"
	"slices"
	"testing"
	"time"
)

// TestPairPadsAndTurns goes through the ways in which a pair can be unfit.
func TestPairPadsAndTurns(t *testing.T) {
	x, y := shaken(1, 60), shaken(2, 60)
	short := y[:40]
	padded := append(slices.Clone(short), make([]float64, 20)...)
	tests := []struct {
		name          string
		first, second []float64
		between       float64
		a, b          []float64 // b nil where RightAngle gives it
		changedA      bool
		changedB      bool
	}{
		{"nothing to do", x, y, 90, x, y, false, false},
		{"the other way round", x, y, -90, x, y, false, false},
		{"azimuths that are decimals", x, y, 102.3 - 12.3 + 1e-13, x, y, false, false},
		{"second shorter", x, short, 270, x, padded, false, true},
		{"first shorter", short, x, 90, padded, x, true, false},
		{"oblique", x, y, 60, x, nil, false, true},
		{"oblique and shorter", x, short, 130, x, nil, false, true},
		{"nothing in one", nil, x, 90, make([]float64, 60), x, true, false},
		{"nothing at all", nil, nil, 90, nil, nil, false, false},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			keep := [2][]float64{slices.Clone(test.first), slices.Clone(test.second)}
			p, err := NewPair(test.first, test.second, test.between)
			if err != nil {
				t.Fatal(err)
			}
			want := test.b
			if want == nil && len(test.a) > 0 {
				second := append(slices.Clone(test.second), make([]float64, len(test.a)-len(test.second))...)
				if want, err = RightAngle(test.a, second, test.between); err != nil {
					t.Fatal(err)
				}
			}
			if p.ChangedA != test.changedA || p.ChangedB != test.changedB || !slices.Equal(p.A, test.a) || !slices.Equal(p.B, want) {
				t.Errorf("changed %v and %v, want %v and %v; a as wanted %v, b as wanted %v", p.ChangedA, p.ChangedB, test.changedA, test.changedB, slices.Equal(p.A, test.a), slices.Equal(p.B, want))
			}
			if !slices.Equal(test.first, keep[0]) || !slices.Equal(test.second, keep[1]) {
				t.Error("the components were written to")
			}
		})
	}
}

func TestPairRefusesNearDirections(t *testing.T) {
	for _, between := range []float64{0, 20, -29.9, 180, 340, math.NaN()} {
		p, err := NewPair(shaken(1, 9), shaken(2, 9), between)
		if !errors.Is(err, ErrDirections) || p.A != nil || p.B != nil {
			t.Errorf("%g°: %v, %v, want ErrDirections", between, p, err)
		}
	}
}

// TestBetween: the angle, and each reason why there is none.
func TestBetween(t *testing.T) {
	at := func(deg float64) Horizontal { return Horizontal{StepS: 0.01, AzimuthDeg: deg, AzimuthKnown: true} }
	unknown := Horizontal{StepS: 0.01}
	started := func(seconds float64) Horizontal {
		h := at(90)
		h.Start = time.Date(2026, 3, 12, 4, 5, 6, 0, time.UTC).Add(time.Duration(seconds * 1e9))
		return h
	}
	north := started(0)
	north.AzimuthDeg = 0
	tests := []struct {
		name          string
		first, second Horizontal
		deg           float64
		assumed       bool
		reason        string // "" where they can be rotated
		detail        string
	}{
		{"right angle", at(10), at(100), 90, false, "", ""},
		{"the other way round", at(350), at(260), -90, false, "", ""},
		{"through north", at(350), at(80), -270, false, "", ""},
		{"oblique", at(10), at(70), 60, false, "", ""},
		{"first unknown", unknown, at(100), 90, true, "", ""},
		{"second unknown", at(100), unknown, 90, true, "", ""},
		{"near", at(10), at(30), 0, false, ReasonDirections, "azimuths 10° and 30°"},
		{"opposite", at(10), at(190), 0, false, ReasonDirections, "azimuths 10° and 190°"},
		{"no number", at(10), at(math.NaN()), 0, false, ReasonDirections, "azimuths 10° and NaN°"},
		{"starts half a step apart", north, started(0.005), 90, false, "", ""},
		{"starts half a step apart, the other way round", north, started(-0.005), 90, false, "", ""},
		{"one start unknown", at(0), started(7), 90, false, "", ""},
		{"starts more apart", north, started(0.0051), 0, false, ReasonStarts, "5.1ms apart"},
		{"starts more apart, the other way round", north, started(-0.5), 0, false, ReasonStarts, "500ms apart"},
		{"steps, before all else", at(10), Horizontal{StepS: 0.02}, 0, false, ReasonSteps, "0.01 s and 0.02 s"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			deg, assumed, err := Between(test.first, test.second)
			var pairError *PairError
			if errors.As(err, &pairError) != (test.reason != "") {
				t.Fatalf("error %v, want reason %q", err, test.reason)
			}
			if pairError != nil && *pairError != (PairError{test.reason, test.detail}) {
				t.Errorf("error %v, want %s: %s", err, test.reason, test.detail)
			}
			if deg != test.deg || assumed != test.assumed {
				t.Errorf("Between = %g, %v, want %g, %v", deg, assumed, test.deg, test.assumed)
			}
		})
	}
}
