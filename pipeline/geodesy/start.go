package geodesy

import "math"

// start returns an azimuth at the first point to begin with, and the arc between
// the points on a sphere. beta1 ≤ 0 and |beta2| ≤ |beta1|; lambda is the difference
// of longitude in radians, within (0, π).
//
// The sphere is that of reduced latitudes. On it longitudes differ by more than
// on the ellipsoid, which matters between close points: Karney (2013), equation 48,
// divides by the factor for the latitude midway. Near the antipode the sphere says
// nothing about the azimuth, and the astroid does.
func (e *ellipsoid) start(beta1, beta2 direction, lambda float64) (alpha1 direction, arc float64) {
	alpha1, arc = sphere(beta1, beta2, lambda)
	switch {
	case arc < 0.1:
		return sphere(beta1, beta2, lambda/e.parallelFactor(beta1, beta2))
	case arc > math.Pi*(1-float64(3*e.flattening)):
		return e.astroid(beta1, beta2, lambda), arc
	}
	return alpha1, arc
}

// parallelFactor is the ratio of longitude to that on the auxiliary sphere along
// a parallel, at the latitude midway: √(1 − e²·((cos β1 + cos β2)/2)²).
func (e *ellipsoid) parallelFactor(beta1, beta2 direction) float64 {
	mean := (beta1.cos + beta2.cos) / 2
	return math.Sqrt(1 - float64(e.eccentricity2*float64(mean*mean)))
}

// sphere solves the triangle of the pole and two points on the unit sphere. The
// difference of latitudes is kept apart, so that close points keep digits.
func sphere(beta1, beta2 direction, omega float64) (alpha1 direction, arc float64) {
	sin, cos := math.Sincos(omega)
	half := math.Sin(omega / 2)
	north := float64(beta1.cos*beta2.sin) - float64(beta1.sin*beta2.cos)
	north += float64(2 * beta1.sin * beta2.cos * float64(half*half))
	east := beta2.cos * sin
	arc = math.Atan2(math.Hypot(east, north), float64(beta1.sin*beta2.sin)+float64(beta1.cos*beta2.cos*cos))
	if arc == 0 {
		return direction{0, 1}, 0
	}
	return unit(east, north), arc
}

// astroid returns the azimuth at the first point towards one near its antipode.
// Seen from there, geodesics that start at the first point are tangents of a small
// astroid; of the four through the second point the shortest belongs to the
// positive root κ of
//
//	(x/(1 + κ))² + (y/κ)² = 1
//
// with x and y the second point's place against the antipode in units of the
// astroid's half width: Karney (2013), equations 53 to 57. The left side falls and
// is convex, so that Newton's method from below the root climbs to it.
func (e *ellipsoid) astroid(beta1, beta2 direction, lambda float64) direction {
	k2 := float64(e.second2 * beta1.sin * beta1.sin) // of the meridian's neighbours
	a3, _ := e.longitude.at(smallParameter(k2))
	width := e.flattening * math.Pi * beta1.cos * a3
	x := (lambda - math.Pi) / width
	y := (float64(beta2.sin*beta1.cos) + float64(beta2.cos*beta1.sin)) / float64(width*beta1.cos)
	if y == 0 {
		cos := -math.Sqrt(math.Max(0, 1-float64(x*x)))
		return unit(math.Max(-x, math.SmallestNonzeroFloat64), cos)
	}
	kappa := math.Max(-y, -x-1)
	for range 20 {
		u, v := x/(1+kappa), y/kappa
		u2, v2 := u*u, v*v
		step := (float64(u2) + float64(v2) - 1) / (2 * (float64(u2)/(1+kappa) + float64(v2)/kappa))
		if !(step > 1e-9*kappa) {
			break
		}
		kappa += step
	}
	return unit(-x/(1+kappa), y/kappa)
}
