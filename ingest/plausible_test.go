package ingest

import (
	"slices"
	"testing"
)

func TestImplausibleQuantities(t *testing.T) {
	at := func(lat, lon float64) (Number, Number) { return Known(lat), Known(lon) }
	cases := []struct {
		set  func(*Channel)
		want string
	}{
		{func(c *Channel) { c.Event.Magnitude, c.Event.MagnitudeType = Known(10.1), "Mw" }, "magnitude 10.1 is outside -2 to 10: taken as unknown"},
		{func(c *Channel) { c.Event.Magnitude = Known(-9.9) }, "magnitude -9.9 is outside -2 to 10: taken as unknown"},
		{func(c *Channel) { c.Event.DepthKM = Known(-10.5) }, "depth -10.5 km is outside -10 to 800: taken as unknown"},
		{func(c *Channel) { c.Event.DepthKM = Known(8200) }, "depth 8200 km is outside -10 to 800: taken as unknown"},
		{func(c *Channel) { c.Event.Latitude, c.Event.Longitude = at(90.5, 10) }, "event latitude 90.5 is outside -90 to 90: taken as unknown"},
		{func(c *Channel) { c.Event.Latitude, c.Event.Longitude = at(40, -181) }, "event longitude -181 is outside -180 to 180: taken as unknown"},
		{func(c *Channel) { c.Station.Latitude, c.Station.Longitude = at(-91, 10) }, "station latitude -91 is outside -90 to 90: taken as unknown"},
		{func(c *Channel) { c.Station.Latitude, c.Station.Longitude = at(40, 3600) }, "station longitude 3600 is outside -180 to 180: taken as unknown"},
		{func(c *Channel) { c.Station.Vs30 = Known(0) }, "Vs30 0 m/s is outside 1 to 10000: taken as unknown"},
		{func(c *Channel) { c.Station.Vs30 = Known(12000) }, "Vs30 12000 m/s is outside 1 to 10000: taken as unknown"},
		{func(c *Channel) { c.DistanceKM = Known(-1) }, "distance -1 km is outside 0 to 20040: taken as unknown"},
		{func(c *Channel) { c.Distances.EpicentralKM = Known(20041) }, "epicentral distance 20041 km is outside 0 to 20040: taken as unknown"},
		{func(c *Channel) { c.Distances.HypocentralKM = Known(-0.1) }, "hypocentral distance -0.1 km is outside 0 to 20040: taken as unknown"},
		{func(c *Channel) { c.Distances.RuptureKM = Known(1e9) }, "rupture distance 1e+09 km is outside 0 to 20040: taken as unknown"},
		{func(c *Channel) { c.Distances.JoynerBooreKM = Known(-999) }, "Joyner-Boore distance -999 km is outside 0 to 20040: taken as unknown"},
	}
	for _, tc := range cases {
		var c Channel
		tc.set(&c)
		dropImplausible(&c)
		if !slices.Equal(c.Warnings, []string{tc.want}) {
			t.Errorf("warnings %q, want %q", c.Warnings, tc.want)
		}
		if c.Event != (Event{}) || c.Station != (Station{}) || c.DistanceKM.Known || c.Distances != (Distances{}) {
			t.Errorf("%s: left %+v %+v %+v %+v", tc.want, c.Event, c.Station, c.DistanceKM, c.Distances)
		}
	}
}

// TestLimitsAreBelieved has every quantity at either limit.
func TestLimitsAreBelieved(t *testing.T) {
	for _, c := range []Channel{
		{
			Event:      Event{Magnitude: Known(-2), MagnitudeType: "ML", DepthKM: Known(-10), Latitude: Known(-90), Longitude: Known(-180)},
			Station:    Station{Vs30: Known(1), Latitude: Known(-90), Longitude: Known(-180)},
			DistanceKM: Known(0), Distances: Distances{EpicentralKM: Known(0), HypocentralKM: Known(0), RuptureKM: Known(0), JoynerBooreKM: Known(0)},
		},
		{
			Event:      Event{Magnitude: Known(10), MagnitudeType: "Mw", DepthKM: Known(800), Latitude: Known(90), Longitude: Known(180)},
			Station:    Station{Vs30: Known(10000), Latitude: Known(90), Longitude: Known(180)},
			DistanceKM: Known(20040), Distances: Distances{EpicentralKM: Known(20040), HypocentralKM: Known(20040), RuptureKM: Known(20040), JoynerBooreKM: Known(20040)},
		},
		{Event: Event{MagnitudeType: "Mw"}},
	} {
		want := c
		dropImplausible(&c)
		if c.Event != want.Event || c.Station != want.Station || c.DistanceKM != want.DistanceKM || c.Distances != want.Distances || len(c.Warnings) > 0 {
			t.Errorf("%+v became %+v", want, c)
		}
	}
}
