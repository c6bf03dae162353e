package signal

import (
	"math/bits"
	"sync"

	"swaybook/pipeline/internal/elementary"
)

// Transform returns the Fourier coefficients 0 … n/2 of x followed by zeros up to a
// length of n, without a factor: Σ x[j]·exp(-2πi·j·k/n). n is even and at least the length
// of x, or Transform panics; it is best a FastLength.
//
// The bits are the same on every machine, which those of general libraries are not where
// an architecture fuses products and sums.
//
// Source: of two real series in one complex one, W. H. Press et al., Numerical Recipes,
// section 12.3 (from memory); otherwise that of plan.
func Transform(x []float64, n int) []complex128 {
	if n < 2 || n%2 == 1 || n < len(x) {
		panic("signal: transform of an odd length, or shorter than the samples")
	}
	p := planOf(n)
	defer p.giveBack()
	half := n / 2
	z := make([]complex128, half)
	for i := range z {
		z[i] = complex(at(x, 2*i), at(x, 2*i+1))
	}
	z = p.transform(z)
	out := make([]complex128, half+1)
	for k := range out {
		a, b := z[k%half], conjugate(z[(half-k)%half])
		even, odd := (a + b), times(a-b, p.unit(k)) // each twice, odd of i
		out[k] = complex((real(even)+imag(odd))/2, (imag(even)-real(odd))/2)
	}
	return out
}

// inverse returns the real series of n samples whose coefficients are those of Transform,
// times n. The first and the last coefficient are real.
func inverse(c []complex128) []float64 {
	half := len(c) - 1
	p := planOf(2 * half)
	defer p.giveBack()
	z := make([]complex128, half)
	for k := range z {
		a, b := c[k], conjugate(c[half-k])
		even, odd := a+b, times(a-b, conjugate(p.unit(k)))
		// The conjugate of even + i·odd, since the plan transforms forward.
		z[k] = complex(real(even)-imag(odd), -(imag(even) + real(odd)))
	}
	z = p.transform(z)
	out := make([]float64, 2*half)
	for i, v := range z {
		out[2*i], out[2*i+1] = real(v), -imag(v)
	}
	return out
}

func at(x []float64, i int) float64 {
	if i < len(x) {
		return x[i]
	}
	return 0
}

func conjugate(a complex128) complex128 { return complex(real(a), -imag(a)) }

// times is a·b with every product rounded.
func times(a, b complex128) complex128 {
	return complex(
		float64(real(a)*real(b))-float64(imag(a)*imag(b)),
		float64(real(a)*imag(b))+float64(imag(a)*real(b)))
}

// plan transforms series of half complex numbers, by factors 4, 2 and primes: each pass
// takes one factor and leaves its results where the next finds them in order, between two
// series in turn.
//
// Source: J. W. Cooley and J. W. Tukey, An Algorithm for the Machine Calculation of Complex
// Fourier Series, Mathematics of Computation 19, 1965; T. G. Stockham's order of passes, in
// C. Van Loan, Computational Frameworks for the Fast Fourier Transform, 1992 (from memory).
type plan struct {
	half    int
	factors []int
	units   []complex128 // exp(-2πi·k/(2·half)), k = 0 … half
	spare   []complex128
}

// plans keeps what was made: neighbours in an archive have one length.
var plans = sync.Pool{New: func() any { return new(plan) }}

func planOf(n int) *plan {
	p := plans.Get().(*plan)
	if p.half == n/2 {
		return p
	}
	*p = plan{half: n / 2, factors: factorsOf(n / 2), units: make([]complex128, n/2+1), spare: make([]complex128, n/2)}
	for k := range p.units {
		sin, cos := elementary.SincosPi(float64(2*k) / float64(n))
		p.units[k] = complex(cos, -sin)
	}
	return p
}

func (p *plan) giveBack() { plans.Put(p) }

// factorsOf are those of n: fours, a two, and primes from 3 on.
func factorsOf(n int) (factors []int) {
	for twos := bits.TrailingZeros(uint(n)); twos > 0; twos -= 2 {
		factors = append(factors, 1<<min(twos, 2))
	}
	n >>= bits.TrailingZeros(uint(n))
	for f := 3; n > 1; f += 2 {
		for ; n%f == 0; n /= f {
			factors = append(factors, f)
		}
	}
	return factors
}

// unit is exp(-2πi·k/n), n twice the length that the plan transforms, k from 0 to n.
func (p *plan) unit(k int) complex128 {
	if k > p.half {
		return -p.units[k-p.half]
	}
	return p.units[k]
}

// transform returns Σ x[j]·exp(-2πi·j·k/half), in x or in the plan's other series, which
// then becomes the caller's and x the plan's.
func (p *plan) transform(x []complex128) []complex128 {
	y, stride := p.spare, 1
	for _, f := range p.factors {
		groups := p.half / stride / f
		for g := range groups {
			switch f {
			case 2:
				p.two(x, y, g, groups, stride)
			case 4:
				p.four(x, y, g, groups, stride)
			default:
				p.any(x, y, g, groups, stride, f)
			}
		}
		x, y, stride = y, x, stride*f
	}
	p.spare = y
	return x
}

// two takes the sums and differences of the g-th series of the first half and of the second.
func (p *plan) two(x, y []complex128, g, groups, stride int) {
	w := p.unit(2 * g * stride)
	a, b := x[g*stride:][:stride], x[(g+groups)*stride:][:stride]
	sum, rest := y[2*g*stride:][:stride], y[(2*g+1)*stride:][:stride]
	for i := range a {
		sum[i], rest[i] = a[i]+b[i], times(a[i]-b[i], w)
	}
}

// four is two in one pass of both sums and both differences.
func (p *plan) four(x, y []complex128, g, groups, stride int) {
	w1, w2, w3 := p.unit(2*g*stride), p.unit(4*g*stride), p.unit(6*g*stride)
	a, b := x[g*stride:][:stride], x[(g+groups)*stride:][:stride]
	c, d := x[(g+2*groups)*stride:][:stride], x[(g+3*groups)*stride:][:stride]
	y0, y1 := y[4*g*stride:][:stride], y[(4*g+1)*stride:][:stride]
	y2, y3 := y[(4*g+2)*stride:][:stride], y[(4*g+3)*stride:][:stride]
	for i := range a {
		ac, bd, less, turned := a[i]+c[i], b[i]+d[i], a[i]-c[i], b[i]-d[i]
		turned = complex(imag(turned), -real(turned)) // by -i
		y0[i] = ac + bd
		y1[i] = times(less+turned, w1)
		y2[i] = times(ac-bd, w2)
		y3[i] = times(less-turned, w3)
	}
}

// any sums series of every f-th group, by their definition.
func (p *plan) any(x, y []complex128, g, groups, stride, f int) {
	for to := range f {
		out := y[(f*g+to)*stride:][:stride]
		copy(out, x[g*stride:][:stride])
		for from := 1; from < f; from++ {
			w := p.unit(2 * (from * to % f) * (p.half / f))
			for i, v := range x[(g+from*groups)*stride:][:stride] {
				out[i] += times(v, w)
			}
		}
		w := p.unit(2 * g * to * stride)
		for i, v := range out {
			out[i] = times(v, w)
		}
	}
}
