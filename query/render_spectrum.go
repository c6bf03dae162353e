package query

import (
	"fmt"
	"io"

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
	t := table{columns: []column{{name: "period", unit: "s"}, {name: "count"}}}
	t.columns = append(t.columns, reductionColumns(a.Percentiles, unit)...)
	t.columns = append(t.columns, column{name: "governing", isWord: true})
	for i, r := range a.Reductions {
		cells := []string{figure(a.PeriodsS[i]), fmt.Sprint(r.Count)}
		cells = append(cells, reductionCells(r.scaled(per))...)
		t.add(append(cells, a.Selection.governingText(&r))...)
	}
	in := " in " + unit
	if a.Measure == MeasureVH {
		in = "" // a number
	}
	text := fmt.Appendf(nil, "%s%s, damping %s\n%s\n%s\n", a.Measure.title(), in, percentText(a.Damping),
		a.Selection.heading(), a.Selection.methodLine())
	text = t.appendTo(text)
	return append(append(text, '\n'), a.Remarks()...)
}

// methodLine names the recipe and the screen, and a method that is not the store's, in a
// line of its own.
func (r *SelectionReport) methodLine() string {
	text := "recipe " + r.Recipe + "; screen " + string(r.Screen)
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

func reductionCells(r Reduction) []string {
	cells := []string{figure(r.Mean), figure(r.LogMean), figure(r.LogStd)}
	for _, p := range r.Percentiles {
		cells = append(cells, figure(p))
	}
	return append(cells, figure(r.Min), figure(r.Max))
}

func (a *SpectrumAnswer) csv(units Units) []byte {
	_, suffix, per := a.Measure.unitOf(units)
	suffix = "_" + string(a.Measure) + "_" + suffix
	var l csvLine
	l.words("period_s", "count", "mean"+suffix, "log_mean"+suffix, "log_std_ln")
	for _, p := range a.Percentiles {
		l.word("p" + percentKey(p) + suffix)
	}
	l.words("min"+suffix, "max"+suffix, "governing")
	if a.Selection.hasRoles() {
		l.word("governing_component")
	}
	l.end()
	for i, r := range a.Reductions {
		a.csvRow(&l, a.PeriodsS[i], r.scaled(per))
	}
	return l.text
}

func (a *SpectrumAnswer) csvRow(l *csvLine, periodS float64, r Reduction) {
	l.number(periodS)
	l.integer(r.Count)
	l.number(r.Mean)
	l.number(r.LogMean)
	l.number(r.LogStd)
	for _, p := range r.Percentiles {
		l.number(p)
	}
	l.number(r.Min)
	l.number(r.Max)
	l.word(r.Governing)
	if a.Selection.hasRoles() {
		l.word(r.GoverningComponent)
	}
	l.end()
}

func (a *SpectrumAnswer) object(units Units) object {
	unit, _, per := a.Measure.unitOf(units)
	scaled := make([]Reduction, len(a.Reductions))
	for i, r := range a.Reductions {
		scaled[i] = r.scaled(per)
	}
	floats := func(of func(r *Reduction) float64) []float64 { return collect(scaled, of) }
	o := object{
		{"selection", a.Selection.object()},
		{"damping", a.Damping},
		{"measure", string(a.Measure)},
		{"unit", unit},
		{"periods_s", a.PeriodsS},
		{"count", collect(scaled, func(r *Reduction) int { return r.Count })},
		{"mean", floats(func(r *Reduction) float64 { return r.Mean })},
		{"log_mean", floats(func(r *Reduction) float64 { return r.LogMean })},
		{"log_std", floats(func(r *Reduction) float64 { return r.LogStd })},
		{"percentiles", percentilesObject(a.Percentiles, func(i int) []float64 {
			return floats(func(r *Reduction) float64 { return r.Percentiles[i] })
		})},
		{"min", floats(func(r *Reduction) float64 { return r.Min })},
		{"max", floats(func(r *Reduction) float64 { return r.Max })},
		{"governing", collect(scaled, func(r *Reduction) string { return r.Governing })},
	}
	if a.Selection.hasRoles() {
		o = append(o, field{"governing_component", collect(scaled, func(r *Reduction) string { return r.GoverningComponent })})
	}
	return append(o, field{"caution", Caution})
}

func collect[T any](rs []Reduction, of func(r *Reduction) T) []T {
	out := make([]T, len(rs))
	for i := range rs {
		out[i] = of(&rs[i])
	}
	return out
}
