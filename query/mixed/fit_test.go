package mixed

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/mat"
)

func near(got, want, tolerance float64) bool {
	if math.IsNaN(want) {
		return math.IsNaN(got)
	}
	return got == want || math.Abs(got-want) <= tolerance*math.Abs(want)
}

// invent draws groups of the given sizes.
func invent(rng *rand.Rand, sizes []int, mu, tau, phi float64) (ys []float64, groups []int) {
	for k, size := range sizes {
		eta := tau * rng.NormFloat64()
		for range size {
			ys, groups = append(ys, mu+eta+phi*rng.NormFloat64()), append(groups, k)
		}
	}
	return ys, groups
}

// TestBalancedAgainstAnalysisOfVariance: for groups of one size both likelihoods
// have closed maxima in the mean squares between and within groups (Searle,
// Casella and McCulloch 1992, section 3.8), those at τ = 0 among them.
func TestBalancedAgainstAnalysisOfVariance(t *testing.T) {
	const seed = 1
	rng := rand.New(rand.NewPCG(seed, 1))
	boundaries := 0
	for trial := range 300 {
		count, size := 2+rng.IntN(12), 2+rng.IntN(9)
		ys, groups := invent(rng, slices.Repeat([]int{size}, count), -2, 0.5*rng.Float64(), 0.6)
		n, g := float64(size), float64(count)
		var mean, between, within float64
		for _, y := range ys {
			mean += y / (n * g)
		}
		for k := range count {
			var m float64
			for _, y := range ys[k*size : (k+1)*size] {
				m += y / n
			}
			between += n * (m - mean) * (m - mean) / (g - 1)
			for _, y := range ys[k*size : (k+1)*size] {
				within += (y - m) * (y - m) / (g * (n - 1))
			}
		}
		total := between*(g-1) + within*g*(n-1)
		for method, c := range map[Method]struct{ between, members float64 }{REML: {between, n*g - 1}, ML: {between * (g - 1) / g, n * g}} {
			tau2, phi2 := (c.between-within)/n, within
			if tau2 <= 0 {
				tau2, phi2 = 0, total/c.members
				boundaries++
			}
			got := Fit(ys, groups, method)
			se := math.Sqrt((phi2 + n*tau2) / (n * g))
			if !near(got.Mu, mean, 1e-13) || !near(got.Phi, math.Sqrt(phi2), 1e-12) || !near(got.MuSE, se, 1e-12) ||
				math.Abs(got.Tau*got.Tau-tau2) > 1e-13 || (tau2 == 0) != (got.Tau == 0) || !near(got.Sigma, math.Hypot(got.Tau, got.Phi), 1e-15) {
				t.Fatalf("seed %d, trial %d, method %d: %+v, want mean %v, squares %v, %v", seed, trial, method, got, mean, tau2, phi2)
			}
		}
	}
	if boundaries < 50 || boundaries > 400 {
		t.Errorf("%d of 600 fits at the boundary: too few or too many to test both", boundaries)
	}
}

// logLikelihood is the density of all values at once, from their covariance
// matrix, without anything that the profile makes use of. For REML it is that of
// the n-1 contrasts, in the form of Harville (1974), with 1'1 = n left out as in
// Patterson and Thompson's: -½·((n-1)·ln 2π + ln|V| + ln 1'V⁻¹1 + r'V⁻¹r).
func logLikelihood(ys []float64, groups []int, tau, phi float64, method Method) float64 {
	n := len(ys)
	v := mat.NewSymDense(n, nil)
	for i := range n {
		for j := i; j < n; j++ {
			var c float64
			if groups[i] == groups[j] {
				c = tau * tau
			}
			if i == j {
				c += phi * phi
			}
			v.SetSym(i, j, c)
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(v) {
		return math.Inf(-1)
	}
	ones := mat.NewVecDense(n, slices.Repeat([]float64{1}, n))
	var left, right mat.VecDense
	if chol.SolveVecTo(&left, ones) != nil {
		return math.Inf(-1)
	}
	y := mat.NewVecDense(n, slices.Clone(ys))
	information := mat.Dot(ones, &left)
	y.AddScaledVec(y, -mat.Dot(y, &left)/information, ones)
	if chol.SolveVecTo(&right, y) != nil {
		return math.Inf(-1)
	}
	sum := chol.LogDet() + mat.Dot(y, &right)
	if method == REML {
		return -(sum + math.Log(information) + float64(n-1)*math.Log(2*math.Pi)) / 2
	}
	return -(sum + float64(n)*math.Log(2*math.Pi)) / 2
}

// TestFitIsGreatest compares with the density at the fit, and looks for a greater
// one over all sensible τ and φ, on unbalanced samples of every kind.
func TestFitIsGreatest(t *testing.T) {
	const seed = 2
	rng := rand.New(rand.NewPCG(seed, 1))
	for trial := range 60 {
		sizes := make([]int, 2+rng.IntN(5))
		for k := range sizes {
			sizes[k] = 1 + rng.IntN(3)*rng.IntN(4)
		}
		sizes[0]++
		ys, groups := invent(rng, sizes, 1, math.Exp(2*rng.NormFloat64()), 1)
		for _, method := range []Method{REML, ML} {
			got := Fit(ys, groups, method)
			if at := logLikelihood(ys, groups, got.Tau, got.Phi, method); math.Abs(at-got.LogLikelihood) > 1e-9 {
				t.Errorf("seed %d, trial %d, method %d: logarithm of the likelihood %v, density %v", seed, trial, method, got.LogLikelihood, at)
			}
			for i := range 25 {
				for j := range 25 {
					tau, phi := 0.0, got.Phi*math.Pow(1.2, float64(j-12))
					if i > 0 {
						tau = math.Max(got.Tau, 0.1*got.Phi) * math.Pow(1.3, float64(i-12))
					}
					if at := logLikelihood(ys, groups, tau, phi, method); at > got.LogLikelihood+1e-9 {
						t.Fatalf("seed %d, trial %d, method %d: τ %v, φ %v have %v, more than %+v", seed, trial, method, tau, phi, at, got)
					}
				}
			}
		}
	}
}

// TestKnownSpread: over many invented samples τ² and φ² by REML are on average
// those that were put in, within four standard errors of that average, and Mu
// scatters as MuSE says.
func TestKnownSpread(t *testing.T) {
	const seed, trials, mu, tau, phi = 3, 400, -2.2, 0.4, 0.6
	rng := rand.New(rand.NewPCG(seed, 1))
	var f Fitter
	var between, within, pulls moments
	for range trials {
		sizes := make([]int, 60)
		for k := range sizes {
			sizes[k] = 1 + rng.IntN(25)
		}
		ys, groups := invent(rng, sizes, mu, tau, phi)
		r := f.Fit(ys, groups, REML)
		between.add(r.Tau * r.Tau)
		within.add(r.Phi * r.Phi)
		pulls.add((r.Mu - mu) * (r.Mu - mu) / (r.MuSE * r.MuSE))
	}
	for name, c := range map[string]struct {
		m    moments
		want float64
	}{"τ²": {between, tau * tau}, "φ²": {within, phi * phi}, "(μ-true)²/MuSE²": {pulls, 1}} {
		mean, se := c.m.mean()
		if math.Abs(mean-c.want) > 4*se {
			t.Errorf("seed %d: %s = %v on average, want %v ± %v", seed, name, mean, c.want, 4*se)
		}
	}
}

type moments struct{ n, sum, squares float64 }

func (m *moments) add(x float64) { m.n, m.sum, m.squares = m.n+1, m.sum+x, m.squares+x*x }

func (m *moments) mean() (mean, se float64) {
	mean = m.sum / m.n
	return mean, math.Sqrt((m.squares/m.n - mean*mean) / m.n)
}

// TestOrderDoesNotShow: neither the order of the values nor the labels of the
// groups change a bit, nor does a Fitter that has fitted something else.
func TestOrderDoesNotShow(t *testing.T) {
	const seed = 4
	rng := rand.New(rand.NewPCG(seed, 1))
	var f Fitter
	for trial := range 50 {
		sizes := []int{1, 5, 2, 40, 7, 7, 1 + rng.IntN(9)}
		ys, groups := invent(rng, sizes, -1, 0.4, 0.5)
		want := Fit(ys, groups, REML)
		labels := rng.Perm(1000)
		for i, k := range groups {
			groups[i] = labels[k]
		}
		rng.Shuffle(len(ys), func(i, j int) {
			ys[i], ys[j] = ys[j], ys[i]
			groups[i], groups[j] = groups[j], groups[i]
		})
		kept := slices.Clone(ys)
		if got := f.Fit(ys, groups, REML); got != want {
			t.Fatalf("seed %d, trial %d: %+v, want %+v", seed, trial, got, want)
		}
		if !slices.Equal(ys, kept) {
			t.Fatal("the values were changed")
		}
	}
}

// TestShiftAndScale: y + c moves μ alone, and twice y doubles all figures.
func TestShiftAndScale(t *testing.T) {
	const seed, shift = 5, 1000.0
	rng := rand.New(rand.NewPCG(seed, 1))
	ys, groups := invent(rng, []int{3, 9, 1, 12, 4, 2}, 0, 0.5, 0.6)
	want := Fit(ys, groups, REML)
	moved, doubled := make([]float64, len(ys)), make([]float64, len(ys))
	for i, y := range ys {
		moved[i], doubled[i] = y+shift, 2*y
	}
	got := Fit(moved, groups, REML)
	if !near(got.Mu, want.Mu+shift, 1e-15) || !near(got.Tau, want.Tau, 1e-11) || !near(got.Phi, want.Phi, 1e-11) {
		t.Errorf("moved by %v: %+v, want as %+v", shift, got, want)
	}
	got = Fit(doubled, groups, REML)
	if got.Mu != 2*want.Mu || got.Tau != 2*want.Tau || got.Phi != 2*want.Phi || got.MuSE != 2*want.MuSE {
		t.Errorf("doubled: %+v, want twice %+v", got, want)
	}
}

func TestUndefined(t *testing.T) {
	cases := map[string]struct {
		ys           []float64
		groups       []int
		wantedGroups int
	}{
		"nothing":              {nil, nil, 0},
		"one group":            {[]float64{1, 2, 3}, []int{4, 4, 4}, 1},
		"groups of one":        {[]float64{1, 2, 3}, []int{1, 2, 3}, 3},
		"NaN":                  {[]float64{1, 2, math.NaN(), 3}, []int{1, 1, 2, 2}, 2},
		"logarithm of nothing": {[]float64{1, 2, math.Inf(-1), 3}, []int{1, 1, 2, 2}, 2},
	}
	for name, c := range cases {
		got := Fit(c.ys, c.groups, REML)
		for _, x := range []float64{got.Mu, got.Tau, got.Phi, got.Sigma, got.MuSE, got.LogLikelihood} {
			if !math.IsNaN(x) {
				t.Errorf("%s: %+v, want NaN", name, got)
				break
			}
		}
		if got.N != len(c.ys) || got.Groups != c.wantedGroups {
			t.Errorf("%s: %d values, %d groups", name, got.N, got.Groups)
		}
	}
}

// TestNoSpread has the limits: no spread within groups, none between them, none
// at all.
func TestNoSpread(t *testing.T) {
	groups := []int{1, 1, 1, 2, 2, 3}
	for method, divisor := range map[Method]float64{REML: 2, ML: 3} {
		got := Fit([]float64{0.1, 0.1, 0.1, 0.4, 0.4, 1.0}, groups, method)
		tau := math.Sqrt((0.16 + 0.01 + 0.25) / divisor) // about 0.5
		want := Result{Mu: 0.5, Tau: tau, Sigma: tau, MuSE: tau / math.Sqrt(3), LogLikelihood: math.Inf(1), Groups: 3, N: 6}
		if !near(got.Mu, 0.5, 2e-16) || got.Phi != 0 || !near(got.Tau, tau, 4e-16) || got.Sigma != got.Tau || !near(got.MuSE, want.MuSE, 4e-16) || got.LogLikelihood != want.LogLikelihood {
			t.Errorf("method %d, no spread within: %+v, want %+v", method, got, want)
		}
		got = Fit(slices.Repeat([]float64{0.1}, 6), groups, method)
		if got.Mu != 0.1 || got.Tau != 0 || got.Phi != 0 || got.Sigma != 0 || got.MuSE != 0 {
			t.Errorf("method %d, equal values: %+v", method, got)
		}
		got = Fit([]float64{1, 2, 3, 1, 3, 2}, groups, method)
		if got.Tau != 0 || got.Mu != 2 || !near(got.Phi, math.Sqrt(4/(divisor+3)), 4e-16) {
			t.Errorf("method %d, equal means: %+v", method, got)
		}
	}
	// The spread within is that of rounding, 30 orders below the other.
	got := Fit([]float64{1, 1 + 0x1p-52, 2, 2, 4, 4}, []int{1, 1, 2, 2, 3, 3}, REML)
	if !near(got.Tau, math.Sqrt(7.0/3), 1e-14) || !(got.Phi > 0 && got.Phi < 1e-15) {
		t.Errorf("hardly any spread within: %+v", got)
	}
}

func BenchmarkFit(b *testing.B) {
	for _, c := range []struct{ count, size int }{{60, 50}, {300, 10}} {
		b.Run(fmt.Sprintf("%d groups of %d", c.count, c.size), func(b *testing.B) {
			rng := rand.New(rand.NewPCG(1, 1))
			sizes := make([]int, c.count)
			for k := range sizes {
				sizes[k] = c.size/2 + rng.IntN(c.size)
			}
			ys, groups := invent(rng, sizes, -2, 0.4, 0.6)
			rng.Shuffle(len(ys), func(i, j int) {
				ys[i], ys[j] = ys[j], ys[i]
				groups[i], groups[j] = groups[j], groups[i]
			})
			var f Fitter
			for b.Loop() {
				f.Fit(ys, groups, REML)
			}
			b.ReportMetric(float64(len(ys)), "values")
		})
	}
}
