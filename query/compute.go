package query

import (
	"context"
	"fmt"
	"sync"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// compute fills in the missing periods of o from samples. A motion is the unit
// of work; the samples of at most GOMAXPROCS components are in memory. The
// snapshot is one connection, whose calls database/sql carries out one at a
// time; decompression and solving run side by side.
func (s *source) compute(ctx context.Context, o *ordinates, motions []motion, missing []int) error {
	oscillators := make([]spectrum.Oscillator, len(missing))
	for i, p := range missing {
		oscillators[i] = spectrum.Oscillator{PeriodS: o.periodsS[p], Damping: s.damping}
	}
	solvers := &solvers{method: s.method, oscillators: oscillators}
	return inParallel(ctx, len(motions), func(ctx context.Context, i int) error {
		m := &motions[i]
		for k, c := range m.members {
			sd, err := solvers.solve(ctx, s.snapshot, c)
			if err != nil {
				return err
			}
			o.put(i, m, k == 0, missing, sd)
		}
		return nil
	})
}

// solvers makes one solver a sampling step, when it is first needed.
type solvers struct {
	method      Method
	oscillators []spectrum.Oscillator
	mutex       sync.Mutex
	byStep      map[float64]func() (*spectrum.Solver, error)
}

func (s *solvers) get(stepS float64) (*spectrum.Solver, error) {
	s.mutex.Lock()
	if s.byStep == nil {
		s.byStep = map[float64]func() (*spectrum.Solver, error){}
	}
	build, ok := s.byStep[stepS]
	if !ok {
		build = sync.OnceValues(func() (*spectrum.Solver, error) {
			return spectrum.NewSolver(s.method, stepS, s.oscillators)
		})
		s.byStep[stepS] = build
	}
	s.mutex.Unlock()
	return build()
}

// solve returns the SD of a component, one an oscillator.
func (s *solvers) solve(ctx context.Context, snapshot *db.Snapshot, c *db.HeldComponent) ([]float64, error) {
	solver, err := s.get(c.StepS)
	if err != nil {
		return nil, fmt.Errorf("compute spectrum of %s %s: %w", c.Record.Code, c.Role, err)
	}
	samples, err := snapshot.Samples(ctx, c.ID)
	if err != nil {
		return nil, fmt.Errorf("compute spectrum of %s %s: %w", c.Record.Code, c.Role, err)
	}
	return solver.SD(nil, samples), nil
}
