package demo

import "math"

// earthRadiusKM is the mean radius of the Earth, (2a + b)/3 of the ellipsoid
// GRS 80.
//
// Source: H. Moritz (2000), Geodetic Reference System 1980, Journal of Geodesy
// 74:128–133.
const earthRadiusKM = 6371.0088

// epicentral returns distance in km and azimuth in degrees clockwise from north
// from an event's epicentre to a station, on a sphere: the haversine formula and
// the forward azimuth of spherical trigonometry. Both are rounded to 0.01, which
// makes them the same on all machines.
func epicentral(e *event, s *station) (km, azimuth float64) {
	const radian = math.Pi / 180
	phi1, phi2 := float64(e.latitude*radian), float64(s.latitude*radian)
	lambda := (s.longitude - e.longitude) * radian
	u, v := math.Sin((phi2-phi1)/2), math.Sin(lambda/2)
	h := float64(u*u) + float64(math.Cos(phi1)*math.Cos(phi2)*v*v)
	km = 2 * earthRadiusKM * math.Asin(math.Min(1, math.Sqrt(h)))

	east := math.Sin(lambda) * math.Cos(phi2)
	north := float64(math.Cos(phi1)*math.Sin(phi2)) - float64(math.Sin(phi1)*math.Cos(phi2)*math.Cos(lambda))
	azimuth = math.Mod(math.Atan2(east, north)/radian+360, 360)
	return round2(km), round2(azimuth)
}

func round2(v float64) float64 { return math.Round(v*100) / 100 }
