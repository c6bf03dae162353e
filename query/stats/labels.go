package stats

import "slices"

// Number sets dst to the numbers 0 … distinct-1 of labels, in ascending order of
// the labels, and returns it. A slice is allocated where the capacity of dst is
// less than len(labels); dst may be labels itself. The cost is O(n) where labels
// span no more than some four times their number, O(n·log n) elsewhere.
func Number(dst, labels []int) (numbers []int, distinct int) {
	if cap(dst) < len(labels) {
		dst = make([]int, len(labels))
	}
	dst = dst[:len(labels)]
	if len(labels) == 0 {
		return dst, 0
	}
	least, greatest := slices.Min(labels), slices.Max(labels)
	// The difference overflows to a negative number where labels are that far apart.
	if span := greatest - least; span < 0 || span > 4*len(labels)+64 {
		return numberBySearch(dst, labels)
	}
	numberOf := make([]int, greatest-least+1)
	for _, label := range labels {
		numberOf[label-least] = 1
	}
	for i, present := range numberOf {
		numberOf[i] = distinct
		distinct += present
	}
	for i, label := range labels {
		dst[i] = numberOf[label-least]
	}
	return dst, distinct
}

func numberBySearch(dst, labels []int) (numbers []int, distinct int) {
	known := slices.Clone(labels)
	slices.Sort(known)
	known = slices.Compact(known)
	for i, label := range labels {
		dst[i], _ = slices.BinarySearch(known, label)
	}
	return dst, len(known)
}
