package stats

import (
	"cmp"
	"slices"
)

// SortWeighted sorts xs in ascending order and weights with it, equal values by
// their weights, so that the result does not depend on the order of the pairs.
// NaN comes first, as in Sort. It panics where the lengths differ.
func SortWeighted(xs, weights []float64) {
	if len(weights) != len(xs) {
		panic("stats: length of weights differs from length of sample")
	}
	type pair struct{ x, weight float64 }
	pairs := make([]pair, len(xs))
	for i, x := range xs {
		pairs[i] = pair{x, weights[i]}
	}
	slices.SortFunc(pairs, func(a, b pair) int {
		if c := cmp.Compare(a.x, b.x); c != 0 {
			return c
		}
		return cmp.Compare(a.weight, b.weight)
	})
	for i, p := range pairs {
		xs[i], weights[i] = p.x, p.weight
	}
}
