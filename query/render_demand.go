package query

import (
	"fmt"
	"io"
)

// Write renders the answer as a table, or as CSV or JSON, which are in SI whatever the
// units. The error is a UsageError for another format and otherwise one of w.
func (a *DemandAnswer) Write(w io.Writer, format Format, units Units) error {
	return answer{"demand", func() []byte { return a.table(units) }, a.csv, a.object}.write(w, format)
}

// Remarks returns the selection's remarks and the caution.
func (a *DemandAnswer) Remarks() string { return remarks(&a.Selection) }

// quantityUnits gives, by name of quantity, what a table prints: the unit's
// name and the value of one of it in the unit of answers.
type quantityUnit struct {
	title        string
	si, us       string
	perSI, perUS float64
}

var quantityUnits = map[string]quantityUnit{
	"sd_m":            {"displacement SD", "m", "in", 1, metresPerInch},
	"psv_m_s":         {"pseudo-velocity PSV", "m/s", "in/s", 1, metresPerInch},
	"psa_g":           {"pseudo-acceleration PSA", "g", "g", 1, 1},
	"base_shear_n":    {"base shear", "kN", "kip", 1000, newtonsPerKip},
	"base_moment_nm":  {"base moment", "kN·m", "kip·in", 1000, joulesPerKipIn},
	"strain_energy_j": {"peak strain energy", "kJ", "kip·in", 1000, joulesPerKipIn},
}

func (a *DemandAnswer) table(units Units) []byte {
	text := fmt.Appendf(nil, "%s\n%s\n%s\n", a.title(units), a.Selection.heading(), a.Selection.methodLine())
	t := a.rows(false, units)
	text = t.appendTo(text)
	if a.Band != nil {
		text = fmt.Appendf(text, "\n%s\n\n", a.Band.title())
		t = a.rows(true, units)
		text = t.appendTo(text)
	}
	if len(a.Limits) > 0 {
		text = fmt.Appendf(text, "\n%s\n\n", capacityTitle(a.Band))
		t = capacityTable(a.Limits, a.Percentiles, units)
		text = t.appendTo(text)
	}
	return append(append(text, '\n'), a.Remarks()...)
}

func (a *DemandAnswer) title(units Units) string {
	return "Demand on a structure of " + a.Structure.text(units)
}

func (a *DemandAnswer) statistics() []statistic {
	return statisticsOf(&a.Selection, a.Percentiles, a.Extras)
}

func (a *DemandAnswer) isGrouped() bool { return a.By.Attribute != "" }

// eachRow yields the statistics of every quantity that there is, of all motions and of
// every group, at the period or over the band.
func (a *DemandAnswer) eachRow(overBand bool, row func(quantity, group string, r *Reduction)) {
	of := func(quantities []Quantity, band *DemandBand, i int) *Reduction {
		if overBand {
			quantities = band.Quantities
		}
		return quantities[i].Reduction
	}
	for i := range a.Quantities {
		name := a.Quantities[i].Name
		if r := of(a.Quantities, a.Band, i); r != nil {
			row(name, wholeGroup, r)
		}
		for _, g := range a.Groups {
			if r := of(g.Quantities, g.Band, i); r != nil {
				row(name, g.Label, r)
			}
		}
	}
}

// rows is the table of the quantities at the period or over the band.
func (a *DemandAnswer) rows(overBand bool, units Units) table {
	t := table{columns: []column{{name: "quantity", isWord: true}, {name: "unit", isWord: true}}}
	hasCounts := a.isGrouped() || !a.Selection.Balance.isNone()
	if a.isGrouped() {
		t.columns = append(t.columns, column{name: "group", isWord: true})
	}
	if hasCounts {
		t.columns = append(t.columns, column{name: "count"})
	}
	list := a.statistics()
	t.columns = append(t.columns, columns(list, "")...)
	t.columns = append(t.columns, column{name: "governing", isWord: true})
	a.eachRow(overBand, func(quantity, group string, r *Reduction) {
		u := quantityUnits[quantity]
		name, per := u.in(units)
		row := []string{u.title, name}
		if a.isGrouped() {
			row = append(row, group)
		}
		if hasCounts {
			row = append(row, fmt.Sprint(r.Count))
		}
		row = append(row, cells(list, r, per)...)
		t.add(append(row, a.Selection.governingText(r))...)
	})
	return t
}

// csv has a row a quantity, and over the band another; the periods say which is which. Where
// capacities were given, they stand in the rows of what is compared with them.
func (a *DemandAnswer) csv() []byte {
	var l csvLine
	l.words("quantity", "from_s", "to_s")
	if a.isGrouped() {
		l.word("group")
	}
	list := a.statistics()
	l.words(csvNames(list, "")...)
	l.words(a.Selection.csvGoverning()...)
	for _, name := range a.limitNames() {
		l.words(limitColumns(name, a.Percentiles)...)
	}
	l.end()
	a.csvRows(&l, list, false, a.Structure.PeriodS, a.Structure.PeriodS)
	if a.Band != nil {
		a.csvRows(&l, list, true, a.Band.FromS, a.Band.ToS)
	}
	return l.text
}

func (a *DemandAnswer) csvRows(l *csvLine, list []statistic, overBand bool, fromS, toS float64) {
	a.eachRow(overBand, func(quantity, group string, r *Reduction) {
		l.word(quantity)
		l.number(fromS)
		l.number(toS)
		if a.isGrouped() {
			l.word(group)
		}
		a.Selection.csvCells(l, list, r, 1)
		var compared []LimitRatio
		if group == wholeGroup && overBand == (a.Band != nil) {
			compared = a.limitsOf(quantity)
		}
		for _, name := range a.limitNames() {
			l.limit(compared, name, a.Percentiles)
		}
		l.end()
	})
}

// limitNames are all that capacities can be of, none where none are given.
func (a *DemandAnswer) limitNames() []string {
	if a.Capacities.isNone() {
		return nil
	}
	return limitNames
}

// limitsOf are those that a quantity is compared with.
func (a *DemandAnswer) limitsOf(quantity string) (out []LimitRatio) {
	for _, of := range a.Capacities.of(quantity, a.Structure.HeightM) {
		for _, l := range a.Limits {
			if l.Name == of.name {
				out = append(out, l)
			}
		}
	}
	return out
}

// text describes the structure. The weight of a pound-force is that of the mass
// of a pound at standard gravity.
func (s *Structure) text(units Units) string {
	text := fmt.Sprintf("period %s s, damping %s", figure(s.PeriodS), percentText(s.Damping))
	if s.MassKG != nil {
		if units == UnitsUS {
			text += fmt.Sprintf(", weight %s kip", figure(*s.MassKG*StandardGravity/newtonsPerKip))
		} else {
			text += fmt.Sprintf(", mass %s kg", figure(*s.MassKG))
		}
	}
	if s.HeightM != nil {
		if units == UnitsUS {
			text += fmt.Sprintf(", height %s in", figure(*s.HeightM/metresPerInch))
		} else {
			text += fmt.Sprintf(", height %s m", figure(*s.HeightM))
		}
	}
	return text
}

func (a *DemandAnswer) object() object {
	s := &a.Structure
	o := object{
		{"structure", object{
			{"period_s", s.PeriodS}, {"damping", s.Damping},
			{"mass_kg", orNaN(s.MassKG)}, {"height_m", orNaN(s.HeightM)},
		}},
		{"selection", a.Selection.object()},
	}
	o = append(o, a.demandFields(a.Quantities, a.Band)...)
	if a.isGrouped() {
		groups := make([]object, len(a.Groups))
		for i := range a.Groups {
			g := &a.Groups[i]
			groups[i] = append(g.object(), a.demandFields(g.Quantities, g.Band)...)
		}
		o = append(o, field{"by", a.By.Attribute}, field{"groups", groups})
	}
	if !a.Capacities.isNone() {
		o = append(o, field{"capacities", limitsObject(a.Limits, a.Percentiles)})
	}
	return append(o, field{"caution", Caution})
}

// demandFields are the quantities at the period and, where there is one, over the band.
func (a *DemandAnswer) demandFields(quantities []Quantity, band *DemandBand) object {
	list := a.statistics()
	o := object{{"quantities", a.Selection.quantitiesObject(list, quantities)}, {"band", nil}}
	if band != nil {
		o[1].value = a.Selection.bandObject(list, band)
	}
	return o
}

func (s *SelectionReport) bandObject(list []statistic, band *DemandBand) object {
	return object{{"from_s", band.FromS}, {"to_s", band.ToS}, {"quantities", s.quantitiesObject(list, band.Quantities)}}
}

func (s *SelectionReport) quantitiesObject(list []statistic, quantities []Quantity) object {
	o := object{}
	for _, q := range quantities {
		if q.Reduction == nil {
			o = append(o, field{q.Name, nil})
			continue
		}
		o = append(o, field{q.Name, s.statisticsObject(list, []Reduction{*q.Reduction}, 1, false)})
	}
	return o
}
