package db

import (
	"context"
	"database/sql"
	"fmt"
)

// location is where the spectra of a record's role are: in a tile, at one of as many places as it
// has motions. The tile is 0 where there are no spectra, and damagedTile where nobody knows.
type location struct {
	record, computation, tile int64
	place, motions            int
}

const damagedTile = -1

// located tells where the spectra of a role are, in the order of the records' ids, read once.
func (s *Snapshot) located(ctx context.Context, role string) ([]location, error) {
	s.known.Lock()
	defer s.known.Unlock()
	if out, ok := s.places[role]; ok {
		return out, nil
	}
	rows, err := s.tx.QueryContext(ctx, `SELECT k.record_id, k.role, k.computation_id, s.tile_id, s.place, s.crc32c, coalesce(t.motions, 0) FROM `+s.shown("computed")+` k
		LEFT JOIN spectrum s ON s.computation_id = k.computation_id LEFT JOIN tile t ON t.id = s.tile_id WHERE k.role = ? ORDER BY k.record_id`, role)
	if err != nil {
		return nil, fmt.Errorf("find spectra: %w", err)
	}
	defer rows.Close()
	seen := s.tally("computed", role, "record_id", "role", "computation_id", "", "", "", "")
	var out []location
	var of string
	var l location
	var p placing
	into := []any{&l.record, &of, &l.computation, &p.tile, &p.place, &p.seal, &l.motions}
	for rows.Next() {
		if err := rows.Scan(into...); err != nil {
			return nil, s.unread("computed", err)
		}
		seen.add(into)
		out = append(out, p.of(l))
	}
	err = rows.Err()
	if err == nil {
		err = seen.check()
	}
	if err != nil {
		return nil, s.unread("computed", err)
	}
	s.places[role] = out
	return out, nil
}

// placing is a row of spectrum, NULL of one that is not there.
type placing struct{ tile, place, seal sql.NullInt64 }

// of is a location, of whose tile the motions are known, with what the row says.
func (p placing) of(l location) location {
	l.tile, l.place = p.tile.Int64, int(p.place.Int64)
	isDamaged := p.seal.Int64 != placeSeal(l.computation, p.tile.Int64, p.place.Int64) || l.place < 0 || l.place >= l.motions
	if p.seal.Valid && isDamaged {
		l.tile, l.motions = damagedTile, 0
	}
	return l
}
