package spectrum

import (
	"errors"
	"math"
	"slices"
	"testing"
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
			a, b, changedA, changedB, err := Pair(test.first, test.second, test.between)
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
			if changedA != test.changedA || changedB != test.changedB || !slices.Equal(a, test.a) || !slices.Equal(b, want) {
				t.Errorf("changed %v and %v, want %v and %v; a as wanted %v, b as wanted %v", changedA, changedB, test.changedA, test.changedB, slices.Equal(a, test.a), slices.Equal(b, want))
			}
			if !slices.Equal(test.first, keep[0]) || !slices.Equal(test.second, keep[1]) {
				t.Error("the components were written to")
			}
		})
	}
}

func TestPairRefusesNearDirections(t *testing.T) {
	for _, between := range []float64{0, 20, -29.9, 180, 340, math.NaN()} {
		a, b, _, _, err := Pair(shaken(1, 9), shaken(2, 9), between)
		if !errors.Is(err, ErrDirections) || a != nil || b != nil {
			t.Errorf("%g°: %v, %v, %v, want ErrDirections", between, a, b, err)
		}
	}
}
