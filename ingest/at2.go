package ingest

import (
	"bytes"
	"strings"
)

// at2 reads the four-line-header text files in which the PEER ground-motion
// database gives accelerations: one component, free-form numbers.
//
// Source: PEER strong-motion catalogue, page "Sample data files", for the header
// lines, the reading order and the spectra beside the series. The spellings
// accepted beyond it are common practice.
type at2 struct{}

// Info describes the format.
func (at2) Info() Info {
	return Info{
		Name: "at2", Title: "four header lines, then free-form numbers (.AT2)", Channels: "one",
		Unit: "as stated in line 3, usually g",
	}
}

// at2HeaderLines is how far down a header may reach: four lines are the rule,
// some files have more.
const at2HeaderLines = 8

// Sniff looks for a line with point count and time step below a line that names
// the quantity, or for a title that names a spectrum.
func (at2) Sniff(c *Content) string {
	t := c.Text
	switch {
	case at2PairLine(t) > 0:
		return "quantity line above a line of NPTS and DT"
	case at2Spectrum(t):
		return "title of a response spectrum over columns of numbers"
	}
	return ""
}

// Parse reads the one channel of a file. Velocities, displacements and spectra
// are *NotMotionError.
func (at2) Parse(content *Content, hints Hints) ([]Channel, error) {
	t := content.Text
	pair := at2PairLine(t)
	if pair == 0 {
		return nil, &NotMotionError{"a response spectrum, not a time series"}
	}
	quantityLine, quantity := at2Quantity(t, pair)
	if quantity != "ACCELERATION" {
		return nil, &NotMotionError{strings.ToLower(quantity) + " series, not acceleration"}
	}
	count, step, err := at2Pair(t.Line(pair))
	if err != nil {
		return nil, refuse(pair, "NPTS, DT", "%w", err)
	}
	if err := checkStep(step, pair, hints); err != nil {
		return nil, err
	}
	c := &Channel{StepS: step, Line: pair + 1, Siting: SitingUnknown, Processing: ProcessingUnknown}
	if err := at2Unit(c, t.Line(quantityLine), quantityLine, hints); err != nil {
		return nil, err
	}
	at2Corners(c, t.Line(quantityLine))
	if quantityLine > 2 {
		at2Describe(c, latin(t.Bytes(quantityLine-1)))
	}
	c.Line = nextText(t, c.Line)
	if c.Acceleration, err = at2Samples(t, c.Line, count, c); err != nil {
		return nil, err
	}
	scale(c.Acceleration, c.UnitMPS2)
	return []Channel{*c}, nil
}

// at2Spectrum reports whether the file is a table of spectral ordinates: the
// title says so, a header of at least four lines names what spectra depend on, and
// numbers stand in columns below it.
func at2Spectrum(t *Text) bool {
	if !hasWord(t.Line(1), "SPECTRUM") {
		return false
	}
	about := false
	for n := 1; n <= at2HeaderLines; n++ {
		if n > 4 && countNumbers(t.Bytes(n)) >= 2 {
			return about && countNumbers(t.Bytes(n+1)) >= 2
		}
		line := t.Line(n)
		about = about || hasWord(line, "DAMPING") || hasWord(line, "FREQUENCY") || hasWord(line, "PERIOD")
	}
	return false
}

// countNumbers returns the number of fields of a line where all are numbers,
// else 0.
func countNumbers(line []byte) int {
	n := 0
	for {
		var field []byte
		if field, line = nextField(line); field == nil {
			return n
		}
		if _, ok := parseNumber(field); !ok {
			return 0
		}
		n++
	}
}

// at2PairLine returns the line that gives point count and time step, 0 where
// there is none. Line 4 may give them without labels.
func at2PairLine(t *Text) int {
	for n := 2; n <= min(t.Len(), at2HeaderLines); n++ {
		line := t.Line(n)
		if isComment(t.Bytes(n)) {
			continue
		}
		labelled := hasWord(line, "NPTS") && hasWord(line, "DT") && strings.ContainsAny(line, "0123456789")
		bare := n == 4 && countNumbers(t.Bytes(n)) == 2 && hasWord(t.Line(3), "UNITS")
		if labelled || bare {
			if at, _ := at2Quantity(t, n); at > 0 {
				return n
			}
		}
	}
	return 0
}

// at2Quantity returns the last line before the pair that names the quantity,
// and its name; a line that also names units wins over one that does not.
func at2Quantity(t *Text, pair int) (line int, quantity string) {
	for _, needUnits := range []bool{true, false} {
		for n := pair - 1; n >= 1; n-- {
			text := t.Line(n)
			if isComment(t.Bytes(n)) || needUnits && !hasWord(text, "UNITS") {
				continue
			}
			for _, q := range []string{"ACCELERATION", "VELOCITY", "DISPLACEMENT"} {
				if hasWord(text, q) {
					return n, q
				}
			}
		}
	}
	return 0, ""
}

// at2Samples reads exactly count numbers from line on. More of them are refused
// like fewer, but for a rest of zeros that is shorter than a line: padding.
func at2Samples(t *Text, line, count int, c *Channel) ([]float64, error) {
	xs := make([]float64, 0, min(count, countFields(t, line)))
	extra, zeros, perLine := 0, true, 0
	for n := line; n <= t.Len(); n++ {
		for rest := skipBlanks(t.Bytes(n)); len(rest) > 0; rest = skipBlanks(rest) {
			v, length, ok := numberIn(rest)
			if !ok {
				return nil, refuse(n, "samples", "expected a number, found %s", found(string(rest[:length])))
			}
			rest = rest[length:]
			if len(xs) == count {
				extra++
				zeros = zeros && v == 0
				continue
			}
			xs = append(xs, v)
		}
		if n == line {
			perLine = len(xs)
		}
	}
	switch {
	case len(xs) < count:
		return nil, truncated(t.Len(), "samples", count, len(xs))
	case extra > 0 && (!zeros || extra >= perLine):
		return nil, refuse(t.Len(), "samples", "announced %d values, found %d", count, count+extra)
	case extra > 0:
		c.warn("%d zeros beyond the announced %d values dropped", extra, count)
	}
	return xs, nil
}

// numberIn reads the number that line begins with and returns it with the length
// of its field, and false where the field is no number. Fields end at blanks; a
// field that touches the next one ends before its sign.
func numberIn(line []byte) (v float64, length int, ok bool) {
	v, length = leadingNumber(line, '.')
	if length == len(line) || length > 0 && isBlank(line[length]) {
		return v, length, true
	}
	length = 1
	for length < len(line) && !isBlank(line[length]) && !touches(line, length) {
		length++
	}
	v, ok = parseNumber(line[:length])
	return v, length, ok
}

// touches reports whether a sign at b[at] begins a new number: it follows a
// digit or a point, and is not the exponent without letter that Fortran writes
// beyond 99 (.12345-103).
func touches(b []byte, at int) bool {
	if b[at] != '-' && b[at] != '+' {
		return false
	}
	before := b[at-1]
	if !isDigit(before) && before != '.' {
		return false
	}
	if bytes.IndexByte(b[:at], '.') < 0 || bytes.ContainsAny(b[:at], "EeDd") {
		return true
	}
	digits := 0
	for at+1+digits < len(b) && isDigit(b[at+1+digits]) {
		digits++
	}
	after := at + 1 + digits
	return digits != 3 || after < len(b) && !isBlank(b[after]) && b[after] != '-' && b[after] != '+'
}

func isDigit(b byte) bool { return '0' <= b && b <= '9' }
