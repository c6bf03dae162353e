package db

import (
	"bytes"
	"context"
	"crypto/sha256"
	"database/sql"
	"errors"
	"fmt"
)

// PutSighting keeps, in a shard, that a file was seen: sum is of its content and of what
// decided how it was read, in place of what a run before saw.
func (t *Tx) PutSighting(ctx context.Context, key IntakeKey, sum []byte) error {
	if err := t.exec(ctx, `INSERT OR REPLACE INTO sighting (path, member, sum) VALUES (?, ?, ?)`, key.Path, key.Member, sum); err != nil {
		return fmt.Errorf("note that %s was seen: %w", key.Path, err)
	}
	return nil
}

// sightings are all that a shard saw, in the order of their keys, one at a time.
type sightings struct {
	rows *sql.Rows
	key  IntakeKey
	sum  []byte
	has  bool
}

func (p *Part) openSightings(ctx context.Context) (*sightings, error) {
	rows, err := p.tx.QueryContext(ctx, `SELECT path, member, sum FROM sighting ORDER BY path, member`)
	if err != nil {
		return nil, err
	}
	return &sightings{rows: rows}, nil
}

// next goes on to the next one; has is false behind the last.
func (s *sightings) next() error {
	if s.has = s.rows.Next(); !s.has {
		return errors.Join(s.rows.Err(), s.rows.Close())
	}
	var sum sql.RawBytes
	err := s.rows.Scan(&s.key.Path, &s.key.Member, &sum)
	s.sum = append(s.sum[:0], sum...)
	return err
}

// noteSightings takes the digest of all that the shard saw.
func (p *Part) noteSightings(ctx context.Context) error {
	all, err := p.openSightings(ctx)
	if err != nil {
		return err
	}
	defer all.rows.Close()
	h := sha256.New()
	for err = all.next(); err == nil && all.has; err = all.next() {
		fmt.Fprintf(h, "%q %d %x\n", all.key.Path, all.key.Member, all.sum)
	}
	p.sightings = h.Sum(nil)
	return err
}

// SawAlike reports whether two shards saw the same files, with the same content, and read
// them alike.
func (p *Part) SawAlike(q *Part) bool { return bytes.Equal(p.sightings, q.sightings) }

// Unseen are the files that some of several shards saw, and others did not.
type Unseen struct {
	Files int
	First string // its path
}

// CompareSightings compares what shards saw, as far as it can be that they saw the same
// archive while it grew or shrank: the error names a file that two read with different content,
// or otherwise.
func CompareSightings(ctx context.Context, parts []*Part) (out Unseen, err error) {
	heads := make([]*sightings, len(parts))
	for i, p := range parts {
		s, err := p.openSightings(ctx)
		if err == nil {
			defer s.rows.Close()
			err = s.next()
		}
		if err != nil {
			return out, fmt.Errorf("what was seen: %w", p.unread(ctx, err))
		}
		heads[i] = s
	}
	for {
		least := -1
		for i, s := range heads {
			if s.has && (least < 0 || s.key.isBefore(heads[least].key)) {
				least = i
			}
		}
		if least < 0 {
			return out, nil
		}
		if err := out.add(ctx, parts, heads, least); err != nil {
			return out, err
		}
	}
}

// add counts the least of the files that come next, and goes on behind it.
func (u *Unseen) add(ctx context.Context, parts []*Part, heads []*sightings, least int) error {
	key, sum, n := heads[least].key, bytes.Clone(heads[least].sum), 0
	for i, s := range heads {
		if !s.has || s.key != key {
			continue
		}
		if !bytes.Equal(s.sum, sum) {
			return fmt.Errorf("%s: %s and %s read it with different content, or with another catalogue, metadata, layouts, unit or step, or by another program: run both again", key.Path, parts[least].Path(), parts[i].Path())
		}
		n++
		if err := s.next(); err != nil {
			return fmt.Errorf("what was seen: %w", parts[i].unread(ctx, err))
		}
	}
	if n < len(heads) {
		if u.Files == 0 {
			u.First = key.Path
		}
		u.Files++
	}
	return nil
}

// isBefore is the order in which SQLite has keys, and files are read.
func (k IntakeKey) isBefore(other IntakeKey) bool {
	return k.Path < other.Path || k.Path == other.Path && k.Member < other.Member
}

// GatheredShard is a shard of which a store has something.
type GatheredShard struct {
	Number  int
	IsWhole bool // false while it is being taken over
	saw     []byte
}

// SawAlike reports whether it saw what the shard saw, when it was taken over.
func (g GatheredShard) SawAlike(p *Part) bool { return bytes.Equal(g.saw, p.sightings) }

// BeginGathering notes that a shard is about to be taken over.
func (t *Tx) BeginGathering(ctx context.Context, shard int) error {
	return noted(t.exec(ctx, `INSERT INTO gathered (shard, is_whole) VALUES (?, 0) ON CONFLICT DO UPDATE SET is_whole = 0`, shard))
}

// endGathering notes that what the store has of a shard is what the shard has.
func (t *Tx) endGathering(ctx context.Context, p *Part, s intakeSum) error {
	return noted(t.exec(ctx, `UPDATE gathered SET is_whole = 1, sightings = ?, files = ?, keys = ? WHERE shard = ?`, p.sightings, s.files, s.keys, p.Number))
}

func noted(err error) error {
	if err != nil {
		return fmt.Errorf("note what is taken over: %w", err)
	}
	return nil
}

// Gathered returns the shards of which the store has something, by number.
func (t *Tx) Gathered(ctx context.Context) ([]GatheredShard, error) {
	return gatheredShards(ctx, t.tx)
}

// GatheredShards returns the shards of which the store has something, by number.
func (s *Store) GatheredShards(ctx context.Context) ([]GatheredShard, error) {
	return gatheredShards(ctx, s.read)
}

func gatheredShards(ctx context.Context, q queryer) ([]GatheredShard, error) {
	rows, err := q.QueryContext(ctx, `SELECT shard, is_whole, coalesce(sightings, x'') FROM gathered ORDER BY shard`)
	if err != nil {
		return nil, fmt.Errorf("read what is combined: %w", explain(err))
	}
	return collect(rows, func(g *GatheredShard) []any { return []any{&g.Number, &g.IsWhole, &g.saw} })
}
