package query

import (
	"cmp"
	"context"
	"math"
	"math/big"
	"slices"

	"swaybook/db"
	"swaybook/query/design"
)

// DemandQuestion asks what the motions of a selection demand of a structure.
type DemandQuestion struct {
	Selection             // component: ComponentRotD50, siting: SitingGround by default
	Structure   Structure // see ParseStructure
	BandWidth   float64   // ratio: the envelope over T·(1±BandWidth) too; 0: none
	Extras                // none by default
	By          Grouping  // the zero Grouping for none
	Percentiles []float64 // 0 to 100; DefaultPercentiles where nil
	Method      Method    // anything but the default is computed from samples
	Capacities  Limits    // none by default
	Each        bool      // the answer has the motions' own values too
}

// Quantity is one quantity of a demand.
type Quantity struct {
	Name      string     // with its unit: sd_m, psv_m_s, psa_g, base_shear_n, base_moment_nm, strain_energy_j
	Reduction *Reduction // nil where the mass or the height that it needs is unknown
}

// DemandBand is the envelope over a band of periods: of every motion the
// largest value in the band, then the statistics of these.
type DemandBand struct {
	FromS, ToS float64
	Quantities []Quantity
}

// DemandAnswer is the statistics at the structure's period, in the SI units
// that the quantities name, and in g for PSA.
type DemandAnswer struct {
	Selection   SelectionReport
	Structure   Structure
	Percentiles []float64
	Quantities  []Quantity
	Band        *DemandBand // nil where none was asked for
	By          Grouping
	Extras      Extras
	Groups      []DemandGroup // nil where none were asked for
	// Capacities, and the demand over the band where there is one, or else at the period,
	// beside them.
	Capacities  Limits
	Limits      []LimitRatio
	Exceedances []Exceedance // of the same demand, by quantity; nil where not asked for
}

// DemandGroup is the statistics of one part of the selection.
type DemandGroup struct {
	Group
	Quantities []Quantity
	Band       *DemandBand
}

// demandQuantities gives each quantity of a structure from an SD in m at ω in
// rad/s, or NaN where the structure does not tell enough.
//
//	base shear     = m·A          A = ω²·SD
//	base moment    = m·A·h
//	strain energy  = ½·m·V²       V = ω·SD
//
// with the mass m at height h over the base. The energy is that of the spring
// at SD, ½·k·SD² with k = m·ω².
//
// Source: A. K. Chopra, Dynamics of Structures, 4th ed., Prentice Hall 2012,
// section 6.6 (cited from memory).
var demandQuantities = []struct {
	name string
	of   func(s *Structure, sd, omega float64) float64
}{
	{"sd_m", func(_ *Structure, sd, omega float64) float64 { return MeasureSD.of(sd, omega) }},
	{"psv_m_s", func(_ *Structure, sd, omega float64) float64 { return MeasurePSV.of(sd, omega) }},
	{"psa_g", func(_ *Structure, sd, omega float64) float64 { return MeasurePSA.of(sd, omega) }},
	{"base_shear_n", baseShear},
	{"base_moment_nm", func(s *Structure, sd, omega float64) float64 {
		return baseShear(s, sd, omega) * orNaN(s.HeightM)
	}},
	{"strain_energy_j", func(s *Structure, sd, omega float64) float64 {
		v := MeasurePSV.of(sd, omega)
		return 0.5 * orNaN(s.MassKG) * v * v
	}},
}

func baseShear(s *Structure, sd, omega float64) float64 {
	return orNaN(s.MassKG) * (sd * omega * omega)
}

// Ask answers the question from one snapshot of the store. The error is a
// UsageError for a wrong question and an EmptyError for an empty selection.
func (q DemandQuestion) Ask(ctx context.Context, store *db.Store) (*DemandAnswer, error) {
	q, err := q.withDefaults()
	if err != nil {
		return nil, err
	}
	var answer *DemandAnswer
	err = view(ctx, store, &q.Selection, func(snapshot *db.Snapshot) error {
		answer, err = q.answer(ctx, snapshot)
		return err
	})
	return answer, err
}

func (q DemandQuestion) withDefaults() (DemandQuestion, error) {
	var err error
	q.Selection, err = q.Selection.withDefaults(ComponentRotD50, SitingGround, statisticsComponents)
	if err != nil {
		return q, err
	}
	if q.Percentiles, err = checkPercentiles(q.Percentiles); err != nil {
		return q, err
	}
	if q.Extras, err = q.Extras.withDefaults(); err != nil {
		return q, err
	}
	if err := cmp.Or(checkBandWidth(q.BandWidth), q.By.validate()); err != nil {
		return q, err
	}
	return q, cmp.Or(q.Structure.validate(), q.Capacities.validate(&q.Structure))
}

func (q DemandQuestion) answer(ctx context.Context, snapshot *db.Snapshot) (*DemandAnswer, error) {
	s := source{snapshot: snapshot, method: q.Method}
	band := q.Structure.bandPeriods(q.BandWidth, snapshot.Generation.Grid.PeriodsS)
	oscillators := dampedBy(q.Structure.Damping, band)
	picked, err := pick(ctx, snapshot, q.Selection, s.details(oscillators)|q.By.details())
	if err != nil {
		return nil, err
	}
	at := slices.Index(band, q.Structure.PeriodS)
	loaded, err := s.load(ctx, picked, oscillators, at)
	if err != nil {
		return nil, err
	}
	picked.report.noteMethod(q.Method)
	picked.report.Notes = append(picked.report.Notes, append(q.Extras.notes(&picked.report), q.Extras.dampingNote(q.Structure.Damping)...)...)
	answer := &DemandAnswer{Selection: picked.report, Structure: q.Structure, Percentiles: q.Percentiles, By: q.By, Extras: q.Extras, Capacities: q.Capacities}
	whole := picked.sample(q.Extras)
	answer.Quantities, answer.Band = q.reduceBoth(whole, loaded, at, func(r *reducer, name string, x *Reduction) {
		for _, l := range q.Capacities.of(name, q.Structure.HeightM) {
			answer.Limits = append(answer.Limits, r.compare(l, x))
		}
		if q.Each {
			answer.Exceedances = append(answer.Exceedances, r.exceedance(name))
		}
	})
	for _, g := range q.By.part(picked.motions) {
		quantities, overBand := q.reduceBoth(whole.of(&g), loaded, at, func(*reducer, string, *Reduction) {})
		answer.Groups = append(answer.Groups, DemandGroup{g, quantities, overBand})
	}
	return answer, nil
}

// reduceBoth reduces a sample at the structure's period, that of position at, and over the
// band, and calls compare with what is set beside capacities right after it was reduced.
func (q DemandQuestion) reduceBoth(s sample, o *ordinates, at int, compare func(r *reducer, name string, x *Reduction)) ([]Quantity, *DemandBand) {
	r := newReducer(s, q.Percentiles, q.Extras)
	compared := func(name string, x *Reduction) { compare(r, name, x) }
	var quantities []Quantity
	if q.BandWidth == 0 {
		q.Structure.each(o, []int{at}, s.at, q.Design, r.reducing(&quantities, compared))
		return quantities, nil
	}
	q.Structure.each(o, []int{at}, s.at, q.Design, r.reducing(&quantities, nil))
	last := len(o.oscillators) - 1
	band := &DemandBand{FromS: o.oscillators[0].PeriodS, ToS: o.oscillators[last].PeriodS}
	q.Structure.each(o, upTo(last+1), s.at, q.Design, r.reducing(&band.Quantities, compared))
	return quantities, band
}

// bandPeriods returns the structure's period and, where there is a band of this half-width,
// its ends and the grid's periods inside; ascending, each once.
func (s *Structure) bandPeriods(width float64, grid []float64) []float64 {
	t := s.PeriodS
	if width == 0 {
		return []float64{t}
	}
	band := Band{FromS: stretched(t, -width), ToS: stretched(t, width)}
	list := []float64{band.FromS, t, band.ToS}
	for _, p := range grid {
		if band.Contains(p) {
			list = append(list, p)
		}
	}
	return ascending(list)
}

// stretched returns t·(1+by) of the decimals that t and by are written as,
// rounded once: the band of 1.5 s ± 10 % begins at the 1.35 s that a grid may
// hold, where floating-point numbers would miss it.
func stretched(t, by float64) float64 {
	ratio := new(big.Rat).Add(decimal(by), big.NewRat(1, 1))
	x, _ := ratio.Mul(ratio, decimal(t)).Float64()
	return x
}

// decimal is the shortest decimal that restores x, which is finite.
func decimal(x float64) *big.Rat {
	r, ok := new(big.Rat).SetString(shortest(x))
	if !ok {
		panic("query: no decimal for " + shortest(x))
	}
	return r
}

// forEach is given one quantity after another: its value of each motion, valid until the
// next call, and that of the design spectrum, NaN for none.
type forEach func(name string, values []float64, level float64)

// each gives of the motions at these places the largest values over the oscillators of
// these positions.
func (s *Structure) each(o *ordinates, positions, at []int, d *design.Spectrum, give forEach) {
	values := make([]float64, len(at))
	for _, quantity := range demandQuantities {
		level := math.NaN()
		for first, p := range positions {
			periodS, sd := o.oscillators[p].PeriodS, o.at(p)
			w, isFirst := omega(periodS), first == 0
			if x := quantity.of(s, designSD(d, periodS, s.Damping), w); isEnvelope(x, level, isFirst) {
				level = x
			}
			for k, at := range at {
				if x := quantity.of(s, sd[at], w); isEnvelope(x, values[k], isFirst) {
					values[k] = x
				}
			}
		}
		give(quantity.name, values, level)
	}
}

// reducing returns a forEach that appends the reduction of each quantity to out and, where
// also is not nil, calls that with it.
func (r *reducer) reducing(out *[]Quantity, also func(name string, x *Reduction)) forEach {
	return func(name string, values []float64, level float64) {
		q := Quantity{Name: name}
		if slices.ContainsFunc(values, isDefined) {
			x := r.reduce(values, level)
			q.Reduction = &x
			if also != nil {
				also(name, &x)
			}
		}
		*out = append(*out, q)
	}
}

// isEnvelope reports whether x takes the place of the largest value so far. What has no
// value at one period has no envelope.
func isEnvelope(x, largest float64, isFirst bool) bool {
	return isFirst || x > largest || math.IsNaN(x)
}
