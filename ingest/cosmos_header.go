package ingest

import (
	"bytes"
	"math"
	"regexp"
	"strings"
)

// cosmosHeader is what stands before the data of a section.
type cosmosHeader struct {
	text  *Text
	first int // line of the first text line
	// modern says that the version is 1.20 or later, so that the positions of
	// the numeric headers are known.
	modern     bool
	intHeader  *numericHeader
	realHeader *numericHeader
}

// cosmosVersion is the first version whose numeric headers are used.
const cosmosVersion = 1.20

// The limits of headers that are taken for such. Version 1.20 has 13 lines of
// text and 100 numbers of each kind.
const (
	minCosmosText    = 9
	maxCosmosText    = 60
	maxCosmosNumbers = 1000
)

var (
	cosmosNumbers = regexp.MustCompile(`(?i)^\s*(\d+)\s+(integer|real)-header\b.*?\bon\s+(\d+)\s+lines?\b.*?\bformat\s*=?\s*(\([^()]*\)|\S+)`)
	cosmosRemarks = regexp.MustCompile(`(?i)^\s*(\d+)\s+comment`)
	cosmosNulls   = regexp.MustCompile(`([-+]?\d+)\s*,\s*([-+]?\d+\.?\d*)\s*$`)
)

// readCosmosHeader reads the headers of the section that begins at the given
// line and returns them with the line after the comments.
func readCosmosHeader(t *Text, line int) (*cosmosHeader, int, error) {
	m := cosmosOpening.FindStringSubmatch(words(t, line))
	h := &cosmosHeader{text: t, first: line, modern: decimal(m[1]) >= cosmosVersion}
	n, ok := valueCount(m[2])
	if !ok || n < minCosmosText || n > maxCosmosText {
		return nil, 0, refuse(line, "text header", "%s text lines announced, expected 13", m[2])
	}
	intNull, realNull := h.nulls()
	var err error
	next := line + n
	if h.intHeader, next, err = readCosmosNumbers(t, next, "integer", intNull); err != nil {
		return nil, 0, err
	}
	if h.realHeader, next, err = readCosmosNumbers(t, next, "real", realNull); err != nil {
		return nil, 0, err
	}
	next, err = skipRemarks(t, next)
	return h, next, err
}

// nulls returns the values that stand for "not stated", from text line 13.
func (h *cosmosHeader) nulls() (integer, real float64) {
	if m := cosmosNulls.FindStringSubmatch(h.line(13)); m != nil {
		return decimal(m[1]), decimal(m[2])
	}
	return -999, -999
}

// readCosmosNumbers reads a numeric header with its start line.
func readCosmosNumbers(t *Text, line int, name string, null float64) (*numericHeader, int, error) {
	field := name + " header"
	if line > t.Len() {
		return nil, 0, refuse(t.Len(), field, "truncated: the file ends before it")
	}
	m := cosmosNumbers.FindStringSubmatch(words(t, line))
	if m == nil || !strings.EqualFold(m[2], name) {
		return nil, 0, refuse(line, field, "expected its start line, found %s", found(words(t, line)))
	}
	layout, err := parseFortran(m[4])
	if err != nil {
		return nil, 0, refuse(line, field, "%w", err)
	}
	count, ok := valueCount(m[1])
	if !ok || count < 1 || count > maxCosmosNumbers {
		return nil, 0, refuse(line, field, "%s values announced, expected 100", m[1])
	}
	if lines, ok := valueCount(m[3]); !ok || lines != layout.lines(count) {
		return nil, 0, refuse(line, field, "%d values in format %s take %d lines, %s announced", count, m[4], layout.lines(count), m[3])
	}
	return readHeader(t, line+1, count, layout, name, null)
}

// skipRemarks passes over the comment header, which may be missing.
func skipRemarks(t *Text, line int) (int, error) {
	m := cosmosRemarks.FindStringSubmatch(words(t, line))
	if m == nil {
		return line, nil
	}
	count, ok := valueCount(m[1])
	if !ok || count > t.Len()-line {
		return 0, refuse(line, "comments", "truncated: announced %s lines, found %d", m[1], t.Len()-line)
	}
	for i := 1; i <= count; i++ {
		if b := bytes.TrimSpace(t.Bytes(line + i)); len(b) == 0 || b[0] != '|' {
			return 0, refuse(line+i, "comments", "line %d of %d does not begin with |: found %s", i, count, found(latin(b)))
		}
	}
	return line + 1 + count, nil
}

// line returns text line n, counted from 1.
func (h *cosmosHeader) line(n int) string { return words(h.text, h.first+n-1) }

// columns returns the characters lo to hi of text line n, both counted from 1,
// without blanks round them.
func (h *cosmosHeader) columns(n, lo, hi int) string {
	return columns(h.line(n), lo, hi)
}

// integer returns integer i, unknown where the file is older than its meaning.
func (h *cosmosHeader) integer(i int) Number {
	if !h.modern {
		return Number{}
	}
	return h.intHeader.at(i)
}

// real returns real i, unknown where the file is older than its meaning.
func (h *cosmosHeader) real(i int) Number {
	if !h.modern {
		return Number{}
	}
	return h.realHeader.at(i)
}

// The stages of processing in integer 1. Stages 2 and 3 are from memory.
const (
	stageRaw         = 0
	stageUncorrected = 1
	stageCorrected   = 2
	stageSpectra     = 3
)

// stage returns the stage of processing by integer 1 or else by the first text
// line.
func (h *cosmosHeader) stage() Number {
	if n := h.integer(1); n.Known && n.Value >= stageRaw && n.Value <= stageSpectra {
		return n
	}
	switch s := strings.ToLower(h.title()); {
	case strings.Contains(s, "spectr"):
		return Known(stageSpectra)
	case strings.Contains(s, "uncorrected"):
		return Known(stageUncorrected)
	case strings.Contains(s, "corrected"):
		return Known(stageCorrected)
	case strings.Contains(s, "raw"):
		return Known(stageRaw)
	}
	return Number{}
}

// title returns the kind of data in words, which stands before the version.
func (h *cosmosHeader) title() string {
	s, _, _ := strings.Cut(h.line(1), "(")
	return s
}

// quantity returns what the section holds by integer 2 or else by the first
// text line, "" where neither says.
func (h *cosmosHeader) quantity() string {
	title := quantityFromWords(h.title())
	if title == quantitySpectra || h.stage() == Known(stageSpectra) {
		return quantitySpectra
	}
	n := h.integer(2)
	if !n.Known {
		return title
	}
	switch n.Value {
	case 1:
		return quantityAcceleration
	case 2:
		return quantityVelocity
	case 3:
		return quantityDisplacement
	}
	return quantityOther
}

// stepSource is a time step and who states it.
type stepSource struct {
	value float64
	line  int
	what  string
}

// step returns the time step in s: of real 62, in ms, or else of the sampling
// rate in the data line, or else of real 34, the step of the raw record, or
// else of the length in real 63. A hint stands in for a file that says nothing.
// Sources that differ by more than 0.1 % are an error, except that a corrected
// series may be sampled unlike the raw one.
func (h *cosmosHeader) step(c *Channel, d *cosmosData, hints Hints) (float64, error) {
	var stated []stepSource
	if n := h.real(62); n.Known && n.Value != 0 {
		stated = append(stated, stepSource{n.Value / 1000, h.realHeader.line(62), "real 62"})
	}
	if d.rate.Known {
		stated = append(stated, stepSource{1 / d.rate.Value, d.line, "the data line"})
	}
	if n := h.real(34); n.Known && n.Value != 0 {
		raw := stepSource{n.Value, h.realHeader.line(34), "real 34"}
		if len(stated) > 0 && h.stage() == Known(stageCorrected) {
			if !stepsAgree(stated[0].value, raw.value) {
				c.warn("the raw record was sampled every %.6g s, the series every %.6g s", raw.value, stated[0].value)
			}
		} else {
			stated = append(stated, raw)
		}
	}
	length := h.real(63)
	if len(stated) == 0 && length.Value > 0 {
		c.warn("time step taken from the length of %g s over %d values", length.Value, d.count)
		stated = append(stated, stepSource{length.Value / float64(d.count), h.realHeader.line(63), "real 63"})
	}
	if len(stated) == 0 {
		if hints.StepS > 0 {
			return hints.StepS, nil
		}
		return 0, refuse(d.line, "dt", "the file states no time step: give it with --dt or in the catalogue's dt_s column")
	}
	best := stated[0]
	for _, s := range stated {
		if !(s.value > 0) {
			return 0, refuse(s.line, "dt", "time step %.6g s is not positive", s.value)
		}
		if !stepsAgree(s.value, best.value) {
			return 0, refuse(s.line, "dt", "%s says %.6g s, %s says %.6g s", best.what, best.value, s.what, s.value)
		}
	}
	if length.Value > 0 && !lengthAgrees(length.Value, best.value, d.count) {
		return 0, refuse(h.realHeader.line(63), "dt", "%d values every %.6g s do not last the %g s of real 63", d.count, best.value, length.Value)
	}
	return best.value, checkStep(best.value, best.line, hints)
}

func stepsAgree(a, b float64) bool {
	return math.Abs(a-b) <= stepAgreement*max(math.Abs(a), math.Abs(b))
}

// lengthAgrees reports whether count values may last length s: within 0.1 % and
// two steps, since producers count the ends differently, and within the
// rounding of a length in whole seconds.
func lengthAgrees(length, step float64, count int) bool {
	slack := float64(stepAgreement*length) + float64(2*step)
	if length == math.Trunc(length) {
		slack += 0.5
	}
	return math.Abs(length-float64(step*float64(count))) <= slack
}
