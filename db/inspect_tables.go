package db

import (
	"context"
	"crypto/sha256"
	"database/sql"
	"encoding/hex"
	"fmt"
	"strings"
)

// mostReported bounds what SQLite lists of faults of one kind.
const mostReported = 10000

// Structure lets SQLite check the file: its pages and indices, the rows' types, what rows
// refer to.
func (i *Inspection) Structure(ctx context.Context) error {
	err := look(ctx, i, "file", fmt.Sprintf("PRAGMA integrity_check(%d)", mostReported), nil, func(s *string) []any { return []any{s} }, func(s *string) {
		for line := range strings.Lines(*s) {
			if line = strings.TrimSpace(line); line != "ok" && !strings.HasPrefix(line, "***") {
				i.found(Fault{Table: "file", Text: line})
			}
		}
	})
	if err != nil {
		return err
	}
	if err := i.schema(ctx); err != nil {
		return err
	}
	type row struct {
		table, parent string
		rowid, key    any
	}
	return look(ctx, i, "file", "PRAGMA foreign_key_check", nil, func(v *row) []any { return []any{&v.table, &v.rowid, &v.parent, &v.key} }, func(v *row) {
		text := "a row refers to a " + v.parent + " that is not there"
		if v.rowid != nil {
			text = fmt.Sprintf("row %v refers to a %s that is not there", v.rowid, v.parent)
		}
		i.found(Fault{Table: v.table, Text: text})
	})
}

// schema compares the tables, indices and views, as they are written down, with those of a
// new store.
func (i *Inspection) schema(ctx context.Context) error {
	fresh, err := sql.Open("sqlite", ":memory:")
	if err != nil {
		return err
	}
	defer fresh.Close()
	fresh.SetMaxOpenConns(1)
	if err := migrate(ctx, fresh, ""); err != nil {
		return err
	}
	type row struct{ kind, name, text string }
	const query = `SELECT type, name, coalesce(sql, '') FROM sqlite_schema WHERE name NOT LIKE 'sqlite_stat%' ORDER BY type, name`
	fields := func(v *row) []any { return []any{&v.kind, &v.name, &v.text} }
	rows, err := fresh.QueryContext(ctx, query)
	if err != nil {
		return err
	}
	list, err := collect(rows, fields)
	if err != nil {
		return err
	}
	want := map[row]bool{}
	for _, v := range list {
		want[v] = true
	}
	err = look(ctx, i, "sqlite_schema", query, nil, fields, func(v *row) {
		if !want[*v] {
			i.found(Fault{Table: "sqlite_schema", Text: fmt.Sprintf("the %s %s is not the program's", v.kind, v.name)})
		}
		delete(want, *v)
	})
	for v := range want {
		i.found(Fault{Table: "sqlite_schema", Text: fmt.Sprintf("the %s %s is lost, or another", v.kind, v.name)})
	}
	return err
}

// orphans are queries for rows that belong to nothing, by the table; each gives texts.
// Foreign keys are looked at elsewhere: these are relations that have none.
var orphans = []struct{ table, query string }{
	{"spectrum", `SELECT 'spectra of computation ' || computation_id || ', which is not there' FROM spectrum WHERE computation_id NOT IN (SELECT id FROM computation)`},
	{"spectrum", `SELECT 'spectra of computation ' || x.id || ', which has failed' FROM computation x JOIN spectrum s ON s.computation_id = x.id WHERE x.failure IS NOT NULL`},
	{"tile", `SELECT 'how many motions tile ' || id || ' has is not what was stored' FROM tile t WHERE NOT ` + isSealedTile},
	{"tile", `SELECT 'tile ' || t.id || ' has spectra of no computation' FROM tile t WHERE NOT EXISTS (SELECT 1 FROM spectrum s WHERE s.tile_id = t.id)`},
	{"tile", `SELECT 'tile ' || s.tile_id || ' has spectra of several generations' FROM spectrum s JOIN computation x ON x.id = s.computation_id
		GROUP BY s.tile_id HAVING min(x.generation_id) <> max(x.generation_id)`},
	{"tile_part", `SELECT DISTINCT 'part of tile ' || (id >> 20) || ', which is not there' FROM tile_part WHERE id >> 20 NOT IN (SELECT id FROM tile)`},
	{"measure", `SELECT DISTINCT 'measures of computation ' || computation_id || ', which is not there' FROM measure WHERE computation_id NOT IN (SELECT id FROM computation)`},
	{"conditioning", `SELECT 'conditioning of computation ' || computation_id || ', which is not there' FROM conditioning WHERE computation_id NOT IN (SELECT id FROM computation)`},
	{"conditioned_finding", `SELECT DISTINCT 'findings in a motion of computation ' || computation_id || ', which is not conditioned' FROM conditioned_finding
		WHERE computation_id NOT IN (SELECT computation_id FROM conditioning)`},
	{"off_grid", `SELECT DISTINCT 'ordinates of computation ' || o.computation_id || ' in block ' || o.block_id || ', which is of another generation or not there' FROM off_grid o
		LEFT JOIN computation x ON x.id = o.computation_id LEFT JOIN off_grid_block b ON b.id = o.block_id WHERE x.generation_id IS NOT b.generation_id OR x.id IS NULL`},
	{"finding", `SELECT DISTINCT 'findings of component ' || component_id || ', which is not there' FROM finding WHERE component_id NOT IN (SELECT id FROM component)`},
	{"computed", `SELECT r.code || ' ' || k.role || ': computed, and there is no component' FROM computed k JOIN record r ON r.id = k.record_id
		WHERE NOT EXISTS (SELECT 1 FROM component c WHERE c.record_id = k.record_id AND c.role IN (k.role, iif(k.role IN ('rotd50', 'rotd100'), 'h1', '')))`},
	{"computed", `SELECT r.code || ' ' || k.role || ': is a computation of another generation' FROM computed k JOIN record r ON r.id = k.record_id
		JOIN computation x ON x.id = k.computation_id WHERE x.generation_id <> k.generation_id`},
	{"computed", `SELECT r.code || ' ' || k.role || ': computed of other inputs than the component has' FROM computed k JOIN record r ON r.id = k.record_id
		JOIN computation x ON x.id = k.computation_id JOIN component_inputs i ON i.record_id = k.record_id AND i.role = k.role WHERE x.inputs <> i.inputs`},
	{"computed", `SELECT r.code || ' ' || k.role || ': computed of other inputs than the pair has' FROM computed k JOIN record r ON r.id = k.record_id
		JOIN computation x ON x.id = k.computation_id
		LEFT JOIN pair_inputs i ON i.record_id = k.record_id AND i.role = k.role AND i.generation_id = k.generation_id
		WHERE k.role IN ('rotd50', 'rotd100') AND x.inputs IS NOT i.inputs`},
	{"computed", `SELECT r.code || ': rotated by half' FROM computed k JOIN record r ON r.id = k.record_id WHERE k.role IN ('rotd50', 'rotd100')
		GROUP BY k.record_id, k.generation_id HAVING count(*) <> 2`},
	{"component", `SELECT r.code || ' ' || c.role || ': has no samples' FROM component c JOIN record r ON r.id = c.record_id WHERE c.series_id IS NULL`},
	{"series", `SELECT 'series ' || s.id || ' is of no component' FROM series s WHERE NOT EXISTS (SELECT 1 FROM component c WHERE c.series_id = s.id)
		AND s.id NOT IN (SELECT series_id FROM edition_component WHERE series_id IS NOT NULL)`},
	{"off_grid_block", `SELECT 'block ' || b.id || ' counts ' || b.kept || ' values, and has fewer' FROM off_grid_block b
		WHERE b.kept < (SELECT coalesce(sum((length(o.sd_m) - 4) / 8), 0) FROM off_grid o WHERE o.block_id = b.id)`},
}

// Orphans looks for rows that belong to nothing, or to something that is not what they
// say.
func (i *Inspection) Orphans(ctx context.Context) error {
	for _, o := range orphans {
		if err := i.lookFor(ctx, o.table, o.query); err != nil {
			return err
		}
	}
	return i.hashes(ctx)
}

// hashes compares grids and recipes, which spectra are worth nothing without, with their
// hashes.
func (i *Inspection) hashes(ctx context.Context) error {
	type row struct {
		id         int64
		hash, text string
	}
	err := look(ctx, i, "recipe", `SELECT id, hash, steps FROM recipe`, nil, func(v *row) []any { return []any{&v.id, &v.hash, &v.text} }, func(v *row) {
		if sum := sha256.Sum256([]byte(v.text)); hex.EncodeToString(sum[:]) != v.hash {
			i.found(Fault{Table: "recipe", Text: fmt.Sprintf("recipe %d is not that of its hash", v.id)})
		}
	})
	if err != nil {
		return err
	}
	var grids []row
	err = look(ctx, i, "grid", `SELECT id, hash FROM grid`, nil, func(v *row) []any { return []any{&v.id, &v.hash} }, func(v *row) { grids = append(grids, *v) })
	for _, v := range grids {
		if err != nil {
			return err
		}
		grid, errRead := readGrid(ctx, i.tx, v.id)
		switch {
		case ctx.Err() != nil:
			return ctx.Err()
		case errRead != nil:
			i.found(Fault{Table: "grid", Text: "cannot be read: " + errRead.Error()})
		case grid.Hash() != v.hash:
			i.found(Fault{Table: "grid", Text: fmt.Sprintf("grid %d is not that of its hash", v.id)})
		}
		err = i.lookFor(ctx, "grid", `SELECT 'grid ' || grid_id || ': position ' || position || ' is not that of its row' FROM (
				SELECT grid_id, position, row_number() OVER (PARTITION BY grid_id ORDER BY position) - 1 AS place FROM grid_period WHERE grid_id = ?1
				UNION ALL SELECT grid_id, position, row_number() OVER (PARTITION BY grid_id ORDER BY position) - 1 FROM grid_damping WHERE grid_id = ?1)
			WHERE position <> place
			UNION ALL SELECT 'grid ' || grid_id || ': the frequency is not that of the period ' || period_s FROM grid_period
			WHERE grid_id = ?1 AND abs(omega_rad_s * period_s - 2 * pi()) > 1e-14`, v.id)
	}
	return err
}
