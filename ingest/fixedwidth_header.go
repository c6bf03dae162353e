package ingest

import (
	"bytes"
	"fmt"
	"math"
	"strings"
)

// numericHeader is a block of numbers of which each position has a meaning of
// its own. Positions count from 1.
type numericHeader struct {
	name   string // "integer", "real"
	text   *Text
	first  int // line of position 1
	layout fieldLayout
	null   float64   // the value that says "not stated"
	values []float64 // NaN where the field is blank or overflowed
	gaps   int       // how many of values are NaN
}

// readHeader reads a numeric header of count positions from the given line on
// and returns it with the line after it. Blanks and asterisks are quantities
// that the file does not state, as a serial number may well be; other text in
// a field is an error. Decimal points are never implied, since nulls such as
// -999 are often written without one.
func readHeader(t *Text, line, count int, l fieldLayout, name string, null float64) (*numericHeader, int, error) {
	if have := l.room(t, line, count); have < count {
		return nil, 0, truncated(t.Len(), name+" header", count, have)
	}
	h := &numericHeader{name: name, text: t, first: line, layout: l, null: null, values: make([]float64, count)}
	for i := range h.values {
		field := bytes.TrimSpace(h.field(i + 1))
		if len(field) == 0 || bytes.IndexByte(field, '*') >= 0 {
			h.values[i] = math.NaN()
			h.gaps++
			continue
		}
		v, ok := parseNumber(field)
		if !ok {
			return nil, 0, refuse(h.line(i+1), h.what(i+1), "%s is not a number", found(latin(field)))
		}
		h.values[i] = v
	}
	last := line + l.lines(count) - 1
	fields := count - (l.lines(count)-1)*l.perLine
	if b := t.Bytes(last); len(b) > fields*l.width && len(bytes.TrimSpace(b[fields*l.width:])) > 0 {
		return nil, 0, refuse(last, name+" header", "text %s after the %d values", found(latin(bytes.TrimSpace(b[fields*l.width:]))), count)
	}
	return h, last + 1, nil
}

// whole refuses a header of integers that has a fraction in it: its lines are
// not where they should be.
func (h *numericHeader) whole() error {
	for i, v := range h.values {
		if v != math.Trunc(v) && !math.IsNaN(v) {
			return refuse(h.line(i+1), h.what(i+1), "%g is not an integer", v)
		}
	}
	return nil
}

// at returns the quantity at position i, unknown where the file does not state
// it or has no such position.
func (h *numericHeader) at(i int) Number {
	if i < 1 || i > len(h.values) {
		return Number{}
	}
	v := h.values[i-1]
	if math.IsNaN(v) || v == h.null {
		return Number{}
	}
	return Known(v)
}

// warnGaps notes on the channel that the header has fields without a number.
func (h *numericHeader) warnGaps(c *Channel) {
	for i, v := range h.values {
		if math.IsNaN(v) {
			c.warn("fields without a number in the %s header: %d, the first at position %d in line %d", h.name, h.gaps, i+1, h.line(i+1))
			return
		}
	}
}

// positive returns the quantity at position i where it is stated and above
// zero.
func (h *numericHeader) positive(i int) Number {
	n := h.at(i)
	if n.Value > 0 {
		return n
	}
	return Number{}
}

// line returns the line of position i.
func (h *numericHeader) line(i int) int { return h.first + (i-1)/h.layout.perLine }

// what names position i in a message.
func (h *numericHeader) what(i int) string { return fmt.Sprintf("%s %d", h.name, i) }

// field returns position i as it is written.
func (h *numericHeader) field(i int) []byte {
	b := h.text.Bytes(h.line(i))
	lo := (i - 1) % h.layout.perLine * h.layout.width
	if lo >= len(b) {
		return nil
	}
	return b[lo:min(lo+h.layout.width, len(b))]
}

// printed is a quantity as a file prints it: known to half a unit of its last
// digit only.
type printed struct {
	value float64
	half  float64
	line  int
	what  string
}

// newPrinted takes the value and the digits of s, which must be a plain decimal
// number.
func newPrinted(s string, line int, what string) (printed, error) {
	s = strings.TrimSpace(s)
	v, ok := parseNumber([]byte(s))
	if !ok {
		return printed{}, refuse(line, what, "%s is not a number", found(s))
	}
	decimals := 0
	if point := strings.IndexByte(s, '.'); point >= 0 {
		decimals = len(s) - point - 1
	}
	return printed{value: v, half: 0.5 * math.Pow10(-decimals), line: line, what: what}, nil
}

// agrees reports whether both may be prints of one number.
func (p printed) agrees(q printed) bool {
	// The last term covers the binary rounding of the decimals.
	slack := p.half + q.half
	return math.Abs(p.value-q.value) <= slack+float64(1e-9*math.Abs(p.value))
}

// finest returns the one of several statements of a time step in s that is
// printed to most digits. All must be positive and agree with the first.
func finest(stated []printed) (printed, error) {
	best := stated[0]
	for _, p := range stated {
		if !(p.value > 0) {
			return printed{}, refuse(p.line, "dt", "time step %g s is not positive", p.value)
		}
		if !p.agrees(stated[0]) {
			return printed{}, refuse(stated[0].line, "dt", "time step %g s, but line %d says %g s", stated[0].value, p.line, p.value)
		}
		if p.half < best.half {
			best = p
		}
	}
	return best, nil
}
