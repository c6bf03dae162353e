package db

import (
	"encoding/binary"
	"fmt"
	"math"
)

// OrdinateWidth is the number of bytes of one value in tile_part.sd_m. The view in the schema
// cuts by the same width.
const OrdinateWidth = 8

// encodeOrdinates appends each value as it is stored: a double of IEEE 754, the most
// significant byte first. The view knows none that are negative, which no SD is.
func encodeOrdinates(dst []byte, values []float64) []byte {
	for _, x := range values {
		dst = binary.BigEndian.AppendUint64(dst, math.Float64bits(x))
	}
	return dst
}

// Ordinates are some SD in m, one a period, as they are stored.
type Ordinates []byte

// Decode sets dst to the values. The error says that there are not len(dst) of them.
func (data Ordinates) Decode(dst []float64) error {
	if len(data) != OrdinateWidth*len(dst) {
		return fmt.Errorf("spectrum of %d bytes, want %d values of %d", len(data), len(dst), OrdinateWidth)
	}
	for i := range dst {
		dst[i] = math.Float64frombits(binary.BigEndian.Uint64(data[OrdinateWidth*i:]))
	}
	return nil
}
