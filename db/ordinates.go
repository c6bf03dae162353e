package db

import (
	"bytes"
	"fmt"
	"strconv"
)

// ordinateWidth is the width of one decimal in spectrum.sd_m, wide enough for
// -1.2345678901234567e-308. The view in the schema cuts by the same width.
const ordinateWidth = 24

// encodeOrdinates writes each value with 17 significant digits, enough to
// restore every double, right-aligned in ordinateWidth characters.
func encodeOrdinates(dst []byte, values []float64) []byte {
	var digits [ordinateWidth]byte
	for _, x := range values {
		s := strconv.AppendFloat(digits[:0], x, 'e', 16, 64)
		for range ordinateWidth - len(s) {
			dst = append(dst, ' ')
		}
		dst = append(dst, s...)
	}
	return dst
}

// decodeOrdinates restores len(dst) values.
func decodeOrdinates(dst []float64, data []byte) error {
	if len(data) != ordinateWidth*len(dst) {
		return fmt.Errorf("spectrum of %d bytes, want %d values of %d", len(data), len(dst), ordinateWidth)
	}
	for i := range dst {
		field := bytes.TrimLeft(data[i*ordinateWidth:(i+1)*ordinateWidth], " ")
		x, err := strconv.ParseFloat(string(field), 64)
		if err != nil {
			return fmt.Errorf("spectrum value %d: %w", i+1, err)
		}
		dst[i] = x
	}
	return nil
}
