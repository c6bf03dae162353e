package pipeline

import (
	"fmt"
	"math"

	"swaybook/db"
	"swaybook/pipeline/condition"
)

// computer turns delivered motions into what a generation stores of them. The workers
// share it.
type computer struct {
	recipe  condition.Recipe
	solvers solvers
}

func newComputer(g db.Generation) (computer, error) {
	recipe, err := condition.FromCanonical(g.Recipe.Steps)
	if err != nil {
		return computer{}, fmt.Errorf("recipe %s: %w", g.Recipe.Name, err)
	}
	return computer{recipe: recipe, solvers: newSolvers(g.Grid)}, nil
}

// compute conditions one component and solves it.
func (c *computer) compute(delivered condition.Component) (db.Spectra, error) {
	motion, err := c.recipe.Apply(delivered)
	if err != nil {
		return db.Spectra{}, fmt.Errorf("recipe %s: %w", c.recipe.Name, err)
	}
	solver, err := c.solvers.Get(motion.StepS)
	if err != nil {
		return db.Spectra{}, err
	}
	sd := solver.SD(nil, motion.Acceleration)
	return c.solvers.spectra(sd, c.solvers.measures(motion, sd), conditioningOf(motion)), nil
}

// conditioningOf is what the store keeps of a conditioned motion, nil where it is the
// delivered one.
func conditioningOf(m condition.Conditioned) *db.Conditioning {
	if !m.IsChanged {
		return nil
	}
	return &db.Conditioning{
		StepS: m.StepS, Samples: len(m.Acceleration), LeadS: m.LeadS, LowCutHz: knownOrNil(m.LowCutHz), HighCutHz: knownOrNil(m.HighCutHz), LongS: knownOrNil(m.LongS),
	}
}

func knownOrNil(x float64) *float64 {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return nil
	}
	return &x
}
