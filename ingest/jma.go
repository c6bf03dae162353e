package ingest

import (
	"bytes"
	"strings"
	"time"
	"unicode/utf8"
)

// jma reads the CSV files of the Japan Meteorological Agency: header lines
// KEY=VALUE, a row that names three directions, and rows of three values.
//
// That the files are CSV of three columns in gal is certain. The keys, the
// order of the parts of the start time and its zone are from memory, so that
// nothing but unit, sampling rate and directions is required of a header, and
// these are taken only as the file states them.
type jma struct{}

// Info describes the format.
func (jma) Info() Info {
	return Info{
		Name: "jma-csv", Title: "Japan Meteorological Agency CSV, three directions in columns", Channels: "three",
		Unit: "as stated, gal", NotRead: "other columns than three directions",
	}
}

// The keys of the header that are used, without blanks and stops.
const (
	jmaSite  = "SITECODE"
	jmaLat   = "LAT"
	jmaLon   = "LON"
	jmaRate  = "SAMPLINGRATE"
	jmaUnit  = "UNIT"
	jmaStart = "INITIALTIME"
)

const (
	jmaColumns = 3
	// maxJMAHeader is the longest header read, in lines; one has about seven.
	maxJMAHeader = 50
)

// Sniff looks for the key SITE CODE in the first line.
func (jma) Sniff(c *Content) string {
	if key, _, ok := jmaKey(words(c.Text, nextText(c.Text, 1))); ok && key == jmaSite {
		return "first line begins with SITE CODE="
	}
	return ""
}

// Parse reads the three channels of a file. Hints stand in for a unit or a step
// that the header leaves out, and must not contradict one that it states.
func (jma) Parse(content *Content, hints Hints) ([]Channel, error) {
	t := content.Text
	h, err := readJMAHeader(t)
	if err != nil {
		return nil, err
	}
	common := Channel{Siting: SitingUnknown, Processing: ProcessingUnknown}
	if err := h.describe(&common, hints); err != nil {
		return nil, err
	}
	common.Line = nextText(t, h.columns+1)
	values, err := jmaRows(t, common.Line)
	if err != nil {
		return nil, err
	}
	channels := make([]Channel, jmaColumns)
	for i := range channels {
		c := &channels[i]
		*c = common
		c.Warnings = append([]string(nil), common.Warnings...)
		c.Orientation, c.Acceleration = h.directions[i], values[i]
		warnOffset(c)
		scale(c.Acceleration, c.UnitMPS2)
	}
	return channels, nil
}

// jmaHeader holds the values of the header by their keys, and the row that names
// the columns.
type jmaHeader struct {
	values     map[string]statement
	columns    int // line
	directions [jmaColumns]Orientation
}

// jmaKey splits a header line at its equals sign. Keys are compared without
// blanks and stops, in upper case; the commas that a spreadsheet adds are no
// part of a value.
func jmaKey(line string) (key, value string, ok bool) {
	key, value, ok = strings.Cut(line, "=")
	if !ok || len(key) > 40 {
		return "", "", false
	}
	key = strings.ToUpper(strings.NewReplacer(" ", "", "\t", "", ".", "", `"`, "").Replace(key))
	return key, strings.Trim(value, ", \t\""), true
}

func readJMAHeader(t *Text) (*jmaHeader, error) {
	h := &jmaHeader{values: map[string]statement{}}
	for n := nextText(t, 1); n <= min(t.Len(), maxJMAHeader); n++ {
		line := strings.TrimSpace(jmaText(t.Bytes(n)))
		if key, value, ok := jmaKey(line); ok {
			if held, twice := h.values[key]; twice && held.text != value {
				return nil, refuse(n, key, "line %d says %s, line %d %s", held.line, found(held.text), n, found(value))
			}
			h.values[key] = statement{value, n}
			continue
		}
		if line != "" && startsNumber([]byte(line)) {
			return nil, refuse(n, "columns", "values before a row that names three directions, such as NS,EW,UD")
		}
		if names := strings.Split(strings.TrimRight(line, ", \t"), ","); len(names) > 1 {
			h.columns = n
			return h, h.nameColumns(names)
		}
	}
	return nil, refuse(min(t.Len(), maxJMAHeader), "columns", "no row that names three directions, such as NS,EW,UD")
}

// jmaText returns a header line as text. What is no UTF-8 may be a name in
// Shift-JIS, and this is not known: the line ends before it.
func jmaText(line []byte) string {
	line = line[:min(len(line), maxHeading)]
	if !utf8.Valid(line) {
		line = line[:bytes.IndexFunc(line, func(r rune) bool { return r >= utf8.RuneSelf })]
	}
	return string(line)
}

// nameColumns reads the row of directions, which must differ.
func (h *jmaHeader) nameColumns(names []string) error {
	if len(names) != jmaColumns {
		return refuse(h.columns, "columns", "%d columns are named, expected %d directions", len(names), jmaColumns)
	}
	for i, name := range names {
		o, ok := direction(strings.Trim(name, " \t\""))
		if !ok {
			return refuse(h.columns, "columns", "unknown direction %s", found(name))
		}
		for _, before := range h.directions[:i] {
			if before.same(o) {
				return refuse(h.columns, "columns", "%s and %s are one direction", found(before.Label), found(o.Label))
			}
		}
		h.directions[i] = o
	}
	return nil
}

// describe reads the header into the channel that all columns share.
func (h *jmaHeader) describe(c *Channel, hints Hints) error {
	c.Station.Code, c.Station.Name = jmaStation(h.values[jmaSite].text)
	c.Station.Latitude, c.Station.Longitude = position(h.number(c, jmaLat), h.number(c, jmaLon))
	c.Start = h.start(c)
	unit, err := h.unit(c, hints)
	if err != nil {
		return err
	}
	c.Unit, c.UnitMPS2 = unit.Name, unit.MPS2
	c.StepS, err = h.step(hints)
	return err
}

// jmaStation splits the site into code and name, which stand apart by a comma
// or a blank. A code is ASCII.
func jmaStation(site string) (code, name string) {
	i := strings.IndexAny(site, ", \t")
	if i < 0 {
		i = len(site)
	}
	code, name = site[:i], strings.Trim(site[i:], ", \t")
	if strings.ContainsFunc(code, func(r rune) bool { return r >= utf8.RuneSelf }) {
		code = ""
	}
	return code, name
}

func (h *jmaHeader) number(c *Channel, key string) Number {
	s := h.values[key]
	if s.text == "" {
		return Number{}
	}
	v, ok := parseNumber([]byte(s.text))
	if !ok {
		c.warn("line %d: %s %s not understood", s.line, key, found(s.text))
		return Number{}
	}
	return Known(v)
}

// start reads the time of the first sample, year to second with blanks, slashes,
// colons or hyphens between them, in Japan Standard Time.
func (h *jmaHeader) start(c *Channel) time.Time {
	s := h.values[jmaStart]
	if s.text == "" {
		return time.Time{}
	}
	parts := strings.FieldsFunc(s.text, func(r rune) bool { return strings.ContainsRune(" \t/:-,", r) })
	at, err := time.ParseInLocation("2006 1 2 15 4 5", strings.Join(parts, " "), japan)
	if err != nil {
		c.warn("line %d: %s %s not understood", s.line, jmaStart, found(s.text))
		return time.Time{}
	}
	return at.UTC()
}

// unit reads a unit, or a unit and its other name in brackets, gal(cm/s/s),
// which must mean the same.
func (h *jmaHeader) unit(c *Channel, hints Hints) (Unit, error) {
	s := h.values[jmaUnit]
	name, other, two := strings.Cut(s.text, "(")
	unit, warning, err := chooseUnit(statement{strings.TrimSpace(name), s.line}, hints)
	if err != nil {
		return unit, err
	}
	if warning != "" {
		c.warn("%s", warning)
	}
	if two {
		second, err := ParseUnit(strings.TrimSuffix(strings.TrimSpace(other), ")"))
		switch {
		case err != nil:
			return unit, refuse(s.line, "unit", "%w", err)
		case second.MPS2 != unit.MPS2:
			return unit, refuse(s.line, "unit", "%s and %s are two units", unit.Name, second.Name)
		}
	}
	return unit, nil
}

// step returns the time step in s of the stated rate, or else of the hint.
func (h *jmaHeader) step(hints Hints) (float64, error) {
	s := h.values[jmaRate]
	if s.text == "" {
		if hints.StepS > 0 {
			return hints.StepS, nil
		}
		return 0, refuse(0, "dt", "the file states no time step: give it with --dt or in the catalogue's dt_s column")
	}
	rate, unit, ok := quantity(s.text)
	if !ok || !(rate > 0) || unit != "" && unit != "hz" {
		return 0, refuse(s.line, "rate", "expected a sampling rate over zero in Hz, found %s", found(s.text))
	}
	return 1 / rate, checkStep(1/rate, s.line, hints)
}

// jmaRows reads rows of three numbers from the given line to the end.
func jmaRows(t *Text, line int) ([jmaColumns][]float64, error) {
	var values [jmaColumns][]float64
	if line > t.Len() {
		return values, refuse(t.Len(), "samples", "truncated: the file ends before the values")
	}
	for i := range values {
		values[i] = make([]float64, 0, t.Len()-line+1)
	}
	end := 0 // line of the first blank one, which only blank ones may follow
	for n := line; n <= t.Len(); n++ {
		row := trimBlanks(skipBlanks(t.Bytes(n)))
		switch {
		case len(row) == 0:
			if end == 0 {
				end = n
			}
			continue
		case end > 0:
			return values, refuse(end, "samples", "blank line before more values")
		}
		for i := range values {
			v, rest, ok := jmaField(row, i == jmaColumns-1)
			if !ok {
				return values, refuse(n, "samples", "%s", jmaBadRow(t.Bytes(n)))
			}
			values[i] = append(values[i], v)
			row = rest
		}
	}
	return values, nil
}

// jmaField reads the number before the first comma of row and returns it with
// what follows the comma. After the last of a row nothing but commas may follow.
func jmaField(row []byte, last bool) (v float64, rest []byte, ok bool) {
	row = skipBlanks(row)
	v, n := leadingNumber(row, '.')
	switch {
	case n > 0 && n == len(row):
		return v, nil, last
	case n > 0 && row[n] == ',' && !last:
		return v, row[n+1:], true
	}
	field, rest, found := bytes.Cut(row, []byte(","))
	if last {
		ok = len(bytes.Trim(rest, ", \t")) == 0
	} else {
		ok = found
	}
	v, number := parseNumber(trimBlanks(field))
	return v, rest, ok && number
}

// jmaBadRow says what is wrong with a row that is not three numbers.
func jmaBadRow(row []byte) string {
	text := latin(trimBlanks(row[:min(len(row), maxHeading)]))
	fields := strings.Split(strings.TrimRight(text, ", \t"), ",")
	for i, f := range fields {
		f = strings.TrimSpace(f)
		if _, ok := parseNumber([]byte(f)); !ok && i < jmaColumns {
			return "expected a number, found " + found(f)
		}
	}
	return "expected three values, found " + found(text)
}
