package spectrum

import (
	"math"
	"math/rand/v2"
	"testing"
)

// TestOracle compares the oracle with multiple precision throughout, on short
// motions of every kind.
func TestOracle(t *testing.T) {
	const seed = 61
	r := rand.New(rand.NewPCG(seed, 0))
	count := 50
	if testing.Short() || raceDetector { // nothing here runs side by side
		count = 15
	}
	worst := 0.0
	for i := range count {
		ratio := math.Exp(math.Log(0.3) + r.Float64()*math.Log(5000/0.3))
		if i%10 == 0 {
			ratio = 0.05 + 0.3*r.Float64()
		}
		damping := []float64{0, 0.99, 0.99 * r.Float64(), 0.2 * r.Float64()}[i%4]
		a := make([]float64, 2+r.IntN(4))
		for j := range a {
			a[j] = r.NormFloat64()
			if i%3 == 1 {
				a[j] = math.Abs(a[j]) * float64(1-2*(j%2))
			}
		}
		if i == 0 { // pieces that begin without relative acceleration
			ratio, damping, a = 0.05, 0, []float64{3, -7.9375}
		}
		got, want := oracleSD(Omega(ratio), damping, a), exactSD(Omega(ratio), damping, a)
		if !(off(got, want) <= 1e-12) {
			t.Errorf("seed %d T/dt %v damping %v motion %v: %v, want %v (off by %.2g)", seed, ratio, damping, a, got, want, off(got, want))
		}
		worst = max(worst, off(got, want))
	}
	t.Logf("greatest error %.2g", worst)
}

func BenchmarkOracle(b *testing.B) {
	a := seededMotion(1, 300)
	for b.Loop() {
		for _, ratio := range []float64{0.05, 0.5, 3, 30, 3000} {
			oracleSD(Omega(ratio), 0.05, a)
		}
	}
}
