package pipeline

import (
	"context"
	"fmt"

	"swaybook/db"
	"swaybook/pipeline/condition"
	"swaybook/pipeline/spectrum"
)

// settleGeneration returns the generation of the run: that of the store's grid and of
// the recipe asked for, or of the published one where none is. A first run makes it on
// the grid asked for. A later run that asks for another grid is refused. What another
// version of the solver computed is another generation, as what another recipe did.
func settleGeneration(ctx context.Context, tx *db.Tx, asked db.Grid, recipe *condition.Recipe) (db.Generation, error) {
	g, ok, err := tx.Current(ctx)
	if err != nil {
		return g, err
	}
	if !ok {
		grid := filled(asked, defaultGrid())
		if err := (spectrum.Grid{PeriodsS: grid.PeriodsS, Dampings: grid.Dampings}).Validate(); err != nil {
			return g, err
		}
		if recipe == nil {
			standard := condition.Standard()
			recipe = &standard
		}
		return tx.PutGeneration(ctx, storedRecipe(recipe), grid, spectrum.Version)
	}
	if !filled(asked, g.Grid).Equal(g.Grid) {
		return g, fmt.Errorf("%w: the store's grid was fixed by its first ingest at %s; leave out --periods and --dampings, "+
			"query other periods and dampings (they are computed from the stored samples), or make another store with --store",
			db.ErrOtherGeneration, describe(g.Grid))
	}
	stored := g.Recipe
	if recipe != nil {
		stored = storedRecipe(recipe)
	}
	return tx.PutGeneration(ctx, stored, g.Grid, spectrum.Version)
}

// regenerate returns the generation of a study's run: of the recipe and grid asked for or,
// where it asks for none, of the published one, by this program's solver.
func regenerate(ctx context.Context, tx *db.Tx, asked db.Grid, recipe *condition.Recipe) (db.Generation, error) {
	g, ok, err := tx.Current(ctx)
	if err != nil {
		return g, err
	}
	if !ok {
		g.Grid, g.Recipe = defaultGrid(), storedRecipe(new(condition.Standard()))
	}
	grid := filled(asked, g.Grid)
	if err := (spectrum.Grid{PeriodsS: grid.PeriodsS, Dampings: grid.Dampings}).Validate(); err != nil {
		return g, err
	}
	stored := g.Recipe
	if recipe != nil {
		stored = storedRecipe(recipe)
	}
	return tx.PutGeneration(ctx, stored, grid, spectrum.Version)
}

func storedRecipe(r *condition.Recipe) db.Recipe {
	return db.Recipe{Name: r.Name, Steps: r.Canonical()}
}

func defaultGrid() db.Grid {
	g := spectrum.DefaultGrid()
	return db.Grid{PeriodsS: g.PeriodsS, Dampings: g.Dampings}
}

// filled completes the lists that the user left out.
func filled(asked, other db.Grid) db.Grid {
	if len(asked.PeriodsS) == 0 {
		asked.PeriodsS = other.PeriodsS
	}
	if len(asked.Dampings) == 0 {
		asked.Dampings = other.Dampings
	}
	return asked
}

func describe(g db.Grid) string {
	n := len(g.PeriodsS)
	return fmt.Sprintf("%d periods from %g to %g s and damping ratios %v", n, g.PeriodsS[0], g.PeriodsS[n-1], g.Dampings)
}
