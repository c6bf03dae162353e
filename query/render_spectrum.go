package query

import (
	"fmt"
	"io"
	"strings"

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
	case m.isRatio():
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
	case MeasureEta:
		return "Spectrum over that of 5% damping"
	}
	return "Spectral displacement SD"
}

// short names a measure by its letters, but for ratios.
func (m Measure) short() string {
	if m.isRatio() {
		return m.title()
	}
	return strings.ToUpper(string(m))
}

// Write renders the answer. The error is a UsageError for an unknown format and
// otherwise one of w.
func (a *SpectrumAnswer) Write(w io.Writer, format Format, units Units) error {
	return answer{"spectrum", func() []byte { return a.table(units) }, func() []byte { return a.csv(units) }, func() object { return a.object(units) }}.write(w, format)
}

// Remarks returns the selection's remarks and the caution, for where they
// cannot stand in the rows.
func (a *SpectrumAnswer) Remarks() string { return remarks(&a.Selection) }

func remarks(r *SelectionReport) string { return r.Remarks() + "caution: " + Caution + "\n" }

// hasRoles reports whether the governing component is more than the question
// said already.
func (r *SelectionReport) hasRoles() bool { return r.Component == ComponentEach }

// rows is the table of the answer.
func (a *SpectrumAnswer) rows(units Units) table {
	unit, _, per := a.Measure.unitOf(units)
	t := table{columns: []column{{name: "period", unit: "s"}}}
	if a.isGrouped() {
		t.columns = append(t.columns, column{name: "group", isWord: true})
	}
	list := a.statistics()
	t.columns = append(append(t.columns, column{name: "count"}), columns(list, unit)...)
	t.columns = append(t.columns, column{name: "governing", isWord: true})
	a.eachRow(func(p int, group string, r *Reduction) {
		row := []string{figure(a.PeriodsS[p])}
		if a.isGrouped() {
			row = append(row, group)
		}
		row = append(append(row, fmt.Sprint(r.Count)), cells(list, r, per)...)
		t.add(append(row, a.Selection.governingText(r))...)
	})
	return t
}

func (a *SpectrumAnswer) title(units Units) string {
	unit, _, _ := a.Measure.unitOf(units)
	in := " in " + unit
	if a.Measure.isRatio() {
		in = "" // a number
	}
	return fmt.Sprintf("%s%s, damping %s", a.Measure.title(), in, percentText(a.Damping))
}

func (a *SpectrumAnswer) table(units Units) []byte {
	t := a.rows(units)
	text := fmt.Appendf(nil, "%s\n%s\n%s\n", a.title(units), a.Selection.heading(), a.Selection.methodLine())
	return append(append(t.appendTo(text), '\n'), a.Remarks()...)
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

func (a *SpectrumAnswer) statistics() []statistic {
	list := statisticsOf(&a.Selection, a.Percentiles, a.Extras)
	if a.Measure == MeasureEta {
		list = append(list, etaStatistic(a.Damping))
	}
	return list
}

func (a *SpectrumAnswer) csv(units Units) []byte {
	_, suffix, per := a.Measure.unitOf(units)
	suffix = "_" + string(a.Measure) + "_" + suffix
	list := a.statistics()
	var l csvLine
	l.word("period_s")
	if a.isGrouped() {
		l.word("group")
	}
	l.words(csvNames(list, suffix)...)
	l.words(a.Selection.csvGoverning()...)
	l.end()
	a.eachRow(func(p int, group string, r *Reduction) {
		l.number(a.PeriodsS[p])
		if a.isGrouped() {
			l.word(group)
		}
		a.Selection.csvCells(&l, list, r, per)
		l.end()
	})
	return l.text
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
	list := a.statistics()
	o = append(o, a.Selection.statisticsObject(list, a.Reductions, per, true)...)
	if a.isGrouped() {
		groups := make([]object, len(a.Groups))
		for i := range a.Groups {
			groups[i] = append(a.Groups[i].object(), a.Selection.statisticsObject(list, a.Groups[i].Reductions, per, true)...)
		}
		o = append(o, field{"by", a.By.Attribute}, field{"groups", groups})
	}
	return append(o, field{"caution", Caution})
}

// object describes the group.
func (g *Group) object() object {
	return object{{"group", g.Label}, {"from", orNaN(g.From)}, {"to", orNaN(g.To)}, {"records", g.Records}, {"spectra", g.Spectra}, {"events", g.Events}}
}
