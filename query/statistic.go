package query

import (
	"fmt"
	"math"
	"strconv"
)

// statistic is one figure of a reduction and what it is called.
type statistic struct {
	title string   // in a table
	csv   string   // in CSV; the unit goes behind it
	path  []string // in JSON, from the outermost object
	// hasUnit is of figures in the quantity's unit.
	hasUnit bool
	of      func(*Reduction) float64
	// isPercentile is of figures that are missing where the sample does not support them.
	isPercentile bool
	text         func(float64) string // in a table, nil for figure
}

// in is the figure in a unit of which one is per of the quantity's.
func (s *statistic) in(r *Reduction, per float64) float64 {
	if s.hasUnit {
		return s.of(r) / per
	}
	return s.of(r)
}

// statisticsOf are the figures of an answer, in the order in which they are written, behind
// the count and before what governs.
func statisticsOf(s *SelectionReport, percents []float64, e Extras) []statistic {
	var out []statistic
	if !s.Balance.isNone() {
		out = append(out, statistic{title: "effective", csv: "effective", path: []string{"effective"}, of: func(r *Reduction) float64 { return r.Effective },
			text: func(x float64) string { return strconv.FormatFloat(x, 'f', 1, 64) }})
	}
	out = append(out,
		statistic{title: "mean", csv: "mean", path: []string{"mean"}, hasUnit: true, of: func(r *Reduction) float64 { return r.Mean }},
		statistic{title: "log-mean", csv: "log_mean", path: []string{"log_mean"}, hasUnit: true, of: func(r *Reduction) float64 { return r.LogMean }},
		statistic{title: "sd of ln", csv: "log_std_ln", path: []string{"log_std"}, of: func(r *Reduction) float64 { return r.LogStd }})
	for i, p := range percents {
		out = append(out, percentileStatistic(i, percentKey(p)))
	}
	out = append(out,
		statistic{title: "min", csv: "min", path: []string{"min"}, hasUnit: true, of: func(r *Reduction) float64 { return r.Min }},
		statistic{title: "max", csv: "max", path: []string{"max"}, hasUnit: true, of: func(r *Reduction) float64 { return r.Max }})
	return append(out, e.statistics(percents)...)
}

func percentileStatistic(i int, key string) statistic {
	return statistic{
		title: "p" + key, csv: "p" + key, path: []string{"percentiles", key}, hasUnit: true, isPercentile: true,
		of: func(r *Reduction) float64 { return r.Percentiles[i] },
	}
}

// columns are the headings of cells; an empty unit leaves units out.
func columns(list []statistic, unit string) []column {
	var out []column
	for _, s := range list {
		c := column{name: s.title}
		if s.hasUnit {
			c.unit = unit
		}
		out = append(out, c)
	}
	return out
}

func cells(list []statistic, r *Reduction, per float64) []string {
	out := make([]string, len(list))
	for i := range list {
		s := &list[i]
		switch x := s.in(r, per); {
		case s.isPercentile && r.Count > 0 && math.IsNaN(x):
			out[i] = "too few"
		case s.text != nil:
			out[i] = s.text(x)
		default:
			out[i] = figure(x)
		}
	}
	return out
}

// csvNames are the names of columns in CSV, suffix behind those that have a unit.
func csvNames(list []statistic, suffix string) []string {
	out := []string{"count"}
	for _, s := range list {
		if s.hasUnit {
			out = append(out, s.csv+suffix)
		} else {
			out = append(out, s.csv)
		}
	}
	return out
}

// csvCells writes the count, the figures and what governs.
func (s *SelectionReport) csvCells(l *csvLine, list []statistic, r *Reduction, per float64) {
	l.integer(r.Count)
	for i := range list {
		l.number(list[i].in(r, per))
	}
	l.word(r.Governing)
	if s.hasRoles() {
		l.word(r.GoverningComponent)
	}
}

// csvGoverning are the names of the last columns in CSV.
func (s *SelectionReport) csvGoverning() []string {
	if s.hasRoles() {
		return []string{"governing", "governing_component"}
	}
	return []string{"governing"}
}

// statisticsObject has the count, the figures and what governs: of one reduction as
// numbers, of several as arrays.
func (s *SelectionReport) statisticsObject(list []statistic, reductions []Reduction, per float64, isArray bool) object {
	o := object{{"count", each(reductions, isArray, func(r *Reduction) int { return r.Count })}}
	for i := range list {
		o = o.with(list[i].path, each(reductions, isArray, func(r *Reduction) float64 { return list[i].in(r, per) }))
	}
	o = append(o, field{"governing", each(reductions, isArray, func(r *Reduction) string { return r.Governing })})
	if s.hasRoles() {
		o = append(o, field{"governing_component", each(reductions, isArray, func(r *Reduction) string { return r.GoverningComponent })})
	}
	return o
}

func each[T any](reductions []Reduction, isArray bool, of func(*Reduction) T) any {
	if !isArray {
		return of(&reductions[0])
	}
	out := make([]T, len(reductions))
	for i := range reductions {
		out[i] = of(&reductions[i])
	}
	return out
}

// with returns the object with a value at a path, whose outer objects it makes where they
// are missing.
func (o object) with(path []string, value any) object {
	if len(path) == 1 {
		return append(o, field{path[0], value})
	}
	for i := range o {
		if inner, ok := o[i].value.(object); ok && o[i].name == path[0] {
			o[i].value = inner.with(path[1:], value)
			return o
		}
	}
	return append(o, field{path[0], object{}.with(path[1:], value)})
}

// percentTitle writes a share of 0 to 1 as a percentage for people.
func percentTitle(share float64) string {
	if !isDefined(share) {
		return "-"
	}
	return fmt.Sprintf("%.1f%%", 100*share)
}

func wholeNumber(x float64) string { return strconv.FormatFloat(x, 'f', 0, 64) }
