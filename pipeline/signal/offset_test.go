package signal

import (
	"math"
	"testing"
)

// Of a baseline that is a parabola and a step, with a motion between that ends at rest,
// both come back to rounding; without a step, and without room to tell, there is none.
func TestFindOffset(t *testing.T) {
	const n, stepS, quiet, rest = 4000, 0.01, 1000, 2500
	invented := func(size, atS float64) []float64 {
		x := make([]float64, n)
		for i := range x {
			at := float64(i) / n
			x[i] = 0.3 - 0.2*at + 0.1*at*at
			if i > quiet && i < rest {
				x[i] += math.Sin(2 * math.Pi * float64(i-quiet) / (rest - quiet) * 5) // five cycles
			}
			if float64(i)*stepS >= atS {
				x[i] += size
			}
		}
		return x
	}
	for _, size := range []float64{-0.5, 1e-3} {
		o, ok := FindOffset(invented(size, 17), stepS, quiet, rest)
		// The trapezoid puts the step half a sample before its first one.
		if !ok || math.Abs(o.Size/size-1) > 1e-3 || math.Abs(o.TimeS-17+stepS/2) > 1e-3*stepS/math.Abs(size) || !(o.Gain > 1e3) || !(o.OverSmooth > 10) {
			t.Errorf("step %g: %+v, %v", size, o, ok)
		}
	}
	if o, ok := FindOffset(invented(0, 17), stepS, quiet, rest); ok && o.Gain > 10 {
		t.Errorf("no step: %+v", o)
	}
	swinging := invented(0, 17)
	for i := range swinging {
		swinging[i] += 0.01 * math.Sin(2*math.Pi*float64(i)/n)
	}
	if o, _ := FindOffset(swinging, stepS, quiet, rest); !(o.OverSmooth < 1) {
		t.Errorf("a swing as long as the record: %+v", o)
	}
	for _, atS := range []float64{5, 30} {
		if o, ok := FindOffset(invented(0.5, atS), stepS, quiet, rest); ok && o.Gain > 10 {
			t.Errorf("a step at %g s, outside the motion: %+v", atS, o)
		}
	}
	for _, parts := range [][2]int{{5, rest}, {quiet, n - 5}, {rest, quiet}} {
		if _, ok := FindOffset(invented(0.5, 17), stepS, parts[0], parts[1]); ok {
			t.Errorf("parts %v are enough", parts)
		}
	}
	if _, ok := FindOffset(make([]float64, n), stepS, quiet, rest); ok {
		t.Error("a step in nothing")
	}
}

func TestEndOf(t *testing.T) {
	x := make([]float64, 1000)
	for i := 300; i < 400; i++ {
		x[i] = math.Sin(float64(i)) // ten times faster than the corner of what is slow
	}
	if at := EndOf(x, 0.01, 0.5); at < 345 || at > 355 {
		t.Errorf("half of the squares up to sample %d", at)
	}
	if at := EndOf(make([]float64, 20), 0.01, 0.5); at != 0 {
		t.Errorf("of nothing %d", at)
	}
}
