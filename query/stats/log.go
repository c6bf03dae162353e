package stats

import "math"

// ln 2 in two parts. ln2High has 32 bits, so that its product with a binary
// exponent is exact.
const (
	ln2High = 2977044471.0 / (1 << 32)
	ln2Low  = math.Ln2 - ln2High
)

// Log returns the natural logarithm of x > 0. With x = m·2ᵏ, √½ <= m < √2 and
// s = (m-1)/(m+1) it sums
//
//	ln x = k·ln 2 + 2·(s + s³/3 + s⁵/5 + … + s²³/23).
//
// The first term left out is below 2⁻⁶⁴ of the sum. Log(0) is -Inf, Log(+Inf)
// is +Inf, and Log of a negative number or NaN is NaN. The relative error is
// below 2⁻⁵¹.
//
// Source: NIST DLMF, equation 4.6.4, https://dlmf.nist.gov/4.6.E4, with
// z = m.
func Log(x float64) float64 {
	switch {
	case math.IsNaN(x) || x < 0:
		return math.NaN()
	case x == 0:
		return math.Inf(-1)
	case math.IsInf(x, 1):
		return x
	}
	m, k := math.Frexp(x)
	if m < math.Sqrt2/2 {
		m *= 2
		k--
	}
	f := m - 1
	s := f / (2 + f)
	z := float64(s * s)
	var series float64
	for _, c := range atanhCoefficients {
		series = float64(series*z) + c
	}
	tail := float64(2*s) + float64(float64(2*s)*float64(series*z))
	return float64(float64(k)*ln2High) + (float64(float64(k)*ln2Low) + tail)
}

// atanhCoefficients are 1/23, 1/21, … 1/3, for Horner's rule.
var atanhCoefficients = [...]float64{
	1.0 / 23, 1.0 / 21, 1.0 / 19, 1.0 / 17, 1.0 / 15, 1.0 / 13, 1.0 / 11, 1.0 / 9, 1.0 / 7, 1.0 / 5, 1.0 / 3,
}

// Exp returns eˣ. With x = k·ln 2 + r, |r| <= ½·ln 2, it sums the series of eʳ
// up to r¹⁴/14! and scales by 2ᵏ; the first term left out is below 2⁻⁶² of the
// sum. It overflows to +Inf and underflows to 0. The relative error is below
// 2⁻⁵¹ for |x| < 700.
//
// Source: NIST DLMF, equation 4.2.19, https://dlmf.nist.gov/4.2.E19.
func Exp(x float64) float64 {
	// Beyond these the result is +Inf or rounds to 0.
	const highest, lowest = 709.8, -745.2
	switch {
	case math.IsNaN(x):
		return x
	case x > highest:
		return math.Inf(1)
	case x < lowest:
		return 0
	}
	k := math.RoundToEven(x / math.Ln2)
	r := (x - float64(k*ln2High)) - float64(k*ln2Low)
	series := inverseFactorials[0]
	for _, c := range inverseFactorials[1:] {
		series = float64(series*r) + c
	}
	return math.Ldexp(1+float64(series*r), int(k))
}

// inverseFactorials are 1/14!, 1/13!, … 1/1!, for Horner's rule.
var inverseFactorials = [...]float64{
	1.0 / 87178291200, 1.0 / 6227020800, 1.0 / 479001600, 1.0 / 39916800, 1.0 / 3628800, 1.0 / 362880, 1.0 / 40320,
	1.0 / 5040, 1.0 / 720, 1.0 / 120, 1.0 / 24, 1.0 / 6, 1.0 / 2, 1,
}
