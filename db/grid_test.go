package db

import (
	"context"
	"errors"
	"testing"
)

// No run computes by a recipe or a grid that is not what was stored, or takes it for a new one.
func TestDamagedGenerationsAreRefused(t *testing.T) {
	for _, damage := range []string{
		`UPDATE recipe SET steps = '["another"]'`,
		`UPDATE grid_period SET period_s = 7 WHERE position = 1`,
		`DELETE FROM grid_period`,
		`UPDATE grid_damping SET position = 9 - position`,
	} {
		s, g := filledStore(t)
		current := func() (got Generation) {
			err := s.Update(t.Context(), func(tx *Tx) (err error) {
				got, _, err = tx.Current(t.Context())
				return err
			})
			if errors.Is(err, ErrAltered) {
				return Generation{}
			}
			if err != nil {
				t.Fatal(err)
			}
			return got
		}
		if got := current(); got.Recipe != g.Recipe || !got.Grid.Equal(g.Grid) {
			t.Fatalf("%+v, want %+v", got, g)
		}
		if _, err := s.write.ExecContext(t.Context(), damage); err != nil {
			t.Fatal(damage, err)
		}
		if got := current(); got.ID != 0 {
			t.Errorf("%s: %+v", damage, got)
		}
	}
}

// Nor by another one that is whole.
func TestGenerationOfAnEditionIsSealed(t *testing.T) {
	s, g := tiledStore(t, 1)
	editionOf(t, s, true)
	changed(t, s, func(ctx context.Context, tx *Tx) error {
		other, err := tx.PutGeneration(ctx, Recipe{Name: "other", Steps: `["other"]`}, testGrid, testSolver)
		if err != nil {
			return err
		}
		if now, _, err := tx.Current(ctx); err != nil || now.ID != g.ID {
			t.Errorf("%+v, %v", now, err)
		}
		return tx.exec(ctx, `UPDATE generation SET recipe_id = (SELECT recipe_id FROM generation WHERE id = ?) WHERE id = ?`, other.ID, g.ID)
	})
	changed(t, s, func(ctx context.Context, tx *Tx) error {
		if now, _, err := tx.Current(ctx); !errors.Is(err, ErrAltered) {
			t.Errorf("%+v, %v", now, err)
		}
		return nil
	})
}

// A recipe that a run brings mends the one that is stored.
func TestPutGenerationMendsARecipe(t *testing.T) {
	s, g := filledStore(t)
	update(t, s, func(ctx context.Context, tx *Tx) error {
		err := tx.exec(ctx, `UPDATE recipe SET steps = '["another"]'`)
		again, errPut := tx.PutGeneration(ctx, g.Recipe, g.Grid, g.Solver)
		if now, _, err := tx.Current(ctx); err != nil || now.Recipe != g.Recipe || again.ID != g.ID {
			t.Errorf("%+v, %v", now, err)
		}
		return errors.Join(err, errPut)
	})
}
