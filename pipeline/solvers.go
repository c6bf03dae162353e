package pipeline

import (
	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// solvers solves for the oscillators of a grid, its dampings outside and its
// periods inside.
type solvers struct {
	*spectrum.Solvers
	grid    db.Grid
	periods int
}

func newSolvers(grid db.Grid) solvers {
	oscillators := spectrum.Grid{PeriodsS: grid.PeriodsS, Dampings: grid.Dampings}.Oscillators()
	return solvers{spectrum.NewSolvers(spectrum.NigamJennings, oscillators), grid, len(grid.PeriodsS)}
}

// spectra is what a solver's SD, the measures and the conditioning are in the store.
func (s solvers) spectra(sd []float64, measures map[string]float64, conditioning *db.Conditioning) db.Spectra {
	var byDamping [][]float64
	for ; len(sd) > 0; sd = sd[s.periods:] {
		byDamping = append(byDamping, sd[:s.periods])
	}
	return db.NewSpectra(byDamping, measures, conditioning)
}
