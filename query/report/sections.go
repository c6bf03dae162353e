package report

import (
	"fmt"
	"slices"
	"strings"

	"swaybook/query"
	"swaybook/query/chart"
)

// Names gives IDs of which each is one of a kind in a page.
type Names map[string]bool

// ID makes an ID of words.
func (n Names) ID(words ...string) string {
	base := Anchor(words...)
	if base == "" {
		base = "part"
	}
	id := base
	for i := 2; n[id]; i++ {
		id = fmt.Sprintf("%s-%d", base, i)
	}
	n[id] = true
	return id
}

// LongRows is from how many rows on a table is closed at first; detailed is of how many
// structures, the worst, a page tells all.
const LongRows, detailed = 40, 200

// Of is a section with what a sheet says.
func Of(id string, s *query.Sheet) Section {
	out := Section{ID: id, Title: s.Title, Lines: s.Lines, Remarks: s.Remarks}
	for _, t := range s.Tables {
		out.Tables = append(out.Tables, Table{Table: t, IsLong: len(t.Rows) > LongRows, HasFilter: len(t.Rows) > 8})
	}
	return out
}

// stripped is a chart that knows where periods or values lie.
type stripped interface {
	chart.Chart
	Strips(chart.Size) []chart.Strip
}

// Spectrum is the section of spectra: the chart, the four-way chart where there is one, and
// the table. The answer has its spectra.
func Spectrum(id string, a *query.SpectrumAnswer, units query.Units, marks []chart.Mark, isLinear bool) Section {
	out := Of(id, a.Sheet(units))
	// What figures have as notes stands above them already.
	flat := a.Chart(units, marks, isLinear)
	flat.Notes = nil
	out.Figures = saying("Spectra of all motions with their percentiles; the strip counts the motions that hold them up.", flat, chart.Half,
		func(s chart.Strip) string { return a.ValuesAt(s.Position, units) })
	if a.HasFourWay() {
		c := a.FourWay(units, marks)
		c.Notes = nil
		out.Figures = append(out.Figures, saying("Four-way chart: pseudo-velocity upwards, displacement and pseudo-acceleration along the diagonals.", c, chart.Square,
			func(s chart.Strip) string { return a.FourWayAt(s.Position, units) })...)
	}
	return out
}

// saying is a figure that says its values, none where there is nothing to draw.
func saying(caption string, c stripped, size chart.Size, words func(chart.Strip) string) []Figure {
	out := Drawn(caption, c, size)
	for i := range out {
		for _, s := range c.Strips(size) {
			out[i].Strips = append(out[i].Strips, Strip{s, words(s)})
		}
	}
	return out
}

// Demand is the section of one structure: how many motions exceed what, and the tables. The
// answer has the motions' values.
func Demand(id string, a *query.DemandAnswer, units query.Units, isLinear bool, size chart.Size) Section {
	out := Of(id, a.Sheet(units))
	c := a.Chart(units, isLinear)
	c.Notes = nil // they stand above it already
	out.Figures = saying("How many motions exceed a demand.", c, size, func(s chart.Strip) string { return a.ValueAt(s.Panel, s.Position, units) })
	return out
}

// Drawn is a figure of a chart, none where there is nothing to draw.
func Drawn(caption string, c chart.Chart, size chart.Size) []Figure {
	if c.IsEmpty() {
		return nil
	}
	return []Figure{{Caption: caption, Chart: c, Size: size}}
}

// Record is the part of a record: its traces and spectra, and what is known of it. The answer
// has its figure.
func Record(id string, a *query.RecordAnswer, units query.Units) Section {
	out := Of(id, a.Sheet(units))
	out.Figures = []Figure{{Caption: "Traces of the motion that spectra were computed of, the build-up of Arias intensity, and spectra.", Chart: a.Chart(units, nil), Size: chart.Page}}
	return out
}

// LinkGoverning has the cells of columns of governing records lead to parts, by record.
func (p *Page) LinkGoverning(parts map[string]string) {
	for i := range p.Sections {
		p.Sections[i].linkGoverning(parts)
	}
}

func (s *Section) linkGoverning(parts map[string]string) {
	for i := range s.Tables {
		t := &s.Tables[i]
		for at, c := range t.Columns {
			if c.Name != "governing" {
				continue
			}
			links := map[string]string{}
			for _, row := range t.Rows {
				code, _, _ := strings.Cut(row[at], " ")
				if id := parts[code]; id != "" {
					links[row[at]] = id
				}
			}
			if t.Links == nil {
				t.Links = map[int]map[string]string{}
			}
			t.Links[at] = links
		}
	}
	for i := range s.Parts {
		s.Parts[i].linkGoverning(parts)
	}
}

// Nearest is the section of many structures by the nearest stations, which come the worst
// first.
func Nearest(id string, a *query.NearestAnswer, units query.Units) Section {
	out := Of(id, a.Sheet(units))
	out.Tables[0].SortedBy = "ratio"
	return out
}

// comeFirst puts columns before the others.
func comeFirst(t *query.Table, names ...string) {
	var order []int
	isFirst := func(i int) bool { return slices.Contains(names, t.Columns[i].Name) }
	for i := range t.Columns {
		if isFirst(i) {
			order = append(order, i)
		}
	}
	for i := range t.Columns {
		if !isFirst(i) {
			order = append(order, i)
		}
	}
	t.Columns = picked(t.Columns, order)
	for i := range t.Rows {
		t.Rows[i] = picked(t.Rows[i], order)
	}
}

func picked[T any](list []T, order []int) []T {
	out := make([]T, len(order))
	for i, at := range order {
		out[i] = list[at]
	}
	return out
}

// Portfolio is the section of many structures, the worst first, with a part for each of them
// as far as the page has room.
func Portfolio(id string, a *query.PortfolioAnswer, units query.Units, names Names) Section {
	a = a.WorstFirst()
	out := Of(id, a.Sheet(units))
	out.Tables[0].IsLong, out.Tables[0].HasFilter, out.Tables[0].SortedBy = false, true, "ratio"
	comeFirst(&out.Tables[0].Table, "structure", "name", "ratio", "limit", "above")
	links := map[string]string{}
	for i := range a.Rows[:min(len(a.Rows), detailed)] {
		row := &a.Rows[i]
		part := Of(names.ID(id, row.Structure.ID), row.Sheet(a, units))
		links[out.Tables[0].Rows[i][0]] = part.ID
		out.Parts = append(out.Parts, part)
	}
	out.Tables[0].Links = map[int]map[string]string{0: links}
	if n := len(a.Rows); n > detailed {
		out.Remarks = append(out.Remarks, fmt.Sprintf("note: details are of the worst %d of %d structures; JSON has all", detailed, n))
	}
	return out
}
