package query

import (
	"fmt"
	"io"
)

// Write renders the answer as a table or as JSON, which is in SI whatever the
// units. The error is a UsageError for another format and otherwise one of w.
func (a *DemandAnswer) Write(w io.Writer, format Format, units Units) error {
	var text []byte
	var err error
	switch format {
	case FormatTable, "":
		text = a.table(units)
	case FormatJSON:
		text, err = jsonText(a.object())
	default:
		_, err = ParseFormat(string(format), FormatTable, FormatJSON)
	}
	if err != nil {
		return err
	}
	return writeText(w, "demand", text)
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
	text := fmt.Appendf(nil, "Demand on a structure of %s\n%s\n%s\n", a.Structure.text(units), a.Selection.heading(), a.Selection.methodLine())
	text = a.quantitiesTable(text, a.Quantities, units)
	if a.Band != nil {
		text = fmt.Appendf(text, "\nLargest of every motion over periods from %s s to %s s\n\n", figure(a.Band.FromS), figure(a.Band.ToS))
		text = a.quantitiesTable(text, a.Band.Quantities, units)
	}
	return append(append(text, '\n'), a.Remarks()...)
}

func (a *DemandAnswer) quantitiesTable(dst []byte, quantities []Quantity, units Units) []byte {
	t := table{columns: []column{{name: "quantity", isWord: true}, {name: "unit", isWord: true}}}
	t.columns = append(t.columns, reductionColumns(a.Percentiles, "")...)
	t.columns = append(t.columns, column{name: "governing", isWord: true})
	for _, q := range quantities {
		if q.Reduction == nil {
			continue
		}
		u := quantityUnits[q.Name]
		name, per := u.si, u.perSI
		if units == UnitsUS {
			name, per = u.us, u.perUS
		}
		cells := append([]string{u.title, name}, reductionCells(q.Reduction.scaled(per))...)
		t.add(append(cells, a.Selection.governingText(q.Reduction))...)
	}
	return t.appendTo(dst)
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
		{"quantities", a.quantitiesObject(a.Quantities)},
	}
	if a.Band == nil {
		o = append(o, field{"band", nil})
	} else {
		o = append(o, field{"band", object{
			{"from_s", a.Band.FromS}, {"to_s", a.Band.ToS},
			{"quantities", a.quantitiesObject(a.Band.Quantities)},
		}})
	}
	return append(o, field{"caution", Caution})
}

func (a *DemandAnswer) quantitiesObject(quantities []Quantity) object {
	o := object{}
	for _, q := range quantities {
		if q.Reduction == nil {
			o = append(o, field{q.Name, nil})
			continue
		}
		o = append(o, field{q.Name, a.reductionObject(q.Reduction)})
	}
	return o
}

func (a *DemandAnswer) reductionObject(r *Reduction) object {
	o := object{
		{"mean", r.Mean}, {"log_mean", r.LogMean}, {"log_std", r.LogStd},
		{"percentiles", percentilesObject(a.Percentiles, func(i int) float64 { return r.Percentiles[i] })},
		{"min", r.Min}, {"max", r.Max}, {"governing", r.Governing},
	}
	if a.Selection.hasRoles() {
		o = append(o, field{"governing_component", r.GoverningComponent})
	}
	return o
}
