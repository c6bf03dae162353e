package spectrum

import (
	"math"
	"math/big"
)

// The oracle solves the same problem as Solver by other means: closed forms in
// exponential, sine and cosine, in multiple precision, from sample to sample, and
// every step searched.

// oracleBits leaves some 300 good bits after the cancellations of the closed
// forms at the smallest phase tested, 1e-9: two terms lose phase⁻³, 90 bits.
const oracleBits = 448

func bigf(x float64) *big.Float { return new(big.Float).SetPrec(oracleBits).SetFloat64(x) }

func badd(x, y *big.Float) *big.Float { return new(big.Float).SetPrec(oracleBits).Add(x, y) }
func bsub(x, y *big.Float) *big.Float { return new(big.Float).SetPrec(oracleBits).Sub(x, y) }
func bmul(x, y *big.Float) *big.Float { return new(big.Float).SetPrec(oracleBits).Mul(x, y) }
func bquo(x, y *big.Float) *big.Float { return new(big.Float).SetPrec(oracleBits).Quo(x, y) }

func btwice(x *big.Float) *big.Float { return badd(x, x) }

// bigFunctions returns e^-d, cos(w) and sin(w): Taylor series of d/2^k and w/2^k,
// then squaring and doubling of the angle.
func bigFunctions(d, w *big.Float) (exp, cos, sin *big.Float) {
	halvings := 8 + max(d.MantExp(nil), w.MantExp(nil), 0)
	scale := new(big.Float).SetMantExp(bigf(1), -halvings)
	d, w = bmul(d, scale), bmul(w, scale)
	exp, cos, sin = bigf(0), bigf(0), bigf(0)
	td, tw := bigf(1), bigf(1)
	for n := range 60 {
		exp = badd(exp, td)
		switch n % 4 {
		case 0:
			cos = badd(cos, tw)
		case 1:
			sin = badd(sin, tw)
		case 2:
			cos = bsub(cos, tw)
		case 3:
			sin = bsub(sin, tw)
		}
		next := bigf(float64(n + 1))
		td = bquo(bmul(td, new(big.Float).Neg(d)), next)
		tw = bquo(bmul(tw, w), next)
	}
	for range halvings {
		exp = bmul(exp, exp)
		sin, cos = btwice(bmul(sin, cos)), bsub(bmul(cos, cos), bmul(sin, sin))
	}
	return exp, cos, sin
}

// oracleStep holds the exact 2×2 matrix a and the loadings p (sample at the
// start) and q (sample at the end) of one step.
type oracleStep struct{ a11, a12, a21, a22, pu, pv, qu, qv *big.Float }

// newOracleStep is the exact step of Nigam and Jennings (1969), written with unit
// responses: g = e^-γ·sin(w)/w, ∫g = (1 − g' − 2γg)/φ², ∬g = (1 − g − 2γ∫g)/φ².
func newOracleStep(phase, damping *big.Float) oracleStep {
	one := bigf(1)
	gamma, square := bmul(phase, damping), bmul(phase, phase)
	w := bmul(phase, new(big.Float).SetPrec(oracleBits).Sqrt(bsub(one, bmul(damping, damping))))
	exp, cos, sin := bigFunctions(gamma, w)
	g := bquo(bmul(exp, sin), w)
	slope := bsub(bmul(exp, cos), bmul(gamma, g))
	step := bquo(bsub(bsub(one, slope), btwice(bmul(gamma, g))), square)
	ramp := bquo(bsub(bsub(one, g), btwice(bmul(gamma, step))), square)
	return oracleStep{
		a11: badd(slope, btwice(bmul(gamma, g))), a12: g,
		a21: new(big.Float).Neg(bmul(square, g)), a22: slope,
		pu: bsub(ramp, step), pv: bsub(step, g),
		qu: new(big.Float).Neg(ramp), qv: new(big.Float).Neg(step),
	}
}

// floatStep is the same rounded to float64, and short enough to be marched.
type floatStep struct{ a11, a12, a21, a22, pu, pv, qu, qv float64 }

func (s *oracleStep) rounded() floatStep {
	f := func(x *big.Float) float64 { v, _ := x.Float64(); return v }
	return floatStep{f(s.a11), f(s.a12), f(s.a21), f(s.a22), f(s.pu), f(s.pv), f(s.qu), f(s.qv)}
}

func (s *floatStep) next(u, v, a, b float64) (float64, float64) {
	return s.a11*u + s.a12*v + s.pu*a + s.qu*b, s.a21*u + s.a22*v + s.pv*a + s.qv*b
}

func (s *oracleStep) next(u, v *big.Float, a, b float64) (*big.Float, *big.Float) {
	x, y := bigf(a), bigf(b)
	sum := func(p, q, r, t *big.Float) *big.Float {
		return badd(badd(bmul(p, u), bmul(q, v)), badd(bmul(r, x), bmul(t, y)))
	}
	return sum(s.a11, s.a12, s.pu, s.qu), sum(s.a21, s.a22, s.pv, s.qv)
}

// fineMarch goes through pieces of a step in float64, with the maxima of cubics:
// within (length of a piece)⁴/384 of the fourth derivative of u.
type fineMarch struct {
	step  floatStep
	piece float64 // length in steps
	u, v  float64 // velocity per piece
	best  float64
}

func (f *fineMarch) march(pieces int, a, slope float64) {
	square := f.piece * f.piece
	for j := range pieces {
		from := (a + slope*float64(j)*f.piece) * square
		to := (a + slope*float64(j+1)*f.piece) * square
		u, v := f.step.next(f.u, f.v, from, to)
		f.best = max(f.best, math.Abs(u), hermitePeak(f.u, f.v, u, v))
		f.u, f.v = u, v
	}
}

// hermitePeak returns |u| where the cubic with the given values and slopes at 0
// and 1 turns between them, and 0 where it does not.
func hermitePeak(u, v, u1, v1 float64) float64 {
	if v*v1 >= 0 {
		return 0
	}
	d := u1 - u
	c2, c3 := 3*d-2*v-v1, v+v1-2*d
	root := math.Sqrt(max(c2*c2-3*c3*v, 0))
	q := -(c2 + math.Copysign(root, c2))
	peak := 0.0
	for _, t := range []float64{q / (3 * c3), v / q} {
		if t > 0 && t < 1 {
			peak = max(peak, math.Abs(u+t*(v+t*(c2+t*c3))))
		}
	}
	return peak
}

// exactSD is what oracleSD approaches, in multiple precision throughout: closed
// forms at every time asked for, and halving for the zeros of the velocity, which
// must change sign between points a twentieth of a phase apart. It takes seconds.
func exactSD(phase, damping float64, a []float64) float64 {
	bp, bd := bigf(phase), bigf(damping)
	coarse := newOracleStep(bp, bd)
	u, v, best := bigf(0), bigf(0), 0.0
	points := int(math.Ceil(20*phase)) + 4
	for k := 0; k+1 < len(a); k++ {
		best = max(best, exactPeak(bp, bd, u, v, bigf(a[k]), bsub(bigf(a[k+1]), bigf(a[k])), 1, points))
		u, v = coarse.next(u, v, a[k], a[k+1])
	}
	ringing := 1.5 * 2 * math.Pi / (phase * math.Sqrt(1-damping*damping))
	return max(best, exactPeak(bp, bd, u, v, bigf(0), bigf(0), ringing, int(20*ringing*phase)))
}

// exactPeak returns the greatest |u| of a time from state u, v under a + slope·t.
func exactPeak(phase, damping, u, v, a, slope *big.Float, long float64, points int) float64 {
	at := func(t float64) (x, y float64) { return exactState(phase, damping, u, v, a, slope, t) }
	x, before := at(0)
	best := math.Abs(x)
	for i := 1; i <= points; i++ {
		from, to := long*float64(i-1)/float64(points), long*float64(i)/float64(points)
		x, after := at(to)
		best = max(best, math.Abs(x))
		if before*after < 0 {
			for range 26 {
				middle := (from + to) / 2
				if _, y := at(middle); y*before > 0 {
					from = middle
				} else {
					to = middle
				}
			}
			x, _ = at(to)
			best = max(best, math.Abs(x))
		}
		before = after
	}
	return best
}

// exactState returns displacement and a velocity, in some unit, at time t.
func exactState(phase, damping, u, v, a, slope *big.Float, t float64) (x, y float64) {
	if t == 0 {
		x, _ = u.Float64()
		y, _ = v.Float64()
		return x, y
	}
	// In units of t: velocity and acceleration grow with it.
	bt := bigf(t)
	s := newOracleStep(bmul(phase, bt), damping)
	square := bmul(bt, bt)
	from := bmul(a, square)
	to := badd(from, bmul(slope, bmul(square, bt)))
	vt := bmul(v, bt)
	x, _ = badd(badd(bmul(s.a11, u), bmul(s.a12, vt)), badd(bmul(s.pu, from), bmul(s.qu, to))).Float64()
	y, _ = badd(badd(bmul(s.a21, u), bmul(s.a22, vt)), badd(bmul(s.pv, from), bmul(s.qv, to))).Float64()
	return x, y
}
