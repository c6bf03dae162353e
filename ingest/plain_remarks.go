package ingest

import (
	"bytes"
	"regexp"
	"slices"
	"strings"
)

// remarkMarks begin a comment among the numbers. Other marks of comments may there be an
// empty field or a number that did not fit.
var remarkMarks = []string{"#", "%", "!", "//"}

// cellError is how spreadsheets write that a cell has no value.
var cellError = regexp.MustCompile(`(?i)^#(?:value!|ref!|div/0!|name\?|num!|null!|n/a)`)

// isRemark reports whether a line among the numbers is a comment, and no number or
// missing value behind such a mark.
func isRemark(line []byte) bool {
	line = bytes.TrimSpace(line)
	if !slices.ContainsFunc(remarkMarks, func(mark string) bool { return bytes.HasPrefix(line, []byte(mark)) }) || cellError.Match(line) {
		return false
	}
	rest := bytes.TrimLeft(line, "#%!/ \t")
	_, values := likeNumbers(rest)
	return len(rest) == 0 || !values
}

// remarksIn returns the lines from first on that are comments.
func remarksIn(t *Text, first int) (lines []int) {
	for n := first; n <= t.Len(); n++ {
		if isRemark(t.Bytes(n)) {
			lines = append(lines, n)
		}
	}
	return lines
}

// readRemarks takes the comments below the last number for part of the head, and
// refuses those among the numbers that may begin a second record: which state what the
// numbers mean, or stand where neither times nor a count say that the numbers are one.
func (h *plainHead) readRemarks(t *Text, columns []plainColumn, rows *plainRows) error {
	last := rows.line[len(rows.line)-1]
	for i, n := range rows.remarks {
		l := newHeading(t, n)
		if n > last {
			if len(rows.remarks)-i > plainPreamble {
				return refuse(n, "samples", "more than %d lines of comments below the numbers", plainPreamble)
			}
			h.add(l)
			continue
		}
		isTime := slices.ContainsFunc(columns, func(c plainColumn) bool { return c.kind == columnTime })
		switch {
		case l.text != "" && (isKnownName(l.text) || slices.ContainsFunc(l.statements(), func(c comment) bool { return isDeciding(c.key) })):
			return refuse(n, "samples", "%s among the numbers: a second record?", found(l.text))
		case !isTime && !rows.counted && h.stated(countKeys...).text == "":
			return refuse(n, "samples", "comment %s among the numbers: a second record? if not, state their count as # npts = …", found(l.text))
		}
	}
	return h.checkRepeats()
}

// newHeading reads a line, without its comment mark.
func newHeading(t *Text, n int) heading {
	line := t.Bytes(n)
	l := heading{"", n, !isComment(line)}
	if len(line) <= maxHeading {
		l.text = strings.TrimSpace(latin(line))
	}
	if !l.sure {
		l.text = strings.TrimSpace(strings.TrimLeft(l.text, "#%!;*/\""))
	}
	return l
}

// add adds a line and what it states.
func (h *plainHead) add(l heading) {
	h.lines = append(h.lines, l)
	for _, c := range l.statements() {
		c.sure = l.sure
		h.comments = append(h.comments, c)
	}
}
