package signal

import (
	"math"

	"swaybook/pipeline/internal/elementary"
)

// Power is the power of a motion by frequency, one-sided: Density[k] at k·StepHz, in
// units of the motion squared per Hz. Its integral over frequency is the mean square.
type Power struct {
	Density []float64
	StepHz  float64
}

// PowerOf returns the power of x, whose mean is taken off and whose ends are tapered
// over a twentieth of its length before; the loss by the taper is made good on average.
// Zeros follow x up to FastLength.
//
// Source: J. S. Bendat and A. G. Piersol, Random Data, 4th ed., section 11.5, for the
// periodogram of a tapered record (from memory).
func PowerOf(x []float64, stepS float64) Power {
	n := FastLength(len(x))
	tapered := append([]float64(nil), x...)
	Subtract(tapered, Mean(tapered))
	ends := len(x) / 20
	Taper(tapered, ends, ends)
	kept := float64(len(x))
	for i := range ends {
		w := bell(i, ends)
		kept -= 2 * (1 - float64(w*w))
	}
	coefficients := Transform(tapered, n)
	p := Power{Density: make([]float64, len(coefficients)), StepHz: 1 / (float64(n) * stepS)}
	for k, c := range coefficients {
		p.Density[k] = 2 * squareOf(c) * stepS / kept
	}
	p.Density[0] /= 2
	p.Density[n/2] /= 2
	return p
}

// Smooth returns the mean density from f/ratio to f·ratio at each frequency f in Hz. The
// density is the same within half a step of each frequency of p; that of the mean is
// none. NaN where the band reaches no other. It costs one sum over p and two looks into
// it for each frequency.
func (p Power) Smooth(frequenciesHz []float64, ratio float64) []float64 {
	sums := make([]float64, len(p.Density)) // up to half a step above k
	for k := 1; k < len(sums); k++ {
		sums[k] = sums[k-1] + p.Density[k]
	}
	upTo := func(position float64) float64 { // in steps, from half a step on
		k := int(position - 0.5)
		if k+1 >= len(sums) {
			return sums[len(sums)-1]
		}
		return sums[k] + float64((position-0.5-float64(k))*p.Density[k+1])
	}
	out := make([]float64, len(frequenciesHz))
	for i, f := range frequenciesHz {
		from := max(0.5, f/ratio/p.StepHz)
		to := min(float64(len(sums))-0.5, f*ratio/p.StepHz)
		if out[i] = math.NaN(); to > from {
			out[i] = (upTo(to) - upTo(from)) / (to - from)
		}
	}
	return out
}

// Onset returns the sample from which the variance of x changes most, not behind its
// greatest one: the arrival, where noise precedes the motion. It minimises
//
//	k·ln var(x[:k]) + (m-k)·ln var(x[k:m]),  2 ≤ k ≤ m-2,
//
// m the sample after the greatest, and returns 0 where x is too short for that or one
// part does not vary.
//
// Source: N. Maeda, A Method for Reading and Checking Phase Times in Auto-Processing
// System of Seismic Wave Data, Zisin 38, 1985 (from memory).
func Onset(x []float64) int {
	m, greatest := 0, -1.0
	for i, v := range x {
		if a := math.Abs(v); a > greatest {
			m, greatest = i+1, a
		}
	}
	if m < 4 {
		return 0
	}
	before, after := variances(x[:m]), variancesBackward(x[:m])
	best, least := 0, math.Inf(1)
	for k := 2; k <= m-2; k++ {
		if !(before[k] > 0) || !(after[k] > 0) {
			continue
		}
		score := float64(float64(k)*elementary.Log(before[k])) + float64(float64(m-k)*elementary.Log(after[k]))
		if score < least {
			best, least = k, score
		}
	}
	return best
}

// quick is what x has besides slow changes.
func quick(x []float64, stepS float64) []float64 {
	y := append([]float64(nil), x...)
	f, err := HighPass(1, min(arrivalCornerHz, 0.1/stepS), stepS)
	if err != nil {
		return y
	}
	Subtract(y, y[0])
	f.OneWay(y)
	return y
}

// EndOf is the sample up to which a motion x has a share of its squares, slow changes left
// out as for Arrival. x is not empty.
func EndOf(x []float64, stepS, share float64) int {
	y := quick(x, stepS)
	all := 0.0
	for _, v := range y {
		all += float64(v * v)
	}
	sum := 0.0
	for i, v := range y {
		if sum += float64(v * v); sum >= share*all {
			return i
		}
	}
	return len(x)
}

// variances are those of x[:k], by k, in one pass.
//
// Source: B. P. Welford, Note on a Method for Calculating Corrected Sums of Squares and
// Products, Technometrics 4(3), 1962.
func variances(x []float64) []float64 {
	out := make([]float64, len(x)+1)
	mean, sum := 0.0, 0.0
	for i, v := range x {
		d := v - mean
		mean += d / float64(i+1)
		sum += float64(d * (v - mean))
		out[i+1] = sum / float64(i+1)
	}
	return out
}

// variancesBackward are those of x[k:], by k.
func variancesBackward(x []float64) []float64 {
	out := make([]float64, len(x)+1)
	mean, sum := 0.0, 0.0
	for i := len(x) - 1; i >= 0; i-- {
		n := float64(len(x) - i)
		d := x[i] - mean
		mean += d / n
		sum += float64(d * (x[i] - mean))
		out[i] = sum / n
	}
	return out
}

// QuickDeviation is the root mean square of x without slow changes, as for Arrival. x is not
// empty.
func QuickDeviation(x []float64, stepS float64) float64 { return RootMeanSquare(quick(x, stepS)) }
