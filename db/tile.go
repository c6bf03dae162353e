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

	mostTiles    = 1 << 42 // a limit of ids, so that those of parts do not run over
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

// nextTile is the id of a tile to begin. What was lost of one table gives no id away twice, since
// others have it; ids that no tile can have are damaged, and not counted.
func (t *Tx) nextTile(ctx context.Context) (int64, error) {
	id, err := t.idOf(ctx, `SELECT 1 + max((SELECT coalesce(max(id), 0) FROM tile WHERE id < ?1), (SELECT coalesce(max(tile_id), 0) FROM spectrum WHERE tile_id < ?1),
		(SELECT coalesce(max(id), 0) FROM tile_part WHERE id < ?1 << ?2) >> ?2, 0)`, mostTiles, tileBits)
	if err == nil && id >= mostTiles {
		err = fmt.Errorf("%w: tile %d is the last that a store can have", ErrDamaged, id-1)
	}
	return id, err
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

// forgetSpectra removes spectra of computations, which ids lists, and tiles of which nothing is
// left: those that they were in; any, where nobody knows where they were, or which tile it is. What
// others have in the same tile keeps it whole.
func (t *Tx) forgetSpectra(ctx context.Context, ids string) error {
	var tiles string
	err := t.tx.QueryRowContext(ctx, `WITH forgotten (tile_id) AS MATERIALIZED (
			SELECT DISTINCT iif(`+isSealedSpectrum+`, s.tile_id, NULL) FROM json_each(?) k LEFT JOIN spectrum s ON s.computation_id = k.value)
		SELECT json_group_array(id) FROM (SELECT tile_id AS id FROM forgotten WHERE tile_id IS NOT NULL
			UNION SELECT id FROM tile t WHERE EXISTS (SELECT 1 FROM forgotten WHERE tile_id IS NULL) OR NOT `+isSealedTile+`)`, ids).Scan(&tiles)
	if err == nil {
		err = t.exec(ctx, `DELETE FROM spectrum WHERE computation_id IN (SELECT value FROM json_each(?))`, ids)
	}
	if err == nil {
		err = t.tx.QueryRowContext(ctx, `SELECT json_group_array(value) FROM json_each(?) k WHERE NOT EXISTS (SELECT 1 FROM spectrum s WHERE s.tile_id = k.value)`, tiles).Scan(&tiles)
	}
	for _, statement := range []string{
		`DELETE FROM tile WHERE id IN (SELECT value FROM json_each(?))`,
		`DELETE FROM tile_part WHERE id IN (SELECT p.id FROM json_each(?) k CROSS JOIN tile_part p ON p.id BETWEEN k.value << 20 AND (k.value << 20) + (1 << 20) - 1)`,
	} {
		if err == nil {
			err = t.exec(ctx, statement, tiles)
		}
	}
	return err
}
