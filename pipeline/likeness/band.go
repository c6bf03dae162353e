package likeness

import (
	"math"
	"swaybook/pipeline/internal/elementary"
)

// What processing takes from a motion, such as the drift of its baseline and noise,
// is in one version and not in another. Motions are therefore also compared between
// two corners, inside of which every usual version has what the motion had.
const (
	lowHz     = 1.0
	highHz    = 10.0
	ofNyquist = 0.6 // the share of the Nyquist frequency above which the high corner never is
	// quiet is how small the rest of a motion between the corners may be against its
	// peak: less may be rounding.
	quiet = 1e-9
)

// cornerOf is the high corner for samples at this step.
func cornerOf(stepS float64) float64 { return min(highHz, ofNyquist*0.5/stepS) }

// banded returns the motion between lowHz and a high corner, without a shift of
// phase: through Butterworth filters of second order, forward and backward. It is
// nil where the corners leave less than an octave or there is nothing between them.
func (m *Motion) banded(cornerHz float64) *Motion {
	if cornerHz < 2*lowHz || m.stepS < 1e-5 || m.still() { // coefficients lose their digits at tiny steps
		return nil
	}
	x := m.centred(nil)
	zeroPhase(x, highPass(lowHz*m.stepS), lowPass(cornerHz*m.stepS))
	b, err := describe(x, m.stepS)
	if err != nil || b.unit > 1/quiet {
		return nil
	}
	return b
}

// section is a filter of second order, of which gain is that of a constant:
//
//	y[i] = b0·(x[i] + x[i−2]) + b1·x[i−1] − a1·y[i−1] − a2·y[i−2]
type section struct{ b0, b1, a1, a2, gain float64 }

// lowPass is the Butterworth filter of second order by the bilinear transform with
// the corner, in cycles a sample, prewarped.
func lowPass(corner float64) section {
	w := elementary.TanPi(corner)
	a0 := 1 + float64(math.Sqrt2*w) + float64(w*w)
	b := float64(w*w) / a0
	return section{b0: b, b1: 2 * b, a1: 2 * (float64(w*w) - 1) / a0, a2: (1 - float64(math.Sqrt2*w) + float64(w*w)) / a0, gain: 1}
}

// highPass is the filter beside lowPass that passes what lies above the corner.
func highPass(corner float64) section {
	s := lowPass(corner)
	w := elementary.TanPi(corner)
	s.b0 = 1 / (1 + float64(math.Sqrt2*w) + float64(w*w))
	s.b1, s.gain = -2*s.b0, 0
	return s
}

// zeroPhase filters x in place by both sections, forward and then backward, each time
// as if it had always been what it is at first.
func zeroPhase(x []float64, high, low section) {
	first, second := high.from(x[0]), low.from(float64(high.gain*x[0]))
	for i, v := range x {
		x[i] = second.next(first.next(v))
	}
	last := x[len(x)-1]
	first, second = high.from(last), low.from(float64(high.gain*last))
	for i := len(x) - 1; i >= 0; i-- {
		x[i] = second.next(first.next(x[i]))
	}
}

// filter is a section with what it had before.
type filter struct {
	section
	x1, x2, y1, y2 float64
}

func (s section) from(x float64) filter {
	y := float64(s.gain * x)
	return filter{s, x, x, y, y}
}

func (f *filter) next(x float64) float64 {
	// The last product is the one that waits for the step before.
	y := float64(f.b0*(x+f.x2)) + float64(f.b1*f.x1) - float64(f.a2*f.y2) - float64(f.a1*f.y1)
	f.x1, f.x2, f.y1, f.y2 = x, f.x1, y, f.y1
	return y
}
