package spectrum

import (
	"math"
	"math/rand/v2"
	"testing"
)

// fuzzedMotion makes a motion of at most 300 samples of any bytes. The first
// chooses what they are: a number in eight bits each, or one with eight powers of
// two, which reach from the least to the greatest number.
func fuzzedMotion(data []byte) []float64 {
	if len(data) == 0 {
		return nil
	}
	kind, data := data[0], data[1:]
	a := make([]float64, 0, 300)
	for i := 0; i < len(data) && len(a) < cap(a); i++ {
		x := float64(int8(data[i])) / 16
		switch kind % 4 {
		case 1: // alternating signs
			x = math.Abs(x) * float64(1-2*(i%2))
		case 2: // any power of two, the same for all
			x = math.Ldexp(x, int(kind/4)*33-1073)
		case 3: // any power of two for each
			if i++; i < len(data) {
				x = math.Ldexp(x, (int(data[i])-128)*8)
			}
		}
		a = append(a, x)
	}
	return a
}

// within tells whether got is want but for the relative error by, short of what
// subnormal numbers round to and the greatest do not reach.
func within(got, want, by float64) bool {
	if math.IsInf(want, 1) {
		return got >= math.MaxFloat64*(1-by)
	}
	return math.Abs(got-want) <= by*want+5e-324
}

// folded returns x if it is from lo to hi, and else some number that is.
func folded(x, lo, hi float64) float64 {
	switch {
	case x >= lo && x <= hi:
		return x
	case math.IsNaN(x) || math.IsInf(x, 0):
		return lo
	}
	_, part := math.Modf(math.Abs(x))
	return lo + (hi-lo)*part
}

// FuzzSD compares short motions of any shape with the oracle, a hundred times
// closer than is promised.
func FuzzSD(f *testing.F) {
	f.Add([]byte{0, 0, 10, 200, 30, 0}, 3.0, 0.05)
	f.Add([]byte{0, 255, 0, 255, 0, 255, 0}, 0.4, 0.0)
	f.Add([]byte{0, 7, 7}, 100.0, 0.7)
	f.Add([]byte{0, 128, 128, 1, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 128}, 4.97, 0.99)
	f.Add([]byte{1, 100, 100, 100, 100, 100, 100, 90, 100, 100}, 2.0, 0.02)
	f.Add([]byte{2, 3, 1, 0, 250, 9}, 12.0, 0.05)             // subnormal
	f.Add([]byte{2 + 4*63, 127, 129, 127, 129, 3}, 0.05, 0.0) // huge
	f.Add([]byte{3, 1, 255, 200, 0, 1, 128, 77, 130}, 8.0, 0.1)
	f.Add(append(make([]byte, 200), 128, 1, 0, 5), 700.0, 0.99)
	f.Add(append(make([]byte, 297), 128, 1, 9), 5000.0, 0.0)
	// Pieces of a step that begin without relative acceleration.
	f.Add([]byte{0, 48, 129}, 0.05, 0.0)
	r := rand.New(rand.NewPCG(81, 0))
	for kind := range 8 {
		for _, n := range []int{40, 150, 300} {
			data := make([]byte, 1+n)
			for i := range data {
				data[i] = byte(r.Uint32())
			}
			data[0] = data[0]&^3 | byte(kind%4)
			f.Add(data, 0.05*math.Pow(1e5, r.Float64()), 0.99*r.Float64()*float64(kind/4))
		}
	}
	f.Fuzz(func(t *testing.T, data []byte, ratio, damping float64) {
		if !(ratio >= 0.05 && ratio <= 5000) {
			ratio = math.Exp(folded(ratio, math.Log(0.05), math.Log(5000)))
		}
		damping = folded(damping, 0, 0.99)
		a := fuzzedMotion(data)
		got, want := solveOne(t, 1, ratio, damping, a), oracleSD(Omega(ratio), damping, a)
		if !within(got, want, 1e-11) {
			t.Errorf("T/dt %v damping %v motion %v: D = %v, want %v (off by %.2g)", ratio, damping, a, got, want, off(got, want))
		}
	})
}
