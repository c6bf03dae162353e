package stats

import "math"

// Mean returns the arithmetic mean
//
//	(x[0] + x[1] + … + x[n-1]) / n,
//
// summed in the order given, in the unit of xs. The mean of no values is NaN.
// The relative error for values of one sign is at most n·2⁻⁵³.
//
// Source of the bound: N. J. Higham, Accuracy and Stability of Numerical
// Algorithms, 2nd ed., SIAM 2002, section 4.2.
func Mean(xs []float64) float64 {
	var sum float64
	for _, x := range xs {
		sum += x
	}
	return sum / float64(len(xs))
}

// LogMean returns the geometric mean exp(mean(ln x)), in the unit of xs. It is
// NaN where xs is empty or a value is not positive.
func LogMean(xs []float64) float64 {
	mean, _ := LogMoments(nil, xs)
	return mean
}

// LogStd returns the sample standard deviation of ln x, with divisor n-1 and
// without unit. It is NaN for fewer than two values and where a value is not
// positive.
func LogStd(xs []float64) float64 {
	_, std := LogMoments(nil, xs)
	return std
}

// LogMoments returns LogMean and LogStd of xs in one go. scratch holds the
// logarithms: where its capacity is less than len(xs), a slice is allocated.
// It must not overlap xs.
//
// The deviation is found in two passes, the mean first. Equal values give
// exactly that value and deviation 0.
//
// Source: T. F. Chan, G. H. Golub, R. J. LeVeque, "Algorithms for computing
// the sample variance", The American Statistician 37 (1983) 242–247: the
// two-pass algorithm.
func LogMoments(scratch, xs []float64) (mean, std float64) {
	logs, equal, ok := logarithms(scratch, xs)
	switch {
	case !ok:
		return math.NaN(), math.NaN()
	case len(xs) == 1:
		return xs[0], math.NaN()
	case equal:
		return xs[0], 0
	}
	mu := Mean(logs)
	var sum float64
	for _, y := range logs {
		d := y - mu
		sum += float64(d * d)
	}
	return Exp(mu), math.Sqrt(sum / float64(len(logs)-1))
}

// logarithms reports with ok whether there is a value and all are positive and
// finite.
func logarithms(scratch, xs []float64) (logs []float64, equal, ok bool) {
	if cap(scratch) < len(xs) {
		scratch = make([]float64, len(xs))
	}
	logs = scratch[:len(xs)]
	equal = true
	for i, x := range xs {
		if !(x > 0) || math.IsInf(x, 1) {
			return nil, false, false
		}
		logs[i] = Log(x)
		equal = equal && x == xs[0]
	}
	return logs, equal, len(xs) > 0
}

// Quantile7 returns the p-quantile, 0 <= p <= 1, of a sample sorted in
// ascending order: with h = (n-1)·p and j = ⌊h⌋ it is
//
//	x[j] + (h-j)·(x[j+1]-x[j]).
//
// It is NaN where sorted is empty or p is outside [0, 1]. The result is never
// outside [x[j], x[j+1]].
//
// Source: R. J. Hyndman, Y. Fan, "Sample quantiles in statistical packages",
// The American Statistician 50 (1996) 361–365: definition 7.
func Quantile7(sorted []float64, p float64) float64 {
	if !(p >= 0 && p <= 1) {
		return math.NaN()
	}
	return quantileAt(sorted, float64(float64(len(sorted)-1)*p))
}

// Percentiles sets dst to the percentiles of a sample sorted in ascending
// order, by the definition of Quantile7 with p = percents[i]/100, and returns
// it. If dst is nil a slice is allocated; otherwise its length must be
// len(percents), or Percentiles panics.
//
// The position is found as (n-1)·percent/100, in this order, since 100 is an
// exact number and 1/100 is none.
func Percentiles(dst, sorted, percents []float64) []float64 {
	if dst == nil {
		dst = make([]float64, len(percents))
	}
	if len(dst) != len(percents) {
		panic("stats: length of dst differs from length of percents")
	}
	for i, percent := range percents {
		dst[i] = math.NaN()
		if percent >= 0 && percent <= 100 {
			dst[i] = quantileAt(sorted, float64(float64(len(sorted)-1)*percent)/100)
		}
	}
	return dst
}

// quantileAt interpolates at position h, which counts from 0.
func quantileAt(sorted []float64, h float64) float64 {
	n := len(sorted)
	if n == 0 {
		return math.NaN()
	}
	j := int(h)
	if j >= n-1 {
		return sorted[n-1]
	}
	low, high := sorted[j], sorted[j+1]
	return min(low+float64((h-float64(j))*(high-low)), high)
}

// GeometricMean returns √(a·b) of two values that are not negative. The product
// is taken first, so that the mean of two equal values is that value; where it
// would overflow or lose digits the roots are taken first.
func GeometricMean(a, b float64) float64 {
	// Below this a product may be subnormal.
	const smallest = 0x1p-1021
	product := a * b
	if product >= smallest && product <= math.MaxFloat64 {
		return math.Sqrt(product)
	}
	return math.Sqrt(a) * math.Sqrt(b)
}
