package stats

import (
	"cmp"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/stat"
)

// drawn is a sample sorted in ascending order, with ties.
func drawn(rng *rand.Rand, n int) []float64 {
	xs := make([]float64, n)
	for i := range xs {
		xs[i] = rng.ExpFloat64()
		if rng.IntN(4) == 0 {
			xs[i] = xs[rng.IntN(i+1)]
		}
	}
	slices.Sort(xs)
	return xs
}

var manyPercents = []float64{0, 2.5, 5, 16, 25, 33.3, 50, 66.7, 75, 84, 95, 97.5, 100}

func sameBits(a, b []float64) bool {
	return slices.EqualFunc(a, b, func(x, y float64) bool { return math.Float64bits(x) == math.Float64bits(y) })
}

// TestEqualWeights: equal weights of any scale give the figures without
// weights, to the bit.
func TestEqualWeights(t *testing.T) {
	const seed = 41
	rng := rand.New(rand.NewPCG(seed, 1))
	for n := 1; n <= 300; n += 1 + n/20 {
		for _, weight := range []float64{1, 0.1, 3, 1e-300, 1e300, 5e-324} {
			xs := drawn(rng, n)
			weights := slices.Repeat([]float64{weight}, n)
			if got := EffectiveNumber(weights); got != float64(n) {
				t.Fatalf("EffectiveNumber of %d times %v = %v", n, weight, got)
			}
			mean, std := LogMoments(nil, xs)
			weightedMean, weightedStd := WeightedLogMoments(nil, xs, weights)
			got := append(WeightedPercentiles(nil, nil, xs, weights, manyPercents), WeightedMean(xs, weights), weightedMean, weightedStd)
			want := append(Percentiles(nil, xs, manyPercents), Mean(xs), mean, std)
			if !sameBits(got, want) {
				t.Fatalf("seed %d, n %d, weight %v: %v, want %v", seed, n, weight, got, want)
			}
		}
	}
}

// TestWeightedByHand has figures that need no computer. Weights 1, 1, 2 have
// n* = 16/6 = 8/3 and shares 1/4, 1/4, 1/2. The median is the mean of the step
// function over the share 3/8 in the middle, from 5/16 to 11/16: 3/16 of the
// second value and 3/16 of the third. Percentile 0 is the first 3/8: 1/4 of the
// first value and 1/8 of the second; percentile 100 is all of the third.
func TestWeightedByHand(t *testing.T) {
	sorted, weights := []float64{1, 2, 4}, []float64{5, 5, 10}
	if got := EffectiveNumber(weights); !near(got, 8.0/3, 4e-16) {
		t.Errorf("EffectiveNumber = %v, want 8/3", got)
	}
	got := WeightedPercentiles(nil, nil, sorted, weights, []float64{0, 50, 100})
	for i, want := range []float64{4.0 / 3, 3, 4} {
		if !near(got[i], want, 4e-16) {
			t.Errorf("percentile %d = %v, want %v", i, got[i], want)
		}
	}
	if got := WeightedMean(sorted, weights); !near(got, 2.75, 4e-16) {
		t.Errorf("WeightedMean = %v, want 2.75", got)
	}
	// ln x is 0, ln 2, 2·ln 2: the mean is 5/4·ln 2; Σ w·d² is (25/16 + 1/16 +
	// 2·9/16)·ln² 2 = 11/4·ln² 2, the divisor 4 - 6/4 = 5/2.
	mean, std := WeightedLogMoments(nil, sorted, weights)
	if want := math.Pow(2, 1.25); !near(mean, want, 8e-16) {
		t.Errorf("log-mean = %v, want %v", mean, want)
	}
	if want := math.Ln2 * math.Sqrt(1.1); !near(std, want, 8e-16) {
		t.Errorf("deviation = %v, want %v", std, want)
	}
}

// TestZeroWeights: what has weight 0 changes nothing, whatever it is.
func TestZeroWeights(t *testing.T) {
	const seed = 42
	rng := rand.New(rand.NewPCG(seed, 1))
	for n := 1; n <= 60; n++ {
		xs, weights := drawn(rng, n), make([]float64, n)
		for i := range weights {
			weights[i] = rng.ExpFloat64()
		}
		more, moreWeights := []float64{math.NaN(), -1}, []float64{0, 0}
		for i, x := range xs {
			more, moreWeights = append(more, x, x), append(moreWeights, weights[i], 0)
		}
		more, moreWeights = append(more, math.Inf(1)), append(moreWeights, 0)
		figures := func(xs, weights []float64) []float64 {
			mean, std := WeightedLogMoments(nil, xs, weights)
			return append(WeightedPercentiles(nil, nil, xs, weights, manyPercents), mean, std, WeightedMean(xs, weights), EffectiveNumber(weights))
		}
		if got, want := figures(more, moreWeights), figures(xs, weights); !sameBits(got, want) {
			t.Fatalf("seed %d, n %d: %v, want %v", seed, n, got, want)
		}
	}
}

// TestWeightsUndefined has the cases in which nothing can be said.
func TestWeightsUndefined(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	xs := []float64{1, 2}
	for _, weights := range [][]float64{{0, 0}, {1, -1}, {1, inf}, {nan, 1}} {
		mean, std := WeightedLogMoments(nil, xs, weights)
		p := WeightedPercentiles(nil, nil, xs, weights, []float64{50})[0]
		for name, got := range map[string]float64{"mean": WeightedMean(xs, weights), "log-mean": mean, "deviation": std, "percentile": p} {
			if !math.IsNaN(got) {
				t.Errorf("%s with weights %v = %v, want NaN", name, weights, got)
			}
		}
	}
	for _, p := range WeightedPercentiles(nil, nil, xs, []float64{1, 2}, []float64{-1, 101, nan}) {
		if !math.IsNaN(p) {
			t.Errorf("percentile outside 0 to 100 = %v, want NaN", p)
		}
	}
	if got := EffectiveNumber([]float64{0, 0}); got != 0 {
		t.Errorf("EffectiveNumber of no weight = %v, want 0", got)
	}
	if got := EffectiveNumber([]float64{1, -1}); !math.IsNaN(got) {
		t.Errorf("EffectiveNumber with a negative weight = %v, want NaN", got)
	}
	if mean, std := WeightedLogMoments(nil, []float64{3, 5}, []float64{0, 7}); mean != 5 || !math.IsNaN(std) {
		t.Errorf("moments of one value = %v, %v, want 5, NaN", mean, std)
	}
	if mean, std := WeightedLogMoments(nil, []float64{0.3, 0.3, 0.3}, []float64{0.1, 0.2, 0.7}); mean != 0.3 || std != 0 {
		t.Errorf("moments of equal values = %v, %v, want 0.3, 0", mean, std)
	}
	if mean, std := WeightedLogMoments(nil, []float64{1, -1}, []float64{1, 1}); !math.IsNaN(mean) || !math.IsNaN(std) {
		t.Errorf("moments with a negative value = %v, %v, want NaN", mean, std)
	}
}

// TestDominantWeight: a divisor found as W - Σ w²/W would be 0 here. With
// weights 1 and e the deviation is that of two values, d·√(e/(1+e)²/(2e/(1+e)))
// = d/√(2·(1+e)), d the difference of the logarithms.
func TestDominantWeight(t *testing.T) {
	const e = 1e-20
	_, std := WeightedLogMoments(nil, []float64{1, math.E}, []float64{1, e})
	if want := math.Sqrt(0.5); !near(std, want, 4e-16) {
		t.Errorf("deviation = %v, want %v", std, want)
	}
	if got := EffectiveNumber([]float64{1, e}); got != 1 {
		t.Errorf("EffectiveNumber = %v, want 1", got)
	}
}

// TestWeightsAgainstGonum compares means and deviations; gonum's weighted
// deviation divides by Σ w - 1, from which the other divisor follows.
func TestWeightsAgainstGonum(t *testing.T) {
	const seed = 43
	rng := rand.New(rand.NewPCG(seed, 1))
	for n := 2; n <= 400; n += 7 {
		xs := drawn(rng, n)
		weights, logs := make([]float64, n), make([]float64, n)
		var total, squares float64
		for i := range xs {
			weights[i], logs[i] = 1+9*rng.Float64(), math.Log(xs[i])
			total += weights[i]
			squares += weights[i] * weights[i]
		}
		tolerance := 8 * float64(n) * 0x1p-53
		mean, std := WeightedLogMoments(nil, xs, weights)
		wantMean, wantStd := stat.MeanStdDev(logs, weights)
		wantStd *= math.Sqrt((total - 1) / (total - squares/total))
		if !near(WeightedMean(xs, weights), stat.Mean(xs, weights), tolerance) || !near(mean, math.Exp(wantMean), tolerance) || !near(std, wantStd, tolerance) {
			t.Errorf("seed %d, n %d: %v, %v, want %v, %v", seed, n, mean, std, math.Exp(wantMean), wantStd)
		}
	}
}

// TestWeightedPercentilesProperties: percentiles never fall, stay within the
// sample, and do not notice in which of two equal values a weight lies.
func TestWeightedPercentilesProperties(t *testing.T) {
	const seed = 44
	rng := rand.New(rand.NewPCG(seed, 1))
	percents := make([]float64, 1001)
	for i := range percents {
		percents[i] = float64(i) / 10
	}
	for n := 1; n <= 80; n++ {
		xs, weights := drawn(rng, n), make([]float64, n)
		for i := range weights {
			weights[i] = math.Exp(5 * rng.NormFloat64())
		}
		got := WeightedPercentiles(nil, nil, xs, weights, percents)
		for i, q := range got {
			if q < xs[0] || q > xs[n-1] || i > 0 && q < got[i-1]*(1-1e-14) {
				t.Fatalf("seed %d, n %d: percentile %v = %v after %v", seed, n, percents[i], q, got[max(i-1, 0)])
			}
		}
	}
}

// TestSortWeighted compares with an order by comparison, over lengths on both
// sides of the change of method.
func TestSortWeighted(t *testing.T) {
	const seed = 45
	rng := rand.New(rand.NewPCG(seed, 1))
	for _, n := range []int{0, 1, 2, 255, 256, 257, 3001} {
		for _, kind := range []string{"ties", "one value", "signed", "with NaN"} {
			xs, weights := drawn(rng, n), make([]float64, n)
			for i := range weights {
				weights[i] = float64(rng.IntN(3))
				switch kind {
				case "one value":
					xs[i] = 0.25
				case "signed":
					xs[i] = -xs[i]
				case "with NaN":
					if i%9 == 0 {
						xs[i] = math.NaN()
					}
				}
			}
			rng.Shuffle(n, func(i, j int) { xs[i], xs[j] = xs[j], xs[i] })
			order := make([]int, n)
			for i := range order {
				order[i] = i
			}
			slices.SortFunc(order, func(a, b int) int {
				return cmp.Or(cmp.Compare(xs[a], xs[b]), cmp.Compare(weights[a], weights[b]))
			})
			var want, wantWeights []float64
			for _, i := range order {
				want, wantWeights = append(want, xs[i]), append(wantWeights, weights[i])
			}
			SortWeighted(xs, weights)
			if !sameBits(xs, want) || !sameBits(weights, wantWeights) {
				t.Fatalf("seed %d, n %d, %s: not in order", seed, n, kind)
			}
		}
	}
	xs, weights := []float64{3, 1, 2, 1}, []float64{30, 11, 20, 10}
	SortWeighted(xs, weights)
	if !slices.Equal(xs, []float64{1, 1, 2, 3}) || !slices.Equal(weights, []float64{10, 11, 20, 30}) {
		t.Errorf("sorted to %v, %v", xs, weights)
	}
}

func TestWeightedPercentilesScratch(t *testing.T) {
	sorted, weights := []float64{1, 2, 3}, []float64{1, 2, 1}
	dst, scratch := make([]float64, 1), make([]float64, 3)
	if allocs := testing.AllocsPerRun(10, func() { WeightedPercentiles(dst, scratch, sorted, weights, []float64{50}) }); allocs != 0 {
		t.Errorf("WeightedPercentiles with scratch allocates %v times", allocs)
	}
}

func BenchmarkWeighted(b *testing.B) {
	rng := rand.New(rand.NewPCG(1, 1))
	const n = 3000
	xs, weights := make([]float64, n), make([]float64, n)
	for i := range xs {
		xs[i], weights[i] = rng.ExpFloat64(), rng.Float64()
	}
	sorted, carried, scratch := slices.Clone(xs), slices.Clone(weights), make([]float64, n)
	for _, length := range []int{64, 256, 1000, n} {
		b.Run(fmt.Sprintf("sort/%d", length), func(b *testing.B) {
			for at := 0; ; at = (at + 7) % n { // another sample each time
				if !b.Loop() {
					break
				}
				for i := range length {
					sorted[i], carried[i] = xs[(at+i)%n], weights[(at+i)%n]
				}
				SortWeighted(sorted[:length], carried[:length])
			}
		})
	}
	dst, percents := make([]float64, 3), []float64{16, 50, 84}
	b.Run(fmt.Sprintf("percentiles/%d", n), func(b *testing.B) {
		for b.Loop() {
			WeightedPercentiles(dst, scratch, sorted, carried, percents)
		}
	})
	b.Run(fmt.Sprintf("moments/%d", n), func(b *testing.B) {
		for b.Loop() {
			WeightedLogMoments(scratch, sorted, carried)
		}
	})
}
