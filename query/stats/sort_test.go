package stats

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// TestSort compares with slices.Sort, bit for bit, over lengths on both sides of
// the change of method and over values of all sizes.
func TestSort(t *testing.T) {
	const seed = 31
	rng := rand.New(rand.NewPCG(seed, 4))
	kinds := map[string]func() float64{
		"exponential":  rng.ExpFloat64,
		"few values":   func() float64 { return float64(rng.IntN(3)) },
		"one value":    func() float64 { return 0.25 },
		"all patterns": func() float64 { return math.Float64frombits(rng.Uint64N(math.Float64bits(math.Inf(1)) + 1)) },
		"signed":       rng.NormFloat64,
		"with NaN":     func() float64 { return math.Sqrt(rng.Float64() - 0.01) },
	}
	for name, draw := range kinds {
		for _, n := range []int{0, 1, 2, 255, 256, 257, 1000, 3001} {
			xs := make([]float64, n)
			for i := range xs {
				xs[i] = draw()
			}
			want := slices.Clone(xs)
			slices.Sort(want)
			Sort(xs, make([]float64, n))
			for i := range xs {
				if math.Float64bits(xs[i]) != math.Float64bits(want[i]) {
					t.Fatalf("seed %d, %s, n %d: value %d is %v, want %v", seed, name, n, i, xs[i], want[i])
				}
			}
		}
	}
}

// BenchmarkSort sorts another sample each time: one that comes back is learnt by
// the processor's branch prediction, which flatters sorting by comparison.
func BenchmarkSort(b *testing.B) {
	rng := rand.New(rand.NewPCG(1, 1))
	pool := make([]float64, 1<<20)
	for i := range pool {
		pool[i] = rng.ExpFloat64()
	}
	for _, n := range []int{64, 256, 512, 1024, 3000} {
		sorted, scratch := make([]float64, n), make([]float64, n)
		run := func(b *testing.B, sort func()) {
			b.SetBytes(int64(8 * n))
			at := 0
			for b.Loop() {
				if at+n > len(pool) {
					at = 0
				}
				copy(sorted, pool[at:])
				at += n
				sort()
			}
		}
		b.Run(fmt.Sprintf("compare/%d", n), func(b *testing.B) { run(b, func() { slices.Sort(sorted) }) })
		b.Run(fmt.Sprintf("digits/%d", n), func(b *testing.B) { run(b, func() { Sort(sorted, scratch) }) })
	}
}
