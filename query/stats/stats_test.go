package stats

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/stat"
)

// invented is a sample without meaning, with a tie.
var invented = []float64{0.31, 0.12, 0.55, 0.12, 0.47, 0.083, 0.29}

func near(got, want, tolerance float64) bool {
	if math.IsNaN(want) {
		return math.IsNaN(got)
	}
	return got == want || math.Abs(got-want) <= tolerance*math.Abs(want)
}

// TestAgainstNumPy compares with NumPy 1.24.2 (Python 3.11.2):
// numpy.percentile with its default method "linear", which is definition 7,
// x.mean(), exp(log(x).mean()) and log(x).std(ddof=1).
func TestAgainstNumPy(t *testing.T) {
	sorted := slices.Sorted(slices.Values(invented))
	percents := []float64{0, 2.5, 16, 50, 84, 97.5, 100}
	want := []float64{0.083, 0.08855, 0.11852, 0.29, 0.47319999999999995, 0.538, 0.55}
	for i, got := range Percentiles(nil, sorted, percents) {
		if !near(got, want[i], 4e-16) {
			t.Errorf("Percentiles(%v) = %v, want %v", percents[i], got, want[i])
		}
		if q := Quantile7(sorted, percents[i]/100); !near(q, want[i], 4e-16) {
			t.Errorf("Quantile7(%v) = %v, want %v", percents[i]/100, q, want[i])
		}
	}
	figures := []struct {
		name      string
		got, want float64
	}{
		{"Mean", Mean(invented), 0.2775714285714286},
		{"LogMean", LogMean(invented), 0.22340577912334986},
		{"LogStd", LogStd(invented), 0.7408458206761092},
	}
	for _, f := range figures {
		if !near(f.got, f.want, 4e-16) {
			t.Errorf("%s = %v, want %v", f.name, f.got, f.want)
		}
	}
}

// TestByHand has samples whose figures need no computer: ln x of 0.2, 0.4,
// 0.8, 1.6 is evenly spaced by ln 2, so the geometric mean is √0.32 and the
// deviation of the logarithms ln 2·√(5/3).
func TestByHand(t *testing.T) {
	xs := []float64{0.8, 0.2, 1.6, 0.4}
	mean, std := LogMoments(nil, xs)
	if want := math.Sqrt(0.32); !near(mean, want, 4e-16) {
		t.Errorf("geometric mean = %v, want %v", mean, want)
	}
	if want := math.Ln2 * math.Sqrt(5.0/3); !near(std, want, 4e-16) {
		t.Errorf("deviation = %v, want %v", std, want)
	}
	// n = 2: the position of percentile 16 is 0.16.
	if got := Quantile7([]float64{1, 3}, 0.16); !near(got, 1.32, 3e-16) {
		t.Errorf("Quantile7 = %v, want 1.32", got)
	}
	if got := GeometricMean(0.02, 0.08); !near(got, 0.04, 3e-16) {
		t.Errorf("GeometricMean = %v, want 0.04", got)
	}
}

func TestUndefined(t *testing.T) {
	cases := []struct {
		name string
		got  float64
	}{
		{"mean of nothing", Mean(nil)},
		{"log-mean of nothing", LogMean(nil)},
		{"log-mean with a zero", LogMean([]float64{1, 0, 2})},
		{"log-mean with a negative", LogMean([]float64{1, -1})},
		{"log-mean with infinity", LogMean([]float64{1, math.Inf(1)})},
		{"log-mean with NaN", LogMean([]float64{1, math.NaN()})},
		{"deviation of one", LogStd([]float64{2})},
		{"deviation with a zero", LogStd([]float64{1, 0, 2})},
		{"quantile of nothing", Quantile7(nil, 0.5)},
		{"quantile below 0", Quantile7([]float64{1}, -0.1)},
		{"quantile above 1", Quantile7([]float64{1}, 1.1)},
		{"percentile above 100", Percentiles(nil, []float64{1}, []float64{101})[0]},
	}
	for _, c := range cases {
		if !math.IsNaN(c.got) {
			t.Errorf("%s = %v, want NaN", c.name, c.got)
		}
	}
}

// TestEqualValues guards figures of a sample that has no spread against
// rounding: they are the value itself and 0.
func TestEqualValues(t *testing.T) {
	for _, x := range []float64{0.1, 3, 1e-12, 0.7071} {
		mean, std := LogMoments(nil, []float64{x, x, x})
		if mean != x || std != 0 {
			t.Errorf("LogMoments of three times %v = %v, %v, want %v, 0", x, mean, std, x)
		}
		if got := Quantile7([]float64{x, x, x}, 0.3); got != x {
			t.Errorf("Quantile7 = %v, want %v", got, x)
		}
		if got := GeometricMean(x, x); got != x {
			t.Errorf("GeometricMean(%v, %v) = %v", x, x, got)
		}
	}
	if mean, _ := LogMoments(nil, []float64{0.3}); mean != 0.3 {
		t.Errorf("log-mean of one = %v, want the value", mean)
	}
}

func TestGeometricMeanRange(t *testing.T) {
	cases := []struct{ a, b, want float64 }{
		{1e-200, 1e-200, 1e-200}, {1e200, 1e200, 1e200}, {1e-300, 1e300, 1}, {0, 5, 0}, {4e-320, 0, 0},
	}
	for _, c := range cases {
		if got := GeometricMean(c.a, c.b); !near(got, c.want, 4e-16) {
			t.Errorf("GeometricMean(%v, %v) = %v, want %v", c.a, c.b, got, c.want)
		}
	}
}

// TestAgainstGonum compares moments on random samples with gonum, whose sums
// run in another order: relative agreement to n·2⁻⁵³ with a factor of 4.
func TestAgainstGonum(t *testing.T) {
	const seed = 20260312
	rng := rand.New(rand.NewPCG(seed, 1))
	for n := 2; n <= 400; n += 7 {
		xs, logs := make([]float64, n), make([]float64, n)
		for i := range xs {
			xs[i] = math.Exp(rng.NormFloat64())
			logs[i] = math.Log(xs[i])
		}
		tolerance := 4 * float64(n) * 0x1p-53
		if got, want := Mean(xs), stat.Mean(xs, nil); !near(got, want, tolerance) {
			t.Errorf("seed %d, n %d: Mean = %v, gonum %v", seed, n, got, want)
		}
		mean, std := LogMoments(nil, xs)
		if want := stat.GeometricMean(xs, nil); !near(mean, want, tolerance) {
			t.Errorf("seed %d, n %d: log-mean = %v, gonum %v", seed, n, mean, want)
		}
		if want := stat.StdDev(logs, nil); !near(std, want, tolerance) {
			t.Errorf("seed %d, n %d: deviation = %v, gonum %v", seed, n, std, want)
		}
	}
}

// TestQuantileProperties checks definition 7 itself: the quantile at k/(n-1) is
// x[k], it never falls with p, and stays within the sample.
func TestQuantileProperties(t *testing.T) {
	const seed = 7
	rng := rand.New(rand.NewPCG(seed, 2))
	for n := 1; n <= 60; n++ {
		xs := make([]float64, n)
		for i := range xs {
			xs[i] = rng.ExpFloat64()
		}
		slices.Sort(xs)
		for k := range xs {
			p := 0.0
			if n > 1 {
				p = float64(k) / float64(n-1)
			}
			if got := Quantile7(xs, p); !near(got, xs[k], 1e-12) {
				t.Fatalf("seed %d, n %d: Quantile7(%v) = %v, want %v", seed, n, p, got, xs[k])
			}
		}
		last := xs[0]
		for i := range 1001 {
			got := Quantile7(xs, float64(i)/1000)
			if got < last || got > xs[n-1] {
				t.Fatalf("seed %d, n %d: Quantile7(%v) = %v after %v", seed, n, float64(i)/1000, got, last)
			}
			last = got
		}
	}
}

func TestScratchIsUsed(t *testing.T) {
	scratch := make([]float64, len(invented))
	if allocs := testing.AllocsPerRun(10, func() { LogMoments(scratch, invented) }); allocs != 0 {
		t.Errorf("LogMoments with scratch allocates %v times", allocs)
	}
}

func BenchmarkLogMoments(b *testing.B) {
	rng := rand.New(rand.NewPCG(1, 1))
	xs, scratch := make([]float64, 3000), make([]float64, 3000)
	for i := range xs {
		xs[i] = rng.ExpFloat64()
	}
	b.SetBytes(int64(8 * len(xs)))
	for b.Loop() {
		LogMoments(scratch, xs)
	}
}
