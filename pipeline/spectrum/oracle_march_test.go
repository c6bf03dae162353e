package spectrum

import (
	"math"
	"math/big"
)

// oracleSD returns D for samples a, time in steps: D in units of acceleration
// times step squared. It is within 1e-12 of exactSD for phases from 1e-3 to 130
// and damping up to 0.99 (TestOracle), and takes some tenths of a millisecond.
//
// The state goes from sample to sample by the closed forms, rounded to double
// doubles. Each step is cut into pieces of a phase of 1 at most. In each piece
// that the envelope of the vibration does not rule out the velocity's zeros are
// found on the power series of the equation of motion.
func oracleSD(phase, damping float64, a []float64) float64 {
	top := peakOf(a)
	if top == 0 {
		return 0
	}
	_, exponent := math.Frexp(top)
	o := newOracle(phase, damping)
	var u, v double
	scaled := func(k int) float64 { return timesPower(a[k], -exponent) }
	for k := 0; k+1 < len(a); k++ {
		from, to := scaled(k), scaled(k+1)
		o.search(u.hi, v.hi, from, to-from)
		u, v = o.step.next(u, v, from, to)
	}
	// After the last sample, pieces of a phase of 1; a period and a half of the
	// damped vibration holds its greatest peak.
	ringing := math.Ceil(3 * math.Pi / math.Sqrt(1-damping*damping))
	ring := oracle{square: 1, linear: 2 * damping, best: o.best}
	x, y := u.hi, v.hi/phase
	for range int(ringing) {
		x, y = ring.piece(x, y, 0, 0)
	}
	return math.Ldexp(ring.best, exponent)
}

func peakOf(a []float64) (top float64) {
	for _, x := range a {
		top = max(top, math.Abs(x))
	}
	return top
}

// timesPower returns x·2ⁿ for any n, short of overflow and underflow.
func timesPower(x float64, n int) float64 {
	return math.Ldexp(math.Ldexp(x, n/2), n-n/2)
}

// doubleStep is an oracleStep rounded to double doubles.
type doubleStep struct{ a11, a12, a21, a22, pu, pv, qu, qv double }

func (s *oracleStep) doubled() doubleStep {
	f := func(x *big.Float) double {
		hi, _ := x.Float64()
		lo, _ := bsub(x, bigf(hi)).Float64()
		return double{hi, lo}
	}
	return doubleStep{f(s.a11), f(s.a12), f(s.a21), f(s.a22), f(s.pu), f(s.pv), f(s.qu), f(s.qv)}
}

func (s *doubleStep) next(u, v double, a, b float64) (double, double) {
	return s.a11.mul(u).add(s.a12.mul(v)).add(s.pu.times(a)).add(s.qu.times(b)),
		s.a21.mul(u).add(s.a22.mul(v)).add(s.pv.times(a)).add(s.qv.times(b))
}

// oracle searches steps. Time is in pieces.
type oracle struct {
	phase, damping float64 // of a step
	step           doubleStep
	pieces         int
	linear, square float64   // 2ζφ and φ² of a piece
	cos, sin       []float64 // of the vibration at the start of each piece, decay included
	decay          []float64
	best           float64
}

func newOracle(phase, damping float64) *oracle {
	exact := newOracleStep(bigf(phase), bigf(damping))
	o := &oracle{phase: phase, damping: damping, step: exact.doubled(), pieces: int(math.Ceil(phase))}
	part := phase / float64(o.pieces)
	o.linear, o.square = 2*damping*part, part*part
	for j := range o.pieces {
		t := part * float64(j) // in 1/ω
		decay := math.Exp(-damping * t)
		sin, cos := math.Sincos(t * math.Sqrt(1-damping*damping))
		o.decay = append(o.decay, decay)
		o.cos, o.sin = append(o.cos, decay*cos), append(o.sin, decay*sin)
	}
	return o
}

// search raises best to the greatest |u| in a step of several pieces or one.
//
// The line p(t) = −(a + slope·t)/φ² + 2ζ·slope/φ³ solves the equation of motion,
// and u − p = e^(−ζφt)(y·cos wφt + (z + ζy)/w·sin wφt) with z its velocity over φ
// and w² = 1 − ζ². It decays from piece to piece no slower than by e^(−ζφt), from
// |y| + |z + ζy|/w at most.
func (o *oracle) search(u, v, a, slope float64) {
	n := float64(o.pieces)
	if o.pieces == 1 {
		o.piece(u, v, a, slope)
		return
	}
	phase, ζ := o.phase, o.damping
	w := math.Sqrt(1 - ζ*ζ)
	line := func(t float64) float64 { return (2*ζ*slope/phase - (a + slope*t)) / (phase * phase) }
	rate := -slope / (phase * phase)
	y, z := u-line(0), (v-rate)/phase
	c := (z + ζ*y) / w
	size := math.Abs(y) + math.Abs(c)
	// From both ends inwards, where the greatest peaks are.
	for i := range o.pieces {
		j := i / 2
		if i%2 == 1 {
			j = o.pieces - 1 - i/2
		}
		t := float64(j) / n
		p, next := line(t), line(t+1/n)
		if max(math.Abs(p), math.Abs(next))+size*o.decay[j] <= o.best*(1+1e-13) {
			continue
		}
		vibration := y*o.cos[j] + c*o.sin[j]
		velocity := z*o.cos[j] - (y+ζ*z)/w*o.sin[j]
		o.piece(p+vibration, (rate+phase*velocity)/n, (a+slope*t)/(n*n), slope/(n*n*n))
	}
}

// piece raises best to the greatest |u| in a piece, from displacement u and
// velocity v under ground acceleration a + slope·t, and returns the state at its
// end. The relative acceleration is a free vibration without load, whose zeros
// are a phase of π apart, so that it has one zero at most, and the velocity one on
// each side of it.
func (o *oracle) piece(u, v, a, slope float64) (uEnd, vEnd float64) {
	var p powers
	p.expand(o, u, v, a, slope)
	start, end := p.at(0), p.at(1)
	o.best = max(o.best, math.Abs(u), math.Abs(end[0]))
	if start[2]*end[2] >= 0 {
		o.turn(&p, 0, 1)
		return end[0], end[1]
	}
	middle := p.zero(2, 0, 1)
	o.turn(&p, 0, middle)
	o.turn(&p, middle, 1)
	return end[0], end[1]
}

// turn raises best to |u| where the velocity changes sign between two times.
func (o *oracle) turn(p *powers, from, to float64) {
	if p.at(from)[1]*p.at(to)[1] < 0 {
		o.best = max(o.best, math.Abs(p.at(p.zero(1, from, to))[0]))
	}
}

// powers is u as a power series in time.
type powers struct {
	c [40]float64
	n int
}

// expand solves c[n]·n·(n − 1) = −(load of power n − 2) − 2ζφ·(n − 1)·c[n−1] −
// φ²·c[n−2], until two terms in a row no longer count.
func (p *powers) expand(o *oracle, u, v, a, slope float64) {
	p.c[0], p.c[1] = u, v
	load, size := [2]float64{a, slope}, math.Abs(u)+math.Abs(v)
	small := 0
	for p.n = 2; p.n < len(p.c) && small < 2; p.n++ {
		k := float64(p.n)
		sum := o.linear*(k-1)*p.c[p.n-1] + o.square*p.c[p.n-2]
		if p.n < 4 {
			sum += load[p.n-2]
		}
		p.c[p.n] = -sum / (k * (k - 1))
		switch {
		case p.n < 4:
			size += math.Abs(p.c[p.n])
		case k*k*math.Abs(p.c[p.n]) <= 1e-18*size:
			small++
		default:
			small = 0
		}
	}
}

// at returns displacement, velocity and relative acceleration.
func (p *powers) at(t float64) (d [3]float64) {
	for k := p.n - 1; k >= 0; k-- {
		d[2] = d[2]*t + 2*d[1]
		d[1] = d[1]*t + d[0]
		d[0] = d[0]*t + p.c[k]
	}
	return d
}

// zero returns where derivative k, of opposite signs at two times, is zero
// between them: halving, which leaves u at a turning point wrong by 1e-12 of ü at
// most, and a step along the tangent.
func (p *powers) zero(k int, from, to float64) float64 {
	sign := p.at(from)[k]
	for range 20 {
		middle := (from + to) / 2
		if p.at(middle)[k]*sign > 0 {
			from = middle
		} else {
			to = middle
		}
	}
	if k == 1 {
		if d := p.at(to); d[2] != 0 {
			return min(max(to-d[1]/d[2], from), to)
		}
	}
	return to
}
