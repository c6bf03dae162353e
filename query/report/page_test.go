package report

import (
	"bytes"
	"encoding/xml"
	"errors"
	"io"
	"math"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"testing"

	"swaybook/query"
	"swaybook/query/chart"
)

// hostile are texts as files may have them; none is real.
var hostile = []string{`<script>alert("x")</script>`, `"><img src=x onerror=alert(1)>`, `'; alert(1); '`, "</style><b>", "{{.Title}}", "תחנת \u202eרכבת", strings.Repeat("x", 400), "javascript:alert(1)"}

func inventedPage() *Page {
	curve := chart.Curve{Name: hostile[0], Kind: chart.Median, Values: []float64{0.1, 0.2, 0.1}}
	c := &chart.Spectra{Title: hostile[1], Notes: []string{hostile[3]}, Foot: "foot", Quantity: "PSA (g)", PeriodsS: []float64{0.1, 1, 5}, Curves: []chart.Curve{curve}, Counts: []int{1, 1, 1}}
	f := Figure{Caption: hostile[0], Chart: c, Size: chart.Half}
	for _, s := range c.Strips(chart.Half) {
		f.Strips = append(f.Strips, Strip{s, hostile[s.Position]})
	}
	t := Table{Table: query.Table{Caption: hostile[1], Columns: []query.Column{{Name: hostile[0], IsWord: true}, {Name: "n"}}}, HasFilter: true, Links: map[int]map[string]string{0: {hostile[7]: "part"}}}
	for i, h := range hostile {
		t.Rows = append(t.Rows, []string{h, strconv.Itoa(i)})
	}
	p := &Page{Title: hostile[0], Purpose: hostile[1], Caution: "c", Summary: []Fact{{hostile[2], hostile[3]}}}
	p.Sections = []Section{{ID: "part", Title: hostile[1], Lines: hostile, Figures: []Figure{f}, Tables: []Table{t}, Remarks: hostile, Parts: []Section{{ID: "inner", Title: hostile[0], Tables: []Table{t}}}}}
	return p
}

func written(t *testing.T, p *Page) string {
	t.Helper()
	var b bytes.Buffer
	if err := p.Write(&b); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// TestHostileWordsStayWords: whatever texts hold, the page has the elements that it has of
// plain ones, and no more scripts, attributes or addresses.
func TestHostileWordsStayWords(t *testing.T) {
	text := written(t, inventedPage())
	for _, c := range []struct {
		pattern string
		n       int
	}{{`<script`, 1}, {`</script`, 1}, {`<style`, 1}, {`</style`, 1}, {`<img`, 0}, {`href="javascript`, 0}, {`(src|href)="(http|//)`, 0}, {`url\(`, 0}} {
		if got := len(regexp.MustCompile(c.pattern).FindAllString(text, -1)); got != c.n {
			t.Errorf("%s: %d times, want %d", c.pattern, got, c.n)
		}
	}
	if !strings.Contains(text, hostile[4]) {
		t.Errorf("%q is not on the page as it is", hostile[4])
	}
}

// TestEqualPages: the same answers make the same bytes.
func TestEqualPages(t *testing.T) {
	first := written(t, inventedPage())
	if again := written(t, inventedPage()); again != first {
		t.Error("two pages of the same differ")
	}
}

// TestPageIsWellFormed closes every element that it opens, but those of HTML that have no end.
func TestPageIsWellFormed(t *testing.T) {
	text := written(t, inventedPage())
	i, j := strings.Index(text, "<script>"), strings.Index(text, "</script>")
	d := xml.NewDecoder(strings.NewReader(text[:i] + text[j+len("</script>"):]))
	d.Strict, d.AutoClose, d.Entity = false, xml.HTMLAutoClose, xml.HTMLEntity
	var open []string
	for {
		token, err := d.Token()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			t.Fatal(err)
		}
		switch e := token.(type) {
		case xml.StartElement:
			open = append(open, e.Name.Local)
			for _, a := range e.Attr {
				if strings.HasPrefix(strings.ToLower(a.Name.Local), "on") {
					t.Errorf("%s has a script in its attribute %s", e.Name.Local, a.Name.Local)
				}
			}
		case xml.EndElement:
			if n := len(open); n == 0 || open[n-1] != e.Name.Local {
				t.Fatalf("%s ends within %v", e.Name.Local, open)
			}
			open = open[:len(open)-1]
		}
	}
	if len(open) > 0 {
		t.Errorf("not closed: %v", open)
	}
	ids := map[string]bool{}
	for _, m := range regexp.MustCompile(` id="([^"]*)"`).FindAllStringSubmatch(text, -1) {
		if ids[m[1]] {
			t.Errorf("two elements are called %s", m[1])
		}
		ids[m[1]] = true
	}
	for _, m := range regexp.MustCompile(` href="#([^"]*)"`).FindAllStringSubmatch(text, -1) {
		if !ids[m[1]] {
			t.Errorf("a link leads to %q, which is not there", m[1])
		}
	}
}

// TestContrast holds the colours of text against those behind them, as WCAG 2.1 has it
// (1.4.3): 4.5 at least for text of any size. Relative luminance is as defined there.
func TestContrast(t *testing.T) {
	colours := map[string]string{"white": "#ffffff"}
	for _, m := range regexp.MustCompile(`--(\w+): (#[0-9a-f]{6})`).FindAllStringSubmatch(style, -1) {
		colours[m[1]] = m[2]
	}
	luminance := func(name string) (l float64) {
		rgb, err := strconv.ParseUint(colours[name][1:], 16, 32)
		if err != nil {
			t.Fatal(err)
		}
		for i, weight := range []float64{0.0722, 0.7152, 0.2126} {
			c := float64(rgb>>(8*i)&0xff) / 255
			if c <= 0.03928 {
				c /= 12.92
			} else {
				c = math.Pow((c+0.055)/1.055, 2.4)
			}
			l += weight * c
		}
		return l
	}
	for _, text := range []string{"ink", "quiet", "deep", "mark"} {
		for _, behind := range []string{"white", "shade"} {
			if ratio := (luminance(behind) + 0.05) / (luminance(text) + 0.05); ratio < 4.5 {
				t.Errorf("%s on %s has a contrast of %.2f", text, behind, ratio)
			}
		}
	}
}

// TestNames gives every part an ID of its own.
func TestNames(t *testing.T) {
	n := Names{}
	for _, c := range []struct{ words, want string }{{"spectrum.rock 5", "spectrum-rock-5"}, {"Spectrum/rock-5", "spectrum-rock-5-2"}, {"תחנה", "part"}, {"", "part-2"}} {
		if got := n.ID(c.words); got != c.want {
			t.Errorf("ID of %q is %q, want %q", c.words, got, c.want)
		}
	}
}

// TestStripsMeetPeriods: a strip holds its period, and strips are the whole frame without gaps.
func TestStripsMeetPeriods(t *testing.T) {
	strips := inventedPage().Sections[0].Figures[0].Strips
	if len(strips) != 3 {
		t.Fatalf("%d strips of 3 periods", len(strips))
	}
	for i, s := range strips {
		if s.At < s.X || s.At > s.X+s.Width || s.Position != i || !(s.Height > 100) {
			t.Errorf("strip %+v", s)
		}
		if i > 0 && math.Abs(strips[i-1].X+strips[i-1].Width-s.X) > 1e-9 {
			t.Errorf("a gap before strip %d", i)
		}
	}
}

// TestNothingToDrawIsAnError says it instead of a page without its figure.
func TestNothingToDrawIsAnError(t *testing.T) {
	p := inventedPage()
	p.Sections[0].Figures[0].Chart = &chart.Spectra{}
	if err := p.Write(io.Discard); !errors.Is(err, chart.ErrNothing) {
		t.Errorf("error %v", err)
	}
}

// TestMethodsHaveSources: each method and each step of the recipe stands beside its source.
func TestMethodsHaveSources(t *testing.T) {
	s := Methods("methods", "own", "raw components", []Step{{"taper", "cosine bells", "Tukey 1967"}})
	text := written(t, &Page{Sections: []Section{s}})
	if !strings.Contains(text, `<td class="short"><bdi>taper</bdi></td><td><bdi>cosine bells</bdi></td><td><bdi>Tukey 1967</bdi></td>`) {
		t.Error("the step is not on the page with its source")
	}
	for _, table := range s.Tables {
		for _, row := range table.Rows {
			if row[len(row)-1] == "" || table.Columns[len(row)-1].Name != "source" {
				t.Errorf("%q has no source", row)
			}
		}
	}
	if bare := Methods("methods", "as-delivered", "no component", nil); len(bare.Tables) != 1 {
		t.Errorf("a recipe without steps has %d tables", len(bare.Tables))
	}
}

// TestTablesHaveNames: who goes by regions hears which table each is, of many with one caption
// too, and by which column its rows come.
func TestTablesHaveNames(t *testing.T) {
	of := func(caption string) Table {
		return Table{Table: query.Table{Caption: caption, Columns: []query.Column{{Name: "id", IsWord: true}, {Name: "ratio"}}, Rows: [][]string{{"a", "2"}}}}
	}
	worst := of("")
	worst.SortedBy = "ratio"
	text := written(t, &Page{Sections: []Section{{ID: "x", Title: "Stock", Tables: []Table{worst, of("Changes")},
		Parts: []Section{{ID: "y", Title: "B7", Tables: []Table{of("At the period")}}, {ID: "z", Title: "B8", Tables: []Table{of("At the period")}}}}}})
	var labels []string
	for _, m := range regexp.MustCompile(`role="region" tabindex="0" aria-label="([^"]*)"`).FindAllStringSubmatch(text, -1) {
		labels = append(labels, m[1])
	}
	if want := []string{"Stock", "Changes, Stock", "At the period, B7", "At the period, B8"}; !slices.Equal(labels, want) {
		t.Errorf("regions %q, want %q", labels, want)
	}
	if n := strings.Count(text, `<th scope="col" class="number" aria-sort="descending">ratio</th>`); n != 1 {
		t.Errorf("%d columns are said to be sorted, want 1", n)
	}
}

// TestShortWordsStayWhole: a time or a unit is not broken where paper has room for that, and
// is where a table has too many of them.
func TestShortWordsStayWhole(t *testing.T) {
	columns, row := []query.Column{{Name: "n"}}, []string{"1.234"}
	for range 2 {
		columns, row = append(columns, query.Column{Name: "start", IsWord: true}), append(row, "2014-08-30T03:02:45Z")
	}
	narrow := Table{Table: query.Table{Columns: columns, Rows: [][]string{row}}}
	wide := Table{Table: query.Table{Columns: slices.Concat(columns, columns, columns), Rows: [][]string{slices.Concat(row, row, row)}}}
	for _, c := range []struct {
		table  Table
		column int
		cell   string
		want   string
	}{
		{narrow, 0, "1.234", "number"}, {narrow, 1, row[1], "short"}, {narrow, 1, "two words", ""}, {narrow, 1, "", ""}, {narrow, 1, hostile[6], ""},
		{wide, 0, "1.234", "number"}, {wide, 1, row[1], ""},
	} {
		if got := within(c.table, "").Class(c.column, c.cell); got != c.want {
			t.Errorf("%q in one of %d columns is %q, want %q", c.cell, len(c.table.Columns), got, c.want)
		}
	}
}
