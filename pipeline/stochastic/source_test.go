package stochastic

import (
	"math"
	"testing"
)

// near fails the test unless got lies within the relative tolerance of want.
func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance*math.Abs(want)) {
		t.Errorf("%s = %.9g, want %.9g within %g", what, got, want, tolerance)
	}
}

// The moments are worked by hand: the exponent 1.5·m + 9.05 and its power of ten.
func TestMoment(t *testing.T) {
	for _, c := range []struct{ m, want float64 }{
		{5, 3.54813389e16}, // 10^16.55
		{6, 1.12201845e18}, // 10^18.05
		{7.2, 7.07945784e19},
	} {
		near(t, "Moment", Moment(c.m), c.want, 1e-8)
		// Hanks & Kanamori write the inverse, with dyn·cm = 1e-7 N·m.
		near(t, "magnitude", 2.0/3*math.Log10(Moment(c.m)*1e7)-10.7, c.m, 1e-12)
	}
}

// The published form has β in km/s, Δσ in bar and M0 in dyn·cm.
func TestCornerFrequencyPublishedUnits(t *testing.T) {
	m0 := math.Pow(10, 1.5*6+16.05)
	want := 4.9e6 * 3.5 * math.Cbrt(100/m0)
	got := CornerFrequency(Moment(6), 100e5, 3500)
	near(t, "CornerFrequency", got, want, 1e-12)
	near(t, "CornerFrequency", got, 0.35559, 1e-4) // worked by hand
}

// The factor 0.49 follows from Brune's model: f0 = 2.34·β/(2πr) and
// Δσ = 7·M0/(16·r³). It is published with two digits, hence the tolerance.
func TestCornerFrequencyDerivation(t *testing.T) {
	const m0, stress, beta = 1e18, 5e6, 3400
	radius := math.Cbrt(7 * m0 / (16 * stress))
	near(t, "CornerFrequency", CornerFrequency(m0, stress, beta), 2.34*beta/(2*math.Pi*radius), 0.005/0.49)
}

func TestEffectiveDistance(t *testing.T) {
	// Magnitude 7: 10^1.24 = 17.378 km, worked by hand.
	near(t, "EffectiveDistance(7, 0)", EffectiveDistance(7, 0), 17378, 1e-4)
	near(t, "EffectiveDistance(7, 30 km)", EffectiveDistance(7, 30e3), math.Hypot(17378, 30e3), 1e-4)
	if near, far := EffectiveDistance(5, 10e3), EffectiveDistance(6, 10e3); near >= far {
		t.Errorf("effective distance %g m at magnitude 5, %g m at 6: want growth", near, far)
	}
}
