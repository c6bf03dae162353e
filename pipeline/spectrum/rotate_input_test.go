package spectrum

import (
	"math"
	"strings"
	"testing"
)

// TestRotDOddInput gives what is no motion, or none that can be.
func TestRotDOddInput(t *testing.T) {
	list := Grid{[]float64{0.05, 0.2, 1, 3, 10, 200, 5000}, []float64{0, 0.05, 0.99}}.Oscillators()
	for _, method := range []Method{NigamJennings, NewmarkAverage} {
		s, err := NewSolver(method, 1, list)
		if err != nil {
			t.Fatal(err)
		}
		nan, inf, most := math.NaN(), math.Inf(1), math.MaxFloat64
		for _, tt := range []struct {
			name          string
			first, second []float64
			want          func(float64) bool
		}{
			{"none", nil, nil, isZero},
			{"one", []float64{3}, []float64{-2}, isZero},
			{"two zeros", make([]float64, 2), make([]float64, 2), isZero},
			{"zeros", make([]float64, 100), make([]float64, 100), isZero},
			{"negative zeros", []float64{math.Copysign(0, -1), 0}, []float64{0, math.Copysign(0, -1)}, isZero},
			{"two", []float64{1, 1}, []float64{0, 1}, isPositive},
			{"NaN first", []float64{0, 1, nan, 0}, []float64{1, 1, 1, 0}, math.IsNaN},
			{"NaN second", []float64{1, 1, 1, 0}, []float64{0, 1, nan, 0}, math.IsNaN},
			{"NaN alone", []float64{nan}, []float64{0}, math.IsNaN},
			{"infinite first", []float64{0, -inf, 1}, make([]float64, 3), math.IsNaN},
			{"infinite second", make([]float64, 3), []float64{0, inf, 1}, math.IsNaN},
			{"infinite in both", []float64{0, inf, 1}, []float64{0, inf, 1}, math.IsNaN},
			{"huge and NaN", []float64{most, -most, most}, []float64{0, nan, 1}, math.IsNaN},
			{"huge", []float64{0, most, -most, 0}, []float64{most, 0, 0, -most}, isPositive},
			{"huge and tiny", []float64{0, most, -most, 0}, []float64{5e-324, 0, 0, 0}, isPositive},
			{"subnormal", []float64{0, 5e-324, -5e-324, 0}, []float64{5e-324, 0, 0, 0}, func(d float64) bool { return d >= 0 && d < 1e-300 }},
		} {
			if method.isNewmark() && strings.HasPrefix(tt.name, "huge") {
				continue // turned as they are, so that they can overflow
			}
			d50, d100 := rotd(t, s, tt.first, tt.second)
			for i := range list {
				if !tt.want(d50[i]) || !tt.want(d100[i]) {
					t.Errorf("%v %s: %+v: RotD50 %v RotD100 %v", method, tt.name, list[i], d50[i], d100[i])
				}
			}
		}
	}
}

// TestRotDOfExtremePairs scales a pair to the ends of the range by powers of two.
// Nothing changes but where samples or D are subnormal or infinite.
func TestRotDOfExtremePairs(t *testing.T) {
	list := Grid{[]float64{0.05, 1, 3, 10, 200, 5000}, []float64{0, 0.05}}.Oscillators()
	first, second := seededMotion(81, 300), seededMotion(82, 300)
	base := solvePair(t, 1, list, first, second)
	for _, exponent := range []int{-1070, -1040, -1000, -910, -890, 890, 1000, 1015} {
		x, y := make([]float64, len(first)), make([]float64, len(first))
		exact := true
		for i := range x {
			x[i], y[i] = math.Ldexp(first[i], exponent), math.Ldexp(second[i], exponent)
			exact = exact && math.Ldexp(x[i], -exponent) == first[i] && math.Ldexp(y[i], -exponent) == second[i]
		}
		allowed := 0.0
		if !exact { // each sample by half a unit, which adds no more than n steps of that to u
			allowed = float64(len(x)*len(x)) * 5e-324
		}
		got := solvePair(t, 1, list, x, y)
		for k := range got {
			for i, d := range got[k] {
				want := math.Ldexp(base[k][i], exponent)
				if d != want && !(math.Abs(d-want) <= allowed) {
					t.Errorf("times 2^%d: %+v: RotD of %d: %v, want %v", exponent, list[i], 50+50*k, d, want)
				}
			}
		}
	}
}

// TestRotDPanics on lengths that differ.
func TestRotDPanics(t *testing.T) {
	s, err := NewSolver(NigamJennings, 1, []Oscillator{{1, 0.05}, {2, 0.05}})
	if err != nil {
		t.Fatal(err)
	}
	two, three := make([]float64, 2), make([]float64, 3)
	for name, f := range map[string]func(){
		"components": func() { s.RotD(two, three, two, two) },
		"first D":    func() { s.RotD(two, two, three, two) },
		"second D":   func() { s.RotD(two, two, two, nil) },
		"peaks":      func() { RotDPeaks(1, two, three) },
	} {
		t.Run(name, func(t *testing.T) {
			defer func() {
				if recover() == nil {
					t.Error("no panic")
				}
			}()
			f()
		})
	}
}

// TestRotDOfHugeMotions: turning motions near the greatest number must not
// overflow, whichever the method.
func TestRotDOfHugeMotions(t *testing.T) {
	x, y := make([]float64, 40), make([]float64, 40)
	for i := range x {
		x[i] = 1.5 * math.Cos(float64(i)*0.7)
		y[i] = 0.9 * x[i]
	}
	for _, method := range []Method{NigamJennings, NewmarkAverage} {
		s, err := NewSolver(method, 0.01, []Oscillator{{0.03, 0.05}})
		if err != nil {
			t.Fatal(err)
		}
		want50, want100 := rotd(t, s, x, y)
		got50, got100 := rotd(t, s, scaledBy(x, 0x1p1023/2), scaledBy(y, 0x1p1023/2))
		if off(math.Ldexp(got50[0], -1022), want50[0]) > 1e-12 || off(math.Ldexp(got100[0], -1022), want100[0]) > 1e-12 {
			t.Errorf("%v: %v and %v, want %v and %v times 2^1022", method, got50[0], got100[0], want50[0], want100[0])
		}
	}
}
