package demo

import (
	"math"
	"strings"
	"testing"
)

func TestAppendScaled(t *testing.T) {
	for _, c := range []struct {
		v               int64
		decimals, width int
		want            string
	}{
		{1234567, 4, 10, "  123.4567"},
		{-1234567, 4, 10, " -123.4567"},
		{123, 4, 10, "     .0123"},
		{-3, 4, 10, "    -.0003"},
		{0, 4, 10, "     .0000"},
		{10000, 4, 10, "    1.0000"},
		{-99999999, 4, 10, "-9999.9999"},
		{0, 0, 5, "    0"},
		{-999, 0, 5, " -999"},
		{71011, 0, 5, "71011"},
		{123456, 0, 5, "123456"}, // too wide: takes the room it needs
	} {
		if got := string(appendScaled(nil, c.v, c.decimals, c.width)); got != c.want {
			t.Errorf("appendScaled(%d, %d, %d) = %q, want %q", c.v, c.decimals, c.width, got, c.want)
		}
	}
}

func TestAppendFortranE(t *testing.T) {
	for _, c := range []struct {
		v    float64
		want string
	}{
		{0, "   .0000000E+00"},
		{0.1, "   .1000000E+00"},
		{-0.01234567, "  -.1234567E-01"},
		{1, "   .1000000E+01"},
		{9.99999996, "   .1000000E+02"}, // rounds up to the next power of ten
		{1.5e-10, "   .1500000E-09"},
	} {
		if got := string(appendFortranE(nil, c.v)); got != c.want {
			t.Errorf("appendFortranE(%g) = %q, want %q", c.v, got, c.want)
		}
	}
}

func TestFixed(t *testing.T) {
	for _, c := range []struct {
		v        float64
		decimals int
		want     string
	}{
		{0.15, 2, ".15"}, {-0.15, 2, "-.15"}, {40, 2, "40.00"}, {0, 3, ".000"}, {-999, 1, "-999.0"}, {10, 0, "10"}, {0, 0, "0"},
	} {
		if got := fixed(c.v, c.decimals); got != c.want {
			t.Errorf("fixed(%g, %d) = %q, want %q", c.v, c.decimals, got, c.want)
		}
	}
}

// The real headers of V2 print as many digits as ten columns hold.
func TestDecimalsFor(t *testing.T) {
	for _, c := range []struct {
		v    float64
		want string
	}{
		{0.022, "  .0220000"}, {-999, "-999.00000"}, {37.573, " 37.573000"}, {-118.738, "-118.73800"}, {1250, " 1250.0000"},
	} {
		if got := string(appendFixed(nil, c.v, decimalsFor(c.v))); got != c.want {
			t.Errorf("real header value %g prints %q, want %q", c.v, got, c.want)
		}
	}
}

func TestCard(t *testing.T) {
	c := newCard().put(1, "Chan").putInt(8, 12).putFixed(14, 0.005, 3).put(78, "overflow")
	want := "Chan  12  .005" + strings.Repeat(" ", 63) + "ove"
	if got := string(c[:]); got != want {
		t.Errorf("card is %q, want %q", got, want)
	}
}

func TestPeak(t *testing.T) {
	if at := peak([]int32{1, -5, 5, 2}); at != 1 {
		t.Errorf("peak is at %d, want 1, the first of equals", at)
	}
	if at := peak([]float64{0.5, 0.25, -0.75}); at != 2 {
		t.Errorf("peak is at %d, want 2", at)
	}
}

// A constant acceleration of 1 cm/s² gives v = t and d = t²/2; the trapezoidal
// sum of a straight line is exact, that of v adds nothing.
func TestIntegrate(t *testing.T) {
	const rate = 50
	motion := make([]int32, 101)
	for i := range motion {
		motion[i] = 1e4
	}
	v, d := integrate(motion, rate)
	for i := range motion {
		at := float64(i) / rate
		if math.Abs(v[i]-at) > 1e-12 || math.Abs(d[i]-at*at/2) > 1e-12 {
			t.Fatalf("after %g s: velocity %g cm/s, displacement %g cm, want %g and %g", at, v[i], d[i], at, at*at/2)
		}
	}
}
