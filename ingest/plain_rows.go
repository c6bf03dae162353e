package ingest

import (
	"bytes"
	"fmt"
	"math"
	"strings"
)

// plainRows are the numbers of a plain file.
type plainRows struct {
	values     [][]float64 // by column, then row
	resolution []float64   // by column: the unit of the last digit written
	line       []int       // line of each row
	head       string      // the first line as written
	minus      int         // first line with a Unicode minus sign, 0 if none
	remarks    []int       // lines that are comments
	counted    bool        // a line of its own states how many there are
}

// namedLines is how many lines an error names.
const namedLines = 5

// faults collects the lines that do not fit, the first with its cause.
type faults struct {
	cause string
	lines []int
	total int
}

func (f *faults) add(line int, cause func() string) {
	if f.total++; f.total == 1 {
		f.cause = cause()
	}
	if len(f.lines) < namedLines {
		f.lines = append(f.lines, line)
	}
}

func (f *faults) err() error {
	if f.total == 0 {
		return nil
	}
	if f.total == 1 {
		return refuse(f.lines[0], "samples", "%s", f.cause)
	}
	named := strings.Trim(fmt.Sprint(f.lines), "[]")
	if f.total > len(f.lines) {
		named += " …"
	}
	return refuse(f.lines[0], "samples", "%s (%d lines at fault: %s)", f.cause, f.total, named)
}

// readRows reads all lines from first on. Every line must fit the form; comments and
// one blank line at a time are passed over. A first line that holds nothing but the
// number of those below it is a count.
func readRows(t *Text, first int, form numberForm) (*plainRows, error) {
	r := newPlainRows(t, first, form)
	var bad faults
	blanks, count := 0, math.NaN()
	scratch := make([]byte, 0, 64)
	for n := first; n <= t.Len(); n++ {
		line := t.Bytes(n)
		fits := r.append(line, n, form, scratch)
		if !fits && len(bytes.TrimSpace(line)) == 0 {
			blanks++
			continue
		}
		if !fits && isRemark(line) {
			r.remarks = append(r.remarks, n)
			continue
		}
		if blanks > 1 {
			return nil, refuse(n, "samples", "%d blank lines inside the data: a second record?", blanks)
		}
		blanks = 0
		if fits {
			continue
		}
		if n == first {
			v, err := oddFirstLine(line, n, form)
			if err != nil {
				return nil, err
			}
			if count = v; !math.IsNaN(v) {
				continue
			}
		}
		bad.add(n, func() string { return form.cause(line, r.line) })
	}
	if !math.IsNaN(count) && count != float64(len(r.line)) {
		return nil, refuse(first, "samples", "line holds 1 value where the others hold %d, and is no count of the %d lines below", form.fields, len(r.line))
	}
	if err := bad.err(); err != nil {
		return nil, err
	}
	if form.fields == 1 && len(r.line) > 1 && r.values[0][0] == float64(len(r.line)-1) {
		r.values[0], r.line = r.values[0][1:], r.line[1:] // the count of those below
		r.counted = true
		return r, nil
	}
	if len(r.line) == 0 {
		return nil, refuse(first, "samples", "no data found")
	}
	r.counted = !math.IsNaN(count)
	return r, checkFirstValue(t, first, r)
}

// newPlainRows makes room for the rows: as many as can stand in the bytes there
// are, each value with its delimiter taking two at least.
func newPlainRows(t *Text, first int, form numberForm) *plainRows {
	r := &plainRows{values: make([][]float64, form.fields), resolution: make([]float64, form.fields),
		head: strings.TrimSpace(latin(t.Bytes(first)))}
	room := min(t.Len()-first+1, countFields(t, first)/form.fields+1)
	for i := range r.values {
		r.values[i] = make([]float64, 0, room)
		r.resolution[i] = math.Inf(1)
	}
	r.line = make([]int, 0, room)
	return r
}

// oddFirstLine looks at a first line that does not fit the others. One number
// over several columns may be a count and is returned; a count and a time step
// over one column are refused by name. The count is NaN for all else.
func oddFirstLine(line []byte, n int, form numberForm) (count float64, err error) {
	if form.fields > 1 {
		if v, ok := form.number(bytes.TrimSpace(line), nil); ok {
			return v, nil
		}
		return math.NaN(), nil
	}
	if fields, ok := (numberForm{delimiter: ' '}).count(line); ok && fields == 2 {
		return 0, refuse(n, "samples", "%s: a count and a time step before the values? remove the line and give the step with --dt", found(latin(line)))
	}
	return math.NaN(), nil
}

// append reads one line into the columns, all of it or nothing.
func (r *plainRows) append(line []byte, n int, form numberForm, scratch []byte) bool {
	i := 0
	rows := len(r.line)
	for rest := line; len(rest) > 0; i++ {
		field, next, v, ok := form.read(rest, scratch)
		if field == nil || !ok || i == form.fields {
			if !isBlankLine(rest) {
				i = -1
			}
			break
		}
		r.values[i] = append(r.values[i], v)
		if rows < plainHeadLines {
			r.resolution[i] = min(r.resolution[i], resolution(field))
		}
		rest = next
	}
	if i == form.fields {
		if r.minus == 0 && !isASCII(line) && bytes.Contains(line, unicodeMinus) {
			r.minus = n
		}
		r.line = append(r.line, n)
		return true
	}
	for k := range r.values {
		r.values[k] = r.values[k][:rows]
	}
	return false
}

// resolution returns the unit of the last digit of a number as written, 1 for
// an integer.
func resolution(field []byte) float64 {
	digits, at := 0, bytes.IndexAny(field, ".,")
	exponent := 0
	end := bytes.IndexAny(field, "EeDd")
	if end < 0 {
		end = len(field)
	} else if v, ok := parseNumber(field[end+1:]); ok {
		exponent = int(max(-400, min(400, v)))
	}
	if at >= 0 && at < end {
		digits = end - at - 1
	}
	return math.Pow10(exponent - digits)
}
