package ingest

import (
	"bytes"
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
)

// pointExplicit as the decimals of a fieldLayout says that a number has the
// decimals it shows: no implied point is ever put in.
const pointExplicit = -1

// bareExponent as the decimals says that besides all numbers have an exponent of
// one or two digits without its letter, as in 1.2345-1.
const bareExponent = -2

// The bounds of a Fortran edit descriptor that is taken for a statement and not
// for damage.
const (
	maxFieldsPerLine = 200
	maxFieldWidth    = 40
)

// fieldLayout is how fixed-width numbers stand on a line.
type fieldLayout struct {
	perLine, width int
	// decimals is the number of digits after the point that is implied where a
	// field shows none, as Fortran reads Fw.d, or pointExplicit or bareExponent.
	decimals int
}

var fortran = regexp.MustCompile(`(?i)^\s*(\d*)\s*([IFGD]|E[SN]?)\s*(\d+)\s*(?:\.\s*(\d+)\s*(?:E\s*\d+)?)?\s*$`)

// parseFortran reads a format of one repeated numeric edit descriptor, such as
// "(8F10.3)", "10I8" or "(1E15.6 )", with or without parentheses.
//
// Source: ISO/IEC 1539-1, data edit descriptors (from memory).
func parseFortran(s string) (fieldLayout, error) {
	inner := strings.TrimSpace(s)
	if strings.HasPrefix(inner, "(") && strings.HasSuffix(inner, ")") {
		inner = inner[1 : len(inner)-1]
	}
	m := fortran.FindStringSubmatch(inner)
	if m == nil {
		return fieldLayout{}, fmt.Errorf("format %s is not one repeated number descriptor such as (8F10.3)", found(s))
	}
	l := fieldLayout{perLine: 1}
	if m[1] != "" {
		l.perLine, _ = strconv.Atoi(m[1])
	}
	l.width, _ = strconv.Atoi(m[3])
	if m[4] != "" {
		l.decimals, _ = strconv.Atoi(m[4])
	}
	if l.perLine < 1 || l.perLine > maxFieldsPerLine || l.width < 1 || l.width > maxFieldWidth || l.decimals > l.width {
		return fieldLayout{}, fmt.Errorf("format %s is outside what a line can hold", found(s))
	}
	return l, nil
}

// lines returns how many lines count values take.
func (l fieldLayout) lines(count int) int {
	return count/l.perLine + min(1, count%l.perLine)
}

// room returns how many fields the text from line on can hold, at most count.
// It bounds what is allocated by what is there and not by what is announced.
func (l fieldLayout) room(t *Text, line, count int) int {
	n := 0
	for ; line <= t.Len() && n < count; line++ {
		fields := (len(t.Bytes(line)) + l.width - 1) / l.width
		n += min(fields, l.perLine)
	}
	return min(n, count)
}

// series reads count values from the given line on, by width alone, and returns
// them with the line after the last. Every line but the last must be full. It
// refuses, with the field name in the error, a series that ends early, a field
// that is not a number, a short or overlong line, and values without a point
// beside values with one.
func (l fieldLayout) series(t *Text, line, count int, name string) ([]float64, int, error) {
	values := make([]float64, 0, l.room(t, line, count))
	points := pointCount{decimals: max(0, l.decimals)} // where Fw.d puts the point
	for len(values) < count {
		n := min(l.perLine, count-len(values))
		if line > t.Len() {
			return nil, 0, truncated(t.Len(), name, count, len(values))
		}
		b := t.Bytes(line)
		before := len(values)
		if values = l.appendLine(values, b, n, &points); len(values) != before+n {
			return nil, 0, l.cause(t, line, len(values)-before, n, name, count, len(values))
		}
		if len(b) > n*l.width && len(bytes.TrimSpace(b[n*l.width:])) > 0 {
			return nil, 0, refuse(line, name, "text %s after the %d values of the line", found(latin(bytes.TrimSpace(b[n*l.width:]))), n)
		}
		if points.implied > 0 && points.explicit > 0 {
			return nil, 0, refuse(line, name, "values with and without a decimal point in one series")
		}
		line++
	}
	return values, line, nil
}

// pointCount counts the values of a series by where their decimal point was.
type pointCount struct {
	explicit, implied int
	decimals          int // bytes after the point where it is looked for first
}

// appendLine appends n values of line b to dst; it stops before a field that is
// no number.
func (l fieldLayout) appendLine(dst []float64, b []byte, n int, points *pointCount) []float64 {
	for lo := 0; n > 0 && lo < len(b); n-- {
		field := b[lo:min(lo+l.width, len(b))]
		lo += l.width
		for len(field) > 0 && field[0] == ' ' {
			field = field[1:]
		}
		for len(field) > 0 && field[len(field)-1] == ' ' {
			field = field[:len(field)-1]
		}
		v, length := leadingNumber(field, '.')
		ok := length > 0 && length == len(field) && l.decimals != bareExponent
		if !ok {
			if v, ok = l.number(field); !ok {
				return dst
			}
		}
		if l.decimals != 0 {
			if v, ok = l.placePoint(v, field, points); !ok {
				return dst
			}
		}
		dst = append(dst, v)
	}
	return dst
}

// number reads a field without blanks round it.
func (l fieldLayout) number(field []byte) (float64, bool) {
	if l.decimals == bareExponent {
		return parseBareExponent(field)
	}
	return parseNumber(field)
}

// placePoint divides a value whose field shows no decimal point by the power of
// ten that the format implies. Zero is zero under every reading.
func (l fieldLayout) placePoint(v float64, field []byte, points *pointCount) (float64, bool) {
	// Most fields have it where the last one had it, so that one look settles them.
	if at := len(field) - 1 - points.decimals; at >= 0 && field[at] == '.' {
		points.explicit++
		return v, true
	}
	at := bytes.IndexByte(field, '.')
	switch {
	case v == 0:
		return v, true
	case at >= 0:
		points.explicit++
		points.decimals = len(field) - 1 - at
		return v, true
	case l.decimals == pointExplicit:
		return 0, false
	}
	points.implied++
	if l.decimals >= len(exactPowers) {
		return v / math.Pow10(l.decimals), true
	}
	return v / exactPowers[l.decimals], true
}

// cause says why a line gave only got of its n values.
func (l fieldLayout) cause(t *Text, line, got, n int, name string, count, total int) error {
	b := t.Bytes(line)
	trimmed := bytes.TrimSpace(b)
	lo := got * l.width
	if got == 0 && (isEndLine(trimmed) || hasWords(trimmed) || len(trimmed) == 0 && nextText(t, line) > t.Len()) {
		return truncated(line, name, count, total)
	}
	if lo >= len(b) || len(bytes.TrimSpace(b[lo:])) == 0 {
		if next := nextText(t, line+1); next > t.Len() || isEndLine(bytes.TrimSpace(t.Bytes(next))) {
			return truncated(line, name, count, total)
		}
		return refuse(line, name, "line holds %d values, expected %d", got, n)
	}
	field := bytes.TrimSpace(b[lo:min(lo+l.width, len(b))])
	_, number := l.number(field)
	switch {
	case len(field) == 0:
		return refuse(line, name, "value %d is blank", total+1)
	case bytes.IndexByte(field, '*') >= 0:
		return refuse(line, name, "value %d is %s: the number did not fit its field", total+1, found(latin(field)))
	case number:
		return refuse(line, name, "value %d is %s: it has no decimal point", total+1, found(latin(field)))
	}
	return refuse(line, name, "value %d is %s: not a number", total+1, found(latin(field)))
}

// hasWords reports whether a line is one of words where values should be: five
// letters in a row are in no number, and in none of the ways to print that there
// is none but "Infinity".
func hasWords(b []byte) bool {
	return fiveLetters.Match(b) && !bytes.Contains(bytes.ToLower(b), []byte("infinity"))
}

var fiveLetters = regexp.MustCompile(`[A-Za-z]{5}`)

func truncated(line int, name string, announced, got int) error {
	return refuse(line, name, "truncated: announced %d values, found %d", announced, got)
}

// isEndLine reports whether a trimmed line closes a channel or section in one
// of the fixed-width formats.
func isEndLine(b []byte) bool {
	if bytes.HasPrefix(b, []byte("/&")) {
		return true
	}
	const end = "end-of-data"
	return len(b) >= len(end) && bytes.EqualFold(b[:len(end)], []byte(end))
}

// startsNumber reports whether a trimmed line begins as a value may, or as one
// that did not fit its field.
func startsNumber(b []byte) bool {
	return len(b) > 0 && strings.IndexByte("+-.0123456789*", b[0]) >= 0
}

// skip passes over count values that are not wanted and returns the line after
// the last. It looks at the length and the first character of each line only.
func (l fieldLayout) skip(t *Text, line, count int, name string) (int, error) {
	for done := 0; done < count; line++ {
		n := min(l.perLine, count-done)
		if line > t.Len() {
			return 0, truncated(t.Len(), name, count, done)
		}
		b := bytes.TrimRight(t.Bytes(line), " ")
		start := bytes.TrimLeft(b, " ")
		if !startsNumber(start) {
			return 0, truncated(line, name, count, done)
		}
		if fields := (len(b) + l.width - 1) / l.width; fields != n {
			return 0, refuse(line, name, "line holds %d values, expected %d", fields, n)
		}
		done += n
	}
	return line, nil
}

// nextText returns the first line from line on that is not blank, or one past
// the end.
func nextText(t *Text, line int) int {
	for line <= t.Len() && len(bytes.TrimSpace(t.Bytes(line))) == 0 {
		line++
	}
	return line
}
