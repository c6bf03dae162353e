package query

import (
	"strings"
	"unicode/utf8"
)

// table is aligned text. Columns are two spaces apart; numbers stand to the
// right, words to the left.
type table struct {
	columns []column
	rows    [][]string // cells in the order of columns
}

type column struct {
	name   string
	unit   string // a second line of the heading where any column has one
	isWord bool
}

func (t *table) add(cells ...string) {
	for i, c := range cells {
		cells[i] = printable(c)
	}
	t.rows = append(t.rows, cells)
}

func (t *table) appendTo(dst []byte) []byte {
	names, units, hasUnits := make([]string, len(t.columns)), make([]string, len(t.columns)), false
	for i, c := range t.columns {
		names[i], units[i] = c.name, c.unit
		hasUnits = hasUnits || c.unit != ""
	}
	lines := [][]string{names}
	if hasUnits {
		lines = append(lines, units)
	}
	lines = append(lines, t.rows...)
	widths := make([]int, len(t.columns))
	for _, line := range lines {
		for i, cell := range line {
			widths[i] = max(widths[i], utf8.RuneCountInString(cell))
		}
	}
	for _, line := range lines {
		dst = append(dst, strings.TrimRight(t.align(line, widths), " ")...)
		dst = append(dst, '\n')
	}
	return dst
}

func (t *table) align(cells []string, widths []int) string {
	var b strings.Builder
	for i, cell := range cells {
		if i > 0 {
			b.WriteString("  ")
		}
		space := strings.Repeat(" ", widths[i]-utf8.RuneCountInString(cell))
		if t.columns[i].isWord {
			b.WriteString(cell + space)
		} else {
			b.WriteString(space + cell)
		}
	}
	return b.String()
}
