package db

import "context"

// location is where the spectra of a record's role are: in a tile, at one of as many places as it
// has motions. The tile is 0 where there are no spectra, and damagedTile where nobody knows.
type location struct {
	record, computation, tile int64
	place, motions            int
}

const damagedTile = -1

// Where the spectra of a row k, which has a computation, are: as a location has it, of rows s and
// t that stand beside it.
const (
	isSealedSpectrum = `s.crc32c = crc32c(s.computation_id, s.tile_id, s.place)`
	isSealedTile     = `t.crc32c = crc32c(t.id, t.motions)`
	isPlaced         = `(` + isSealedSpectrum + ` AND ` + isSealedTile + ` AND s.place BETWEEN 0 AND t.motions - 1)`

	placeOfSpectra = `CASE WHEN s.tile_id IS NULL THEN 0 WHEN ` + isPlaced + ` THEN s.tile_id ELSE -1 END AS tile_id,
		coalesce(s.place, 0) AS place, coalesce(t.motions, 0) AS motions`
	besideComputed = ` LEFT JOIN spectrum s ON s.computation_id = k.computation_id LEFT JOIN tile t ON t.id = s.tile_id`
)

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
