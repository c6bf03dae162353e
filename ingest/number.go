package ingest

import "strconv"

// exactPowers are the powers of ten that a float64 holds exactly.
var exactPowers = [...]float64{
	1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11,
	1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22,
}

const (
	// maxExact is 2⁵³: every integer up to it is a float64.
	maxExact = 1 << 53
	// mantissaRoom is the largest mantissa that takes another digit without
	// overflow of 64 bits: 10·mantissaRoom + 9 < 2⁶⁴.
	mantissaRoom = (1<<64 - 10) / 10
	// maxExponent bounds the exponent while it is read; anything beyond is zero
	// or out of range whatever the mantissa of a line may be.
	maxExponent = 1 << 24
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
// for a float64. Nothing is allocated for numbers of up to 19 digits.
//
// A mantissa up to 2⁵³ times or divided by an exact power of ten is one
// correctly rounded operation; all other numbers go to strconv.ParseFloat.
//
// Source: W. D. Clinger, How to Read Floating Point Numbers Accurately, PLDI
// 1990, for the exact cases (from memory); ISO/IEC 1539-1, edit descriptors E and
// D, for the exponent without letter (from memory).
func parseNumber(b []byte) (float64, bool) {
	i, negative := 0, false
	if len(b) > 0 && (b[0] == '-' || b[0] == '+') {
		negative = b[0] == '-'
		i = 1
	}
	var mantissa uint64
	exponent, digits, long, point := 0, 0, false, false
	for ; i < len(b); i++ {
		d := b[i] - '0'
		if d > 9 {
			if b[i] != '.' || point {
				break
			}
			point = true
			continue
		}
		digits++
		if mantissa > mantissaRoom {
			long = true
			continue
		}
		mantissa = mantissa*10 + uint64(d)
		if point {
			exponent--
		}
	}
	if digits == 0 {
		return 0, false
	}
	end := i
	if i < len(b) {
		e, ok := parseExponent(b[i:], point)
		if !ok {
			return 0, false
		}
		exponent += e
	}
	if long || mantissa > maxExact || exponent < -22 || exponent > 22 {
		return parseSlow(b[:end], b[end:])
	}
	value := float64(mantissa)
	if exponent < 0 {
		value /= exactPowers[-exponent]
	} else {
		value *= exactPowers[exponent]
	}
	if negative {
		value = -value
	}
	return value, true
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

// parseSlow reads a mantissa and an exponent that are known to be well formed.
func parseSlow(mantissa, exponent []byte) (float64, bool) {
	var room [64]byte
	text := append(room[:0], mantissa...)
	if len(exponent) > 0 {
		e, ok := parseExponent(exponent, true)
		if !ok {
			return 0, false
		}
		text = append(text, 'e')
		text = strconv.AppendInt(text, int64(e), 10)
	}
	value, err := strconv.ParseFloat(string(text), 64)
	return value, err == nil
}
