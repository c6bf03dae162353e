package condition

import (
	"math"
	"strings"
	"testing"
)

func exceeded(c Conditioned) string {
	var flags []string
	for _, e := range c.Exceeded {
		flags = append(flags, e.Flag)
	}
	return strings.Join(flags, " ")
}

// Two opposite steps of the velocity leave a displacement, one leaves both; the numbers
// follow from the areas.
func TestIntegrationCheck(t *testing.T) {
	const stepS = 0.01
	pulses := func(second float64) []float64 {
		x := make([]float64, 1001)
		x[100], x[300] = 1, second // velocity 0.01 from 1 s on, 0.01·(1 + second) from 3 s on
		return x
	}
	check := Step{Do: KindCheck, VelocityShare: 0.1, DisplacementShare: 0.1}
	for _, test := range []struct {
		name     string
		second   float64
		check    Step
		want     string
		velocity float64
	}{
		{"one pulse", 0, check, FlagFinalVelocity + " " + FlagFinalDisplacement, 1},
		{"two pulses", -1, check, FlagFinalDisplacement, 0},
		{"velocity alone", 0, Step{Do: KindCheck, VelocityShare: 0.1}, FlagFinalVelocity, 1},
		{"displacement alone", 0, Step{Do: KindCheck, DisplacementShare: 0.1}, FlagFinalDisplacement, 0},
		{"a fifth", -0.8, check, FlagFinalVelocity + " " + FlagFinalDisplacement, 0.2},
		{"a fifth is allowed", -0.8, Step{Do: KindCheck, VelocityShare: 0.201}, "", 0},
	} {
		got, err := step(test.check).Apply(raw(pulses(test.second), stepS))
		if err != nil || exceeded(got) != test.want {
			t.Errorf("%s: %q, want %q, %v", test.name, exceeded(got), test.want, err)
		}
		if test.velocity != 0 && !(math.Abs(got.Exceeded[0].Value-test.velocity) < 1e-12 && got.Exceeded[0].Bound == 0.1) {
			t.Errorf("%s: %+v, want %g", test.name, got.Exceeded[0], test.velocity)
		}
	}
}

// The check changes nothing, and looks at the motion as the steps before it have left it,
// with the pads, where the filters' tails are.
func TestIntegrationCheckSeesTheStepsBefore(t *testing.T) {
	x := recorded(2, motion(2, 0.01, 20, 0.4, 12))
	check := Step{Do: KindCheck, VelocityShare: 0.01, DisplacementShare: 0.05}
	highPass := Step{Do: KindHighPass, Order: 4, CornerHz: 0.1}
	for _, test := range []struct {
		steps []Step
		want  string
	}{
		{[]Step{check}, FlagFinalVelocity + " " + FlagFinalDisplacement},
		{[]Step{check, highPass}, FlagFinalVelocity + " " + FlagFinalDisplacement},
		{[]Step{highPass, check}, ""},
	} {
		r := Recipe{Name: "own", States: []string{"raw"}, Steps: test.steps}
		got, err := r.Apply(raw(x, 0.01))
		if err != nil || exceeded(got) != test.want {
			t.Errorf("%+v: %+v, want %q, %v", test.steps, got.Exceeded, test.want, err)
		}
	}
	with, err := Standard().Apply(raw(x, 0.01))
	without := Standard()
	without.Steps = without.Steps[:len(without.Steps)-1]
	bare, errBare := without.Apply(raw(x, 0.01))
	if err != nil || errBare != nil || len(with.Acceleration) != len(bare.Acceleration) {
		t.Fatalf("%v, %v: %d samples, %d without the check", err, errBare, len(with.Acceleration), len(bare.Acceleration))
	}
	for i, v := range bare.Acceleration {
		if with.Acceleration[i] != v {
			t.Fatalf("sample %d changes from %g to %g", i, v, with.Acceleration[i])
		}
	}
}

// The standard recipe leaves invented motions far within its limits.
func TestStandardEndsAtRest(t *testing.T) {
	worst := map[string]float64{}
	strictest := Standard()
	strictest.Steps[len(strictest.Steps)-1] = Step{Do: KindCheck, VelocityShare: 1e-12, DisplacementShare: 1e-12}
	for seed := range uint64(8) {
		x := recorded(seed, motion(seed, 0.01, 20, 0.15, 12))
		got, err := Standard().Apply(raw(x, 0.01))
		if err != nil || len(got.Exceeded) > 0 {
			t.Errorf("seed %d: %+v, %v", seed, got.Exceeded, err)
		}
		measured, err := strictest.Apply(raw(x, 0.01))
		if err != nil {
			t.Fatal(err)
		}
		for _, e := range measured.Exceeded {
			worst[e.Flag] = max(worst[e.Flag], e.Value)
		}
	}
	t.Logf("shares at most %v", worst)
}
