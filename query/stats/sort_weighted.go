package stats

import (
	"cmp"
	"math"
	"slices"
)

type weighted struct{ x, weight float64 }

func compareWeighted(a, b weighted) int {
	return cmp.Or(cmp.Compare(a.x, b.x), cmp.Compare(a.weight, b.weight))
}

// SortWeighted sorts xs in ascending order and weights with it, equal values by
// their weights, so that the result does not depend on the order of the pairs.
// NaN comes first, as in Sort, whose methods these are. It panics where the
// lengths differ.
func SortWeighted(xs, weights []float64) {
	n := len(xs)
	if len(weights) != n {
		panic("stats: length of weights differs from length of sample")
	}
	room := make([]weighted, 2*n)
	pairs := room[:n]
	for i, x := range xs {
		pairs[i] = weighted{x, weights[i]}
	}
	if n < radixLength || !allPlain(xs) {
		slices.SortFunc(pairs, compareWeighted)
	} else {
		pairs = sortByDigits(pairs, room[n:])
	}
	for i, p := range pairs {
		xs[i], weights[i] = p.x, p.weight
	}
}

// sortByDigits returns the one of from and to that holds the sorted pairs. It
// puts values in order as Sort does, then weights within runs of equal values.
func sortByDigits(from, to []weighted) []weighted {
	var counts [8][256]uint32
	for _, p := range from {
		bits := math.Float64bits(p.x)
		for b := range counts {
			counts[b][byte(bits>>(8*b))]++
		}
	}
	for b := range counts {
		if counts[b][byte(math.Float64bits(from[0].x)>>(8*b))] == uint32(len(from)) {
			continue
		}
		distributeWeighted(to, from, &counts[b], 8*b)
		from, to = to, from
	}
	for begin := 0; begin < len(from); {
		end := begin + 1
		for end < len(from) && from[end].x == from[begin].x {
			end++
		}
		if end > begin+1 {
			slices.SortFunc(from[begin:end], compareWeighted)
		}
		begin = end
	}
	return from
}

// distributeWeighted is distribute for pairs.
func distributeWeighted(to, from []weighted, counts *[256]uint32, shift int) {
	toPositions(counts)
	for _, p := range from {
		digit := byte(math.Float64bits(p.x) >> (shift & 63))
		to[counts[digit]] = p
		counts[digit]++
	}
}
