package ingest

import (
	"bytes"
	"fmt"
	"math"
	"regexp"
	"slices"
	"strings"
)

// numberForm is how the numbers of a file are written: what separates them,
// what marks their decimals, and how many stand on a line.
type numberForm struct {
	delimiter byte // ' ' for any run of blanks
	comma     bool // decimal comma
	fields    int
	// letterless says that a sign and three digits after a mantissa with a point
	// are its exponent, as Fortran writes those beyond 99, and no second number.
	letterless bool
}

// numberForms are the readings that are tried; of two that fit equally well the
// first is taken. A decimal comma between commas is not one: it could be read
// in two ways.
var numberForms = []numberForm{
	{delimiter: '\t'}, {delimiter: '\t', comma: true},
	{delimiter: ';'}, {delimiter: ';', comma: true},
	{delimiter: ','},
	{delimiter: ' '}, {delimiter: ' ', comma: true},
}

// detectForm finds the reading that fits most of the first lines of numbers.
func detectForm(t *Text, first int) (numberForm, error) {
	lines := headLines(t, first)
	best, fits := numberForm{}, 0
	for _, f := range numberForms {
		if fields, n := f.fit(lines); n > fits {
			best, fits = f, n
			best.fields = fields
		}
	}
	if fits == 0 {
		return numberForm{}, refuse(first, "samples", "%s", badLine(t.Bytes(first)))
	}
	if best.delimiter == '\t' && best.fields == 1 && startsWithTab(t, first) {
		best.delimiter = ' ' // tabs that separate nothing are blanks
	}
	best.letterless = slices.ContainsFunc(lines, func(line []byte) bool {
		return bytes.ContainsAny(line, "EeDd") && exponent.Match(line)
	})
	if best.comma && best.fields == 1 {
		pairs, n := (numberForm{delimiter: ','}).fit(lines)
		if n == fits && pairs == 2 && integerPairs(lines) {
			return numberForm{}, refuse(first, "samples", "%s may be one number with a decimal comma or two integers; write decimal points", found(string(lines[0])))
		}
	}
	if best.delimiter == ',' && best.fields >= 4 && best.fields%2 == 0 && !bytes.Contains(bytes.Join(lines, nil), []byte(".")) {
		return numberForm{}, refuse(first, "samples", "%s: commas may separate numbers or mark decimals; write decimal points", found(string(lines[0])))
	}
	return best, nil
}

// startsWithTab reports whether one of the first lines of numbers does.
func startsWithTab(t *Text, first int) bool {
	for n := first; n <= min(t.Len(), first+plainHeadLines); n++ {
		if bytes.HasPrefix(t.Bytes(n), []byte("\t")) {
			return true
		}
	}
	return false
}

// headLines returns the first lines of numbers, up to plainHeadLines.
func headLines(t *Text, first int) [][]byte {
	lines := make([][]byte, 0, min(t.Len()-first+1, plainHeadLines))
	for n := first; n <= t.Len() && len(lines) < plainHeadLines; n++ {
		if line := bytes.TrimSpace(t.Bytes(n)); len(line) > 0 {
			lines = append(lines, line)
		}
	}
	return lines
}

// fit returns the number of fields that most lines have in the form, all
// of them numbers, and the number of those lines.
func (f numberForm) fit(lines [][]byte) (fields, fits int) {
	counts := map[int]int{}
	for _, line := range lines {
		if n, ok := f.count(line); ok {
			counts[n]++
		}
	}
	for n, c := range counts {
		if c > fits || c == fits && n < fields {
			fields, fits = n, c
		}
	}
	return fields, fits
}

// count returns the number of fields of a line; it reports false where one is
// no number.
func (f numberForm) count(line []byte) (n int, ok bool) {
	var room [64]byte
	for rest := line; len(rest) > 0; {
		field, next, _, ok := f.read(rest, room[:0])
		if field == nil || !ok {
			return n, n > 0 && isBlankLine(rest)
		}
		n++
		rest = next
	}
	return n, n > 0
}

// isBlankLine reports whether nothing but blanks is left: a delimiter at the end
// of a line makes no field.
func isBlankLine(rest []byte) bool { return len(skipBlanks(rest)) == 0 }

// integerPairs reports whether every line is two integers as people write them:
// no leading zeros, no negative zero.
func integerPairs(lines [][]byte) bool {
	for _, line := range lines {
		a, b, _ := bytes.Cut(line, []byte(","))
		if !isPlainInteger(a) || !isPlainInteger(b) {
			return false
		}
	}
	return true
}

func isPlainInteger(b []byte) bool {
	digits := bytes.TrimPrefix(bytes.TrimSpace(b), []byte("-"))
	if len(digits) == 0 || len(bytes.Trim(digits, "0123456789")) > 0 {
		return false
	}
	return digits[0] != '0' || len(digits) == 1 && b[0] != '-'
}

// read reads the next field of a line, without blanks and quotes, as a number:
// the field, nil where there is none, what follows it and its delimiter, the
// value, and whether it is a number; scratch is room for a rewritten copy. A
// delimiter at the end of the line makes no field.
func (f numberForm) read(line, scratch []byte) (field, rest []byte, v float64, ok bool) {
	for len(line) > 0 && line[0] == ' ' {
		line = line[1:]
	}
	v, n := leadingNumber(line, f.mark()) // always below maxPlain
	switch {
	case n == 0:
	case n == len(line):
		return line, nil, v, true
	case line[n] == f.delimiter:
		return line[:n], line[n+1:], v, true
	}
	if field, rest = f.next(line); field != nil {
		v, ok = f.number(field, scratch)
	}
	return field, rest, v, ok
}

// mark returns what marks decimals.
func (f numberForm) mark() byte {
	if f.comma {
		return ','
	}
	return '.'
}

// next returns the next field of a line without blanks and quotes, nil where
// there is none, and what follows it and its delimiter.
func (f numberForm) next(line []byte) (field, rest []byte) {
	if f.delimiter == ' ' {
		field, rest = nextField(line)
		return unquote(field), rest
	}
	if end := bytes.IndexByte(line, f.delimiter); end >= 0 {
		line, rest = line[:end], line[end+1:]
	}
	return unquote(bytes.TrimSpace(line)), rest
}

func unquote(field []byte) []byte {
	if n := len(field); n >= 2 && field[0] == '"' && field[n-1] == '"' {
		return bytes.TrimSpace(field[1 : n-1])
	}
	return field
}

// maxPlain is the magnitude from which a number is an overflow mark, the
// largest value of a float in single precision being 3.4e38.
const maxPlain = 1e38

// otherLine names the first of the lines that were read, in brackets.
func otherLine(read []int) string {
	if len(read) == 0 {
		return ""
	}
	return fmt.Sprintf(" (the others are in line %d)", read[0])
}

var unicodeMinus = []byte("−")

// number reads a field; scratch is room for a rewritten copy. It reports false
// for what is no number, for a sign inside, and for magnitudes of maxPlain.
func (f numberForm) number(field, scratch []byte) (float64, bool) {
	if bytes.IndexByte(field, unicodeMinus[0]) >= 0 {
		field = bytes.ReplaceAll(field, unicodeMinus, []byte("-"))
	}
	if f.comma {
		if bytes.IndexByte(field, '.') >= 0 {
			return 0, false
		}
		if i := bytes.IndexByte(field, ','); i >= 0 {
			field = append(scratch[:0], field...)
			field[i] = '.'
		}
	}
	for i := 1; i < len(field); i++ {
		if (field[i] == '-' || field[i] == '+') && (isDigit(field[i-1]) || field[i-1] == '.') && !f.endsInExponent(field, i) {
			return 0, false
		}
	}
	v, ok := parseNumber(field)
	return v, ok && math.Abs(v) < maxPlain
}

// endsInExponent reports whether the sign at i begins an exponent without
// letter.
func (f numberForm) endsInExponent(field []byte, i int) bool {
	return f.letterless && i+4 == len(field) && bytes.IndexByte(field[:i], '.') >= 0 && !bytes.ContainsAny(field[:i], "EeDd")
}

var (
	thousands  = regexp.MustCompile(`^[-+]?\d{1,3}(,\d{3})+\.\d*$|^[-+]?\d{1,3}(\.\d{3})+,\d*$`)
	spaced     = regexp.MustCompile(`^[-+]?\d{1,3}( \d{3})+[.,]\d*$`)
	exponent   = regexp.MustCompile(`\d[.,]?[EeDd][-+]?\d`)
	emptyField = regexp.MustCompile(`^[,;]|[,;][ \t]*[,;]`)
	glued      = regexp.MustCompile(`\d\.\d+\.\d|[EeDd][-+]?\d+\.\d`)
	timeOfDay  = regexp.MustCompile(`^['"]?(\d{4}-\d{2}-\d{2}[T ]?)?(\d{1,2}:\d{2}(:\d{2})?)?`)
	innerSign  = regexp.MustCompile(`[0-9.][-+−][0-9.]`)
)

// badLine says what is wrong with a line that no form reads.
func badLine(line []byte) string {
	text := strings.TrimSpace(latin(line))
	if thousands.MatchString(text) || spaced.MatchString(text) {
		return fmt.Sprintf("%s: thousands separators are not read", found(text))
	}
	for _, field := range strings.FieldsFunc(text, func(r rune) bool { return r == ' ' || r == '\t' || r == ';' }) {
		if cause := badField(strings.Trim(field, "\"")); cause != "" {
			return cause
		}
	}
	if emptyField.MatchString(text) {
		return fmt.Sprintf("%s: a field is empty: missing values are not read", found(text))
	}
	return fmt.Sprintf("expected numbers, found %s", found(text))
}

// badField says what is wrong with a field, "" where nothing plainly is.
func badField(field string) string {
	switch {
	case isMissing(strings.Trim(field, ",")):
		return fmt.Sprintf("value %s: missing values are not read", found(field))
	case strings.Contains(field, ":") && timeOfDay.FindString(field) != "":
		return fmt.Sprintf("%s is a clock time; give seconds from the start", found(field))
	case thousands.MatchString(field):
		return fmt.Sprintf("%s: thousands separators are not read", found(field))
	case innerSign.MatchString(field), glued.MatchString(field):
		return fmt.Sprintf("%s: fields touch, as in a fixed-width file; give their widths in a layout, with --layout", found(field))
	}
	if v, ok := parseNumber([]byte(field)); ok && math.Abs(v) >= maxPlain {
		return fmt.Sprintf("value %s is an overflow mark", found(field))
	}
	return ""
}

// cause says why a line does not fit the form that the others have, those in
// read among them.
func (f numberForm) cause(line []byte, read []int) string {
	n := 0
	for rest := line; len(rest) > 0; {
		var field []byte
		var ok bool
		if isBlankLine(rest) {
			break
		}
		field, rest, _, ok = f.read(rest, nil)
		n++
		if field == nil {
			return fmt.Sprintf("value %d of the line is empty: missing values are not read", n)
		}
		if ok {
			continue
		}
		text := latin(field)
		if cause := badField(text); cause != "" {
			return cause
		}
		if bytes.ContainsAny(field, ".,") && strings.Trim(text, "0123456789.,+-") == "" {
			return fmt.Sprintf("%s: decimal points and decimal commas in one file%s", found(text), otherLine(read))
		}
		return fmt.Sprintf("expected a number, found %s", found(text))
	}
	return fmt.Sprintf("line holds %d values where the others hold %d", n, f.fields)
}
