package db

import (
	"bytes"
	"fmt"
	"math"
	"math/big"
	"strconv"
	"sync"
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

// Ordinates is the text of some SD in m, one a period, as it is stored.
type Ordinates []byte

// Decode sets dst to the values. The error says that the text does not hold
// len(dst) of them.
func (data Ordinates) Decode(dst []float64) error {
	if len(data) != ordinateWidth*len(dst) {
		return fmt.Errorf("spectrum of %d bytes, want %d values of %d", len(data), len(dst), ordinateWidth)
	}
	powers := powersOfTen()
	for i := range dst {
		field := data[i*ordinateWidth : (i+1)*ordinateWidth]
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
	const first = ordinateWidth - 22
	if field[first-1] != ' ' || field[first+1] != '.' || field[first+18] != 'e' {
		return 0, false
	}
	digits := uint64(field[first] - '0')
	bad := digits > 9
	for _, c := range field[first+2 : first+18] {
		d := uint64(c - '0')
		bad = bad || d > 9
		digits = 10*digits + d
	}
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
