package stats

import "math"

// shares says how the values of a sample count: how many times each is there,
// and with which weight each time. Weights are relative to the greatest, which
// keeps squares in range and makes equal weights exactly 1, so that they give
// the bits of the figures without weights.
type shares struct {
	weights []float64 // nil: all 1
	counts  []int     // nil: all 1
	top     float64
}

// newShares panics where a length is not n. It reports false where a weight is
// negative, infinite or NaN, where a count is negative and where nothing counts.
func newShares(n int, weights []float64, counts []int) (shares, bool) {
	if weights != nil && len(weights) != n {
		panic("stats: length of weights differs from length of sample")
	}
	if counts != nil && len(counts) != n {
		panic("stats: length of counts differs from length of sample")
	}
	s := shares{weights: weights, counts: counts}
	for i := range n {
		weight, count := 1.0, 1
		if weights != nil {
			weight = weights[i]
		}
		if counts != nil {
			count = counts[i]
		}
		if !(weight >= 0) || math.IsInf(weight, 1) || count < 0 {
			return s, false
		}
		if count > 0 {
			s.top = max(s.top, weight)
		}
	}
	return s, s.top > 0
}

// at returns how often value i is there and the weight of each of them. Where
// their product is 0 the value does not count.
func (s shares) at(i int) (times, weight float64) {
	times, weight = 1, 1
	if s.counts != nil {
		times = float64(s.counts[i])
	}
	if s.weights != nil {
		weight = min(s.weights[i]/s.top, 1) // what does not count may be above the greatest that does
	}
	return times, weight
}

// has reports whether value i counts.
func (s shares) has(i int) bool {
	times, weight := s.at(i)
	return times > 0 && weight > 0
}

// mean is Σ t·w·x / Σ t·w.
func (s shares) mean(xs []float64) float64 {
	var sum, total float64
	for i, x := range xs {
		times, weight := s.at(i)
		if mass := float64(times * weight); mass > 0 {
			sum += float64(mass * x)
			total += mass
		}
	}
	return sum / total
}

// level returns the first value that counts, and whether all are equal to it.
func (s shares) level(xs []float64) (first float64, equal bool) {
	first = math.NaN()
	for i, x := range xs {
		switch {
		case !s.has(i) || x == first:
		case math.IsNaN(first) && !math.IsNaN(x):
			first = x
		default:
			return first, false
		}
	}
	return first, true
}

// moments returns mean and std; equal values have exactly that mean.
func (s shares) moments(ys []float64) (mean, std float64) {
	mean = s.mean(ys)
	if first, equal := s.level(ys); equal {
		mean = first
	}
	return mean, s.std(ys, mean)
}

// std is √(Σ t·w·(y-mean)² / (W - Σ t·w²/W)), W = Σ t·w. The divisor is found as
// the sum of w[i]·w[j] over all pairs of different members of the sample, over
// W, since the difference would lose its digits where one weight is all but
// all. It is NaN where the sample has one member.
func (s shares) std(ys []float64, mean float64) float64 {
	var sum, total, pairs float64
	for i, y := range ys {
		times, weight := s.at(i)
		mass := float64(times * weight)
		if mass == 0 {
			continue
		}
		d := y - mean
		sum += float64(mass * float64(d*d))
		pairs += float64(2*float64(mass*total)) + float64(float64(mass*weight)*(times-1))
		total += mass
	}
	if pairs == 0 {
		return math.NaN()
	}
	return math.Sqrt(sum / (pairs / total))
}
