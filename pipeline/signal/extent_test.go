package signal

import (
	"math"
	"math/rand/v2"
	"testing"
)

// A motion that ends in noise ends there, however much of the noise follows; within the
// 0.37 s in which the filter at 1 Hz forgets nine tenths.
func TestEndAbove(t *testing.T) {
	random := rand.New(rand.NewPCG(1, 1))
	const from, ends, stepS = 1000, 2000, 0.01
	noise := make([]float64, 60000)
	for i := range noise {
		noise[i] = random.NormFloat64()
	}
	for _, n := range []int{4000, 60000} {
		x := append([]float64(nil), noise[:n]...)
		for i := from; i < ends; i++ {
			x[i] *= 20
		}
		if got := EndAbove(x, stepS, 0, from, 0, 4); got < ends || got > ends+37 {
			t.Errorf("%d samples: ends at %d, want %d", n, got, ends)
		}
		if got := EndAbove(noise[:n], stepS, 0, from, 1000, 4); got != n {
			t.Errorf("%d samples of noise: ends at %d", n, got)
		}
	}
}

func TestResolution(t *testing.T) {
	for _, test := range []struct {
		x    []float64
		want float64
	}{{nil, 0}, {[]float64{3, 3}, 0}, {[]float64{0, 1, 1, 1.25, -2}, 0.25}} {
		if got := Resolution(test.x); got != test.want {
			t.Errorf("Resolution(%v) = %g, want %g", test.x, got, test.want)
		}
	}
}

// The quietest second tells the noise whatever drift there is; less than a second tells none.
func TestQuietestPower(t *testing.T) {
	const stepS, deviation = 0.01, 0.02
	random := rand.New(rand.NewPCG(1, 5))
	x := make([]float64, 4000)
	for i := range x {
		x[i] = 3 + math.Sin(float64(i)/2000) + deviation*random.NormFloat64()
		if i > 1000 && i < 3000 {
			x[i] += random.NormFloat64()
		}
	}
	if got := QuietestPower(x, stepS) / (deviation * deviation); !(got > 0.4 && got < 1.1) {
		t.Errorf("%.3g of the noise", got)
	}
	if got := QuietestPower(x[:99], stepS); got != 0 {
		t.Errorf("%g of less than a second", got)
	}
}
