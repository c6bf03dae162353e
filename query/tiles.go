package query

import (
	"cmp"
	"context"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"slices"

	"swaybook/db"
)

// tiles turn spectra, which are stored some motions at a time, into columns of one period. They are
// a file: some motions after others in the order of their records' ids, which is about how they
// lie in the store, of each damping; within a tile period by period. A tile here has so many
// motions that few of the store's, which have 63 of all roles, are read for two of them; each is
// written once, and what is read of one for some periods stands together.
type tiles struct {
	file     *os.File
	dampings []float64
	periods  []float64
	motions  []motion
	order    []int // positions of the motions, as they are in the file
	width    int   // motions of a tile, but for the last
}

// newTiles makes the file, in a folder, of tiles of about so many bytes.
func newTiles(folder string, tileBytes int, motions []motion, dampings, periods []float64) (*tiles, error) {
	file, err := os.CreateTemp(folder, ".tiles-*")
	if err != nil {
		return nil, fmt.Errorf("write ordinates: %w", err)
	}
	order := upTo(len(motions))
	slices.SortStableFunc(order, func(i, j int) int {
		return cmp.Compare(motions[i].members[0].RecordID, motions[j].members[0].RecordID)
	})
	return &tiles{
		file: file, dampings: dampings, periods: periods, motions: motions, order: order,
		width: max(1, tileBytes/(8*len(periods))),
	}, nil
}

func (t *tiles) remove() error {
	return errors.Join(t.file.Close(), os.Remove(t.file.Name()))
}

// each calls f with the positions in order from which and up to which each tile has motions.
func (t *tiles) each(f func(from, to int) error) error {
	for from := 0; from < len(t.order); from += t.width {
		if err := f(from, min(from+t.width, len(t.order))); err != nil {
			return err
		}
	}
	return nil
}

// offset is where in the file the tile of a damping is that begins with this position.
func (t *tiles) offset(damping, from int) int64 {
	return 8 * int64(len(t.periods)) * (int64(damping)*int64(len(t.order)) + int64(from))
}

// fill reads or computes SD at all dampings. It returns the positions of the motions of which
// one cannot be had, and why.
func (t *tiles) fill(ctx context.Context, snapshot *db.Snapshot) (unfit map[int]string, err error) {
	unfit = map[int]string{}
	for damping, zeta := range t.dampings {
		s := source{snapshot: snapshot}
		err := t.each(func(from, to int) error {
			part := make([]motion, 0, to-from)
			for _, i := range t.order[from:to] {
				part = append(part, t.motions[i])
			}
			loaded, left, err := s.loadMotions(ctx, part, dampedBy(zeta, t.periods))
			if err != nil {
				return err
			}
			for j, reason := range left {
				unfit[t.order[from+j]] = reason
			}
			return t.write(loaded.sd, t.offset(damping, from))
		})
		if err != nil {
			return nil, err
		}
	}
	return unfit, nil
}

// write writes a tile, of which the file has doubles with the low byte first.
func (t *tiles) write(sd []float64, offset int64) error {
	out := io.NewOffsetWriter(t.file, offset)
	buffer := make([]byte, 0, 64<<10)
	for values := range slices.Chunk(sd, cap(buffer)/8) {
		buffer = buffer[:0]
		for _, x := range values {
			buffer = binary.LittleEndian.AppendUint64(buffer, math.Float64bits(x))
		}
		if _, err := out.Write(buffer); err != nil {
			return fmt.Errorf("write ordinates: %w", err)
		}
	}
	return nil
}

// columns reads the SD at a damping, at the periods of these positions. into has a column a
// period, and place the position in it of each motion, -1 of one that is left out. It is safe
// for concurrent use.
func (t *tiles) columns(into [][]float64, place []int, damping, firstPeriod int) error {
	buffer := make([]byte, 8*t.width*len(into))
	return t.each(func(from, to int) error {
		width := to - from
		read := buffer[:8*width*len(into)]
		if _, err := t.file.ReadAt(read, t.offset(damping, from)+8*int64(width)*int64(firstPeriod)); err != nil {
			return fmt.Errorf("read ordinates back: %w", err)
		}
		for p, column := range into {
			row := read[8*width*p:]
			for j, i := range t.order[from:to] {
				if at := place[i]; at >= 0 {
					column[at] = math.Float64frombits(binary.LittleEndian.Uint64(row[8*j:]))
				}
			}
		}
		return nil
	})
}

// places are where each of n motions is among those that are fit.
func places(n int, unfit map[int]string) []int {
	out, next := make([]int, n), 0
	for i := range out {
		if _, isOut := unfit[i]; isOut {
			out[i] = -1
			continue
		}
		out[i] = next
		next++
	}
	return out
}
