package stats

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"
)

// TestSupports has bounds that are missed where percent is divided by 100: 80 %
// of four values, or 1 - 0.999 of 999.
func TestSupports(t *testing.T) {
	cases := []struct {
		n, percent float64
		want       bool
	}{
		{4, 80, true}, {3.99, 80, false}, {4, 20, true}, {4, 19.99, false}, {4, 84, false},
		{5, 84, false}, {5.25, 84, true}, {5.25, 16, true}, {6, 84, true}, {5.24, 84, false},
		{39, 97.5, true}, {38, 97.5, false}, {39, 2.5, true}, {999, 99.9, true}, {998, 99.9, false},
		{999, 0.1, true}, {9999, 99.99, true}, {9998, 99.99, false}, {9, 90, true}, {9, 10, true},
		{3, 50, true}, {2.9, 50, false}, {2, 50, false}, {3, 25, true}, {3, 75, true}, {3, 76, false},
		{1, 0, true}, {1, 100, true}, {0, 100, false}, {0, 50, false}, {0, 0, false},
		{1e6, -1, false}, {1e6, 101, false}, {math.NaN(), 50, false}, {math.NaN(), 100, false}, {10, math.NaN(), false},
	}
	for _, c := range cases {
		if got := Supports(c.n, c.percent); got != c.want {
			t.Errorf("Supports(%v, %v) = %v", c.n, c.percent, got)
		}
	}
	// The effective number of weights in the proportion 1/7 is four but for rounding.
	if n := EffectiveNumber([]float64{1.0 / 7, 1.0 / 7, 1.0 / 7, 1.0 / 7}); !Supports(n, 80) {
		t.Errorf("Supports(%v, 80) = false", n)
	}
	for n := 3; n <= 2000; n++ { // at the bounds themselves, p = 1/(n+1) and n/(n+1)
		if p := 100 / float64(n+1); !Supports(float64(n), p) || !Supports(float64(n), 100-p) || Supports(float64(n), p*0.999) {
			t.Fatalf("n %d: the bound %v is not kept", n, p)
		}
	}
}

// TestMedianIntervals compares with the confidence intervals of the median that
// tables of the sign test have at 95 % (ranks from 1; cited from memory). Their
// coverage is in closed form 1 - 2·Σ C(n, k)/2ⁿ, k below the lower rank.
func TestMedianIntervals(t *testing.T) {
	cases := []struct{ n, low, high int }{
		{6, 1, 6}, {7, 1, 7}, {8, 1, 8}, {9, 2, 8}, {10, 2, 9}, {11, 2, 10}, {12, 3, 10}, {15, 4, 12}, {20, 6, 15}, {25, 8, 18},
	}
	for _, c := range cases {
		tail, term := 0.0, math.Pow(0.5, float64(c.n))
		for k := range c.low {
			tail += term
			term *= float64(c.n-k) / float64(k+1)
		}
		low, high, coverage, ok := PercentileInterval(c.n, 50, 0.95)
		if low != c.low-1 || high != c.high-1 || !ok || math.Abs(coverage-(1-2*tail)) > 1e-15 {
			t.Errorf("n %d: %d, %d, %v, %v, want %d, %d, %v", c.n, low+1, high+1, coverage, ok, c.low, c.high, 1-2*tail)
		}
	}
	if low, high, coverage, ok := PercentileInterval(5, 50, 0.95); low != 0 || high != 4 || coverage != 0.9375 || ok {
		t.Errorf("n 5: %d, %d, %v, %v, want the extremes with 0.9375", low, high, coverage, ok)
	}
	if _, _, coverage, ok := PercentileInterval(5, 50, 0.9375); coverage != 0.9375 || !ok {
		t.Errorf("n 5 at the level that the extremes have: %v, %v", coverage, ok)
	}
}

// TestIntervalsAgainstReference compares with SciPy;
// testdata/reference/order_intervals.py made the ranks by trying them. SciPy's
// probabilities are off by 3e-12 at n = 1e6, where TestIntervalOfManyValues
// looks closer.
func TestIntervalsAgainstReference(t *testing.T) {
	var reference struct{ Rows [][7]any }
	readReference(t, "order_intervals.json", &reference)
	if len(reference.Rows) < 400 {
		t.Fatalf("only %d rows", len(reference.Rows))
	}
	for _, row := range reference.Rows {
		n := int(row[0].(float64))
		low, high, coverage, ok := PercentileInterval(n, row[1].(float64), row[2].(float64))
		if float64(low) != row[3] || float64(high) != row[4] || ok != row[6] || math.Abs(coverage-row[5].(float64)) > 5e-12 {
			t.Errorf("%v: %d, %d, %v, %v", row, low, high, coverage, ok)
		}
	}
}

// TestIntervalOfManyValues compares with sums of 40 digits from Python's decimal
// module (Python 3.11.2), by the ratio of neighbouring terms.
func TestIntervalOfManyValues(t *testing.T) {
	for level, want := range map[float64]float64{0.8: 0.8006460626837346300055, 0.9: 0.9002737312244293016854} {
		if _, _, coverage, ok := PercentileInterval(1000000, 84, level); !ok || math.Abs(coverage-want) > 1e-14 {
			t.Errorf("coverage at level %v = %v, want %v", level, coverage, want)
		}
	}
}

// TestIntervalIsClosest checks the rule on all n up to 60: what is promised of
// the tails holds, and would not hold one rank further in.
func TestIntervalIsClosest(t *testing.T) {
	for n := 1; n <= 60; n++ {
		for _, percent := range []float64{1, 5, 16, 33.3, 50, 84, 99} {
			b := distuv.Binomial{N: float64(n), P: percent / 100}
			below := func(low int) float64 { return b.CDF(float64(low)) }
			above := func(high int) float64 { return 1 - b.CDF(float64(high)) }
			for _, level := range []float64{0.5, 0.9, 0.95} {
				low, high, coverage, ok := PercentileInterval(n, percent, level)
				if math.Abs(coverage-max(0, 1-below(low)-above(high))) > 1e-12 {
					t.Errorf("n %d, percentile %v, level %v: coverage %v of %d, %d", n, percent, level, coverage, low, high)
				}
				if !ok {
					if low != 0 || high != n-1 || coverage >= level {
						t.Errorf("n %d, percentile %v, level %v: refused at %d, %d, %v", n, percent, level, low, high, coverage)
					}
					continue
				}
				bound := (1 - level) / 2
				equal := below(0) <= bound && above(n-1) <= bound
				if coverage < level-1e-12 || equal && (below(low) > bound || above(high) > bound || below(low+1) <= bound || above(high-1) <= bound) {
					t.Errorf("n %d, percentile %v, level %v: %d, %d, %v", n, percent, level, low, high, coverage)
				}
				if !equal && low != 0 && high != n-1 {
					t.Errorf("n %d, percentile %v, level %v: %d, %d hold no extreme", n, percent, level, low, high)
				}
			}
		}
	}
}

// TestIntervalsHold draws samples and counts how often the interval of the 84th
// percentile holds it: as often as coverage says, within four standard
// deviations of that count.
func TestIntervalsHold(t *testing.T) {
	const seed, samples, n = 61, 20000, 40
	low, high, coverage, ok := PercentileInterval(n, 84, 0.9)
	if !ok {
		t.Fatal("no interval")
	}
	rng := rand.New(rand.NewPCG(seed, 1))
	xs, scratch, held := make([]float64, n), make([]float64, n), 0
	for range samples {
		for i := range xs {
			xs[i] = rng.Float64()
		}
		Sort(xs, scratch)
		if xs[low] <= 0.84 && 0.84 <= xs[high] {
			held++
		}
	}
	got, sigma := float64(held)/samples, math.Sqrt(coverage*(1-coverage)/samples)
	if math.Abs(got-coverage) > 4*sigma {
		t.Errorf("seed %d: held in %v of the samples, want %v ± %v", seed, got, coverage, 4*sigma)
	}
}

func TestIntervalUndefined(t *testing.T) {
	nan := math.NaN()
	for _, c := range [][2]float64{{0, 0.9}, {100, 0.9}, {-1, 0.9}, {nan, 0.9}, {50, 0}, {50, 1}, {50, nan}} {
		if _, _, coverage, ok := PercentileInterval(10, c[0], c[1]); ok || !math.IsNaN(coverage) {
			t.Errorf("PercentileInterval(10, %v, %v): coverage %v, %v", c[0], c[1], coverage, ok)
		}
	}
	for _, n := range []int{-1, 0} {
		if low, high, coverage, ok := PercentileInterval(n, 50, 0.9); ok || low != 0 || high != 0 || coverage != 0 {
			t.Errorf("n %d: %d, %d, %v, %v", n, low, high, coverage, ok)
		}
	}
}

func BenchmarkPercentileInterval(b *testing.B) {
	for _, c := range []struct {
		name string
		n    int
	}{{"100", 100}, {"3000", 3000}, {"1000000", 1000000}} {
		b.Run(c.name, func(b *testing.B) {
			for b.Loop() {
				PercentileInterval(c.n, 84, 0.9)
			}
		})
	}
}
