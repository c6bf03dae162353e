package demo

import (
	"math"
	"regexp"
	"slices"
	"testing"
)

// The widths that formats have for codes and names, for built-in and generated
// entries alike.
func TestRegionFitsTheFormats(t *testing.T) {
	forms := map[string]*regexp.Regexp{
		"Q1": regexp.MustCompile(`^\d{5}$`),                // integer 14 of V2
		"Q2": regexp.MustCompile(`^[A-Z0-9]{3,6}$`),        // columns 29–34
		"Q3": regexp.MustCompile(`^QV(AH\d\d|[AB]\d{3})$`), // six characters; H marks a borehole
		"Q4": regexp.MustCompile(`^[A-Z0-9]{3,6}$`),
		"Q5": regexp.MustCompile(`^[A-Z0-9]{3,6}$`),
	}
	codes := map[string]bool{}
	for i, s := range stations(MaxCount, 5) {
		if s.network != &networks[i%len(networks)] {
			t.Errorf("station %d (%s) is of network %s: not in turn", i, s.code, s.network.code)
		}
		if !forms[s.network.code].MatchString(s.code) {
			t.Errorf("station code %q does not fit network %s", s.code, s.network.code)
		}
		if codes[s.code] {
			t.Errorf("station code %q occurs twice", s.code)
		}
		codes[s.code] = true
		if len(s.name) > 30 {
			t.Errorf("station name %q is longer than 30 characters", s.name)
		}
		if s.vs30 < 200 || s.vs30 > 900 || 100%s.rateHz != 0 && s.rateHz != 200 {
			t.Errorf("station %s: Vs30 %g m/s, %d Hz", s.code, s.vs30, s.rateHz)
		}
		if s.rateHz == 200 && s.network.code == "Q5" {
			t.Errorf("station %s: plain files print two decimals of time", s.code)
		}
		position(t, s.code, s.latitude, s.longitude)
	}
}

func TestEvents(t *testing.T) {
	minutes := map[string]bool{}
	for _, e := range events(MaxCount, 5) {
		// K-NET file names carry the minute only.
		if m := e.origin.Format("200601021504"); minutes[m] {
			t.Errorf("two events in minute %s", m)
		} else {
			minutes[m] = true
		}
		if e.magnitude < 5 || e.magnitude > 7.2 || e.depthKM < 6 || e.depthKM > 35 || e.stressPa < 5e6 || e.stressPa > 11e6 {
			t.Errorf("event %s: magnitude %g, depth %g km, stress drop %g Pa", e.name, e.magnitude, e.depthKM, e.stressPa)
		}
		if year := e.origin.Year(); year < 1990 || year > 2026 {
			t.Errorf("event %s of %d: two digits of the year must be clear", e.name, year)
		}
		position(t, e.name, e.latitude, e.longitude)
	}
}

// position checks that coordinates lie in the region and have three decimals.
func position(t *testing.T, what string, latitude, longitude float64) {
	t.Helper()
	if latitude < 37.5 || latitude > 38.7 || longitude < 169.4 || longitude > 171.5 {
		t.Errorf("%s lies at %g, %g: outside the region", what, latitude, longitude)
	}
	for _, v := range []float64{latitude, longitude} {
		if math.Abs(v*1000-math.Round(v*1000)) > 1e-6 {
			t.Errorf("%s: coordinate %v has more than three decimals", what, v)
		}
	}
}

// A longer list begins with the shorter one.
func TestGeneratedListsGrow(t *testing.T) {
	if !slices.Equal(stations(30, 2)[:25], stations(25, 2)) {
		t.Error("the first 25 of 30 stations are not the 25 stations")
	}
	if !slices.Equal(events(30, 2)[:25], events(25, 2)) {
		t.Error("the first 25 of 30 events are not the 25 events")
	}
	if slices.Equal(stations(30, 2), stations(30, 3)) {
		t.Error("seeds 2 and 3 generate the same stations")
	}
}

// Distances on a sphere of 6371.0088 km: one degree is 111.195 km.
func TestEpicentral(t *testing.T) {
	for _, c := range []struct {
		name                   string
		lat1, lon1, lat2, lon2 float64
		km, azimuth            float64
	}{
		{"north", 38, 170, 39, 170, 111.20, 0},
		{"south", 38, 170, 37, 170, 111.20, 180},
		{"east on the equator", 0, 10, 0, 11, 111.20, 90},
		{"west on the equator", 0, 10, 0, 9, 111.20, 270},
		{"quarter of the globe", 0, 0, 0, 90, 10007.56, 90},
		{"nowhere", 38, 170, 38, 170, 0, 0},
	} {
		km, azimuth := epicentral(&event{latitude: c.lat1, longitude: c.lon1}, &station{latitude: c.lat2, longitude: c.lon2})
		if km != c.km || azimuth != c.azimuth {
			t.Errorf("%s: %g km at %g°, want %g km at %g°", c.name, km, azimuth, c.km, c.azimuth)
		}
	}
}

func TestStructures(t *testing.T) {
	quantity := regexp.MustCompile(`^\d+(\.\d+)?(s|kN/mm|kN|%|m)$`)
	names := map[string]bool{}
	for _, s := range Structures() {
		if names[s.Name] || s.Name == "" {
			t.Errorf("structure %q: name is empty or occurs twice", s.Name)
		}
		names[s.Name] = true
		if (s.Period == "") == (s.Stiffness == "") {
			t.Errorf("%s: needs a period or a stiffness, and not both", s.Name)
		}
		for _, q := range []string{s.Period + s.Stiffness, s.Weight, s.Damping, s.Height} {
			if !quantity.MatchString(q) {
				t.Errorf("%s: %q is no quantity with a unit", s.Name, q)
			}
		}
	}
}
