package condition

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

const ownRecipe = `# invented, for the quays of Northwater
name = "northwater-quays"
explain = "fixed corners, finer steps"
states = ["raw", "unknown"]
[[step]]
do = "trend"
degree = 1
[[step]]
do = "high-pass"
order = 4
corner_hz = 0.15
[[step]]
do = "oversample"
factor = 4
`

func TestParse(t *testing.T) {
	r, err := Parse([]byte(ownRecipe))
	if err != nil {
		t.Fatal(err)
	}
	const want = `{"version":4,"name":"northwater-quays","states":["raw","unknown"],"steps":[` +
		`{"do":"trend","degree":1},{"do":"high-pass","order":4,"corner_hz":0.15},{"do":"oversample","factor":4}]}`
	if got := r.Canonical(); got != want {
		t.Errorf("got %s, want %s", got, want)
	}
	if _, err := FromCanonical(strings.Replace(want, ":4,", ":3,", 1)); !errors.Is(err, ErrOtherVersion) {
		t.Errorf("of another version: %v", err)
	}
	if !r.AppliesTo("unknown") || r.AppliesTo("corrected") {
		t.Error("applies to other states than it says")
	}
	if back, err := FromCanonical(r.Canonical()); err != nil || back.Hash() != r.Hash() {
		t.Errorf("read back: %v, %v", back, err)
	}
}

// The recipe that README.md shows is one.
func TestRecipeInReadme(t *testing.T) {
	readme, err := os.ReadFile(filepath.Join("..", "..", "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	_, rest, _ := strings.Cut(string(readme), "### Recipes\n")
	_, rest, _ = strings.Cut(rest, "```toml\n")
	text, _, _ := strings.Cut(rest, "```")
	if r, err := Parse([]byte(text)); err != nil || len(r.Steps) != 4 {
		t.Errorf("%d steps, %v", len(r.Steps), err)
	}
}

// What identifies a generation must not change unnoticed.
func TestHashes(t *testing.T) {
	seen := map[string]bool{}
	for _, r := range BuiltIn() {
		if err := r.Validate(); err != nil {
			t.Errorf("%s: %v", r.Name, err)
		}
		if len(r.Hash()) != 64 || seen[r.Hash()] {
			t.Errorf("%s: hash %s", r.Name, r.Hash())
		}
		seen[r.Hash()] = true
	}
	explained := Standard()
	explained.Explain = "in other words"
	if explained.Hash() != Standard().Hash() {
		t.Error("words for people change the hash")
	}
	other := Standard()
	other.Steps[2].Share *= 2
	if other.Hash() == Standard().Hash() {
		t.Error("another taper has the same hash")
	}
}

func TestParseRefuses(t *testing.T) {
	head := "name = \"own\"\n[[step]]\n"
	for text, want := range map[string]string{
		"name = 3":                                   "line 1: ",
		"name = \"own\"\nnane = 1":                   `line 2: unknown key "nane"`,
		head + "do = \"mean\"\nwindow = \"all\"":     `line 4: step 1 (mean): window: unknown word "all"; known: whole, pre-event, stated`,
		head + "do = \"bake\"":                       "line 3: step 1 (bake): do: unknown step; known: mean, trend,",
		head + "do = \"trend\"\ndegree = 3":          "line 4: step 1 (trend): degree: 3 is outside 1 to 2",
		head + "do = \"trend\"\ndegree = 1\nshare=1": "line 5: step 1 (trend): share: not a field of this step; it takes degree",
		head + "do = \"taper\"\nshare = 0.05\n[[ step ]]\ndo = \"taper\"\nshare = nan":                 "line 7: step 2 (taper): share: NaN is outside",
		head + "do = \"high-pass\"\norder = 4":                                                         "line 2: step 1 (high-pass): corner_hz, by_noise: one of both is needed",
		head + "do = \"high-pass\"\norder = 9\ncorner_hz = 1":                                          "line 4: step 1 (high-pass): order: 9 is outside 1 to 8",
		head + "do = \"low-pass\"\norder = 4\n[step.by_noise]\nratio = 3\nleast_hz = 20\nmost_hz = 10": "line 8: step 1 (low-pass): by_noise.most_hz: 10 is outside 20 to 1000",
		head + "do = \"oversample\"\nfactor = 4\n[[step]]\ndo = \"oversample\"\nfactor = 4":            "line 7: step 2 (oversample): factor: 16 times finer with the steps before, more than 10",
		head + "do = \"trim\"\nfrom_s = 5\nto_s = 4":                                                   "line 5: step 1 (trim): to_s: 4 s is not after from_s",
		head + "do = \"pad\"":                                                   "line 2: step 1 (pad): before_s, after_s: one at least is needed",
		head + "do = \"pad\"\nbefore_s = -1":                                    "line 4: step 1 (pad): before_s: -1 is outside 0 to 1000",
		head + "do = \"integration-check\"":                                     "line 2: step 1 (integration-check): velocity_share, displacement_share: one at least is needed",
		head + "do = \"integration-check\"\nvelocity_share = 2":                 "line 4: step 1 (integration-check): velocity_share: 2 is outside 0 to 1",
		head + "do = \"band-pass\"\norder = 4\nlow_hz = 5\nhigh_hz = 5":         "line 6: step 1 (band-pass): high_hz: 5 Hz is not above low_hz",
		head + "do = \"band-pass\"\norder = 4\nlow_hz = 5\nhigh_hz = 5.0000001": "line 6: step 1 (band-pass): high_hz: 5.0000001 Hz leaves no usable period, which it does above 7.8125 Hz",
		head + "do = \"band-pass\"\norder = 4\ncorner_hz = 5":                   "line 5: step 1 (band-pass): corner_hz: not a field of this step; it takes order, low_hz, high_hz",
		head + "do = \"mean\"\nwindow = \"stated\"":                             "line 2: step 1 (mean): to_s: missing",
		head + "do = \"mean\"\nwindow = \"whole\"\nto_s = 3":                    `line 2: step 1 (mean): from_s, to_s: of window = "stated" only, not "whole"`,
		head + "do = \"trend\"\nwindow = \"pre-event\"\ndegree = 2":             "line 5: step 1 (trend): degree: 2 is outside 1 to 1",
		"name = \"Own recipe\"":                                                 "name: ",
		"name = \"standard\"":                                                   `name: "standard" is a recipe that is built in`,
		"name = \"own\"\nstates = [\"fresh\"]":                                  `states: unknown state of processing "fresh"; known: raw,`,
		"name = \"own\"\n[[step]":                                               "line 2: ",
		strings.Repeat("#", 2<<20):                                              "a recipe of more than",
	} {
		if _, err := Parse([]byte(text)); err == nil || !strings.HasPrefix(err.Error(), want) {
			t.Errorf("%.60q: %v, want %s", text, err, want)
		}
	}
}

// What is of another type than a key takes is said in words of TOML, with the line.
func TestParseSaysWhichTypes(t *testing.T) {
	head := "name = \"own\"\n[[step]]\n"
	const steps = "each step under a heading of its own, [[step]] in double brackets"
	for text, want := range map[string]string{
		"name = 3":                                     "line 1: name: want a text in quotes",
		"name = \"own\"\nexplain = 2041-03-03":         "line 2: explain: want a text in quotes",
		"name = \"own\"\nstates = \"raw\"":             `line 2: states: want a list of texts, such as ["raw"]`,
		"name = \"own\"\nstates = [1]":                 `line 2: states: want a list of texts, such as ["raw"]`,
		"name = \"own\"\nlong_share = true":            "line 2: long_share: want a number",
		"[[name]]\nx = 1":                              "line 1: name: want a text in quotes",
		"name = \"own\"\n\n[step]\ndo = \"mean\"":      "line 3: step: want " + steps,
		"[ step ]\n[ step ]\n":                         "line 2: step: want " + steps,
		"name = \"own\"\nstep = { do = \"mean\" }":     "line 2: step: want " + steps,
		"name = \"own\"\nstep = [1, 2]":                "line 2: step: want " + steps,
		head + "do = 3":                                "line 3: step.do: want a text in quotes",
		head + "do = \"trend\"\ndegree = 1.5":          "line 4: step.degree: want a whole number, without a decimal point",
		head + "do = \"high-pass\"\ncorner_hz = \"1\"": "line 4: step.corner_hz: want a number",
		head + "by_noise = 3":                          "line 3: step.by_noise: want a table of numbers, such as { ratio = 3, least_hz = 0.05, most_hz = 1, else_hz = 0.1 }",
		head + "by_noise = { ratio = \"3\" }":          "line 3: step.by_noise: want a table of numbers, such as { ratio = 3, least_hz = 0.05, most_hz = 1, else_hz = 0.1 }",
		head + "[[step.by_noise]]\nratio = 3":          "line 3: step.by_noise: want a table of numbers, such as { ratio = 3, least_hz = 0.05, most_hz = 1, else_hz = 0.1 }",
		"name = \"own\"\nname = \"own\"":               "line 2: key name is already defined",
	} {
		if _, err := Parse([]byte(text)); err == nil || err.Error() != want {
			t.Errorf("%q: %v, want %s", text, err, want)
		}
	}
}

func FuzzParse(f *testing.F) {
	f.Add(ownRecipe)
	f.Fuzz(func(t *testing.T, text string) {
		r, err := Parse([]byte(text))
		if err != nil {
			return
		}
		if back, err := FromCanonical(r.Canonical()); err != nil || back.Canonical() != r.Canonical() {
			t.Fatalf("%q gives %s, which reads as %s: %v", text, r.Canonical(), fmt.Sprint(back), err)
		}
	})
}

// Every kind of step has words of its own, and the list of unknown steps names it.
func TestEveryStepIsExplained(t *testing.T) {
	seen := map[string]Kind{}
	for kind := range uses {
		s := Step{Do: kind, Degree: 1, Order: 4, CornerHz: 1, LowHz: 1, HighHz: 2, Factor: 2, ToS: 3, VelocityShare: 0.1}
		words := s.Words()
		if kind == KindHighPass || kind == KindLowPass {
			words = string(kind) + words // a filter is told by its name
		}
		if other, ok := seen[words]; ok || words == "" {
			t.Errorf("%s: %q, as %s", kind, words, other)
		}
		seen[words] = kind
		if err := (Step{Do: "bake"}).validate(); !strings.Contains(err.Error(), string(kind)) {
			t.Errorf("%s is not named: %v", kind, err)
		}
	}
}
