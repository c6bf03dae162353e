package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"maps"
	"slices"
	"strings"

	"golang.org/x/sync/errgroup"
)

// adder adds up the rows that SQL gives; see tally.
type adder interface {
	add(into []any)
	check() error
}

// wanted is what is read of a layout: columns, of one part, into variables; by SQL of rows that
// meet a condition alone.
type wanted struct {
	name, part string
	columns    []string
	into       []any
	condition  string
	args       []any
	seen       adder // nil: what SQL gives is held against the edition's seal
}

// scan reads rows in the layout's order and calls f behind each: from the columns of an
// edition that is laid out, from the rows of any other. A text that is NULL is read as "".
func (s *Snapshot) scan(ctx context.Context, w wanted, f func() error) error {
	if s.isLaidOut && w.condition == "" {
		return s.scanPieces(ctx, w, f)
	}
	return s.scanRows(ctx, w, f)
}

func (s *Snapshot) scanRows(ctx context.Context, w wanted, f func() error) error {
	l, columns := layoutOf(w.name), prefixed(w.columns)
	for i, v := range w.into {
		if _, isText := v.(*string); isText {
			columns[i] = "coalesce(" + columns[i] + ", '')"
		}
	}
	condition, args := w.condition, w.args
	if l.part != "" {
		condition, args = ` WHERE x.`+l.part+` = ?`, []any{w.part}
	}
	rows, err := s.tx.QueryContext(ctx, l.query(s.shown, columns, condition), args...)
	if err != nil {
		return fmt.Errorf("read %s: %w", w.name, err)
	}
	defer rows.Close()
	seen := w.seen
	if seen == nil {
		seen = s.tally(w.name, w.part, w.columns...)
	}
	for rows.Next() {
		if err := rows.Scan(w.into...); err != nil {
			return s.unread(w.name, err)
		}
		seen.add(w.into)
		if err := f(); err != nil {
			return s.unread(w.name, err)
		}
	}
	return s.unread(w.name, errors.Join(rows.Err(), seen.check()))
}

func (s *Snapshot) scanPieces(ctx context.Context, w wanted, f func() error) error {
	group, inner := errgroup.WithContext(ctx)
	read := make(chan []piece, 1)
	group.Go(func() error { // beside who uses them
		defer close(read)
		// The end of inner would interrupt what else is read by the same transaction.
		return readPieces(ctx, s.tx, s.Edition.ID, w, func(columns []piece) error {
			select {
			case read <- columns:
				return nil
			case <-inner.Done():
				return inner.Err()
			}
		})
	})
	rows := int64(0)
	group.Go(func() error {
		for columns := range read {
			rows += int64(columns[0].rows)
			for i := range columns[0].rows {
				for k := range columns {
					if err := columns[k].set(w.into[k], i); err != nil {
						return fmt.Errorf("%s: %w", w.columns[k], err)
					}
				}
				if err := f(); err != nil {
					return err
				}
			}
		}
		return nil
	})
	err := group.Wait()
	if err == nil {
		err = s.allRead(layoutOf(w.name), w.part, rows)
	}
	return s.unread(layoutName, err)
}

// allRead says whether so many rows are those of a part, of which nothing may be there. What
// has no parts has a last piece.
func (s *Snapshot) allRead(l *layout, part string, rows int64) error {
	if l.part != "" && rows != s.seals[sealKey{l.name, part}].rows {
		return fmt.Errorf("%w: %d rows of %s of %s", errPiece, rows, l.name, part)
	}
	return nil
}

// layoutName is the table of what is laid out.
const layoutName = "edition_column"

// readPieces reads the pieces of columns, and calls f with those of the same rows, in the order
// of the columns.
func readPieces(ctx context.Context, q queryer, edition int64, w wanted, f func(columns []piece) error) error {
	titles := map[string][]int{}
	for i, title := range w.columns {
		titles[title] = append(titles[title], i)
	}
	rows, err := q.QueryContext(ctx, `SELECT number, title, data, crc32c FROM edition_column
		WHERE edition_id = ? AND name = ? AND part = ? AND title IN ('`+strings.Join(slices.Collect(maps.Keys(titles)), "', '")+`') ORDER BY number`, edition, w.name, w.part)
	if err != nil {
		return err
	}
	defer rows.Close()
	key := pieceKey{edition: edition, name: w.name, part: w.part}
	var data sql.RawBytes
	var seal int64
	columns, have, number, isLast := make([]piece, len(w.columns)), 0, 0, false
	for rows.Next() {
		if err := rows.Scan(&key.number, &key.title, &data, &seal); err != nil {
			return err
		}
		p, err := piece{}, errPiece
		if key.seal(data) == seal {
			p, err = unpackPiece(data)
		}
		if err != nil || key.number != number || isLast {
			return fmt.Errorf("%w: piece %d of %s of %s", errPiece, key.number, key.title, w.name)
		}
		for _, i := range titles[key.title] {
			columns[i] = p
		}
		if have++; have < len(titles) {
			continue
		}
		if !alike(columns) {
			return fmt.Errorf("%w: piece %d of %s", errPiece, number, w.name)
		}
		if err := f(columns); err != nil {
			return err
		}
		isLast = columns[0].isLast
		columns, have, number = make([]piece, len(w.columns)), 0, number+1
	}
	if err := rows.Err(); err != nil {
		return err
	}
	if !isLast && (number > 0 || have > 0 || layoutOf(w.name).part == "") {
		return fmt.Errorf("%w: %s ends early", errPiece, w.name)
	}
	return nil
}

// alike reports whether pieces are of the same rows.
func alike(columns []piece) bool {
	return !slices.ContainsFunc(columns, func(p piece) bool {
		return p.rows != columns[0].rows || p.isLast != columns[0].isLast
	})
}

// checkLayout says whether all that an edition has laid out can be read, and is what its
// seals say of its rows.
func (s *Snapshot) checkLayout(ctx context.Context) error {
	for i := range layouts {
		l := &layouts[i]
		parts := []string{""}
		if l.part != "" {
			parts = s.partsOf(l.name)
		}
		for _, part := range parts {
			if err := s.checkPart(ctx, l, part); err != nil {
				return err
			}
		}
	}
	for _, role := range s.partsOf("computed") {
		if err := s.checkPlaces(ctx, role); err != nil {
			return s.unread(layoutName, err)
		}
	}
	return nil
}

// checkPlaces says whether spectra are laid out where they are: what was lost and computed
// again is in another tile than it was. What is damaged has no place.
func (s *Snapshot) checkPlaces(ctx context.Context, role string) error {
	laid, err := s.locatedIn(ctx, role)
	if err != nil {
		return err
	}
	rows := Snapshot{tx: s.tx, shown: s.shown}
	now, err := rows.locatedIn(ctx, role)
	if err != nil {
		return err
	}
	at := make(map[int64]location, len(laid))
	for _, l := range laid {
		at[l.record] = l
	}
	for _, l := range now {
		if l.tile > 0 && at[l.record] != l {
			return fmt.Errorf("%w: the spectra of record %d %s are in another place", errPiece, l.record, role)
		}
	}
	return nil
}

func (s *Snapshot) checkPart(ctx context.Context, l *layout, part string) error {
	var seen *tally
	if _, isSealed := sealedTables[l.name]; isSealed {
		seen = s.tally(l.name, part, l.columns...)
	}
	values, rows := make([]any, len(l.columns)), int64(0)
	err := readPieces(ctx, s.tx, s.Edition.ID, wanted{name: l.name, part: part, columns: l.columns}, func(columns []piece) error {
		for i := range columns[0].rows {
			for k := range columns {
				values[k] = columns[k].value(i)
			}
			seen.add(values)
		}
		rows += int64(columns[0].rows)
		return nil
	})
	if err == nil {
		err = errors.Join(s.allRead(l, part, rows), seen.check())
	}
	return s.unread(layoutName, err)
}
