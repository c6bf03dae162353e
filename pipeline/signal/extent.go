package signal

import (
	"math"
	"slices"
)

// EndAbove is the sample k > from up to which a motion x stands out of its noise most,
// where
//
//	Σ (y[i]² - power),  from ≤ i < k,
//
// is greatest: y is x without slow changes, as for Arrival, and power factor times the
// mean square of y[quiet:from], or times floor where that is more. So it does not depend on
// how long a recorder ran on. It is len(x) where nothing stands out. 0 ≤ quiet ≤ from ≤
// len(x), and x is not empty.
//
// Source: E. S. Page, Continuous Inspection Schemes, Biometrika 41, 1954, for the sum
// whose extreme marks a change (from memory).
func EndAbove(x []float64, stepS float64, quiet, from int, floor, factor float64) int {
	y := quick(x, stepS)
	noise := 0.0
	for _, v := range y[quiet:from] {
		noise += float64(v * v)
	}
	power := float64(factor * max(floor, noise/float64(max(1, from-quiet))))
	end, sum, top := len(x), 0.0, 0.0
	for i := from; i < len(y); i++ {
		if sum += float64(y[i]*y[i]) - power; sum > top {
			end, top = i+1, sum
		}
	}
	return end
}

// QuietestPower is the mean square of the second of x that has the least, slow changes left
// out as for Arrival; 0 where x has none.
func QuietestPower(x []float64, stepS float64) float64 {
	if len(x) == 0 {
		return 0
	}
	seconds := RootMeanSquares(quick(x, stepS), max(1, int(math.Round(1/stepS))))
	if len(seconds) == 0 {
		return 0
	}
	least := slices.Min(seconds)
	return least * least
}

// Resolution is the smallest step between neighbouring samples that is not 0: a
// digitiser's count, or a unit of the last digit written. 0 where there is none.
func Resolution(x []float64) float64 {
	least := math.Inf(1)
	for i := 1; i < len(x); i++ {
		if d := math.Abs(x[i] - x[i-1]); d > 0 && d < least {
			least = d
		}
	}
	if math.IsInf(least, 1) {
		return 0
	}
	return least
}

// RoundingDeviation is the standard deviation of what rounding to a resolution adds: the
// resolution over √12, of an error that is even over a step.
//
// Source: W. R. Bennett, Spectra of Quantized Signals, Bell System Technical Journal 27(3),
// 1948 (from memory).
func RoundingDeviation(resolution float64) float64 { return resolution / math.Sqrt(12) }
