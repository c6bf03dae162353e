package db

import (
	"context"
	"encoding/binary"
	"fmt"
	"slices"
)

// Spectra are stored in tiles of some motions, cut into parts of some periods at one damping, so
// that a period of many motions is read without their other periods.
const (
	// TileMotions is how many motions a tile has at most: with as many a part fills a page.
	TileMotions = 63

	partPeriods = 8 // of a part, but for the last of a damping

	partBits = 12 // of a part's id, for its number
	tileBits = 20 // for number and damping

	mostDampings = 1 << (tileBits - partBits)
	mostPeriods  = partPeriods << partBits
)

// partID is the id of a part of a tile at the damping of this position.
func partID(tile int64, damping, part int) int64 {
	return tile<<tileBits | int64(damping)<<partBits | int64(part)
}

// partOf takes a part's id apart.
func partOf(id int64) (tile int64, damping, part int) {
	return id >> tileBits, int(id >> partBits & (mostDampings - 1)), int(id & (1<<partBits - 1))
}

// partsOf is how many parts so many periods make.
func partsOf(periods int) int { return (periods + partPeriods - 1) / partPeriods }

// partSpan is the periods of a part, of so many in all.
func partSpan(part, periods int) Span {
	return Span{partPeriods * part, min(partPeriods*(part+1), periods)}
}

// lostBits are those of an ordinate that was damaged before it came into a tile: all are set,
// as in no double that is computed.
const lostBits = 1<<64 - 1

// appendPart appends a part of spectra of several motions, each as it is encoded.
func appendPart(dst []byte, spectra [][]byte, periods Span) []byte {
	for p := OrdinateWidth * periods.From; p < OrdinateWidth*periods.To; p += OrdinateWidth {
		for _, sd := range spectra {
			dst = binary.NativeEndian.AppendUint64(dst, binary.NativeEndian.Uint64(sd[p:]))
		}
	}
	return dst
}

// tileBegun is a tile that a transaction fills, and writes before it is committed.
type tileBegun struct {
	id         int64 // 0 for none
	generation int64
	motions    [][][]byte // by place and damping
}

// takes reports whether spectra may go into the tile.
func (b *tileBegun) takes(generation int64, sd [][]byte) bool {
	return b.id != 0 && b.generation == generation && len(b.motions) < TileMotions &&
		slices.EqualFunc(b.motions[0], sd, func(a, b []byte) bool { return len(a) == len(b) })
}

// placeSpectra gives a computation's spectra, by damping, a place in a tile.
func (t *Tx) placeSpectra(ctx context.Context, computationID, generationID int64, sd [][]byte) error {
	if len(sd) == 0 {
		return nil
	}
	b := &t.begun
	if !b.takes(generationID, sd) {
		if err := t.writeTile(ctx); err != nil {
			return err
		}
		id, err := t.nextTile(ctx)
		if err != nil {
			return fmt.Errorf("begin tile: %w", err)
		}
		b.id, b.generation = id, generationID
	}
	place := int64(len(b.motions))
	if err := t.exec(ctx, `INSERT INTO spectrum (computation_id, tile_id, place, crc32c) VALUES (?, ?, ?, ?)`,
		computationID, b.id, place, new(sealer).row(computationID, b.id, place)); err != nil {
		return fmt.Errorf("store spectrum: %w", err)
	}
	b.motions = append(b.motions, sd)
	return nil
}

// nextTile is the id of a tile to begin: behind all that anybody speaks of, columns too, which may
// be of before something was lost, and may be read meanwhile. Ids whose rows are damaged say
// nothing, and are passed over.
func (t *Tx) nextTile(ctx context.Context) (id int64, err error) {
	for _, last := range []string{
		`SELECT t.id FROM tile t WHERE ` + isSealedTile + ` ORDER BY t.id DESC LIMIT 1`,
		`SELECT s.tile_id FROM spectrum s WHERE ` + isSealedSpectrum + ` ORDER BY s.tile_id DESC LIMIT 1`,
	} {
		n, err := t.idOf(ctx, last)
		if err != nil {
			return 0, err
		}
		id = max(id, n)
	}
	laidOut, err := lastLaidOutTile(ctx, t.tx)
	if err != nil {
		return 0, err
	}
	for id = max(id, laidOut) + 1; ; id++ {
		isUsed, err := t.idOf(ctx, `SELECT EXISTS (SELECT 1 FROM tile WHERE id = ?1) OR EXISTS (SELECT 1 FROM spectrum WHERE tile_id = ?1) OR
			EXISTS (SELECT 1 FROM tile_part WHERE id BETWEEN ?1 << 20 AND (?1 << 20) + (1 << 20) - 1)`, id)
		if err != nil || isUsed == 0 {
			return id, err
		}
	}
}

// writeTile writes the tile that is begun, if one is.
func (t *Tx) writeTile(ctx context.Context) error {
	b := t.begun
	t.begun = tileBegun{}
	if b.id == 0 {
		return nil
	}
	motions := int64(len(b.motions))
	if err := t.exec(ctx, `INSERT INTO tile (id, motions, crc32c) VALUES (?, ?, ?)`, b.id, motions, new(sealer).row(b.id, motions)); err != nil {
		return fmt.Errorf("store tile: %w", err)
	}
	spectra := make([][]byte, len(b.motions))
	var data []byte
	for damping, sd := range b.motions[0] {
		for place := range spectra {
			spectra[place] = b.motions[place][damping]
		}
		periods := len(sd) / OrdinateWidth
		for part := range partsOf(periods) {
			data = appendPart(data[:0], spectra, partSpan(part, periods))
			if err := t.exec(ctx, `INSERT INTO tile_part (id, sd_m, crc32c) VALUES (?, ?, ?)`, partID(b.id, damping, part), data, sealOf(data)); err != nil {
				return fmt.Errorf("store tile: %w", err)
			}
		}
	}
	return nil
}

// hasSpectra says of a row k of computed whether its spectra are stored: where its place in a tile
// is what was stored, and the tile has its first part, or is the one that a transaction has begun,
// of which there are neither row nor parts yet. What lacks them is computed again.
const hasSpectra = `EXISTS (SELECT 1 FROM spectrum s LEFT JOIN tile t ON t.id = s.tile_id WHERE s.computation_id = k.computation_id AND
	(s.tile_id = ? AND ` + isSealedSpectrum + ` OR ` + isPlaced + ` AND EXISTS (SELECT 1 FROM tile_part p WHERE p.id = s.tile_id << 20)))`

// dropTiles removes tiles, and parts of tiles, in which nobody has spectra any more. What others
// have in the same tile keeps it whole.
func (t *Tx) dropTiles(ctx context.Context) error {
	const nobodys = ` NOT EXISTS (SELECT 1 FROM spectrum s WHERE s.tile_id = t.id)`
	err := t.exec(ctx, `DELETE FROM tile_part WHERE id IN (
		WITH RECURSIVE t (id) AS (SELECT min(id) >> 20 FROM tile_part UNION SELECT (SELECT min(id) >> 20 FROM tile_part WHERE id >= (t.id + 1) << 20) FROM t WHERE t.id IS NOT NULL)
		SELECT p.id FROM t CROSS JOIN tile_part p ON p.id BETWEEN t.id << 20 AND (t.id << 20) + (1 << 20) - 1 WHERE t.id IS NOT NULL AND`+nobodys+`)`)
	if err == nil {
		err = t.exec(ctx, `DELETE FROM tile AS t WHERE`+nobodys)
	}
	if err != nil {
		return fmt.Errorf("drop tiles: %w", err)
	}
	return nil
}
