package db

import (
	"context"
	"errors"
	"fmt"
	"math"
	"strings"
)

// tables names what to read for a table of the working state: that itself, or its rows in
// an edition.
type tables func(name string) string

// working are the tables that runs write, of computed those of a generation.
func working(generationID int64) tables {
	return func(name string) string {
		if name == "computed" {
			return fmt.Sprintf("(SELECT * FROM computed WHERE generation_id = %d)", generationID)
		}
		return name
	}
}

// open is until of the rows that the newest edition shows.
const open int64 = math.MaxInt64

// ofEdition are the rows of an edition. Those of the newest stand together.
func ofEdition(id int64, isNewest bool) tables {
	return func(name string) string {
		if isNewest {
			return fmt.Sprintf("(SELECT * FROM edition_%s WHERE until = %d)", name, open)
		}
		return fmt.Sprintf("(SELECT * FROM edition_%s WHERE until > %d AND since <= %[2]d)", name, id)
	}
}

// shownTable is a table of the working state that editions have too, and its key.
type shownTable struct {
	name string
	key  []string
}

var shownTables = []shownTable{
	{"event", []string{"id"}}, {"station", []string{"id"}}, {"record", []string{"id"}}, {"source_file", []string{"id"}},
	{"component", []string{"id"}}, {"finding", []string{"component_id", "flag"}}, {"computed", []string{"role", "record_id"}},
	{"rejection", []string{"id"}}, {"statement", []string{"subject", "subject_id", "attribute", "stated_by", "value"}},
	{"likeness", []string{"first_id", "second_id"}},
}

// isPublished is the condition of the one edition that is. The plus keeps its index from
// being used, which is there so that there is but one: where it is damaged it leads to another.
const isPublished = `+state = '` + EditionPublished + `'`

// Edition is what a run left for questions.
type Edition struct {
	ID           int64 // the run's
	GenerationID int64
	State        string
}

// The states of editions.
const (
	EditionHeld       = "held"
	EditionPublished  = "published"
	EditionSuperseded = "superseded"
)

// PutEdition makes the working state, with what the generation has of it, the edition of a
// run; held, until it is published. It returns false where the newest edition is that
// already.
func (t *Tx) PutEdition(ctx context.Context, runID, generationID int64) (isNew bool, err error) {
	newest, ok, err := t.NewestEdition(ctx)
	if err != nil {
		return false, err
	}
	isNew = !ok || newest.GenerationID != generationID
	for _, table := range shownTables {
		changed, err := t.show(ctx, table, runID, working(generationID)(table.name))
		if err != nil {
			return false, fmt.Errorf("make edition: %s: %w", table.name, err)
		}
		isNew = isNew || changed
	}
	t.hasEditions = true
	if !isNew {
		return false, nil
	}
	if err := t.exec(ctx, `INSERT INTO edition (id, generation_id, state) VALUES (?, ?, ?)`, runID, generationID, EditionHeld); err != nil {
		return false, fmt.Errorf("make edition: %w", err)
	}
	if err := t.sealEdition(ctx, runID); err != nil {
		return false, err
	}
	t.made = runID
	return true, nil
}

// show ends the rows of the newest edition that are no longer those of the table, and
// begins what is new, in an edition. It reports whether there was any.
func (t *Tx) show(ctx context.Context, table shownTable, id int64, from string) (changed bool, err error) {
	columns, err := columnsOf(ctx, t.tx, "edition_"+table.name)
	if err != nil {
		return false, err
	}
	equal := func(names []string, with string) string {
		var parts []string
		for _, name := range names {
			parts = append(parts, "s."+name+" "+with+" e."+name)
		}
		return strings.Join(parts, " AND ")
	}
	edition := "edition_" + table.name
	ended, err := t.tx.ExecContext(ctx, fmt.Sprintf(`UPDATE %s AS e SET until = ?1 WHERE until = %d AND NOT EXISTS (SELECT 1 FROM %s s WHERE %s AND %s)`,
		edition, open, from, equal(table.key, "="), equal(columns, "IS")), id)
	if err != nil {
		return false, err
	}
	list := strings.Join(columns, ", ")
	begun, err := t.tx.ExecContext(ctx, fmt.Sprintf(`INSERT INTO %[1]s (until, since, %[2]s) SELECT %[3]d, ?1, %[2]s FROM %[4]s s
		WHERE NOT EXISTS (SELECT 1 FROM %[1]s e WHERE e.until = %[3]d AND %[5]s)`, edition, list, open, from, equal(table.key, "=")), id)
	if err != nil {
		return false, err
	}
	n, errEnded := ended.RowsAffected()
	m, errBegun := begun.RowsAffected()
	return n+m > 0, errors.Join(errEnded, errBegun)
}

// columnsOf are the columns of an edition's table, but for its times.
func columnsOf(ctx context.Context, q queryer, table string) ([]string, error) {
	rows, err := q.QueryContext(ctx, `SELECT name FROM pragma_table_info(?) WHERE name NOT IN ('since', 'until')`, table)
	if err != nil {
		return nil, err
	}
	return collect(rows, func(name *string) []any { return []any{name} })
}

// Publish makes an edition the one that questions read.
func (t *Tx) Publish(ctx context.Context, id int64) error {
	err := t.exec(ctx, `UPDATE edition SET state = '`+EditionSuperseded+`' WHERE state = '`+EditionPublished+`' AND id <> ?`, id)
	if err == nil {
		err = t.exec(ctx, `UPDATE edition SET state = '`+EditionPublished+`' WHERE id = ?`, id)
	}
	if err != nil {
		return fmt.Errorf("publish edition: %w", err)
	}
	t.hasEditions = true
	return nil
}

// NewestEdition returns the edition of the last run that made one; ok is false where there
// is none.
func (t *Tx) NewestEdition(ctx context.Context) (e Edition, ok bool, err error) {
	return editionBy(ctx, t.tx, `1 ORDER BY id DESC LIMIT 1`)
}

// PublishRun publishes the edition that a run left, which must be of this solver, and returns
// it and what was published before; ok is false where nothing was. The error is a
// *NoEditionError where that edition is not kept.
func (t *Tx) PublishRun(ctx context.Context, runID int64, solver string) (e, before Edition, ok bool, err error) {
	e, found, err := editionBy(ctx, t.tx, `id = (SELECT `+editionOfRun+` FROM run WHERE id = ? AND `+isWholeRun+`)`, runID)
	if err == nil && !found {
		err = noEdition(ctx, t.tx, runID)
	}
	if err != nil {
		return e, before, false, err
	}
	g, err := generation(ctx, t.tx, e.GenerationID)
	if err == nil {
		err = g.CheckSolver(solver) // else nobody could read it
	}
	if err == nil {
		before, ok, err = t.PublishedEdition(ctx)
	}
	if err == nil {
		err = t.Publish(ctx, e.ID)
	}
	return e, before, ok, err
}

// PublishedEdition returns the edition that questions read; ok is false where there is none.
func (t *Tx) PublishedEdition(ctx context.Context) (e Edition, ok bool, err error) {
	return editionBy(ctx, t.tx, isPublished)
}

// HeldEdition returns the newest edition where it is held back; ok is false where it is not.
func (s *Store) HeldEdition(ctx context.Context) (e Edition, ok bool, err error) {
	return editionBy(ctx, s.read, `id = (SELECT max(id) FROM edition) AND state = ?`, EditionHeld)
}

// editionBy returns the edition that meets a condition.
func editionBy(ctx context.Context, q queryer, condition string, args ...any) (e Edition, ok bool, err error) {
	rows, err := q.QueryContext(ctx, `SELECT id, generation_id, state FROM edition WHERE `+condition, args...)
	if err != nil {
		return e, false, fmt.Errorf("read edition: %w", err)
	}
	found, err := collect(rows, func(e *Edition) []any { return []any{&e.ID, &e.GenerationID, &e.State} })
	if err != nil || len(found) == 0 {
		return e, false, err
	}
	return found[0], true, nil
}
