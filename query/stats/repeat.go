package stats

import "math"

// The figures below are those of a sample in which value i is repeated
// counts[i] times, without making that sample. weights and counts have the
// length of the sample and its order, or are nil, which says 1 for every value;
// other lengths panic. A value whose count or weight is 0 does not count. All
// figures are NaN where nothing counts, where a weight is negative, infinite or
// NaN and where a count is negative. Each costs one or two passes over the
// sample, however large the counts.

// RepeatedMean returns WeightedMean of the repeated sample, in the unit of xs.
func RepeatedMean(xs, weights []float64, counts []int) float64 {
	s, ok := newShares(len(xs), weights, counts)
	if !ok {
		return math.NaN()
	}
	return s.mean(xs)
}

// RepeatedMoments returns the mean of the repeated sample and its deviation, in
// the unit of ys, as WeightedLogMoments has them of the logarithms: without
// weights the divisor is Σ counts - 1. Take logarithms once (Log), and Exp of
// the mean, where a sample is repeated in many ways. std is NaN where the
// repeated sample has one member. Equal values have exactly that mean and
// deviation 0.
func RepeatedMoments(ys, weights []float64, counts []int) (mean, std float64) {
	s, ok := newShares(len(ys), weights, counts)
	if !ok {
		return math.NaN(), math.NaN()
	}
	return s.moments(ys)
}

// RepeatedPercentiles returns WeightedPercentiles of the repeated sample, with
// dst and scratch as there. Without weights they are Percentiles of the repeated
// sample, to the bit.
func RepeatedPercentiles(dst, scratch, sorted, weights []float64, counts []int, percents []float64) []float64 {
	if dst == nil {
		dst = make([]float64, len(percents))
	}
	if len(dst) != len(percents) {
		panic("stats: length of dst differs from length of percents")
	}
	s, ok := newShares(len(sorted), weights, counts)
	if !ok {
		for i := range dst {
			dst[i] = math.NaN()
		}
		return dst
	}
	if cap(scratch) < len(sorted) {
		scratch = make([]float64, len(sorted))
	}
	f := newSteps(scratch[:len(sorted)], sorted, s)
	for i, percent := range percents {
		dst[i] = math.NaN()
		if percent >= 0 && percent <= 100 {
			dst[i] = f.meanFrom(float64(max(f.effective-1, 0)*percent) / 100)
		}
	}
	return dst
}
