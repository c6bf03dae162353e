package query

import (
	"context"
	"maps"
	"math"
	"slices"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
	"swaybook/query/design"
)

// Source says where the ordinates of a portfolio come from.
type Source string

// Computed from the stored samples where they are not stored, or interpolated between
// those that are.
const (
	OrdinatesExact Source = "exact"
	OrdinatesGrid  Source = "grid"
)

// ParseSource reads "exact" or "grid". The empty text gives OrdinatesExact.
func ParseSource(text string) (Source, error) {
	switch s := Source(text); s {
	case "":
		return OrdinatesExact, nil
	case OrdinatesExact, OrdinatesGrid:
		return s, nil
	}
	return "", usage("ordinates", "unknown source %q; accepted: exact, grid", text)
}

// PortfolioQuestion asks what the motions of a selection demand of many structures.
type PortfolioQuestion struct {
	Selection   // component: ComponentRotD50, siting: SitingGround by default
	Extras      // none by default
	Structures  []PortfolioStructure
	Ordinates   Source    // OrdinatesExact by default
	Percentiles []float64 // 0 to 100; DefaultPercentiles where nil
	Method      Method    // anything but the default is computed from samples
}

// PortfolioAnswer has a row a structure, in the order of the question.
type PortfolioAnswer struct {
	Selection   SelectionReport
	Percentiles []float64
	Ordinates   Source
	Error       *GridError // of interpolation, nil of exact ordinates
	Rows        []PortfolioRow
	Extras      Extras
}

// PortfolioRow is the demand on one structure.
type PortfolioRow struct {
	Structure  *PortfolioStructure
	Quantities []Quantity // at the period, or of all modes
	// Band is the envelope over the periods that the structure may have, nil where none
	// were given.
	Band *DemandBand
	// Limits compare the demand, over the band where there is one, with the capacities.
	Limits []LimitRatio
}

// LimitRatio is a demand over a capacity.
type LimitRatio struct {
	Name        string    // displacement, base_shear or drift
	Limit       float64   // m, N, or displacement over height
	Percentiles []float64 // of the demand, over the limit
	Max         float64
	Above       float64 // share of the motions' weight that exceeds the limit
	CountAbove  int     // of motions that do
	Count       int     // of motions
	Governing   string  // the record that gives Max
}

// Ask answers the question from one snapshot of the store. The error is a UsageError for a
// wrong question and an EmptyError for an empty selection.
func (q PortfolioQuestion) Ask(ctx context.Context, store *db.Store) (*PortfolioAnswer, error) {
	q, err := q.withDefaults()
	if err != nil {
		return nil, err
	}
	var answer *PortfolioAnswer
	err = view(ctx, store, &q.Selection, func(snapshot *db.Snapshot) error {
		answer, err = q.answer(ctx, snapshot)
		return err
	})
	return answer, err
}

func (q PortfolioQuestion) withDefaults() (PortfolioQuestion, error) {
	var err error
	if q.Selection, err = q.Selection.withDefaults(ComponentRotD50, SitingGround, statisticsComponents); err != nil {
		return q, err
	}
	if q.Percentiles, err = checkPercentiles(q.Percentiles); err != nil {
		return q, err
	}
	if q.Ordinates, err = ParseSource(string(q.Ordinates)); err != nil {
		return q, err
	}
	if q.Ordinates == OrdinatesGrid && q.Method != defaultMethod {
		return q, usage("ordinates", "those of the grid are by %s", defaultMethod)
	}
	if len(q.Structures) == 0 {
		return q, usage("structures", "there is none")
	}
	if q.Extras, err = q.Extras.withDefaults(); err != nil {
		return q, err
	}
	return q, q.Extras.ofOneStructure()
}

func (q PortfolioQuestion) answer(ctx context.Context, snapshot *db.Snapshot) (*PortfolioAnswer, error) {
	w, err := q.begin(ctx, snapshot, 0)
	if err != nil {
		return nil, err
	}
	answer := &PortfolioAnswer{Percentiles: q.Percentiles, Ordinates: q.Ordinates, Extras: q.Extras, Rows: make([]PortfolioRow, len(w.plans))}
	err = w.run(ctx, func(ctx context.Context, o *ordinates, from, to int) error {
		return w.reduce(ctx, answer.Rows, o, from, to)
	})
	if err != nil {
		return nil, err
	}
	if answer.Error, err = w.end(ctx); err != nil {
		return nil, err
	}
	answer.Selection = w.picked.report
	answer.Selection.Notes = append(answer.Selection.Notes, q.notes(&answer.Selection)...)
	answer.noteCounts()
	return answer, nil
}

// begin picks the motions and plans what is needed of them.
func (q *PortfolioQuestion) begin(ctx context.Context, snapshot *db.Snapshot, details db.Details) (*portfolioWork, error) {
	plans, err := q.plans(&snapshot.Generation.Grid)
	if err != nil {
		return nil, err
	}
	picked, err := pick(ctx, snapshot, q.Selection, details|db.DetailMotion)
	if err != nil {
		return nil, err
	}
	picked.report.noteMethod(q.Method)
	return &portfolioWork{question: q, source: &source{snapshot: snapshot, method: q.Method}, picked: picked, plans: plans, unfit: map[int]string{}}, nil
}

// end reports on what was done.
func (w *portfolioWork) end(ctx context.Context) (*GridError, error) {
	e, err := w.gridError(ctx)
	if err != nil {
		return nil, err
	}
	if err := w.picked.leaveOut(w.unfit); err != nil {
		return nil, err
	}
	if w.picked.ignoresBand {
		w.picked.noteBand(0, 0)
	}
	return e, nil
}

func (q *PortfolioQuestion) notes(s *SelectionReport) []string {
	out := q.Extras.notes(s)
	if d := q.Design; d != nil {
		others := 0
		ratio, fixed := d.Damping()
		for i := range q.Structures {
			if fixed && q.Structures[i].Damping != ratio {
				others++
			}
		}
		if others > 0 {
			out = append(out, "the design spectrum is that of "+percentText(ratio)+" damping, set beside "+countOf(others, "structure", "structures")+" of another")
		}
	}
	if slices.ContainsFunc(q.Structures, func(s PortfolioStructure) bool { return len(s.Modes) > 0 }) {
		out = append(out, "of structures of several modes base shear and moment are combined record by record by CQC; the combination of peaks is an estimate")
	}
	return out
}

// noteCounts says how many structures have fewer motions than the selection, or none: the
// usable bands of the others do not reach their periods.
func (a *PortfolioAnswer) noteCounts() {
	fewer, none := 0, 0
	for i := range a.Rows {
		switch n := a.Rows[i].quantity("sd_m", true).Count; {
		case n == 0:
			none++
		case n < a.Selection.Spectra:
			fewer++
		}
	}
	if fewer > 0 {
		a.Selection.Notes = append(a.Selection.Notes, "for "+countOf(fewer, "structure", "structures")+" some motions cannot be believed at the periods: see count")
	}
	if none > 0 {
		a.Selection.Notes = append(a.Selection.Notes, "for "+countOf(none, "structure", "structures")+" no motion can be believed at all periods")
	}
}

// plan is where the ordinates of one structure are among those of its part.
type plan struct {
	structure *PortfolioStructure
	wanted    []spectrum.Oscillator // the period's first, then those of the band or of further modes
	at        []int                 // positions of wanted
	band      Band                  // of the band's ends, where there is one
}

// plans are those of all structures. The error is a UsageError for a structure that the
// grid cannot serve where it should.
func (q *PortfolioQuestion) plans(grid *db.Grid) ([]plan, error) {
	out := make([]plan, len(q.Structures))
	for i := range q.Structures {
		s := &q.Structures[i]
		out[i] = plan{structure: s, wanted: []spectrum.Oscillator{{PeriodS: s.PeriodS, Damping: s.Damping}}}
		for _, m := range s.Modes[min(1, len(s.Modes)):] {
			out[i].wanted = append(out[i].wanted, spectrum.Oscillator{PeriodS: m.PeriodS, Damping: m.Damping})
		}
		if s.BandWidth > 0 && len(s.Modes) == 0 {
			periods := s.bandPeriods(s.BandWidth, grid.PeriodsS)
			out[i].band = Band{periods[0], periods[len(periods)-1]}
			out[i].wanted = append(out[i].wanted, dampedBy(s.Damping, periods)...)
		}
		if q.Ordinates == OrdinatesGrid {
			for _, o := range out[i].wanted {
				if err := onGrid(grid, o); err != nil {
					return nil, usage("structures", "%s: %v", s.ID, err)
				}
			}
		}
	}
	return out, nil
}

// portfolioWork carries a question out, part by part.
type portfolioWork struct {
	question *PortfolioQuestion
	source   *source
	picked   *picked
	plans    []plan
	unfit    map[int]string // motions that cannot be answered for, and why
	grid     *gridSpectra   // of OrdinatesGrid
}

// portfolioValues bounds the ordinates in memory at a time: 256 MB.
const portfolioValues = 1 << 25

// run loads the ordinates part by part and has each part answered for: the structures of
// plans from … to-1.
func (w *portfolioWork) run(ctx context.Context, answer func(ctx context.Context, o *ordinates, from, to int) error) error {
	motions := len(w.picked.motions)
	for from := 0; from < len(w.plans); {
		oscillators, to := gather(w.plans, from, max(1, portfolioValues/max(1, motions)))
		o, err := w.load(ctx, oscillators)
		if err != nil {
			return err
		}
		if err := answer(ctx, o, from, to); err != nil {
			return err
		}
		from = to
	}
	return nil
}

// gather lists the oscillators, each once, of as many plans as have no more than so many,
// at least one, and notes their positions.
func gather(plans []plan, from, most int) (oscillators []spectrum.Oscillator, to int) {
	positions := map[spectrum.Oscillator]int{}
	for to = from; to < len(plans); to++ {
		p := &plans[to]
		if to > from && len(oscillators)+len(p.wanted) > most {
			return oscillators, to
		}
		p.at = make([]int, len(p.wanted))
		for i, o := range p.wanted {
			position, ok := positions[o]
			if !ok {
				position = len(oscillators)
				positions[o] = position
				oscillators = append(oscillators, o)
			}
			p.at[i] = position
		}
	}
	return oscillators, to
}

// load returns the ordinates of all motions, NaN where they do not count.
func (w *portfolioWork) load(ctx context.Context, oscillators []spectrum.Oscillator) (o *ordinates, err error) {
	var unfit map[int]string
	if w.question.Ordinates == OrdinatesGrid {
		o, unfit, err = w.interpolated(ctx, oscillators)
	} else {
		o, unfit, err = w.source.loadMotions(ctx, w.picked.motions, oscillators)
	}
	if err != nil {
		return nil, err
	}
	maps.Copy(w.unfit, unfit)
	if !w.picked.ignoresBand {
		o.keepUsable(w.picked.motions, -1)
	}
	o.keepBest(w.picked.versions.rivals(w.picked.motions), -1, w.unfit)
	for i := range w.unfit {
		for p := range o.oscillators {
			o.at(p)[i] = math.NaN()
		}
	}
	return o, nil
}

// reduce answers for the structures of plans from … to-1, side by side.
func (w *portfolioWork) reduce(ctx context.Context, rows []PortfolioRow, o *ordinates, from, to int) error {
	workers := min(maxWorkers(), to-from)
	sample := w.picked.sample(w.question.Extras)
	return inParallel(ctx, workers, func(ctx context.Context, first int) error {
		r := newReducer(sample, w.question.Percentiles, w.question.Extras)
		for i := from + first; i < to && ctx.Err() == nil; i += workers {
			rows[i] = w.plans[i].demand(r, o)
		}
		return ctx.Err()
	})
}

// demand reduces what the motions demand of the structure.
func (p *plan) demand(r *reducer, o *ordinates) PortfolioRow {
	s := p.structure
	row := PortfolioRow{Structure: s}
	compare := func(name string, x *Reduction) {
		for _, l := range s.limitsOf(name) {
			row.Limits = append(row.Limits, r.compare(l, x))
		}
	}
	switch {
	case s.BandWidth > 0 && len(s.Modes) == 0:
		s.each(o, p.at[:1], r.at, r.extras.Design, r.reducing(&row.Quantities, nil))
		row.Band = &DemandBand{FromS: p.band.FromS, ToS: p.band.ToS}
		p.compared(o, r.at, r.extras.Design, r.reducing(&row.Band.Quantities, compare))
	default:
		p.compared(o, r.at, r.extras.Design, r.reducing(&row.Quantities, compare))
	}
	return row
}

// compared gives what is set beside capacities: over the band where there is one, and
// combined where there are modes.
func (p *plan) compared(o *ordinates, at []int, d *design.Spectrum, give forEach) {
	switch s := p.structure; {
	case len(s.Modes) > 0:
		p.eachCombined(o, at, d, give)
	case s.BandWidth > 0:
		s.each(o, p.at[1:], at, d, give)
	default:
		s.each(o, p.at[:1], at, d, give)
	}
}

// limit is a capacity, as it was given and in the unit of the quantity that it limits.
type limit struct {
	name          string
	given, inUnit float64
}

// limitsOf are the capacities that limit a quantity.
func (s *PortfolioStructure) limitsOf(quantity string) []limit {
	return s.Limits.of(quantity, s.HeightM)
}

// compare sets a quantity that the reducer has just reduced beside a capacity.
func (r *reducer) compare(l limit, x *Reduction) LimitRatio {
	out := LimitRatio{Name: l.name, Limit: l.given, Max: x.Max / l.inUnit, Above: r.above(l.inUnit), CountAbove: len(r.reduced) - atMost(r.reduced, l.inUnit), Count: x.Count, Governing: x.Governing}
	for _, p := range x.Percentiles {
		out.Percentiles = append(out.Percentiles, p/l.inUnit)
	}
	return out
}
