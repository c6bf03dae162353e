package query

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// WorstFirst is the answer with the structures in the order of their ratios to capacities, the
// greatest first, and those without behind them as they were.
func (a *PortfolioAnswer) WorstFirst() *PortfolioAnswer {
	out := *a
	out.Rows = slices.Clone(a.Rows)
	ratio := func(r *PortfolioRow) float64 {
		if worst := r.worst(a.Percentiles); worst != nil {
			return worst.ratio
		}
		return math.Inf(-1)
	}
	slices.SortStableFunc(out.Rows, func(x, y PortfolioRow) int { return cmp.Compare(ratio(&y), ratio(&x)) })
	return &out
}

// named puts the names of structures behind their codes, in the table of many of them, where
// any has one: people look for names, and text has no room for them.
func named(t Table, of func(row int) *PortfolioStructure) Table {
	if !slices.ContainsFunc(upTo(len(t.Rows)), func(i int) bool { return of(i).Name != "" }) {
		return t
	}
	t.Columns = slices.Insert(t.Columns, 1, Column{Name: "name", IsWord: true})
	for i := range t.Rows {
		t.Rows[i] = slices.Insert(t.Rows[i], 1, printable(of(i).Name))
	}
	return t
}

// Sheet is all that the answer says of one structure: of what was asked, the statistics of
// every quantity, and the ratios to its capacities.
func (r *PortfolioRow) Sheet(a *PortfolioAnswer, units Units) *Sheet {
	s := r.Structure
	out := &Sheet{Title: printable(s.words()), Lines: []string{s.text(units)}}
	list := statisticsOf(&a.Selection, a.Percentiles, a.Extras)
	at := r.statistics(r.Quantities, list, &a.Selection, units)
	out.Tables = append(out.Tables, at.export("At the period"))
	if len(s.Modes) > 0 {
		out.Tables[0].Caption = "Of all modes"
	}
	if r.Band != nil {
		over := r.statistics(r.Band.Quantities, list, &a.Selection, units)
		out.Tables = append(out.Tables, over.export(r.Band.title()))
	}
	if len(r.Limits) > 0 {
		limits := capacityTable(r.Limits, a.Percentiles, units)
		out.Tables = append(out.Tables, limits.export(capacityTitle(r.Band)))
	}
	return out
}

// words name a structure.
func (s *PortfolioStructure) words() string {
	if s.Name == "" {
		return s.ID
	}
	return s.ID + ", " + s.Name
}

// statistics has a row a quantity that is known.
func (r *PortfolioRow) statistics(quantities []Quantity, list []statistic, selection *SelectionReport, units Units) table {
	t := table{columns: []column{{name: "quantity", isWord: true}, {name: "unit", isWord: true}, {name: "count"}}}
	t.columns = append(append(t.columns, columns(list, "")...), column{name: "governing", isWord: true})
	for _, q := range quantities {
		u, ok := quantityUnits[q.Name]
		if q.Reduction == nil || !ok {
			continue
		}
		name, per := u.in(units)
		row := append([]string{u.title, name, fmt.Sprint(q.Reduction.Count)}, cells(list, q.Reduction, per)...)
		t.add(append(row, selection.governingText(q.Reduction))...)
	}
	return t
}
