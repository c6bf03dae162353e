package db

import (
	"encoding/binary"
	"errors"
	"fmt"
	"math/bits"
	"slices"
)

const (
	// blockSize is how many numbers share a width; so many of any width fill whole
	// bytes.
	blockSize = 64
	// maxWidth is the widest number that fits 64 bits with seven others before it.
	maxWidth = 57
)

// appendPacked appends the numbers in blocks: a byte with the bits that the
// largest of a block needs, and the numbers with so many bits each, the lowest
// first. No number has more than maxWidth bits.
func appendPacked(dst []byte, numbers []uint64) []byte {
	for block := range slices.Chunk(numbers, blockSize) {
		all := uint64(0)
		for _, number := range block {
			all |= number
		}
		width := uint(bits.Len64(all))
		dst = append(dst, byte(width))
		at, end := len(dst), len(dst)+packedBytes(len(block), width)
		dst = slices.Grow(dst, end-at+8)[:end+8] // eight at a time are written
		waiting, have := uint64(0), uint(0)
		for _, number := range block {
			waiting |= number << (have & 63)
			have += width
			binary.LittleEndian.PutUint64(dst[at:], waiting)
			at += int(have / 8)
			waiting >>= have &^ 7 & 63
			have %= 8
		}
		dst = dst[:end]
	}
	return dst
}

// packedBytes returns the bytes that so many numbers take.
func packedBytes(count int, width uint) int { return (count*int(width) + 7) / 8 }

// unpack fills the room's words with n numbers from data, which must hold them
// and nothing else.
func (r *room) unpack(data []byte, n int) error {
	if n > blockSize*len(data) {
		return fmt.Errorf("%d bytes cannot hold %d samples", len(data), n)
	}
	r.grow(n)
	var room [packRoom]byte
	for block := range slices.Chunk(r.words, blockSize) {
		if len(data) == 0 || data[0] > maxWidth {
			return errors.New("damaged block")
		}
		width := uint(data[0])
		size := packedBytes(len(block), width)
		data = data[1:]
		if size > len(data) {
			return errors.New("series ends early")
		}
		from := data
		if size+8 > len(data) { // eight at a time are read
			from = room[:]
			copy(from, data)
		}
		at := uint(0)
		for i := range block {
			block[i] = binary.LittleEndian.Uint64(from[at/8:]) >> (at % 8) & (1<<(width&63) - 1)
			at += width
		}
		data = data[size:]
	}
	if len(data) > 0 {
		return errors.New("series is longer than its samples")
	}
	return nil
}

// packRoom holds the widest block and the eight bytes behind it.
const packRoom = blockSize*maxWidth/8 + 16
