package query

import (
	"errors"
	"fmt"
	"slices"
	"strings"
	"testing"

	"swaybook/db"
	"swaybook/pipeline/condition"
	"swaybook/pipeline/quality"
)

// Every flag that is raised anywhere is known here, and the other way round.
func TestFlagsAreTheOnesThatAreRaised(t *testing.T) {
	raised := map[string]bool{
		// Of package ingest, which this one does not import, and of the store.
		"clipped": true, "spikes": true, "lost_data": true, "peak_mismatch": true, "irregular_sampling": true, db.FlagDuplicated: true,
		condition.FlagFinalVelocity: true, condition.FlagFinalDisplacement: true,
		quality.FlagOffset: true, quality.FlagBaselineStep: true, quality.FlagDrift: true, quality.FlagNoPreEvent: true,
		quality.FlagLateStart: true, quality.FlagEarlyEnd: true, quality.FlagSeveralEvents: true, quality.FlagLowSignal: true,
	}
	for _, f := range flags {
		if !raised[f.name] {
			t.Errorf("%s is never raised", f.name)
		}
		delete(raised, f.name)
	}
	if len(raised) > 0 {
		t.Errorf("not known: %v", raised)
	}
}

// What is measured for these flags is a time; of the others it is a ratio or a number of things.
func TestUnitsOfFindings(t *testing.T) {
	inSeconds := []string{"irregular_sampling", quality.FlagLostData, quality.FlagNoPreEvent, quality.FlagSeveralEvents}
	for _, f := range flags {
		unit := unitOfFlag(f.name)
		if slices.Contains(inSeconds, f.name) != (unit != nil) || unit != nil && *unit != "s" {
			t.Errorf("%s has the unit %v", f.name, unit)
		}
	}
	if unit := unitOfFlag("invented"); unit != nil {
		t.Errorf("an unknown flag has the unit %s", *unit)
	}
}

// screenStore has a pair for each flag, the flag on its second horizontal, and a good
// one.
func screenStore(t *testing.T) *db.Store {
	records := []inventedRecord{{code: "GOOD", siting: "free-field", components: pair(1, 1)}}
	for _, f := range flags {
		components := pair(2, 2)
		components[1].found = []string{f.name}
		records = append(records, inventedRecord{code: "R_" + f.name, siting: "free-field", components: components})
	}
	return newStore(t, handGrid, records)
}

func TestScreens(t *testing.T) {
	store := screenStore(t)
	for screen, want := range map[Screen]int{ScreenNone: 17, ScreenNormal: 13, "": 13, ScreenStrict: 2} {
		answer, err := SpectrumQuestion{Selection: Selection{Component: ComponentGeomean, Screen: screen}, Damping: 0.02}.Ask(t.Context(), store)
		if err != nil {
			t.Fatal(err)
		}
		left := 0
		for _, l := range answer.Selection.LeftOut {
			left += l.Records
		}
		if answer.Selection.Records != want || left != 17-want {
			t.Errorf("%q: %d records, left out %v, want %d", screen, answer.Selection.Records, answer.Selection.LeftOut, want)
		}
	}
	answer, err := SpectrumQuestion{Selection: Selection{Component: ComponentEach, Where: `record == "R_clipped"`}, Damping: 0.02}.Ask(t.Context(), store)
	if err != nil || answer.Selection.Spectra != 1 || fmt.Sprint(answer.Selection.LeftOut) != "[1 record left out: screened out: clipped]" {
		t.Errorf("the good horizontal of a record: %+v, %v", answer, err)
	}
	_, err = SpectrumQuestion{Selection: Selection{Screen: "fine"}, Damping: 0.02}.Ask(t.Context(), store)
	if wrong := new(UsageError); !errors.As(err, &wrong) {
		t.Errorf("unknown screen: %v", err)
	}
}

// Of a conditioned component what remains of the findings about the motion counts, and
// what was found of the delivered one where that is about more.
func TestFindingsThatRemain(t *testing.T) {
	for _, test := range []struct {
		name            string
		delivered, left []db.Finding
		isConditioned   bool
		want            string
	}{
		{"as delivered", []db.Finding{{Flag: "drift"}, {Flag: "offset"}, {Flag: "baseline_step"}}, nil, false, "offset"},
		{"mended", []db.Finding{{Flag: "drift"}, {Flag: "offset"}, {Flag: "baseline_step"}}, nil, true, ""},
		{"mended in part", []db.Finding{{Flag: "drift"}, {Flag: "offset"}}, []db.Finding{{Flag: "drift"}}, true, "drift"},
		{"made by the recipe", nil, []db.Finding{{Flag: "offset"}}, true, "offset"},
		{"not to be mended", []db.Finding{{Flag: "spikes"}}, nil, true, "spikes"},
	} {
		c := &db.HeldComponent{Component: db.Component{Findings: test.delivered}}
		if test.isConditioned {
			c.Conditioning = &db.Conditioning{StepS: 0.01, Findings: test.left}
		}
		if got := ScreenStrict.screened(&motion{members: []*db.HeldComponent{c}}); got != test.want {
			t.Errorf("%s: %q, want %q", test.name, got, test.want)
		}
		if q := qualityOf(c); q.Drift != (test.want == "drift") && test.isConditioned || q.Spikes != (test.want == "spikes") {
			t.Errorf("%s: an expression sees %+v", test.name, q)
		}
	}
}

// What is stored of the conditioned motion is found by screens, expressions and lists.
func TestConditionedFindingsInTheStore(t *testing.T) {
	left := pair(1, 1)
	left[0].left = []string{"drift"}
	mended := pair(1, 1)
	mended[0].found, mended[0].left = []string{"drift"}, []string{}
	store := newStore(t, handGrid, []inventedRecord{
		{code: "LEFT", siting: "free-field", components: left}, {code: "MENDED", siting: "free-field", components: mended},
	})
	answer, err := SpectrumQuestion{Selection: Selection{Component: ComponentGeomean, Screen: ScreenStrict}, Damping: 0.02}.Ask(t.Context(), store)
	if err != nil || answer.Selection.Records != 1 || fmt.Sprint(answer.Selection.LeftOut) != "[1 record left out: screened out: drift]" {
		t.Errorf("screen: %+v, %v", answer, err)
	}
	list, err := RecordsQuestion{Selection: Selection{Where: `quality.drift`}}.Ask(t.Context(), store)
	if err != nil || len(list.Rows) != 1 || list.Rows[0].Record != "LEFT" || list.Rows[0].qualityWords() != "drift behind the recipe: invented" {
		t.Errorf("list: %+v, %v", list, err)
	}
	list, err = RecordsQuestion{Selection: Selection{Where: `record == "MENDED" and component == "h1"`}}.Ask(t.Context(), store)
	if err != nil || len(list.Rows) != 1 || list.Rows[0].qualityWords() != "drift: invented" {
		t.Errorf("what was mended: %+v, %v", list, err)
	}
}

func TestQualityInExpressions(t *testing.T) {
	store := screenStore(t)
	for where, want := range map[string]int{ // of 17 records with two horizontals
		`quality.clipped == false`: 33, `quality.clipped`: 1, `not (quality.drift or quality.late_start)`: 32,
	} {
		list, err := RecordsQuestion{Selection: Selection{Where: where}}.Ask(t.Context(), store)
		if err != nil || len(list.Rows) != want {
			t.Errorf("%s: %d rows, want %d, %v", where, len(list.Rows), want, err)
		}
	}
	list, err := RecordsQuestion{Selection: Selection{Where: `quality.drift`, Component: ComponentRotD50}}.Ask(t.Context(), store)
	if err != nil || len(list.Rows) != 1 || list.Rows[0].Record != "R_drift" || list.Rows[0].Quality[0].Flag != "drift" || list.Rows[0].qualityWords() != "drift: invented" {
		t.Errorf("of a pair: %+v, %v", list, err)
	}
}

// What was found keeps its value apart from its bound, whatever lists it.
func TestRowsOfFindings(t *testing.T) {
	c := &db.HeldComponent{Component: db.Component{Findings: []db.Finding{{Flag: "drift", Value: 0.3, Bound: 0.25, Words: "drifts"}, {Flag: "lost_data", Value: 0.5, Bound: 0.2, Words: "lost"}}}}
	c.Conditioning = &db.Conditioning{Findings: []db.Finding{{Flag: "early_end", Value: 0.02, Bound: 0.01, Words: "ends early"}}}
	want := []FindingRow{
		{Flag: "drift", Of: ofDelivered, Value: 0.3, Bound: 0.25, Words: "drifts"},
		{Flag: "lost_data", Of: ofDelivered, Value: 0.5, Bound: 0.2, Unit: seconds, Words: "lost"},
		{Flag: "early_end", Of: ofConditioned, Value: 0.02, Bound: 0.01, Words: "ends early"},
	}
	if got := findingRows(c); !slices.Equal(got, want) {
		t.Errorf("%+v, want %+v", got, want)
	}
}

// TestFindingsBelowTheTable: a table has the sentences of the first rows and counts the rest.
func TestFindingsBelowTheTable(t *testing.T) {
	answer := &RecordsAnswer{Rows: []RecordRow{{Record: "calm", Component: "h1"}}}
	if got := answer.findings(); got != "" {
		t.Errorf("nothing found: %q", got)
	}
	for i := range mostFindings + 2 {
		answer.Rows = append(answer.Rows, RecordRow{Record: fmt.Sprint("R", i), Component: "h1", Quality: []FindingRow{{Flag: "spikes", Words: "two samples stand out"}}})
	}
	lines := strings.Split(answer.findings(), "\n")
	if lines[1] != "Found in 22 rows:" || lines[2] != "  R0 h1: spikes: two samples stand out" || lines[22] != "  and in 2 more: --format csv or json has all" || len(lines) != 24 {
		t.Errorf("%q", lines)
	}
}
