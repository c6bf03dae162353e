package pipeline

import (
	"sync"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// solvers keeps the solver of each time step in use.
type solvers struct {
	grid   db.Grid
	mu     sync.Mutex
	byStep map[float64]*spectrum.Solver
}

// maxSolvers bounds what odd time steps may cost: an archive has a handful of
// steps, and a solver of the default grid takes a few hundred kilobytes.
const maxSolvers = 64

// get returns the solver for the step, with the grid's dampings outside and its
// periods inside.
func (s *solvers) get(stepS float64) (*spectrum.Solver, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if solver, ok := s.byStep[stepS]; ok {
		return solver, nil
	}
	grid := spectrum.Grid{PeriodsS: s.grid.PeriodsS, Dampings: s.grid.Dampings}
	solver, err := spectrum.NewSolver(spectrum.NigamJennings, stepS, grid.Oscillators())
	if err != nil {
		return nil, err
	}
	if len(s.byStep) >= maxSolvers {
		clear(s.byStep)
	}
	s.byStep[stepS] = solver
	return solver, nil
}

// spectra is what a solver's SD and the peaks are in the store, encoded by the
// worker.
func (s *solvers) spectra(sd []float64, peaks spectrum.GroundPeaks) db.Spectra {
	out := db.Spectra{Measures: map[string]float64{db.MeasurePGA: peaks.PGA, db.MeasurePGV: peaks.PGV, db.MeasurePGD: peaks.PGD}}
	for n := len(s.grid.PeriodsS); len(sd) > 0; sd = sd[n:] {
		out.SD = append(out.SD, sd[:n])
	}
	out.Encode()
	return out
}
