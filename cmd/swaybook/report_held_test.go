package main

import (
	"context"
	"fmt"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/pipeline/study"
	"swaybook/query"
	"swaybook/query/report"
)

// figured is an answer of these figures.
type figured []query.Figure

func (f figured) Figures() []query.Figure { return f }
func (figured) Motions() []query.Motion   { return nil }

// heldDrift is that of a study whose numbers of motions grew tenfold, which nothing is held
// back for, and one percentile by 6 %.
func heldDrift(t *testing.T, bound *float64) *driftReport {
	t.Helper()
	var before, after figured
	for i := range 2 * maxFigures {
		of := fmt.Sprintf("psa_g at %d s", i)
		before, after = append(before, query.Figure{Of: of, Name: "count", Value: 3}), append(after, query.Figure{Of: of, Name: "count", Value: 30})
	}
	before, after = append(before, query.Figure{Of: "sd_m", Name: "p84", Value: 1}), append(after, query.Figure{Of: "sd_m", Name: "p84", Value: 1.06})
	ask := func(context.Context, *db.Store, moment) (answer, error) { return list{Compared: before}, nil }
	d := &driftReport{Edition: 2, Since: 1, Bound: bound, before: map[string]reply{}}
	c := &comparison{outputs: &outputs{answers: map[string]reply{"spectrum.all": {answer: list{Compared: after}}}}, bound: bound, changes: &db.Changes{}, report: d}
	if err := c.product(t.Context(), &product{path: "spectrum.all", ask: ask}); err != nil {
		t.Fatal(err)
	}
	return d
}

func heldNotice(d *driftReport) *report.Section {
	plan := &studyPlan{study: &study.Study{File: "my tanks.toml"}}
	plan.study.Store.Value = "/elsewhere/tanks.db"
	m := &paginator{plan: plan, edition: 1, held: 2, names: report.Names{}}
	return m.notice(&db.Run{ID: 2, Started: time.Date(2026, 3, 1, 3, 0, 0, 0, time.UTC)}, d)
}

// The page says what is beyond the bound, even where a hundred greater changes are not.
func TestNoticeOfWhatIsBeyond(t *testing.T) {
	bound := 0.05
	s := heldNotice(heldDrift(t, &bound))
	text := strings.Join(s.Lines, "\n")
	for _, words := range []string{
		"shows edition 1, which stays published. Edition 2, by a run of 2026-03-01 03:00:00 UTC, is newer; figures beyond 5 %, the study's max-drift: 1.",
		"swaybook --store tanks.db query … --as-of 2", "swaybook --store tanks.db runs publish 2; then swaybook reprocess 'my tanks.toml' writes", "To refuse it: mend or take out",
	} {
		if !strings.Contains(text, words) {
			t.Errorf("%q is not in %q", words, text)
		}
	}
	if len(s.Tables) != 2 || s.Tables[0].Caption != "Outputs that changed by more than 5 %" || len(s.Tables[1].Rows) != 1 || s.Tables[1].Rows[0][2] != "p84" {
		t.Errorf("tables %+v", s.Tables)
	}
}

// A page judges by the study's bound: what a run was given once is nowhere. It says so, and
// shows what changed most.
func TestNoticeOfAnotherBound(t *testing.T) {
	greater := 0.5
	for why, bound := range map[string]*float64{"no figure differs by more than 50 %, the study's max-drift": &greater, "the study has no max-drift": nil} {
		s := heldNotice(heldDrift(t, bound))
		if text := strings.Join(s.Lines, "\n"); !strings.Contains(text, "is newer; "+why) {
			t.Errorf("%q is not in %q", why, text)
		}
		if len(s.Tables) != 2 || s.Tables[0].Caption != "Outputs that changed" || len(s.Tables[1].Rows) != shownFigures {
			t.Errorf("tables %+v", s.Tables)
		}
	}
}
