package stats

import (
	"math"
	"math/rand/v2"
	"slices"
	"strconv"
	"testing"

	"gonum.org/v1/gonum/stat"
)

type bootstrapReference struct {
	Draws []struct {
		Seed     string
		Resample int
		Counts   []int
	}
	Clusters [][]float64
	Percents []float64
	Figures  struct {
		Mean         []float64
		LogMean      []float64 `json:"log_mean"`
		LogStd       []float64 `json:"log_std"`
		Percentile84 []float64 `json:"percentile_84"`
	}
}

// TestResampleAgainstReference compares with the generator and the drawing
// written anew; testdata/reference/bootstrap.py made the counts.
func TestResampleAgainstReference(t *testing.T) {
	var reference bootstrapReference
	readReference(t, "bootstrap.json", &reference)
	if len(reference.Draws) < 10 {
		t.Fatalf("only %d draws", len(reference.Draws))
	}
	for _, d := range reference.Draws {
		seed, err := strconv.ParseUint(d.Seed, 10, 64)
		if err != nil {
			t.Fatal(err)
		}
		clusters := make([]int, len(d.Counts)) // of one value each
		for i := range clusters {
			clusters[i] = i
		}
		resample := 0
		Bootstrap(clusters, d.Resample+1, seed, 0, func(_ []float64, counts []int) {
			if resample == d.Resample && !slices.Equal(counts, d.Counts) {
				t.Errorf("seed %s, resample %d: %v, want %v", d.Seed, resample, counts, d.Counts)
			}
			resample++
		})
	}
}

// pooled returns the values of all clusters in ascending order, and the cluster
// of each, labelled label(k).
func pooled(values [][]float64, label func(k int) int) (sorted []float64, clusters []int) {
	type member struct {
		x       float64
		cluster int
	}
	var members []member
	for k, xs := range values {
		for _, x := range xs {
			members = append(members, member{x, label(k)})
		}
	}
	slices.SortFunc(members, func(a, b member) int {
		if a.x != b.x {
			return int(math.Copysign(1, a.x-b.x))
		}
		return a.cluster - b.cluster
	})
	for _, m := range members {
		sorted, clusters = append(sorted, m.x), append(clusters, m.cluster)
	}
	return sorted, clusters
}

// figuresOf returns what bootstrap.py takes: mean, log-mean, deviation of the
// logarithms and percentile 84.
func figuresOf(sorted []float64) func([]float64, []int) {
	logs, scratch := make([]float64, len(sorted)), make([]float64, len(sorted))
	for i, x := range sorted {
		logs[i] = Log(x)
	}
	return func(figures []float64, counts []int) {
		mean, std := RepeatedMoments(logs, nil, counts)
		figures[0], figures[1], figures[2] = RepeatedMean(sorted, nil, counts), Exp(mean), std
		RepeatedPercentiles(figures[3:], scratch, sorted, nil, counts, []float64{84})
	}
}

// TestBootstrapAgainstReference compares distributions with those of NumPy: the
// share of values up to each of its quantiles, within four standard deviations of
// both counts.
func TestBootstrapAgainstReference(t *testing.T) {
	const seed, resamples, referenceResamples = 81, 20000, 400000
	var reference bootstrapReference
	readReference(t, "bootstrap.json", &reference)
	sorted, clusters := pooled(reference.Clusters, func(k int) int { return k })
	got := Bootstrap(clusters, resamples, seed, 4, figuresOf(sorted))
	want := [][]float64{reference.Figures.Mean, reference.Figures.LogMean, reference.Figures.LogStd, reference.Figures.Percentile84}
	for f, quantiles := range want {
		for i, q := range quantiles {
			p := reference.Percents[i] / 100
			sigma := math.Sqrt(p * (1 - p) * (1.0/resamples + 1.0/referenceResamples))
			var below, upTo float64 // many resamples have the same percentile
			for _, value := range got[f] {
				if value < q*(1-1e-9) {
					below += 1.0 / resamples
				}
				if value < q*(1+1e-9) {
					upTo += 1.0 / resamples
				}
			}
			if below > p+4*sigma || upTo < p-4*sigma {
				t.Errorf("seed %d, figure %d: the share %v to %v of values lies up to %v, want %v ± %v", seed, f, below, upTo, q, p, 4*sigma)
			}
		}
	}
}

// TestStandardErrorOfMean: with clusters of one value the deviation of resampled
// means is s·√((n-1)/n)/√n, s with divisor n-1, within four standard deviations of
// its estimate, 1/√(2·resamples) of it.
func TestStandardErrorOfMean(t *testing.T) {
	const seed, n, resamples = 82, 50, 20000
	rng := rand.New(rand.NewPCG(seed, 1))
	xs, clusters := make([]float64, n), make([]int, n)
	for i := range xs {
		xs[i], clusters[i] = rng.ExpFloat64(), i
	}
	means := Bootstrap(clusters, resamples, seed, 1, func(figures []float64, counts []int) {
		figures[0] = RepeatedMean(xs, nil, counts)
	})[0]
	got, want := stat.StdDev(means, nil), stat.StdDev(xs, nil)*math.Sqrt(float64(n-1))/n
	if !near(got, want, 4/math.Sqrt(2*resamples)) {
		t.Errorf("seed %d: standard error %v, want %v", seed, got, want)
	}
	low, high := BootstrapInterval(means, 0.95)
	normal := Mean(xs)
	if !near(low, normal-1.96*want, 0.05) || !near(high, normal+1.96*want, 0.05) {
		t.Errorf("seed %d: interval %v to %v, want nearly %v ± %v", seed, low, high, normal, 1.96*want)
	}
}

// TestClustersStayTogether: whatever is drawn, all values of a cluster are there
// equally often, and as many clusters as the sample has.
func TestClustersStayTogether(t *testing.T) {
	clusters := []int{9, 4, 9, -2, 4, 4, 7}
	Bootstrap(clusters, 200, 83, 0, func(_ []float64, counts []int) {
		drawn := map[int]int{}
		for i, cluster := range clusters {
			if times, seen := drawn[cluster]; seen && times != counts[i] {
				t.Fatalf("cluster %d is torn: %v", cluster, counts)
			}
			drawn[cluster] = counts[i]
		}
		if total := drawn[9] + drawn[4] + drawn[-2] + drawn[7]; total != 4 {
			t.Fatalf("%d clusters drawn: %v", total, counts)
		}
	})
}

// TestBootstrapIgnoresOrder: neither the order of the values nor other labels in
// the same order change a bit; another seed does.
func TestBootstrapIgnoresOrder(t *testing.T) {
	const seed = 84
	values := [][]float64{{0.3, 0.1, 0.4}, {0.2}, {0.7, 0.1}, {0.5, 0.6, 0.25, 0.9}}
	sorted, clusters := pooled(values, func(k int) int { return k })
	want := Bootstrap(clusters, 50, seed, 4, figuresOf(sorted))
	for _, xs := range values {
		slices.Reverse(xs)
	}
	again, others := pooled(values, func(k int) int { return 1000*k*k - 5 })
	for f, got := range Bootstrap(others, 50, seed, 4, figuresOf(again)) {
		if !sameBits(got, want[f]) {
			t.Errorf("figure %d depends on order or labels", f)
		}
	}
	if other := Bootstrap(clusters, 50, seed+1, 4, figuresOf(sorted)); slices.Equal(other[0], want[0]) {
		t.Error("another seed gives the same means")
	}
}

func TestBootstrapIntervalUndefined(t *testing.T) {
	for name, pair := range map[string]struct {
		xs    []float64
		level float64
	}{
		"nothing": {nil, 0.9}, "NaN": {[]float64{1, math.NaN(), 2}, 0.9}, "level 1": {[]float64{1, 2}, 1}, "level NaN": {[]float64{1, 2}, math.NaN()},
	} {
		if low, high := BootstrapInterval(pair.xs, pair.level); !math.IsNaN(low) || !math.IsNaN(high) {
			t.Errorf("%s: %v, %v, want NaN", name, low, high)
		}
	}
	if low, high := BootstrapInterval([]float64{3, 1, 2, 5, 4}, 0.5); low != 2 || high != 4 {
		t.Errorf("half of 1 to 5 = %v, %v, want 2, 4", low, high)
	}
}

func BenchmarkBootstrap(b *testing.B) {
	rng := rand.New(rand.NewPCG(1, 1))
	xs, clusters := make([]float64, 3000), make([]int, 3000)
	for i := range xs {
		xs[i], clusters[i] = rng.ExpFloat64(), rng.IntN(60)
	}
	Sort(xs, make([]float64, len(xs)))
	statistic := figuresOf(xs)
	for b.Loop() {
		Bootstrap(clusters, 100, 1, 4, statistic)
	}
}
