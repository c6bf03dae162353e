package db

import (
	"context"
	"database/sql"
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
	out, err := s.locatedIn(ctx, role)
	if err != nil {
		return nil, err
	}
	s.places[role] = out
	return out, nil
}

func (s *Snapshot) locatedIn(ctx context.Context, role string) (out []location, err error) {
	var of string
	var l location
	err = s.scan(ctx, wanted{
		name: "computed", part: role, columns: words(`record_id role computation_id tile_id place motions`),
		into: []any{&l.record, &of, &l.computation, &l.tile, &l.place, &l.motions},
	}, func() error {
		out = append(out, l)
		return nil
	})
	return out, err
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
