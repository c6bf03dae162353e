package ingest

// limits are the least and the greatest value of a quantity that are believed.
type limits struct{ low, high float64 }

// The limits of what headers and catalogues state. Beyond them lies no
// earthquake, no place and no ground: they are far outside anything observed, so
// that what they keep out is a slip of units, columns or sentinels.
var (
	magnitudeLimits = limits{-2, 10}
	depthLimits     = limits{-10, 800} // km; a volcano's edifice is above the sea
	latitudeLimits  = limits{-90, 90}
	longitudeLimits = limits{-180, 180}
	distanceLimits  = limits{0, 20040} // km; half the equator is π·6378.137 km
	vs30Limits      = limits{1, 10000} // m/s
)

func (l limits) hold(v float64) bool { return v >= l.low && v <= l.high }

// dropImplausible makes quantities unknown that lie outside their limits, with a
// warning that names the value. The two coordinates of a place go together, as do
// a magnitude and its type.
func dropImplausible(c *Channel) {
	e, s, d := &c.Event, &c.Station, &c.Distances
	if !c.believe("magnitude", &e.Magnitude, "", magnitudeLimits) {
		e.MagnitudeType = ""
	}
	c.believe("depth", &e.DepthKM, " km", depthLimits)
	c.believePlace("event", &e.Latitude, &e.Longitude)
	c.believePlace("station", &s.Latitude, &s.Longitude)
	c.believe("Vs30", &s.Vs30, " m/s", vs30Limits)
	c.believe("distance", &c.DistanceKM, " km", distanceLimits)
	c.believe("epicentral distance", &d.EpicentralKM, " km", distanceLimits)
	c.believe("hypocentral distance", &d.HypocentralKM, " km", distanceLimits)
	c.believe("rupture distance", &d.RuptureKM, " km", distanceLimits)
	c.believe("Joyner-Boore distance", &d.JoynerBooreKM, " km", distanceLimits)
}

// believe makes n unknown where it is stated and outside its limits; it reports
// whether it left n alone.
func (c *Channel) believe(name string, n *Number, unit string, l limits) bool {
	if !n.Known || l.hold(n.Value) {
		return true
	}
	c.warn("%s %g%s is outside %g to %g: taken as unknown", name, n.Value, unit, l.low, l.high)
	*n = Number{}
	return false
}

func (c *Channel) believePlace(name string, latitude, longitude *Number) {
	if longitude.Known && longitude.Value > 180 && longitude.Value <= 360 {
		longitude.Value -= 360 // counted all the way round
	}
	north := c.believe(name+" latitude", latitude, "", latitudeLimits)
	east := c.believe(name+" longitude", longitude, "", longitudeLimits)
	if !north || !east {
		*latitude, *longitude = Number{}, Number{}
	}
}
