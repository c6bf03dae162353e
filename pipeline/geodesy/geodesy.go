package geodesy

import (
	"fmt"
	"math"
)

// wgs84 is the ellipsoid of the World Geodetic System 1984: equatorial radius and
// flattening by definition.
var wgs84 = newEllipsoid(6378137, 1/298.257223563)

// Line is the shortest line on the ellipsoid from a first point to a second one.
type Line struct {
	LengthM float64
	// The direction of travel at either end, in degrees clockwise from north,
	// within [0, 360). The back azimuth, from the second point towards the first,
	// is EndAzimuthDeg ± 180. At a pole north is the meridian of the longitude that
	// was given for it.
	StartAzimuthDeg, EndAzimuthDeg float64
}

// Inverse returns the shortest line from one point to another on the WGS-84
// ellipsoid. Latitudes and longitudes are geodetic, in degrees: latitudes within
// ±90, positive north, longitudes within ±360, positive east. Where two lines are
// equally short one of them is returned; between equal points both azimuths are 0.
//
// It is an error if a coordinate is out of range or not a number.
//
// Lengths are true within 20 nm, and azimuths within what that length amounts to
// across the line; towards points near the antipode, where little depends on them,
// within 1e-8 degrees. A call costs one or two microseconds and allocates nothing.
//
// Source: Karney (2013), with series of order 6 in the flattening.
func Inverse(latitude1, longitude1, latitude2, longitude2 float64) (Line, error) {
	for _, latitude := range [...]float64{latitude1, latitude2} {
		if !(math.Abs(latitude) <= 90) {
			return Line{}, fmt.Errorf("latitude %v is not within ±90 degrees", latitude)
		}
	}
	for _, longitude := range [...]float64{longitude1, longitude2} {
		if !(math.Abs(longitude) <= 360) {
			return Line{}, fmt.Errorf("longitude %v is not within ±360 degrees", longitude)
		}
	}
	return wgs84.inverse(latitude1, longitude1, latitude2, longitude2), nil
}

// Hypocentral returns the distance in m from a station to a hypocentre,
//
//	√(epicentral² + depth²),
//
// for an epicentral distance, along the surface, and a depth below it, both in m.
// This is common practice for local and regional distances: the elevation of the
// station is left out and the Earth taken as flat. It overestimates the chord
// through the Earth by about one part in 24·(R/epicentral)², R = 6371 km: 0.1 % at
// 1000 km. A negative depth, above sea level, counts as its size.
func Hypocentral(epicentralM, depthM float64) float64 {
	return math.Hypot(epicentralM, depthM)
}
