package spectrum

import (
	"fmt"
	"math"
	"testing"
)

// TestKernelsAgree solves with every kernel and holds D to the bits of the
// portable one: random and long motions, subnormal, huge and zero ones, all
// lengths over two blocks, and lists that fill lanes or do not.
func TestKernelsAgree(t *testing.T) {
	motions := map[string][]float64{
		"random":    seededMotion(41, 900),
		"long":      shaken(42, 12000),
		"zero":      make([]float64, 500),
		"subnormal": scaledBy(seededMotion(43, 300), 0x1p-1060),
		"huge":      scaledBy(seededMotion(44, 300), 0x1p+1018),
		"one pulse": append(make([]float64, 130), 1, 0, 0, 0),
	}
	for n := range 2*blockSteps + 3 {
		motions[fmt.Sprintf("random, %d samples", n)] = seededMotion(uint64(n), n)
	}
	grid := DefaultGrid().Oscillators()
	for name, a := range motions {
		for _, step := range []float64{0.002, 0.005, 0.02} {
			list := grid
			if len(a) < 200 { // part of the grid, of all kinds, filling lanes or not
				shift := 11 * len(a) % 1100
				list = grid[shift : shift+5*len(a)%97+1]
			}
			for _, method := range []Method{NigamJennings, NewmarkAverage, NewmarkLinear} {
				kernelsAgree(t, name, method, step, accepted(method, step, list), a)
			}
		}
	}
}

// accepted returns the oscillators that a method takes.
func accepted(m Method, step float64, list []Oscillator) (out []Oscillator) {
	for _, o := range list {
		if m.accepts(o, step) == nil {
			out = append(out, o)
		}
	}
	return out
}

func scaledBy(a []float64, f float64) []float64 {
	for i := range a {
		a[i] *= f
	}
	return a
}

func kernelsAgree(t *testing.T, name string, method Method, step float64, list []Oscillator, a []float64) {
	t.Helper()
	useKernel(t, "portable")
	want := mustSolve(t, method, step, list, a)
	for _, k := range Kernels() {
		useKernel(t, k)
		for i, d := range mustSolve(t, method, step, list, a) {
			if math.Float64bits(d) != math.Float64bits(want[i]) {
				t.Fatalf("%s: %v dt %g %+v: D = %v with %s, %v with the portable kernel", name, method, step, list[i], d, k, want[i])
			}
		}
	}
}
