package stats

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// TestRepeatedAgainstExpanded compares with the sample that is meant, each value
// as often as its count says: percentiles without weights to the bit, sums to
// n·2⁻⁵³ with a factor of 4.
func TestRepeatedAgainstExpanded(t *testing.T) {
	const seed = 51
	rng := rand.New(rand.NewPCG(seed, 1))
	for n := 1; n <= 120; n++ {
		xs, logs := drawn(rng, n), make([]float64, n)
		weights, counts := make([]float64, n), make([]int, n)
		var all, allWeights []float64
		for i := range xs {
			logs[i], weights[i], counts[i] = Log(xs[i]), float64(rng.IntN(4)), rng.IntN(4)
			if i == 0 {
				weights[i], counts[i] = 1, 1
			}
			all = append(all, slices.Repeat(xs[i:i+1], counts[i])...)
			allWeights = append(allWeights, slices.Repeat(weights[i:i+1], counts[i])...)
		}
		if got, want := RepeatedPercentiles(nil, nil, xs, nil, counts, manyPercents), Percentiles(nil, all, manyPercents); !sameBits(got, want) {
			t.Fatalf("seed %d, n %d: percentiles %v, want %v", seed, n, got, want)
		}
		tolerance := 4 * float64(len(all)) * 0x1p-53
		compare := func(name string, got, want float64) {
			t.Helper()
			if !near(got, want, tolerance) {
				t.Errorf("seed %d, n %d: %s = %v, want %v", seed, n, name, got, want)
			}
		}
		want := WeightedPercentiles(nil, nil, all, allWeights, manyPercents)
		for i, got := range RepeatedPercentiles(nil, nil, xs, weights, counts, manyPercents) {
			compare("weighted percentile", got, want[i])
		}
		compare("mean", RepeatedMean(xs, nil, counts), Mean(all))
		compare("weighted mean", RepeatedMean(xs, weights, counts), WeightedMean(all, allWeights))
		logMean, logStd := LogMoments(nil, all)
		mean, std := RepeatedMoments(logs, nil, counts)
		compare("log-mean", Exp(mean), logMean)
		compare("deviation", std, logStd)
		logMean, logStd = WeightedLogMoments(nil, all, allWeights)
		mean, std = RepeatedMoments(logs, weights, counts)
		compare("weighted log-mean", Exp(mean), logMean)
		compare("weighted deviation", std, logStd)
	}
}

func TestRepeatedUndefined(t *testing.T) {
	xs := []float64{1, 2}
	for _, counts := range [][]int{{0, 0}, {1, -1}} {
		mean, std := RepeatedMoments(xs, nil, counts)
		p := RepeatedPercentiles(nil, nil, xs, nil, counts, []float64{50})[0]
		if !math.IsNaN(RepeatedMean(xs, nil, counts)) || !math.IsNaN(mean) || !math.IsNaN(std) || !math.IsNaN(p) {
			t.Errorf("counts %v: %v, %v, %v, want NaN", counts, mean, std, p)
		}
	}
	if mean, std := RepeatedMoments(xs, nil, []int{0, 1}); mean != 2 || !math.IsNaN(std) {
		t.Errorf("moments of one member = %v, %v, want 2, NaN", mean, std)
	}
	if mean, std := RepeatedMoments(xs, nil, []int{0, 3}); mean != 2 || std != 0 {
		t.Errorf("moments of three equal members = %v, %v, want 2, 0", mean, std)
	}
	if mean, std := RepeatedMoments([]float64{0.1, 0.7, 0.1}, nil, []int{3, 0, 4}); mean != 0.1 || std != 0 {
		t.Errorf("moments of seven equal members = %v, %v, want 0.1, 0", mean, std)
	}
	if got := RepeatedMean(xs, []float64{1e9, 1e-9}, []int{0, 1}); got != 2 {
		t.Errorf("mean where the greatest weight does not count = %v, want 2", got)
	}
}
