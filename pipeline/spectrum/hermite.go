package spectrum

import "math"

// hermite is the cubic v + w·t + square·t² + cube·t³ that has the velocities and
// relative accelerations of a step at both ends.
type hermite struct{ v, w, square, cube float64 }

// hermiteError times a bound on the fourth derivative of the velocity bounds the
// sum of two errors of the cubic: of the velocity, t²(1 − t)²/24 <= 1/384 of the
// derivative, and of the displacement, the integral of that, 1/720 of it.
//
// Source: the remainder of Hermite interpolation, J. Stoer and R. Bulirsch,
// Introduction to Numerical Analysis, §2.1.5.
const hermiteError = 1./384 + 1./720

func newHermite(v, w, vEnd, wEnd float64) hermite {
	rise := vEnd - v
	return hermite{
		v: v, w: w,
		square: (float64(3*rise) - float64(2*w)) - wEnd,
		cube:   (w + wEnd) - float64(2*rise),
	}
}

// rest returns a time from 0 to 1 near that at which the velocity, of opposite
// sign at both ends, is zero: two of Newton's corrections from the zero of the
// parabola without wEnd, where that is not prevented by rounding.
func (h *hermite) rest(vEnd float64) float64 {
	bend := (vEnd - h.v) - h.w
	root := math.Sqrt(math.FMA(h.w, h.w, -float64(4*float64(bend*h.v))))
	t := -2 * h.v / (h.w + math.Copysign(root, h.w))
	if !(t > 0 && t < 1) {
		return h.v / (h.v - vEnd)
	}
	for range 2 {
		slope := math.FMA(math.FMA(float64(3*h.cube), t, float64(2*h.square)), t, h.w)
		next := t - h.velocity(t)/slope
		if !(next > 0 && next < 1) {
			break
		}
		t = next
	}
	return t
}

func (h *hermite) velocity(t float64) float64 {
	return math.FMA(math.FMA(math.FMA(h.cube, t, h.square), t, h.w), t, h.v)
}

// reach returns a bound on |u| where the velocity is zero, from displacement u
// at the start, short of the cubic's error: |u| at any time t of the step, and
// |velocity| there, which cannot grow towards its zero.
func (h *hermite) reach(u, t float64) float64 {
	const third = 1. / 3
	sum := math.FMA(float64(h.cube*0.25), t, float64(h.square*third))
	sum = math.FMA(math.FMA(math.FMA(sum, t, float64(h.w*0.5)), t, h.v), t, u)
	return math.Abs(sum) + math.Abs(h.velocity(t))
}
