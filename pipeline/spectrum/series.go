package spectrum

import "math"

// maxTerms bounds the Taylor series of a step; seriesPhase is the greatest
// phase ω·dt that it is used for, above which a step is cut up.
const (
	maxTerms    = 24
	seriesPhase = 1.3
)

// inverseFactorial[k] is 1/k!, rounded.
var inverseFactorial = func() (f [maxTerms]float64) {
	product := 1.0 // exact up to 22!, and 23! rounds once
	for k := range f {
		if k > 1 {
			product *= float64(k)
		}
		f[k] = 1 / product
	}
	return f
}()

// series follows one oscillator through a step of linear ground acceleration
// on the Taylor series of u, in units of the step. Unlike the closed form, whose
// terms −a/ω² and its kin cancel where the step is short against the period, it
// loses nothing, and it needs no transcendental function, whose last bits would
// depend on the architecture.
type series struct {
	linear, square float64 // 2ζ·phase, phase²
	terms          int
}

// newSeries prepares steps of the given phase, 0 < phase <= seriesPhase.
func newSeries(phase, damping float64) series {
	s := series{linear: float64(2 * damping * phase), square: float64(phase * phase)}
	// The k-th derivative grows as k·phaseᵏ⁻³ against the third at most (the double
	// root at ζ = 1), which the slope of the ground alone can make as great as
	// the greatest u of a motion that is short against the period. Its series term
	// must fall below a half unit in the last place.
	size := 1 / float64(float64(phase*phase)*phase)
	for s.terms = 1; s.terms < maxTerms; s.terms++ {
		k := float64(s.terms)
		size *= phase / k
		if s.terms >= 5 && size*k*k < 0x1p-56 {
			break
		}
	}
	return s
}

// polynomial is u within a step, as a power series in time from 0 to 1.
type polynomial struct {
	c     [maxTerms]float64
	terms int
}

// expand sets p to the motion from displacement u and velocity v under ground
// acceleration a + slope·t.
func (s *series) expand(p *polynomial, u, v, a, slope float64) {
	linear, square := -s.linear, -s.square
	d2 := math.FMA(linear, v, math.FMA(square, u, -a))
	d3 := math.FMA(linear, d2, math.FMA(square, v, -slope))
	p.terms = s.terms
	p.c[0], p.c[1], p.c[2], p.c[3] = u, v, float64(d2*0.5), float64(d3*inverseFactorial[3])
	for k := 4; k < s.terms; k++ {
		d2, d3 = d3, math.FMA(linear, d3, float64(square*d2))
		p.c[k] = float64(d3 * inverseFactorial[k])
	}
}

// at returns displacement, velocity and relative acceleration at time t, by
// Horner's rule for a polynomial and its first two derivatives.
func (p *polynomial) at(t float64) (u, v, w float64) {
	for k := p.terms - 1; k >= 0; k-- {
		w = math.FMA(w, t, v)
		v = math.FMA(v, t, u)
		u = math.FMA(u, t, p.c[k])
	}
	return u, v, 2 * w
}

// peak returns the greater of best and the greatest |u| within the step, its
// ends included, and the state at its end.
//
// The relative acceleration of a step is a freely decaying vibration, because
// the second derivative of the ground acceleration is zero. Its zeros are half
// a damped period apart, at least π of phase, so that a step of no more than
// seriesPhase has at most one; between them the velocity is monotone.
func (s *series) peak(best, u, v, a, slope float64) (greatest, uEnd, vEnd float64) {
	var p polynomial
	s.expand(&p, u, v, a, slope)
	uEnd, vEnd, wEnd := p.at(1)
	ends := max(math.Abs(u), math.Abs(uEnd))
	best = max(best, ends)
	wStart := float64(2 * p.c[2])
	turns, bends := opposite(v, vEnd), opposite(wStart, wEnd)
	switch {
	case turns && (bends || ends+excess(v, vEnd) > best):
		best = p.turn(best, 0, v, 1, vEnd)
	case !turns && bends && math.Abs(wStart) > math.Abs(v):
		best = p.turnTwice(best, v, wStart, vEnd, wEnd)
	}
	return best, uEnd, vEnd
}

func opposite(x, y float64) bool { return x < 0 && y > 0 || x > 0 && y < 0 }

// excess bounds how far |u| between the ends of a step can exceed |u| at both,
// for a monotone velocity that goes through zero at some t: at most |v|·t beyond
// the start and |vEnd|·(1 − t) beyond the end, the lesser of which is greatest
// where they are equal.
func excess(v, vEnd float64) float64 {
	v, vEnd = math.Abs(v), math.Abs(vEnd)
	return float64(v * (vEnd / (v + vEnd)))
}

// turn returns the greater of best and |u| where the velocity changes sign
// between two times, if it does.
func (p *polynomial) turn(best, from, vFrom, to, vTo float64) float64 {
	if !opposite(vFrom, vTo) {
		return best
	}
	guess := from + float64((to-from)*(vFrom/(vFrom-vTo)))
	_, u := p.rest(guess, from, to, vTo)
	return max(best, math.Abs(u))
}

// turnTwice does it for a step with velocities of one sign at its ends and
// accelerations of opposite sign, in which the velocity can go through zero and
// back. It cannot where the acceleration, which only falls off until it changes
// sign (a quarter period of phase and more lies between its peak and its zero),
// is too small at the start to bring it to zero within the step.
func (p *polynomial) turnTwice(best, v, w, vEnd, wEnd float64) float64 {
	var velocity polynomial
	velocity.terms = p.terms - 1
	for k := range velocity.terms {
		velocity.c[k] = float64(k+1) * p.c[k+1]
	}
	t, vMid := velocity.rest(w/(w-wEnd), 0, 1, wEnd)
	return p.turn(p.turn(best, 0, v, t, vMid), t, vMid, 1, vEnd)
}

// turnTolerance is the last correction δ, in parts of a step, with which a
// turning point is taken as found. Newton's corrections square at each pass; and
// u there, taken from the parabola at the point before, is wrong by a sixth of
// δ³ times the third derivative only, which is no more than phase³ of u's
// amplitude: 1e-14 of it.
const turnTolerance = 3e-5

// rest returns a time between lo and hi at which the velocity is zero, given
// that it has the opposite sign at lo of vHi at hi, and u there: Newton's method
// from a guess, kept within the bracket by halving it.
func (p *polynomial) rest(guess, lo, hi, vHi float64) (t, u float64) {
	const newton, limit = 12, 60
	t = guess
	for i := range limit {
		var v, w float64
		u, v, w = p.at(t)
		if v == 0 {
			break
		}
		if opposite(v, vHi) {
			lo = t
		} else {
			hi = t
		}
		move := -v / w
		next := t + move
		if i >= newton || !(next >= lo && next <= hi) {
			next = lo + float64((hi-lo)*0.5)
			move = next - t
		}
		t, u = next, u+float64(move*(v+float64(float64(w*move)*0.5)))
		if math.Abs(move) <= turnTolerance {
			break
		}
	}
	return t, u
}

// ringing is the free vibration after the last sample, time in units of 1/ω.
type ringing struct{ step series }

func newRinging(damping float64) ringing { return ringing{newSeries(1, damping)} }

// peak returns the greater of best and the greatest |u| of the free vibration
// from displacement u and velocity v/ω.
//
// Damping only takes energy away, so that |u| <= √(u² + v²/ω²) ever after, which
// settles most of them unseen. Else the first turning point is the greatest.
func (r *ringing) peak(best, u, v float64) float64 {
	best = max(best, math.Abs(u))
	for v != 0 && reach(u, v) > best {
		before := v
		best, u, v = r.step.peak(best, u, v, 0, 0)
		if opposite(before, v) {
			break
		}
	}
	return best
}

// reach returns √(u² + v²), the amplitude of an undamped vibration in time units
// of 1/ω.
func reach(u, v float64) float64 {
	return math.Sqrt(float64(u*u) + float64(v*v))
}
