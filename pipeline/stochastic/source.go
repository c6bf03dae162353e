package stochastic

import "math"

// Moment returns the seismic moment in N·m of an event of moment magnitude m,
//
//	M0 = 10^(1.5·m + 9.05),
//
// which is 10^(1.5·m + 16.05) dyn·cm.
//
// Source: T. C. Hanks & H. Kanamori (1979), A moment magnitude scale, Journal of
// Geophysical Research 84:2348–2350, where m = 2/3·log10 M0 − 10.7 in dyn·cm.
func Moment(m float64) float64 {
	return math.Pow(10, float64(1.5*m)+9.05)
}

// CornerFrequency returns the corner frequency in Hz of a source of moment
// momentNM in N·m, stress drop stressPa in Pa and shear velocity velocityMPS in
// m/s,
//
//	f0 = 0.49·β·(Δσ/M0)^(1/3).
//
// The factor is 4.9e6 for β in km/s, Δσ in bar and M0 in dyn·cm, and two digits
// are what is published.
//
// Source: J. N. Brune (1970, 1971), Journal of Geophysical Research 75:4997–5009
// and 76:5002, in the form of Boore (2003).
func CornerFrequency(momentNM, stressPa, velocityMPS float64) float64 {
	return 0.49 * velocityMPS * math.Cbrt(stressPa/momentNM)
}

// EffectiveDistance returns the distance in m at which a point source of
// magnitude m stands for a finite fault whose hypocentre is hypocentralM metres
// away,
//
//	R = √(R_hyp² + h²),  h = 10^(−0.405 + 0.235·m) km.
//
// It keeps motions near a large fault from growing as if the fault were a point.
//
// Source: E. Yenier & G. M. Atkinson (2014), Equivalent point-source modeling of
// moderate-to-large magnitude earthquakes, Bull. Seismol. Soc. Am.
// 104:1458–1478. They measure to the fault; the hypocentral distance in its
// place is our simplification.
func EffectiveDistance(m, hypocentralM float64) float64 {
	h := 1000 * math.Pow(10, float64(0.235*m)-0.405)
	return math.Sqrt(float64(hypocentralM*hypocentralM) + float64(h*h))
}
