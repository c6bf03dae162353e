package ingest

import (
	"bytes"
	"encoding/binary"
	"math"
	"math/bits"
	"strconv"
)

// exactPowers are the powers of ten that a float64 holds exactly.
var exactPowers = [...]float64{
	1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11,
	1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22,
}

const (
	// maxExact is 2⁵³: every integer up to it is a float64.
	maxExact = 1 << 53
	// maxDigits is the longest mantissa, leading zeros included, that surely fits
	// 64 bits.
	maxDigits = 19
	// maxExponent bounds the exponent while it is read; anything beyond is zero
	// or out of range whatever the mantissa of a line may be.
	maxExponent = 1 << 24
	signBit     = 1 << 63
)

// parseNumber reads b, without blanks round it, as one decimal number and
// returns the float64 nearest to it:
//
//	[+-] digits [. digits] [exponent],
//
// where digits may be missing on one side of the point, and the exponent is E,
// e, D or d with an optional sign and digits, or, after a mantissa with a
// point, a sign and exactly three digits without a letter, which is how Fortran
// writes exponents beyond 99. It reports false for anything else: no digits, NaN,
// Inf, hexadecimal, "**********", two fields that touch, and a number too large
// for a float64. Nothing is allocated for numbers that fit 64 bytes.
//
// Source: ISO/IEC 1539-1, edit descriptors E and D, for the exponent without
// letter (from memory).
func parseNumber(b []byte) (float64, bool) {
	if v, n := leadingNumber(b, '.'); n > 0 && n == len(b) {
		return v, true
	}
	return parseSlow(b)
}

// leadingNumber reads the number that b begins with, its decimals after mark, as
// far as it goes, and returns it and its length in bytes. The length is 0 for what is no number, and
// for numbers that are none of the common ones: more than maxDigits, an exponent
// of more than three digits or without letter, or a value that takes more than
// one operation to round correctly.
//
// A mantissa up to 2⁵³ times or divided by an exact power of ten is one
// correctly rounded operation.
//
// Source: W. D. Clinger, How to Read Floating Point Numbers Accurately, PLDI
// 1990, for the exact cases (from memory).
func leadingNumber(b []byte, mark byte) (v float64, n int) {
	if len(b) == 0 {
		return 0, 0
	}
	sign, i := signAt(b[0])
	mantissa, end := uint64(0), i // few digits: one by one is faster
	for ; end < len(b) && isDigit(b[end]); end++ {
		mantissa = mantissa*10 + uint64(b[end]-'0')
	}
	digits, decimals := end-i, 0
	if end < len(b) && b[end] == mark {
		point := end + 1
		if end = point; end+8 <= len(b) { // most decimals, without the cost of a call
			value, n := eightDigits(binary.LittleEndian.Uint64(b[end:]))
			mantissa = mantissa*integerPowers[n] + value
			if end += n; n == 8 {
				mantissa, end = digitsAt(b, end, mantissa)
			}
		} else {
			for ; end < len(b) && isDigit(b[end]); end++ {
				mantissa = mantissa*10 + uint64(b[end]-'0')
			}
		}
		decimals = end - point
		digits += decimals
	}
	exponent := -decimals
	if end < len(b) && b[end] >= 'D' { // what commonly follows is below all letters
		var e int
		e, end = exponentAt(b, end)
		exponent += e
	}
	if digits == 0 || digits > maxDigits || mantissa > maxExact || exponent < -22 || exponent > 22 {
		return 0, 0
	}
	v = float64(mantissa)
	if exponent < 0 {
		v /= exactPowers[-exponent]
	} else {
		v *= exactPowers[exponent]
	}
	return math.Float64frombits(math.Float64bits(v) | sign), end
}

// signAt returns the sign bit that c stands for and whether c is a sign, as a
// length. It takes no branches: half of a motion's numbers are negative, and no
// processor guesses which.
func signAt(c byte) (bit uint64, length int) {
	if c == '-' {
		bit = signBit
	}
	if (c-'+')&^2 == 0 { // '+' and '-' are two apart
		length = 1
	}
	return bit, length
}

// digitsAt appends the decimal digits that stand in b from i on to mantissa,
// which overflows beyond maxDigits, and returns it and where they end.
func digitsAt(b []byte, i int, mantissa uint64) (uint64, int) {
	for i+8 <= len(b) {
		value, n := eightDigits(binary.LittleEndian.Uint64(b[i:]))
		mantissa = mantissa*integerPowers[n] + value
		if i += n; n < 8 {
			return mantissa, i
		}
	}
	for ; i < len(b) && isDigit(b[i]); i++ {
		mantissa = mantissa*10 + uint64(b[i]-'0')
	}
	return mantissa, i
}

var integerPowers = [...]uint64{1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8}

// eightDigits returns the value and the number of the decimal digits that eight
// bytes of text, the first one lowest, begin with. All bytes are looked at and
// summed at once: neighbours to two digits, these to four, these to eight.
func eightDigits(text uint64) (value uint64, n int) {
	const ones = 0x0101010101010101
	d := text ^ '0'*ones
	// 0x76 carries 10 and more into the high bit of their byte; a byte above
	// the first such one may be wrong, and does not matter.
	n = bits.TrailingZeros64((d+0x76*ones|d)&(0x80*ones)) / 8
	d <<= 64 - 8*n // leading zeros for the digits that are not there
	d = (d*10 + d>>8) & 0x00ff00ff00ff00ff
	d = (d*100 + d>>16) & 0x0000ffff0000ffff
	return (d*10000 + d>>32) & 0xffffffff, n
}

// exponentAt reads the exponent with a letter and up to three digits that stands
// in b at i and returns it and where it ends; 0 and i where there is none, and
// maxExponent where it has more digits.
func exponentAt(b []byte, i int) (exponent, end int) {
	if i+1 >= len(b) || b[i]|0x20 != 'e' && b[i]|0x20 != 'd' {
		return 0, i
	}
	sign, j := signAt(b[i+1])
	j += i + 1
	first := j
	for ; j < len(b) && isDigit(b[j]); j++ {
		if j-first == 3 {
			return maxExponent, j
		}
		exponent = exponent*10 + int(b[j]-'0')
	}
	if j == first {
		return 0, i
	}
	if sign != 0 {
		exponent = -exponent
	}
	return exponent, j
}

// parseExponent reads what follows the digits of a mantissa.
func parseExponent(b []byte, point bool) (int, bool) {
	letter := false
	switch b[0] {
	case 'E', 'e', 'D', 'd':
		letter = true
		b = b[1:]
	}
	negative := false
	signed := len(b) > 0 && (b[0] == '-' || b[0] == '+')
	if signed {
		negative = b[0] == '-'
		b = b[1:]
	}
	if len(b) == 0 || !letter && (!signed || !point || len(b) != 3) {
		return 0, false
	}
	e := 0
	for _, c := range b {
		d := c - '0'
		if d > 9 {
			return 0, false
		}
		e = min(e*10+int(d), maxExponent)
	}
	if negative {
		e = -e
	}
	return e, true
}

// parseSlow reads what parseNumber promises, and has strconv round it.
func parseSlow(b []byte) (float64, bool) {
	i, digits, point := 0, 0, false
	if len(b) > 0 && (b[0] == '-' || b[0] == '+') {
		i = 1
	}
	for ; i < len(b) && (isDigit(b[i]) || b[i] == '.' && !point); i++ {
		if b[i] == '.' {
			point = true
		} else {
			digits++
		}
	}
	if digits == 0 {
		return 0, false
	}
	var room [64]byte
	text := append(room[:0], b[:i]...)
	if i < len(b) {
		e, ok := parseExponent(b[i:], point)
		if !ok {
			return 0, false
		}
		text = append(text, 'e')
		text = strconv.AppendInt(text, int64(e), 10)
	}
	value, err := strconv.ParseFloat(string(text), 64)
	return value, err == nil
}

// parseBareExponent reads a mantissa with a point and an exponent of a sign and
// one or two digits without letter. It is not part of parseNumber, where it would
// make one number of two that touch.
func parseBareExponent(b []byte) (float64, bool) {
	at := bytes.LastIndexAny(b, "+-")
	if at < 1 || len(b)-at > 3 || bytes.IndexByte(b[:at], '.') < 0 {
		return 0, false
	}
	var room [64]byte
	return parseNumber(append(append(append(room[:0], b[:at]...), 'E'), b[at:]...))
}
