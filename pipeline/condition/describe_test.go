package condition

import (
	"strings"
	"testing"
)

// TestEveryStepHasASource: of each kind, with and without what else it can be asked for.
func TestEveryStepHasASource(t *testing.T) {
	for kind := range uses {
		if s := (Step{Do: kind}); s.Source() == "" {
			t.Errorf("%s has no source", kind)
		}
	}
	plain, byNoise := Step{Do: KindHighPass}, Step{Do: KindHighPass, ByNoise: &NoiseRule{}}
	if plain.Source() == byNoise.Source() || !strings.HasPrefix(byNoise.Source(), plain.Source()) {
		t.Errorf("sources %q and %q", plain.Source(), byNoise.Source())
	}
}

// TestDescribe tells the steps of a recipe, and of another version's that it does not know
// them, with what is stored.
func TestDescribe(t *testing.T) {
	r := Standard()
	applies, steps := Describe(r.Canonical())
	if len(steps) != len(r.Steps) || applies != "raw, mean-removed components" {
		t.Fatalf("%d steps of %d for %s", len(steps), len(r.Steps), applies)
	}
	for i, s := range steps {
		if s != (Description{string(r.Steps[i].Do), r.Steps[i].Words(), r.Steps[i].Source()}) {
			t.Errorf("step %d: %+v", i, s)
		}
	}
	for text, want := range map[string]Description{
		`{"version":1,"name":"old","states":["raw"],"steps":[{"do":"smooth","width":3}]}`: {"smooth", `not described here: of another version of the program, whose steps have version 1, here 4; as stored: {"do":"smooth","width":3}`, "-"},
		`{"version":4,"name":"old","states":["raw"],"steps":[{"do":7}]}`:                  {"-", `not described here: of another version of the program, whose steps have version 4, here 4; as stored: {"do":7}`, "-"},
		`steps`: {"-", `not described here: of another version of the program; as stored: steps`, "-"},
	} {
		if _, got := Describe(text); len(got) != 1 || got[0] != want {
			t.Errorf("of %s it says %+v", text, got)
		}
	}
}
