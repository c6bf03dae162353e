package spectrum

import (
	"math"
	"math/rand/v2"
	"testing"
)

// The extremes have the sizes of Peaks, to the bit, and lie where a fine march of the same
// broken line has them.
func TestIntegrateHasThePeaks(t *testing.T) {
	r := rand.New(rand.NewPCG(4, 7))
	for _, n := range []int{0, 1, 2, 3, 50, 3000} {
		for range 20 {
			stepS := []float64{0.005, 0.01, 0.02}[r.IntN(3)]
			a, noise := make([]float64, n), 0.0
			for i := range a {
				noise = 0.9*noise + r.NormFloat64()
				a[i] = noise * math.Exp(-math.Pow(float64(i-n/3)/float64(n+1), 2)*20)
			}
			g := Integrate(stepS, a)
			pga, pgv, pgd := Peaks(stepS, a)
			for name, c := range map[string]struct {
				e    Extreme
				peak float64
			}{"PGA": {g.PGA, pga}, "PGV": {g.PGV, pgv}, "PGD": {g.PGD, pgd}} {
				if math.Abs(c.e.Value) != c.peak {
					t.Errorf("%d samples, %s: %v, Peaks has %v", n, name, c.e.Value, c.peak)
				}
			}
			compareWithMarch(t, g, stepS, a)
		}
	}
}

// compareWithMarch integrates in 64 parts of a step by Simpson's rule, exact for the
// quadratic velocity.
func compareWithMarch(t *testing.T, g GroundMotion, stepS float64, a []float64) {
	t.Helper()
	const parts = 64
	h := stepS / parts
	v, u, atV, atU := 0.0, 0.0, partOf(g.PGV.AtS, h), partOf(g.PGD.AtS, h)
	for k := range max(0, len(a)-1) {
		for i := range parts {
			at := func(share float64) float64 { return a[k] + (a[k+1]-a[k])*(float64(i)+share)/parts }
			middle := v + h/4*(at(0)+at(0.5))
			end := v + h/2*(at(0)+at(1))
			u += h / 6 * (v + 4*middle + end)
			v = end
			now := k*parts + i + 1
			if now == atV && math.Abs(v-g.PGV.Value) > 1e-3*math.Abs(g.PGV.Value) {
				t.Errorf("the velocity at %v s is %v, want %v", g.PGV.AtS, v, g.PGV.Value)
			}
			if now == atU && math.Abs(u-g.PGD.Value) > 1e-3*math.Abs(g.PGD.Value) {
				t.Errorf("the displacement at %v s is %v, want %v", g.PGD.AtS, u, g.PGD.Value)
			}
		}
		if math.Abs(v-g.Velocity[k+1]) > 1e-10*(1+math.Abs(v)) || math.Abs(u-g.Displacement[k+1]) > 1e-10*(1+math.Abs(u)) {
			t.Fatalf("sample %d: %v m/s and %v m, want %v and %v", k+1, g.Velocity[k+1], g.Displacement[k+1], v, u)
		}
	}
}

// partOf numbers the part that ends at a time.
func partOf(atS, h float64) int { return int(math.Round(atS / h)) }

// By hand: 2 m/s² that falls to -2 m/s² within a second and stays for another. v = 2t - 2t²
// has its crest of 0.5 m/s at 0.5 s, is 0 at 1 s and -2 m/s at 2 s; u = t² - 2t³/3 has its
// crest of 1/3 m at 1 s and is 1/3 - 1 m at 2 s.
func TestIntegrateByHand(t *testing.T) {
	g := Integrate(1, []float64{2, -2, -2})
	near := func(a, b float64) bool { return math.Abs(a-b) < 1e-15 }
	if g.Velocity[1] != 0 || g.Velocity[2] != -2 || !near(g.Displacement[1], 1./3) || !near(g.Displacement[2], -2./3) {
		t.Errorf("v = %v, u = %v", g.Velocity, g.Displacement)
	}
	if g.PGA != (Extreme{2, 0}) || g.PGV != (Extreme{-2, 2}) || !near(g.PGD.Value, -2./3) || g.PGD.AtS != 2 {
		t.Errorf("%+v %+v %+v", g.PGA, g.PGV, g.PGD)
	}
	if g := Integrate(1, []float64{2, -2}); !near(g.PGV.Value, 0.5) || g.PGV.AtS != 0.5 || !near(g.PGD.Value, 1./3) || g.PGD.AtS != 1 {
		t.Errorf("one step: %+v %+v", g.PGV, g.PGD)
	}
}
