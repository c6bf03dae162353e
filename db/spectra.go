package db

import (
	"cmp"
	"context"
	"database/sql"
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"slices"
	"sort"
)

// Span is the positions From … To-1 of the grid's periods.
type Span struct{ From, To int }

// RoleSpectrum names the spectra of a record's role.
type RoleSpectrum struct {
	RecordID int64
	Role     string
}

// Spectra reads the SD spectra of a role at the grid's damping of this position, at the periods
// of the span only, and calls f with each, in any order. It has one value a period, and is nil
// where it is damaged at one of them. f must not keep it.
func (s *Snapshot) Spectra(ctx context.Context, role string, dampingPosition int, periods Span, f func(recordID int64, sd []float64) error) error {
	all, err := s.located(ctx, role)
	if err != nil {
		return err
	}
	found := make([]sought, 0, len(all))
	for i, l := range all {
		found = append(found, sought{l, i})
	}
	return s.readParts(ctx, found, dampingPosition, periods, func(i int, sd []float64) error { return f(all[i].record, sd) })
}

// SpectraOf reads some spectra as Spectra does, and calls f with the position of each among
// those that are wanted. What is not stored it is not called with.
func (s *Snapshot) SpectraOf(ctx context.Context, wanted []RoleSpectrum, dampingPosition int, periods Span, f func(i int, sd []float64) error) error {
	found := make([]sought, 0, len(wanted))
	next := map[string]int{} // as a rule what is wanted is in the order of records
	for i, w := range wanted {
		all, err := s.located(ctx, w.Role)
		if err != nil {
			return err
		}
		at := next[w.Role]
		if at >= len(all) || all[at].record != w.RecordID {
			at = sort.Search(len(all), func(k int) bool { return all[k].record >= w.RecordID })
		}
		if at < len(all) && all[at].record == w.RecordID {
			found = append(found, sought{all[at], i})
		}
		next[w.Role] = at + 1
	}
	return s.readParts(ctx, found, dampingPosition, periods, f)
}

// sought is where a spectrum is that is wanted, with its position among them.
type sought struct {
	location
	position int
}

// readParts reads the parts of tiles that have what is sought, each once.
func (s *Snapshot) readParts(ctx context.Context, found []sought, damping int, periods Span, f func(i int, sd []float64) error) error {
	slices.SortFunc(found, func(a, b sought) int {
		return cmp.Or(cmp.Compare(a.tile, b.tile), cmp.Compare(a.place, b.place))
	})
	var tiles []int64
	for _, l := range found {
		if l.tile > 0 && (len(tiles) == 0 || tiles[len(tiles)-1] != l.tile) {
			tiles = append(tiles, l.tile)
		}
	}
	first, last := periods.From/partPeriods, (periods.To-1)/partPeriods
	rows, err := s.tx.QueryContext(ctx, `SELECT p.id, p.crc32c, p.sd_m FROM json_each(?) t CROSS JOIN tile_part p ON p.id BETWEEN (t.value << 20) + ? AND (t.value << 20) + ?`,
		idList(tiles), partID(0, damping, first), partID(0, damping, last))
	if err != nil {
		return fmt.Errorf("read spectra: %w", err)
	}
	defer rows.Close()
	r := partReader{snapshot: s, rows: rows, periods: periods}
	for len(found) > 0 {
		n := 1
		for n < len(found) && found[n].tile == found[0].tile {
			n++
		}
		if err := r.tile(found[:n], f); err != nil {
			return err
		}
		found = found[n:]
	}
	if r.isAhead || rows.Next() {
		return errors.New("read spectra: parts of tiles come in another order than was asked for")
	}
	return s.unread("tile_part", rows.Err())
}

// partReader reads parts of tiles, in their order.
type partReader struct {
	snapshot *Snapshot
	rows     *sql.Rows
	isAhead  bool // the part that was read is of a tile to come
	id       int64
	seal     int64
	data     sql.RawBytes

	periods Span
	sd      []float64 // of a tile's motions that are sought, one after another
	isLost  []bool
}

// tile reads on through the parts of a tile, and calls f with what is sought in it.
func (r *partReader) tile(found []sought, f func(i int, sd []float64) error) error {
	if found[0].tile == 0 {
		return nil
	}
	width := r.periods.To - r.periods.From
	r.sd = slices.Grow(r.sd[:0], width*len(found))[:width*len(found)]
	r.isLost = slices.Grow(r.isLost[:0], len(found))[:len(found)]
	clear(r.isLost)
	covered := 0
	for {
		ok, err := r.next(found[0].tile)
		if err != nil {
			return r.snapshot.unread("tile_part", err)
		}
		if !ok {
			break
		}
		covered += r.take(found)
	}
	for k := range found {
		sd := r.sd[k*width : (k+1)*width]
		if r.isLost[k] || covered != width {
			sd = nil
		}
		if err := f(found[k].position, sd); err != nil {
			return err
		}
	}
	return nil
}

// next goes to the next part, if it is of this tile.
func (r *partReader) next(tile int64) (ok bool, err error) {
	if !r.isAhead {
		if !r.rows.Next() {
			return false, r.rows.Err()
		}
		if err := r.rows.Scan(&r.id, &r.seal, &r.data); err != nil {
			return false, err
		}
	}
	of, _, _ := partOf(r.id)
	r.isAhead = of != tile
	return !r.isAhead, nil
}

// take takes from the part what is sought, and returns of how many periods that is: of none
// where it is not what was stored.
func (r *partReader) take(found []sought) int {
	_, _, part := partOf(r.id)
	of, motions := partSpan(part, len(r.snapshot.Generation.Grid.PeriodsS)), found[0].motions
	if len(r.data) != OrdinateWidth*motions*(of.To-of.From) || sealOf(r.data) != r.seal {
		return 0
	}
	width := r.periods.To - r.periods.From
	from, to := max(of.From, r.periods.From), min(of.To, r.periods.To)
	for p := from; p < to; p++ {
		row := r.data[OrdinateWidth*motions*(p-of.From) : OrdinateWidth*motions*(p-of.From+1)]
		for k := range found {
			bits := binary.BigEndian.Uint64(row[OrdinateWidth*found[k].place:])
			if bits == lostBits {
				r.isLost[k] = true
			}
			r.sd[k*width+p-r.periods.From] = math.Float64frombits(bits)
		}
	}
	return to - from
}
