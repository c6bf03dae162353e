package ingest

import (
	"bytes"
	"fmt"
	"math"
	"regexp"
	"strings"
)

// californiaV2 reads the corrected accelerograms (V2) of the Californian
// fixed-width text layout, of one channel or of several after one another: 25
// lines of text, 100 integers as 16I5, 100 reals as 8F10, then blocks of
// acceleration, velocity and displacement, of which only the first is kept. It
// knows the response spectra (V3) that are distributed beside them and passes
// them over.
//
// Sources: files as distributed by the California Geological Survey, of 1979 to
// 2022; the reports of the California Division of Mines and Geology that
// describe the layout were not consulted.
type californiaV2 struct{}

// The fixed parts of a V2 channel.
const (
	v2TextLines = 25
	v2Positions = 100 // integers and reals alike
	v2Null      = -999
)

var (
	v2Integers = fieldLayout{perLine: 16, width: 5}
	v2Reals    = fieldLayout{perLine: 8, width: 10, decimals: pointExplicit}
)

// The first words of the files of this family, in lower case.
const (
	v2Opening      = "corrected accelerogram"
	v1Opening      = "uncorrected accelerogram"
	spectraOpening = "response and fourier amplitude spectra"
)

// Info describes the format.
func (californiaV2) Info() Info {
	return Info{
		Name: "california-v2", Title: "California strong-motion V2, fixed-width text", Channels: "one or more",
		Unit: "cm/s²",
	}
}

// Sniff looks at the first words.
func (californiaV2) Sniff(c *Content) string {
	return sniffCalifornia(c.Text, v2Opening, spectraOpening)
}

// sniffCalifornia looks for one of the openings in a first line that does not
// state the version of another format, over a line that is not of New Zealand.
func sniffCalifornia(t *Text, openings ...string) string {
	line := nextText(t, 1)
	first := strings.ToLower(words(t, line))
	if strings.Contains(first, "(format v") || isNewZealand(t, line) {
		return ""
	}
	for _, opening := range openings {
		if opens(first, opening) {
			return "first line begins with " + strings.ToUpper(opening[:1]) + opening[1:]
		}
	}
	return ""
}

// opens reports whether a heading in lower case begins with the given words,
// whatever blanks are before them.
func opens(heading, opening string) bool {
	return strings.HasPrefix(strings.TrimSpace(heading), opening)
}

// Parse reads all channels of the file.
func (californiaV2) Parse(content *Content, hints Hints) ([]Channel, error) {
	if opens(strings.ToLower(words(content.Text, nextText(content.Text, 1))), spectraOpening) {
		return nil, &NotMotionError{Reason: "response and Fourier spectra, not a time series"}
	}
	return readCalifornia(content.Text, v2Opening, hints, readV2Channel)
}

// readCalifornia reads channel after channel to the end of the text. Each begins
// with the opening; read returns it and the line after it.
func readCalifornia(t *Text, opening string, hints Hints, read func(*Text, int, Hints) (*Channel, int, error)) ([]Channel, error) {
	var channels []Channel
	for line := nextText(t, 1); line <= t.Len(); line = nextText(t, line) {
		if !opens(strings.ToLower(words(t, line)), opening) {
			return nil, refuse(line, "", "text %s after the end of a channel, expected the heading of another", found(words(t, line)))
		}
		c, next, err := read(t, line, hints)
		if err != nil {
			return nil, err
		}
		channels = append(channels, *c)
		line = next
	}
	return channels, nil
}

// readV2Channel reads the channel whose first text line is given and returns it
// with the line after it.
func readV2Channel(t *Text, line int, hints Hints) (*Channel, int, error) {
	first, err := findV2Integers(t, line)
	if err != nil {
		return nil, 0, err
	}
	integers, next, err := readHeader(t, first, v2Positions, v2Integers, "integer", v2Null)
	if err != nil {
		return nil, 0, err
	}
	reals, next, err := readHeader(t, next, v2Positions, v2Reals, "real", v2Null)
	if err != nil {
		return nil, 0, err
	}
	h := &v2Heading{text: t, first: line}
	c := &Channel{Processing: ProcessingCorrected}
	h.describe(c, integers, reals)
	integers.warnGaps(c)
	reals.warnGaps(c)
	next, err = readV2Blocks(t, next, v2Opening, c, func(b *v2Block, line int) error {
		return b.settle(c, h, line, integers, reals, hints)
	})
	return c, next, err
}

// findV2Integers returns the line of the integer header, 25 lines after the
// first text line.
func findV2Integers(t *Text, line int) (int, error) {
	at := line + v2TextLines
	switch {
	case at > t.Len():
		return 0, refuse(t.Len(), "text header", "truncated: announced %d lines, found %d", v2TextLines, t.Len()-line+1)
	case isV2IntegerLine(t.Bytes(at - 1)):
		return 0, refuse(at-1, "text header", "integers after fewer than %d lines of text", v2TextLines)
	case !isV2IntegerLine(t.Bytes(at)):
		return 0, refuse(at, "integer header", "expected 16 integers of 5 characters after %d lines of text, found %s", v2TextLines, found(words(t, at)))
	}
	return at, nil
}

// isV2IntegerLine reports whether b is a full line of 16I5.
func isV2IntegerLine(b []byte) bool {
	if len(b) <= 15*v2Integers.width || len(bytes.TrimSpace(b)) < 15 {
		return false
	}
	for _, c := range b {
		if (c < '0' || c > '9') && c != ' ' && c != '-' && c != '*' {
			return false
		}
	}
	return true
}

// v2Block is what the count line of a block says.
type v2Block struct {
	quantity string // "accel", "veloc", "displ"
	count    int
	step     printed
	unit     string
	layout   fieldLayout
}

var (
	v2CountLine  = regexp.MustCompile(`(?i)^\s*(\S+)\s*points of\s+(?:(?:raw|uncor\w*\.?)\s+)?(accel|veloc|displ)\w*\s+data equally spaced at\s*(\S+)\s*sec(.*)$`)
	v2UnitText   = regexp.MustCompile(`(?i)(?:\bunits:\s*|\bin\s+)([^\s()]+)`)
	v2FormatText = regexp.MustCompile(`(?i)\(\s*\d*\s*[FEDG]\s*\d+[^()]*\)`)
)

// readV2Count reads a count line; it returns nil where the line is none.
func readV2Count(t *Text, line int) (*v2Block, error) {
	m := v2CountLine.FindStringSubmatch(words(t, line))
	if m == nil {
		return nil, nil
	}
	b := &v2Block{quantity: strings.ToLower(m[2]), layout: v2Reals}
	field := b.quantity + " count"
	n, ok := valueCount(m[1])
	if !ok {
		return nil, refuse(line, field, "%s is not a count of values", found(m[1]))
	}
	b.count = n
	var err error
	if b.step, err = newPrinted(m[3], line, "dt"); err != nil {
		return nil, err
	}
	if u := v2UnitText.FindStringSubmatch(m[4]); u != nil {
		b.unit = strings.TrimRight(u[1], ".,")
	}
	if f := v2FormatText.FindString(m[4]); f != "" {
		if b.layout, err = parseFortran(f); err != nil {
			return nil, refuse(line, field, "%w", err)
		}
		// The number of decimals differs between the files' formats and what
		// they print; the printed point is what counts.
		b.layout.decimals = pointExplicit
	}
	return b, nil
}

// readV2Blocks reads the blocks from the given line on, keeps the acceleration
// in c, and returns the line after the end line. The channel may also end at the
// opening of the next. settle takes step, unit and peak of the acceleration from
// its count line, whose line it is given.
func readV2Blocks(t *Text, line int, opening string, c *Channel, settle func(*v2Block, int) error) (int, error) {
	announced := 0
	for {
		line = nextText(t, line)
		if line > t.Len() || isEndLine(bytes.TrimSpace(t.Bytes(line))) || opens(strings.ToLower(words(t, line)), opening) {
			break
		}
		block, err := readV2Count(t, line)
		switch {
		case err != nil:
			return 0, err
		case block == nil && announced > 0 && startsNumber(bytes.TrimSpace(t.Bytes(line))):
			return 0, refuse(line, "", "more values than the %d announced", announced)
		case block == nil:
			return 0, refuse(line, "", "expected the count line of a block or the end line, found %s", found(words(t, line)))
		case block.quantity != "accel":
			announced = block.count
			if line, err = block.layout.skip(t, line+1, block.count, block.quantity); err != nil {
				return 0, err
			}
			continue
		case c.Acceleration != nil:
			return 0, refuse(line, "accel", "second block of acceleration in one channel")
		}
		if err := settle(block, line); err != nil {
			return 0, err
		}
		announced, c.Line = block.count, line+1
		if c.Acceleration, line, err = block.layout.series(t, line+1, block.count, "accel"); err != nil {
			return 0, err
		}
		scale(c.Acceleration, c.UnitMPS2)
	}
	if c.Acceleration == nil {
		return 0, refuse(min(line, t.Len()), "accel", "the channel has no block of acceleration")
	}
	if line > t.Len() || !isEndLine(bytes.TrimSpace(t.Bytes(line))) {
		c.Warnings = append(c.Warnings, "the channel has no end line")
		return line, nil
	}
	return line + 1, nil
}

// settle checks the count line of the acceleration against the headers and
// takes step, unit and peak from them.
func (b *v2Block) settle(c *Channel, h *v2Heading, line int, integers, reals *numericHeader, hints Hints) error {
	if err := b.checkCount(h, line, integers); err != nil {
		return err
	}
	step, err := b.chooseStep(h, reals)
	if err != nil {
		return err
	}
	c.StepS = step.value
	if err := checkStep(step.value, step.line, hints); err != nil {
		return err
	}
	unit, err := ParseUnit(b.unit)
	if err != nil {
		return refuse(line, "unit", "%w", err)
	}
	if unit.MPS2 != 0.01 {
		return refuse(line, "unit", "acceleration is in %s; files of this layout are in cm/s2", unit.Name)
	}
	if unit, _, err = chooseUnit(statement{b.unit, line}, hints); err != nil {
		return err
	}
	c.Unit, c.UnitMPS2 = unit.Name, unit.MPS2
	if peak := reals.at(66); peak.Value != 0 {
		c.HeaderPeak = Known(peak.Value * unit.MPS2)
	}
	return nil
}

// checkCount compares the block's count with the header's integers 53 and 64
// and with text line 16. Zero and -999 say nothing, and neither does a field of
// five characters that a long record overflows.
func (b *v2Block) checkCount(h *v2Heading, line int, integers *numericHeader) error {
	if b.count < 1 {
		return refuse(line, "accel count", "%d values announced", b.count)
	}
	for _, i := range []int{53, 64} {
		if n := integers.positive(i); n.Known && n.Value != float64(b.count) {
			return refuse(line, "accel count", "%d values announced, %s in line %d says %g",
				b.count, integers.what(i), integers.line(i), n.Value)
		}
	}
	if n, at := h.points(); at > 0 && n != b.count {
		return refuse(line, "accel count", "%d values announced, line %d says %d", b.count, at, n)
	}
	return nil
}

// chooseStep returns the time step of the count line, real 61 or text line 17,
// whichever is printed to most digits. All that are stated must agree within
// what their digits show.
func (b *v2Block) chooseStep(h *v2Heading, reals *numericHeader) (printed, error) {
	stated := []printed{b.step}
	if n := reals.at(61); n.Known && n.Value != 0 {
		p, err := newPrinted(string(reals.field(61)), reals.line(61), "dt")
		if err != nil {
			return printed{}, err
		}
		stated = append(stated, p)
	}
	if p, ok := h.interval(); ok {
		stated = append(stated, p)
	}
	return finest(stated)
}

// valueCount reads a count of values. Anything above 2³¹ is no count.
func valueCount(s string) (int, bool) {
	v, ok := parseNumber([]byte(s))
	if !ok || v < 0 || v >= 1<<31 || v != math.Trunc(v) || strings.Trim(s, "0123456789") != "" {
		return 0, false
	}
	return int(v), true
}

// scale multiplies x by factor.
func scale(x []float64, factor float64) {
	for i := range x {
		x[i] *= factor
	}
}

// warn notes what a person should know of the channel.
func (c *Channel) warn(format string, args ...any) {
	c.Warnings = append(c.Warnings, fmt.Sprintf(format, args...))
}
