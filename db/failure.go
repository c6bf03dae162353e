package db

import (
	"context"
	"fmt"
)

// Failures counts the components on which the generation's recipe cannot be carried out.
func (t *Tx) Failures(ctx context.Context, generationID int64) (n int, err error) {
	err = t.tx.QueryRowContext(ctx, `SELECT count(*) FROM computed k JOIN computation x ON x.id = k.computation_id
		WHERE k.generation_id = ? AND x.failure IS NOT NULL`, generationID).Scan(&n)
	if err != nil {
		return 0, fmt.Errorf("count failures: %w", err)
	}
	return n, nil
}

// IsBarren reports whether the store holds components, and the generation no spectrum.
func (t *Tx) IsBarren(ctx context.Context, generationID int64) (barren bool, err error) {
	err = t.tx.QueryRowContext(ctx, `SELECT EXISTS (SELECT 1 FROM component) AND NOT EXISTS (
		SELECT 1 FROM computed k JOIN computation x ON x.id = k.computation_id WHERE k.generation_id = ? AND x.failure IS NULL)`, generationID).Scan(&barren)
	if err != nil {
		return false, fmt.Errorf("look for spectra: %w", err)
	}
	return barren, nil
}

// failures are the components on which the recipe cannot be carried out, as rejections of
// it.
func failures(shown tables) string {
	return `SELECT s.path, c.source_line, r.code || ' ' || c.role || ': ' || x.failure, s.sha256
		FROM ` + shown("computed") + ` k JOIN computation x ON x.id = k.computation_id AND x.failure IS NOT NULL
		JOIN ` + shown("component") + ` c ON c.record_id = k.record_id AND c.role = k.role
		JOIN ` + shown("record") + ` r ON r.id = k.record_id JOIN ` + shown("source_file") + ` s ON s.id = c.source_id`
}

// failures is how many components the recipe failed on, by the seals.
func (s *Snapshot) failures() (n int64) {
	for key, seal := range s.seals {
		if key.name == sealedFailure {
			n += seal.rows
		}
	}
	return n
}

// wholeFailures looks whether the failures, and what is read with them, are what was stored.
func (s *Snapshot) wholeFailures(ctx context.Context) error {
	if err := s.whole(ctx, "computed", "component", "record", "source_file"); err != nil {
		return err
	}
	rows, err := s.tx.QueryContext(ctx, `SELECT k.record_id, k.role, k.computation_id, x.failure`+s.ofComputation()+` WHERE x.failure IS NOT NULL`)
	if err != nil {
		return fmt.Errorf("read failures: %w", err)
	}
	type row struct {
		roleOf
		computation int64
		text        string
	}
	found, err := collect(rows, func(v *row) []any { return []any{&v.record, &v.role, &v.computation, &v.text} })
	if err != nil {
		return fmt.Errorf("read failures: %w", err)
	}
	seen := s.attribution(sealedFailure, anyRole)
	for _, v := range found {
		seen.failure(v.roleOf, v.computation, v.text)
	}
	return seen.check()
}

// ofComputation joins the computations of the generation under the name x.
func (s *Snapshot) ofComputation() string {
	return ` FROM ` + s.shown("computed") + ` k CROSS JOIN computation x ON x.id = k.computation_id`
}
