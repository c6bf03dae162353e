package query

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"

	"swaybook/query/chart"
)

// Chart is the answer as a chart of all spectra with their statistics: it needs Each.
func (a *SpectrumAnswer) Chart(units Units, marks []chart.Mark, isLinear bool) *chart.Spectra {
	unit, _, per := a.Measure.unitOf(units)
	quantity := a.Measure.short()
	if !a.Measure.isRatio() {
		quantity += " (" + unit + ")"
	}
	c := &chart.Spectra{
		Title: fmt.Sprintf("%s, damping %s", a.Measure.title(), percentText(a.Damping)),
		Notes: []string{a.Selection.heading(), strings.TrimSpace(a.Selection.methodLine())},
		Foot:  Caution, Quantity: quantity, PeriodsS: a.PeriodsS, IsLinear: isLinear, Marks: marks,
	}
	for _, values := range a.Each {
		c.Each = append(c.Each, scaled(values, per))
	}
	a.addCurves(c, per)
	for i := range a.Reductions {
		c.Counts = append(c.Counts, a.Reductions[i].Count)
	}
	return c
}

// addCurves adds the percentiles, with the band between the outer ones, the mean, the
// envelope and the design spectrum.
func (a *SpectrumAnswer) addCurves(c *chart.Spectra, per float64) {
	add := func(name string, kind chart.Kind, of func(r *Reduction) float64) []float64 {
		values := make([]float64, len(a.Reductions))
		for i := range values {
			values[i] = of(&a.Reductions[i]) / per
		}
		c.Curves = append(c.Curves, chart.Curve{Name: name, Kind: kind, Values: values})
		return values
	}
	var bands [][]float64
	order := upTo(len(a.Percentiles))
	slices.SortFunc(order, func(i, j int) int { return cmp.Compare(a.Percentiles[i], a.Percentiles[j]) })
	for _, i := range order {
		name, kind := percentileName(a.Percentiles[i])
		bands = append(bands, add(name, kind, func(r *Reduction) float64 { return r.Percentiles[i] }))
	}
	bands = slices.DeleteFunc(bands, func(values []float64) bool { return !slices.ContainsFunc(values, isDefined) }) // too few
	if last := len(bands) - 1; last > 0 {
		c.Band = chart.Region{Low: bands[0], High: bands[last]}
	}
	add("mean", chart.Mean, func(r *Reduction) float64 { return r.Mean })
	add("greatest", chart.Envelope, func(r *Reduction) float64 { return r.Max })
	add("least", chart.Envelope, func(r *Reduction) float64 { return r.Min })
	if a.Extras.Design == nil {
		return
	}
	values := make([]float64, len(a.PeriodsS))
	for i, t := range a.PeriodsS {
		values[i] = a.Measure.of(designSD(a.Extras.Design, t, a.Damping), omega(t)) / per
	}
	c.Curves = append(c.Curves, chart.Curve{Name: "design", Kind: chart.Design, Values: values})
}

// percentileName is the name of a percentile in figures, that of tables but for the median.
func percentileName(percent float64) (string, chart.Kind) {
	if percent == 50 {
		return "median", chart.Median
	}
	return "p" + percentKey(percent), chart.Percentile
}

// FourWay is the answer as a four-way chart, with what is read at the marks on the median or,
// where few motions support none, on the mean. It needs Each, and SD, PSV or PSA.
func (a *SpectrumAnswer) FourWay(units Units, marks []chart.Mark) *chart.FourWay {
	sd, _, sdInM := MeasureSD.unitOf(units)
	psv, _, psvInMPS := MeasurePSV.unitOf(units)
	flat := a.Chart(UnitsSI, nil, false)
	a.toPSV(flat)
	c := &chart.FourWay{
		Title: "Four-way spectrum, damping " + percentText(a.Damping), Notes: flat.Notes, Foot: flat.Foot, PeriodsS: a.PeriodsS,
		Units: chart.FourWayUnits{SD: sd, PSV: psv, SDInM: sdInM, PSVInMPS: psvInMPS}, Each: flat.Each, Curves: flat.Curves, Counts: flat.Counts,
	}
	var known []chart.Curve
	for _, kind := range []chart.Kind{chart.Median, chart.Mean} {
		for _, curve := range flat.Curves {
			if curve.Kind == kind {
				known = append(known, curve)
			}
		}
	}
	c.Readings = readings(a.PeriodsS, known, marks)
	return c
}

// readings are what is read at the ends of marks, on the first of curves that has a value there.
func readings(periodsS []float64, curves []chart.Curve, marks []chart.Mark) (out []chart.Reading) {
	for _, m := range marks {
		for _, t := range slices.Compact([]float64{m.FromS, max(m.FromS, m.ToS)}) {
			r := chart.Reading{Name: periodName(t), PeriodS: t, PSV: math.NaN()}
			for _, curve := range curves {
				if v := readAt(periodsS, curve.Values, t); isDefined(v) {
					r.Name, r.PSV = r.Name+", "+curve.Name, v
					break
				}
			}
			out = append(out, r)
		}
	}
	return out
}

// toPSV makes the ordinates of a chart in SI PSV, in m/s.
func (a *SpectrumAnswer) toPSV(c *chart.Spectra) {
	if a.Measure == MeasurePSV {
		return
	}
	scale := func(values []float64) {
		for i, t := range a.PeriodsS {
			values[i] *= MeasurePSV.of(1, omega(t)) / a.Measure.of(1, omega(t))
		}
	}
	for _, values := range c.Each {
		scale(values)
	}
	for _, curve := range c.Curves {
		scale(curve.Values)
	}
}

// HasFourWay reports whether the answer has a four-way chart, which ratios have not.
func (a *SpectrumAnswer) HasFourWay() bool { return !a.Measure.isRatio() }

// ValuesAt are what the answer's curves say at a period, by position, in words.
func (a *SpectrumAnswer) ValuesAt(period int, units Units) string {
	unit, _, per := a.Measure.unitOf(units)
	if a.Measure.isRatio() {
		unit = ""
	}
	words := []string{"T = " + figure(a.PeriodsS[period]) + " s"}
	c := chart.Spectra{}
	a.addCurves(&c, per)
	for _, curve := range c.Curves {
		if v := curve.Values[period]; isDefined(v) {
			words = append(words, strings.TrimSpace(curve.Name+" "+figure(v)+" "+unit))
		}
	}
	return strings.Join(append(words, countOf(a.Reductions[period].Count, "motion", "motions")), " · ")
}

// FourWayAt are what the four-way chart says at a period, by position, in words: PSV of all
// curves, and SD and PSA of the median or, where few motions support none, of the mean.
func (a *SpectrumAnswer) FourWayAt(period int, units Units) string {
	t := a.PeriodsS[period]
	unit, _, per := MeasurePSV.unitOf(units)
	words := []string{"T = " + figure(t) + " s"}
	c := chart.Spectra{PeriodsS: a.PeriodsS}
	a.addCurves(&c, 1)
	a.toPSV(&c)
	var read []string
	for _, curve := range c.Curves {
		v := curve.Values[period]
		if !isDefined(v) {
			continue
		}
		words = append(words, curve.Name+" PSV "+figure(v/per)+" "+unit)
		if curve.Kind == chart.Median || curve.Kind == chart.Mean && read == nil {
			sd := v / omega(t)
			for _, m := range []Measure{MeasureSD, MeasurePSA} {
				unit, _, per := m.unitOf(units)
				read = append(read, curve.Name+" "+m.short()+" "+figure(m.of(sd, omega(t))/per)+" "+unit)
			}
		}
	}
	words = append(words, read...)
	return strings.Join(append(words, countOf(a.Reductions[period].Count, "motion", "motions")), " · ")
}

// readAt reads a curve at a period, between its points along a straight line on logarithmic
// axes, as it is drawn; NaN outside.
func readAt(periodsS, values []float64, at float64) float64 {
	for i := range periodsS {
		if periodsS[i] == at {
			return values[i]
		}
		if i > 0 && periodsS[i-1] < at && at < periodsS[i] {
			share := math.Log(at/periodsS[i-1]) / math.Log(periodsS[i]/periodsS[i-1])
			return values[i-1] * math.Pow(values[i]/values[i-1], share)
		}
	}
	return math.NaN()
}

// scaled are values in another unit, of which one is so much.
func scaled(values []float64, per float64) []float64 {
	out := make([]float64, len(values))
	for i, v := range values {
		out[i] = v / per
	}
	return out
}

// ParseMarks reads periods to be marked on a chart, "0.8", "0.8s" or bands "0.7:0.9", with
// commas between them.
func ParseMarks(text string) ([]chart.Mark, error) {
	if strings.TrimSpace(text) == "" {
		return nil, nil
	}
	var out []chart.Mark
	for word := range strings.SplitSeq(text, ",") {
		m, err := parseMark(word)
		if err != nil {
			return nil, err
		}
		out = append(out, m)
	}
	return out, nil
}

func parseMark(text string) (m chart.Mark, err error) {
	if strings.Contains(text, ":") {
		b, err := ParseBand(text)
		if err == nil && (b.FromS == 0 || b.ToS == 0) {
			err = usage("mark", "%q is open; give both ends", text)
		}
		return chart.Mark{Name: fmt.Sprintf("T = %g to %g s", b.FromS, b.ToS), FromS: b.FromS, ToS: b.ToS}, err
	}
	t, err := parseSeconds(text)
	return chart.Mark{Name: periodName(t), FromS: t, ToS: t}, err
}

// periodName is the name of a mark at a period.
func periodName(t float64) string { return fmt.Sprintf("T = %g s", t) }
