package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"hash/crc32"
	"slices"
	"strings"
)

// layout is what is laid out of a table of editions, or of what its computations have: which
// columns, in which order of rows, part by part where part is a column.
type layout struct {
	name, part string
	columns    []string
	order      string
	// from is the table, of which the columns are, under the name x, nil for the edition's own.
	from func(shown tables) string
}

// layouts are what questions read. Measures are not among them: there are many, and few are
// asked for.
var layouts = []layout{
	{name: "event", columns: words(`id code name origin_time latitude_deg longitude_deg depth_km magnitude magnitude_type primary_id`), order: `id`},
	{name: "station", columns: words(`id network code name latitude_deg longitude_deg elevation_m vs30_m_s site_class`), order: `id`},
	{name: "record", columns: words(`id code event_id station_id instrument siting start_at distance_km epicentral_km hypocentral_km rupture_km jb_km`), order: `id`},
	{name: "source_file", columns: words(`id path sha256 format`), order: `id`},
	{name: "component", columns: words(`id record_id role axis label rank azimuth_deg channel start_at step_s samples unit processing low_cut_hz high_cut_hz
		header_peak_m_s2 warnings source_id source_line motion_id`), order: `r.code, x.role`,
		from: func(shown tables) string {
			return shown("component") + ` x JOIN ` + shown("record") + ` r ON r.id = x.record_id`
		}},
	{name: "finding", part: "flag", columns: words(`component_id flag value bound words`), order: `component_id`},
	{name: "computed", part: "role", columns: words(`record_id role computation_id tile_id place motions`), order: `record_id`,
		from: func(shown tables) string {
			return `(SELECT k.record_id, k.role, k.computation_id, ` + placeOfSpectra + ` FROM ` + shown("computed") + ` k` + besideComputed + `) x`
		}},
	{name: sealedConditioning, columns: words(`record_id role computation_id step_s samples lead_s low_cut_hz high_cut_hz long_s`), order: `record_id, role`,
		from: func(shown tables) string {
			return `(SELECT k.record_id, k.role, k.computation_id, c.step_s, c.samples, c.lead_s, c.low_cut_hz, c.high_cut_hz, c.long_s
				FROM ` + shown("computed") + ` k CROSS JOIN conditioning c ON c.computation_id = k.computation_id) x`
		}},
	{name: sealedFlags, part: "flag", columns: words(`record_id role flag`), order: `record_id, role`,
		from: func(shown tables) string {
			return `(SELECT k.record_id, k.role, f.flag FROM conditioned_finding f JOIN ` + shown("computed") + ` k ON k.computation_id = f.computation_id) x`
		}},
}

// layoutOf is that of a name, which must be one.
func layoutOf(name string) *layout {
	return &layouts[slices.IndexFunc(layouts, func(l layout) bool { return l.name == name })]
}

// query reads columns, as SQL says them, of what meets the condition, in the layout's order.
func (l *layout) query(shown tables, columns []string, condition string) string {
	from := shown(l.name) + ` x`
	if l.from != nil {
		from = l.from(shown)
	}
	return `SELECT ` + strings.Join(columns, ", ") + ` FROM ` + from + condition + ` ORDER BY ` + l.order
}

// layOut lays out the newest edition and the published one, where they are not, and no other:
// what else there is of editions is asked about too seldom. One that the transaction has made is
// known to be what its seals say.
func (t *Tx) layOut(ctx context.Context) error {
	rows, err := t.tx.QueryContext(ctx, `SELECT id, generation_id, state FROM edition WHERE id = (SELECT max(id) FROM edition) OR `+isPublished+` ORDER BY id DESC`)
	if err != nil {
		return fmt.Errorf("lay out editions: %w", err)
	}
	wanted, err := collect(rows, func(e *Edition) []any { return []any{&e.ID, &e.GenerationID, &e.State} })
	if err != nil {
		return fmt.Errorf("lay out editions: %w", err)
	}
	ids := make([]int64, len(wanted))
	for i, e := range wanted {
		ids[i] = e.ID
	}
	if err := t.exec(ctx, `DELETE FROM edition_column WHERE edition_id NOT IN (SELECT value FROM json_each(?))`, idList(ids)); err != nil {
		return fmt.Errorf("lay out editions: %w", err)
	}
	for i, id := range ids {
		if err := t.layOutOne(ctx, id, ofEdition(id, i == 0), id == t.made); err != nil {
			return fmt.Errorf("lay out edition %d: %w", id, err)
		}
	}
	return nil
}

// layOutOne lays out an edition, unless it is and can be read. One whose rows are not what they
// were is left to who reads them.
func (t *Tx) layOutOne(ctx context.Context, id int64, shown tables, isKnown bool) error {
	if !isKnown {
		isNeeded, err := t.isToLayOut(ctx, id, shown)
		if err != nil || !isNeeded {
			return err
		}
	}
	if err := t.exec(ctx, `DELETE FROM edition_column WHERE edition_id = ?`, id); err != nil {
		return err
	}
	for i := range layouts {
		if err := t.layOutTable(ctx, id, &layouts[i], shown); err != nil {
			return fmt.Errorf("%s: %w", layouts[i].name, err)
		}
	}
	return nil
}

// isToLayOut reports whether an edition is not laid out as it should be, and can be.
func (t *Tx) isToLayOut(ctx context.Context, id int64, shown tables) (bool, error) {
	seals, err := sealsOf(ctx, t.tx, id)
	if err != nil {
		return false, err
	}
	s := Snapshot{tx: t.tx, shown: shown, seals: seals, isLaidOut: true, Edition: Edition{ID: id}}
	isThere, err := isLaidOut(ctx, t.tx, id)
	if err != nil {
		return false, err
	}
	if isThere {
		if err = s.checkLayout(ctx); err == nil || !errors.Is(err, ErrAltered) {
			return false, err
		}
	}
	for i := range layouts {
		if text, err := unlike(ctx, t.tx, id, shown, layouts[i].name, seals); err != nil || text != "" {
			return false, err
		}
	}
	return true, nil
}

func isLaidOut(ctx context.Context, q queryer, edition int64) (bool, error) {
	is, err := idOf(ctx, q, `SELECT EXISTS (SELECT 1 FROM edition_column WHERE edition_id = ?)`, edition)
	return is != 0, err
}

// layOutTable writes a layout's pieces, part by part.
func (t *Tx) layOutTable(ctx context.Context, id int64, l *layout, shown tables) error {
	part := `''`
	if l.part != "" {
		part = "x." + l.part
	}
	query := *l
	query.order = part + ", " + l.order
	rows, err := t.tx.QueryContext(ctx, query.query(shown, append([]string{part}, prefixed(l.columns)...), ""))
	if err != nil {
		return err
	}
	defer rows.Close()
	w := pieceWriter{tx: t, edition: id, layout: l, columns: make([][]any, len(l.columns))}
	row, into := make([]any, len(l.columns)+1), make([]any, len(l.columns)+1)
	for i := range row {
		into[i] = &row[i]
	}
	for rows.Next() {
		if err := rows.Scan(into...); err != nil {
			return err
		}
		if err := w.add(ctx, fmt.Sprint(row[0]), row[1:]); err != nil {
			return err
		}
	}
	if err := rows.Err(); err != nil {
		return err
	}
	return w.end(ctx)
}

// prefixed are columns of x.
func prefixed(columns []string) []string {
	out := make([]string, len(columns))
	for i, name := range columns {
		out[i] = "x." + name
	}
	return out
}

// pieceWriter packs rows into pieces. The last of a part is known when the next one, or
// nothing, comes.
type pieceWriter struct {
	tx      *Tx
	edition int64
	layout  *layout
	part    string
	number  int
	columns [][]any
}

func (w *pieceWriter) add(ctx context.Context, part string, row []any) error {
	switch n := len(w.columns[0]); {
	case part != w.part && n > 0:
		if err := w.write(ctx, true); err != nil {
			return err
		}
		w.number = 0
	case n == pieceRows:
		if err := w.write(ctx, false); err != nil {
			return err
		}
	}
	w.part = part
	for i, v := range row {
		w.columns[i] = append(w.columns[i], v)
	}
	return nil
}

// end writes the last piece, which may be empty where the table has no parts: one that has
// some, and none of a part, is known by its seals.
func (w *pieceWriter) end(ctx context.Context) error {
	if len(w.columns[0]) == 0 && w.layout.part != "" {
		return nil
	}
	return w.write(ctx, true)
}

func (w *pieceWriter) write(ctx context.Context, isLast bool) error {
	for i, title := range w.layout.columns {
		data, err := packPiece(w.columns[i], isLast)
		if err != nil {
			return fmt.Errorf("%s: %w", title, err)
		}
		key := pieceKey{w.edition, w.layout.name, w.part, w.number, title}
		err = w.tx.exec(ctx, `INSERT INTO edition_column (edition_id, name, part, number, title, data, crc32c) VALUES (?, ?, ?, ?, ?, ?, ?)`,
			key.edition, key.name, key.part, key.number, key.title, data, key.seal(data))
		if err != nil {
			return err
		}
		w.columns[i] = w.columns[i][:0]
	}
	w.number++
	return nil
}

// pieceKey is where a piece belongs.
type pieceKey struct {
	edition    int64
	name, part string
	number     int
	title      string
}

// seal is the checksum of a piece in its place, so that none can pass for another.
func (k pieceKey) seal(data []byte) int64 {
	var b sealer
	of := b.row(k.edition, k.name, k.part, int64(k.number), k.title)
	return int64(crc32.Update(uint32(of), castagnoli, data))
}

// lastLaidOutTile is the greatest number of a tile in columns, 0 where there is none. What of them
// is damaged nobody reads.
func lastLaidOutTile(ctx context.Context, q queryer) (last int64, err error) {
	rows, err := q.QueryContext(ctx, `SELECT edition_id, name, part, number, title, data, crc32c FROM edition_column WHERE name = 'computed' AND title = 'tile_id'`)
	if err != nil {
		return 0, err
	}
	defer rows.Close()
	var key pieceKey
	var data sql.RawBytes
	var seal int64
	for rows.Next() {
		if err := rows.Scan(&key.edition, &key.name, &key.part, &key.number, &key.title, &data, &seal); err != nil {
			return 0, err
		}
		if key.seal(data) != seal {
			continue
		}
		p, err := unpackPiece(data)
		if err != nil {
			continue
		}
		for i := range p.rows {
			if id, ok := p.value(i).(int64); ok {
				last = max(last, id)
			}
		}
	}
	return last, rows.Err()
}
