package db

import (
	"context"
	"crypto/sha256"
	"database/sql"
	"encoding/hex"
	"errors"
	"fmt"
	"io/fs"
	"strconv"

	"swaybook/migrations"
)

// applicationID marks a SQLite file as a swaybook store ("sway").
const applicationID = 0x73776179

// ErrEdited says that a migration which the store has applied reads otherwise
// in this program.
var ErrEdited = errors.New("an applied migration differs from this program's")

type step struct {
	number int
	name   string
	sql    string
	sum    string
}

// steps are the embedded migrations in order.
func steps() ([]step, error) { return readSteps(migrations.FS) }

func readSteps(files fs.FS) ([]step, error) {
	names, err := fs.Glob(files, "*.sql") // sorted
	if err != nil {
		return nil, err
	}
	var out []step
	for i, name := range names {
		body, err := fs.ReadFile(files, name)
		if err != nil {
			return nil, err
		}
		if n, err := strconv.Atoi(name[:5]); err != nil || n != i+1 {
			return nil, fmt.Errorf("migration %s: expected number %05d", name, i+1)
		}
		sum := sha256.Sum256(body)
		out = append(out, step{number: i + 1, name: name, sql: string(body), sum: hex.EncodeToString(sum[:])})
	}
	return out, nil
}

// migrate applies the missing steps, each in one transaction with its mark. A
// second process that waits for the lock finds the work done.
func migrate(ctx context.Context, write *sql.DB, solver string) error {
	all, err := steps()
	if err != nil {
		return err
	}
	for {
		done, err := applyNext(ctx, write, all, solver)
		if err != nil || done {
			return err
		}
	}
}

func applyNext(ctx context.Context, write *sql.DB, all []step, solver string) (done bool, err error) {
	tx, err := write.BeginTx(ctx, nil)
	if err != nil {
		return false, err
	}
	defer tx.Rollback()
	applied, err := appliedSteps(ctx, tx)
	if err != nil {
		return false, err
	}
	if err := compareSteps(applied, all); err != nil {
		return false, err
	}
	if len(applied) == len(all) {
		return true, nil
	}
	if err := checkUsable(ctx, tx, len(applied), solver); err != nil {
		return false, err
	}
	next := all[len(applied)]
	if err := applyStep(ctx, tx, next); err != nil {
		return false, fmt.Errorf("migration %s: %w", next.name, err)
	}
	return false, tx.Commit()
}

// firstEditions is the number of the migration that made editions.
const firstEditions = 12

// checkUsable refuses a store that this program could not use once it is brought
// up to date: the program that made it still can.
func checkUsable(ctx context.Context, tx *sql.Tx, applied int, solver string) error {
	if applied == 0 || solver == AnySolver {
		return nil
	}
	var g Generation
	query := `SELECT solver FROM generation WHERE state = 'published'`
	if applied >= firstEditions {
		query = `SELECT g.solver FROM generation g JOIN edition e ON e.generation_id = g.id AND e.state = '` + EditionPublished + `'`
	}
	err := tx.QueryRowContext(ctx, query).Scan(&g.Solver)
	if errors.Is(err, sql.ErrNoRows) {
		return nil
	}
	return errors.Join(err, g.CheckSolver(solver))
}

func applyStep(ctx context.Context, tx *sql.Tx, s step) error {
	const ledger = `CREATE TABLE IF NOT EXISTS schema_step (
		number INTEGER PRIMARY KEY, name TEXT NOT NULL, sha256 TEXT NOT NULL) STRICT`
	if s.number == 1 {
		if err := mark(ctx, tx); err != nil {
			return err
		}
	}
	if _, err := tx.ExecContext(ctx, ledger); err != nil {
		return err
	}
	if _, err := tx.ExecContext(ctx, s.sql); err != nil {
		return err
	}
	_, err := tx.ExecContext(ctx, `INSERT INTO schema_step (number, name, sha256) VALUES (?, ?, ?)`, s.number, s.name, s.sum)
	return err
}

// claimable returns an error for a database that is neither a store nor empty.
func claimable(ctx context.Context, q queryer) error {
	var id, tables int
	// In one statement: another process may be making the store between two.
	const both = `SELECT (SELECT application_id FROM pragma_application_id), (SELECT count(*) FROM sqlite_schema)`
	if err := q.QueryRowContext(ctx, both).Scan(&id, &tables); err != nil {
		return err
	}
	if id != applicationID && tables > 0 {
		return errors.New("the file is a database of another program, not a swaybook store")
	}
	return nil
}

// mark claims an empty file for this program and refuses another's.
func mark(ctx context.Context, tx *sql.Tx) error {
	if err := claimable(ctx, tx); err != nil {
		return err
	}
	_, err := tx.ExecContext(ctx, fmt.Sprintf("PRAGMA application_id = %d", applicationID))
	return err
}

type queryer interface {
	QueryContext(ctx context.Context, query string, args ...any) (*sql.Rows, error)
	QueryRowContext(ctx context.Context, query string, args ...any) *sql.Row
}

func appliedSteps(ctx context.Context, q queryer) ([]step, error) {
	var id int
	if err := q.QueryRowContext(ctx, "PRAGMA application_id").Scan(&id); err != nil {
		return nil, err
	}
	if id != applicationID {
		return nil, nil
	}
	rows, err := q.QueryContext(ctx, `SELECT number, name, sha256 FROM schema_step ORDER BY number`)
	if err != nil {
		return nil, err
	}
	return collect(rows, func(s *step) []any { return []any{&s.number, &s.name, &s.sum} })
}

func compareSteps(applied, all []step) error {
	if len(applied) > len(all) {
		return fmt.Errorf("%w: it has schema %d, this program knows %d; use the program that wrote it or a later one",
			ErrNewer, len(applied), len(all))
	}
	for i, s := range applied {
		if s.sum != all[i].sum {
			return fmt.Errorf("%w: %s", ErrEdited, s.name)
		}
	}
	return nil
}

func isCurrent(ctx context.Context, q queryer) (bool, error) {
	all, err := steps()
	if err != nil {
		return false, err
	}
	applied, err := appliedSteps(ctx, q)
	if err != nil {
		return false, err
	}
	return len(applied) == len(all), compareSteps(applied, all)
}

// collect scans every row into a T and closes the rows.
func collect[T any](rows *sql.Rows, fields func(*T) []any) ([]T, error) {
	defer rows.Close()
	var out []T
	for rows.Next() {
		var v T
		if err := rows.Scan(fields(&v)...); err != nil {
			return nil, err
		}
		out = append(out, v)
	}
	return out, rows.Err()
}
