package signal

import (
	"math"
	"testing"
)

// Of a part that is a polynomial the whole loses just that, and keeps what it has besides.
func TestDetrendByAPart(t *testing.T) {
	const from, to, n = 7, 40, 100
	for degree := range MaxDegree + 1 {
		polynomial := func(i int) float64 {
			t := float64(i) / n
			return [...]float64{3, 3 - 2*t, 3 - 2*t + 5*t*t}[degree]
		}
		x := make([]float64, n)
		for i := range x {
			x[i] = polynomial(i)
			if i >= to {
				x[i] += math.Sin(float64(i))
			}
		}
		DetrendBy(x, from, to, degree)
		for i, v := range x {
			want := 0.0
			if i >= to {
				want = math.Sin(float64(i))
			}
			if math.Abs(v-want) > 1e-11 {
				t.Fatalf("degree %d, sample %d: %g, want %g", degree, i, v, want)
			}
		}
	}
	DetrendBy(nil, 0, 0, 1)
}
