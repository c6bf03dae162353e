package likeness

import "math"

// mostRatio is the greatest ratio of steps that is compared. Records are kept at 20
// to 1000 Hz, versions of one at half or a quarter of its rate.
const mostRatio = 10

// steps returns how many steps of stepS make one of the coarser motion: the finer
// step where that is a whole part of the coarser one, else the next smaller that is.
func steps(coarse, fine *Motion) (ratio int, stepS float64, reason string) {
	quotient := coarse.stepS / fine.stepS
	if quotient > mostRatio {
		return 0, 0, "steps differ more than tenfold"
	}
	whole := math.Round(quotient)
	// Headers round steps: the last sample may be off by a tenth of a step.
	length := min(float64(len(coarse.samples))*quotient, float64(len(fine.samples)))
	if math.Abs(quotient-whole)/quotient*length <= 0.1 {
		return int(whole), fine.stepS, ""
	}
	ratio = int(math.Ceil(quotient))
	return ratio, coarse.stepS / float64(ratio), ""
}

// resampled appends x, taken at every step, to dst at another step, counted in those
// of x and at most 1, by Lagrange's cubic through the two samples on either side; at
// the ends through the nearest four. Below a fifth of the sampling rate it errs by at
// most 3 % of an oscillation.
func resampled(dst, x []float64, step float64) []float64 {
	if len(x) < 4 {
		return append(dst, x...)
	}
	n := int(float64(len(x)-1)/step) + 1
	for i := range n {
		at := float64(float64(i) * step)
		first := min(max(int(at)-1, 0), len(x)-4)
		t := at - float64(first) - 1 // of the cubic's samples at −1, 0, 1, 2
		y := x[first : first+4]
		v := float64(-t*(t-1)*(t-2)/6*y[0]) + float64((t+1)*(t-1)*(t-2)/2*y[1])
		v += float64(-(t+1)*t*(t-2)/2*y[2]) + float64((t+1)*t*(t-1)/6*y[3])
		dst = append(dst, v)
	}
	return dst
}
