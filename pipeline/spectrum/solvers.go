package spectrum

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"sync"
)

// maxSolvers bounds what odd time steps may cost: an archive has a handful of
// steps, and a solver of the default grid takes a few hundred kilobytes.
const maxSolvers = 64

// Solvers makes the solvers of one list of oscillators and keeps them, one for
// each time step in use. It is safe for concurrent use; a solver is made once, and
// others are had meanwhile.
type Solvers struct {
	method      Method
	oscillators []Oscillator
	mutex       sync.Mutex
	byStep      map[float64]func() (*Solver, error)
}

// NewSolvers takes what NewSolver takes but for the step.
func NewSolvers(method Method, oscillators []Oscillator) *Solvers {
	return &Solvers{method: method, oscillators: oscillators, byStep: map[float64]func() (*Solver, error){}}
}

// Get returns the solver for samples stepS seconds apart. The error is a
// *StepError where the method cannot take one of the periods in such steps, and
// otherwise one of NewSolver.
func (s *Solvers) Get(stepS float64) (*Solver, error) {
	return s.maker(stepS)()
}

func (s *Solvers) maker(stepS float64) func() (*Solver, error) {
	s.mutex.Lock()
	defer s.mutex.Unlock()
	if solver, ok := s.byStep[stepS]; ok {
		return solver
	}
	if len(s.byStep) >= maxSolvers {
		clear(s.byStep)
	}
	solver := sync.OnceValues(func() (*Solver, error) {
		if err := s.accept(stepS); err != nil {
			return nil, err
		}
		return NewSolver(s.method, stepS, s.oscillators)
	})
	s.byStep[stepS] = solver
	return solver
}

// accept looks at the shortest and the longest period: a method takes those
// between two that it takes.
func (s *Solvers) accept(stepS float64) error {
	if len(s.oscillators) == 0 {
		return nil
	}
	byPeriod := func(a, b Oscillator) int { return cmp.Compare(a.PeriodS, b.PeriodS) }
	for _, o := range []Oscillator{slices.MinFunc(s.oscillators, byPeriod), slices.MaxFunc(s.oscillators, byPeriod)} {
		if o.Validate() == nil && s.method.accepts(o, stepS) != nil {
			return &StepError{Method: s.method, StepS: stepS, PeriodS: o.PeriodS}
		}
	}
	return nil
}

// StepError says that a method cannot take a period in time steps of some length.
// It wraps ErrOscillator.
type StepError struct {
	Method         Method
	StepS, PeriodS float64
}

// Error names the limit that is exceeded.
func (e *StepError) Error() string {
	most := e.Method.maxPeriodStep()
	is, limit := "long", fmt.Sprintf("takes %g steps a period at least", MinPeriodStep)
	switch {
	case e.PeriodS/e.StepS > most:
		is, limit = "short", fmt.Sprintf("takes %g steps a period at most", most)
	case e.Method == NewmarkLinear:
		limit = fmt.Sprintf("is stable only above %.4g steps a period", math.Pi/math.Sqrt(3))
	}
	return fmt.Sprintf("time step of %g s too %s for a period of %g s: %v %s", e.StepS, is, e.PeriodS, e.Method, limit)
}

// Unwrap returns ErrOscillator.
func (e *StepError) Unwrap() error { return ErrOscillator }
