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
		a, b          []float64 // b nil where it is turned
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
			p := NewPair(test.first, test.second, 0, test.between)
			want := test.b
			if want == nil && len(test.a) > 0 {
				second := append(slices.Clone(test.second), make([]float64, len(test.a)-len(test.second))...)
				want = turnedUpright(test.a, second, test.between)
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

// TestPairRefusesNearDirections: what Between refuses must not be turned.
func TestPairRefusesNearDirections(t *testing.T) {
	for _, between := range []float64{0, 20, -29.9, 180, 340, math.NaN()} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%g° is taken", between)
				}
			}()
			NewPair(shaken(1, 9), shaken(2, 9), 0, between)
		}()
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

// TestPairPeaksDoNotCoast: a push of 1 m/s² for 1 s moves the ground by half a
// metre; that its velocity is not taken back is an end of the record, not a motion
// of the ground over the minute that the other component goes on.
func TestPairPeaksDoNotCoast(t *testing.T) {
	const stepS = 0.01
	long, push := make([]float64, 6000), make([]float64, 101)
	long[5000] = 3
	for i := range push {
		push[i] = 1
	}
	for _, order := range [][2][]float64{{long, push}, {push, long}} {
		p := NewPair(order[0], order[1], 0, 90)
		median, maximum := p.Peaks(stepS)
		want := GroundPeaks{PGA: 3, PGV: 1, PGD: 0.5}
		if math.Abs(maximum.PGA-want.PGA) > 1e-12 || math.Abs(maximum.PGV-want.PGV) > 1e-12 || math.Abs(maximum.PGD-want.PGD) > 1e-12 {
			t.Errorf("maximum %+v, want %+v", maximum, want)
		}
		// Half of all directions are within 45° of a line.
		if d := want.PGD * math.Sqrt2 / 2; math.Abs(median.PGD/d-1) > 0.01 || math.Abs(median.PGV/(2*d)-1) > 0.01 {
			t.Errorf("median %+v, want PGD %g", median, d)
		}
	}
}

// TestPairPeaksOfEqualLengths: without zeros they are those of RotDPeaks; with
// some, PGA is that of the whole and the rest that of what is common.
func TestPairPeaksOfEqualLengths(t *testing.T) {
	x, y := shaken(1, 60), shaken(2, 60)
	for _, between := range []float64{90, 60} {
		p := NewPair(x, y, 0, between)
		median, maximum := p.Peaks(0.01)
		if m50, m100 := RotDPeaks(0.01, p.A, p.B); median != m50 || maximum != m100 {
			t.Errorf("%g°: %+v and %+v, want %+v and %+v", between, median, maximum, m50, m100)
		}
		cut := NewPair(x, y[:40], 0, between)
		median, maximum = cut.Peaks(0.01)
		whole50, whole100 := RotDPeaks(0.01, cut.A, cut.B)
		common50, common100 := RotDPeaks(0.01, p.A[:40], p.B[:40])
		common50.PGA, common100.PGA = whole50.PGA, whole100.PGA
		if median != common50 || maximum != common100 {
			t.Errorf("%g° and cut: %+v and %+v, want %+v and %+v", between, median, maximum, common50, common100)
		}
	}
}
