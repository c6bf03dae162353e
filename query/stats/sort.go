package stats

import (
	"math"
	"slices"
)

// radixLength is the length from which Sort is faster by digits than by
// comparisons; see BenchmarkSort.
const radixLength = 256

// Sort sorts xs in ascending order. scratch must be as long as xs and must not
// overlap it, or Sort panics; its content is lost. Where a value is negative,
// or NaN, the order is that of slices.Sort.
//
// Long samples without such values are sorted by the eight bytes of their bit
// patterns, lowest byte first, since patterns of doubles that are not negative
// stand in the order of the values (IEEE 754-2019, section 3.4). A byte that all
// share costs no pass. The result is the same either way.
//
// Source: D. E. Knuth, The Art of Computer Programming, vol. 3, 2nd ed.,
// Addison-Wesley 1998, section 5.2.5: distribution sorting, least significant
// digit first (cited from memory).
func Sort(xs, scratch []float64) {
	if len(scratch) != len(xs) {
		panic("stats: length of scratch differs from length of xs")
	}
	if len(xs) < radixLength || !allPlain(xs) {
		slices.Sort(xs)
		return
	}
	var counts [8][256]uint32
	for _, x := range xs {
		bits := math.Float64bits(x)
		for b := range counts {
			counts[b][byte(bits>>(8*b))]++
		}
	}
	from, to := xs, scratch
	for b := range counts {
		if counts[b][byte(math.Float64bits(xs[0])>>(8*b))] == uint32(len(xs)) {
			continue
		}
		distribute(to, from, &counts[b], 8*b)
		from, to = to, from
	}
	if &from[0] != &xs[0] {
		copy(xs, from)
	}
}

// allPlain reports whether no sign bit is set and no value is NaN.
func allPlain(xs []float64) bool {
	top := math.Float64bits(math.Inf(1))
	for _, x := range xs {
		if math.Float64bits(x) > top {
			return false
		}
	}
	return true
}

// toPositions makes of the numbers of values with each byte the positions of the first.
func toPositions(counts *[256]uint32) {
	position := uint32(0)
	for digit, n := range counts {
		counts[digit] = position
		position += n
	}
}

// distribute copies from in the order of the byte at shift. counts, the number
// of values with each byte, become positions.
func distribute(to, from []float64, counts *[256]uint32, shift int) {
	toPositions(counts)
	for _, x := range from {
		digit := byte(math.Float64bits(x) >> (shift & 63))
		to[counts[digit]] = x
		counts[digit]++
	}
}
