package db

import (
	"context"
	"fmt"
	"maps"
	"slices"
	"strings"
)

// Editions checks that one edition is published, that each row of the editions' tables is
// shown, in a time that there was, and that the newest edition is the working state. It
// returns why the latter could not be looked at, "" where it was.
func (i *Inspection) Editions(ctx context.Context) (unlooked string, err error) {
	var editions []Edition
	err = look(ctx, i, "edition", `SELECT id, generation_id, state FROM edition ORDER BY id`, nil,
		func(e *Edition) []any { return []any{&e.ID, &e.GenerationID, &e.State} }, func(e *Edition) { editions = append(editions, *e) })
	if err != nil {
		return "", err
	}
	published := 0
	for _, e := range editions {
		i.newest = e
		if e.State == EditionPublished {
			i.published = e
			published++
		}
	}
	if published != 1 && len(editions) > 0 {
		i.found(Fault{Table: "edition", Text: fmt.Sprintf("%d editions are published", published)})
	}
	if err := i.lookFor(ctx, "run", `SELECT 'run ' || id || ' is not as it was written' FROM run WHERE NOT (`+isWholeRun+`)`); err != nil {
		return "", err
	}
	for _, table := range shownTables {
		if err := i.times(ctx, table); err != nil {
			return "", err
		}
	}
	if err := i.linked(ctx); err != nil {
		return "", err
	}
	if unlooked, err = i.unfinished(ctx); err != nil || unlooked != "" {
		return unlooked, err
	}
	for _, table := range shownTables {
		if err := i.equal(ctx, table); err != nil {
			return "", err
		}
	}
	return "", nil
}

// times looks for rows of an edition's table that no edition shows, and for two of one key
// that an edition shows both.
func (i *Inspection) times(ctx context.Context, table shownTable) error {
	name := "edition_" + table.name
	key := "e." + strings.Join(table.key, " || ' ' || e.")
	err := i.lookFor(ctx, name, fmt.Sprintf(`SELECT 'row ' || %s || ' shows from ' || e.since || iif(e.until = %d, ' on', ' until ' || e.until) || ', which is no time'
		FROM %s e WHERE e.since >= e.until OR e.since NOT IN (SELECT id FROM run) OR e.until <> %[2]d AND e.until NOT IN (SELECT id FROM run)`, key, open, name))
	if err != nil {
		return err
	}
	return i.lookFor(ctx, name, fmt.Sprintf(`SELECT 'row ' || %s || ' shows in no edition' FROM %s e
		WHERE NOT EXISTS (SELECT 1 FROM edition WHERE id >= e.since AND id < e.until) AND e.since < e.until`, key, name))
}

// What component_inputs and pair_inputs say of the working state, of an edition's rows: of a
// component c with its series s, and, behind the role, of components a and b of which x and
// y are computed.
const (
	inputsOfComponent = `coalesce(s.sha256, 'lost ' || c.id) || printf(' %!.17g ', c.step_s)
		|| iif(c.low_cut_hz IS NULL, '-', printf('%!.17g', c.low_cut_hz)) || ' '
		|| iif(c.high_cut_hz IS NULL, '-', printf('%!.17g', c.high_cut_hz)) || ' ' || c.processing`
	inputsOfPair = `' ' || x.computation_id || ' ' || y.computation_id || ' '
		|| iif(a.azimuth_deg IS NULL, '-', printf('%!.17g', a.azimuth_deg)) || ' '
		|| iif(b.azimuth_deg IS NULL, '-', printf('%!.17g', b.azimuth_deg)) || ' '
		|| coalesce(a.start_at, '-') || ' ' || coalesce(b.start_at, '-')`
)

// linked looks for what no edition can be without: rows that others of the same edition
// name. A row is shown by those editions in which what it names must be shown too, so it is
// enough to look in each edition that begins or ends one.
func (i *Inspection) linked(ctx context.Context) error {
	var ids []int64
	err := look(ctx, i, "edition", `SELECT id FROM edition ORDER BY id`, nil, func(id *int64) []any { return []any{id} }, func(id *int64) { ids = append(ids, *id) })
	if err != nil {
		return err
	}
	for _, id := range ids {
		shown := ofEdition(id, id == i.newest.ID)
		if err := i.sealed(ctx, id, shown); err != nil {
			return err
		}
		if err := i.laidOut(ctx, id, shown); err != nil {
			return err
		}
		for _, l := range []struct{ table, query string }{
			{"component", `SELECT 'component ' || c.id || ' is of a record or file that is not there' FROM ` + shown("component") + ` c
				LEFT JOIN ` + shown("record") + ` r ON r.id = c.record_id LEFT JOIN ` + shown("source_file") + ` f ON f.id = c.source_id WHERE r.id IS NULL OR f.id IS NULL`},
			{"component", `SELECT 'component ' || c.id || ' has samples that are not there' FROM ` + shown("component") + ` c LEFT JOIN series s ON s.id = c.series_id WHERE s.id IS NULL`},
			{"record", `SELECT 'record ' || r.code || ' is of an event or a station that is not there' FROM ` + shown("record") + ` r
				LEFT JOIN ` + shown("event") + ` e ON e.id = r.event_id LEFT JOIN ` + shown("station") + ` s ON s.id = r.station_id
				WHERE r.event_id IS NOT e.id OR r.station_id IS NOT s.id`},
			{"computed", `SELECT 'record ' || k.record_id || ' ' || k.role || ' is computed, and not there, or otherwise' FROM ` + shown("computed") + ` k
				LEFT JOIN computation x ON x.id = k.computation_id
				LEFT JOIN ` + shown("component") + ` c ON c.record_id = k.record_id AND c.role = iif(k.role IN ('rotd50', 'rotd100'), 'h1', k.role)
				WHERE c.id IS NULL OR x.generation_id IS NOT (SELECT generation_id FROM edition WHERE id = ?1)`},
			{"computed", `SELECT 'record ' || k.record_id || ' ' || k.role || ' is computed of other inputs than the component has' FROM ` + shown("computed") + ` k
				JOIN computation x ON x.id = k.computation_id JOIN ` + shown("component") + ` c ON c.record_id = k.record_id AND c.role = k.role
				LEFT JOIN series s ON s.id = c.series_id WHERE x.inputs <> ` + inputsOfComponent},
			{"computed", `SELECT 'record ' || k.record_id || ' ' || k.role || ' is computed of other inputs than the pair has' FROM ` + shown("computed") + ` k
				JOIN computation z ON z.id = k.computation_id
				JOIN ` + shown("component") + ` a ON a.record_id = k.record_id AND a.role = 'h1' JOIN ` + shown("component") + ` b ON b.record_id = k.record_id AND b.role = 'h2'
				LEFT JOIN ` + shown("computed") + ` x ON x.record_id = k.record_id AND x.role = 'h1' LEFT JOIN ` + shown("computed") + ` y ON y.record_id = k.record_id AND y.role = 'h2'
				WHERE k.role IN ('rotd50', 'rotd100') AND z.inputs IS NOT k.role || ` + inputsOfPair},
		} {
			if err := i.lookFor(ctx, "edition_"+l.table, `WITH lost (text) AS (`+l.query+`) SELECT 'edition ' || ?1 || ': ' || text FROM lost`, id); err != nil {
				return err
			}
		}
	}
	return nil
}

// sealed compares what an edition shows with what it did when it was made.
func (i *Inspection) sealed(ctx context.Context, id int64, shown tables) error {
	was, err := sealsOf(ctx, i.tx, id)
	for _, name := range slices.Sorted(maps.Keys(sealsNow(id, shown))) {
		var text string
		if err == nil {
			text, err = unlike(ctx, i.tx, id, shown, name, was)
		}
		if ctx.Err() != nil {
			return ctx.Err()
		}
		if err != nil {
			text, err = err.Error(), nil
		}
		if text != "" {
			table := "edition_seal" // of what is sealed beside tables, which tells its own
			if _, isTable := sealedTables[name]; isTable {
				table = "edition_" + name
			}
			i.found(Fault{Table: table, Text: fmt.Sprintf("edition %d, %s: %s; questions that read it fail", id, name, text)})
		}
	}
	return nil
}

// laidOut compares what is laid out of an edition with what it showed when it was made.
func (i *Inspection) laidOut(ctx context.Context, id int64, shown tables) error {
	seals, err := sealsOf(ctx, i.tx, id)
	isThere := false
	if err == nil {
		isThere, err = isLaidOut(ctx, i.tx, id)
	}
	if err == nil && isThere {
		s := Snapshot{tx: i.tx, shown: shown, seals: seals, isLaidOut: true, Edition: Edition{ID: id}}
		err = s.checkLayout(ctx)
	}
	if ctx.Err() != nil {
		return ctx.Err()
	}
	if err != nil {
		i.found(Fault{Table: layoutName, Text: fmt.Sprintf("edition %d: %v; questions that read it fail until the next run", id, err)})
	}
	return nil
}

// unfinished says why the working state may be another than the newest edition: a run is at
// work, or was cut short.
func (i *Inspection) unfinished(ctx context.Context) (why string, err error) {
	type row struct {
		id      int64
		outcome string
	}
	err = look(ctx, i, "run", `SELECT id, outcome FROM run ORDER BY id DESC LIMIT 1`, nil, func(v *row) []any { return []any{&v.id, &v.outcome} }, func(v *row) {
		if v.outcome != "done" {
			why = fmt.Sprintf("run %d is %s: the working state was not compared with the newest edition", v.id, v.outcome)
		}
	})
	if i.newest.ID == 0 && why == "" {
		why = "there is no edition"
	}
	return why, err
}

// equal looks for rows that the newest edition and the working state do not share.
func (i *Inspection) equal(ctx context.Context, table shownTable) error {
	name := "edition_" + table.name
	columns, err := columnsOf(ctx, i.tx, name)
	if err != nil {
		return fmt.Errorf("read columns: %w", err)
	}
	list, key := strings.Join(columns, ", "), strings.Join(table.key, " || ' ' || ")
	edition := fmt.Sprintf("SELECT %s FROM %s WHERE until = %d", list, name, open)
	working := fmt.Sprintf("SELECT %s FROM %s", list, working(i.newest.GenerationID)(table.name))
	return i.lookFor(ctx, name, fmt.Sprintf(`SELECT 'row ' || %[1]s || ' is not that of %[2]s' FROM (%[3]s EXCEPT %[4]s)
		UNION SELECT 'row ' || %[1]s || ' is not that of %[2]s' FROM (%[4]s EXCEPT %[3]s)`, key, table.name, edition, working))
}
