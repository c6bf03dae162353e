package main

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"io"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"time"

	"swaybook/db"
	"swaybook/pipeline/condition"
	"swaybook/pipeline/study"
	"swaybook/query"
	"swaybook/query/chart"
	"swaybook/query/report"
)

// pageOf is the report as an answer that is written as other products are.
type pageOf struct{ *report.Page }

func (p pageOf) Write(w io.Writer, _ query.Format) error { return p.Page.Write(w) }

// paginator makes the report of a study of an edition, from the answers to its products.
type paginator struct {
	plan    *studyPlan
	outputs *outputs
	edition int64
	known   *driftReport // between two editions; nil for none
	names   report.Names

	drift *driftReport // since the edition before
	held  int64        // the edition that is held back, 0 for none
}

// page is the report. The edition before it, by which drift is told, is the last that is
// kept, so that the same store gives the same page whoever makes it.
func (m *paginator) page(ctx context.Context) (*report.Page, error) {
	m.names = report.Names{"content": true, "provenance": true}
	run, err := m.outputs.store.RunDetails(ctx, m.edition)
	if err != nil {
		return nil, err
	}
	p := &report.Page{Title: m.plan.study.Name.Value, Purpose: m.plan.study.Purpose.Value, Caution: query.Caution}
	for i := range m.plan.products {
		p.Sections = append(p.Sections, m.product(&m.plan.products[i]))
	}
	for _, add := range []func(context.Context, *report.Page, *db.RunDetails) error{m.addHeld, m.addGoverning, m.addRecords, m.addRejections, m.addDrift, m.addMethods, m.addProvenance} {
		if err := add(ctx, p, run); err != nil {
			return nil, err
		}
	}
	return p, nil
}

// product is the section of a product, of which the answer is known.
func (m *paginator) product(p *product) report.Section {
	id := m.names.ID(p.path)
	r := m.outputs.answers[p.path]
	if r.empty != nil {
		return report.Section{ID: id, Title: p.path, Lines: []string{"No answer: " + r.empty.Error()}}
	}
	s := report.Section{ID: id, Title: p.path}
	if a, ok := r.answer.(sectioned); ok {
		s = a.Section(id, m.names)
		s.Title = p.path + ": " + s.Title
	}
	return s
}

// mostSheets is how many records a page shows whole.
const mostSheets = 8

// addGoverning shows the records that govern most, each whole.
func (m *paginator) addGoverning(ctx context.Context, p *report.Page, _ *db.RunDetails) error {
	all, ofStructures := query.Governing{}, query.Governing{}
	for i := range m.plan.products {
		p := &m.plan.products[i]
		if a, ok := m.outputs.answers[p.path].answer.(governed); ok {
			g := a.Governing()
			all.Add(g)
			if strings.HasPrefix(p.path, string(study.Demand)+".") {
				ofStructures.Add(g)
			}
		}
	}
	// Those of structures come first: there are many more periods.
	codes := slices.Concat(ofStructures.Codes(), slices.DeleteFunc(all.Codes(), func(code string) bool { return ofStructures[code] > 0 }))
	if len(codes) == 0 {
		return nil
	}
	s := report.Section{ID: m.names.ID("governing"), Title: "Governing records", Lines: []string{
		"The greatest at a period, of a quantity, or of a structure's demand over its capacity."}}
	t := query.Table{Columns: []query.Column{{Name: "governing", IsWord: true}, {Name: "times"}}}
	parts, units := map[string]string{}, m.units()
	for i, code := range codes {
		t.Rows = append(t.Rows, []string{code, strconv.Itoa(all[code])})
		if i >= mostSheets {
			continue
		}
		a, err := query.RecordQuestion{AsOf: m.edition, Code: code, Figure: true}.Ask(ctx, m.outputs.store)
		if err != nil {
			return err
		}
		part := report.Record(m.names.ID("record", code), a, units)
		parts[code] = part.ID
		s.Parts = append(s.Parts, part)
	}
	s.Tables = []report.Table{{Table: t, IsLong: len(t.Rows) > report.LongRows}}
	if len(codes) > mostSheets {
		s.Remarks = []string{fmt.Sprintf("shown whole are the first %d; swaybook query record CODE --plot FILE draws any", mostSheets)}
	}
	p.Sections = append(p.Sections, s)
	p.LinkGoverning(parts)
	return nil
}

// units are those of all products, for what is of several; SI where they differ.
func (m *paginator) units() (out query.Units) {
	for i := range m.plan.products {
		of, ok := m.outputs.answers[m.plan.products[i].path].answer.(inUnits)
		switch {
		case !ok:
		case out == "":
			out = of.units
		case out != of.units:
			return query.UnitsSI
		}
	}
	return cmp.Or(out, query.UnitsSI)
}

// addRecords says what is held, what it is worth, and where it is from.
func (m *paginator) addRecords(ctx context.Context, p *report.Page, run *db.RunDetails) error {
	q := query.RecordsQuestion{}
	q.AsOf = m.edition
	a, err := q.Ask(ctx, m.outputs.store)
	if empty, ok := errors.AsType[*query.EmptyError](err); ok {
		p.Summary = append(p.Summary, report.Fact{Name: "records", Value: empty.Error()})
		return nil
	}
	if err != nil {
		return err
	}
	held, state := a.Held(), fmt.Sprintf("edition %d, by a run of %s", m.edition, run.Started.UTC().Format(time.DateTime+" UTC"))
	if m.held != 0 {
		state += fmt.Sprintf("; edition %d is held back", m.held)
	}
	p.Summary = []report.Fact{
		{Name: "records", Value: fmt.Sprintf("%d of %d earthquakes at %d stations", held.Records, held.Events, held.Stations)},
		{Name: "components", Value: strconv.Itoa(held.Components)},
		{Name: "recipe", Value: run.Generation.Recipe.Name},
		{Name: "state of the store", Value: state},
	}
	s := report.Of(m.names.ID("quality"), a.Quality())
	s.Figures = report.Drawn("Magnitude and distance of the records.", a.Chart(), chart.Half)
	p.Sections = append(p.Sections, s)
	return nil
}

// addRejections lists what could not be stored.
func (m *paginator) addRejections(ctx context.Context, p *report.Page, _ *db.RunDetails) error {
	a, err := query.Rejections(ctx, m.outputs.store, m.edition)
	if err != nil {
		return err
	}
	p.Summary = append(p.Summary, report.Fact{Name: "rejected", Value: strconv.Itoa(len(a.Rows))})
	s := report.Of(m.names.ID("rejected"), a.Sheet())
	if len(a.Rows) == 0 {
		s.Tables, s.Lines = nil, []string{"Nothing was rejected."}
	}
	p.Sections = append(p.Sections, s)
	return nil
}

// addDrift says what changed against the edition before.
func (m *paginator) addDrift(ctx context.Context, p *report.Page, run *db.RunDetails) error {
	s := report.Section{ID: m.names.ID("changes"), Title: "Changes since the last edition"}
	if run.Before == 0 {
		s.Lines = []string{"No edition before is kept."}
		p.Sections = append(p.Sections, s)
		return nil
	}
	var err error
	if m.drift = m.known; !m.drift.isOf(m.edition, run.Before) {
		if m.drift, _, err = m.outputs.drift(ctx, m.plan.asked(), m.edition, run.Before, nil, func(int, int) {}); err != nil {
			return err
		}
	}
	s.Lines = []string{fmt.Sprintf("Edition %d against edition %d.", m.edition, run.Before)}
	var text strings.Builder
	if m.drift.printMakers(&printer{w: &text}); text.Len() > 0 {
		s.Lines = append(s.Lines, strings.Split(strings.TrimSpace(text.String()), "\n")...)
	}
	s.Tables = m.drift.tables()
	s.Figures = m.changes()
	if len(s.Tables) == 0 {
		s.Lines = append(s.Lines, "All figures and motions are as before.")
	}
	p.Sections = append(p.Sections, s)
	return nil
}

// changes are figures of spectra that changed.
func (m *paginator) changes() (out []report.Figure) {
	for i := range m.plan.products {
		p := &m.plan.products[i]
		is, units, _ := spectrumOf(m.outputs.answers[p.path])
		was, _, ok := spectrumOf(m.drift.before[p.path])
		if !ok || is == nil {
			continue
		}
		c := is.Changes(was, fmt.Sprintf("edition %d", m.drift.Since), fmt.Sprintf("edition %d", m.edition), units)
		if len(c.Pairs) > 0 {
			out = append(out, report.Figure{Caption: p.path + ": before and after, and the change in percent.", Chart: c, Size: chart.Half})
		}
	}
	return out
}

// spectrumOf is the answer of a reply that is of spectra.
func spectrumOf(r reply) (a *query.SpectrumAnswer, units query.Units, ok bool) {
	if of, isOne := r.answer.(inUnits); isOne {
		a, ok = of.statistics.(*query.SpectrumAnswer)
		units = of.units
	}
	return a, units, ok
}

// tables are the changes, and what happened to the motions.
func (d *driftReport) tables() []report.Table {
	return shownTables(report.LongRows, d.figures("Greatest changes", func(p *productDrift) []figureDrift { return p.Largest[:min(len(p.Largest), shownFigures)] }), d.motions())
}

// shownTables are those that have rows, closed at first where there are more than most.
func shownTables(most int, tables ...query.Table) (out []report.Table) {
	for _, t := range tables {
		if len(t.Rows) > 0 {
			out = append(out, report.Table{Table: t, IsLong: len(t.Rows) > most})
		}
	}
	return out
}

// figures lists changes of each product.
func (d *driftReport) figures(caption string, of func(*productDrift) []figureDrift) query.Table {
	t := query.Table{Caption: caption, Columns: []query.Column{
		{Name: "product", IsWord: true}, {Name: "of", IsWord: true}, {Name: "figure", IsWord: true}, {Name: "before"}, {Name: "after"}, {Name: "unit", IsWord: true}, {Name: "change"}}}
	for i := range d.Products {
		for _, f := range of(&d.Products[i]) {
			w := &f.words
			t.Rows = append(t.Rows, []string{d.Products[i].Product, w.Of, w.Figure, w.Before, w.After, w.Unit, w.Change})
		}
	}
	return t
}

// motions lists what happened to them.
func (d *driftReport) motions() query.Table {
	t := query.Table{Caption: "What happened to motions", Columns: []query.Column{
		{Name: "product", IsWord: true}, {Name: "cause", IsWord: true}, {Name: "motions"}, {Name: "first of them", IsWord: true}}}
	for i := range d.Products {
		for _, c := range d.Products[i].Causes {
			t.Rows = append(t.Rows, []string{d.Products[i].Product, c.Cause, strconv.Itoa(c.Count), strings.Join(c.Codes[:min(len(c.Codes), shownFigures)], ", ")})
		}
	}
	return t
}

func (m *paginator) addMethods(_ context.Context, p *report.Page, run *db.RunDetails) error {
	recipe := run.Generation.Recipe
	applies, described := condition.Describe(recipe.Steps)
	var steps []report.Step
	for _, s := range described {
		steps = append(steps, report.Step(s))
	}
	p.Sections = append(p.Sections, report.Methods(m.names.ID("methods"), recipe.Name, applies, steps))
	return nil
}

// addProvenance says of what and by what the page is made.
func (m *paginator) addProvenance(ctx context.Context, p *report.Page, run *db.RunDetails) error {
	digest := ""
	err := m.outputs.store.ViewAsOf(ctx, m.edition, func(s *db.Snapshot) (err error) {
		digest, err = s.Digest(ctx)
		return err
	})
	if err != nil {
		return err
	}
	g := &run.Generation
	p.Provenance = []report.Fact{
		{Name: "study", Value: filepath.Base(m.plan.study.File)},
		{Name: "store", Value: filepath.Base(m.plan.study.Store.Value)},
		{Name: "edition", Value: strconv.FormatInt(m.edition, 10)},
		{Name: "run", Value: fmt.Sprintf("%d, %s, began %s", run.ID, run.Kind, run.Started.UTC().Format(time.RFC3339))},
		{Name: "program of the run", Value: cmp.Or(run.Program, "-")},
		{Name: "program of this page", Value: program()},
		{Name: "solver", Value: g.Solver},
		{Name: "recipe", Value: g.Recipe.Name + " " + g.Recipe.Hash()},
		{Name: "periods", Value: fmt.Sprintf("%d from %g to %g s", len(g.Grid.PeriodsS), slices.Min(g.Grid.PeriodsS), slices.Max(g.Grid.PeriodsS))},
		{Name: "dampings", Value: dampingWords(g.Grid.Dampings)},
		{Name: "digest of what is published (verify --digest)", Value: digest},
	}
	return nil
}

func dampingWords(dampings []float64) string {
	words := make([]string, len(dampings))
	for i, d := range dampings {
		words[i] = percentWords(d)
	}
	return strings.Join(words, ", ")
}
