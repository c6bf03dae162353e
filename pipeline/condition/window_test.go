package condition

import (
	"math"
	"testing"
)

// A slope that is there before the motion goes, as far as the window tells, from all of
// it; the motion after it does not count.
func TestWindows(t *testing.T) {
	const stepS = 0.01
	clean := motion(6, stepS, 20, 0.4, 12)
	x := make([]float64, len(clean))
	for i, v := range clean {
		x[i] = v + 0.02 + 1e-5*float64(i)
		if i > 6000 {
			x[i] += 0.5 // moves the mean of the whole
		}
	}
	for _, test := range []struct {
		step          Step
		before, after float64 // what is left, at 10 and at 50 s
	}{
		{Step{Do: KindMean, Window: WindowStated, FromS: 5, ToS: 15}, 0, 0.04},
		{Step{Do: KindTrend, Degree: 1, Window: WindowStated, FromS: 5, ToS: 15}, 0, 0},
		{Step{Do: KindTrend, Degree: 1, Window: WindowPreEvent}, 0, 0},
	} {
		got, err := step(test.step).Apply(raw(x, stepS))
		if err != nil {
			t.Fatal(err)
		}
		for i, want := range map[int]float64{1000: test.before, 5000: test.after} {
			if left := got.Acceleration[i] - clean[i]; math.Abs(left-want) > 1e-3 {
				t.Errorf("%+v: %g is left in sample %d, want %g", test.step, left, i, want)
			}
		}
	}
	whole, err := step(Step{Do: KindTrend, Degree: 1}).Apply(raw(x, stepS))
	if err != nil || math.Abs(whole.Acceleration[5000]-clean[5000]) < 0.05 {
		t.Errorf("the line of the whole leaves %g, %v", whole.Acceleration[5000]-clean[5000], err)
	}
	_, err = step(Step{Do: KindMean, Window: WindowStated, FromS: 70, ToS: 90}).Apply(raw(x, stepS))
	if err == nil || err.Error() != "step 1 (mean): the window takes samples 7001 to 9001 of 8000, which must be there and 10 at least" {
		t.Errorf("beyond the end: %v", err)
	}
}
