package spectrum

import (
	"fmt"
	"math"
)

// newmarkParts is 1/β of the methods of Newmark.
var newmarkParts = [...]float64{NewmarkAverage: 4, NewmarkLinear: 6}

// isNewmark tells whether the method is one of Newmark's.
func (m Method) isNewmark() bool { return m == NewmarkAverage || m == NewmarkLinear }

// maxPeriodStep is the greatest T/dt of the method.
func (m Method) maxPeriodStep() float64 {
	if m.isNewmark() {
		return MaxPeriodStepNewmark
	}
	return MaxPeriodStep
}

// accepts returns an error, wrapping ErrOscillator, for a period that the method
// cannot take in steps of stepS: one outside the limits of the package, or too
// short to be stable.
//
// With γ = 1/2 the eigenvalues of a step without load have the sum 2 − (c + k)·q
// and the product 1 − c·q, c = 2ζφ, k = φ², q = 1/(1 + c/2 + βk). Neither is
// beyond the unit circle if the product is between −1 and 1, as it is, and 1 +
// sum + product = (4 − (1 − 4β)·k)·q >= 0. Average acceleration has 1 − 4β = 0;
// linear acceleration has 1/3, so that φ <= 2√3 with any damping. At 2√3 itself
// an undamped oscillator has the double eigenvalue −1 and swings up with time.
//
// Source: Newmark (1959); Bathe and Wilson (1973), where the limit is dt/T =
// √3/π = 0.551.
func (m Method) accepts(o Oscillator, stepS float64) error {
	ratio, most := o.PeriodS/stepS, m.maxPeriodStep()
	if !(ratio >= MinPeriodStep && ratio <= most) {
		return fmt.Errorf("%w: period %g s is %g steps of %g s, outside %g to %g",
			ErrOscillator, o.PeriodS, ratio, stepS, MinPeriodStep, most)
	}
	if phase := float64(Omega(o.PeriodS) * stepS); m == NewmarkLinear && !(float64(phase*phase) < 12) {
		return fmt.Errorf("%w: period %g s is %.5g steps of %g s; %v is stable only above π/√3 = %.5g steps, ω·dt below 2√3",
			ErrOscillator, o.PeriodS, ratio, stepS, m, math.Pi/math.Sqrt(3))
	}
	return nil
}

// newmark returns the recurrence of Newmark's method with γ = 1/2, the
// accelerations eliminated, in both forms. What β takes from 1/4 is short.
func (m Method) newmark(phase, damping float64) (recurrence, difference) {
	parts := newmarkParts[m]
	short := 0.25 - 1/parts
	linear, square := float64(2*damping*phase), float64(phase*phase)
	drag, sag := float64(linear*short), float64(square*short)
	q := 1 / ((1 + float64(linear*0.5)) + square/parts)
	return recurrence{
			uu: -square * q * (0.5 + drag),
			uv: q * (1 - float64(linear*drag)),
			vu: -square * q * (1 - sag),
			vv: -q * (linear + float64(square*(0.5-drag))),
			pu: -q * (0.25 + short + drag), qu: -q / parts,
			pv: -q * (0.5 - sag), qv: -q / 2,
		}, difference{
			loss:      linear * q,
			stiffness: square * q,
			middle:    parts - 2, oldest: 1,
			scale: -q / parts,
		}
}

// newNewmark returns the slow form of one of Newmark's methods.
//
// Undamped, the phase θ of a step has cos θ = 1 − k·q/2, or tan(θ/2) =
// (φ/2)/√(1 − (1/4 − β)·k), k = φ², so that θ >= 2·atan(φ/2) >= φ/(1 + φ/2) for
// both methods, and one period takes at most 2π/φ + π steps.
func (m Method) newNewmark(index int, phase, damping float64) slow {
	step, eq := m.newmark(phase, damping)
	tail := int(math.Ceil(2*math.Pi/phase)) + 4
	return slow{
		index: index, phase: phase, exact: step, inverse: 1 / step.uv, eq: eq,
		tail: tail, norm: m.energy(phase, damping),
	}
}

// energy is the norm in which the free motion of a Newmark method never grows,
//
//	E = pace²·(u − lag·v)² + v²,  pace² = k·(1 − δk),  lag = δc/(1 − δk),
//
// with δ = 1/4 − β and c and k as in accepts. It follows from the mean velocity
// v̄ of a step: u' − u = v̄ − δ·(ü' − ü) and v' − v = (ü + ü')/2 with ü = −c·v −
// k·u give
//
//	E' − E = −2c/(1 − δk)·v̄².
//
// It is positive where the method is stable. For average acceleration, δ = 0, it
// is the oscillator's own energy.
type energy struct{ pace, lag, reach float64 }

func (m Method) energy(phase, damping float64) energy {
	short := 0.25 - 1/newmarkParts[m]
	rest := 1 - float64(float64(phase*phase)*short)
	pace := phase * math.Sqrt(rest)
	lag := float64(2*damping*phase*short) / rest
	skew := float64(pace * lag)
	return energy{pace, lag, math.Sqrt(1 + float64(skew*skew))}
}

// bound returns a bound on |u| ever after displacement u and velocity v: the
// greatest |x + lag·v| of those with pace²·x² + v² <= E.
func (e *energy) bound(u, v float64) float64 {
	return e.reach * reach(u-float64(e.lag*v), v/e.pace)
}

// ring follows the free ringing of a Newmark method among the samples of one
// undamped period, from the state at the end of the march, unless it cannot
// exceed best.
//
// It carries uv·v instead of the velocity v, which linear acceleration cannot
// tell from displacements where uv = 0, at ζφ = √3.
func (o *slow) ring(m *motion, best float64, end state) float64 {
	n, r := m.steps(), &o.exact
	a, next := m.a[n-1], m.a[n]
	u, change := float64(o.eq.scale*(end.x-end.y)), float64(o.eq.scale*end.y)
	drive := change - (float64(r.uu*u) + (float64(r.pu*a) + float64(r.qu*next)))
	drive += float64(r.vv*drive) + float64(r.uv*(float64(r.vu*u)+(float64(r.pv*a)+float64(r.qv*next))))
	u = float64(o.eq.scale * end.x)
	if o.norm.bound(u, float64(drive*o.inverse)) <= best {
		return best
	}
	back := float64(r.uv * r.vu)
	for range o.tail {
		u, drive = u+(float64(r.uu*u)+drive), drive+(float64(r.vv*drive)+float64(back*u))
		best = max(best, math.Abs(u))
	}
	return best
}
