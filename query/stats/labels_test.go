package stats

import (
	"math"
	"slices"
	"testing"
)

func TestNumber(t *testing.T) {
	cases := []struct {
		labels, want []int
		distinct     int
	}{
		{nil, nil, 0},
		{[]int{5}, []int{0}, 1},
		{[]int{7, -3, 7, 4}, []int{2, 0, 2, 1}, 3},
		{[]int{1 << 40, -3, 1 << 40, 4}, []int{2, 0, 2, 1}, 3},
		{[]int{math.MaxInt, math.MinInt, 0}, []int{2, 0, 1}, 3},
	}
	for _, c := range cases {
		got, distinct := Number(nil, c.labels)
		if !slices.Equal(got, c.want) || distinct != c.distinct {
			t.Errorf("Number(%v) = %v, %d, want %v, %d", c.labels, got, distinct, c.want, c.distinct)
		}
		in := slices.Clone(c.labels)
		if got, _ := Number(in, in); !slices.Equal(got, c.want) {
			t.Errorf("Number(%v) in place = %v, want %v", c.labels, got, c.want)
		}
	}
}
