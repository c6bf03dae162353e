package quality

import (
	"math"

	"swaybook/pipeline/signal"
)

// The filter behind which motion is told from drift: of second order, so that nothing is
// left of a slope, and causal, so that motion does not reach back into the noise. Of a
// swing of 5 s it leaves 97 % of the amplitude.
const (
	driftOrder    = 2
	driftCornerHz = 0.1
	firstS        = 2.0 // whose mean it begins from
)

// settled is a copy of x without offset, trend and slow drift: less its best parabola, and
// behind the filter.
func settled(x []float64, stepS float64) []float64 {
	y := append([]float64(nil), x...)
	signal.Detrend(y, 2)
	f, err := signal.HighPass(driftOrder, driftCornerHz, stepS)
	if err != nil {
		return y // sampled so coarsely that all is slow
	}
	signal.Subtract(y, signal.Mean(y[:min(len(y), max(1, int(math.Round(firstS/stepS))))]))
	f.OneWay(y)
	return y
}

// extent looks at where the motion begins, ends and comes back, by root mean squares of
// windows.
func (a *assessment) extent() {
	if quietS := a.quietS(); quietS < preEventS {
		a.add(FlagNoPreEvent, quietS, preEventS, "%.2g s before the arrival", quietS)
	}
	rms := signal.RootMeanSquares(a.y, a.second())
	if len(rms) < 3 {
		return
	}
	top := signal.Greatest(rms)
	if s := rms[0] / top; s > startShare {
		a.add(FlagLateStart, s, startShare, "the first second has %.2g of the strongest second's root mean square", s)
	}
	if e := rms[len(rms)-1] / top; e > endShare {
		a.add(FlagEarlyEnd, e, endShare, "the last second has %.2g of the strongest second's root mean square", e)
	}
	if at, ok := again(rms, top); ok {
		a.add(FlagSeveralEvents, float64(at)*windowS, restS, "strong motion again %d s from the first sample, after rest", at)
	}
}

// quietS is the time before the arrival in s.
func (a *assessment) quietS() float64 { return float64(a.onset) * a.stepS }

// second is the number of samples of a window.
func (a *assessment) second() int { return max(1, int(math.Round(windowS/a.stepS))) }

// again returns the window in which strong motion comes back after restS of rest.
func again(rms []float64, top float64) (at int, ok bool) {
	strong, quiet := false, 0
	for i, v := range rms {
		switch {
		case v >= againShare*top:
			if strong && float64(quiet)*windowS >= restS {
				return i, true
			}
			strong, quiet = true, 0
		case v <= quietShare*top:
			quiet++
		}
	}
	return 0, false
}
