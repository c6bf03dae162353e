package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"

	sqlite3 "modernc.org/sqlite/lib"
)

// Part is a store that is a shard, as one transaction sees it.
type Part struct {
	Shard
	// Generation is what was computed of it last.
	Generation Generation
	// Followed is the study that keeps it, the zero value for none.
	Followed  Followed
	path      string
	handle    *sql.DB
	tx        session
	sightings []byte // digest of what it saw
}

// OpenPart opens the shard at path for reading, and changes nothing about it. The error is
// ErrNoStore where there is no store, ErrOlder or ErrNewer where another program wrote it, and
// ErrUnfinished where its last run is at work or did not come to its end.
func OpenPart(ctx context.Context, path string) (*Part, error) {
	p, err := openPart(ctx, path)
	if codeOf(err) == sqlite3.SQLITE_CORRUPT {
		return nil, fmt.Errorf("open shard %s: %w; remove it and run its shard again", path, explain(err))
	}
	if err != nil {
		return nil, fmt.Errorf("open shard %s: %w", path, explain(err))
	}
	return p, nil
}

func openPart(ctx context.Context, path string) (*Part, error) {
	handle, err := openInspected(ctx, path)
	if err != nil {
		return nil, err
	}
	p := &Part{path: path, handle: handle}
	tx, err := handle.BeginTx(ctx, nil)
	if err == nil {
		p.tx = newSession(tx)
		err = p.describe(ctx)
	}
	if err != nil {
		return nil, errors.Join(err, p.Close())
	}
	return p, nil
}

// describe reads which part it is, and of which generation.
func (p *Part) describe(ctx context.Context) (err error) {
	var ok bool
	if p.Shard, ok, err = shardOf(ctx, p.tx); err != nil {
		return err
	}
	switch {
	case !ok:
		return errors.New("it is no shard, as ingest --shard makes them")
	case p.IsCombined():
		return fmt.Errorf("it is %s, and no shard itself", p.Shard)
	}
	t := &Tx{tx: p.tx}
	last, err := t.idOf(ctx, `SELECT coalesce((SELECT outcome = 'done' FROM run ORDER BY id DESC LIMIT 1), 0)`)
	if err != nil {
		return err
	}
	if last == 0 {
		return fmt.Errorf("%w: run %s again", ErrUnfinished, p.Shard)
	}
	p.Followed, _, err = t.Followed(ctx)
	if err = errors.Join(err, p.noteSightings(ctx)); err != nil {
		return err
	}
	p.Generation, ok, err = t.Current(ctx)
	if err == nil && !ok {
		err = errors.New("nothing was computed of it")
	}
	return err
}

// Path returns the path under which the shard was opened.
func (p *Part) Path() string { return p.path }

// Close releases the shard.
func (p *Part) Close() error {
	if p.tx.tx != nil {
		p.tx.tx.Rollback()
	}
	return p.handle.Close()
}

// damaged is the error of what the shard has lost.
func (p *Part) damaged(what string, err error) error {
	return fmt.Errorf("%s: %s: %w; remove the file and run %s again", p.path, what, err, p.Shard)
}
