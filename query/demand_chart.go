package query

import (
	"fmt"
	"slices"
	"sort"
	"strings"

	"swaybook/query/chart"
)

// Exceedance is the share of motions, or of their weight where they are balanced, above
// values of a quantity: one less the empirical distribution function, so that of n motions
// k that are above are the share k/n.
type Exceedance struct {
	Quantity string
	Values   []float64 // of the motions, ascending, in the quantity's unit
	Above    []float64 // share above each
}

// exceedance is that of the values last reduced.
func (r *reducer) exceedance(name string) Exceedance {
	n := len(r.reduced)
	e := Exceedance{Quantity: name, Values: slices.Clone(r.reduced), Above: make([]float64, n)}
	weight := func(i int) float64 {
		if r.reducedWeights == nil {
			return 1
		}
		return r.reducedWeights[i]
	}
	sum, above := 0.0, 0.0 // of the weights so far, and of those above the value at hand
	for i := n - 1; i >= 0; i-- {
		if i == n-1 || e.Values[i] < e.Values[i+1] {
			above = sum
		}
		e.Above[i] = above
		sum += weight(i)
	}
	for i := range e.Above {
		e.Above[i] /= sum
	}
	return e
}

// Chart is the answer as a chart of the shares of motions that exceed displacement and, where
// the mass is known, base shear: over the band where there is one. It needs Each.
func (a *DemandAnswer) Chart(units Units, isLinear bool) *chart.Exceedance {
	c := &chart.Exceedance{
		Title: "How many motions exceed a demand", Notes: []string{"Structure of " + a.Structure.text(units), a.Selection.heading(), strings.TrimSpace(a.Selection.methodLine())}, Foot: Caution,
		Share: "motions above (%)", IsLinear: isLinear,
	}
	if a.Band != nil {
		c.Notes = append(c.Notes, a.Band.title())
	}
	if !a.Selection.Balance.isNone() {
		c.Share = "weight above (%)"
	}
	for _, e := range a.charted() {
		c.Panels = append(c.Panels, a.panel(e, units))
	}
	return c
}

// charted are the quantities of the chart, from the top.
func (a *DemandAnswer) charted() (out []*Exceedance) {
	for i := range a.Exceedances {
		if e := &a.Exceedances[i]; e.Quantity == "sd_m" || e.Quantity == "base_shear_n" {
			out = append(out, e)
		}
	}
	return out
}

// ValueAt is a motion's value in the chart, by panel and position, and how many motions
// exceed it, in words.
func (a *DemandAnswer) ValueAt(panel, position int, units Units) string {
	e := a.charted()[panel]
	u := quantityUnits[e.Quantity]
	unit, per := u.in(units)
	value, n, of := e.Values[position], len(e.Values), ""
	above := n - sort.Search(n, func(i int) bool { return e.Values[i] > value })
	if !a.Selection.Balance.isNone() {
		of = " of the weight"
	}
	return fmt.Sprintf("%s %s %s · exceeded by %d of %s, %s%s", u.title, figure(value/per), unit, above, countOf(n, "motion", "motions"), percentTitle(e.Above[position]), of)
}

func (a *DemandAnswer) panel(e *Exceedance, units Units) chart.ExceedancePanel {
	u := quantityUnits[e.Quantity]
	unit, per := u.in(units)
	p := chart.ExceedancePanel{Quantity: u.title + " (" + unit + ")", Values: scaled(e.Values, per), Above: e.Above}
	add := func(name string, kind chart.Kind, value float64, behind string) {
		if isDefined(value) {
			p.Levels = append(p.Levels, chart.Level{Name: name + " " + figure(value/per) + " " + unit + behind, Kind: kind, Value: value / per})
		}
	}
	x := a.compared(e.Quantity)
	for i, percent := range a.Percentiles {
		name, kind := percentileName(percent)
		add(name, kind, x.Percentiles[i], "")
	}
	add("mean", chart.Mean, x.Mean, "")
	if d := x.extra.against; d != nil {
		add("design", chart.Design, d.value, ", "+percentTitle(d.above)+" above")
	}
	for i := range a.Limits {
		l := &a.Limits[i]
		for _, of := range a.Capacities.of(e.Quantity, a.Structure.HeightM) {
			if of.name == l.Name {
				name := "capacity"
				if l.Name == "drift" {
					name = "drift " + percentText(l.Limit)
				}
				add(name, chart.Capacity, of.inUnit, fmt.Sprintf(", %d of %d above", l.CountAbove, l.Count))
			}
		}
	}
	return p
}

// compared is the reduction of a quantity that is set beside capacities.
func (a *DemandAnswer) compared(name string) *Reduction {
	list := a.Quantities
	if a.Band != nil {
		list = a.Band.Quantities
	}
	return list[slices.IndexFunc(list, func(q Quantity) bool { return q.Name == name })].Reduction
}
