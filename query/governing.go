package query

import (
	"cmp"
	"maps"
	"slices"
)

// Governing counts by record what it is the greatest of.
type Governing map[string]int

func (g Governing) take(r *Reduction) {
	if r != nil && r.Governing != "" {
		g[r.Governing]++
	}
}

// Add adds the counts of another one.
func (g Governing) Add(other Governing) {
	for code, n := range other {
		g[code] += n
	}
}

// Codes are the records, those that govern most first.
func (g Governing) Codes() []string {
	return slices.SortedFunc(maps.Keys(g), func(a, b string) int { return cmp.Or(g[b]-g[a], cmp.Compare(a, b)) })
}

// Governing is by period.
func (a *SpectrumAnswer) Governing() Governing {
	g := Governing{}
	for i := range a.Reductions {
		g.take(&a.Reductions[i])
	}
	return g
}

// Governing is by quantity.
func (a *DemandAnswer) Governing() Governing {
	g := Governing{}
	for _, q := range a.Quantities {
		g.take(q.Reduction)
	}
	return g
}

// Governing is by structure: of the capacity that its demand comes nearest to, or else of its
// displacement.
func (a *PortfolioAnswer) Governing() Governing {
	g := Governing{}
	for i := range a.Rows {
		r := &a.Rows[i]
		if worst := r.worst(a.Percentiles); worst != nil {
			g[worst.Governing]++
			continue
		}
		g.take(r.quantity("sd_m", true))
	}
	return g
}

// Governing is of no record: estimates are of several.
func (a *NearestAnswer) Governing() Governing { return nil }

// Sheet is what is known of the record, in units.
func (a *RecordAnswer) Sheet(units Units) *Sheet {
	first := &a.Rows[0]
	s := &Sheet{Title: printable(a.Code)}
	for _, line := range []string{first.eventWords(), first.stationWords(), first.distanceWords()} {
		if line != "" {
			s.Lines = append(s.Lines, printable(line))
		}
	}
	s.Tables = []Table{a.deliveredTable().export("As delivered"), a.measuresTable(units).export("Measures")}
	for i := range a.Conditioned {
		s.Remarks = append(s.Remarks, linesOf(a.row(a.Conditioned[i].Component).remarks())...)
	}
	s.Remarks = append(s.Remarks, linesOf(a.Remarks())...)
	return s
}
