package query

import (
	"fmt"
	"io"
	"math"
	"slices"
)

// Write renders the answer as a table of what matters first, or as CSV or JSON of
// everything, which are in SI whatever the units. The error is a UsageError for another
// format and otherwise one of w.
func (a *PortfolioAnswer) Write(w io.Writer, format Format, units Units) error {
	return answer{"demands", func() []byte { return a.table(units) }, a.csv, a.object}.write(w, format)
}

// Remarks returns the selection's remarks, how far interpolated ordinates are off, and the
// caution.
func (a *PortfolioAnswer) Remarks() string { return a.Error.remark() + remarks(&a.Selection) }

// tableRemarks say what a table has no room for.
func (a *PortfolioAnswer) tableRemarks() string {
	if a.Extras.isAny() {
		return "note: what --show and --design add stands in CSV and JSON\n"
	}
	return ""
}

// remark is a line, or none where ordinates are exact.
func (e *GridError) remark() string {
	if e == nil {
		return ""
	}
	return fmt.Sprintf("note: ordinates interpolated in the grid: of %s and %s, exact ones differ by %s in the median, %s at 95%% of them, %s at most\n",
		countOf(e.Oscillators, "oscillator", "oscillators"), countOf(e.Motions, "motion", "motions"),
		percentTitle(e.Median), percentTitle(e.P95), percentTitle(e.Max))
}

// object is nil where ordinates are exact.
func (e *GridError) object() any {
	if e == nil {
		return nil
	}
	return object{{"oscillators", e.Oscillators}, {"motions", e.Motions}, {"median", e.Median}, {"p95", e.P95}, {"max", e.Max}}
}

// shown are the positions of the percentiles that a table has room for: the median, where
// it was asked for, and the greatest.
func (a *PortfolioAnswer) shown() []int {
	if len(a.Percentiles) == 0 {
		return nil
	}
	greatest := a.greatest()
	if median := slices.Index(a.Percentiles, 50); median >= 0 && median != greatest {
		return []int{median, greatest}
	}
	return []int{greatest}
}

// greatest is the position of the greatest percentile, -1 where there is none.
func (a *PortfolioAnswer) greatest() int {
	at := -1
	for i, p := range a.Percentiles {
		if at < 0 || p > a.Percentiles[at] {
			at = i
		}
	}
	return at
}

// columnsOfPortfolio are the quantities that a table shows, the last only with its greatest
// percentile.
var columnsOfPortfolio = []struct{ name, title string }{{"sd_m", "SD"}, {"base_shear_n", "shear"}, {"base_moment_nm", "moment"}}

// rows is the table of the answer.
func (a *PortfolioAnswer) rows(units Units) table {
	t := table{columns: []column{{name: "structure", isWord: true}, {name: "period", unit: "s"}, {name: "damping"}, {name: "count"}}}
	for _, c := range columnsOfPortfolio {
		for _, i := range a.shown() {
			name, _ := quantityUnits[c.name].in(units)
			t.columns = append(t.columns, column{name: c.title + " p" + percentKey(a.Percentiles[i]), unit: name})
		}
	}
	t.columns = append(t.columns, column{name: "ratio"}, column{name: "limit", isWord: true}, column{name: "above"}, column{name: "governing", isWord: true})
	for i := range a.Rows {
		t.add(a.tableRow(&a.Rows[i], units)...)
	}
	return t
}

func (a *PortfolioAnswer) title() string {
	return fmt.Sprintf("Demand on %s, %s ordinates%s", countOf(len(a.Rows), "structure", "structures"), a.Ordinates, a.envelopeWords())
}

func (a *PortfolioAnswer) table(units Units) []byte {
	t := a.rows(units)
	text := fmt.Appendf(nil, "%s\n%s\n%s\n", a.title(), a.Selection.heading(), a.Selection.methodLine())
	return append(append(append(t.appendTo(text), '\n'), a.tableRemarks()...), a.Remarks()...)
}

func (a *PortfolioAnswer) hasBand() bool {
	return slices.ContainsFunc(a.Rows, func(r PortfolioRow) bool { return r.Band != nil })
}

// envelopeWords say what figures are of where periods are uncertain.
func (a *PortfolioAnswer) envelopeWords() string {
	if a.hasBand() {
		return "; where the period is uncertain the largest of every motion over its band"
	}
	return ""
}

func (a *PortfolioAnswer) tableRow(row *PortfolioRow, units Units) []string {
	s := row.Structure
	compared := row.quantity("sd_m", true)
	cells := []string{s.ID, figure(s.PeriodS), percentText(s.Damping), fmt.Sprint(compared.Count)}
	for _, c := range columnsOfPortfolio {
		_, per := quantityUnits[c.name].in(units)
		x := row.quantity(c.name, true)
		for _, i := range a.shown() {
			cells = append(cells, percentileCell(x, i, per))
		}
	}
	worst := row.worst(a.Percentiles)
	ratio, name, above, governing := "-", "-", "-", a.Selection.governingText(compared)
	if worst != nil {
		ratio, name, above, governing = figure(worst.ratio), worst.Name, percentTitle(worst.Above), worst.Governing
		if worst.percent != a.Percentiles[a.greatest()] {
			ratio += " (p" + percentKey(worst.percent) + ")"
		}
	}
	return append(cells, ratio, name, above, governing)
}

func percentileCell(x *Reduction, i int, per float64) string {
	if i >= len(x.Percentiles) {
		return "-"
	}
	if x.Count > 0 && math.IsNaN(x.Percentiles[i]) {
		return "too few"
	}
	return figure(x.Percentiles[i] / per)
}

// quantity is the reduction of one quantity, of the band where there is one and it is asked
// for; that of no motion where it is unknown.
func (r *PortfolioRow) quantity(name string, overBand bool) *Reduction {
	list := r.Quantities
	if overBand && r.Band != nil {
		list = r.Band.Quantities
	}
	for _, q := range list {
		if q.Name == name && q.Reduction != nil {
			return q.Reduction
		}
	}
	nan := math.NaN()
	return &Reduction{Mean: nan, LogMean: nan, LogStd: nan, Min: nan, Max: nan}
}

// worstLimit is the limit that the demand comes nearest to, or exceeds most, by a percentile.
type worstLimit struct {
	*LimitRatio
	ratio, percent float64
}

// worst takes the highest of the percentiles that the sample supports. It is nil where no
// limit is given or none is supported.
func (r *PortfolioRow) worst(percents []float64) *worstLimit {
	var worst *worstLimit
	for i := range r.Limits {
		l := &r.Limits[i]
		for k, x := range l.Percentiles {
			switch p := percents[k]; {
			case !isDefined(x):
			case worst == nil, p > worst.percent, p == worst.percent && x > worst.ratio:
				worst = &worstLimit{l, x, p}
			}
		}
	}
	return worst
}

// in returns a quantity's unit and the value of one of it in the unit of answers.
func (u quantityUnit) in(units Units) (name string, per float64) {
	if units == UnitsUS {
		return u.us, u.perUS
	}
	return u.si, u.perSI
}

// portfolioQuantities are the quantities of CSV files.
var portfolioQuantities = []string{"sd_m", "psa_g", "base_shear_n", "base_moment_nm"}

// limitNames are the limits of CSV files.
var limitNames = []string{"displacement", "drift", "base_shear"}

// csv has a row a structure, and the same columns whatever the structures are.
func (a *PortfolioAnswer) csv() []byte {
	names := append(slices.Clone(portfolioQuantities), "base_shear_srss_n", "base_moment_srss_nm")
	list := statisticsOf(&a.Selection, a.Percentiles, a.Extras)
	var l csvLine
	l.words("id", "name", "period_s", "damping", "mass_kg", "height_m", "modes", "count")
	for _, prefix := range prefixes(names) {
		for i := range list {
			l.word(prefix + "_" + list[i].csv)
		}
	}
	l.words("band_from_s", "band_to_s", "band_count")
	for _, limit := range limitNames {
		l.words(limitColumns(limit, a.Percentiles)...)
	}
	l.words("ratio", "ratio_percentile", "governing_limit", "limit_governing")
	l.words(a.Selection.csvGoverning()...)
	l.end()
	for i := range a.Rows {
		a.csvRow(&l, &a.Rows[i], list, names)
	}
	return l.text
}

func prefixes(names []string) []string {
	out := slices.Clone(names)
	for _, name := range portfolioQuantities {
		out = append(out, "band_"+name)
	}
	return out
}

func (a *PortfolioAnswer) csvRow(l *csvLine, row *PortfolioRow, list []statistic, names []string) {
	s := row.Structure
	l.words(s.ID, s.Name)
	l.number(s.PeriodS)
	l.number(s.Damping)
	l.number(orNaN(s.MassKG))
	l.number(orNaN(s.HeightM))
	l.integer(len(s.Modes))
	displacement := row.quantity("sd_m", false)
	l.integer(displacement.Count)
	figures := func(q []Quantity, names []string) {
		for _, name := range names {
			x := reductionOf(q, name)
			for i := range list {
				if x == nil {
					l.word("")
				} else {
					l.number(list[i].of(x))
				}
			}
		}
	}
	figures(row.Quantities, names)
	band := row.Band
	if band == nil {
		band = &DemandBand{FromS: math.NaN(), ToS: math.NaN()}
	}
	figures(band.Quantities, portfolioQuantities)
	l.number(band.FromS)
	l.number(band.ToS)
	if x := reductionOf(band.Quantities, "sd_m"); x != nil {
		l.integer(x.Count)
	} else {
		l.word("")
	}
	a.csvLimits(l, row)
	l.word(displacement.Governing)
	if a.Selection.hasRoles() {
		l.word(displacement.GoverningComponent)
	}
	l.end()
}

func reductionOf(list []Quantity, name string) *Reduction {
	for _, q := range list {
		if q.Name == name {
			return q.Reduction
		}
	}
	return nil
}

// limitColumns are those of a capacity.
func limitColumns(name string, percents []float64) []string {
	out := []string{name + "_limit"}
	for _, p := range percents {
		out = append(out, name+"_ratio_p"+percentKey(p))
	}
	return append(out, name+"_ratio_max", name+"_share_above")
}

// limit writes the columns of a capacity, empty where it is not among these.
func (l *csvLine) limit(limits []LimitRatio, name string, percents []float64) {
	at := slices.IndexFunc(limits, func(r LimitRatio) bool { return r.Name == name })
	if at < 0 {
		l.words(make([]string, len(limitColumns(name, percents)))...)
		return
	}
	limit := &limits[at]
	l.number(limit.Limit)
	for _, x := range limit.Percentiles {
		l.number(x)
	}
	l.number(limit.Max)
	l.number(limit.Above)
}

func (a *PortfolioAnswer) csvLimits(l *csvLine, row *PortfolioRow) {
	for _, name := range limitNames {
		l.limit(row.Limits, name, a.Percentiles)
	}
	worst := row.worst(a.Percentiles)
	if worst == nil {
		l.words("", "", "", "")
		return
	}
	l.number(worst.ratio)
	l.number(worst.percent)
	l.words(worst.Name, worst.Governing)
}

func (a *PortfolioAnswer) object() object {
	o := object{{"selection", a.Selection.object()}, {"ordinates", string(a.Ordinates)}, {"interpolation_error", a.Error.object()}}
	list := statisticsOf(&a.Selection, a.Percentiles, a.Extras)
	rows := make([]object, len(a.Rows))
	for i := range a.Rows {
		rows[i] = a.rowObject(&a.Rows[i], list)
	}
	return append(o, field{"structures", rows}, field{"caution", Caution})
}

func (a *PortfolioAnswer) rowObject(row *PortfolioRow, list []statistic) object {
	s := row.Structure
	o := object{
		{"id", s.ID}, {"name", s.Name}, {"period_s", s.PeriodS}, {"damping", s.Damping}, {"mass_kg", orNaN(s.MassKG)}, {"height_m", orNaN(s.HeightM)},
		{"modes", len(s.Modes)}, {"quantities", a.Selection.quantitiesObject(list, row.Quantities)}, {"band", nil}, {"limits", limitsObject(row.Limits, a.Percentiles)},
		{"ratio", nil}, {"ratio_percentile", nil}, {"governing_limit", nil}, {"limit_governing", nil},
	}
	if row.Band != nil {
		o[8].value = a.Selection.bandObject(list, row.Band)
	}
	if worst := row.worst(a.Percentiles); worst != nil {
		o[10].value, o[11].value, o[12].value, o[13].value = worst.ratio, worst.percent, worst.Name, worst.Governing
	}
	return o
}

// limitsObject has capacities by name, with the demand beside them.
func limitsObject(limits []LimitRatio, percents []float64) object {
	o := object{}
	for _, l := range limits {
		ratios := object{}
		for i, p := range percents {
			ratios = append(ratios, field{percentKey(p), l.Percentiles[i]})
		}
		o = append(o, field{l.Name, object{{"limit", l.Limit}, {"ratios", ratios}, {"max_ratio", l.Max}, {"share_above", l.Above}, {"count_above", l.CountAbove}, {"count", l.Count}, {"governing", l.Governing}}})
	}
	return o
}
