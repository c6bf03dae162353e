package stats

import "math"

// Supports reports whether a sample of n values says something about a
// percentile: whether, with p = percent/100,
//
//	1/(n+1) <= p <= n/(n+1),
//
// which are the probabilities that the least and the greatest of n values
// stand for on average. Beyond them a percentile is the extreme and no more. n
// may be an effective number. Fewer than three values support no percentile
// (common practice), but 0 and 100, which are the extremes themselves, are
// supported by one. Where percent is outside 0 to 100, or either is NaN, nothing
// is supported.
//
// A bound that is missed by 1e-9 of itself or less is kept: decimals such as
// 99.9 are not exact, and neither is an effective number.
//
// Source: E. J. Gumbel, Statistics of Extremes, Columbia University Press 1958,
// section 1.2.7: plotting positions (cited from memory).
func Supports(n, percent float64) bool {
	const rounding = 1e-9
	switch {
	case percent == 0 || percent == 100:
		return n >= 1-rounding
	case !(percent > 0 && percent < 100) || !(n >= 3*(1-rounding)):
		return false
	}
	return min(percent, 100-percent)*(n+1) >= 100*(1-rounding)
}

// PercentileInterval returns the ranks, from 0, of the two order statistics
// x[low] and x[high] of n independent values that hold the percentile of what
// they are drawn from between them with probability level or more, whatever
// its distribution, and that probability, coverage: with B binomial of n and
// p = percent/100,
//
//	coverage = P(low+1 <= B <= high),
//
// exactly where the distribution is continuous, at least elsewhere.
//
// The ranks are the closest at which no tail has more than half of what level
// leaves: low is the greatest with P(B <= low) <= (1-level)/2, high the least
// with P(B >= high+1) <= (1-level)/2. Where one of them would lie outside the
// sample it is the extreme instead, and the other is the closest one at which
// both tails together have no more than 1-level. Where not even the extremes
// reach level, ok is false, and the ranks and coverage are those of the
// extremes. A tail that exceeds its bound by 1e-12 or less is taken to keep it.
// Values that depend on each other, as those of one event do, are worth fewer.
//
// ok is false and coverage 0 where n < 1, and NaN where percent is not between 0
// and 100, or level not between 0 and 1, the ends left out. The error of
// coverage is below 1e-12 for n up to 1e6, which takes under a millisecond.
//
// Source: G. J. Hahn, W. Q. Meeker, Statistical Intervals, Wiley 1991, section
// 5.2 (cited from memory). They place ranks symmetrically about (n+1)·p; equal
// bounds on the tails give each end its own meaning, that of a one-sided bound.
func PercentileInterval(n int, percent, level float64) (low, high int, coverage float64, ok bool) {
	if n < 1 {
		return 0, 0, 0, false
	}
	if !(percent > 0 && percent < 100 && level > 0 && level < 1) {
		return 0, n - 1, math.NaN(), false
	}
	const rounding = 1e-12
	b := newBinomial(n, percent)
	outside := 1 - level
	half := float64(outside/2) + rounding
	low, below := b.lowRank(half)
	high, above := b.highRank(half)
	switch {
	case low < 0 && high >= n:
	case low < 0:
		high, above = b.highRank(outside - b.atMost(0) + rounding)
	case high >= n:
		low, below = b.lowRank(outside - b.atLeast(n) + rounding)
	}
	if low < 0 {
		low, below = 0, b.atMost(0)
	}
	if high >= n {
		high, above = n-1, b.atLeast(n)
	}
	return low, high, max(1-(below+above), 0), low < high && below+above <= outside+2*rounding
}
