package report

import (
	"bytes"
	_ "embed"
	"fmt"
	"html/template"
	"io"
	"strconv"
	"strings"
	"unicode/utf8"

	"swaybook/query"
	"swaybook/query/chart"
)

// Page is a report.
type Page struct {
	Title, Purpose string
	Summary        []Fact // at the top
	Caution        string
	Notice         *Section // at the top, before all else; nil for none
	Sections       []Section
	Provenance     []Fact // at the end: by what the page was made, of what
}

// Fact is a thing and what is known of it.
type Fact struct{ Name, Value string }

// Section is a part of a page.
type Section struct {
	ID      string // of letters, digits and dashes; one of a kind in the page
	Title   string
	Lines   []string // below the title
	Figures []Figure
	Tables  []Table
	Remarks []string
	Parts   []Section // within it, closed at first
}

// Table is a table with what the page does with it.
type Table struct {
	query.Table
	// IsLong says that it is closed at first; HasFilter that its rows can be searched.
	IsLong, HasFilter bool
	// SortedBy is the name of the column by whose numbers rows come, the greatest first; "" for
	// none.
	SortedBy string
	// Links are the parts of the page that cells of a column lead to, by column and cell.
	Links map[int]map[string]string
}

// Link is the ID of what a cell leads to, "" for nothing.
func (t Table) Link(column int, cell string) string { return t.Links[column][cell] }

// tableWithin is a table with a name that no other table of the page has: its caption is that
// of many, within parts of their own.
type tableWithin struct {
	Table
	Label string
	// isNarrow says that paper has room for its short words, such as times and units, in one
	// line.
	isNarrow bool
}

func within(t Table, title string) tableWithin {
	out := tableWithin{Table: t, Label: title, isNarrow: t.width() <= roomy}
	if t.Caption != "" {
		out.Label = t.Caption + ", " + title
	}
	return out
}

// roomy is how many characters are sure to fit beside each other on A4 and Letter: of 7 pt, as
// they are printed, some 115 of a wide face do in 13 columns.
const roomy = 108

// width is how many characters the words stand in that may not be broken.
func (t Table) width() (n int) {
	for i, c := range t.Columns {
		widest := 0
		for word := range strings.FieldsSeq(c.Name) {
			widest = max(widest, utf8.RuneCountInString(word))
		}
		for _, row := range t.Rows {
			if cell := row[i]; !c.IsWord || isShort(cell) {
				widest = max(widest, utf8.RuneCountInString(cell))
			}
		}
		n += widest
	}
	return n
}

func isShort(cell string) bool {
	const short = 22
	return cell != "" && !strings.Contains(cell, " ") && utf8.RuneCountInString(cell) <= short
}

// Class is that of a cell: numbers stand to the right, and they and short words in one line.
func (t tableWithin) Class(column int, cell string) string {
	switch {
	case !t.Columns[column].IsWord:
		return "number"
	case t.isNarrow && isShort(cell):
		return "short"
	}
	return ""
}

// Figure is a chart, with words on the values at each period.
type Figure struct {
	Caption string
	Chart   chart.Chart
	Size    chart.Size
	Strips  []Strip
}

// Class is that of a figure which says values, or would take most of a page of its width.
func (f Figure) Class() string {
	switch {
	case f.Strips != nil:
		return "has-values"
	case f.Size.Height > f.Size.Width:
		return "tall"
	}
	return ""
}

// ViewBox is that of what is laid over the chart.
func (f Figure) ViewBox() string {
	return "0 0 " + point(float64(f.Size.Width)) + " " + point(float64(f.Size.Height))
}

// point writes points to the hundredth.
func point(x float64) string { return strconv.FormatFloat(x, 'f', 2, 64) }

// Strip is a part of a figure and what it says there.
type Strip struct {
	chart.Strip
	Words string
}

//go:embed page.html.tmpl
var pageText string

//go:embed page.css
var style string

//go:embed page.js
var script string

var page = template.Must(template.New("page").Funcs(template.FuncMap{
	"svg":    drawn,
	"style":  func() template.CSS { return template.CSS(style) },
	"script": func() template.JS { return template.JS(script) },
	"point":  point,
	"within": within,
}).Parse(pageText))

// Write writes the page. The error is that of a chart which has nothing to draw, or of w.
func (p *Page) Write(w io.Writer) error {
	var whole bytes.Buffer
	if err := page.Execute(&whole, p); err != nil {
		return fmt.Errorf("write report: %w", err)
	}
	_, err := whole.WriteTo(w)
	return err
}

// drawn is a figure as an element of the page. Its text is escaped by package chart.
func drawn(f Figure) (template.HTML, error) {
	var element bytes.Buffer
	err := chart.Write(&element, chart.Inline, f.Size, f.Chart)
	named := fmt.Sprintf(`<svg role="img" aria-label="%s" `, template.HTMLEscapeString(f.Caption))
	return template.HTML(strings.Replace(element.String(), "<svg ", named, 1)), err
}

// Anchor makes an ID of words. Different words may have one ID; the caller sees to that.
func Anchor(words ...string) string {
	var b strings.Builder
	for _, r := range strings.ToLower(strings.Join(words, "-")) {
		if r >= 'a' && r <= 'z' || r >= '0' && r <= '9' {
			b.WriteRune(r)
		} else if text := b.String(); text != "" && !strings.HasSuffix(text, "-") {
			b.WriteByte('-')
		}
	}
	return strings.Trim(b.String(), "-")
}
