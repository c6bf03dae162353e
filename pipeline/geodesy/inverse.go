package geodesy

import "math"

// inverse solves for any pair of valid points. It brings them into the order of
// Karney (2013), section 5: the first point the one farther from the equator, on
// the southern side, the second one east of it, and turns the answer back.
func (e *ellipsoid) inverse(latitude1, longitude1, latitude2, longitude2 float64) Line {
	lon := math.Remainder(math.Remainder(longitude2, 360)-math.Remainder(longitude1, 360), 360)
	if lon == 0 && latitude1 == latitude2 {
		return Line{}
	}
	lat1, lat2 := latitude1, latitude2
	swapped := math.Abs(lat1) < math.Abs(lat2)
	if swapped {
		lat1, lat2 = lat2, lat1
	}
	mirrored := lat1 >= 0
	if mirrored {
		lat1, lat2 = -lat1, -lat2
	}
	length, alpha1, alpha2 := e.canonical(lat1, lat2, math.Abs(lon))
	if swapped {
		alpha1, alpha2 = direction{alpha2.sin, -alpha2.cos}, direction{alpha1.sin, -alpha1.cos}
	}
	if mirrored {
		alpha1.cos, alpha2.cos = -alpha1.cos, -alpha2.cos
	}
	if lon < 0 {
		alpha1.sin, alpha2.sin = -alpha1.sin, -alpha2.sin
	}
	return Line{LengthM: length, StartAzimuthDeg: alpha1.azimuth(), EndAzimuthDeg: alpha2.azimuth()}
}

// canonical solves for −90 ≤ lat1 ≤ 0, |lat2| ≤ |lat1| and 0 ≤ lon ≤ 180.
func (e *ellipsoid) canonical(lat1, lat2, lon float64) (length float64, alpha1, alpha2 direction) {
	beta1, beta2 := e.reduced(lat1), e.reduced(lat2)
	beta1.sin = math.Copysign(beta1.sin, -1) // the equator counts as just south of itself, and as
	beta2.sin += 0                           // just north at the second point: +0
	switch {
	case lon == 0 || lon == 180 || lat1 == -90: // along a meridian, over the near pole
		alpha1, alpha2 = degrees(lon), direction{0, 1}
		along := alpha1
		if lat1 == -90 {
			along = direction{0, 1}
		}
		return e.along(beta1, along, beta2, alpha2).length(e), alpha1, alpha2
	case lat1 == 0 && lon <= 180*(1-e.flattening): // farther apart a way off the equator is shorter
		return e.equatorialM * lon * (math.Pi / 180), direction{1, 0}, direction{1, 0}
	}
	lambda := lon * (math.Pi / 180)
	alpha1, arc := e.start(beta1, beta2, lambda)
	if arc < 1e-8 { // 6 cm: the sphere errs by e²·arc², far below rounding
		w := e.parallelFactor(beta1, beta2)
		_, arc = sphere(beta1, beta2, lambda/w)
		return e.equatorialM * w * arc, alpha1, alpha1
	}
	l := e.solve(beta1, beta2, lambda, alpha1)
	return l.length(e), l.alpha1, l.alpha2
}

// solve finds the azimuth at the first point whose line meets the parallel of the
// second, northward, at the longitude difference lambda. That difference grows
// with the azimuth from below to above lambda, so that the root is bracketed;
// where Newton's step leaves the bracket, the bracket is halved.
func (e *ellipsoid) solve(beta1, beta2 direction, lambda float64, alpha1 direction) arc {
	const (
		rounding = 4e-16 // of the longitude difference, in radians
		patience = 20    // steps of Newton's method; it mostly takes two to five
	)
	low, high := direction{0, 1}, direction{0, -1}
	for i := 0; ; i++ {
		l := e.along(beta1, alpha1, beta2, e.arrival(beta1, alpha1, beta2))
		excess, slope := l.longitude(e)-lambda, l.slope(e)
		if math.Abs(excess) <= rounding || i > patience+60 {
			return l
		}
		if excess > 0 {
			high = alpha1
		} else {
			low = alpha1
		}
		next := alpha1.turned(-excess / slope)
		if i > patience || !(slope > 0) || !(math.Abs(excess/slope) < math.Pi) || !next.between(low, high) {
			next = middle(low, high)
		}
		if next == alpha1 || !next.between(low, high) { // nothing representable is left
			return l
		}
		alpha1 = next
	}
}

// middle halves the angle between two directions of the upper half circle.
func middle(low, high direction) direction {
	if sin, cos := low.sin+high.sin, low.cos+high.cos; sin > 0 {
		return unit(sin, cos)
	}
	return direction{1, 0} // of 0 and π
}

// arrival returns the northward azimuth at the parallel beta2 of the line that
// leaves beta1 with alpha1. By Clairaut sin α·cos β stays the same; the difference
// of squares is taken from whichever of sine and cosine keeps digits.
func (e *ellipsoid) arrival(beta1, alpha1, beta2 direction) direction {
	sin := alpha1.sin * beta1.cos / beta2.cos
	var squares float64
	if beta1.cos < -beta1.sin {
		squares = (beta2.cos - beta1.cos) * (beta1.cos + beta2.cos)
	} else {
		squares = (beta1.sin - beta2.sin) * (beta1.sin + beta2.sin)
	}
	if squares == 0 {
		return direction{alpha1.sin, math.Abs(alpha1.cos)}
	}
	along := alpha1.cos * beta1.cos
	return unit(sin, math.Sqrt(float64(along*along)+squares)/beta2.cos)
}

// arc is a piece of a geodesic on the auxiliary sphere.
type arc struct {
	beta1, alpha1, beta2, alpha2 direction
	sigma1, sigma2               direction // from the northward crossing of the equator
	sinAlpha0, sigma, epsilon    float64   // sigma = σ2 − σ1
}

func (e *ellipsoid) along(beta1, alpha1, beta2, alpha2 direction) arc {
	l := arc{beta1: beta1, alpha1: alpha1, beta2: beta2, alpha2: alpha2}
	l.sinAlpha0 = alpha1.sin * beta1.cos
	cosAlpha0 := math.Hypot(alpha1.cos, alpha1.sin*beta1.sin)
	l.sigma1 = unit(beta1.sin, alpha1.cos*beta1.cos)
	l.sigma2 = unit(beta2.sin, alpha2.cos*beta2.cos)
	l.sigma = math.Max(0, l.sigma2.radians()-l.sigma1.radians())
	l.epsilon = smallParameter(float64(e.second2 * cosAlpha0 * cosAlpha0))
	return l
}

// length is b·(I1(σ2) − I1(σ1)) in m.
func (l arc) length(e *ellipsoid) float64 {
	a, c := lengthSeries(l.epsilon)
	return e.polarM * a * (l.sigma + c.between(l.sigma1, l.sigma2))
}

// longitude is the difference of longitude from end to end in radians.
func (l arc) longitude(e *ellipsoid) float64 {
	omega1 := math.Atan2(l.sinAlpha0*l.beta1.sin, l.alpha1.cos*l.beta1.cos)
	omega2 := math.Atan2(l.sinAlpha0*l.beta2.sin, l.alpha2.cos*l.beta2.cos)
	a, c := e.longitude.at(l.epsilon)
	i3 := a * (l.sigma + c.between(l.sigma1, l.sigma2))
	return omega2 - omega1 - float64(e.flattening*l.sinAlpha0*i3)
}

// slope is the derivative of longitude by the azimuth at the first point, the
// second staying on its parallel: m12/(a·cos α2·cos β2) with the reduced length
// m12, Karney (2013), equations 46 and 38, and where the line only touches that
// parallel the limit of it.
func (l arc) slope(e *ellipsoid) float64 {
	if l.alpha2.cos == 0 {
		return -2 * math.Sqrt(1-float64(e.eccentricity2*float64(l.beta1.cos*l.beta1.cos))) / l.beta1.sin
	}
	a1, c1 := lengthSeries(l.epsilon)
	a2, c2 := inverseSeries(l.epsilon)
	between := float64(a1*(l.sigma+c1.between(l.sigma1, l.sigma2))) - float64(a2*(l.sigma+c2.between(l.sigma1, l.sigma2))) // I1 − I2
	k2 := 4 * l.epsilon / float64((1-l.epsilon)*(1-l.epsilon))
	s1, s2 := l.sigma1, l.sigma2
	root1 := math.Sqrt(1 + float64(k2*float64(s1.sin*s1.sin)))
	root2 := math.Sqrt(1 + float64(k2*float64(s2.sin*s2.sin)))
	reduced := float64(root2*s1.cos*s2.sin) - float64(root1*s1.sin*s2.cos) - float64(s1.cos*s2.cos*between)
	return (1 - e.flattening) * reduced / float64(l.alpha2.cos*l.beta2.cos)
}
