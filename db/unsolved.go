package db

import (
	"context"
	"fmt"
)

// Unsolved is a component without a spectrum in a generation. Failure says why that cannot
// be had, "" where nobody knows that it cannot.
type Unsolved struct {
	ComponentID, RecordID int64
	Code                  string // the record's
	Role                  string
	Failure               string
}

// Unsolved returns the components that lack their spectra in the generation and are not
// known to fail, in the order in which they were stored.
func (s *Store) Unsolved(ctx context.Context, generationID int64) ([]Unsolved, error) {
	return unsolved(ctx, s.read, working(generationID), 0, "AND x.failure IS NULL")
}

// Unsolved returns all components that lack their spectra in the snapshot's generation. As a
// rule there are none, which the seals tell.
func (s *Snapshot) Unsolved(ctx context.Context) ([]Unsolved, error) {
	lacking := s.failures()
	for key, seal := range s.seals {
		switch {
		case key.name == "component":
			lacking += seal.rows
		case key.name == "computed" && componentRole(key.part):
			lacking -= seal.rows
		}
	}
	if lacking == 0 {
		return nil, nil
	}
	if err := s.wholeFailures(ctx); err != nil {
		return nil, err
	}
	return unsolved(ctx, s.tx, s.shown, 0, "")
}

// IsUnsolved reports whether the record still holds this very component, and lacks its
// spectra.
func (t *Tx) IsUnsolved(ctx context.Context, generationID int64, u Unsolved) (bool, error) {
	found, err := unsolved(ctx, t.tx, working(generationID), t.begun.id, "AND c.id = ?", u.ComponentID)
	return len(found) == 1 && found[0] == u, err
}

// unsolved looks for what is computed of each component, and whether its spectra are there, or
// in the tile that is begun: what was lost is computed again.
func unsolved(ctx context.Context, q queryer, shown tables, begun int64, condition string, args ...any) ([]Unsolved, error) {
	rows, err := q.QueryContext(ctx, `SELECT c.id, c.record_id, r.code, c.role, coalesce(x.failure, '') FROM `+shown("component")+` c JOIN `+shown("record")+` r ON r.id = c.record_id
		LEFT JOIN `+shown("computed")+` k ON k.record_id = c.record_id AND k.role = c.role
		LEFT JOIN computation x ON x.id = k.computation_id
		WHERE (x.id IS NULL OR x.failure IS NOT NULL OR NOT `+hasSpectra+`) `+condition+` ORDER BY c.id`, append([]any{begun}, args...)...)
	if err != nil {
		return nil, fmt.Errorf("find components without spectrum: %w", err)
	}
	found, err := collect(rows, func(u *Unsolved) []any { return []any{&u.ComponentID, &u.RecordID, &u.Code, &u.Role, &u.Failure} })
	if err != nil {
		return nil, fmt.Errorf("find components without spectrum: %w", err)
	}
	return found, nil
}

// ReadUnsolved reads what is stored of a component's samples.
func (s *Store) ReadUnsolved(ctx context.Context, u Unsolved) (StoredMotion, error) {
	m, err := readSeries(ctx, s.read, working(0), `c.id = ?`, u.ComponentID)
	if err != nil {
		return m, fmt.Errorf("record %s: %w", u.Code, err)
	}
	return m, nil
}
