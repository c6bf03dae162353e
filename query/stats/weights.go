package stats

import (
	"math"
	"sort"
)

// EffectiveNumber returns the number of equally weighted values whose mean is
// as uncertain as that of values with the given weights,
//
//	(Σ w)² / Σ w².
//
// It is len(weights) where all are equal, whatever their scale, and 0 where
// there is none above 0. It is NaN where a weight is negative, infinite or NaN.
// Weights below 2⁻¹⁰⁷⁴ of the greatest count as 0, here and below.
//
// Source: L. Kish, Survey Sampling, Wiley 1965, section 8.2 (cited from
// memory).
func EffectiveNumber(weights []float64) float64 {
	s, ok := newShares(len(weights), weights, nil)
	if !ok {
		for _, w := range weights {
			if !(w == 0) {
				return math.NaN()
			}
		}
		return 0
	}
	var total, squares float64
	for i := range weights {
		_, w := s.at(i)
		total += w
		squares += float64(w * w)
	}
	return total * (total / squares)
}

// WeightedMean returns Σ w·x / Σ w, in the unit of xs. A value of weight 0 does
// not count, not even where it is NaN. Equal weights give Mean, to the bit. It
// is NaN where nothing counts and where a weight is negative, infinite or NaN;
// it panics where the lengths differ.
func WeightedMean(xs, weights []float64) float64 {
	return RepeatedMean(xs, weights, nil)
}

// WeightedLogMoments returns the weighted geometric mean exp(m), in the unit of
// xs, and the deviation of ln x, without unit:
//
//	m = Σ w·ln x / W,  std² = Σ w·(ln x - m)² / (W - Σ w²/W),  W = Σ w.
//
// The divisor is that which makes std² unbiased where the values are
// independent, of one variance and the weights say nothing about them; it does
// not depend on the scale of the weights. Equal weights give LogMoments, to the
// bit. scratch holds the logarithms as there.
//
// Values of weight 0 do not count. Both are NaN where nothing counts, where a
// value that counts is not positive or not finite, and where a weight is
// negative, infinite or NaN; std is NaN where a single value counts. It panics
// where the lengths differ. Values that are all equal give exactly that value
// and deviation 0.
//
// Source: the divisor follows from E Σ w·(y-m)² = σ²·(W - Σ w²/W) for
// independent y of variance σ².
func WeightedLogMoments(scratch, xs, weights []float64) (mean, std float64) {
	s, ok := newShares(len(xs), weights, nil)
	if !ok {
		return math.NaN(), math.NaN()
	}
	if cap(scratch) < len(xs) {
		scratch = make([]float64, len(xs))
	}
	logs := scratch[:len(xs)]
	for i, x := range xs {
		if !s.has(i) {
			continue
		}
		if !(x > 0) || math.IsInf(x, 1) {
			return math.NaN(), math.NaN()
		}
		logs[i] = Log(x)
	}
	mu, std := s.moments(logs)
	if first, equal := s.level(xs); equal {
		return first, std
	}
	return Exp(mu), std
}

// WeightedPercentiles sets dst to the weighted percentiles of a sample sorted in
// ascending order, with its weights in the same order (SortWeighted), and
// returns it. With the effective number n* of the weights, p = percents[i]/100
// and a = (n*-1)·p, a percentile is the mean of the sample's step function over
// one of n* parts,
//
//	Q(p) = n*·∫ F⁻¹(t) dt  from a/n* to (a+1)/n*,
//
// where F⁻¹(t) is the first value at which the weights up to and with it reach
// the share t of all. Equal weights give Percentiles, to the bit. Percentile
// 100 is the mean of the greatest values that make up 1/n* of all, hence the
// maximum only where the maximum has that much weight; percentile 0 likewise.
//
// If dst is nil a slice is allocated; otherwise its length must be
// len(percents). scratch holds running sums: where its capacity is less than
// len(sorted), a slice is allocated. It must not overlap the others.
//
// Values of weight 0 do not count. All are NaN where nothing counts and where a
// weight is negative, infinite or NaN; one is NaN where its percent is outside
// 0 to 100. It panics where lengths differ. The cost is that of one pass, and
// for each percentile of a search and of the values that lie in its part.
//
// Source: A. Akinshin, "Weighted quantile estimators", arXiv:2304.07265 (2023):
// the generalisation of definition 7 of Hyndman and Fan (1996).
func WeightedPercentiles(dst, scratch, sorted, weights, percents []float64) []float64 {
	return RepeatedPercentiles(dst, scratch, sorted, weights, nil, percents)
}

// steps is a sample's step function: value i spans the positions from ends[i-1]
// to ends[i], of which there are as many as the sample effectively has members.
type steps struct {
	sorted, ends []float64
	effective    float64
}

// newSteps keeps the positions in ends.
func newSteps(ends, sorted []float64, s shares) steps {
	var total, squares float64
	for i := range sorted {
		times, weight := s.at(i)
		mass := float64(times * weight)
		total += mass
		squares += float64(mass * weight)
		ends[i] = total
	}
	scale := total / squares
	for i := range ends {
		ends[i] *= scale
	}
	return steps{sorted: sorted, ends: ends, effective: total * scale}
}

// meanFrom returns the mean of the step function from position a to a+1. It
// adds every rise within to the value at a, times what is left behind it, so
// that nothing cancels and no value of no span counts.
func (f steps) meanFrom(a float64) float64 {
	i := sort.Search(len(f.ends), func(i int) bool { return f.ends[i] > a })
	if i == len(f.ends) { // a is the end but for rounding
		i = sort.SearchFloat64s(f.ends, f.ends[len(f.ends)-1])
	}
	mean, last := f.sorted[i], f.sorted[i]
	for j := i + 1; j < len(f.ends); j++ {
		left := a - (f.ends[j-1] - 1)
		if left <= 0 {
			break
		}
		if f.ends[j] == f.ends[j-1] {
			continue
		}
		mean += float64(left * (f.sorted[j] - last))
		last = f.sorted[j]
	}
	return min(mean, last)
}
