package stats

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// TestLogTailsKnownValues compares with 22 digits from mpmath 1.2.1 of the
// double nearest to each argument.
func TestLogTailsKnownValues(t *testing.T) {
	cases := []struct{ z, want float64 }{
		{0, -0.6931471805599453094172},
		{0.1, -0.6165050101150262887361},
		{-0.1, -0.7761545927302733255729},
		{0.7, -0.2770239422771312630045},
		{-1.3, -2.335103278662442498966},
		{2.49, -0.006407639912397260962182},
		{-2.49, -5.053466373454175458493},
		{2.5, -0.006229025485860002380986},
		{-2.5, -5.08164827727869049838},
		{3, -0.001350809964748193798841},
		{-3.7, -9.135235371872876505402},
		{5, -2.866516129637635933846e-7},
		{-5, -15.06499839398872573608},
		{8.2, -1.201935154273585887477e-16},
		{-8.2, -36.65742860143866347368},
		{-20, -203.9171553710972639368},
		{30, -4.906713927148187059534e-198},
		{-38, -726.5572160188201300965},
		{-40, -804.6084420137537881666},
		{54.7, 0}, // 1.4e-652
		{-54.7, -1500.966136178389367659},
	}
	for _, c := range cases {
		below, _ := logTails(c.z)
		_, above := logTails(-c.z)
		if !near(below, c.want, 0x1p-46) || below != above {
			t.Errorf("logTails(%v): %v, %v, want %v", c.z, below, above, c.want)
		}
	}
}

// TestAndersonDarlingAgainstReference compares with SciPy and R;
// testdata/reference/normality.py made the values. R keeps p at 3.7e-24 with two
// digits.
func TestAndersonDarlingAgainstReference(t *testing.T) {
	var reference struct {
		Cases []struct {
			Kind  string
			A2, P float64
			X     []float64
		}
	}
	readReference(t, "normality.json", &reference)
	if len(reference.Cases) < 20 {
		t.Fatalf("only %d cases", len(reference.Cases))
	}
	for _, c := range reference.Cases {
		n := float64(len(c.X))
		statistic, p := AndersonDarling(nil, c.X)
		if want := c.A2 * (1 + 0.75/n + 2.25/(n*n)); !near(statistic, want, 1e-11) {
			t.Errorf("%s, n %v: statistic %v, want %v", c.Kind, n, statistic, want)
		}
		tolerance := 1e-10
		if c.P == 3.7e-24 {
			tolerance = 0.02
		}
		if !near(p, c.P, tolerance) {
			t.Errorf("%s, n %v: probability %v, want %v", c.Kind, n, p, c.P)
		}
	}
}

// TestCriticalValues compares with table 4.7 of D'Agostino and Stephens (1986;
// cited from memory), which the formulas follow to a few per cent.
func TestCriticalValues(t *testing.T) {
	for a, want := range map[float64]float64{0.631: 0.10, 0.752: 0.05, 0.873: 0.025, 1.035: 0.01} {
		if got := normalityProbability(a); !near(got, want, 0.03) {
			t.Errorf("probability of %v = %v, want %v", a, got, want)
		}
	}
	last := 1.0
	for i := range 2000 {
		p := normalityProbability(float64(i) / 100)
		if p > last+2e-3 || p < 0 || p > 1 { // the pieces meet to three digits
			t.Fatalf("probability of %v = %v after %v", float64(i)/100, p, last)
		}
		last = p
	}
}

// TestRejectionRate: of lognormal samples 5 % have a probability below 0.05,
// within four standard deviations of that count. Scale and spread don't matter.
func TestRejectionRate(t *testing.T) {
	const seed, samples, rate = 71, 20000, 0.05
	rng := rand.New(rand.NewPCG(seed, 1))
	for _, n := range []int{10, 40} {
		xs, scratch, rejected := make([]float64, n), make([]float64, n), 0
		for range samples {
			for i := range xs {
				xs[i] = Exp(-3 + 0.6*rng.NormFloat64())
			}
			Sort(xs, scratch)
			if _, p := AndersonDarling(scratch, xs); p < rate {
				rejected++
			}
		}
		got, sigma := float64(rejected)/samples, math.Sqrt(rate*(1-rate)/samples)
		if math.Abs(got-rate) > 4*sigma {
			t.Errorf("seed %d, n %d: rejected %v of the samples, want %v ± %v", seed, n, got, rate, 4*sigma)
		}
	}
}

func TestAndersonDarlingUndefined(t *testing.T) {
	eight := []float64{1, 2, 3, 4, 5, 6, 7, 8}
	if _, p := AndersonDarling(nil, eight); math.IsNaN(p) {
		t.Error("probability of eight values is NaN")
	}
	disordered := slices.Clone(eight)
	disordered[3], disordered[4] = 5, 4
	cases := map[string][]float64{
		"nothing": nil, "seven values": eight[:7], "equal values": slices.Repeat([]float64{0.3}, 20),
		"a zero": append([]float64{0}, eight...), "infinity": append(slices.Clone(eight), math.Inf(1)), "disorder": disordered,
	}
	for name, xs := range cases {
		if statistic, p := AndersonDarling(nil, xs); !math.IsNaN(statistic) || !math.IsNaN(p) {
			t.Errorf("%s: %v, %v, want NaN", name, statistic, p)
		}
	}
}

func BenchmarkAndersonDarling(b *testing.B) {
	rng := rand.New(rand.NewPCG(1, 1))
	xs, scratch := make([]float64, 3000), make([]float64, 3000)
	for i := range xs {
		xs[i] = Exp(rng.NormFloat64())
	}
	Sort(xs, scratch)
	for b.Loop() {
		AndersonDarling(scratch, xs)
	}
}
