package query

import (
	"errors"
	"fmt"
	"testing"
)

// V/H is the vertical component's ordinate over the horizontal's, record by record, at
// periods that both can be believed at.
func TestVerticalOverHorizontal(t *testing.T) {
	vertical := func(level, lowHz float64) inventedComponent {
		return inventedComponent{role: "v", level: level, lowHz: lowHz}
	}
	store := newStore(t, handGrid, []inventedRecord{
		{code: "A", siting: "free-field", components: append(pair(2, 8), vertical(1, 0.05))},
		{code: "B", siting: "free-field", components: append(pair(4, 4), vertical(3, 0.2))}, // to 4 s
		{code: "C", siting: "free-field", components: pair(1, 1)},
	})
	question := SpectrumQuestion{Selection: Selection{Component: ComponentGeomean}, Damping: 0.02, Measure: MeasureVH}
	answer, err := question.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	for i, want := range []struct {
		count int
		mean  float64
	}{{2, 0.5}, {2, 0.5}, {1, 0.25}, {1, 0.25}} {
		if got := answer.Reductions[i]; got.Count != want.count || !near(got.Mean, want.mean) {
			t.Errorf("period %d: %+v, want %+v", i+1, got, want)
		}
	}
	if got := fmt.Sprint(answer.Selection.LeftOut); got != "[1 record left out: no v component]" {
		t.Error(got)
	}
	question.Component = ComponentV
	if _, err := question.Ask(t.Context(), store); !errors.As(err, new(*UsageError)) {
		t.Errorf("of the vertical: %v", err)
	}
}
