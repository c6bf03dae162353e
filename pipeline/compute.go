package pipeline

import (
	"fmt"
	"math"
	"slices"

	"swaybook/db"
	"swaybook/pipeline/condition"
	"swaybook/pipeline/quality"
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

// compute conditions one component, whose motion arrives at the sample arrival, and solves
// it.
func (c *computer) compute(delivered condition.Component, arrival int) (db.Spectra, error) {
	motion, err := c.recipe.Apply(delivered)
	if err != nil {
		return db.Spectra{}, fmt.Errorf("recipe %s: %w", c.recipe.Name, err)
	}
	solver, err := c.solvers.Get(motion.StepS)
	if err != nil {
		return db.Spectra{}, err
	}
	sd := solver.SD(nil, motion.Acceleration)
	return c.solvers.spectra(sd, c.solvers.measures(motion, sd), conditioningOf(motion, delivered.StepS*float64(arrival))), nil
}

// conditioningOf is what the store keeps of a conditioned motion, nil where it is the
// delivered one, in which the motion arrives after arrivalS.
func conditioningOf(m condition.Conditioned, arrivalS float64) *db.Conditioning {
	if !m.IsChanged {
		return nil
	}
	return &db.Conditioning{
		Findings: conditionedFindings(m, arrivalS),
		StepS:    m.StepS, Samples: len(m.Acceleration), LeadS: m.LeadS, LowCutHz: knownOrNil(m.LowCutHz), HighCutHz: knownOrNil(m.HighCutHz), LongS: knownOrNil(m.LongS),
	}
}

// conditionedFindings are what is found in the motion as the recipe left it.
func conditionedFindings(m condition.Conditioned, arrivalS float64) []db.Finding {
	onset := max(0, int(math.Round((arrivalS+m.LeadS)/m.StepS)))
	if arrivalS == 0 || onset >= len(m.Acceleration) {
		onset = 0 // begins within the motion, or was trimmed away
	}
	var out []db.Finding
	for _, e := range m.Exceeded {
		out = append(out, db.Finding(e))
	}
	return withFound(out, quality.AssessConditioned(m.Acceleration, m.StepS, onset)) // a step may have found it already
}

// withFound appends what was found, each flag once.
func withFound(to []db.Finding, found []quality.Finding) []db.Finding {
	for _, f := range found {
		if !slices.ContainsFunc(to, func(g db.Finding) bool { return g.Flag == f.Flag }) {
			to = append(to, db.Finding(f))
		}
	}
	return to
}

func knownOrNil(x float64) *float64 {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return nil
	}
	return &x
}
