package spectrum

import "math"

// rightAngleDeg is how far from a right angle the difference of two azimuths may
// be for rounding: azimuths are decimals of a few digits.
const rightAngleDeg = 1e-9

// Pair makes two horizontal components fit for RotD and RotDPeaks: of equal
// length and at a right angle. The shorter is followed by zeros, since the ground
// is still after the last sample; and second, measured betweenDeg degrees from
// first, is taken at a right angle to it as RightAngle does.
//
// changedA and changedB say that a or b is another motion than first or second,
// with another SD. Zeros are a change: the ground then comes to rest along the
// line to the first of them, where without them it is at rest at once.
//
// first and second keep their values, and a and b share their samples where these
// need no change. The error wraps ErrDirections.
func Pair(first, second []float64, betweenDeg float64) (a, b []float64, changedA, changedB bool, err error) {
	n := max(len(first), len(second))
	changedA, changedB = len(first) < n, len(second) < n
	a, b = followedByZeros(first, n), followedByZeros(second, n)
	if math.Abs(math.Remainder(betweenDeg-90, 180)) < rightAngleDeg {
		return a, b, changedA, changedB, nil
	}
	if b, err = RightAngle(a, b, betweenDeg); err != nil {
		return nil, nil, false, false, err
	}
	return a, b, changedA, true, nil
}

// followedByZeros returns the samples with zeros after them up to a length of n.
func followedByZeros(samples []float64, n int) []float64 {
	if len(samples) == n {
		return samples
	}
	out := make([]float64, n)
	copy(out, samples)
	return out
}
