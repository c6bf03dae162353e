package elementary

import (
	"encoding/binary"
	"hash/fnv"
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

// ulps is how far a value is from a reference in units of the reference's last place.
func ulps(got float64, want *big.Float) float64 {
	nearest, _ := want.Float64()
	unit := math.Nextafter(math.Abs(nearest), math.Inf(1)) - math.Abs(nearest)
	off, _ := new(big.Float).Sub(new(big.Float).SetPrec(200).SetFloat64(got), want).Float64()
	return math.Abs(off) / unit
}

const precision = 200

func number(x float64) *big.Float { return new(big.Float).SetPrec(precision).SetFloat64(x) }

// pi is π to 66 digits (from memory, as in every table of constants); TestPi checks it.
func pi() *big.Float {
	p, _, err := big.ParseFloat("3.14159265358979323846264338327950288419716939937510582097494459231", 10, precision, big.ToNearestEven)
	if err != nil {
		panic(err)
	}
	return p
}

// TestPi holds π against Machin's formula, π/4 = 4·arctan(1/5) − arctan(1/239).
func TestPi(t *testing.T) {
	arctan := func(n int64) *big.Float {
		sum, power := number(0), new(big.Float).Quo(number(1), number(float64(n)))
		for k := int64(0); k < 100; k++ {
			term := new(big.Float).Quo(power, number(float64(2*k+1)))
			if k%2 == 1 {
				term.Neg(term)
			}
			sum.Add(sum, term)
			power.Quo(power, number(float64(n*n)))
		}
		return sum
	}
	want := new(big.Float).Sub(new(big.Float).Mul(number(16), arctan(5)), new(big.Float).Mul(number(4), arctan(239)))
	if off, _ := new(big.Float).Sub(want, pi()).Float64(); math.Abs(off) > 1e-58 {
		t.Errorf("π is off by %g", off)
	}
}

// sincosPi sums Taylor's series of π·x as it is, in 200 bits.
func sincosPi(x float64) (sin, cos *big.Float) {
	t := new(big.Float).Mul(pi(), number(x))
	sum := [4]*big.Float{number(0), number(0), number(0), number(0)}
	term := number(1)
	for k := 0; k < 120; k++ {
		sum[k%4].Add(sum[k%4], term)
		term = new(big.Float).Quo(new(big.Float).Mul(term, t), number(float64(k+1)))
	}
	return new(big.Float).Sub(sum[1], sum[3]), new(big.Float).Sub(sum[0], sum[2])
}

func TestSincosPi(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	worst, worstTan := 0.0, 0.0
	for i := range 4000 {
		x := 4*rng.Float64() - 2
		if i%4 == 0 {
			x = math.Ldexp(x, -rng.IntN(60)) + float64(rng.IntN(3)-1)/2
		}
		sin, cos := SincosPi(x)
		wantSin, wantCos := sincosPi(x)
		if sin == 0 || cos == 0 {
			continue // TestExactSincosPi
		}
		worst = max(worst, ulps(sin, wantSin), ulps(cos, wantCos))
		worstTan = max(worstTan, ulps(TanPi(x), new(big.Float).Quo(wantSin, wantCos)))
	}
	if t.Logf("sine and cosine within %.2f units, tangent within %.2f", worst, worstTan); !(worst <= 3 && worstTan <= 6) {
		t.Errorf("off by %g and %g units of the last place", worst, worstTan)
	}
}

func TestExactSincosPi(t *testing.T) {
	for i, want := range [][2]float64{{0, 1}, {1, 0}, {0, -1}, {-1, 0}, {0, 1}, {1, 0}} {
		if sin, cos := SincosPi(float64(i) / 2); sin != want[0] || cos != want[1] {
			t.Errorf("at %d/2: %g, %g", i, sin, cos)
		}
		if sin, cos := SincosPi(-float64(i) / 2); sin != -want[0] || cos != want[1] {
			t.Errorf("at -%d/2: %g, %g", i, sin, cos)
		}
	}
}

// exp sums Taylor's series in 200 bits of x/2¹⁰, and squares ten times.
func exp(x float64) *big.Float {
	t, sum, term := number(math.Ldexp(x, -10)), number(0), number(1)
	for k := 1; k < 60; k++ {
		sum.Add(sum, term)
		term = new(big.Float).Quo(new(big.Float).Mul(term, t), number(float64(k)))
	}
	for range 10 {
		sum = new(big.Float).Mul(sum, sum)
	}
	return sum
}

func TestExp(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 4))
	worst := 0.0
	for range 4000 {
		x := 1400*rng.Float64() - 700
		if rng.IntN(2) == 0 {
			x = math.Ldexp(x, -rng.IntN(40))
		}
		worst = max(worst, ulps(Exp(x), exp(x)))
	}
	if t.Logf("within %.2f units", worst); !(worst <= 3) {
		t.Errorf("off by %g units of the last place", worst)
	}
	for x, want := range map[float64]float64{0: 1, math.Inf(-1): 0, -1e9: 0, 1e9: math.Inf(1), math.Inf(1): math.Inf(1)} {
		if got := Exp(x); got != want {
			t.Errorf("of %g: %g, want %g", x, got, want)
		}
	}
	if got := Exp(math.NaN()); !math.IsNaN(got) {
		t.Errorf("of no number: %g", got)
	}
}

// TestLog corrects the logarithm by a step of Newton's in 200 bits: ln x = y + (x/eʸ − 1),
// beyond which the rest is the square of the correction.
func TestLog(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	worst := 0.0
	for i := range 4000 {
		x := math.Ldexp(1+rng.Float64(), rng.IntN(1000)-500)
		if i%2 == 0 {
			x = 1 + math.Ldexp(rng.Float64()-0.5, -rng.IntN(50))
		}
		y := Log(x)
		rest := new(big.Float).Sub(new(big.Float).Quo(number(x), exp(y)), number(1))
		if x != 1 {
			worst = max(worst, ulps(y, rest.Add(rest, number(y))))
		}
	}
	if t.Logf("within %.2f units", worst); !(worst <= 3) {
		t.Errorf("off by %g units of the last place", worst)
	}
	for x, want := range map[float64]float64{1: 0, 0: math.Inf(-1), math.Inf(1): math.Inf(1)} {
		if got := Log(x); got != want {
			t.Errorf("of %g: %g, want %g", x, got, want)
		}
	}
	if !math.IsNaN(Log(-1)) || !math.IsNaN(Log(math.NaN())) {
		t.Error("a logarithm below 0, or of no number")
	}
}

func TestHypot(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 8))
	worst := 0.0
	for range 4000 {
		scale := rng.IntN(1000) - 500
		x, y := math.Ldexp(rng.NormFloat64(), scale), math.Ldexp(rng.NormFloat64(), scale-rng.IntN(20))
		square := new(big.Float).Add(new(big.Float).Mul(number(x), number(x)), new(big.Float).Mul(number(y), number(y)))
		worst = max(worst, ulps(Hypot(x, y), square.Sqrt(square)))
	}
	if t.Logf("within %.2f units", worst); !(worst <= 2) {
		t.Errorf("off by %g units of the last place", worst)
	}
	for _, c := range [][3]float64{{3, -4, 5}, {0, 0, 0}, {-7, 0, 7}, {math.Inf(-1), 1, math.Inf(1)}, {1e308, 1e308, math.Sqrt2 * 1e308}} {
		if got := Hypot(c[0], c[1]); got != c[2] && math.Abs(got/c[2]-1) > 1e-15 {
			t.Errorf("of %g and %g: %g", c[0], c[1], got)
		}
	}
}

// TestSameBits holds a checksum of results, made on amd64 without fused instructions, against
// what this machine makes of the same arguments.
func TestSameBits(t *testing.T) {
	sum := fnv.New64a()
	put := func(values ...float64) {
		for _, v := range values {
			sum.Write(binary.LittleEndian.AppendUint64(nil, math.Float64bits(v)))
		}
	}
	for i := range 5000 {
		x := float64(i-2500) / 997
		sin, cos := SincosPi(x)
		put(sin, cos, TanPi(x), Exp(9*x), Log(float64(i+1)/7), Hypot(x, 1.25))
	}
	const want = 0x687de71b523f19ed
	if got := sum.Sum64(); got != want {
		t.Errorf("checksum %#x, want %#x", got, uint64(want))
	}
}
