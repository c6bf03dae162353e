package db

import (
	"context"
	"database/sql"
)

// session runs the statements of one write transaction. A batch repeats two
// dozen statements for every component, and to compile one costs as much as to
// run it, so each is compiled once; they are released with the transaction. A
// statement's rows must have been read before it runs again.
type session struct {
	tx       *sql.Tx
	compiled map[string]*sql.Stmt
}

func newSession(tx *sql.Tx) session {
	return session{tx: tx, compiled: map[string]*sql.Stmt{}}
}

func (s session) statement(ctx context.Context, query string) (*sql.Stmt, error) {
	if stmt, ok := s.compiled[query]; ok {
		return stmt, nil
	}
	stmt, err := s.tx.PrepareContext(ctx, query)
	if err == nil {
		s.compiled[query] = stmt
	}
	return stmt, err
}

// ExecContext runs a statement that returns no rows.
func (s session) ExecContext(ctx context.Context, query string, args ...any) (sql.Result, error) {
	stmt, err := s.statement(ctx, query)
	if err != nil {
		return nil, err
	}
	return stmt.ExecContext(ctx, args...)
}

// QueryContext runs a statement that returns rows.
func (s session) QueryContext(ctx context.Context, query string, args ...any) (*sql.Rows, error) {
	stmt, err := s.statement(ctx, query)
	if err != nil {
		return nil, err
	}
	return stmt.QueryContext(ctx, args...)
}

// QueryRowContext runs a statement that returns one row.
func (s session) QueryRowContext(ctx context.Context, query string, args ...any) *sql.Row {
	stmt, err := s.statement(ctx, query)
	if err != nil {
		return s.tx.QueryRowContext(ctx, query, args...) // which has the error to give
	}
	return stmt.QueryRowContext(ctx, args...)
}
