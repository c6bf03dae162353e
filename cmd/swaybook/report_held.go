package main

import (
	"cmp"
	"context"
	"fmt"
	"path/filepath"
	"slices"
	"strconv"
	"time"

	"swaybook/db"
	"swaybook/pipeline/cluster"
	"swaybook/query"
	"swaybook/query/report"
)

// addHeld says at the top that the newest result is held back, why, and what can be done
// about it. It is judged by the study's bound, whatever a run was given, so that whoever makes
// the page makes the same.
func (m *paginator) addHeld(ctx context.Context, p *report.Page, _ *db.RunDetails) error {
	run, err := m.heldRun(ctx)
	if err != nil || run == nil {
		return err
	}
	m.held = run.ID
	drift := m.known
	if bound := m.plan.study.MaxDrift; !drift.isOf(m.held, m.edition) || !isEqual(drift.Bound, bound) {
		if drift, err = m.driftOfHeld(ctx, bound); err != nil {
			return err
		}
	}
	p.Notice = m.notice(run, drift)
	return nil
}

// heldRun is the run whose edition, the newest, is held back from the page's; nil for none.
// While it is at work nobody has decided.
func (m *paginator) heldRun(ctx context.Context) (*db.Run, error) {
	held, ok, err := m.outputs.store.HeldEdition(ctx)
	if err != nil || !ok || held.ID == m.edition {
		return nil, err
	}
	runs, err := m.outputs.store.Runs(ctx)
	if err != nil {
		return nil, err
	}
	at := slices.IndexFunc(runs, func(r db.Run) bool { return r.ID == held.ID })
	if at < 0 || runs[at].Outcome == db.OutcomeRunning {
		return nil, nil
	}
	return &runs[at], nil
}

// driftOfHeld asks all products of what is held back, and compares.
func (m *paginator) driftOfHeld(ctx context.Context, bound *float64) (*driftReport, error) {
	o := &outputs{store: m.outputs.store, answers: map[string]reply{}}
	asked := m.plan.asked()
	for i := range asked {
		var err error
		if o.answers[asked[i].path], err = o.ask(ctx, &asked[i], moment{m.held, true}); err != nil {
			return nil, err
		}
	}
	drift, _, err := o.drift(ctx, asked, m.held, m.edition, bound, func(int, int) {})
	return drift, err
}

// isOf reports whether a drift is that of an edition since another.
func (d *driftReport) isOf(edition, since int64) bool {
	return d != nil && d.Edition == edition && d.Since == since
}

func isEqual(a, b *float64) bool { return a == b || a != nil && b != nil && *a == *b }

// notice tells of a run that is held back.
func (m *paginator) notice(run *db.Run, d *driftReport) *report.Section {
	study, store := cluster.Quote(filepath.Base(m.plan.study.File)), cluster.Quote(filepath.Base(m.plan.study.Store.Value))
	s := &report.Section{ID: m.names.ID("held-back"), Title: "The newest result is held back", Lines: []string{
		fmt.Sprintf("This page shows edition %d, which stays published. Edition %d, by a run of %s, is newer; %s.",
			m.edition, m.held, run.Started.UTC().Format(time.DateTime+" UTC"), d.whyHeld()),
		fmt.Sprintf("To look at it: swaybook --store %s query … --as-of %d.", store, m.held),
		fmt.Sprintf("To accept it: swaybook --store %s runs publish %d; then swaybook reprocess %s writes its answers. A run with a greater --max-drift does both.", store, m.held, study),
		fmt.Sprintf("To refuse it: mend or take out what changed it, and swaybook reprocess %s. As long as nobody does either, each run holds it back again, with exit code 4.", study),
	}}
	beyond := ""
	if d.Bound != nil {
		beyond = " by more than " + percentWords(*d.Bound)
	}
	worst := func(p *productDrift) []figureDrift { return p.worst }
	if d.Beyond == 0 {
		beyond, worst = "", func(p *productDrift) []figureDrift { return p.Largest[:min(len(p.Largest), shownFigures)] }
	}
	sorted := *d
	sorted.Products = slices.Clone(d.Products)
	slices.SortStableFunc(sorted.Products, func(a, b productDrift) int {
		return cmp.Compare(greatestOf(worst(&b)), greatestOf(worst(&a)))
	})
	const most = 10 // rows of what stands above all else
	s.Tables = shownTables(most, sorted.outputs("Outputs that changed"+beyond, worst), sorted.figures("Their greatest changes", worst), sorted.motions())
	return s
}

// whyHeld says by how much it differs.
func (d *driftReport) whyHeld() string {
	switch {
	case d.Beyond > 0:
		return fmt.Sprintf("figures beyond %s, the study's max-drift: %d", percentWords(*d.Bound), d.Beyond)
	case d.Bound != nil:
		return fmt.Sprintf("no figure differs by more than %s, the study's max-drift, so that its run was given another or did not come to decide; the next one does", percentWords(*d.Bound))
	}
	return "the study has no max-drift, so that its run was given one or did not come to decide; the next one does"
}

// outputs lists the products of which there is something to show.
func (d *driftReport) outputs(caption string, worst func(*productDrift) []figureDrift) query.Table {
	t := query.Table{Caption: caption, Columns: []query.Column{
		{Name: "product", IsWord: true}, {Name: "figures"}, {Name: "changed"}, {Name: "beyond"}, {Name: "greatest change"}, {Name: "of", IsWord: true}}}
	for i := range d.Products {
		p := &d.Products[i]
		if list := worst(p); len(list) > 0 {
			w := &list[0].words
			t.Rows = append(t.Rows, []string{p.Product, strconv.Itoa(p.Figures), strconv.Itoa(p.Changed), strconv.Itoa(p.Beyond), w.Change, w.Figure + " of " + w.Of})
		}
	}
	return t
}
