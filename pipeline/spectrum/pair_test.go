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
	at := func(deg float64) Horizontal {
		return Horizontal{StepS: 0.01, Samples: 3000, AzimuthDeg: deg, AzimuthKnown: true}
	}
	unknown := Horizontal{StepS: 0.01}
	started := func(seconds float64) Horizontal {
		h := at(90)
		h.Start = time.Date(2026, 3, 12, 4, 5, 6, 0, time.UTC).Add(time.Duration(seconds * 1e9))
		return h
	}
	north := started(0)
	north.AzimuthDeg = 0
	brief := north
	brief.Samples = 700
	tests := []struct {
		name          string
		first, second Horizontal
		want          Relation
		reason        string // "" where they can be rotated
		detail        string
	}{
		{"right angle", at(10), at(100), Relation{Deg: 90}, "", ""},
		{"the other way round", at(350), at(260), Relation{Deg: -90}, "", ""},
		{"through north", at(350), at(80), Relation{Deg: -270}, "", ""},
		{"oblique", at(10), at(70), Relation{Deg: 60}, "", ""},
		{"first unknown", unknown, at(100), Relation{Deg: 90, Assumed: true}, "", ""},
		{"second unknown", at(100), unknown, Relation{Deg: 90, Assumed: true}, "", ""},
		{"near", at(10), at(30), Relation{}, ReasonDirections, "azimuths 10° and 30°"},
		{"opposite", at(10), at(190), Relation{}, ReasonDirections, "azimuths 10° and 190°"},
		{"no number", at(10), at(math.NaN()), Relation{}, ReasonDirections, "azimuths 10° and NaN°"},
		{"starts half a step apart", north, started(0.005), Relation{Deg: 90}, "", ""},
		{"starts half a step apart, the other way round", north, started(-0.005), Relation{Deg: 90}, "", ""},
		{"one start unknown", at(0), started(7), Relation{Deg: 90}, "", ""},
		{"starts more apart", north, started(0.0051), Relation{Deg: 90, LaterS: 0.01}, "", ""},
		{"starts a step and a half apart", north, started(0.015), Relation{Deg: 90, LaterS: 0.01}, "", ""},
		{"starts more apart, the other way round", north, started(-0.508), Relation{Deg: 90, LaterS: -0.51}, "", ""},
		{"starts at the limit", north, started(10), Relation{Deg: 90, LaterS: 10}, "", ""},
		{"starts beyond the limit", north, started(10.001), Relation{}, ReasonStarts, "10.001s apart"},
		{"starts beyond the limit, the other way round", north, started(-10.001), Relation{}, ReasonStarts, "10.001s apart"},
		{"starts with the last sample", brief, started(6.99), Relation{Deg: 90, LaterS: 6.99}, "", ""},
		{"starts after the last sample", brief, started(7), Relation{}, ReasonStarts, "7s apart"},
		{"ends long before, the other way round", started(7), brief, Relation{}, ReasonStarts, "7s apart"},
		{"steps, before all else", at(10), Horizontal{StepS: 0.02}, Relation{}, ReasonSteps, "0.01 s and 0.02 s"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			got, err := Between(test.first, test.second)
			var pairError *PairError
			if errors.As(err, &pairError) != (test.reason != "") {
				t.Fatalf("error %v, want reason %q", err, test.reason)
			}
			if pairError != nil && *pairError != (PairError{test.reason, test.detail}) {
				t.Errorf("error %v, want %s: %s", err, test.reason, test.detail)
			}
			if got != test.want {
				t.Errorf("Between = %+v, want %+v", got, test.want)
			}
		})
	}
}

// TestPairOnOneClock: what begins later is preceded by zeros, whatever comes first, and PGV
// and PGD are of what is common.
func TestPairOnOneClock(t *testing.T) {
	x, y := shaken(1, 60), shaken(2, 50)
	shifted := append(make([]float64, 20), y...) // 60 of x, 20 to 70 of y
	long := append(slices.Clone(x), make([]float64, 10)...)
	for _, p := range []Pair{NewPair(x, y, 20, 90), NewPair(y, x, -20, 90)} {
		a, b := p.A, p.B
		if !slices.Equal(a, long) {
			a, b = b, a
		}
		if !slices.Equal(a, long) || !slices.Equal(b, shifted) || !p.ChangedA || !p.ChangedB {
			t.Errorf("not on one clock: %v and %v, changed %v and %v", a, b, p.ChangedA, p.ChangedB)
		}
		median, maximum := p.Peaks(0.01)
		whole50, whole100 := RotDPeaks(0.01, p.A, p.B)
		common50, common100 := RotDPeaks(0.01, p.A[20:60], p.B[20:60])
		common50.PGA, common100.PGA = whole50.PGA, whole100.PGA
		if median != common50 || maximum != common100 {
			t.Errorf("peaks %+v and %+v, want %+v and %+v", median, maximum, common50, common100)
		}
	}
	for stepS, want := range map[float64]int{0.01: -7, 0.005: -14, 0.0025: -28} { // as delivered, and oversampled
		if got := (Relation{LaterS: -0.07}).Later(stepS); got != want {
			t.Errorf("%d samples of %g s, want %d", got, stepS, want)
		}
	}
	apart := NewPair(x, y, 100, 90)
	if median, maximum := apart.Peaks(0.01); maximum.PGV == 0 || median.PGA == 0 {
		t.Errorf("nothing in common: peaks %+v and %+v", median, maximum)
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
