package db

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
)

// IsBlank reports whether nothing came into the store that a later run would go on with, or
// a question could answer: no file, nothing of a shard's but what documents said, no result and
// no edition.
func (s *Store) IsBlank(ctx context.Context) (bool, error) {
	isUsed, err := idOf(ctx, s.read, `SELECT EXISTS (SELECT 1 FROM source_file) OR EXISTS (SELECT 1 FROM rejection) OR EXISTS (SELECT 1 FROM intake)
		OR EXISTS (SELECT 1 FROM computation) OR EXISTS (SELECT 1 FROM edition)`)
	if err != nil {
		return false, fmt.Errorf("look for records: %w", explain(err))
	}
	return isUsed == 0, nil
}

// Remove removes the store at path, or that which links lead to, with its log. Nobody may have
// it open, and who removes it must hold its lock.
func Remove(path string) error {
	real, err := resolve(path)
	if err != nil {
		return fmt.Errorf("remove store %s: %w", path, err)
	}
	for _, suffix := range append([]string{""}, logSuffixes...) {
		if err := os.Remove(real + suffix); err != nil && !errors.Is(err, fs.ErrNotExist) {
			return fmt.Errorf("remove store: %w", err)
		}
	}
	return nil
}
