package stats

import "math"

// AndersonDarling tests whether ln x is normal, with mean and variance from the
// sample, which is positive and sorted in ascending order. With z = (ln x -
// mean)/std, divisor n-1, and Φ the normal distribution,
//
//	A²  = -n - 1/n · Σ (2i-1)·(ln Φ(z[i]) + ln(1-Φ(z[n+1-i]))),  i = 1 … n,
//	A²* = A²·(1 + 0.75/n + 2.25/n²),
//
// and p is the probability that a normal sample has at least that A²*, by
// formulas fitted to simulations; beyond A²* = 10 it stays at 3.7e-24, the last
// that they were fitted to. A small p speaks against a lognormal distribution.
// Values that depend on each other make p too small.
//
// scratch holds the logarithms, as for LogMoments. Both results are NaN for
// fewer than eight values, where all are equal, where a value is not positive
// or not finite and where they are not in order.
//
// Source: R. B. D'Agostino, M. A. Stephens (eds.), Goodness-of-Fit Techniques,
// Marcel Dekker 1986, section 4.8 and table 4.9 (cited from memory); the
// statistic is that of T. W. Anderson, D. A. Darling, "A test of goodness of
// fit", Journal of the American Statistical Association 49 (1954) 765–769.
func AndersonDarling(scratch, sorted []float64) (statistic, p float64) {
	const least = 8
	logs, equal, ok := logarithms(scratch, sorted)
	n := len(logs)
	if !ok || equal || n < least {
		return math.NaN(), math.NaN()
	}
	mean := Mean(logs)
	var squares float64
	for i, y := range logs {
		if i > 0 && sorted[i] < sorted[i-1] {
			return math.NaN(), math.NaN()
		}
		squares += float64((y - mean) * (y - mean))
	}
	std := math.Sqrt(squares / float64(n-1))
	if std == 0 {
		return math.NaN(), math.NaN()
	}
	var sum float64
	for i, y := range logs {
		below, above := logTails((y - mean) / std)
		sum += float64(float64(2*i+1)*below) + float64(float64(2*(n-i)-1)*above)
	}
	size := float64(n)
	statistic = (-size - sum/size) * (1 + 0.75/size + 2.25/float64(size*size))
	return statistic, normalityProbability(statistic)
}

// normalityProbability is table 4.9 of D'Agostino and Stephens (1986).
func normalityProbability(a float64) float64 {
	parabola := func(c0, c1, c2, a float64) float64 {
		return Exp(c0 + float64(c1*a) + float64(c2*float64(a*a)))
	}
	switch {
	case a < 0.2:
		return 1 - parabola(-13.436, 101.14, -223.73, a)
	case a < 0.34:
		return 1 - parabola(-8.318, 42.796, -59.938, a)
	case a < 0.6:
		return parabola(0.9177, -4.279, -1.38, a)
	}
	return parabola(1.2937, -5.709, 0.0186, min(a, 10))
}

// logTails returns ln Φ(z) and ln(1-Φ(z)), Φ the standard normal distribution,
// of any finite z. The relative error of either is below 2⁻⁴⁶.
func logTails(z float64) (below, above float64) {
	x := math.Abs(z)
	var tail, logTail float64 // of 1-Φ(x)
	if x < seriesBelow {
		tail = 0.5 - float64(Exp(-float64(x*x)/2)/sqrt2Pi*centralSeries(x))
		logTail = Log(tail)
	} else {
		logTail = Log(millsRatio(x)/sqrt2Pi) - float64(float64(x*x)/2)
		tail = Exp(logTail)
	}
	rest := log1p(-tail)
	if z < 0 {
		return logTail, rest
	}
	return rest, logTail
}

const (
	sqrt2Pi = 2.506628274631000502415765284811045253
	// Below this the series loses less than seven bits in the difference from
	// 1/2; above it the continued fraction needs no more than fractionTerms.
	seriesBelow   = 2.5
	fractionTerms = 80
)

// centralSeries returns (Φ(x) - 1/2)/φ(x), φ the density, as
//
//	x + x³/3 + x⁵/(3·5) + x⁷/(3·5·7) + …
//
// Source: NIST DLMF, equation 7.6.2, https://dlmf.nist.gov/7.6.E2, with
// z = x/√2.
func centralSeries(x float64) float64 {
	square := float64(x * x)
	term, sum := x, x
	for k := 3.0; term > 0x1p-60*sum; k += 2 {
		term = float64(term * (square / k))
		sum += term
	}
	return sum
}

// millsRatio returns (1-Φ(x))/φ(x) as the continued fraction
//
//	1/(x + 1/(x + 2/(x + 3/(x + …)))).
//
// Source: NIST DLMF, equation 7.9.3, https://dlmf.nist.gov/7.9.E3, with z =
// i·x/√2 (cited from memory).
func millsRatio(x float64) float64 {
	f := x
	for k := fractionTerms; k > 0; k-- {
		f = x + float64(k)/f
	}
	return 1 / f
}

// log1p returns ln(1+x), -1 < x <= 0, without losing the digits of a small x: what
// rounding makes of 1+x is taken back by the factor x/((1+x)-1).
//
// Source: D. Goldberg, "What every computer scientist should know about
// floating-point arithmetic", ACM Computing Surveys 23 (1991) 5–48, theorem 4.
func log1p(x float64) float64 {
	u := 1 + x
	if u == 1 {
		return x
	}
	return Log(u) * x / (u - 1)
}
