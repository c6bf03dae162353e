package db

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"math"
	"math/big"
	"strconv"
	"sync"
)

// OrdinateWidth is the number of bytes of one decimal in spectrum.sd_m, wide enough for
// -1.2345678901234567e-308. The view in the schema cuts by the same width.
const OrdinateWidth = 24

// encodeOrdinates writes each value with 17 significant digits, enough to
// restore every double, right-aligned in OrdinateWidth characters.
func encodeOrdinates(dst []byte, values []float64) []byte {
	var digits [OrdinateWidth]byte
	for _, x := range values {
		s := strconv.AppendFloat(digits[:0], x, 'e', 16, 64)
		for range OrdinateWidth - len(s) {
			dst = append(dst, ' ')
		}
		dst = append(dst, s...)
	}
	return dst
}

// Ordinates is the text of some SD in m, one a period, as it is stored.
type Ordinates []byte

// Decode sets dst to the values. The error says that the text does not hold
// len(dst) of them.
func (data Ordinates) Decode(dst []float64) error {
	if len(data) != OrdinateWidth*len(dst) {
		return fmt.Errorf("spectrum of %d bytes, want %d values of %d", len(data), len(dst), OrdinateWidth)
	}
	powers := powersOfTen()
	for i := range dst {
		field := data[i*OrdinateWidth : (i+1)*OrdinateWidth]
		x, ok := fastOrdinate(field, powers)
		if !ok {
			var err error
			if x, err = strconv.ParseFloat(string(bytes.TrimLeft(field, " ")), 64); err != nil {
				return fmt.Errorf("spectrum value %d: %w", i+1, err)
			}
		}
		dst[i] = x
	}
	return nil
}

// The powers 10^(e-16) that fastOrdinate knows, for two-digit exponents e.
const (
	leastPower  = -64
	powersKnown = 81
)

// wide is a number as the unevaluated sum of two doubles, good to 106 bits.
type wide struct{ hi, lo float64 }

var powersOfTen = sync.OnceValue(func() *[powersKnown]wide {
	var powers [powersKnown]wide
	for i := range powers {
		exact, _, err := big.ParseFloat(fmt.Sprintf("1e%d", leastPower+i), 10, 200, big.ToNearestEven)
		if err != nil {
			panic("db: " + err.Error())
		}
		hi, _ := exact.Float64()
		lo, _ := exact.Sub(exact, big.NewFloat(hi)).Float64()
		powers[i] = wide{hi, lo}
	}
	return &powers
})

// fastOrdinate reads "  d.dddddddddddddddde±dd" of a value written by
// encodeOrdinates, and says no to any other form.
//
// It is exact for these. The product is good to about 2^-104 of itself. The 17
// digits lie within 5e-17 of the double that they stand for, relative, and the
// nearest point halfway to another double is at least 5.55e-17 away, so that the
// product cannot fall on the wrong side.
func fastOrdinate(field []byte, powers *[powersKnown]wide) (float64, bool) {
	const first = OrdinateWidth - 22
	if field[first-2] != ' ' || field[first-1] != ' ' || field[first+1] != '.' || field[first+18] != 'e' {
		return 0, false
	}
	whole := uint64(field[first] - '0')
	high, okHigh := eightDigits(binary.LittleEndian.Uint64(field[first+2:]))
	low, okLow := eightDigits(binary.LittleEndian.Uint64(field[first+10:]))
	digits := whole*1e16 + high*1e8 + low
	bad := whole > 9 || !okHigh || !okLow
	tens, ones := int(field[first+20]-'0'), int(field[first+21]-'0')
	exponent := 10*tens + ones
	switch field[first+19] {
	case '-':
		exponent = -exponent
	case '+':
	default:
		bad = true
	}
	at := exponent - 16 - leastPower
	if bad || tens > 9 || ones > 9 || at < 0 || at >= powersKnown {
		return 0, false
	}
	hi := float64(digits)
	lo := float64(int64(digits) - int64(hi))
	p := powers[at]
	product := float64(hi * p.hi)
	rest := math.FMA(hi, p.hi, -product)
	return product + (rest + (float64(hi*p.lo) + float64(lo*p.hi))), true
}

// eightDigits reads eight ASCII digits, the first in the lowest byte. Neighbours
// are joined to numbers of two, four and eight digits, all at once: a multiplier
// such as 10·2⁸ + 1 adds ten times a byte to the next.
func eightDigits(text uint64) (value uint64, ok bool) {
	const zeros, highHalves, sixes = 0x3030303030303030, 0xf0f0f0f0f0f0f0f0, 0x0606060606060606
	// A digit's high half is 3, and stays 3 when 6 is added.
	if text&highHalves != zeros || (text+sixes)&highHalves != zeros {
		return 0, false
	}
	v := text - zeros
	v = v * (10<<8 + 1) >> 8 & 0x00ff00ff00ff00ff
	v = v * (100<<16 + 1) >> 16 & 0x0000ffff0000ffff
	return v * (10000<<32 + 1) >> 32, true
}
