package signal

import (
	"math"
	"slices"
)

const (
	// arrivalCornerHz is of the high-pass filter behind which an arrival is looked for, so
	// that drift is none.
	arrivalCornerHz = 1.0
	// strongShare is the share of the strongest second's root mean square from which on a
	// first second is strong motion (common practice).
	strongShare = 0.2
	// overQuiet is how many times the quietest second's root mean square a first second has
	// that is no noise (common practice).
	overQuiet = 3.0
	// overBefore is how many times the amplitude before it a motion has behind an arrival
	// that an earlier look finds (common practice), and lastsS how long in s it must last.
	overBefore = 3.0
	lastsS     = 1.0
	// leastBeforeS is the least time in s from which noise before an arrival is told.
	leastBeforeS = 0.2
)

// Arrival is the sample at which a motion x arrives, slow changes left out: behind a causal
// high-pass filter of first order at 1 Hz, or at a fifth of half the sampling rate where
// that is lower. It is 0 where x begins in strong motion. Else it is the Onset, or an
// earlier one: where P waves are followed by S waves the variance changes most with the
// latter, so the Onset of what precedes is looked for again, and taken as long as the motion
// stands out of what is before. x is not empty.
func Arrival(x []float64, stepS float64) int {
	return ArrivalOver(x, stepS, RoundingDeviation(Resolution(x)))
}

// ArrivalOver is Arrival of a motion that has been rounded and changed since: rounding is
// the standard deviation that this adds.
func ArrivalOver(x []float64, stepS, rounding float64) int {
	y := quick(x, stepS)
	if beginsStrong(x, y, stepS) {
		return 0
	}
	arrival := Onset(y)
	lasts := max(2, int(math.Round(lastsS/stepS)))
	for arrival > lasts {
		earlier := Onset(y[:arrival-lasts])
		if float64(earlier)*stepS < leastBeforeS || !standsOut(y[:earlier+lasts], earlier, rounding) {
			break
		}
		arrival = earlier
	}
	return arrival
}

// standsOut reports whether y has overBefore times the amplitude from the sample at on that
// it has before, or that rounding adds, in both halves, so that no single sample makes it so,
// and no noise that just reaches the next step of a digitiser.
func standsOut(y []float64, at int, rounding float64) bool {
	limit, middle := overBefore*max(rounding, RootMeanSquare(y[:at])), (at+len(y))/2
	return min(RootMeanSquare(y[at:middle]), RootMeanSquare(y[middle:])) > limit
}

// beginsStrong reports whether the first second of y, which is x without slow changes, is
// strong motion, and not noise of which other seconds have as much. Equal samples at the
// end, as of pads, are not counted.
func beginsStrong(x, y []float64, stepS float64) bool {
	n := len(x)
	for n > 1 && x[n-1] == x[n-2] {
		n--
	}
	seconds := RootMeanSquares(y[:n], max(1, int(math.Round(1/stepS))))
	return len(seconds) >= 3 && seconds[0] > max(float64(strongShare*Greatest(seconds)), float64(overQuiet*slices.Min(seconds)))
}

// RootMeanSquares are those of n samples of y each; what is left over at the end is in none.
func RootMeanSquares(y []float64, n int) []float64 {
	var out []float64
	for ; len(y) >= n; y = y[n:] {
		out = append(out, RootMeanSquare(y[:n]))
	}
	return out
}

// RootMeanSquare is that of y, which is not empty.
func RootMeanSquare(y []float64) float64 {
	sum := 0.0
	for _, v := range y {
		sum += float64(v * v)
	}
	return math.Sqrt(sum / float64(len(y)))
}
