package report

import (
	"bytes"
	_ "embed"
	"fmt"
	"html/template"
	"io"
	"strconv"
	"strings"

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
}

func within(t Table, title string) tableWithin {
	if t.Caption == "" {
		return tableWithin{t, title}
	}
	return tableWithin{t, t.Caption + ", " + title}
}

// Figure is a chart, with words on the values at each period.
type Figure struct {
	Caption string
	Chart   chart.Chart
	Size    chart.Size
	Strips  []Strip
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
