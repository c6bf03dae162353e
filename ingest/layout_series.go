package ingest

import (
	"bytes"
	"fmt"
	"math"
	"slices"
	"sort"
	"strings"
	"unicode/utf8"
)

// layoutSeries are the numbers of one channel's lines.
type layoutSeries struct {
	columns    []layoutColumn
	values     [][]float64 // by column, then row; of a wrapped series one column
	resolution float64     // of the times: the unit of the last digit written
	rows       []layoutRow
	minus      int // first line with a Unicode minus sign, 0 if none
}

// layoutRow is a line and the number of values of a column before it.
type layoutRow struct{ line, before int }

// line returns the line of value i.
func (s *layoutSeries) line(i int) int {
	at := sort.Search(len(s.rows), func(k int) bool { return s.rows[k].before > i })
	return s.rows[at-1].line
}

// lines returns the line of each value of a column.
func (s *layoutSeries) lines() []int {
	lines := make([]int, s.len())
	for i, r := range s.rows {
		end := s.len()
		if i+1 < len(s.rows) {
			end = s.rows[i+1].before
		}
		for k := r.before; k < end; k++ {
			lines[k] = r.line
		}
	}
	return lines
}

// len returns the number of values of a column.
func (s *layoutSeries) len() int { return len(s.values[0]) }

// wrapped reports whether the lines are one series, read from left to right.
func (n *layoutNumbers) wrapped() bool { return len(n.columns) == 0 }

// newSeries makes room for what can stand in the lines, a value with what
// separates it taking two bytes at least, but no more than is announced.
func (n *layoutNumbers) newSeries(t *Text, s span, count int) *layoutSeries {
	out := &layoutSeries{columns: n.columns, resolution: math.Inf(1)}
	lines := s.last - s.first + 1
	room := lines
	if n.wrapped() {
		out.columns = []layoutColumn{{}}
		bytes, least := 0, 2
		for i := s.first; i <= s.last; i++ {
			bytes += len(t.Bytes(i)) + 1
		}
		if len(n.widths) > 0 {
			least = slices.Min(n.widths)
		}
		room += bytes / least
	}
	if count >= 0 {
		room = min(room, count)
	}
	out.values = make([][]float64, len(out.columns))
	for i := range out.values {
		out.values[i] = make([]float64, 0, room)
	}
	out.rows = make([]layoutRow, 0, lines)
	return out
}

// series reads the numbers: up to the line that ends them, else as many as are
// announced, else to the last line. count is below 0 where none is announced.
func (l *Layout) series(t *Text, s span, count int) (*layoutSeries, error) {
	d := &l.data
	out := l.numbers.newSeries(t, s, count)
	limit := math.MaxInt
	if count >= 0 && d.end == nil {
		limit = count
	}
	var bad faults
	blanks, ended := 0, false
	scratch := make([]byte, 0, 64)
	n := s.first
	for ; n <= s.last && out.len() < limit && !ended; n++ {
		line := t.Bytes(n)
		switch {
		case d.end != nil && d.end.matches(line):
			ended = true
			continue
		case len(skipBlanks(line)) == 0:
			blanks++
			continue
		case d.comment != nil && bytes.HasPrefix(skipBlanks(line), d.comment):
			continue
		case blanks > 1:
			return nil, refuse(n, "samples", "%d blank lines inside the data: a second record?", blanks)
		}
		blanks = 0
		if err := l.numbers.shortLine(out, n, bad.total); err != nil {
			return nil, err
		}
		before := out.len()
		if l.numbers.append(out, line, n, scratch) {
			continue
		}
		if limit < math.MaxInt && hasWords(line) {
			return nil, truncated(n, "samples", count, before)
		}
		bad.add(n, func() string { return l.numbers.cause(line) })
	}
	if err := bad.err(); err != nil {
		return nil, err
	}
	return out, l.checkEnd(t, span{n, s.last}, out, count, ended)
}

// shortLine refuses a line after one that was not full.
func (n *layoutNumbers) shortLine(s *layoutSeries, line, bad int) error {
	rows := len(s.rows)
	if rows == 0 || bad > 0 || !n.wrapped() || n.form.fields == 0 {
		return nil
	}
	last := s.rows[rows-1]
	if got := s.len() - last.before; got < n.form.fields {
		return refuse(last.line, "samples", "line holds %d values, expected %d", got, n.form.fields)
	}
	return nil
}

// checkEnd holds the numbers to what announces their end. rest is what follows
// them.
func (l *Layout) checkEnd(t *Text, rest span, s *layoutSeries, count int, ended bool) error {
	got := s.len()
	switch {
	case l.data.end != nil && !ended:
		return refuse(rest.last, "samples", "truncated: no line matches data.ends_with %s after %d values", l.data.end, got)
	case count >= 0 && got < count && l.data.end == nil:
		return truncated(rest.last, "samples", count, got)
	case count >= 0 && got != count:
		return refuse(min(rest.first, rest.last+1)-1, "samples", "announced %d values, found %d", count, got)
	case got == 0:
		return refuse(rest.first-1, "samples", "no data found")
	}
	for n := rest.first; n <= rest.last && !l.data.trailer; n++ {
		if line := bytes.TrimSpace(t.Bytes(n)); len(line) > 0 {
			return refuse(n, "samples", "text %s after the end of the data", found(latin(line)))
		}
	}
	return nil
}

// append reads one line into the series, all of it or nothing.
func (n *layoutNumbers) append(s *layoutSeries, line []byte, at int, scratch []byte) bool {
	before := s.len()
	if !isASCII(line) {
		if s.minus == 0 && bytes.Contains(line, unicodeMinus) {
			s.minus = at
		}
		if n.widths != nil {
			line = oneByteEach(line)
		}
	}
	read := n.appendColumns
	if n.wrapped() {
		read = n.appendWrapped
	}
	if !read(s, line, scratch) {
		for i := range s.values {
			s.values[i] = s.values[i][:before]
		}
		return false
	}
	s.rows = append(s.rows, layoutRow{at, before})
	return true
}

// oneByteEach returns the line with one byte for each character, so that widths
// count characters: a minus for U+2212, a question mark for what no number holds.
func oneByteEach(line []byte) []byte {
	out := make([]byte, 0, len(line))
	for _, r := range string(line) {
		switch {
		case r < utf8.RuneSelf:
			out = append(out, byte(r))
		case r == '−':
			out = append(out, '-')
		default:
			out = append(out, '?')
		}
	}
	return out
}

// next returns field i of a line as next of numberForm does, by widths where
// there are some.
func (n *layoutNumbers) next(line []byte, i int) (field, rest []byte) {
	if n.widths == nil {
		return n.form.next(line)
	}
	width := n.width(line, i)
	return bytes.TrimSpace(line[:width]), line[width:]
}

// width returns how many bytes of a line field i takes that begins there.
func (n *layoutNumbers) width(line []byte, i int) int {
	return min(n.widths[min(i, len(n.widths)-1)], len(line))
}

// read reads field i of a line as a number.
func (n *layoutNumbers) read(line, scratch []byte, i int) (field, rest []byte, v float64, ok bool) {
	if n.widths == nil {
		return n.form.read(line, scratch)
	}
	width := n.width(line, i)
	field = line[:width]
	for len(field) > 0 && field[0] == ' ' {
		field = field[1:]
	}
	if v, length := leadingNumber(field, n.form.mark()); length > 0 && length == len(field) {
		return field, line[width:], v, true
	}
	field, rest = n.next(line, i)
	v, ok = n.form.number(field, scratch)
	return field, rest, v, ok
}

func (n *layoutNumbers) appendWrapped(s *layoutSeries, line, scratch []byte) bool {
	limit := n.form.fields
	for i := 0; len(line) > 0; i++ {
		field, rest, v, ok := n.read(line, scratch, i)
		if field == nil || !ok || limit > 0 && i == limit {
			return isBlankLine(line)
		}
		s.values[0] = append(s.values[0], v)
		line = rest
	}
	return true
}

func (n *layoutNumbers) appendColumns(s *layoutSeries, line, scratch []byte) bool {
	i, k := 0, 0
	for ; len(line) > 0; i++ {
		if i == n.form.fields {
			return isBlankLine(line)
		}
		if k == len(n.columns) || n.columns[k].number != i+1 {
			if isBlankLine(line) {
				return false
			}
			_, line = n.next(line, i)
			continue
		}
		field, rest, v, ok := n.read(line, scratch, i)
		if field == nil || !ok {
			return false
		}
		line = rest
		if n.columns[k].time && len(s.rows) < plainHeadLines {
			s.resolution = min(s.resolution, resolution(field))
		}
		s.values[k] = append(s.values[k], v)
		k++
	}
	return i == n.form.fields
}

// cause says why a line was not read.
func (n *layoutNumbers) cause(line []byte) string {
	fields := 0
	if n.widths != nil {
		line = oneByteEach(line)
	}
	for rest := line; len(skipBlanks(rest)) > 0; fields++ {
		var field []byte
		var ok bool
		skip := !n.wrapped() && !slices.ContainsFunc(n.columns, func(c layoutColumn) bool { return c.number == fields+1 })
		if skip {
			field, rest = n.next(rest, fields)
		} else {
			field, rest, _, ok = n.read(rest, nil, fields)
		}
		if n.form.fields > 0 && fields == n.form.fields {
			return fmt.Sprintf("text %s after the %d values of the line", found(latin(bytes.TrimSpace(append(slices.Clone(field), rest...)))), fields)
		}
		if ok || skip {
			continue
		}
		text := latin(field)
		switch {
		case slices.Contains(n.missing, strings.ToLower(text)):
			return fmt.Sprintf("value %s: the layout says it is missing", found(text))
		case text == "":
			return fmt.Sprintf("value %d of the line is blank", fields+1)
		}
		if cause := badField(text); cause != "" {
			return cause
		}
		return fmt.Sprintf("expected a number, found %s", found(text))
	}
	return fmt.Sprintf("line holds %d values, expected %d", fields, n.form.fields)
}

// checkMissing refuses the values that the layout calls missing.
func (n *layoutNumbers) checkMissing(s *layoutSeries, column int) error {
	if len(n.marks) == 0 {
		return nil
	}
	total, first := 0, 0
	for i, v := range s.values[column] {
		if slices.Contains(n.marks, v) {
			if total == 0 {
				first = i
			}
			total++
		}
	}
	if total == 0 {
		return nil
	}
	return refuse(s.line(first), "samples", "value %g: the layout says it is missing; %d such values", s.values[column][first], total)
}
