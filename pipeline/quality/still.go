package quality

import (
	"math"

	"swaybook/pipeline/signal"
)

// still looks whether equal samples up to the end stand where motion was lost, and leaves
// in y what is left to look at: all where nothing was lost, so that pads behind a motion
// that has ended, or was tapered, count as rest.
func (a *assessment) still() {
	from := len(a.x) - 1
	for from > 0 && a.x[from-1] == a.x[from] {
		from--
	}
	count := len(a.x) - from
	need := max(stillCount, int(math.Ceil(stillS/a.stepS)))
	if count >= need && from >= max(need, a.second()) && from > a.onset {
		a.y = settled(a.x[:from], a.stepS)
		if share, ok := a.goesOn(need); ok {
			runS := float64(count) * a.stepS
			a.add(FlagLostData, runS, stillS, "%.3g s of equal samples up to the end, after a second of %.2g of the strongest second's root mean square: lost data?", runS, share)
			return
		}
	}
	a.y = settled(a.x, a.stepS)
}

// goesOn reports whether there is motion at the end of y, by its last second, and whether
// it stops there: whether the n samples before are farther off what follows than motion
// that comes to rest, or turns, may be. A parabola that stays within a step of the
// resolution for n samples, ten or more, has been 11.4 steps away n samples before at most,
// rounding counted.
func (a *assessment) goesOn(n int) (share float64, ok bool) {
	end := len(a.y)
	last := signal.RootMeanSquare(a.y[end-a.second():])
	share = last / signal.Greatest(signal.RootMeanSquares(a.y, a.second()))
	if !(share >= quietShare) || last < overNoise*a.noise() {
		return share, false
	}
	off := 0.0
	for _, v := range a.x[end-n : end] {
		off = max(off, math.Abs(v-a.x[end]))
	}
	return share, off > max(stopShare*last, stopSteps*signal.Resolution(a.x))
}
