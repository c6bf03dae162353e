package report

import (
	"strconv"

	"swaybook/query"
)

// methods are what every result rests on, with the sources.
var methods = [][]string{
	{"Response", "The damped oscillator of one degree of freedom under ground acceleration linear between samples, by the exact recurrence, at rest before the first sample and ringing free after the last. Spectral displacement SD is the greatest relative displacement over the whole motion, between samples too.", "Nigam and Jennings 1969"},
	{"Spectra", "Pseudo-velocity PSV = ω·SD and pseudo-acceleration PSA = ω²·SD, ω = 2π/T.", "Chopra, Dynamics of Structures"},
	{"All directions", "rotd50 and rotd100 are the median and the maximum, period by period, over all horizontal directions.", "Boore 2010"},
	{"Percentiles", "Order statistics with straight lines between; none where the sample does not support it, from 1/(n + 1) to n/(n + 1).", "Hyndman and Fan 1996, type 7; Gumbel 1958"},
	{"Demand", "Base shear is mass times PSA, base moment that times the height, peak strain energy ½·m·PSV².", "Chopra, Dynamics of Structures"},
	{"Exceedance", "Of n motions k above a value are the share k/n; of balanced motions the share of weight.", "the empirical distribution function"},
	{"Design spectrum", "Elastic, as the study's file describes it; its kind and parameters stand beside the spectra.", "the code that the file names"},
	{"Measures", "Arias intensity, cumulative absolute velocity, significant and bracketed durations, mean period, spectrum intensity SI.", "Arias 1970; EPRI 1988; Trifunac and Brady 1975; Bolt 1973; Rathje, Abrahamson and Bray 1998; Housner 1952"},
	{"Usable periods", "A motion counts only at periods at which its filters and its sampling leave something to believe.", "common practice"},
}

// Step is a step of a recipe, with the source of what it does.
type Step struct{ Do, Words, Source string }

// Methods is the section of how everything was computed. The recipe, for which motions its
// steps are, is told step by step.
func Methods(id, recipe, applies string, steps []Step) Section {
	column := func(name string) query.Column { return query.Column{Name: name, IsWord: true} }
	told := query.Table{Caption: "Recipe " + recipe, Columns: []query.Column{{Name: "no."}, column("step"), column("what is done"), column("source")}}
	for i, s := range steps {
		told.Rows = append(told.Rows, []string{strconv.Itoa(i + 1), s.Do, s.Words, s.Source})
	}
	t := query.Table{Caption: "Methods and their sources", Columns: []query.Column{column("method"), column("what is done"), column("source")}, Rows: methods}
	out := Section{ID: id, Title: "Methods", Tables: []Table{{Table: t}, {Table: told}}, Lines: []string{"Motions are conditioned by the recipe " + recipe + ", whose steps are for " + applies + "; others are as they were delivered."}}
	if len(steps) == 0 {
		out.Tables, out.Lines = out.Tables[:1], []string{"Motions are as they were delivered: the recipe " + recipe + " has no steps."}
	}
	return out
}
