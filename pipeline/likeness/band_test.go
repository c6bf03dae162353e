package likeness

import (
	"math"
	"testing"
)

// TestBandInClosedForm filters sines. Both ways, a Butterworth filter of second order
// has the gain 1/(1 + r⁴) and turns no phase, where r is the frequency over the corner,
// of the low pass, or the corner over the frequency, both as tan(π·f·step) by the
// bilinear transform.
func TestBandInClosedForm(t *testing.T) {
	for _, step := range []float64{0.005, 0.01, 0.02, 0.05} {
		high := cornerOf(step)
		for _, hz := range []float64{0.2, 0.7, 1, 3, high, 0.9 / (2 * step)} {
			warp := func(f float64) float64 { return math.Tan(math.Pi * f * step) }
			want := 1 / (1 + math.Pow(warp(lowHz)/warp(hz), 4)) / (1 + math.Pow(warp(hz)/warp(high), 4))
			n := int(60 / step)
			x := make([]float64, n)
			for i := range x {
				x[i] = math.Sin(2 * math.Pi * hz * float64(i) * step)
			}
			zeroPhase(x, highPass(lowHz*step), lowPass(high*step))
			for i := n / 3; i < 2*n/3; i++ { // the ends have come to rest there
				if got, w := x[i], want*math.Sin(2*math.Pi*hz*float64(i)*step); math.Abs(got-w) > 1e-9 {
					t.Errorf("%v Hz at a step of %v s: sample %d is %v, want %v", hz, step, i, got, w)
					break
				}
			}
		}
	}
}

// TestNothingInTheBand: constants, and samples too far or too near, leave nothing.
func TestNothingInTheBand(t *testing.T) {
	x := invented(t, 5, 20e3, 1)
	for _, c := range []struct {
		name  string
		x     []float64
		stepS float64
	}{
		{"constant", changed(x, 0, 3), 0.01},
		{"one sample", x[:1], 0.01},
		{"a step of 0.2 s", x, 0.2},
		{"a step of a nanosecond", x, 1e-9},
	} {
		if m := motion(t, c.x, c.stepS); m.inBand() != nil {
			t.Errorf("%s: a band of %d samples with the unit %v", c.name, len(m.inBand().samples), m.inBand().unit)
		}
	}
}

// TestRampInTheBand: far from its ends, a ramp leaves nothing, and so two ramps have no
// motion in common.
func TestRampInTheBand(t *testing.T) {
	straight := make([]float64, 4000)
	for i := range straight {
		straight[i] = 5 + 0.25*float64(i)
	}
	a, b := motion(t, straight, 0.01), motion(t, changed(straight, -3, 7), 0.01)
	inBand := a.inBand()
	if inBand == nil {
		t.Fatal("no band: want the ends of the ramp")
	}
	for i, y := range inBand.samples[1000:3000] {
		if math.Abs(y) > 1e-9 {
			t.Fatalf("sample %d of a ramp is %v in the band, want 0", 1000+i, y)
		}
	}
	if v := new(Comparer).Compare(a, b); v.Kind != Different {
		t.Errorf("two ramps: %+v, want different", v)
	}
}
