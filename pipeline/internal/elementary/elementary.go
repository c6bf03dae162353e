// Package elementary holds the functions of mathematics that results are stored of, with
// the same bits on every machine. Those of Go's standard library are fused on some
// architectures and written in assembly on others, so that their last bits differ.
//
// Only + − × ÷ √, rounding to whole numbers and scaling by powers of two are used, and
// every product is rounded. Arguments and results are plain numbers, without units.
package elementary

import "math"

// SincosPi returns the sine and the cosine of π·x, each within three units of its last place.
// They are exact where x is a multiple of a half. x is finite.
//
// The argument is brought to within a quarter of a multiple of a half, which is exact, and
// Taylor's series are summed there until their next term is below 1e-19.
func SincosPi(x float64) (sin, cos float64) {
	x = math.Mod(x, 2)
	quarter := math.RoundToEven(2 * x)
	t := float64(math.Pi * (x - float64(quarter/2)))
	s, c := sine(t), cosine(t)
	switch int(quarter) & 3 {
	case 1:
		return c, -s
	case 2:
		return -s, -c
	case 3:
		return -c, s
	}
	return s, c
}

// TanPi returns the tangent of π·x, within six units of its last place; it is infinite at
// odd multiples of a half. x is finite.
func TanPi(x float64) float64 {
	sin, cos := SincosPi(x)
	return sin / cos
}

// sine is that of |t| ≤ π/4.
func sine(t float64) float64 {
	tt, sum := float64(t*t), 0.0
	for k := 17.0; k >= 3; k -= 2 {
		sum = float64((1-sum)*tt) / float64(k*(k-1))
	}
	return t - float64(t*sum)
}

// cosine is that of |t| ≤ π/4.
func cosine(t float64) float64 {
	tt, sum := float64(t*t), 0.0
	for k := 18.0; k >= 2; k -= 2 {
		sum = float64((1-sum)*tt) / float64(k*(k-1))
	}
	return 1 - sum
}

// The logarithm of 2 in two parts, of which the first times a whole number below 2²⁰ is exact.
const (
	ln2High = 0x1.62e42fee00000p-1
	ln2Low  = math.Ln2 - ln2High
)

// Exp returns e to the x, within three units of its last place; 0 and infinity beyond the
// range of floats.
//
// x less a multiple of the logarithm of 2 is summed by Taylor's series until its next term
// is below 1e-19.
func Exp(x float64) float64 {
	if !(math.Abs(x) < 800) {
		if x < 0 {
			return 0
		}
		return x * math.Inf(1) // not a number stays what it is
	}
	twos := math.RoundToEven(x / math.Ln2)
	t := (x - float64(twos*ln2High)) - float64(twos*ln2Low)
	sum := 1.0
	for k := 15.0; k >= 2; k-- {
		sum = 1 + float64(t*sum)/k
	}
	return math.Ldexp(1+float64(t*sum), int(twos))
}

// Log returns the natural logarithm of x, within three units of its last place, of numbers
// near 1 of the last place of 1 − x; -Inf of 0, and no number below.
//
// x = 2ⁿ·m, m from √½ to √2, and ln m = 2·artanh((m − 1)/(m + 1)), summed by its series until
// the next term is below 1e-18.
func Log(x float64) float64 {
	switch {
	case x == 0:
		return math.Inf(-1)
	case !(x > 0) || math.IsInf(x, 1):
		return math.Sqrt(x) // no number below 0, x otherwise
	}
	m, n := math.Frexp(x)
	if m < math.Sqrt2/2 {
		m, n = 2*m, n-1
	}
	s := (m - 1) / (m + 1)
	ss, sum := float64(s*s), 0.0
	for k := 21.0; k >= 3; k -= 2 {
		sum = float64(ss * (1/k + sum))
	}
	return float64(float64(n)*ln2High) + (2*s + (float64(2*s*sum) + float64(float64(n)*ln2Low)))
}

// Hypot returns √(x² + y²), within two units of its last place, wherever that is a float.
func Hypot(x, y float64) float64 {
	large, small := math.Abs(x), math.Abs(y)
	if large < small {
		large, small = small, large
	}
	if large == 0 || math.IsInf(large, 0) {
		return large
	}
	small /= large
	return float64(large * math.Sqrt(1+float64(small*small)))
}
