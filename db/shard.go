package db

import (
	"context"
	"errors"
	"fmt"
)

// Shard is which part of an archive a store has: number of count, from 1, or, where number is
// 0, what was combined of such stores.
type Shard struct{ Number, Count int }

// IsCombined reports whether the store is one that shards are combined into.
func (s Shard) IsCombined() bool { return s.Number == 0 }

func (s Shard) String() string {
	switch {
	case s.Count == 0:
		return "no shard"
	case s.IsCombined():
		return fmt.Sprintf("what is combined of %d shards", s.Count)
	}
	return fmt.Sprintf("shard %d of %d", s.Number, s.Count)
}

// How far the working state of a store that combines shards is that of their intake.
const (
	RebuildWhole   = "whole"
	RebuildChanged = "changed"    // other intake came in
	RebuildBegun   = "rebuilding" // it is being made anew
)

// Rebuild is how far the working state is made of the intake.
type Rebuild struct {
	State   string
	Reached IntakeKey // the last that is in the working state, while it is being made anew
}

// Shard returns which part of an archive the store has; ok is false where it has all that it
// was given, as most do.
func (t *Tx) Shard(ctx context.Context) (s Shard, ok bool, err error) { return shardOf(ctx, t.tx) }

func shardOf(ctx context.Context, q queryer) (s Shard, ok bool, err error) {
	rows, err := q.QueryContext(ctx, `SELECT number, count FROM shard`)
	if err != nil {
		return s, false, fmt.Errorf("read shard: %w", err)
	}
	found, err := collect(rows, func(s *Shard) []any { return []any{&s.Number, &s.Count} })
	if err != nil || len(found) == 0 {
		return s, false, err
	}
	return found[0], true, nil
}

// IsUsed reports whether anything was read into the store, or published.
func (t *Tx) IsUsed(ctx context.Context) (bool, error) {
	used, err := t.idOf(ctx, `SELECT EXISTS (SELECT 1 FROM source_file) OR EXISTS (SELECT 1 FROM edition)`)
	if err != nil {
		return false, fmt.Errorf("look for records: %w", err)
	}
	return used != 0, nil
}

// SetShard says which part of an archive the store is to have from now on; the zero value has
// it be one that has all that it is given. What was kept for combining is forgotten, the
// working state is left for the run to make anew.
func (t *Tx) SetShard(ctx context.Context, s Shard) error {
	err := errors.Join(t.ClearIntake(ctx), t.exec(ctx, `DELETE FROM shard`))
	if err == nil && s.Count > 0 {
		err = t.exec(ctx, `INSERT INTO shard (id, number, count, state) VALUES (1, ?, ?, ?)`, s.Number, s.Count, RebuildChanged)
	}
	if err != nil {
		return fmt.Errorf("set shard: %w", err)
	}
	return nil
}

// Rebuild returns how far the working state is made of the intake.
func (t *Tx) Rebuild(ctx context.Context) (r Rebuild, err error) {
	err = t.tx.QueryRowContext(ctx, `SELECT state, reached_path, reached_member FROM shard`).Scan(&r.State, &r.Reached.Path, &r.Reached.Member)
	if err != nil {
		return r, fmt.Errorf("read shard: %w", err)
	}
	return r, nil
}

// SetRebuild notes how far the working state is made of the intake.
func (t *Tx) SetRebuild(ctx context.Context, r Rebuild) error {
	if err := t.exec(ctx, `UPDATE shard SET state = ?, reached_path = ?, reached_member = ?`, r.State, r.Reached.Path, r.Reached.Member); err != nil {
		return fmt.Errorf("note what is combined: %w", err)
	}
	return nil
}

// ErrUnfinished says that a shard's last run did not come to its end.
var ErrUnfinished = errors.New("its last run did not come to its end")
