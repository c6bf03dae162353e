package db

import (
	"context"
	"database/sql"
	"encoding/binary"
	"errors"
	"fmt"
	"slices"
	"sync"
)

// keptTiles is how many tiles a reader keeps, 0.6 MB each on the default grid: those of a pair's
// components and of the pair, and one more.
const keptTiles = 4

// tileReader reads the spectra of computations whole. Who reads them in the order in which they
// were stored reads each tile once.
type tileReader struct {
	q     queryer
	mutex sync.Mutex
	tiles []*wholeTile // those that were read last, the last one first
}

// wholeTile is all of a tile, as far as it is there.
type wholeTile struct {
	id      int64
	motions int
	periods int
	parts   [][]tilePart // by damping and number
}

type tilePart struct {
	data    []byte // empty of none, or of one of another length
	isWhole bool   // it is what was stored
}

// storedSpectrum is a spectrum at one damping: as far as it is there, and whether that is all, as
// it was stored.
type storedSpectrum struct {
	sd      []byte
	isWhole bool
}

// whole returns the spectra of a computation by damping, nil for each that is not what was stored;
// of one that has none, none.
func (r *tileReader) whole(ctx context.Context, computation int64) (sd [][]byte, err error) {
	spectra, err := r.read(ctx, computation)
	for _, s := range spectra {
		if !s.isWhole {
			s.sd = nil
		}
		sd = append(sd, s.sd)
	}
	return sd, err
}

// forget lets go of the tiles that are kept.
func (r *tileReader) forget() { r.tiles = nil }

// read returns the spectra of a computation by damping; of one that has none, none.
func (r *tileReader) read(ctx context.Context, computation int64) ([]storedSpectrum, error) {
	l := location{computation: computation}
	var dampings, periods int
	err := r.q.QueryRowContext(ctx, `SELECT `+placeOfSpectra+`,
			coalesce((SELECT max(d.position) + 1 FROM grid_damping d WHERE d.grid_id = g.grid_id), 0), coalesce((SELECT max(p.position) + 1 FROM grid_period p WHERE p.grid_id = g.grid_id), 0)
		FROM spectrum s JOIN computation x ON x.id = s.computation_id JOIN generation g ON g.id = x.generation_id LEFT JOIN tile t ON t.id = s.tile_id
		WHERE s.computation_id = ?`, computation).Scan(&l.tile, &l.place, &l.motions, &dampings, &periods)
	if errors.Is(err, sql.ErrNoRows) {
		return nil, nil
	}
	if err != nil {
		return nil, fmt.Errorf("read spectra: %w", err)
	}
	return r.at(ctx, l, min(max(dampings, 0), mostDampings), min(max(periods, 0), mostPeriods))
}

// at returns the spectra of a motion in a tile, which has so many dampings and periods.
func (r *tileReader) at(ctx context.Context, l location, dampings, periods int) ([]storedSpectrum, error) {
	if l.tile == damagedTile {
		return make([]storedSpectrum, dampings), nil
	}
	r.mutex.Lock()
	defer r.mutex.Unlock()
	t, err := r.tile(ctx, l, dampings, periods)
	if err != nil {
		return nil, fmt.Errorf("read spectra: %w", err)
	}
	return t.motion(l.place), nil
}

// tile reads a tile, unless it is kept.
func (r *tileReader) tile(ctx context.Context, of location, dampings, periods int) (*wholeTile, error) {
	if k := slices.IndexFunc(r.tiles, func(t *wholeTile) bool { return t.id == of.tile }); k >= 0 {
		t := r.tiles[k]
		copy(r.tiles[1:], r.tiles[:k])
		r.tiles[0] = t
		return t, nil
	}
	t := r.room(of, dampings, periods)
	rows, err := r.q.QueryContext(ctx, `SELECT id, crc32c, sd_m FROM tile_part WHERE id BETWEEN ? AND ?`, partID(of.tile, 0, 0), partID(of.tile+1, 0, 0)-1)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var id, seal int64
	var data sql.RawBytes
	for rows.Next() {
		if err := rows.Scan(&id, &seal, &data); err != nil {
			return nil, err
		}
		t.put(id, seal, data)
	}
	if err := rows.Err(); err != nil {
		return nil, err
	}
	r.tiles = slices.Insert(r.tiles, 0, t)
	return t, nil
}

// room makes an empty tile, in the room of the one that nobody has read for longest where there are
// enough.
func (r *tileReader) room(of location, dampings, periods int) *wholeTile {
	t := &wholeTile{}
	if last := len(r.tiles) - 1; last+1 == keptTiles {
		t, r.tiles = r.tiles[last], r.tiles[:last]
	}
	t.id, t.motions, t.periods = of.tile, of.motions, periods
	t.parts = slices.Grow(t.parts[:0], dampings)[:dampings]
	for damping := range t.parts {
		parts := slices.Grow(t.parts[damping][:0], partsOf(periods))[:partsOf(periods)]
		for k := range parts {
			parts[k] = tilePart{data: parts[k].data[:0]}
		}
		t.parts[damping] = parts
	}
	return t
}

// put takes in a part, if it is one that the tile can have.
func (t *wholeTile) put(id, seal int64, data []byte) {
	_, damping, part := partOf(id)
	if damping >= len(t.parts) || part >= len(t.parts[damping]) {
		return
	}
	if of := partSpan(part, t.periods); len(data) == OrdinateWidth*t.motions*(of.To-of.From) {
		p := &t.parts[damping][part]
		p.data, p.isWhole = append(p.data, data...), sealOf(data) == seal
	}
}

// motion takes the spectra of a motion out of its tile.
func (t *wholeTile) motion(place int) []storedSpectrum {
	out := make([]storedSpectrum, len(t.parts))
	for damping, parts := range t.parts {
		s, n := storedSpectrum{make([]byte, OrdinateWidth*t.periods), true}, 0
		for _, part := range parts {
			s.isWhole = s.isWhole && part.isWhole
			for at := OrdinateWidth * place; at < len(part.data); at += OrdinateWidth * t.motions {
				binary.NativeEndian.PutUint64(s.sd[n:], binary.NativeEndian.Uint64(part.data[at:]))
				n += OrdinateWidth
			}
		}
		s.sd = s.sd[:n]
		if hasLost(s.sd) {
			s = storedSpectrum{sd: withoutLost(s.sd)}
		}
		out[damping] = s
	}
	return out
}

// hasLost reports whether ordinates were lost before they came into a tile.
func hasLost(sd []byte) bool {
	for ; len(sd) > 0; sd = sd[OrdinateWidth:] {
		if binary.BigEndian.Uint64(sd) == lostBits {
			return true
		}
	}
	return false
}

// withoutLost are the ordinates that were not.
func withoutLost(sd []byte) (out []byte) {
	for ; len(sd) > 0; sd = sd[OrdinateWidth:] {
		if binary.BigEndian.Uint64(sd) != lostBits {
			out = append(out, sd[:OrdinateWidth]...)
		}
	}
	return out
}
