package query

import (
	"fmt"
	"slices"
)

// Figure is one figure of an answer, by which the answers of two runs are compared.
type Figure struct {
	Of    string // period, quantity or structure, with its unit
	Name  string // p50 and the like, or count
	Value float64

	// told is what it is of in the words of tables, with the unit that they have it in.
	told quantityUnit
}

// figureCount is the name of the number of motions.
const figureCount = "count"

// figuresOf are the percentiles and the count of a reduction.
func figuresOf(out []Figure, of string, told quantityUnit, percents []float64, r *Reduction) []Figure {
	if r == nil {
		return out
	}
	for i, p := range percents {
		out = append(out, Figure{of, "p" + percentKey(p), r.Percentiles[i], told})
	}
	return append(out, Figure{of, figureCount, float64(r.Count), plain(told.title)})
}

// of is the quantity of a structure.
func (u quantityUnit) of(s *PortfolioStructure) quantityUnit {
	u.title = s.words() + ": " + u.title
	return u
}

// plain is what has no unit.
func plain(title string) quantityUnit { return quantityUnit{title: title, perSI: 1, perUS: 1} }

// Figures are those of all periods.
func (a *SpectrumAnswer) Figures() (out []Figure) {
	var told quantityUnit
	var unit string
	told.si, unit, told.perSI = a.Measure.unitOf(UnitsSI)
	told.us, _, told.perUS = a.Measure.unitOf(UnitsUS)
	for i := range a.Reductions {
		told.title = fmt.Sprintf("%s at %s s, damping %s", a.Measure.short(), figure(a.PeriodsS[i]), percentText(a.Damping))
		out = figuresOf(out, fmt.Sprintf("%s_%s at %g s", a.Measure, unit, a.PeriodsS[i]), told, a.Percentiles, &a.Reductions[i])
	}
	return out
}

// Figures are those of all quantities, over the band where there is one.
func (a *DemandAnswer) Figures() (out []Figure) {
	quantities := a.Quantities
	if a.Band != nil {
		quantities = a.Band.Quantities
	}
	for _, q := range quantities {
		out = figuresOf(out, q.Name, quantityUnits[q.Name], a.Percentiles, q.Reduction)
	}
	return out
}

// demands are the quantities by which the answers for many structures are compared.
var demands = []string{"sd_m", "base_shear_n", "base_moment_nm"}

// Figures are those of the displacement, base shear and base moment of all structures, over
// the band where there is one.
func (a *PortfolioAnswer) Figures() (out []Figure) {
	for i := range a.Rows {
		s, quantities := a.Rows[i].Structure, a.Rows[i].Quantities
		if a.Rows[i].Band != nil {
			quantities = a.Rows[i].Band.Quantities
		}
		for _, q := range quantities {
			if slices.Contains(demands, q.Name) {
				out = figuresOf(out, s.ID+" "+q.Name, quantityUnits[q.Name].of(s), a.Percentiles, q.Reduction)
			}
		}
	}
	return out
}

// Figures are the estimates for all structures.
func (a *NearestAnswer) Figures() (out []Figure) {
	for i := range a.Rows {
		s := a.Rows[i].Structure
		for _, e := range a.Rows[i].Estimates {
			out = append(out, Figure{s.ID + " " + e.Name, "estimate", e.Value, quantityUnits[e.Name].of(s)})
		}
	}
	return out
}

// Figures are the number of components in the list.
func (a *RecordsAnswer) Figures() []Figure {
	return []Figure{{"components", figureCount, float64(len(a.Rows)), plain("components")}}
}

// Compared is an answer that can be compared with that to the same question at another
// time.
type Compared interface {
	Figures() []Figure
	Motions() []Motion
}

// Motion names what statistics count as one: a component of a record, or a pair.
type Motion struct {
	Record, Role string
	Members      []string // roles of the components that it is made of
	Event        string   // code, "" for none
}

// Motions are those that contribute, in the order of record code and role.
func (r *SelectionReport) Motions() []Motion {
	out := make([]Motion, len(r.motions))
	for i := range r.motions {
		m := &r.motions[i]
		out[i] = Motion{Record: m.record(), Role: m.role}
		for _, component := range m.members {
			out[i].Members = append(out[i].Members, component.Role)
		}
		if event := m.members[0].Record.Event; event != nil {
			out[i].Event = event.Code
		}
	}
	return out
}

// Motions are those of the selection.
func (a *SpectrumAnswer) Motions() []Motion { return a.Selection.Motions() }

// Motions are those of the selection.
func (a *DemandAnswer) Motions() []Motion { return a.Selection.Motions() }

// Motions are those of the selection.
func (a *PortfolioAnswer) Motions() []Motion { return a.Selection.Motions() }

// Motions are those of the selection.
func (a *NearestAnswer) Motions() []Motion { return a.Selection.Motions() }

// Motions are those of the list.
func (a *RecordsAnswer) Motions() []Motion { return a.Selection.Motions() }
