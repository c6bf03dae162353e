package query

import (
	"errors"
	"fmt"
	"testing"
)

// What may be a vertical is no part of what horizontals do, unless somebody asks
// for it; lists show it.
func TestUnknownDirections(t *testing.T) {
	alone := inventedComponent{role: "h1", level: 5, axis: "unknown"}
	store := newStore(t, handGrid, []inventedRecord{
		{code: "A", siting: "free-field", components: pair(1, 1)},
		{code: "B", siting: "free-field", components: []inventedComponent{alone}},
	})
	for _, test := range []struct {
		selection Selection
		spectra   int
		reasons   string
	}{
		{Selection{Component: ComponentEach}, 2, "[1 record left out: direction unknown]"},
		{Selection{Component: ComponentH1}, 1, "[1 record left out: direction unknown]"},
		{Selection{Component: ComponentH1, IncludeUnknownDirections: true}, 2, "[]"},
		{Selection{Component: ComponentGeomean}, 1, "[1 record left out: one horizontal component only]"},
		{Selection{Component: ComponentEach, Where: `record == "A"`}, 2, "[]"},
		{Selection{Component: ComponentEach, Where: `axis == "unknown"`, IncludeUnknownDirections: true}, 1, "[]"},
	} {
		answer, err := SpectrumQuestion{Selection: test.selection, Damping: 0.02}.Ask(t.Context(), store)
		if err != nil {
			t.Errorf("%+v: %v", test.selection, err)
			continue
		}
		if got := fmt.Sprint(answer.Selection.LeftOut); answer.Selection.Spectra != test.spectra || got != test.reasons {
			t.Errorf("%+v: %d spectra, left out %s; want %d, %s", test.selection, answer.Selection.Spectra, got, test.spectra, test.reasons)
		}
	}
	_, err := SpectrumQuestion{Selection: Selection{Component: ComponentEach, Where: `record == "B"`}, Damping: 0.02}.Ask(t.Context(), store)
	if empty := new(EmptyError); !errors.As(err, &empty) || fmt.Sprint(empty.LeftOut) != "[1 record left out: direction unknown]" {
		t.Errorf("nothing but an unknown direction: %v", err)
	}
	list, err := RecordsQuestion{Selection: Selection{Where: `axis == "unknown"`}}.Ask(t.Context(), store)
	if err != nil || len(list.Rows) != 1 || list.Rows[0].Axis != "unknown" {
		t.Errorf("list %+v, %v", list, err)
	}
}
