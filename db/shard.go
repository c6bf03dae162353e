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
	if s.IsCombined() {
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

// SetShard says which part of an archive the store shall have. One that has another part, or
// records and no part, is refused.
func (t *Tx) SetShard(ctx context.Context, s Shard) error {
	held, ok, err := t.Shard(ctx)
	switch {
	case err != nil || held == s:
		return err
	case ok:
		return fmt.Errorf("the store is %s, not %s: each part of an archive needs a store of its own", held, s)
	}
	used, err := t.idOf(ctx, `SELECT EXISTS (SELECT 1 FROM source_file) OR EXISTS (SELECT 1 FROM edition)`)
	if err != nil {
		return fmt.Errorf("set shard: %w", err)
	}
	if used != 0 {
		return fmt.Errorf("the store holds records already, but not as %s: name a new store", s)
	}
	if err := t.exec(ctx, `INSERT INTO shard (id, number, count, state) VALUES (1, ?, ?, ?)`, s.Number, s.Count, RebuildWhole); err != nil {
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
