package condition

import (
	"math"
	"slices"
	"testing"

	"swaybook/pipeline/signal"
)

// Zeros that a step asks for stand at either end and stay there.
func TestPad(t *testing.T) {
	x := make([]float64, 50)
	for i := range x {
		x[i] = 1 + float64(i)
	}
	got, err := step(Step{Do: KindPad, BeforeS: 0.2, AfterS: 0.305}).Apply(raw(x, 0.01))
	want := slices.Concat(make([]float64, 20), x, make([]float64, 31))
	if err != nil || !slices.Equal(got.Acceleration, want) || math.Abs(got.LeadS-0.2) > 1e-12 {
		t.Errorf("%d samples, lead %g s, %v", len(got.Acceleration), got.LeadS, err)
	}
	// A trim drops the zeros; of two steps the longer one counts, at a finer step too.
	r := step(Step{Do: KindPad, BeforeS: 0.2})
	r.Steps = append(r.Steps, Step{Do: KindTrim, FromS: 0.1}, Step{Do: KindPad, AfterS: 0.1}, Step{Do: KindPad, AfterS: 0.05})
	got, err = r.Apply(raw(x, 0.01))
	if want := slices.Concat(x[10:], make([]float64, 10)); err != nil || !slices.Equal(got.Acceleration, want) || math.Abs(got.LeadS+0.1) > 1e-12 {
		t.Errorf("%d samples, lead %g s, %v", len(got.Acceleration), got.LeadS, err)
	}
	fine := step(Step{Do: KindPad, BeforeS: 5, AfterS: 5})
	fine.Steps = append(fine.Steps, Step{Do: KindOversample, Factor: 2})
	got, err = fine.Apply(raw(make([]float64, 50), 0.01))
	if err != nil || math.Abs(got.LeadS-5) > 1e-9 || len(got.Acceleration) != 1000+99+1000 {
		t.Errorf("%d samples, lead %g s, %v", len(got.Acceleration), got.LeadS, err)
	}
}

// Where a filter finds longer pads than its own, it makes the same motion of what was
// recorded, and where it finds shorter ones it adds to them.
func TestPadsServeFilters(t *testing.T) {
	x := motion(3, 0.01, 5, 0.4, 12)
	highPass := Step{Do: KindHighPass, Order: 2, CornerHz: 0.5}
	alone, err := step(highPass).Apply(raw(x, 0.01))
	if err != nil {
		t.Fatal(err)
	}
	for _, padS := range []float64{1, 40} {
		r := step(Step{Do: KindPad, BeforeS: padS, AfterS: padS})
		r.Steps = append(r.Steps, highPass)
		got, err := r.Apply(raw(x, 0.01))
		if err != nil || got.LeadS < padS-1e-9 || float64(len(got.Acceleration)) < float64(len(x))+2*padS/0.01 {
			t.Fatalf("%g s: lead %g s, %d samples, %v", padS, got.LeadS, len(got.Acceleration), err)
		}
		shift, off := got.SamplesBefore(alone), 0.0
		for i, v := range alone.Acceleration {
			if k := i + shift; k >= 0 && k < len(got.Acceleration) {
				off = max(off, math.Abs(got.Acceleration[k]-v))
			}
		}
		if off > 1e-6*signal.Greatest(x) {
			t.Errorf("%g s: off by %g", padS, off)
		}
	}
}
