package db

import (
	"context"
	"fmt"
)

// Followed is the study that keeps a store.
type Followed struct {
	Name, File string
	Decided    string // digest of what decides, beside the files, how these are read
	Whole      bool   // the working state is that of all files
}

// Seen is a file as it was before it was read.
type Seen struct {
	Path       string
	Size       int64
	ModifiedNS int64 // since 1970; -1 where it may have changed again unseen
}

// Followed returns the study that keeps the store; ok is false where none does.
func (t *Tx) Followed(ctx context.Context) (f Followed, ok bool, err error) {
	rows, err := t.tx.QueryContext(ctx, `SELECT name, file, decided, whole FROM followed`)
	if err != nil {
		return f, false, fmt.Errorf("read study: %w", err)
	}
	found, err := collect(rows, func(f *Followed) []any { return []any{&f.Name, &f.File, &f.Decided, &f.Whole} })
	if err != nil || len(found) == 0 {
		return f, false, err
	}
	return found[0], true, nil
}

// Follow says which study keeps the store.
func (t *Tx) Follow(ctx context.Context, f Followed) error {
	err := t.exec(ctx, `INSERT OR REPLACE INTO followed (id, name, file, decided, whole) VALUES (1, ?, ?, ?, ?)`, f.Name, f.File, f.Decided, f.Whole)
	if err != nil {
		return fmt.Errorf("store study: %w", err)
	}
	return nil
}

// Seen returns the files that were last read, by path.
func (t *Tx) Seen(ctx context.Context) ([]Seen, error) {
	rows, err := t.tx.QueryContext(ctx, `SELECT path, size_bytes, modified_ns FROM seen ORDER BY path`)
	if err != nil {
		return nil, fmt.Errorf("read files seen: %w", err)
	}
	return collect(rows, func(s *Seen) []any { return []any{&s.Path, &s.Size, &s.ModifiedNS} })
}

// SetSeen replaces the files that were last read.
func (t *Tx) SetSeen(ctx context.Context, files []Seen) error {
	err := t.exec(ctx, `DELETE FROM seen`)
	for i := range files {
		if err != nil {
			break
		}
		err = t.exec(ctx, `INSERT INTO seen (path, size_bytes, modified_ns) VALUES (?, ?, ?)`, files[i].Path, files[i].Size, files[i].ModifiedNS)
	}
	if err != nil {
		return fmt.Errorf("store files seen: %w", err)
	}
	return nil
}

// ClearWorking empties the working state, so that a run can read its files as into a new
// store. What was computed stays, and so do samples and editions.
func (t *Tx) ClearWorking(ctx context.Context) error {
	if err := t.exec(ctx, `UPDATE component SET motion_id = NULL WHERE motion_id IS NOT NULL`); err != nil {
		return fmt.Errorf("clear: %w", err)
	}
	if err := t.exec(ctx, `UPDATE event SET primary_id = NULL WHERE primary_id IS NOT NULL`); err != nil {
		return fmt.Errorf("clear: %w", err)
	}
	for _, table := range []string{"likeness", "finding", "computed", "component", "statement", "quake", "withdrawn_quake", "rejection", "record", "station", "event", "source_file"} {
		if err := t.exec(ctx, `DELETE FROM `+table); err != nil {
			return fmt.Errorf("clear %s: %w", table, err)
		}
	}
	return nil
}
