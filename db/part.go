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
	tiles     tileReader
	sightings []byte // digest of what it saw
}

// OpenPart opens the shard at path for reading, and changes nothing about it. The error is
// ErrNoStore where there is no store, ErrOlder or ErrNewer where another program wrote it, and
// ErrUnfinished where its last run is at work or did not come to its end.
func OpenPart(ctx context.Context, path string) (*Part, error) {
	p, err := openPart(ctx, path)
	if _, isNamed := errors.AsType[*unreadError](err); isNamed {
		return nil, fmt.Errorf("open shard %w", err)
	}
	if err != nil {
		return nil, fmt.Errorf("open shard %s: %w", path, explain(err))
	}
	return p, nil
}

func openPart(ctx context.Context, path string) (*Part, error) {
	handle, err := openInspected(ctx, path)
	p := &Part{path: path, handle: handle}
	if codeOf(err) == sqlite3.SQLITE_CORRUPT {
		return nil, p.unread(ctx, err)
	}
	if err != nil {
		return nil, err
	}
	tx, err := handle.BeginTx(ctx, nil)
	if err == nil {
		p.tx = newSession(tx)
		p.tiles.q = p.tx
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
		return p.unread(ctx, err)
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
		return p.unread(ctx, err)
	}
	if last == 0 {
		return fmt.Errorf("%w: run %s again", ErrUnfinished, p.Shard)
	}
	p.Followed, _, err = t.Followed(ctx)
	if err = errors.Join(err, p.noteSightings(ctx)); err != nil {
		return p.unread(ctx, err)
	}
	p.Generation, ok, err = t.Current(ctx)
	if err == nil && !ok {
		return errors.New("nothing was computed of it")
	}
	return p.unread(ctx, err)
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
	shard := "its shard"
	if p.Count > 0 {
		shard = p.Shard.String()
	}
	return fmt.Errorf("%s: %s: %w; swaybook verify lists all that is damaged; remove the file and run %s again", p.path, what, err, shard)
}

// unreadError says that the file of a shard is damaged, and names it.
type unreadError struct{ err error }

func (e *unreadError) Error() string { return e.err.Error() }
func (e *unreadError) Unwrap() error { return e.err }

// unread is the error of a read of the shard, by the name of its file. Where SQLite has nothing
// against the pages, but something else stands in them than was written, a page is in the
// place of another one.
func (p *Part) unread(ctx context.Context, err error) error {
	if err == nil || ctx.Err() != nil {
		return err
	}
	switch codeOf(err) {
	case sqlite3.SQLITE_OK, sqlite3.SQLITE_CORRUPT:
		return &unreadError{p.damaged("the file is damaged, or not all of it is there", err)}
	}
	return fmt.Errorf("%s: %w", p.path, explain(err))
}
