package quality

import (
	"math"
	"testing"

	"swaybook/pipeline/condition"
)

// What a recipe mends is not found behind it, and what it does not mend is, whatever
// steps it has.
func TestWhatRemainsIsMeasured(t *testing.T) {
	good := motion()
	drifting := make([]float64, len(good))
	for i, v := range good {
		along := float64(i) / float64(len(good))
		drifting[i] = v + 0.05*along*along
	}
	offset := make([]float64, len(good))
	for i, v := range good {
		offset[i] = v + 0.05
	}
	mean := condition.Step{Do: condition.KindMean, Window: condition.WindowWhole}
	taper := condition.Step{Do: condition.KindTaper, Share: 0.01}
	highPass := condition.Step{Do: condition.KindHighPass, Order: 4, CornerHz: 0.1}
	parabola := condition.Step{Do: condition.KindTrend, Degree: 2}
	for _, test := range []struct {
		name  string
		x     []float64
		steps []condition.Step
		want  string
	}{
		{"good, tapered", good, []condition.Step{taper}, ""},
		{"drifting, tapered", drifting, []condition.Step{taper}, "baseline_step drift"},
		{"drifting, its mean taken off", drifting, []condition.Step{mean}, "baseline_step"}, // the velocity comes back to 0
		{"drifting, the parabola taken off", drifting, []condition.Step{parabola}, ""},
		{"drifting, filtered", drifting, []condition.Step{mean, taper, highPass}, ""},
		{"offset, its mean taken off", offset, []condition.Step{mean}, ""},
		{"drifting, the standard", drifting, condition.Standard().Steps, ""},
	} {
		r := condition.Recipe{Name: "invented", States: []string{"raw"}, Steps: test.steps}
		got, err := r.Apply(condition.Component{Acceleration: test.x, StepS: stepS, State: "raw", LowCutHz: math.NaN(), HighCutHz: math.NaN()})
		if err != nil {
			t.Fatal(err)
		}
		found := AssessConditioned(got.Acceleration, got.StepS, 1000+int(math.Round(got.LeadS/got.StepS)))
		if flags(found) != test.want {
			t.Errorf("%s: %q, want %q: %+v", test.name, flags(found), test.want, found)
		}
	}
}

func TestNothingRemainsOfNothing(t *testing.T) {
	if got := AssessConditioned(nil, stepS, 0); got != nil {
		t.Errorf("%v", got)
	}
}
