package query

import (
	"errors"
	"fmt"
	"testing"

	"swaybook/db"
	"swaybook/pipeline/quality"
)

// Every flag that is raised anywhere is known here, and the other way round.
func TestFlagsAreTheOnesThatAreRaised(t *testing.T) {
	raised := map[string]bool{
		// Of package ingest, which this one does not import, and of the store.
		"clipped": true, "spikes": true, "lost_data": true, "peak_mismatch": true, "irregular_sampling": true, db.FlagDuplicated: true,
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
	for screen, want := range map[Screen]int{ScreenNone: 15, ScreenNormal: 11, "": 11, ScreenStrict: 2} {
		answer, err := SpectrumQuestion{Selection: Selection{Component: ComponentGeomean, Screen: screen}, Damping: 0.02}.Ask(t.Context(), store)
		if err != nil {
			t.Fatal(err)
		}
		left := 0
		for _, l := range answer.Selection.LeftOut {
			left += l.Records
		}
		if answer.Selection.Records != want || left != 15-want {
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

// What a high-pass filter mends does not count against what it mended; other steps mend
// nothing.
func TestMendedFindings(t *testing.T) {
	mended := &db.HeldComponent{Conditioning: &db.Conditioning{StepS: 0.01, LongS: ptr(8.0)}}
	mended.Findings = []db.Finding{{Flag: "drift"}, {Flag: "offset"}, {Flag: "baseline_step"}}
	m := motion{members: []*db.HeldComponent{mended}}
	if got := ScreenStrict.screened(&m); got != "" {
		t.Errorf("conditioned: %s", got)
	}
	mended.Conditioning.LongS = nil
	if got := ScreenStrict.screened(&m); got != "offset" {
		t.Errorf("tapered: %q", got)
	}
	mended.Conditioning = nil
	if got := ScreenStrict.screened(&m); got != "offset" {
		t.Errorf("as delivered: %q", got)
	}
}

func TestQualityInExpressions(t *testing.T) {
	store := screenStore(t)
	for where, want := range map[string]int{ // of 15 records with two horizontals
		`quality.clipped == false`: 29, `quality.clipped`: 1, `not (quality.drift or quality.late_start)`: 28,
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
