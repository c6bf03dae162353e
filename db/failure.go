package db

import (
	"context"
	"fmt"
)

// AddFailure stores why the generation's recipe cannot be carried out on a component,
// which is left without spectra.
func (t *Tx) AddFailure(ctx context.Context, u Unsolved, generationID int64, reason string) error {
	err := t.exec(ctx, `INSERT OR REPLACE INTO failure (generation_id, record_id, role, reason) VALUES (?, ?, ?, ?)`, generationID, u.RecordID, u.Role, reason)
	if err != nil {
		return fmt.Errorf("store failure: %w", err)
	}
	return nil
}

// Failures counts the components on which the generation's recipe cannot be carried out.
func (t *Tx) Failures(ctx context.Context, generationID int64) (n int, err error) {
	err = t.tx.QueryRowContext(ctx, `SELECT count(*) FROM failure WHERE generation_id = ?`, generationID).Scan(&n)
	if err != nil {
		return 0, fmt.Errorf("count failures: %w", err)
	}
	return n, nil
}

// IsBarren reports whether the store holds components, and the generation no spectrum.
func (t *Tx) IsBarren(ctx context.Context, generationID int64) (barren bool, err error) {
	err = t.tx.QueryRowContext(ctx, `SELECT EXISTS (SELECT 1 FROM component) AND NOT EXISTS (SELECT 1 FROM spectrum WHERE generation_id = ?)`, generationID).Scan(&barren)
	if err != nil {
		return false, fmt.Errorf("look for spectra: %w", err)
	}
	return barren, nil
}

// failures are the components on which the published recipe cannot be carried out, as
// rejections of it.
const failures = `SELECT s.path, c.source_line, r.code || ' ' || c.role || ': ' || f.reason, s.sha256
	FROM failure f JOIN generation g ON g.id = f.generation_id AND g.state = 'published'
	JOIN component c ON c.record_id = f.record_id AND c.role = f.role
	JOIN record r ON r.id = f.record_id JOIN source_file s ON s.id = c.source_id`
