package spectrum

import "math"

// Peaks returns the peak ground acceleration, velocity and displacement of a
// component: the greatest |a| in m/s², and the greatest |∫a| in m/s and |∬a| in
// m of the motion that starts from rest at the first sample, over the record's
// duration. acceleration is in m/s², stepS apart in s.
//
// The acceleration is linear between samples and the integrals of that are
// exact: the velocity is the trapezoidal sum at samples and quadratic between
// them, the displacement cubic. Maxima are of continuous time. A record with an
// offset left in its baseline gets a PGD without meaning; that is a matter of
// conditioning, not of this function.
//
// Fewer than two samples have no duration and give pgv = pgd = 0. NaN in gives
// NaN out.
func Peaks(stepS float64, acceleration []float64) (pga, pgv, pgd float64) {
	var s groundStep // time in steps
	top := uint64(0)
	for k, a := range acceleration {
		top = max(top, magnitude(a))
		if k+1 == len(acceleration) {
			break
		}
		s.a, s.slope = a, acceleration[k+1]-a
		u, v := s.displacementAt(1), s.velocityAt(1)
		turns := opposite(a, acceleration[k+1])
		if turns || !(math.Abs(v) <= pgv) {
			pgv = max(pgv, s.peakVelocity())
		}
		// u departs from its chord by an eighth of the greatest |a| at most.
		reach := float64((math.Abs(a) + math.Abs(s.slope)) * 0.125)
		switch {
		case math.Abs(s.u)+reach <= pgd && math.Abs(u)+reach <= pgd:
		case s.v > 0 && v > 0 && !turns || s.v < 0 && v < 0 && !turns:
			pgd = max(pgd, math.Abs(u)) // v has no zero
		default:
			pgd = max(pgd, s.peakDisplacement())
		}
		s.u, s.v = u, v
	}
	return math.Float64frombits(top), float64(pgv * stepS), float64(pgd*stepS) * stepS
}

// groundStep is the motion of the ground within one step, time from 0 to 1.
type groundStep struct{ u, v, a, slope float64 }

func (s *groundStep) velocityAt(t float64) float64 {
	return s.v + float64(t*(s.a+float64(t*s.slope*0.5)))
}

func (s *groundStep) displacementAt(t float64) float64 {
	return s.u + float64(t*(s.v+float64(t*(float64(s.a*0.5)+float64(t*s.slope/6)))))
}

// peakVelocity returns the greatest |v|, at the end or where a passes zero; the
// start was the end of the step before.
func (s *groundStep) peakVelocity() float64 {
	peak := math.Abs(s.velocityAt(1))
	if opposite(s.a, s.a+s.slope) {
		peak = max(peak, math.Abs(s.velocityAt(s.velocityTurn())))
	}
	return peak
}

// velocityTurn is when a passes zero.
func (s *groundStep) velocityTurn() float64 { return -s.a / s.slope }

// peakDisplacement returns the greatest |u|, at the end or where v passes zero.
func (s *groundStep) peakDisplacement() float64 {
	peak := math.Abs(s.displacementAt(1))
	for _, t := range s.displacementTurns() {
		if t > 0 && t < 1 {
			peak = max(peak, math.Abs(s.displacementAt(t)))
		}
	}
	return peak
}

// displacementTurns are the zeros of v + a·t + slope/2·t², in the form that does not
// cancel, NaN where there are none.
func (s *groundStep) displacementTurns() [2]float64 {
	discriminant := float64(s.a*s.a) - float64(2*s.slope*s.v)
	if !(discriminant >= 0) {
		return [2]float64{math.NaN(), math.NaN()}
	}
	q := -(s.a + math.Copysign(math.Sqrt(discriminant), s.a))
	return [2]float64{q / s.slope, 2 * s.v / q}
}
