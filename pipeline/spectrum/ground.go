package spectrum

import "math"

// GroundMotion is the velocity in m/s and the displacement in m of the ground at the
// samples of a component, and the extremes of all three.
type GroundMotion struct {
	Velocity, Displacement []float64
	PGA, PGV, PGD          Extreme // of the acceleration in m/s², the velocity and the displacement
}

// Extreme is the value that is farthest from zero, with its sign, and when it comes, in s
// from the first sample; the first of equal ones.
type Extreme struct{ Value, AtS float64 }

// take takes a value that is farther from zero.
func (e *Extreme) take(value, at float64) {
	if math.Abs(value) > math.Abs(e.Value) {
		*e = Extreme{value, at}
	}
}

// in is the extreme of a step's units in those of a motion.
func (e Extreme) in(unit, stepS float64) Extreme {
	return Extreme{float64(e.Value * unit), float64(e.AtS * stepS)}
}

// Integrate integrates a component from rest at its first sample. acceleration is in m/s²,
// stepS apart in s. The integrals are those of Peaks, exact for straight lines between
// samples, and the extremes those of continuous time whose sizes Peaks returns; it costs a
// few times as much. NaN propagates forward into the integrals.
func Integrate(stepS float64, acceleration []float64) GroundMotion {
	n := len(acceleration)
	out := GroundMotion{Velocity: make([]float64, n), Displacement: make([]float64, n)}
	var s groundStep // time in steps
	var pga, pgv, pgd Extreme
	for k, a := range acceleration {
		at := float64(k)
		pga.take(a, at)
		out.Velocity[k], out.Displacement[k] = float64(s.v*stepS), float64(s.u*stepS)*stepS
		if k+1 == n {
			break
		}
		s.a, s.slope = a, acceleration[k+1]-a
		if opposite(a, acceleration[k+1]) {
			t := s.velocityTurn()
			pgv.take(s.velocityAt(t), at+t)
		}
		for _, t := range s.displacementTurns() {
			if t > 0 && t < 1 {
				pgd.take(s.displacementAt(t), at+t)
			}
		}
		s.u, s.v = s.displacementAt(1), s.velocityAt(1)
		pgv.take(s.v, at+1)
		pgd.take(s.u, at+1)
	}
	out.PGA, out.PGV, out.PGD = pga.in(1, stepS), pgv.in(stepS, stepS), pgd.in(stepS, stepS)
	out.PGD.Value = float64(out.PGD.Value * stepS)
	return out
}
