package query

import (
	"strconv"
	"strings"
)

// csvText appends a cell of text by RFC 4180. A spreadsheet would take a cell
// that begins with =, +, - or @, or with a tab or line end before one, for a
// formula: such a cell gets an apostrophe in front.
func csvText(dst []byte, s string) []byte {
	if s != "" && strings.ContainsRune("=+-@\t\r\n", rune(s[0])) {
		s = "'" + s
	}
	if !strings.ContainsAny(s, "\",\r\n") {
		return append(dst, s...)
	}
	dst = append(dst, '"')
	dst = append(dst, strings.ReplaceAll(s, `"`, `""`)...)
	return append(dst, '"')
}

// csvNumber appends a number in the fewest digits that restore it, nothing
// where it is undefined.
func csvNumber(dst []byte, x float64) []byte {
	if !isDefined(x) {
		return dst
	}
	return strconv.AppendFloat(dst, x, 'g', -1, 64)
}

// csvLine collects the cells of one line.
type csvLine struct {
	text  []byte
	begun bool
}

func (l *csvLine) comma() {
	if l.begun {
		l.text = append(l.text, ',')
	}
	l.begun = true
}

func (l *csvLine) word(s string) {
	l.comma()
	l.text = csvText(l.text, s)
}

func (l *csvLine) words(list ...string) {
	for _, s := range list {
		l.word(s)
	}
}

func (l *csvLine) number(x float64) {
	l.comma()
	l.text = csvNumber(l.text, x)
}

func (l *csvLine) integer(n int) {
	l.comma()
	l.text = strconv.AppendInt(l.text, int64(n), 10)
}

func (l *csvLine) end() {
	l.text = append(l.text, '\n')
	l.begun = false
}
