package intensity

import "math"

// AbsoluteVelocity returns the cumulative absolute velocity in m/s: the integral of
// |a|, a linear between samples, its zeros in between too.
//
// Source: EPRI, A Criterion for Determining Exceedance of the Operating Basis
// Earthquake, NP-5930, 1988.
func AbsoluteVelocity(a []float64, stepS float64) float64 {
	sum := 0.0
	for i := 1; i < len(a); i++ {
		sum += absoluteArea(a[i-1], a[i])
	}
	return sum * stepS
}

// absoluteArea is the area under |a| over a step of 1 on which a goes from p to q.
func absoluteArea(p, q float64) float64 {
	isCrossing := p < 0 && q > 0 || p > 0 && q < 0
	p, q = math.Abs(p), math.Abs(q)
	if isCrossing {
		return (float64(p*p) + float64(q*q)) / (2 * (p + q)) // two triangles
	}
	return (p + q) / 2
}

// What the standardised measure takes, in m/s² and s.
const (
	standardFloorMPS2 = 0.025 * StandardGravity
	standardWindowS   = 1.0
)

// StandardisedAbsoluteVelocity returns the cumulative absolute velocity in m/s of those
// seconds, counted from the first sample, in which a sample exceeds 0.025 g. Steps are
// counted with the second in which they begin.
//
// Source: EPRI, Standardization of the Cumulative Absolute Velocity, TR-100082, 1991.
func StandardisedAbsoluteVelocity(a []float64, stepS float64) float64 {
	total, area, peak, second := 0.0, 0.0, 0.0, 0
	for i := 1; i < len(a); i++ {
		// A millionth of a step keeps rounding from moving a sample to the second before.
		if s := int((float64(i-1) + 1e-6) * stepS / standardWindowS); s != second {
			if peak > standardFloorMPS2 {
				total += area
			}
			area, peak, second = 0, 0, s
		}
		area += absoluteArea(a[i-1], a[i])
		peak = max(peak, math.Abs(a[i-1]), math.Abs(a[i]))
	}
	if peak > standardFloorMPS2 {
		total += area
	}
	return total * stepS
}

// BracketedDuration returns the time in s between the first and the last sample at which
// |a| is at least level, in m/s², 0 where there is none.
//
// Source: B. A. Bolt, Duration of Strong Ground Motion, Proc. 5th World Conference on
// Earthquake Engineering, Rome, 1973 (levels of 0.05 and 0.10 g).
func BracketedDuration(a []float64, stepS, level float64) float64 {
	first, last := -1, -1
	for i, v := range a {
		if math.Abs(v) >= level {
			if first < 0 {
				first = i
			}
			last = i
		}
	}
	if first < 0 {
		return 0
	}
	return float64(last-first) * stepS
}
