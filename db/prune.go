package db

import (
	"context"
	"errors"
	"fmt"
	"slices"
	"strings"
)

// Pruned is what Prune removed.
type Pruned struct {
	Editions     []int64 // ids of those that are gone
	Rows         int     // of editions
	Computations int
	Spectra      int
	Series       int
	Generations  int
	OffGridRows  int
	Blocks       int // of oscillators off the grid
}

// A batch removes so many computations or series, which is some tens of megabytes and well
// under a second, as a batch of a run is: what waits for the lock need not wait long.
const (
	prunedComputations = 500
	prunedSeries       = 500
)

// Prune removes all editions but the last ones, as many as keep says, and the published one,
// and then whatever neither these nor the working state have. Of the working state it takes
// what was computed in generations of which an edition went and none is kept; one that no
// edition had yet is work in progress. It goes in batches, each of which is done whole or
// not at all: what a Prune that was stopped left, the next one removes. No run may be at
// work.
func (s *Store) Prune(ctx context.Context, keep int) (p Pruned, err error) {
	if keep < 1 {
		return p, fmt.Errorf("keep %d editions: want at least one", keep)
	}
	err = s.Update(ctx, func(tx *Tx) error { return tx.pruneEditions(ctx, keep, &p) })
	if err == nil {
		err = s.inBatches(ctx, prunedComputations, unusedComputations, func(tx *Tx, ids string) error { return tx.pruneComputations(ctx, ids, &p) })
	}
	if err == nil {
		err = s.inBatches(ctx, prunedSeries, unusedSeries, func(tx *Tx, ids string) error {
			return tx.remove(ctx, &p.Series, `series WHERE id IN (SELECT value FROM json_each(?))`, ids)
		})
	}
	if err == nil {
		err = s.pruneBlocks(ctx, &p)
	}
	if err == nil {
		err = s.Update(ctx, func(tx *Tx) error { return tx.pruneGenerations(ctx, &p) })
	}
	if err != nil {
		return p, fmt.Errorf("prune: %w", err)
	}
	return p, nil
}

// keptRow says of a row of an edition's table whether an edition that is kept shows it.
const keptRow = `EXISTS (SELECT 1 FROM edition e WHERE e.id >= since AND e.id < until)`

// pruneEditions removes editions and the rows that nothing shows any more.
func (t *Tx) pruneEditions(ctx context.Context, keep int, p *Pruned) error {
	rows, err := t.tx.QueryContext(ctx, `SELECT id FROM edition WHERE state <> '`+EditionPublished+`' AND id NOT IN (SELECT id FROM edition ORDER BY id DESC LIMIT ?) ORDER BY id`, keep)
	if err != nil {
		return err
	}
	if p.Editions, err = collect(rows, func(id *int64) []any { return []any{id} }); err != nil {
		return err
	}
	gone := idList(p.Editions)
	for _, statement := range []string{
		`DELETE FROM computed WHERE generation_id IN (SELECT generation_id FROM edition WHERE id IN (SELECT value FROM json_each(?1)))
			AND generation_id NOT IN (SELECT generation_id FROM edition WHERE id NOT IN (SELECT value FROM json_each(?1)))`,
		`UPDATE run SET edition_id = NULL WHERE edition_id IN (SELECT value FROM json_each(?))`,
		`DELETE FROM edition_column WHERE edition_id IN (SELECT value FROM json_each(?))`,
		`DELETE FROM edition_seal WHERE edition_id IN (SELECT value FROM json_each(?))`,
		`DELETE FROM edition WHERE id IN (SELECT value FROM json_each(?))`,
	} {
		if err := t.exec(ctx, statement, gone); err != nil {
			return err
		}
	}
	for _, table := range shownTables {
		if err := t.remove(ctx, &p.Rows, fmt.Sprintf(`edition_%s WHERE until < %d AND NOT %s`, table.name, open, keptRow)); err != nil {
			return err
		}
	}
	return nil
}

// idList is what json_each reads.
func idList(ids []int64) string { return strings.ReplaceAll(fmt.Sprint(ids), " ", ",") }

// remove deletes rows and counts them.
func (t *Tx) remove(ctx context.Context, n *int, from string, args ...any) error {
	r, err := t.tx.ExecContext(ctx, `DELETE FROM `+from, args...)
	if err != nil {
		return err
	}
	removed, err := r.RowsAffected()
	*n += int(removed)
	return err
}

// What nothing has any more.
const (
	unusedComputations = `SELECT id FROM computation x WHERE NOT EXISTS (SELECT 1 FROM computed k WHERE k.computation_id = x.id)
		AND NOT EXISTS (SELECT 1 FROM edition_computed k WHERE k.computation_id = x.id) ORDER BY id`
	unusedSeries = `SELECT id FROM series EXCEPT SELECT series_id FROM component EXCEPT SELECT series_id FROM edition_component EXCEPT SELECT series_id FROM intake_series ORDER BY 1`
)

// inBatches calls f with the ids that a query gives, so many at a time, each time in a
// transaction of its own.
func (s *Store) inBatches(ctx context.Context, size int, query string, f func(tx *Tx, ids string) error) error {
	rows, err := s.read.QueryContext(ctx, query)
	if err != nil {
		return err
	}
	ids, err := collect(rows, func(id *int64) []any { return []any{id} })
	if err != nil {
		return err
	}
	for part := range slices.Chunk(ids, size) {
		if err := s.Update(ctx, func(tx *Tx) error { return f(tx, idList(part)) }); err != nil {
			return err
		}
	}
	return nil
}

// pruneComputations removes computations with all that hangs on them.
func (t *Tx) pruneComputations(ctx context.Context, ids string, p *Pruned) error {
	const these = ` IN (SELECT value FROM json_each(?))`
	var uncounted int
	spectra, err := t.idOf(ctx, `SELECT count(*) FROM json_each(?) k JOIN spectrum s ON s.computation_id = k.value JOIN computation x ON x.id = k.value
		JOIN generation g ON g.id = x.generation_id JOIN grid_damping d ON d.grid_id = g.grid_id`, ids)
	if err == nil {
		p.Spectra += int(spectra)
	}
	for _, from := range []struct {
		n     *int
		table string
	}{
		{&uncounted, "spectrum"}, {&uncounted, "measure"}, {&uncounted, "conditioning"}, {&uncounted, "conditioned_finding"}, {&uncounted, "computation_seal"}, {&p.OffGridRows, "off_grid"},
	} {
		if err == nil {
			err = t.remove(ctx, from.n, from.table+` WHERE computation_id`+these, ids)
		}
	}
	if err == nil {
		err = t.dropTiles(ctx)
	}
	if err != nil {
		return err
	}
	return t.remove(ctx, &p.Computations, `computation WHERE id`+these, ids)
}

// pruneBlocks removes blocks of oscillators of which nothing is kept, and counts anew what is
// kept of the others. To remove a block is to look through all rows for one that names it,
// there being no index for it, so that is left to one look at all of them: the one
// statement keeps what the foreign key would.
func (s *Store) pruneBlocks(ctx context.Context, p *Pruned) (err error) {
	if s.write == nil {
		return errReading
	}
	if _, err := s.write.ExecContext(ctx, `PRAGMA foreign_keys = 0`); err != nil {
		return err
	}
	defer func() {
		_, errBack := s.write.ExecContext(context.WithoutCancel(ctx), `PRAGMA foreign_keys = 1`)
		err = errors.Join(err, errBack)
	}()
	return s.Update(ctx, func(tx *Tx) error {
		err := tx.exec(ctx, `CREATE TEMP TABLE kept_block AS SELECT block_id AS id, count(*) AS n FROM off_grid GROUP BY block_id`)
		if err == nil {
			err = tx.remove(ctx, &p.Blocks, `off_grid_block WHERE id NOT IN (SELECT id FROM kept_block)`)
		}
		if err == nil { // the oscillators are two doubles each, behind them four bytes of a checksum
			err = tx.exec(ctx, `UPDATE off_grid_block AS b SET kept = k.n * (length(b.oscillators) / 16 + ?) FROM kept_block k WHERE k.id = b.id`, offGridRowCost)
		}
		return errors.Join(err, tx.exec(ctx, `DROP TABLE IF EXISTS kept_block`))
	})
}

// pruneGenerations removes generations that nothing is of, and recipes and grids that no
// generation has. Before there is an edition they are those of a first run.
func (t *Tx) pruneGenerations(ctx context.Context, p *Pruned) error {
	if _, ok, err := t.PublishedEdition(ctx); err != nil || !ok {
		return err
	}
	err := t.remove(ctx, &p.Generations, `generation AS g WHERE NOT EXISTS (SELECT 1 FROM edition e WHERE e.generation_id = g.id)
		AND NOT EXISTS (SELECT 1 FROM computation x WHERE x.generation_id = g.id) AND NOT EXISTS (SELECT 1 FROM off_grid_block b WHERE b.generation_id = g.id)`)
	for _, statement := range []string{
		`DELETE FROM recipe WHERE id NOT IN (SELECT recipe_id FROM generation)`,
		`DELETE FROM grid_period WHERE grid_id NOT IN (SELECT grid_id FROM generation)`,
		`DELETE FROM grid_damping WHERE grid_id NOT IN (SELECT grid_id FROM generation)`,
		`DELETE FROM grid WHERE id NOT IN (SELECT grid_id FROM generation)`,
	} {
		if err == nil {
			err = t.exec(ctx, statement)
		}
	}
	return err
}

// Size is how many bytes the store has, and how many of them are in use: the others are
// free for later runs.
type Size struct{ File, Used int64 }

// Size returns the store's size.
func (s *Store) Size(ctx context.Context) (Size, error) {
	var page, pages, free int64
	err := s.read.QueryRowContext(ctx, `SELECT s.page_size, c.page_count, f.freelist_count FROM pragma_page_size s, pragma_page_count c, pragma_freelist_count f`).Scan(&page, &pages, &free)
	if err != nil {
		return Size{}, fmt.Errorf("read size of store: %w", err)
	}
	return Size{File: page * pages, Used: page * (pages - free)}, nil
}

// Shrink gives what is free in the store back to the file system. It writes the store anew:
// beside it there must be room for twice what stays, and whoever writes to it waits.
func (s *Store) Shrink(ctx context.Context) error {
	if s.write == nil {
		return errReading
	}
	// The log has all of it then; it is brought to the file, and is short again.
	for _, statement := range []string{`VACUUM`, `PRAGMA wal_checkpoint(TRUNCATE)`} {
		if _, err := s.write.ExecContext(ctx, statement); err != nil {
			return fmt.Errorf("shrink store: %w", explainDisk(explain(err)))
		}
	}
	return nil
}
