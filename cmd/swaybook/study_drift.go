package main

import (
	"cmp"
	"context"
	"math"
	"slices"
	"strconv"

	"swaybook/db"
	"swaybook/query"
)

// driftReport says by how much the figures of a study differ from the published ones.
type driftReport struct {
	Edition int64    `json:"edition"`
	Since   int64    `json:"since"` // the edition that was published
	Bound   *float64 `json:"bound"` // null where the study has none
	Beyond  int      `json:"beyond"`
	// By what recipes and solvers the editions are computed.
	RecipeBefore string         `json:"recipe_before"`
	Recipe       string         `json:"recipe"`
	SolverBefore string         `json:"solver_before"`
	Solver       string         `json:"solver"`
	Products     []productDrift `json:"products"` // the greatest change first

	before map[string]reply // of products that changed, by path
}

// productDrift is that of one product, or of a selection.
type productDrift struct {
	Product string        `json:"product"`
	Figures int           `json:"figures"` // that were published
	Changed int           `json:"changed"`
	Beyond  int           `json:"beyond"`
	Largest []figureDrift `json:"largest"`
	Causes  []driftCause  `json:"causes"`

	worst []figureDrift // those beyond the bound, as many as a report shows
}

// figureDrift is one figure, in the unit that of names, null where there is none.
type figureDrift struct {
	Of     string   `json:"of"`
	Figure string   `json:"figure"`
	Before *float64 `json:"before"`
	After  *float64 `json:"after"`
	Change *float64 `json:"change"` // ratio, null for one without limit: lost, or from 0
	Beyond bool     `json:"is_beyond"`

	words query.DriftWords // in the units of the question
}

// driftCause is what happened to motions of the selection.
type driftCause struct {
	Cause string `json:"cause"`
	codeReport
}

// maxFigures is how many changes of a product JSON lists, and shownFigures the text.
const maxFigures, shownFigures = 100, 5

// comparison compares what an edition answers with what another does.
type comparison struct {
	outputs *outputs
	bound   *float64
	changes *db.Changes
	// stations are the codes of stations as changes have them, by record, of both editions.
	stations map[string]string
	report   *driftReport
}

// compare tells the drift against the published edition.
func (r *studyRun) compare(ctx context.Context, edition, published int64) error {
	drift, changes, err := r.outputs.drift(ctx, r.plan.asked(), edition, published, r.bound(), r.plan.ingest.monitor.compared)
	if changes != nil {
		r.state.Changes, r.state.Drift = newChangeReport(changes), drift
	}
	return err
}

// drift asks all products, whose answers of an edition are known, as of another too. Its
// answers are those to the study's questions of today, so that a question that changed is no
// drift. What is known of it comes beside an error.
func (o *outputs) drift(ctx context.Context, asked []product, edition, since int64, bound *float64, step func(i, of int)) (*driftReport, *db.Changes, error) {
	changes, err := o.store.ChangesSince(ctx, since, edition)
	if err != nil {
		return nil, nil, err
	}
	d := &driftReport{Edition: edition, Since: since, Bound: bound, Products: []productDrift{}, before: map[string]reply{}}
	stations, err := o.store.StationCodes(ctx, since, edition)
	if err != nil {
		return d, changes, err
	}
	c := &comparison{outputs: o, bound: bound, changes: changes, stations: stations, report: d}
	if d.RecipeBefore, d.SolverBefore, err = madeBy(ctx, o.store, since); err != nil {
		return d, changes, err
	}
	if d.Recipe, d.Solver, err = madeBy(ctx, o.store, edition); err != nil {
		return d, changes, err
	}
	for i := range asked {
		step(i, len(asked))
		if err := c.product(ctx, &asked[i]); err != nil {
			return d, changes, err
		}
	}
	slices.SortStableFunc(d.Products, func(a, b productDrift) int { return cmp.Compare(b.greatest(), a.greatest()) })
	return d, changes, nil
}

// madeBy is by what recipe and solver an edition is computed.
func madeBy(ctx context.Context, store *db.Store, edition int64) (recipe, solver string, err error) {
	err = store.ViewAsOf(ctx, edition, func(s *db.Snapshot) error {
		recipe, solver = s.Generation.Recipe.Name, s.Generation.Solver
		return nil
	})
	return recipe, solver, err
}

// product compares one product.
func (c *comparison) product(ctx context.Context, p *product) error {
	before, err := c.outputs.ask(ctx, p, moment{c.report.Since, true})
	if err != nil {
		return err
	}
	was, is := before.compared(), c.outputs.answers[p.path].compared()
	figures := was.Figures()
	out := productDrift{Product: p.path, Figures: len(figures), Largest: []figureDrift{}}
	for _, d := range query.Drifts(figures, is.Figures()) {
		isBeyond := c.bound != nil && d.Loss() > *c.bound
		out.Changed++
		one := figureDrift{d.Of, d.Name, finite(d.Before), finite(d.After), finite(d.Ratio()), isBeyond, d.Words(before.units())}
		if len(out.Largest) < maxFigures {
			out.Largest = append(out.Largest, one)
		}
		if isBeyond {
			out.Beyond++
			if len(out.worst) < shownFigures {
				out.worst = append(out.worst, one)
			}
		}
	}
	out.Causes = c.causes(was.Motions(), is.Motions())
	c.report.Beyond += out.Beyond
	if out.Changed > 0 {
		c.report.before[p.path] = before
	}
	if out.Changed > 0 || len(out.Causes) > 0 {
		c.report.Products = append(c.report.Products, out)
	}
	return nil
}

// compared is the answer, or one without figures where there is none.
func (r reply) compared() query.Compared {
	if a, ok := r.answer.(query.Compared); ok {
		return a
	}
	return unmeasured{}
}

// units are those of the question, SI where it has none.
func (r reply) units() query.Units {
	if of, ok := r.answer.(inUnits); ok {
		return of.units
	}
	return query.UnitsSI
}

// finite is a number for JSON, nil where that has none.
func finite(x float64) *float64 {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return nil
	}
	return &x
}

// greatest is the greatest change of a product, infinite where there is no limit to it.
func (p *productDrift) greatest() float64 { return greatestOf(p.Largest) }

// greatestOf is the first of changes.
func greatestOf(changes []figureDrift) float64 {
	if len(changes) == 0 {
		return 0
	}
	if x := changes[0].Change; x != nil {
		return math.Abs(*x)
	}
	return math.Inf(1)
}

// causes says what happened to the motions of a selection.
func (c *comparison) causes(before, after []query.Motion) []driftCause {
	was, is := motionsByCode(before), motionsByCode(after)
	by := map[string][]string{}
	for _, m := range after {
		code := codeOf(m)
		if _, both := was[code]; !both {
			cause := c.joinedBy(m)
			by[cause] = append(by[cause], code)
		} else if c.isRecomputed(m) {
			by[causeComputed] = append(by[causeComputed], code)
		}
	}
	for _, m := range before {
		if code := codeOf(m); is[code].Record == "" {
			cause := c.leftBy(m)
			by[cause] = append(by[cause], code)
		}
	}
	out := []driftCause{}
	for _, cause := range allCauses {
		if codes := by[cause]; len(codes) > 0 {
			out = append(out, driftCause{cause, newCodeReport(codes)})
		}
	}
	return out
}

// What happens to motions, in the order of reports.
const (
	causeAdded     = "records added"
	causeRemoved   = "records removed"
	causeJoined    = "selected by changed metadata"
	causeLeft      = "no longer selected by changed metadata"
	causeSelected  = "selected now"
	causeForgotten = "no longer selected"
	causeComputed  = "computed anew"
)

var allCauses = []string{causeAdded, causeRemoved, causeJoined, causeLeft, causeSelected, causeForgotten, causeComputed}

func codeOf(m query.Motion) string { return m.Record + " " + m.Role }

func motionsByCode(motions []query.Motion) map[string]query.Motion {
	out := make(map[string]query.Motion, len(motions))
	for _, m := range motions {
		out[codeOf(m)] = m
	}
	return out
}

// hasAny reports whether a sorted list has any of the codes.
func hasAny(list []string, codes ...string) bool {
	return slices.ContainsFunc(codes, func(code string) bool {
		_, found := slices.BinarySearch(list, code)
		return found
	})
}

// components are the codes of what a motion is made of, and its own.
func components(m query.Motion) []string {
	out := []string{codeOf(m)}
	for _, role := range m.Members {
		out = append(out, m.Record+" "+role)
	}
	return out
}

func (c *comparison) joinedBy(m query.Motion) string {
	switch {
	case hasAny(c.changes.Records.Added, m.Record), hasAny(c.changes.Components.Added, components(m)...):
		return causeAdded
	case c.isChanged(m):
		return causeJoined
	}
	return causeSelected
}

func (c *comparison) leftBy(m query.Motion) string {
	switch {
	case hasAny(c.changes.Records.Removed, m.Record), hasAny(c.changes.Components.Removed, components(m)...):
		return causeRemoved
	case c.isChanged(m):
		return causeLeft
	}
	return causeForgotten
}

// isChanged reports whether metadata of a motion changed, of its event or of its station.
func (c *comparison) isChanged(m query.Motion) bool {
	return hasAny(c.changes.Records.Changed, m.Record) || hasAny(c.changes.Components.Changed, components(m)...) ||
		hasAny(c.changes.Events.Changed, m.Event) || hasAny(c.changes.Events.Added, m.Event) ||
		hasAny(c.changes.Stations.Changed, c.stations[m.Record])
}

func (c *comparison) isRecomputed(m query.Motion) bool {
	return hasAny(c.changes.Recomputed, components(m)...)
}

// print writes the changes with their causes, the greatest first.
func (d *driftReport) print(p *printer) {
	p.printf("Results against edition %d, which was published:\n", d.Since)
	d.printMakers(p)
	if len(d.Products) == 0 {
		p.printf("  as before\n")
	}
	for i := range d.Products {
		if i == maxLines {
			p.printf("  … and %d more; --json lists them\n", len(d.Products)-maxLines)
			return
		}
		d.Products[i].print(p, d.Bound)
	}
}

// printMakers says by what the editions are computed, where that differs.
func (d *driftReport) printMakers(p *printer) {
	if d.RecipeBefore != d.Recipe {
		p.printf("  the recipe was %s, and is %s\n", d.RecipeBefore, d.Recipe)
	}
	if d.SolverBefore != d.Solver {
		p.printf("  the solver was %s, and is %s\n", d.SolverBefore, d.Solver)
	}
}

func (p *productDrift) print(out *printer, bound *float64) {
	out.printf("  %s: figures %d, changed %d", p.Product, p.Figures, p.Changed)
	if bound != nil {
		out.printf(", beyond %s %d", percentWords(*bound), p.Beyond)
	}
	out.printf("\n")
	for _, f := range p.Largest[:min(len(p.Largest), shownFigures)] {
		out.printf("    %-28s %-6s %11s to %-11s %s\n", f.Of, f.Figure, numberWords(f.Before), numberWords(f.After), f.words.Change)
	}
	for _, c := range p.Causes {
		out.printf("    %s: motions %d, first %s\n", c.Cause, c.Count, c.Codes[0])
	}
}

func percentWords(ratio float64) string { return strconv.FormatFloat(100*ratio, 'g', 6, 64) + " %" }

func numberWords(x *float64) string {
	if x == nil {
		return "none"
	}
	return strconv.FormatFloat(*x, 'g', 6, 64)
}
