package stats

import (
	"math"
	"math/bits"
	"math/rand/v2"
)

// Resample draws len(counts) clusters with replacement, all with the same
// probability, and sets counts[k] to how often cluster k was drawn. A source of
// one seed gives the same counts on every platform.
//
// Source: D. Lemire, "Fast random integer generation in an interval", ACM
// Transactions on Modeling and Computer Simulation 29 (2019), article 3: without
// bias, from one 64-bit number or a few.
func Resample(source *rand.PCG, counts []int) {
	clear(counts)
	n := uint64(len(counts))
	for range counts {
		drawn, low := bits.Mul64(source.Uint64(), n)
		if low < n {
			for threshold := -n % n; low < threshold; {
				drawn, low = bits.Mul64(source.Uint64(), n)
			}
		}
		counts[drawn]++
	}
}

// stream is the second word of the seed, so that one that a user gives serves
// no other purpose by chance.
const stream = 0x626f6f7473747261

// Bootstrap resamples a sample by whole clusters: value i belongs to cluster
// clusters[i], and each resample has as many clusters as there are, drawn with
// replacement. statistic is called once a resample, with counts[i] how often
// value i is in it, and sets figures to what is asked of it (RepeatedPercentiles
// and the like); it must keep neither. Bootstrap returns, for each of figures
// many, its values in the order of the resamples.
//
// Cluster labels are any numbers; draws go by their order, and by nothing of the
// values. So results are the same, to the bit, for one seed on every platform
// and for values in any order, where a caller numbers clusters by something of
// their own, such as the order of their names, and statistic does not depend on
// the order of the values, as it does not where they are sorted.
//
// The memory is 8 bytes a resample and figure. It panics where resamples or
// figures is negative.
//
// Source: C. A. Field, A. H. Welsh, "Bootstrapping clustered data", Journal of the
// Royal Statistical Society B 69 (2007) 369–390: the cluster bootstrap (cited
// from memory).
func Bootstrap(clusters []int, resamples int, seed uint64, figures int, statistic func(figures []float64, counts []int)) [][]float64 {
	out := make([][]float64, figures)
	for f := range out {
		out[f] = make([]float64, resamples)
	}
	numbers, distinct := Number(nil, clusters)
	source := rand.NewPCG(seed, stream)
	drawn, counts, values := make([]int, distinct), make([]int, len(clusters)), make([]float64, figures)
	for r := range resamples {
		Resample(source, drawn)
		for i, cluster := range numbers {
			counts[i] = drawn[cluster]
		}
		statistic(values, counts)
		for f, value := range values {
			out[f][r] = value
		}
	}
	return out
}

// BootstrapInterval sorts resampled, the values of a figure over resamples, and
// returns those between which the share level of them lies, half of the rest on
// either side, by Quantile7. Both are NaN where resampled is empty, where one of
// it is NaN, and where level is not between 0 and 1, the ends left out.
//
// With few clusters, below ten or so, such intervals are too short: of the mean
// of m clusters of one size by the factor √((m-1)/m), and by what normal instead
// of Student's quantiles lack. One cluster gives an interval of length 0, which
// says nothing.
//
// Source: B. Efron, R. J. Tibshirani, An Introduction to the Bootstrap, Chapman
// & Hall 1993, section 13.3: the percentile interval (cited from memory).
func BootstrapInterval(resampled []float64, level float64) (low, high float64) {
	Sort(resampled, make([]float64, len(resampled)))
	if len(resampled) == 0 || !(level > 0 && level < 1) || math.IsNaN(resampled[0]) || math.IsNaN(resampled[len(resampled)-1]) {
		return math.NaN(), math.NaN()
	}
	return Quantile7(resampled, (1-level)/2), Quantile7(resampled, (1+level)/2)
}
