package spectrum

import (
	"math"

	"swaybook/pipeline/internal/kernel"
)

// strides are the numbers of steps that slow oscillators advance at once, each
// for phases over it of at most maxStridePhase. All divide blockSteps.
var strides = [...]int{64, 16}

// maxStridePhase is the greatest phase M·φ over M steps. The weights of a stride
// are smooth in time: Chebyshev series of kernel.Inputs = 11 terms for the
// responses. Their first term left out, of degree k, is 2·(Mφ/4)ᵏ/k! of the
// amplitude: below 5e-17 at this phase.
const maxStridePhase = 0.6

// stride is what one stride makes of a component.
type stride struct {
	inputs []kernel.Input
	lines  []kernel.Line // of each block, what the ground adds between strides
}

// strideBound returns the share ρ of the bound on |u| between samples M apart,
//
//	ρ·max|u| <= m + G,  ρ = 1 − ζ·Mφ − (Mφ)²/8,
//
// with m the greater |u| at the two samples and G the greatest departure of the
// ground's displacement (∬a) from its chord between them. u departs from its own
// chord by what the three terms of the equation of motion do when integrated
// twice: the ground by G at most, the spring, no more than φ²·max|u|, by its
// M²/8, and the damper, whose first integral is 2ζφ·u, by 2ζφ·max|u|·M/2.
func strideBound(phase, damping float64) float64 {
	return (1 - float64(damping*phase)) - float64(float64(phase*phase)*0.125)
}

// strideOf returns the place in strides of that for an oscillator, or -1 for
// none.
func strideOf(phase, damping float64) int {
	for i, m := range strides {
		over := float64(phase * float64(m))
		if over <= maxStridePhase && float64(maxGrowth*strideBound(over, damping)) >= 1 {
			return i
		}
	}
	return -1
}

// strideTerms is the number of Taylor terms that weights are formed from, about
// the middle of the stride: 0.3²⁴/24! is below 1e-36.
const strideTerms = 24

// setStride sets lane l to a stride of m steps. With x from −1 at the start of a
// stride to 1 at its end, the ground's share of the state at the end is
//
//	u: −∫ g(M − s)·a(s) ds,  v: −∫ g'(M − s)·a(s) ds,
//
// g the response to a unit initial velocity. Inputs are the integrals of a with
// the Chebyshev polynomials of x, weights the coefficients of g and g' in them.
func setStride(q *kernel.Stride, l int, phase, damping float64, m int) {
	whole := respond(phase*float64(m), damping)
	r := whole.recurrence()
	q.UU[l], q.UV[l] = r.uu, r.uv*float64(m)
	q.VU[l], q.VV[l] = r.vu/float64(m), r.vv
	// Time in halves of a stride, from its middle: p = g/h, derivative by
	// derivative from the equation of motion.
	h := float64(m) / 2
	middle := respond(phase*h, damping)
	linear, square := middle.linear.hi, middle.square.hi
	d, next := middle.impulse.hi, 1-middle.drop.hi
	var u, v [strideTerms]float64 // Taylor coefficients in x
	factor := 1.0                 // (−1)ⁿ/n!
	for n := range strideTerms {
		u[n], v[n] = float64(-h*float64(d*factor)), -float64(next*factor)
		d, next = next, -(float64(linear*next) + float64(square*d))
		factor /= -float64(n + 1)
	}
	for k := range q.Weights {
		q.Weights[k].U[l], q.Weights[k].V[l] = chebyshev(&u, k), chebyshev(&v, k)
	}
}

// chebyshev returns coefficient k of a power series in Chebyshev polynomials,
// by xⁿ = 2^(1−n)·Σ C(n, (n−k)/2)·T_k, the sum over k of n's parity and half of
// the term with T_0.
//
// Source: NIST DLMF §18.18(iii) in the normalisation of §18.3, from memory.
func chebyshev(c *[strideTerms]float64, k int) float64 {
	// Smallest terms first.
	sum := 0.0
	for n := k + (strideTerms-1-k)/2*2; n >= k; n -= 2 {
		binomial := 1.0
		for i := range (n - k) / 2 {
			binomial = float64(binomial*float64(n-i)) / float64(i+1)
		}
		sum += float64(c[n] * math.Ldexp(binomial, 1-n))
	}
	if k == 0 {
		sum /= 2
	}
	return sum
}

// strideShares are for each stride the inputs that a unit sample gives, the
// integrals of Chebyshev polynomials over the straight lines beside it.
var strideShares = func() (shares [len(strides)][]kernel.Input) {
	for i, m := range strides {
		shares[i] = sharesOf(m)
	}
	return shares
}()

func sharesOf(m int) []kernel.Input {
	nodes, weights := gaussLegendre()
	shares := make([]kernel.Input, m+1)
	for j := range m {
		for i, node := range nodes {
			t := float64((1 + node) * 0.5) // within the step
			x := float64(float64(2*(float64(j)+t))/float64(m)) - 1
			w := weights[i] / 2
			before, now := x, 1.0 // T₋₁ = T₁ and T₀
			for k := range kernel.Inputs {
				shares[j][k] += float64(float64(w*now) * (1 - t))
				shares[j+1][k] += float64(float64(w*now) * t)
				before, now = now, float64(2*float64(x*now))-before
			}
		}
	}
	return shares
}

// gaussLegendre returns the nodes and weights of the rule of seven nodes on −1
// to 1, exact for the degree 13; an input's integrand has 11. Newton's method
// starts from the nodes to four digits.
//
// Source: NIST DLMF §3.5(v), weights 2/((1 − x²)·P₇'(x)²).
func gaussLegendre() (nodes, weights [7]float64) {
	for i, x := range [7]float64{-0.9491, -0.7415, -0.4058, 0, 0.4058, 0.7415, 0.9491} {
		slope := 0.0
		for range 8 {
			before, now := 1.0, x
			for n := 1.0; n < 7; n++ {
				before, now = now, (float64(float64((2*n+1)*x)*now)-float64(n*before))/(n+1)
			}
			slope = float64(7*(float64(x*now)-before)) / (float64(x*x) - 1)
			x -= now / slope
		}
		nodes[i] = x
		weights[i] = 2 / float64((1-float64(x*x))*float64(slope*slope))
	}
	return nodes, weights
}

// loadStrides prepares a component for the strides in use. The last block is
// marched step by step, whatever its length.
func (m *motion) loadStrides(used [len(strides)]bool) {
	for i, over := range strides {
		if used[i] {
			s := &m.strides[i]
			count := (m.blocks() - 1) * blockSteps / over
			s.inputs, s.lines = resize(s.inputs, count), resize(s.lines, m.blocks())
			kernel.Mix(s.inputs, strideShares[i], m.a[:count*over+1])
		}
	}
	for b := range m.blocks() {
		from, to := m.block(b)
		path := groundOf(m.a[from : to+1])
		for i, over := range strides {
			if !used[i] {
				continue
			}
			top := 0.0
			for k := 0; b+1 < m.blocks() && k < blockSteps; k += over {
				top = max(top, departure(path[k:k+over+1]))
			}
			m.strides[i].lines[b] = kernel.Line{First: top + float64(m.blockLines[b].First*0.125)}
		}
	}
}

// groundOf returns the displacement of the ground at the samples a of a block, from
// rest at the first.
func groundOf(a []float64) (path [blockSteps + 1]float64) {
	v, d := 0.0, 0.0
	for j, next := range a[1:] {
		d += v + (float64(a[j]*(1./3)) + float64(next*(1./6)))
		v += float64((a[j] + next) * 0.5)
		path[j+1] = d
	}
	return path
}

// departure returns the greatest distance of a path from its chord at samples.
// Within a step it exceeds that at the ends by max|a|/8 at most.
func departure(path []float64) float64 {
	first, n := path[0], len(path)-1
	slope, top := (path[n]-first)/float64(n), uint64(0)
	chord := first
	for _, d := range path[1:n] {
		chord += slope
		top = max(top, magnitude(d-chord))
	}
	return math.Float64frombits(top)
}
