package pipeline

import (
	"testing"

	"swaybook/pipeline/condition"
	"swaybook/pipeline/quality"
)

// What a step of the recipe has found and the samples show as well is one finding, the
// step's.
func TestFindingsOfStepsAreThereOnce(t *testing.T) {
	x := make([]float64, 4000)
	for i := range x {
		x[i] = float64(i%2) - 0.5
		if i > 2000 {
			x[i] += 0.2
		}
	}
	m := condition.Conditioned{Acceleration: x, StepS: 0.01, IsChanged: true}
	alone := conditionedFindings(m, 10)
	m.Exceeded = []condition.Excess{{Flag: quality.FlagBaselineStep, Words: "by a step"}}
	both := conditionedFindings(m, 10)
	if len(both) != len(alone) {
		t.Errorf("%d findings, without the step's %d", len(both), len(alone))
	}
	count := 0
	for _, f := range both {
		if f.Flag == quality.FlagBaselineStep {
			if count++; f.Words != "by a step" {
				t.Errorf("%+v", f)
			}
		}
	}
	if count != 1 {
		t.Errorf("%d of %s", count, quality.FlagBaselineStep)
	}
}
