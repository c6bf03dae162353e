package db

import (
	"context"
	"fmt"
)

// HeldRecipe is a recipe of a generation in the store, and that one's state: building,
// published or superseded.
type HeldRecipe struct {
	Recipe Recipe
	Hash   string
	State  string
}

// Recipes returns the recipes of the store's generations, the published one first.
func (s *Store) Recipes(ctx context.Context) ([]HeldRecipe, error) {
	rows, err := s.read.QueryContext(ctx, `SELECT r.name, r.steps, r.hash, coalesce(
			(SELECT e.state FROM edition e WHERE e.generation_id = g.id ORDER BY e.state = '`+EditionPublished+`' DESC, e.id DESC LIMIT 1), 'building') AS state
		FROM generation g JOIN recipe r ON r.id = g.recipe_id ORDER BY state <> '`+EditionPublished+`', g.id`)
	if err != nil {
		return nil, fmt.Errorf("read recipes: %w", err)
	}
	found, err := collect(rows, func(h *HeldRecipe) []any { return []any{&h.Recipe.Name, &h.Recipe.Steps, &h.Hash, &h.State} })
	if err != nil {
		return nil, fmt.Errorf("read recipes: %w", err)
	}
	return found, nil
}
