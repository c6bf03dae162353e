package mixed

import (
	"cmp"
	"math"
	"slices"

	"swaybook/query/stats"
)

// Method says what a fit maximises.
type Method int

const (
	// REML is the likelihood of what is left of y when μ is taken out, whose
	// τ² and φ² are not low by the degree of freedom that μ costs; of balanced
	// groups they are those of the analysis of variance.
	REML Method = iota
	// ML is the likelihood of y.
	ML
)

// Result is a fit. Mu, Tau, Phi and MuSE have the unit of y, Sigma is √(τ²+φ²).
type Result struct {
	Mu, Tau, Phi, Sigma float64
	MuSE                float64 // standard error of Mu as if τ and φ were known
	LogLikelihood       float64 // the maximum, with all its constants, of the method's density
	Groups, N           int
}

// Fit fits the model to ys, where value i is of group groups[i]; labels of groups
// are any numbers, and the results depend on neither labels nor order. For a
// ratio λ = τ²/φ², groups of size n and mean m and w = n/(1+λ·n),
//
//	μ = Σ w·m / Σ w,  φ² = (S + Σ w·(m-μ)²)/M,  MuSE² = φ²/Σ w,
//
// with S the sum of squares within groups, and M the number of values, less one
// for REML; λ is where
//
//	M·ln φ² + Σ ln(1+λ·n) + [REML] ln Σ w
//
// is least over λ >= 0. Tau is exactly 0 where that is at λ = 0: where groups
// differ no more than what is within them explains. Where no group varies, Phi
// is exactly 0, Tau the deviation of the groups' means, of divisor Groups-1, or
// Groups for ML, and LogLikelihood +Inf.
//
// All but Groups and N is NaN where there are fewer than two groups, where no
// group has two values, so that τ and φ cannot be told apart, and where a value
// is infinite or NaN. Fit panics where the lengths differ. Mu, Tau and Phi of
// values of order one are good to some 1e-13; τ of few groups is uncertain by
// far more, of m groups by 1/√(2·m) of itself at best.
//
// Source: S. R. Searle, G. Casella, C. E. McCulloch, Variance Components, Wiley
// 1992, sections 3.7 and 3.8; H. D. Patterson, R. Thompson, "Recovery of
// inter-block information when block sizes are unequal", Biometrika 58 (1971)
// 545–554, for REML (both cited from memory). The model for ground motion is that
// of N. A. Abrahamson, R. R. Youngs, "A stable algorithm for regression analyses
// using the random effects model", Bulletin of the Seismological Society of
// America 82 (1992) 505–510, of which this is the case of a constant alone.
func Fit(ys []float64, groups []int, method Method) Result {
	var f Fitter
	return f.Fit(ys, groups, method)
}

// Fitter keeps the room that a fit needs for the next one. The zero value is
// ready; it serves one goroutine at a time.
type Fitter struct {
	numbers, ends []int
	values        []float64
	weights       []float64
	groups        []group
}

// group is what the likelihood needs of one: its size, its mean, and the sum of
// squares about that.
type group struct{ size, mean, squares float64 }

// Fit is as the function of that name.
func (f *Fitter) Fit(ys []float64, groups []int, method Method) Result {
	if len(groups) != len(ys) {
		panic("mixed: length of groups differs from length of values")
	}
	nan := math.NaN()
	out := Result{Mu: nan, Tau: nan, Phi: nan, Sigma: nan, MuSE: nan, LogLikelihood: nan, N: len(ys)}
	f.numbers, out.Groups = stats.Number(f.numbers, groups)
	if out.Groups < 2 || out.Groups == out.N || !allFinite(ys) {
		return out
	}
	centre, within := f.reduce(ys, out.Groups)
	f.weights = slices.Grow(f.weights[:0], out.Groups)[:out.Groups]
	p := profile{groups: f.groups, weights: f.weights, within: within, members: float64(out.N)}
	if method == REML {
		p.members--
		p.restricted = true
	}
	p.fit(&out)
	out.Mu += centre
	return out
}

func allFinite(ys []float64) bool {
	for _, y := range ys {
		if math.IsNaN(y) || math.IsInf(y, 0) {
			return false
		}
	}
	return true
}

// reduce sets f.groups and returns the sum of squares within them, and a centre
// that their means are relative to from then on. Values are summed in ascending
// order and groups stand in that of their own figures, so that no order of the
// input, and no label, shows in the result.
func (f *Fitter) reduce(ys []float64, count int) (centre, within float64) {
	f.partition(ys, count)
	f.groups = f.groups[:0]
	begin := 0
	for _, end := range f.ends {
		slices.Sort(f.values[begin:end])
		f.groups = append(f.groups, groupOf(f.values[begin:end]))
		begin = end
	}
	slices.SortFunc(f.groups, func(a, b group) int {
		return cmp.Or(cmp.Compare(a.size, b.size), cmp.Compare(a.mean, b.mean), cmp.Compare(a.squares, b.squares))
	})
	centre = f.groups[0].mean
	for i := range f.groups {
		f.groups[i].mean -= centre
		within += f.groups[i].squares
	}
	return centre, within
}

// partition puts the values into f.values, group after group; f.ends says where
// each ends.
func (f *Fitter) partition(ys []float64, count int) {
	f.ends = slices.Grow(f.ends[:0], count)[:count]
	f.values = slices.Grow(f.values[:0], len(ys))[:len(ys)]
	clear(f.ends)
	for _, k := range f.numbers {
		f.ends[k]++
	}
	position := 0
	for k, size := range f.ends {
		f.ends[k] = position
		position += size
	}
	for i, k := range f.numbers {
		f.values[f.ends[k]] = ys[i]
		f.ends[k]++
	}
}

// groupOf takes deviations from the first value, so that equal values have
// exactly their mean and no spread.
func groupOf(values []float64) group {
	var sum, squares float64
	first, size := values[0], float64(len(values))
	for _, y := range values {
		sum += y - first
	}
	mean := sum / size
	for _, y := range values {
		d := (y - first) - mean
		squares += float64(d * d)
	}
	return group{size, first + mean, squares}
}
