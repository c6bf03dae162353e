package spectrum

import "math"

// double is the unevaluated sum hi + lo of two floats with |lo| at most half a
// unit in the last place of hi, which carries about 106 bits. Coefficients are
// formed in it and rounded once, because in plain arithmetic their small
// differences lose all digits when a period is long against the step.
//
// Source: T. J. Dekker, "A floating-point technique for extending the available
// precision", Numerische Mathematik 18, 1971, 224–242; sum of two after D. E.
// Knuth, The Art of Computer Programming, vol. 2, §4.2.2.
type double struct{ hi, lo float64 }

// twoSum returns a + b exactly.
func twoSum(a, b float64) double {
	s := a + b
	t := s - a
	return double{s, (a - (s - t)) + (b - t)}
}

// quickSum returns a + b exactly, for |a| >= |b| or a = 0.
func quickSum(a, b float64) double {
	s := a + b
	return double{s, b - (s - a)}
}

// twoProduct returns a·b exactly, short of underflow.
func twoProduct(a, b float64) double {
	p := float64(a * b)
	return double{p, math.FMA(a, b, -p)}
}

func (x double) add(y double) double {
	s, t := twoSum(x.hi, y.hi), twoSum(x.lo, y.lo)
	s = quickSum(s.hi, s.lo+t.hi)
	return quickSum(s.hi, s.lo+t.lo)
}

func (x double) neg() double { return double{-x.hi, -x.lo} }

func (x double) sub(y double) double { return x.add(y.neg()) }

func (x double) mul(y double) double {
	p := twoProduct(x.hi, y.hi)
	return quickSum(p.hi, p.lo+(float64(x.hi*y.lo)+float64(x.lo*y.hi)))
}

// times returns x·b.
func (x double) times(b float64) double {
	p := twoProduct(x.hi, b)
	return quickSum(p.hi, p.lo+float64(x.lo*b))
}

// over returns x/b.
func (x double) over(b float64) double {
	q := x.hi / b
	r := math.FMA(-q, b, x.hi) + x.lo
	return quickSum(q, r/b)
}
