package signal

import (
	"fmt"
	"math"

	"swaybook/pipeline/internal/elementary"
)

// section is one recursive filter of second order,
//
//	y[n] = b0·x[n] + b1·x[n-1] + b2·x[n-2] - a1·y[n-1] - a2·y[n-2],
//
// or of first order, where b2 and a2 are 0.
type section struct{ b0, b1, b2, a1, a2 float64 }

// Filter is a Butterworth filter in sections of second order at most, which loses
// fewer digits than one polynomial.
type Filter struct {
	sections []section
	// order and cornerHz are those of one passage, of a band the lower corner.
	order    int
	cornerHz float64
}

// MaxOrder is the highest order of a filter, of one passage.
const MaxOrder = 8

// LowPass returns the Butterworth low-pass filter of an order from 1 to MaxOrder for
// samples a step of stepS seconds apart. One passage leaves 1/√2 of the amplitude at
// cornerHz, which lies between 0 and half the sampling rate. The error says which
// argument is out of range.
//
// The analogue prototype is taken to z by the bilinear transform, with the corner
// warped so that it stays where it is.
//
// Source: S. Butterworth, On the Theory of Filter Amplifiers, Experimental Wireless 7,
// 1930; A. V. Oppenheim and R. W. Schafer, Discrete-Time Signal Processing, 3rd ed.,
// section 7.2.2, for the bilinear transform (from memory).
func LowPass(order int, cornerHz, stepS float64) (Filter, error) {
	return design(order, cornerHz, stepS, false)
}

// HighPass is LowPass for what is above cornerHz.
func HighPass(order int, cornerHz, stepS float64) (Filter, error) {
	return design(order, cornerHz, stepS, true)
}

// design turns each pair of the prototype's poles, exp(±iθ) with damping q = cos θ off
// the negative axis, into a section: 1/(s² + 2qs + 1) for what is low, s²/(s² + 2qs + 1)
// for what is high, s in units of the corner. An odd order has 1/(s + 1) or s/(s + 1)
// besides.
func design(order int, cornerHz, stepS float64, high bool) (Filter, error) {
	if err := checkDesign(order, cornerHz, stepS); err != nil {
		return Filter{}, err
	}
	w := elementary.TanPi(cornerHz * stepS)
	f := Filter{order: order, cornerHz: cornerHz}
	for k := range order / 2 {
		q, _ := elementary.SincosPi(float64(2*k+1) / float64(2*order))
		f.sections = append(f.sections, second(w, q, high))
	}
	if order%2 == 1 {
		f.sections = append(f.sections, first(w, high))
	}
	return f, nil
}

func checkDesign(order int, cornerHz, stepS float64) error {
	if order < 1 || order > MaxOrder {
		return fmt.Errorf("order %d is outside 1 to %d", order, MaxOrder)
	}
	nyquist := 0.5 / stepS
	if !(stepS > 0) || !(cornerHz > 0 && cornerHz < nyquist) {
		return fmt.Errorf("corner of %g Hz is outside 0 to %g Hz, half the sampling rate", cornerHz, nyquist)
	}
	return nil
}

// BandPass is LowPass for what is between two corners, of which one passage leaves 1/√2 of
// the amplitude each. It has as many sections as the order says, and falls off on either
// side as a filter of that order.
//
// The prototype's s becomes (s² + w₁w₂)/((w₂ - w₁)·s), w₁ and w₂ the warped corners: of each
// of its poles p two come, the roots of s² - p·(w₂ - w₁)·s + w₁w₂.
//
// Source: A. V. Oppenheim and R. W. Schafer, Discrete-Time Signal Processing, 3rd ed.,
// section 7.2 and appendix B (from memory).
func BandPass(order int, lowHz, highHz, stepS float64) (Filter, error) {
	if !(lowHz < highHz) {
		return Filter{}, fmt.Errorf("corner of %g Hz is not below %g Hz", lowHz, highHz)
	}
	for _, corner := range []float64{lowHz, highHz} {
		if err := checkDesign(order, corner, stepS); err != nil {
			return Filter{}, err
		}
	}
	w1, w2 := elementary.TanPi(lowHz*stepS), elementary.TanPi(highHz*stepS)
	band, middle := w2-w1, float64(w1*w2)
	f := Filter{order: order, cornerHz: lowHz}
	for k := range order / 2 {
		sin, cos := elementary.SincosPi(float64(2*k+1) / float64(2*order))
		half := complex(-float64(float64(sin*band)/2), float64(float64(cos*band)/2))
		far := half + farRoot(half, middle)
		square := squareOf(far)
		// The near root is middle/far, since the difference would lose digits.
		f.sections = append(f.sections,
			between(band, float64(-2*real(far))*middle/square, float64(middle*middle)/square),
			between(band, float64(-2*real(far)), square))
	}
	if order%2 == 1 {
		f.sections = append(f.sections, between(band, band, middle))
	}
	return f, nil
}

// farRoot is that of √(half² - middle) which is on the side of half.
func farRoot(half complex128, middle float64) complex128 {
	re, im := real(half), imag(half)
	re, im = root(float64(re*re)-float64(im*im)-middle, float64(2*re*im))
	if float64(re*real(half))+float64(im*imag(half)) < 0 {
		re, im = -re, -im
	}
	return complex(re, im)
}

// root is the square root of re + im·i that lies on the side of positive numbers.
func root(re, im float64) (float64, float64) {
	large := math.Sqrt((elementary.Hypot(re, im) + math.Abs(re)) / 2)
	if large == 0 {
		return 0, 0
	}
	small := math.Abs(im) / (2 * large)
	if re < 0 {
		large, small = small, large
	}
	return large, math.Copysign(small, im)
}

func squareOf(a complex128) float64 {
	return float64(real(a)*real(a)) + float64(imag(a)*imag(a))
}

// between is band·s/(s² + c·s + d).
func between(band, c, d float64) section {
	scale := 1 / (1 + c + d)
	return section{b0: band * scale, b2: -band * scale, a1: 2 * (d - 1) * scale, a2: (1 - c + d) * scale}
}

// second has w, the tangent of half the corner's angle, and the damping q.
func second(w, q float64, high bool) section {
	ww := float64(w * w)
	scale := 1 / (1 + float64(2*q*w) + ww)
	s := section{a1: 2 * (ww - 1) * scale, a2: (1 - float64(2*q*w) + ww) * scale}
	if high {
		s.b0, s.b1, s.b2 = scale, -2*scale, scale
	} else {
		s.b0, s.b1, s.b2 = ww*scale, 2*ww*scale, ww*scale
	}
	return s
}

func first(w float64, high bool) section {
	scale := 1 / (1 + w)
	s := section{a1: (w - 1) * scale}
	if high {
		s.b0, s.b1 = scale, -scale
	} else {
		s.b0, s.b1 = w*scale, w*scale
	}
	return s
}

// PadS returns the length in s of the zeros that the motion needs at either end, so
// that what both passages make of it has died away there: 1.5·n/f, n the order of both
// passages and f the corner.
//
// Source: D. M. Boore, On Pads and Filters: Processing Strong-Motion Data, BSSA 95(2),
// 2005, for the length (from memory), taken here at each end.
func (f Filter) PadS() float64 { return 1.5 * float64(2*f.order) / f.cornerHz }

// TwoWay filters x forward and then backward in place, from rest each time, so that no
// phase is shifted and the amplitude is that of one passage squared: a half at the
// corner. What rings beyond either end is lost; give x zeros there (PadS).
//
// The cost is one pass over x for each section and direction.
func (f Filter) TwoWay(x []float64) {
	f.OneWay(x)
	for _, s := range f.sections {
		s.backward(x)
	}
}

// forward is the transposed second direct form, whose state is two sums.
func (s section) forward(x []float64) {
	var u, v float64
	for i, in := range x {
		out := float64(s.b0*in) + u
		u = float64(s.b1*in) - float64(s.a1*out) + v
		v = float64(s.b2*in) - float64(s.a2*out)
		x[i] = out
	}
}

// OneWay filters x forward alone, from rest, so that nothing moves ahead of its cause
// and phases are shifted.
func (f Filter) OneWay(x []float64) {
	for _, s := range f.sections {
		s.forward(x)
	}
}

func (s section) backward(x []float64) {
	var u, v float64
	for i := len(x) - 1; i >= 0; i-- {
		in := x[i]
		out := float64(s.b0*in) + u
		u = float64(s.b1*in) - float64(s.a1*out) + v
		v = float64(s.b2*in) - float64(s.a2*out)
		x[i] = out
	}
}
