package db

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"math"
	"slices"
	"strconv"
)

// ErrOtherGeneration says that the store was computed on another grid, recipe
// or solver than the one asked for.
var ErrOtherGeneration = errors.New("store was computed otherwise")

// Equal reports whether both grids hold the same values in the same order.
func (g Grid) Equal(other Grid) bool {
	return slices.Equal(g.PeriodsS, other.PeriodsS) && slices.Equal(g.Dampings, other.Dampings)
}

// Hash identifies the grid: the SHA-256 of its values in shortest decimals.
func (g Grid) Hash() string {
	var text []byte
	for _, list := range [][]float64{g.PeriodsS, g.Dampings} {
		for _, x := range list {
			text = append(strconv.AppendFloat(text, x, 'g', -1, 64), ' ')
		}
		text = append(text, '\n')
	}
	sum := sha256.Sum256(text)
	return hex.EncodeToString(sum[:])
}

// CheckSolver refuses a generation that another version of the solver computed:
// what this program computes or reads cannot stand beside it. The error wraps
// ErrOtherGeneration and says what to do.
func (g Generation) CheckSolver(version string) error {
	if g.Solver == version {
		return nil
	}
	return fmt.Errorf("%w: its spectra come from solver %q, this program has %q; reprocess, or ingest --recipe, computes them anew of the stored samples",
		ErrOtherGeneration, g.Solver, version)
}

// Recipe is a declared list of conditioning steps.
type Recipe struct {
	Name  string
	Steps string // canonical JSON
}

// Hash is the SHA-256 of the steps, in hex digits.
func (r Recipe) Hash() string {
	sum := sha256.Sum256([]byte(r.Steps))
	return hex.EncodeToString(sum[:])
}

// Current returns the generation of the published edition or, before there is one, of the
// store's first run; ok is false in an empty store.
func (t *Tx) Current(ctx context.Context) (g Generation, ok bool, err error) {
	e, ok, err := t.PublishedEdition(ctx)
	if err == nil && !ok {
		e.GenerationID, err = t.idOf(ctx, `SELECT coalesce(min(id), 0) FROM generation`)
	}
	if err != nil || e.GenerationID == 0 {
		return g, false, err
	}
	if g, err = generation(ctx, t.tx, e.GenerationID); err == nil {
		err = t.isStored(ctx, g, e.ID) // or a run would take it for a new one, and compute by it
	}
	return g, true, err
}

// PutGeneration returns the generation of a recipe, grid and solver, which it begins
// where there is none.
func (t *Tx) PutGeneration(ctx context.Context, recipe Recipe, grid Grid, solver string) (Generation, error) {
	g := Generation{Recipe: recipe, Solver: solver, Grid: grid}
	recipeID, err := t.idOf(ctx, `SELECT id FROM recipe WHERE hash = ?`, recipe.Hash())
	if err == nil { // what is there was damaged, if it is not that
		err = t.exec(ctx, `UPDATE recipe SET steps = ?1 WHERE id = ?2 AND steps <> ?1`, recipe.Steps, recipeID)
	}
	if err == nil && recipeID == 0 {
		recipeID, err = t.insert(ctx, `INSERT INTO recipe (hash, name, steps) VALUES (?, ?, ?)`, recipe.Hash(), recipe.Name, recipe.Steps)
	}
	if err != nil {
		return g, fmt.Errorf("put recipe: %w", err)
	}
	gridID, err := t.idOf(ctx, `SELECT id FROM grid WHERE hash = ?`, grid.Hash())
	if err == nil && gridID == 0 {
		gridID, err = t.createGrid(ctx, grid)
	}
	if err != nil {
		return g, fmt.Errorf("put grid: %w", err)
	}
	g.ID, err = t.idOf(ctx, `SELECT id FROM generation WHERE recipe_id = ? AND grid_id = ? AND solver = ?`, recipeID, gridID, solver)
	if err == nil && g.ID == 0 {
		g.ID, err = t.insert(ctx, `INSERT INTO generation (recipe_id, grid_id, solver) VALUES (?, ?, ?)`, recipeID, gridID, solver)
	}
	if err != nil {
		return g, fmt.Errorf("put generation: %w", err)
	}
	return g, nil
}

// idOf returns the id that a query gives, 0 where it gives none.
func (t *Tx) idOf(ctx context.Context, query string, args ...any) (int64, error) {
	return idOf(ctx, t.tx, query, args...)
}

func idOf(ctx context.Context, q queryer, query string, args ...any) (int64, error) {
	rows, err := q.QueryContext(ctx, query, args...)
	if err != nil {
		return 0, err
	}
	ids, err := collect(rows, func(id *int64) []any { return []any{id} })
	if err != nil || len(ids) == 0 {
		return 0, err
	}
	return ids[0], nil
}

func (t *Tx) createGrid(ctx context.Context, grid Grid) (int64, error) {
	if len(grid.Dampings) > mostDampings {
		return 0, fmt.Errorf("%d dampings, a store holds at most %d", len(grid.Dampings), mostDampings)
	}
	if len(grid.PeriodsS) > mostPeriods {
		return 0, fmt.Errorf("%d periods, a store holds at most %d", len(grid.PeriodsS), mostPeriods)
	}
	id, err := t.insert(ctx, `INSERT INTO grid (hash) VALUES (?)`, grid.Hash())
	if err != nil {
		return 0, err
	}
	for i, period := range grid.PeriodsS {
		err := t.exec(ctx, `INSERT INTO grid_period (grid_id, position, period_s, omega_rad_s) VALUES (?, ?, ?, ?)`, id, i, period, 2*math.Pi/period)
		if err != nil {
			return 0, err
		}
	}
	for i, damping := range grid.Dampings {
		err := t.exec(ctx, `INSERT INTO grid_damping (grid_id, position, damping) VALUES (?, ?, ?)`, id, i, damping)
		if err != nil {
			return 0, err
		}
	}
	return id, nil
}

func generation(ctx context.Context, q queryer, id int64) (g Generation, err error) {
	var gridID int64
	err = q.QueryRowContext(ctx, `SELECT g.id, r.name, r.steps, g.solver, g.grid_id FROM generation g JOIN recipe r ON r.id = g.recipe_id WHERE g.id = ?`, id).
		Scan(&g.ID, &g.Recipe.Name, &g.Recipe.Steps, &g.Solver, &gridID)
	if err != nil {
		return g, fmt.Errorf("read generation: %w", err)
	}
	g.Grid, err = readGrid(ctx, q, gridID)
	return g, err
}

// isStored says that a generation is not what was stored, if it is not: by the hashes of its
// recipe and its grid, and by the seal of an edition that shows it, 0 for none.
func (t *Tx) isStored(ctx context.Context, g Generation, edition int64) error {
	const instead = "; an earlier edition may be whole (swaybook runs publish), or a backup"
	var recipe, grid string
	err := t.tx.QueryRowContext(ctx, `SELECT r.hash, d.hash FROM generation g JOIN recipe r ON r.id = g.recipe_id JOIN grid d ON d.id = g.grid_id WHERE g.id = ?`, g.ID).Scan(&recipe, &grid)
	switch {
	case err != nil:
		return fmt.Errorf("read generation: %w", err)
	case g.Recipe.Hash() != recipe:
		return fmt.Errorf("%w: recipe %s has another hash%s", ErrAltered, g.Recipe.Name, instead)
	case g.Grid.Hash() != grid:
		return fmt.Errorf("%w: the grid has another hash%s", ErrAltered, instead)
	case edition == 0:
		return nil
	}
	seals, err := sealsOf(ctx, t.tx, edition)
	if err != nil {
		return err
	}
	s := Snapshot{tx: t.tx, Edition: Edition{ID: edition}, Generation: g, seals: seals}
	if err := s.isOfSealedGeneration(); err != nil {
		return fmt.Errorf("%w%s", err, instead)
	}
	return nil
}

func readGrid(ctx context.Context, q queryer, id int64) (Grid, error) {
	var g Grid
	var err error
	g.PeriodsS, err = readFloats(ctx, q, `SELECT period_s FROM grid_period WHERE grid_id = ? ORDER BY position`, id)
	if err != nil {
		return g, err
	}
	g.Dampings, err = readFloats(ctx, q, `SELECT damping FROM grid_damping WHERE grid_id = ? ORDER BY position`, id)
	return g, err
}

func readFloats(ctx context.Context, q queryer, query string, args ...any) ([]float64, error) {
	rows, err := q.QueryContext(ctx, query, args...)
	if err != nil {
		return nil, err
	}
	return collect(rows, func(x *float64) []any { return []any{x} })
}
