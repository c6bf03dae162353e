package query

import (
	"fmt"
	"strings"
)

// Sheet is an answer for people before it is laid out: what its table says, in the same
// words and digits.
type Sheet struct {
	Title   string
	Lines   []string // below the title: the selection, by what it was computed
	Tables  []Table
	Remarks []string // what was left out and why, and notes; not the caution
}

// Table has rows of as many cells as columns.
type Table struct {
	Caption string // "" where the sheet's title says enough
	Columns []Column
	Rows    [][]string
}

// Column is a column of a table.
type Column struct {
	Name, Unit string // no unit of words, counts and ratios
	IsWord     bool
}

// sheetOf has the parts of an answer that rests on a selection.
func sheetOf(title string, r *SelectionReport, remarks string, tables ...Table) *Sheet {
	return &Sheet{Title: title, Lines: linesOf(r.heading() + "\n" + r.methodLine()), Tables: tables, Remarks: linesOf(remarks)}
}

func linesOf(text string) []string {
	return strings.FieldsFunc(text, func(r rune) bool { return r == '\n' })
}

// export is the table for others than text.
func (t *table) export(caption string) Table {
	out := Table{Caption: caption, Rows: t.rows}
	for _, c := range t.columns {
		out.Columns = append(out.Columns, Column{c.name, c.unit, c.isWord})
	}
	return out
}

// Sheet is the answer's table.
func (a *SpectrumAnswer) Sheet(units Units) *Sheet {
	t := a.rows(units)
	return sheetOf(a.title(units), &a.Selection, a.Selection.Remarks(), t.export(""))
}

// Sheet is the answer's table, and that over the band.
func (a *DemandAnswer) Sheet(units Units) *Sheet {
	t := a.rows(false, units)
	tables := []Table{t.export("")}
	if a.Band != nil {
		t = a.rows(true, units)
		tables = append(tables, t.export(a.Band.title()))
	}
	if len(a.Limits) > 0 {
		t = capacityTable(a.Limits, a.Percentiles, units)
		tables = append(tables, t.export(capacityTitle(a.Band)))
	}
	return sheetOf(a.title(units), &a.Selection, a.Selection.Remarks(), tables...)
}

// Sheet is the answer's table.
func (a *PortfolioAnswer) Sheet(units Units) *Sheet {
	t := a.rows(units)
	return sheetOf(a.title(), &a.Selection, a.Error.remark()+a.tableRemarks()+a.Selection.Remarks(),
		named(t.export(""), func(i int) *PortfolioStructure { return a.Rows[i].Structure }))
}

// Sheet is the answer's table.
func (a *NearestAnswer) Sheet(units Units) *Sheet {
	t := a.rows(units)
	return sheetOf(a.title(), &a.Selection, a.Error.remark()+a.Selection.Remarks(),
		named(t.export(""), func(i int) *PortfolioStructure { return a.Rows[i].Structure }))
}

// Sheet is the answer's table, and what was found in which rows.
func (a *RecordsAnswer) Sheet() *Sheet {
	t := a.rows()
	tables := []Table{t.export("")}
	found := table{columns: []column{{name: "record", isWord: true}, {name: "component", isWord: true}, {name: "found", isWord: true}}}
	for i := range a.Rows {
		if r := &a.Rows[i]; len(r.Quality) > 0 {
			found.add(r.Record, r.Component, r.qualityWords())
		}
	}
	if len(found.rows) > 0 {
		tables = append(tables, found.export("Found in "+countOf(len(found.rows), "row", "rows")))
	}
	return &Sheet{Title: "Records: " + countOf(len(a.Rows), "component", "components"), Tables: tables, Remarks: linesOf(a.Selection.Remarks())}
}

// Sheet is the list of rejections.
func (a *RejectionsAnswer) Sheet() *Sheet {
	t := a.rows()
	return &Sheet{Title: "Rejected: " + countOf(len(a.Rows), "file or part of one", "files or parts of them"), Tables: []Table{t.export("")}}
}

// Sheet is the list of conflicts.
func (a *ConflictsAnswer) Sheet() *Sheet {
	t := a.rows()
	return &Sheet{Title: "Stated otherwise: " + countOf(len(a.Rows), "value", "values"), Tables: []Table{t.export("")}}
}

func (b *DemandBand) title() string {
	return fmt.Sprintf("Largest of every motion over periods from %s s to %s s", figure(b.FromS), figure(b.ToS))
}
