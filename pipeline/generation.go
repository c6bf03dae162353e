package pipeline

import (
	"context"
	"fmt"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// asDelivered is the recipe that changes nothing.
var asDelivered = db.Recipe{Name: "as-delivered", Steps: "[]"}

// settleGeneration returns the store's generation, which the first run makes
// on the grid asked for. A later run that asks for another grid is refused, and
// so is a store that another version of the solver computed: its spectra would
// not be comparable with new ones.
func settleGeneration(ctx context.Context, tx *db.Tx, asked db.Grid) (db.Generation, error) {
	g, ok, err := tx.Published(ctx)
	if err != nil {
		return g, err
	}
	if !ok {
		grid := filled(asked, defaultGrid())
		if err := (spectrum.Grid{PeriodsS: grid.PeriodsS, Dampings: grid.Dampings}).Validate(); err != nil {
			return g, err
		}
		return tx.CreateGeneration(ctx, asDelivered, grid, spectrum.Version)
	}
	if err := g.CheckSolver(spectrum.Version); err != nil {
		return g, err
	}
	if !filled(asked, g.Grid).Equal(g.Grid) {
		return g, fmt.Errorf("%w: the store's grid was fixed by its first ingest at %s; leave out --periods and --dampings, "+
			"query other periods and dampings (they are computed from the stored samples), or make another store with --store",
			db.ErrOtherGeneration, describe(g.Grid))
	}
	return g, nil
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
