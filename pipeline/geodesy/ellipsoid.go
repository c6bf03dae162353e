package geodesy

import "math"

// ellipsoid is an ellipsoid of revolution, oblate and of small flattening.
type ellipsoid struct {
	equatorialM, polarM float64 // a, b
	flattening          float64 // f = (a − b)/a
	eccentricity2       float64 // e² = f·(2 − f)
	second2             float64 // e′² = e²/(1 − e²)
	longitude           longitudeSeries
}

func newEllipsoid(equatorialM, flattening float64) *ellipsoid {
	e := &ellipsoid{
		equatorialM:   equatorialM,
		polarM:        equatorialM * (1 - flattening),
		flattening:    flattening,
		eccentricity2: flattening * (2 - flattening),
		longitude:     newLongitudeSeries(flattening / (2 - flattening)),
	}
	e.second2 = e.eccentricity2 / (1 - e.eccentricity2)
	return e
}

// direction is an angle by its sine and cosine, which keep their digits near
// every quarter turn.
type direction struct{ sin, cos float64 }

// degrees returns the direction of an angle in degrees, exactly at quarter turns.
func degrees(angle float64) direction {
	quarters := math.RoundToEven(angle / 90)
	sin, cos := math.Sincos((angle - float64(quarters*90)) * (math.Pi / 180))
	switch int(quarters) & 3 {
	case 1:
		return direction{cos, -sin}
	case 2:
		return direction{-sin, -cos}
	case 3:
		return direction{-cos, sin}
	}
	return direction{sin, cos}
}

// unit returns the direction of a vector that is not zero.
func unit(sin, cos float64) direction {
	r := math.Hypot(sin, cos)
	return direction{sin / r, cos / r}
}

func (d direction) radians() float64 { return math.Atan2(d.sin, d.cos) }

// azimuth returns degrees within [0, 360).
func (d direction) azimuth() float64 {
	angle := float64(math.Atan2(d.sin, d.cos) * (180 / math.Pi))
	if angle < 0 {
		angle += 360
	}
	if angle >= 360 { // −tiny + 360 rounds up
		return 0
	}
	return angle + 0 // no negative zero
}

// turned returns d advanced by an angle in radians.
func (d direction) turned(angle float64) direction {
	s, c := math.Sincos(angle)
	return unit(float64(d.sin*c)+float64(d.cos*s), float64(d.cos*c)-float64(d.sin*s))
}

// between reports whether d lies strictly between two directions of the upper
// half circle, low being the smaller angle.
func (d direction) between(low, high direction) bool {
	return float64(low.cos*d.sin) > float64(d.cos*low.sin) && float64(d.cos*high.sin) > float64(high.cos*d.sin)
}

// reduced returns the reduced latitude β, tan β = (1 − f)·tan φ.
func (e *ellipsoid) reduced(latitude float64) direction {
	d := degrees(latitude)
	return unit((1-e.flattening)*d.sin, d.cos)
}
