package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"sync"
)

// Fault is something in a store that is not as it should be.
type Fault struct {
	Table  string `json:"table"`
	Record string `json:"record,omitempty"` // its code
	Role   string `json:"role,omitempty"`
	Text   string `json:"fault"`
}

func (f Fault) String() string {
	text := f.Table
	if f.Record != "" {
		text += " " + f.Record
	}
	if f.Role != "" {
		text += " " + f.Role
	}
	return text + ": " + f.Text
}

// Inspection looks for faults in one state of a store, which it cannot change. Of what is
// damaged it reads as much as there is; only an error that is no fault of the store ends it.
type Inspection struct {
	tx    *sql.Tx
	found func(Fault)

	newest    Edition // of a store without editions the zero value
	published Edition
	described map[string][]described // what components say, by the digest of their samples
	tiles     tileReader

	mutex sync.Mutex
}

// ErrOlder says that a store was made by an earlier program, and nobody has brought it up
// to date yet.
var ErrOlder = errors.New("the store was made by an earlier program; any question brings it up to date")

// Inspect calls f with an inspection of the store at path that calls found with every
// fault. Neither the file nor its log is written to; what lacks migrations is not brought up
// to date, but refused: ErrOlder.
func Inspect(ctx context.Context, path string, found func(Fault), f func(*Inspection) error) error {
	handle, err := openInspected(ctx, path)
	if err != nil {
		return fmt.Errorf("open store %s: %w", path, explain(err))
	}
	defer handle.Close()
	tx, err := handle.BeginTx(ctx, nil)
	if err != nil {
		return fmt.Errorf("begin reading: %w", explain(err))
	}
	defer tx.Rollback()
	i := &Inspection{tx: tx, tiles: tileReader{q: tx}}
	i.found = func(fault Fault) {
		i.mutex.Lock()
		defer i.mutex.Unlock()
		found(fault)
	}
	return f(i)
}

// Report notes a fault that was found elsewhere.
func (i *Inspection) Report(f Fault) { i.found(f) }

// openInspected opens a store without ever carrying over a log, which the last to close a
// handle that may write would do. Without a log there is nothing to carry over, and only a
// handle that may write leaves no empty log behind.
func openInspected(ctx context.Context, path string) (*sql.DB, error) {
	if err := refuseFolder(path); err != nil {
		return nil, err
	}
	if isAbsent(path) {
		return nil, ErrNoStore
	}
	mode := "rw"
	if hasLog(path) {
		mode = "ro"
	}
	handle, err := openCurrent(ctx, dsn(path, mode, busyTimeoutMS, "_pragma=query_only(1)"))
	if isReadOnly(err) && mode == "rw" {
		return openCurrent(ctx, dsn(path, "ro", busyTimeoutMS, frozen))
	}
	return handle, err
}

func openCurrent(ctx context.Context, name string) (*sql.DB, error) {
	handle, err := sql.Open("sqlite", name)
	if err != nil {
		return nil, err
	}
	err = claimable(ctx, handle)
	if err == nil {
		var current bool
		if current, err = isCurrent(ctx, handle); err == nil && !current {
			err = ErrOlder
		}
	}
	if err != nil {
		return nil, errors.Join(err, handle.Close())
	}
	return handle, nil
}

// look runs a query and calls f with what each row has, as far as it can be read: what
// SQLite cannot read is a fault of the table. Only the end of the context is an error.
func look[T any](ctx context.Context, i *Inspection, table, query string, args []any, fields func(*T) []any, f func(*T)) error {
	rows, err := i.tx.QueryContext(ctx, query, args...)
	if err == nil {
		defer rows.Close()
		for rows.Next() {
			var v T
			if err = rows.Scan(fields(&v)...); err != nil {
				break
			}
			f(&v)
		}
		err = errors.Join(err, rows.Err())
	}
	if ctx.Err() != nil {
		return ctx.Err()
	}
	if err != nil {
		i.found(Fault{Table: table, Text: "cannot be read: " + err.Error()})
	}
	return nil
}

// lookFor reports each text that a query gives as a fault of the table.
func (i *Inspection) lookFor(ctx context.Context, table, query string, args ...any) error {
	return look(ctx, i, table, query, args, func(s *string) []any { return []any{s} }, func(s *string) {
		i.found(Fault{Table: table, Text: *s})
	})
}
