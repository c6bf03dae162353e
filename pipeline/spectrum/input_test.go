package spectrum

import (
	"errors"
	"math"
	"strings"
	"testing"
)

func TestOddInput(t *testing.T) {
	list := Grid{[]float64{1e-3, 0.2, 1, 3, 10, 1e9}, []float64{0, 0.05, 1 - 1e-15}}.Oscillators()
	tests := []struct {
		name string
		a    []float64
		want func(float64) bool
	}{
		{"none", nil, isZero},
		{"one", []float64{3}, isZero},
		{"zeros", make([]float64, 100), isZero},
		{"negative zeros", []float64{math.Copysign(0, -1), 0}, isZero},
		{"two", []float64{1, 1}, isPositive},
		{"three", []float64{0, 1, 0}, isPositive},
		{"spike at the end", append(make([]float64, 64), 1), isPositive},
		{"spike at a block's start", append(make([]float64, 64), 1, 0, 0), isPositive},
		{"huge", []float64{0, math.MaxFloat64, -math.MaxFloat64, 0}, isPositive},
		{"NaN", []float64{0, 1, math.NaN(), 0}, math.IsNaN},
		{"infinite", []float64{0, math.Inf(-1), 1}, math.IsNaN},
		{"subnormal", []float64{0, 5e-324, -5e-324, 0}, func(d float64) bool { return d >= 0 && d < 1e-300 }},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			for i, d := range mustSolve(t, NigamJennings, 1, list, tt.a) {
				if !tt.want(d) {
					t.Errorf("%+v: D = %v", list[i], d)
				}
			}
		})
	}
}

func isZero(d float64) bool     { return d == 0 }
func isPositive(d float64) bool { return d > 0 }

// TestTinyMotion scales a motion to the bottom of the range, where squares would
// underflow, and back.
func TestTinyMotion(t *testing.T) {
	a := seededMotion(2, 200)
	tiny := make([]float64, len(a))
	for i := range a {
		tiny[i] = math.Ldexp(a[i], -1000)
	}
	list := DefaultGrid().Oscillators()
	base, got := mustSolve(t, NigamJennings, 0.01, list, a), mustSolve(t, NigamJennings, 0.01, list, tiny)
	for i := range got {
		if want := math.Ldexp(base[i], -1000); got[i] != want {
			t.Fatalf("%+v: D = %v, want %v", list[i], got[i], want)
		}
	}
}

func TestNewSolverErrors(t *testing.T) {
	good := []Oscillator{{1, 0.05}}
	tests := []struct {
		name   string
		method Method
		step   float64
		list   []Oscillator
		want   string
	}{
		{"method", Method(7), 0.01, good, "unknown method Method(7)"},
		{"step zero", NigamJennings, 0, good, "step 0 s"},
		{"step NaN", NigamJennings, math.NaN(), good, "step NaN s"},
		{"step negative", NigamJennings, -0.01, good, "step -0.01 s"},
		{"period zero", NigamJennings, 0.01, []Oscillator{{1, 0}, {0, 0.05}}, "oscillator 2: invalid oscillator: period 0 s"},
		{"period infinite", NigamJennings, 0.01, []Oscillator{{math.Inf(1), 0}}, "period +Inf s"},
		{"period NaN", NigamJennings, 0.01, []Oscillator{{math.NaN(), 0}}, "period NaN s"},
		{"critical damping", NigamJennings, 0.01, []Oscillator{{1, 1}}, "damping 1 "},
		{"damping NaN", NigamJennings, 0.01, []Oscillator{{1, math.NaN()}}, "damping NaN"},
		{"damping in percent", NigamJennings, 0.01, []Oscillator{{1, 5}}, "damping 5 "},
		{"period too short", NigamJennings, 1, []Oscillator{{9e-4, 0}}, "0.0009 steps of 1 s"},
		{"period too long", NigamJennings, 1e-3, []Oscillator{{2e6, 0}}, "outside 0.001 to 1e+09"},
		{"period too long to follow", NewmarkAverage, 1e-3, []Oscillator{{2e3, 0}}, "outside 0.001 to 1e+06"},
		{"period too short to be stable", NewmarkLinear, 0.01, []Oscillator{{0.018, 0.05}}, "period 0.018 s is 1.8 steps of 0.01 s; newmark-linear is stable only above π/√3 = 1.8138 steps"},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			_, err := NewSolver(tt.method, tt.step, tt.list)
			if err == nil || !strings.Contains(err.Error(), tt.want) {
				t.Fatalf("error %v, want %q in it", err, tt.want)
			}
			if strings.Contains(tt.name, "period") && !errors.Is(err, ErrOscillator) {
				t.Errorf("error %v does not wrap ErrOscillator", err)
			}
		})
	}
}

func TestDst(t *testing.T) {
	s, err := NewSolver(NigamJennings, 0.01, []Oscillator{{1, 0.05}, {2, 0.05}})
	if err != nil {
		t.Fatal(err)
	}
	a := shaken(1, 50)
	own := make([]float64, 2)
	got := s.SD(own, a)
	if &got[0] != &own[0] || got[0] <= 0 {
		t.Errorf("SD(own) = %v, not in own space", got)
	}
	for i, d := range s.SD(nil, a) {
		if d != own[i] {
			t.Errorf("SD(nil)[%d] = %v, SD(own) %v", i, d, own[i])
		}
	}
	defer func() {
		if recover() == nil {
			t.Error("a dst of the wrong length did not panic")
		}
	}()
	s.SD(make([]float64, 3), a)
}
