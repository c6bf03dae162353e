package modal

import (
	"fmt"
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

func near(got, want, tolerance float64) bool { return math.Abs(got-want) <= tolerance }

// Ratios of frequencies and coefficients that A. K. Chopra, Dynamics of
// Structures, prints in the example of a uniform shear frame of five storeys,
// every mode 5 % damped (from memory, three decimals): frequencies are
// 2·sin((2n-1)·π/22) in units of √(k/m).
func TestShearFrameOfFiveStoreys(t *testing.T) {
	ratios := [][]float64{{0.343, 0.217, 0.169, 0.148}, {0.634, 0.494, 0.433}, {0.778, 0.683}, {0.877}}
	coefficients := [][]float64{{0.007, 0.003, 0.002, 0.001}, {0.044, 0.018, 0.012}, {0.136, 0.062}, {0.365}}
	periods, dampings := make([]float64, 5), make([]float64, 5)
	for n := range periods {
		periods[n] = 2 * math.Pi / (2 * math.Sin(float64(2*n+1)*math.Pi/22))
		dampings[n] = 0.05
	}
	m := Correlation(periods, dampings)
	for i, row := range coefficients {
		for k, want := range row {
			j := i + 1 + k
			if got := periods[j] / periods[i]; !near(got, ratios[i][k], 0.0005) {
				t.Errorf("modes %d and %d: ratio of frequencies %.4f, want %.3f", i+1, j+1, got, ratios[i][k])
			}
			if got := m.At(i, j); !near(got, want, 0.0005) {
				t.Errorf("modes %d and %d: %.4f, want %.3f", i+1, j+1, got, want)
			}
		}
	}
}

// With one damping the formula becomes 8ζ²(1+r)r^(3/2)/((1-r²)² + 4ζ²r(1+r)²);
// r = 0.9 and ζ = 5 % give 0.473 by hand: 0.0324438/(0.0361 + 0.03249).
func TestOneDamping(t *testing.T) {
	if got := Coefficient(1, 0.05, 0.9, 0.05); !near(got, 0.4730, 0.00005) {
		t.Errorf("ratio 0.9, 5 %%: %v", got)
	}
	for _, zeta := range []float64{0.001, 0.02, 0.05, 0.2, 0.7} {
		for _, r := range []float64{1e-3, 0.1, 0.5, 0.9, 0.99, 0.9999, 1} {
			above := 8 * zeta * zeta * (1 + r) * math.Pow(r, 1.5)
			want := above / (math.Pow(1-r*r, 2) + 4*zeta*zeta*r*math.Pow(1+r, 2))
			if got := Coefficient(1, zeta, r, zeta); !near(got, want, 1e-10*want) {
				t.Errorf("ratio %v, damping %v: %v, want %v", r, zeta, got, want)
			}
		}
	}
}

// Modes of one frequency correlate by 2·√(ζi·ζj)/(ζi+ζj).
func TestOneFrequency(t *testing.T) {
	for _, z := range [][2]float64{{0.01, 0.05}, {0.05, 0.2}, {0.3, 0.31}, {1e-6, 0.9}} {
		want := 2 * math.Sqrt(z[0]*z[1]) / (z[0] + z[1])
		if got := Coefficient(0.7, z[0], 0.7, z[1]); !near(got, want, 1e-15) {
			t.Errorf("dampings %v: %v, want %v", z, got, want)
		}
	}
}

// whiteNoise integrates the product of two oscillators' transfer functions
//
//	H(ω) = 1/(ωk² - ω² + 2i·ζ·ωk·ω)
//
// over ω = exp(s) by the trapezoidal rule, which for analytic functions that
// die away on both sides converges like exp(-2π·d/step), d > ζ being the
// distance of the poles from the real line of s.
func whiteNoise(periodI, dampingI, periodJ, dampingJ float64) float64 {
	transfer := func(period, damping, w float64) complex128 {
		own := 2 * math.Pi / period
		return 1 / complex(own*own-w*w, 2*damping*own*w)
	}
	step := min(dampingI, dampingJ) / 6
	var both, i2, j2 float64
	for s := -38.0; s < 20; s += step {
		w := math.Exp(s)
		hi, hj := transfer(periodI, dampingI, w), transfer(periodJ, dampingJ, w)
		both += w * (real(hi)*real(hj) + imag(hi)*imag(hj))
		i2 += w * (real(hi)*real(hi) + imag(hi)*imag(hi))
		j2 += w * (real(hj)*real(hj) + imag(hj)*imag(hj))
	}
	return both / math.Sqrt(i2*j2)
}

// The coefficient is by its meaning the correlation of two responses to white
// noise. Unequal dampings tell which of them goes with which frequency.
func TestIsTheCorrelationUnderWhiteNoise(t *testing.T) {
	for _, c := range []struct{ ti, zi, tj, zj float64 }{
		{1, 0.05, 0.9, 0.05}, {1, 0.02, 0.8, 0.2}, {1, 0.2, 0.8, 0.02}, {0.8, 0.02, 1, 0.2},
		{2, 0.01, 1.98, 0.05}, {0.3, 0.5, 0.1, 0.03}, {5, 0.1, 0.05, 0.6}, {1, 0.04, 1, 0.07},
	} {
		got, want := Coefficient(c.ti, c.zi, c.tj, c.zj), whiteNoise(c.ti, c.zi, c.tj, c.zj)
		if !near(got, want, 1e-11*want) {
			t.Errorf("%+v: %v, by integration %v", c, got, want)
		}
	}
}

func TestCoefficientAtTheEdges(t *testing.T) {
	for _, c := range []struct{ ti, zi, tj, zj, want float64 }{
		{1, 0, 1, 0, 1},
		{1, 0, 0.999999, 0, 0},
		{1, 0, 1, 0.05, 0},
		{1, 0, 0.5, 0.05, 0},
		{1, 1e-300, 1, 1e-300, 1},
		{1, 1e-200, 1, 2e-200, 0}, // the products underflow
		{1e-300, 0.05, 1e300, 0.05, 0},
	} {
		if got := Coefficient(c.ti, c.zi, c.tj, c.zj); got != c.want {
			t.Errorf("%+v: %v", c, got)
		}
	}
	nan, inf := math.NaN(), math.Inf(1)
	for _, c := range [][4]float64{
		{0, 0.05, 1, 0.05}, {1, 0.05, -1, 0.05}, {1, -0.01, 1, 0.05}, {1, 0.05, 1, nan}, {nan, 0.05, 1, 0.05}, {inf, 0.05, inf, 0.05}, {1, inf, 1, inf},
	} {
		if got := Coefficient(c[0], c[1], c[2], c[3]); !math.IsNaN(got) {
			t.Errorf("%v: %v, want NaN", c, got)
		}
	}
}

func TestCoefficientIsSymmetricAndBounded(t *testing.T) {
	random := rand.New(rand.NewPCG(1, 81))
	for range 100_000 {
		ti, tj := math.Exp(4*random.NormFloat64()), math.Exp(4*random.NormFloat64())
		if random.IntN(2) == 0 {
			tj = ti * (1 + math.Exp(-36*random.Float64()))
		}
		zi, zj := random.Float64(), math.Exp(-12*random.Float64())
		if random.IntN(4) == 0 { // without the bound 18 % of such modes go beyond 1
			tj, zj = ti, math.Nextafter(zi, 1)
		}
		a, b := Coefficient(ti, zi, tj, zj), Coefficient(tj, zj, ti, zi)
		if a != b || !(a >= 0 && a <= 1) {
			t.Fatalf("periods %v, %v, dampings %v, %v: %v and %v", ti, tj, zi, zj, a, b)
		}
	}
}

// All digits are kept, also of modes that hardly differ and are hardly damped.
func TestCoefficientInMultiplePrecision(t *testing.T) {
	exact := func(x float64) *big.Float { return new(big.Float).SetPrec(400).SetFloat64(x) }
	times := func(xs ...*big.Float) *big.Float {
		out := exact(1)
		for _, x := range xs {
			out.Mul(out, x)
		}
		return out
	}
	plus := func(x, y *big.Float) *big.Float { return exact(0).Add(x, y) }
	random := rand.New(rand.NewPCG(4, 81))
	for range 20_000 {
		ti := math.Exp(2 * random.NormFloat64())
		tj := ti * (1 - math.Exp(-36*random.Float64()))
		zi, zj := math.Exp(-60*random.Float64()), math.Exp(-60*random.Float64())
		r := exact(0).Quo(exact(tj), exact(ti))
		xi, xj, r2 := exact(zi), exact(zj), times(r, r)
		apart := exact(0).Sub(exact(1), r2)
		above := times(exact(8), exact(0).Sqrt(times(xi, xj)), plus(times(r, xi), xj), r, exact(0).Sqrt(r))
		below := plus(times(apart, apart), times(exact(4), xi, xj, r, plus(exact(1), r2)))
		below.Add(below, times(exact(4), plus(times(xi, xi), times(xj, xj)), r2))
		want, _ := above.Quo(above, below).Float64()
		if got := Coefficient(ti, zi, tj, zj); !near(got, want, 0x1p-49*want) {
			t.Fatalf("periods %v, %v, dampings %v, %v: %v, want %v", ti, tj, zi, zj, got, want)
		}
	}
}

func TestMatrix(t *testing.T) {
	periods, dampings := []float64{1.2, 0.4, 1.1, 0.25}, []float64{0.05, 0.03, 0.02, 0}
	m := Correlation(periods, dampings)
	for i := range periods {
		for j := range periods {
			want := Coefficient(periods[i], dampings[i], periods[j], dampings[j])
			if got := m.At(i, j); got != want {
				t.Errorf("modes %d and %d: %v, want %v", i, j, got, want)
			}
		}
	}
	if m.Len() != 4 || (Matrix{}).Len() != 0 {
		t.Errorf("%d and %d modes", m.Len(), (Matrix{}).Len())
	}
}

func TestCombinationsByHand(t *testing.T) {
	two := Matrix{n: 2, doubled: []float64{2 * 0.473}}
	for _, c := range []struct {
		values    []float64
		rho       Matrix
		srss, cqc float64
	}{
		{nil, Matrix{}, 0, 0},
		{[]float64{-7}, Correlation([]float64{1}, []float64{0.05}), 7, 7},
		{[]float64{3, 4}, two, 5, math.Sqrt(36.352)},
		{[]float64{3, -4}, two, 5, math.Sqrt(13.648)},
		{[]float64{0, 0}, two, 0, 0},
	} {
		if got := SRSS(c.values); !near(got, c.srss, 1e-15) {
			t.Errorf("SRSS(%v) = %v, want %v", c.values, got, c.srss)
		}
		if got := CQC(c.values, c.rho); !near(got, c.cqc, 1e-14) {
			t.Errorf("CQC(%v) = %v, want %v", c.values, got, c.cqc)
		}
	}
}

// Far frequencies leave the squares alone, equal ones add the values, and
// opposite values of equal modes cancel without ever giving NaN.
func TestCombinationsInTheLimits(t *testing.T) {
	values, dampings := []float64{3, -1, 2, 0.5, -0.25}, []float64{0.05, 0.05, 0.05, 0.05, 0.05}
	far := Correlation([]float64{1e-8, 1e-4, 1, 1e4, 1e8}, dampings)
	if got, want := CQC(values, far), SRSS(values); !near(got, want, 1e-7) {
		t.Errorf("far frequencies: %v, SRSS %v", got, want)
	}
	undamped := Correlation([]float64{1, 1.1, 1.2, 1.3, 1.4}, make([]float64, 5))
	if got, want := CQC(values, undamped), SRSS(values); got != want {
		t.Errorf("undamped: %v, SRSS %v", got, want)
	}
	equal := Correlation([]float64{2, 2, 2, 2, 2}, dampings)
	if got := CQC(values, equal); !near(got, 4.25, 1e-14) {
		t.Errorf("equal frequencies: %v, sum 4.25", got)
	}
	random := rand.New(rand.NewPCG(2, 81))
	zeros := 0
	for range 10_000 {
		x, period := random.NormFloat64(), math.Exp(random.NormFloat64())
		m := Correlation([]float64{period, period * (1 + 1e-12*random.Float64()), period}, []float64{0.05, 0.05, 0.05})
		got := CQC([]float64{x, -2 * x, x * (1 + 1e-16*random.NormFloat64())}, m)
		if !(got >= 0 && got < 1e-6*math.Abs(x)) {
			t.Fatalf("opposite values of %v: %v", x, got)
		}
		if got == 0 {
			zeros++
		}
	}
	if zeros == 0 {
		t.Error("the bound at 0 was never needed")
	}
}

// The combination is a norm below the sum of the sizes, and its square the
// double sum.
func TestCombinationIsTheDoubleSum(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 81))
	for n := range 12 {
		periods, dampings, values := make([]float64, n), make([]float64, n), make([]float64, n)
		var sizes float64
		for i := range periods {
			periods[i], dampings[i], values[i] = math.Exp(random.NormFloat64()), random.Float64()/2, random.NormFloat64()
			sizes += math.Abs(values[i])
		}
		m := Correlation(periods, dampings)
		var sum float64
		for i := range values {
			for j := range values {
				sum += m.At(i, j) * values[i] * values[j]
			}
		}
		got := CQC(values, m)
		if !near(got*got, sum, 1e-13*sizes*sizes) || got > sizes*(1+1e-15) {
			t.Errorf("%d modes: %v, square %v, sizes %v", n, got, sum, sizes)
		}
	}
}

func TestNaNPropagates(t *testing.T) {
	m := Correlation([]float64{1, 2}, []float64{0.05, 0.05})
	values := []float64{1, math.NaN()}
	if a, b := SRSS(values), CQC(values, m); !math.IsNaN(a) || !math.IsNaN(b) {
		t.Errorf("%v and %v", a, b)
	}
}

func TestCombinationsAllocateNothing(t *testing.T) {
	m := Correlation([]float64{1, 2}, []float64{0.05, 0.05})
	values := []float64{1, 2}
	if n := testing.AllocsPerRun(100, func() { sink = CQC(values, m) + SRSS(values) }); n != 0 {
		t.Errorf("%v allocations", n)
	}
}

func TestWrongLengthsPanic(t *testing.T) {
	m := Correlation([]float64{1, 2}, []float64{0.05, 0.05})
	for name, f := range map[string]func(){
		"Correlation": func() { Correlation([]float64{1, 2}, []float64{0.05}) },
		"CQC":         func() { CQC([]float64{1}, m) },
		"At":          func() { m.At(0, 2) },
	} {
		t.Run(name, func(t *testing.T) {
			defer func() {
				if recover() == nil {
					t.Error("no panic")
				}
			}()
			f()
		})
	}
}

var sink float64

func BenchmarkCombine(b *testing.B) {
	for _, n := range []int{3, 5, 10} {
		periods, dampings, values := make([]float64, n), make([]float64, n), make([]float64, n)
		for i := range periods {
			periods[i], dampings[i], values[i] = 1/float64(i+1), 0.05, float64(i)-1.5
		}
		m := Correlation(periods, dampings)
		b.Run(fmt.Sprintf("CQC/%d", n), func(b *testing.B) {
			for b.Loop() {
				sink = CQC(values, m)
			}
		})
		b.Run(fmt.Sprintf("SRSS/%d", n), func(b *testing.B) {
			for b.Loop() {
				sink = SRSS(values)
			}
		})
	}
}
