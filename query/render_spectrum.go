package query

import (
	"fmt"
	"io"
	"math"
	"strconv"

	"swaybook/pipeline/spectrum"
)

// defaultMethod is the one by which stores are computed.
const defaultMethod = spectrum.NigamJennings

// unitOf returns a measure's unit, its form in a column's name, and the value
// of one of it in the SI unit of answers.
func (m Measure) unitOf(u Units) (name, suffix string, per float64) {
	us := u == UnitsUS
	switch {
	case m == MeasurePSA:
		return "g", "g", 1
	case m == MeasureVH:
		return "1", "ratio", 1
	case m == MeasurePSV && us:
		return "in/s", "in_s", metresPerInch
	case m == MeasurePSV:
		return "m/s", "m_s", 1
	case us:
		return "in", "in", metresPerInch
	}
	return "m", "m", 1
}

// title names a measure for people.
func (m Measure) title() string {
	switch m {
	case MeasurePSV:
		return "Pseudo-velocity PSV"
	case MeasurePSA:
		return "Pseudo-acceleration PSA"
	case MeasureVH:
		return "Vertical over horizontal spectrum V/H"
	}
	return "Spectral displacement SD"
}

// Write renders the answer. The error is a UsageError for an unknown format and
// otherwise one of w.
func (a *SpectrumAnswer) Write(w io.Writer, format Format, units Units) error {
	var text []byte
	var err error
	switch format {
	case FormatTable, "":
		text = a.table(units)
	case FormatCSV:
		text = a.csv(units)
	case FormatJSON:
		text, err = jsonText(a.object(units))
	default:
		_, err = ParseFormat(string(format))
	}
	if err != nil {
		return err
	}
	return writeText(w, "spectrum", text)
}

// Remarks returns the selection's remarks and the caution, for where they
// cannot stand in the rows.
func (a *SpectrumAnswer) Remarks() string { return remarks(&a.Selection) }

func remarks(r *SelectionReport) string { return r.Remarks() + "caution: " + Caution + "\n" }

// hasRoles reports whether the governing component is more than the question
// said already.
func (r *SelectionReport) hasRoles() bool { return r.Component == ComponentEach }

func (a *SpectrumAnswer) table(units Units) []byte {
	unit, _, per := a.Measure.unitOf(units)
	t := table{columns: []column{{name: "period", unit: "s"}}}
	if a.isGrouped() {
		t.columns = append(t.columns, column{name: "group", isWord: true})
	}
	t.columns = append(t.columns, a.Selection.countColumns()...)
	t.columns = append(t.columns, reductionColumns(a.Percentiles, unit)...)
	t.columns = append(t.columns, column{name: "governing", isWord: true})
	a.eachRow(func(p int, group string, r *Reduction) {
		cells := []string{figure(a.PeriodsS[p])}
		if a.isGrouped() {
			cells = append(cells, group)
		}
		cells = append(append(cells, a.Selection.countCells(r)...), reductionCells(r.scaled(per))...)
		t.add(append(cells, a.Selection.governingText(r))...)
	})
	in := " in " + unit
	if a.Measure == MeasureVH {
		in = "" // a number
	}
	text := fmt.Appendf(nil, "%s%s, damping %s\n%s\n%s\n", a.Measure.title(), in, percentText(a.Damping),
		a.Selection.heading(), a.Selection.methodLine())
	text = t.appendTo(text)
	return append(append(text, '\n'), a.Remarks()...)
}

// wholeGroup is the label of all groups together.
const wholeGroup = "all"

func (a *SpectrumAnswer) isGrouped() bool { return a.By.Attribute != "" }

// eachRow yields at every period, by position, the statistics of all motions and those of
// every group.
func (a *SpectrumAnswer) eachRow(row func(p int, group string, r *Reduction)) {
	for p := range a.PeriodsS {
		row(p, wholeGroup, &a.Reductions[p])
		for i := range a.Groups {
			row(p, a.Groups[i].Label, &a.Groups[i].Reductions[p])
		}
	}
}

// methodLine names the recipe and the screen, and a method that is not the store's, in a
// line of its own.
func (r *SelectionReport) methodLine() string {
	text := "recipe " + r.Recipe + "; screen " + string(r.Screen)
	if !r.Balance.isNone() {
		text += "; balance " + string(r.Balance)
	}
	if r.Method != defaultMethod {
		text += "; method " + r.Method.String()
	}
	return text + "\n"
}

func (r *SelectionReport) governingText(x *Reduction) string {
	if r.hasRoles() {
		return x.Governing + " " + x.GoverningComponent
	}
	return x.Governing
}

// reductionColumns are the headings of reductionCells; an empty unit leaves
// units out.
func reductionColumns(percents []float64, unit string) []column {
	columns := []column{{name: "mean", unit: unit}, {name: "log-mean", unit: unit}, {name: "sd of ln"}}
	for _, p := range percents {
		columns = append(columns, column{name: "p" + percentKey(p), unit: unit})
	}
	return append(columns, column{name: "min", unit: unit}, column{name: "max", unit: unit})
}

// countColumns are the headings of countCells.
func (r *SelectionReport) countColumns() []column {
	if r.Balance.isNone() {
		return []column{{name: "count"}}
	}
	return []column{{name: "count"}, {name: "effective"}}
}

func (r *SelectionReport) countCells(x *Reduction) []string {
	if r.Balance.isNone() {
		return []string{fmt.Sprint(x.Count)}
	}
	return []string{fmt.Sprint(x.Count), strconv.FormatFloat(x.Effective, 'f', 1, 64)}
}

func reductionCells(r Reduction) []string {
	cells := []string{figure(r.Mean), figure(r.LogMean), figure(r.LogStd)}
	for _, p := range r.Percentiles {
		if r.Count > 0 && math.IsNaN(p) {
			cells = append(cells, "too few")
			continue
		}
		cells = append(cells, figure(p))
	}
	return append(cells, figure(r.Min), figure(r.Max))
}

func (a *SpectrumAnswer) csv(units Units) []byte {
	_, suffix, per := a.Measure.unitOf(units)
	suffix = "_" + string(a.Measure) + "_" + suffix
	var l csvLine
	l.word("period_s")
	if a.isGrouped() {
		l.word("group")
	}
	l.words(a.Selection.countNames()...)
	l.words("mean"+suffix, "log_mean"+suffix, "log_std_ln")
	for _, p := range a.Percentiles {
		l.word("p" + percentKey(p) + suffix)
	}
	l.words("min"+suffix, "max"+suffix, "governing")
	if a.Selection.hasRoles() {
		l.word("governing_component")
	}
	l.end()
	a.eachRow(func(p int, group string, r *Reduction) {
		l.number(a.PeriodsS[p])
		if a.isGrouped() {
			l.word(group)
		}
		a.Selection.csvCells(&l, r.scaled(per))
		l.end()
	})
	return l.text
}

// countNames are the columns of what is counted.
func (r *SelectionReport) countNames() []string {
	if r.Balance.isNone() {
		return []string{"count"}
	}
	return []string{"count", "effective"}
}

// csvCells are those of a reduction, from its count to what governs.
func (r *SelectionReport) csvCells(l *csvLine, x Reduction) {
	l.integer(x.Count)
	if !r.Balance.isNone() {
		l.number(x.Effective)
	}
	l.number(x.Mean)
	l.number(x.LogMean)
	l.number(x.LogStd)
	for _, p := range x.Percentiles {
		l.number(p)
	}
	l.number(x.Min)
	l.number(x.Max)
	l.word(x.Governing)
	if r.hasRoles() {
		l.word(x.GoverningComponent)
	}
}

func (a *SpectrumAnswer) object(units Units) object {
	unit, _, per := a.Measure.unitOf(units)
	o := object{
		{"selection", a.Selection.object()},
		{"damping", a.Damping},
		{"measure", string(a.Measure)},
		{"unit", unit},
		{"periods_s", a.PeriodsS},
	}
	o = append(o, a.statistics(a.Reductions, per)...)
	if a.isGrouped() {
		groups := make([]object, len(a.Groups))
		for i := range a.Groups {
			groups[i] = append(a.Groups[i].object(), a.statistics(a.Groups[i].Reductions, per)...)
		}
		o = append(o, field{"by", a.By.Attribute}, field{"groups", groups})
	}
	return append(o, field{"caution", Caution})
}

// object describes the group.
func (g *Group) object() object {
	return object{{"group", g.Label}, {"records", g.Records}, {"spectra", g.Spectra}, {"events", g.Events}}
}

// statistics are arrays by period, in a unit of which one is `per` of the present.
func (a *SpectrumAnswer) statistics(reductions []Reduction, per float64) object {
	scaled := make([]Reduction, len(reductions))
	for i, r := range reductions {
		scaled[i] = r.scaled(per)
	}
	floats := func(of func(r *Reduction) float64) []float64 { return collect(scaled, of) }
	o := object{{"count", collect(scaled, func(r *Reduction) int { return r.Count })}}
	if !a.Selection.Balance.isNone() {
		o = append(o, field{"effective", floats(func(r *Reduction) float64 { return r.Effective })})
	}
	o = append(o, object{
		{"mean", floats(func(r *Reduction) float64 { return r.Mean })},
		{"log_mean", floats(func(r *Reduction) float64 { return r.LogMean })},
		{"log_std", floats(func(r *Reduction) float64 { return r.LogStd })},
		{"percentiles", percentilesObject(a.Percentiles, func(i int) []float64 {
			return floats(func(r *Reduction) float64 { return r.Percentiles[i] })
		})},
		{"min", floats(func(r *Reduction) float64 { return r.Min })},
		{"max", floats(func(r *Reduction) float64 { return r.Max })},
		{"governing", collect(scaled, func(r *Reduction) string { return r.Governing })},
	}...)
	if a.Selection.hasRoles() {
		o = append(o, field{"governing_component", collect(scaled, func(r *Reduction) string { return r.GoverningComponent })})
	}
	return o
}

func collect[T any](rs []Reduction, of func(r *Reduction) T) []T {
	out := make([]T, len(rs))
	for i := range rs {
		out[i] = of(&rs[i])
	}
	return out
}
