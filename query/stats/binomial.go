package stats

// binomial holds the probabilities of the numbers of successes in n trials, as
// cumulated from either end. Those of numbers outside [first, first+len) are
// below 2⁻⁸⁰ of the greatest, and taken as 0.
type binomial struct {
	n, first     int
	lower, upper []float64 // P(B <= first+i), P(B >= first+i)
}

// newBinomial finds probabilities relative to that of the mode, from
//
//	P(k+1)/P(k) = (n-k)/(k+1)·p/(1-p),
//
// and divides by their sum. With 1-p = (100-percent)/100 nothing cancels where
// percent is a number of few digits. It takes some 21·√(n·p·(1-p)) terms, each
// of which adds a few roundings to the error of a probability.
func newBinomial(n int, percent float64) binomial {
	const negligible = 0x1p-80
	odds := percent / (100 - percent)
	mode := min(int(float64(float64(n+1)*percent)/100), n)
	down := []float64{1}
	for k := mode; k > 0; k-- {
		p := down[len(down)-1] * (float64(k) / (float64(n-k+1) * odds))
		if p < negligible {
			break
		}
		down = append(down, p)
	}
	terms := make([]float64, 0, 2*len(down))
	for i := len(down) - 1; i >= 0; i-- {
		terms = append(terms, down[i])
	}
	for k := mode; k < n; k++ {
		p := terms[len(terms)-1] * (float64(n-k) / float64(k+1) * odds)
		if p < negligible {
			break
		}
		terms = append(terms, p)
	}
	b := binomial{n: n, first: mode - len(down) + 1, lower: make([]float64, len(terms)), upper: terms}
	var sum float64
	for i, p := range terms {
		sum += p
		b.lower[i] = sum
	}
	total := sum
	sum = 0
	for i := len(terms) - 1; i >= 0; i-- {
		sum += terms[i]
		b.upper[i] = sum / total
		b.lower[i] /= total
	}
	return b
}

// atMost returns P(B <= k).
func (b binomial) atMost(k int) float64 {
	switch i := k - b.first; {
	case i < 0:
		return 0
	case i < len(b.lower):
		return b.lower[i]
	}
	return 1
}

// atLeast returns P(B >= k).
func (b binomial) atLeast(k int) float64 {
	switch i := k - b.first; {
	case i < 0:
		return 1
	case i < len(b.upper):
		return b.upper[i]
	}
	return 0
}

// lowRank returns the greatest k with P(B <= k) <= tail, and that probability.
// k is -1 where there is none.
func (b binomial) lowRank(tail float64) (k int, below float64) {
	if tail < 0 {
		return -1, 0
	}
	k = b.first - 1
	for i := 0; i < len(b.lower) && b.lower[i] <= tail; i++ {
		k = b.first + i
	}
	return k, b.atMost(k)
}

// highRank returns the least k with P(B >= k+1) <= tail, and that probability.
// k is n where there is none.
func (b binomial) highRank(tail float64) (k int, above float64) {
	if tail < 0 {
		return b.n, 0
	}
	k = b.first + len(b.upper) - 1
	for i := len(b.upper) - 1; i >= 0 && b.upper[i] <= tail; i-- {
		k = b.first + i - 1
	}
	return k, b.atLeast(k + 1)
}
