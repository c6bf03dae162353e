package query

import (
	"cmp"
	"context"
	"math"
	"slices"

	"swaybook/db"
)

// Caution stands under every answer made of spectra.
const Caution = "For screening and study, not a design certificate: the local code and a licensed engineer decide."

// SpectrumQuestion asks for the statistics of response spectra over a
// selection.
type SpectrumQuestion struct {
	Selection             // component: ComponentRotD50, siting: SitingGround by default
	Damping     float64   // ratio
	Measure     Measure   // MeasurePSA by default
	Percentiles []float64 // 0 to 100; DefaultPercentiles where nil
	Extras                // none by default
	By          Grouping  // the zero Grouping for none
	Band        Band      // grid periods taken; not with PeriodsS
	PeriodsS    []float64 // nil: those of the grid in Band
	Method      Method    // anything but the default is computed from samples
	Each        bool      // the answer has the spectra themselves too
}

// SpectrumAnswer is the statistics at every period, in SI: SD in m, PSV in m/s,
// PSA in g.
type SpectrumAnswer struct {
	Selection   SelectionReport
	Damping     float64
	Measure     Measure
	Percentiles []float64
	PeriodsS    []float64 // ascending
	Reductions  []Reduction
	By          Grouping
	Extras      Extras
	Groups      []SpectrumGroup // nil where none were asked for
	Each        [][]float64     // of every motion a value a period, NaN outside its usable band; nil where not asked for
}

// SpectrumGroup is the statistics of one part of the selection.
type SpectrumGroup struct {
	Group
	Reductions []Reduction
}

// Ask answers the question from one snapshot of the store. The error is a
// UsageError for a wrong question and an EmptyError for an empty selection.
func (q SpectrumQuestion) Ask(ctx context.Context, store *db.Store) (*SpectrumAnswer, error) {
	q, err := q.withDefaults()
	if err != nil {
		return nil, err
	}
	var answer *SpectrumAnswer
	err = view(ctx, store, &q.Selection, func(snapshot *db.Snapshot) error {
		answer, err = q.answer(ctx, snapshot)
		return err
	})
	return answer, err
}

func (q SpectrumQuestion) withDefaults() (SpectrumQuestion, error) {
	var err error
	q.Selection, err = q.Selection.withDefaults(ComponentRotD50, SitingGround, statisticsComponents)
	if err != nil {
		return q, err
	}
	if q.Measure == "" {
		q.Measure = MeasurePSA
	}
	if err := q.Measure.validate(); err != nil {
		return q, err
	}
	if q.Measure == MeasureVH && q.Component == ComponentV {
		return q, usage("measure", "vh is of a horizontal component, v over which it is taken")
	}
	if len(q.PeriodsS) > 0 && q.Band != (Band{}) {
		return q, usage("band", "a list of periods and a band exclude each other; give one")
	}
	if q.Measure.isRatio() && q.Design != nil {
		return q, usage("design", "a ratio of spectra has no design spectrum")
	}
	if q.Percentiles, err = checkPercentiles(q.Percentiles); err != nil {
		return q, err
	}
	if q.Extras, err = q.Extras.withDefaults(); err != nil {
		return q, err
	}
	if err := q.Extras.ofOneStructure(); err != nil {
		return q, err
	}
	if err := cmp.Or(q.Band.validate(), q.By.validate()); err != nil {
		return q, err
	}
	return q, checkOscillators(q.PeriodsS, []float64{q.Damping})
}

func checkPercentiles(percents []float64) ([]float64, error) {
	if percents == nil {
		return DefaultPercentiles(), nil
	}
	for _, p := range percents {
		if err := checkPercentile(p); err != nil {
			return nil, err
		}
	}
	return uniqueInOrder(percents), nil
}

func checkOscillators(periodsS, dampings []float64) error {
	for _, t := range periodsS {
		if !(t > 0) || math.IsInf(t, 1) {
			return usage("period", "%v s is not positive and finite", t)
		}
	}
	for _, zeta := range dampings {
		if err := checkDamping(zeta); err != nil {
			return err
		}
	}
	return nil
}

func (q SpectrumQuestion) answer(ctx context.Context, snapshot *db.Snapshot) (*SpectrumAnswer, error) {
	periods, err := q.periods(snapshot)
	if err != nil {
		return nil, err
	}
	s := source{snapshot: snapshot, method: q.Method}
	oscillators := dampedBy(q.Damping, periods)
	details := s.details(oscillators) | q.By.details()
	if q.Measure == MeasureEta {
		details |= s.details(dampedBy(usualDamping, periods))
	}
	picked, err := pick(ctx, snapshot, q.Selection, details)
	if err != nil {
		return nil, err
	}
	loaded, err := s.load(ctx, picked, oscillators, -1)
	if err != nil {
		return nil, err
	}
	switch q.Measure {
	case MeasureVH:
		loaded, err = s.overHorizontal(ctx, picked, loaded)
	case MeasureEta:
		loaded, err = s.overUsualDamping(ctx, picked, loaded)
	}
	if err != nil {
		return nil, err
	}
	picked.report.noteMethod(q.Method)
	picked.report.Notes = append(picked.report.Notes, append(q.Extras.notes(&picked.report), q.Extras.dampingNote(q.Damping)...)...)
	answer := &SpectrumAnswer{
		Selection: picked.report, Damping: q.Damping, Measure: q.Measure, Percentiles: q.Percentiles,
		PeriodsS: periods, By: q.By, Extras: q.Extras,
	}
	if q.Each {
		answer.Each = q.each(loaded)
	}
	whole := picked.sample(q.Extras)
	if answer.Reductions, err = q.reduceAll(ctx, loaded, whole); err != nil {
		return nil, err
	}
	for _, g := range q.By.part(picked.motions) {
		reductions, err := q.reduceAll(ctx, loaded, whole.of(&g))
		if err != nil {
			return nil, err
		}
		answer.Groups = append(answer.Groups, SpectrumGroup{g, reductions})
	}
	return answer, nil
}

// each turns ordinates into spectra.
func (q SpectrumQuestion) each(o *ordinates) [][]float64 {
	out := make([][]float64, o.motions)
	for i := range out {
		out[i] = make([]float64, len(o.oscillators))
	}
	for p := range o.oscillators {
		omega := omega(o.oscillators[p].PeriodS)
		for i, sd := range o.at(p) {
			out[i][p] = q.Measure.of(sd, omega)
		}
	}
	return out
}

func (q SpectrumQuestion) periods(snapshot *db.Snapshot) ([]float64, error) {
	if len(q.PeriodsS) > 0 {
		return ascending(q.PeriodsS), nil
	}
	return gridPeriods(snapshot, q.Band)
}

// gridPeriods returns the grid's periods in the band, ascending.
func gridPeriods(snapshot *db.Snapshot, band Band) ([]float64, error) {
	grid := ascending(snapshot.Generation.Grid.PeriodsS)
	inside := slices.DeleteFunc(slices.Clone(grid), func(t float64) bool { return !band.Contains(t) })
	if len(inside) == 0 && len(grid) > 0 {
		return nil, usage("band", "no period of the grid, which runs from %v s to %v s, is inside", grid[0], grid[len(grid)-1])
	}
	return inside, nil
}

// noteMethod writes down a method that is not the one of the store.
func (r *SelectionReport) noteMethod(m Method) {
	r.Method = m
	if m != defaultMethod {
		r.Notes = append(r.Notes, "computed by "+m.String()+", which takes maxima among samples only and lengthens the period; for comparison")
	}
}
