package spectrum

import (
	"errors"
	"strings"
	"sync"
	"testing"
)

// TestSolversKeepTheirSolvers: one a step, made once whoever asks first, and no
// more than so many.
func TestSolversKeepTheirSolvers(t *testing.T) {
	s := NewSolvers(NigamJennings, []Oscillator{{PeriodS: 1, Damping: 0.05}})
	got := make([]*Solver, 8)
	var wait sync.WaitGroup
	for i := range got {
		wait.Go(func() {
			var err error
			if got[i], err = s.Get(0.01); err != nil {
				t.Error(err)
			}
		})
	}
	wait.Wait()
	for _, solver := range got {
		if solver != got[0] || solver.StepS() != 0.01 || solver.Len() != 1 || solver.Method() != NigamJennings {
			t.Fatalf("another solver for the same step: %p and %p", solver, got[0])
		}
	}
	for i := range 3 * maxSolvers {
		if _, err := s.Get(0.001 * float64(i+1)); err != nil {
			t.Fatal(err)
		}
		if len(s.byStep) > maxSolvers {
			t.Fatalf("%d solvers are kept", len(s.byStep))
		}
	}
}

// TestSolversNameTheLimit: what a method cannot take is named by step and period,
// in whatever order the periods are.
func TestSolversNameTheLimit(t *testing.T) {
	tests := []struct {
		method  Method
		stepS   float64
		periods []float64
		want    string // "" where all are taken
	}{
		{NewmarkLinear, 0.01, []float64{1, 0.019, 2}, ""},
		{NewmarkLinear, 0.01, []float64{1, 0.018, 2}, "time step of 0.01 s too long for a period of 0.018 s: newmark-linear is stable only above 1.814 steps a period"},
		{NewmarkAverage, 0.01, []float64{0.018}, ""},
		{NewmarkAverage, 1e-3, []float64{1, 1001}, "time step of 0.001 s too short for a period of 1001 s: newmark-average takes 1e+06 steps a period at most"},
		{NigamJennings, 100, []float64{0.05, 1}, "time step of 100 s too long for a period of 0.05 s: nigam-jennings takes 0.001 steps a period at least"},
		{NigamJennings, 1e-5, []float64{2e4}, "time step of 1e-05 s too short for a period of 20000 s: nigam-jennings takes 1e+09 steps a period at most"},
		{NigamJennings, 0.01, nil, ""},
	}
	for _, test := range tests {
		var list []Oscillator
		for _, period := range test.periods {
			list = append(list, Oscillator{PeriodS: period})
		}
		solver, err := NewSolvers(test.method, list).Get(test.stepS)
		if test.want == "" {
			if err != nil || solver == nil {
				t.Errorf("%v, %g s, %v: %v", test.method, test.stepS, test.periods, err)
			}
			continue
		}
		var step *StepError
		if !errors.As(err, &step) || !errors.Is(err, ErrOscillator) || err.Error() != test.want {
			t.Errorf("%v, %g s, %v: %v, want %s", test.method, test.stepS, test.periods, err, test.want)
		}
	}
	if _, err := NewSolvers(NigamJennings, []Oscillator{{PeriodS: -1}}).Get(0.01); !errors.Is(err, ErrOscillator) || strings.Contains(err.Error(), "time step") {
		t.Errorf("a period below zero: %v", err)
	}
}
