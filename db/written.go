package db

import (
	"context"
	"fmt"
)

// Written is a file that a run of a study wrote, as it was left.
type Written struct {
	Path       string
	Edition    int64  // of which it has an answer
	Asked      string // digest of what was asked
	Size       int64  // in bytes; -1 of a file that was left absent
	ModifiedNS int64  // since 1970
}

// Written returns the files that runs of the study wrote, by path.
func (s *Store) Written(ctx context.Context) (map[string]Written, error) {
	rows, err := s.read.QueryContext(ctx, `SELECT path, edition_id, asked, size_bytes, modified_ns FROM written`)
	if err != nil {
		return nil, fmt.Errorf("read files written: %w", explain(err))
	}
	found, err := collect(rows, func(w *Written) []any { return []any{&w.Path, &w.Edition, &w.Asked, &w.Size, &w.ModifiedNS} })
	if err != nil {
		return nil, fmt.Errorf("read files written: %w", err)
	}
	out := make(map[string]Written, len(found))
	for _, w := range found {
		out[w.Path] = w
	}
	return out, nil
}

// SetWritten replaces the files that were written.
func (t *Tx) SetWritten(ctx context.Context, files []Written) error {
	err := t.exec(ctx, `DELETE FROM written`)
	for i := range files {
		if err != nil {
			break
		}
		w := &files[i]
		err = t.exec(ctx, `INSERT INTO written (path, edition_id, asked, size_bytes, modified_ns) VALUES (?, ?, ?, ?, ?)`, w.Path, w.Edition, w.Asked, w.Size, w.ModifiedNS)
	}
	if err != nil {
		return fmt.Errorf("store files written: %w", err)
	}
	return nil
}
