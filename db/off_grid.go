package db

import (
	"context"
	"database/sql"
	"encoding/binary"
	"errors"
	"fmt"
	"hash/crc32"
	"math"
	"slices"
)

// Oscillator is a period in s and a damping ratio.
type Oscillator struct{ PeriodS, Damping float64 }

// OffGridBlock is a list of oscillators off the grid whose SD is kept together, record by
// record. An oscillator may be in several.
type OffGridBlock struct {
	ID          int64
	Oscillators []Oscillator
}

// OffGridBlocks returns the blocks of the snapshot's generation, those too that were
// reserved by it, in the order of their ids, but damaged ones, of which nothing is known.
func (s *Snapshot) OffGridBlocks(ctx context.Context) ([]OffGridBlock, error) {
	rows, err := s.tx.QueryContext(ctx, `SELECT id, oscillators FROM off_grid_block WHERE generation_id = ? ORDER BY id`, s.Generation.ID)
	if err != nil {
		return nil, fmt.Errorf("read blocks of oscillators: %w", err)
	}
	type row struct {
		id   int64
		data []byte
	}
	found, err := collect(rows, func(v *row) []any { return []any{&v.id, &v.data} })
	if err != nil {
		return nil, fmt.Errorf("read blocks of oscillators: %w", err)
	}
	out := make([]OffGridBlock, 0, len(found))
	for _, v := range found {
		values := make([]float64, len(v.data)/8)
		if openDoubles(values, v.data) != nil {
			continue
		}
		b := OffGridBlock{ID: v.id}
		for pair := range slices.Chunk(values, 2) {
			b.Oscillators = append(b.Oscillators, Oscillator{pair[0], pair[1]})
		}
		out = append(out, b)
	}
	return append(out, s.reserved...), nil
}

// OffGridSD is the SD of a block's oscillators, of one record and role, as it is stored.
type OffGridSD []byte

// Decode sets dst to the values. The error says that it is not these that were stored.
func (data OffGridSD) Decode(dst []float64) error { return openDoubles(dst, data) }

// OffGrid reads what is kept of a role of some records in some blocks of the snapshot's
// generation, and calls f with each. f must not keep the SD.
func (s *Snapshot) OffGrid(ctx context.Context, role string, records, blocks []int64, f func(recordID, blockID int64, sd OffGridSD) error) error {
	of, err := s.computations(ctx, role)
	if err != nil {
		return fmt.Errorf("read ordinates off the grid: %w", err)
	}
	var computed []int64
	recordsOf := map[int64][]int64{}
	for _, record := range records {
		if id, ok := of[record]; ok {
			if recordsOf[id] == nil {
				computed = append(computed, id)
			}
			recordsOf[id] = append(recordsOf[id], record)
		}
	}
	// A computation's blocks stand together. They are walked through, since to look each of
	// hundreds up costs more; the plus keeps the list from being used to do that.
	rows, err := s.tx.QueryContext(ctx, `SELECT o.computation_id, o.block_id, o.sd_m FROM json_each(?1) k
		CROSS JOIN off_grid o ON o.computation_id = k.value AND o.block_id BETWEEN (SELECT min(value) FROM json_each(?2)) AND (SELECT max(value) FROM json_each(?2))
			AND +o.block_id IN (SELECT value FROM json_each(?2))`, idList(computed), idList(blocks))
	if err != nil {
		return fmt.Errorf("read ordinates off the grid: %w", err)
	}
	defer rows.Close()
	var computation, block int64
	var sd sql.RawBytes
	for rows.Next() {
		if err := rows.Scan(&computation, &block, &sd); err != nil {
			return fmt.Errorf("read ordinates off the grid: %w", err)
		}
		for _, record := range recordsOf[computation] {
			if err := f(record, block, OffGridSD(sd)); err != nil {
				return err
			}
		}
	}
	return rows.Err()
}

var errSealed = errors.New("the values are not those that were stored")

// sealDoubles appends values as little-endian doubles and their CRC-32C.
func sealDoubles(dst []byte, values []float64) []byte {
	from := len(dst)
	for _, x := range values {
		dst = binary.LittleEndian.AppendUint64(dst, math.Float64bits(x))
	}
	return binary.LittleEndian.AppendUint32(dst, crc32.Checksum(dst[from:], castagnoli))
}

// openDoubles sets dst to the values that sealDoubles wrote.
func openDoubles(dst []float64, data []byte) error {
	at := 8 * len(dst)
	if len(data) != at+4 || crc32.Checksum(data[:at], castagnoli) != binary.LittleEndian.Uint32(data[at:]) {
		return errSealed
	}
	for i := range dst {
		dst[i] = math.Float64frombits(binary.LittleEndian.Uint64(data[8*i:]))
	}
	return nil
}
