package ingest

import (
	"bytes"
	"regexp"
	"strings"
)

// cosmos reads COSMOS strong-motion text files, version 1.20: sections of text
// header, integer header, real header, comments and data, each of one channel
// and one quantity, in the Fortran formats that the sections state. Sections of
// acceleration are kept, whether raw counts or volts with their calibration (V0),
// uncorrected (V1c) or corrected (V2c); those of velocity, displacement and all
// else are passed over, with a warning that says which. Files of versions before 1.20 place their numbers elsewhere: of
// them only text and data lines are used.
//
// Source: COSMOS Programs Board, Strong Motion Data Format, version 1.20 (2001),
// of which the tables were not at hand; positions follow published field maps
// and, where marked "from memory" beside a code, common practice.
type cosmos struct{}

// Info describes the format.
func (cosmos) Info() Info {
	return Info{
		Name: "cosmos", Title: "COSMOS strong-motion text, version 1.20", Channels: "one or more",
		Unit: "as stated", NotRead: "counts and volts without a complete calibration",
	}
}

var cosmosOpening = regexp.MustCompile(`(?i)\(\s*format v\s*(\d+\.\d+)\D+(\d+)\s+text lines?\b`)

// Sniff looks for the version and count of text lines in the first line.
func (cosmos) Sniff(c *Content) string {
	t := c.Text
	if m := cosmosOpening.FindString(words(t, nextText(t, 1))); m != "" {
		return "first line says " + strings.TrimLeft(m, "( ")
	}
	return ""
}

// Parse reads all sections of the file.
func (cosmos) Parse(content *Content, hints Hints) ([]Channel, error) {
	t := content.Text
	r := cosmosReader{text: t, hints: hints, skipped: map[string]int{}}
	for line := nextText(t, 1); line <= t.Len(); line = nextText(t, line) {
		next, err := r.section(line)
		if err != nil {
			return nil, err
		}
		line = next
	}
	return r.result()
}

// cosmosReader collects the channels of a file.
type cosmosReader struct {
	text     *Text
	hints    Hints
	header   *cosmosHeader // of the section before, which a bare data line inherits
	channels []Channel
	skipped  map[string]int // quantities passed over
}

// The quantities of sections, as data lines and messages name them.
const (
	quantityAcceleration = "acceleration"
	quantityVelocity     = "velocity"
	quantityDisplacement = "displacement"
	quantitySpectra      = "spectra"
	quantityOther        = "another quantity"
)

// section reads the section that begins at the given line and returns the line
// after it.
func (r *cosmosReader) section(line int) (int, error) {
	inherited := false
	switch {
	case cosmosOpening.MatchString(words(r.text, line)):
		// Headers of spectra have layouts of their own: their title is enough.
		title, _, _ := strings.Cut(words(r.text, line), "(")
		if quantityFromWords(title) == quantitySpectra {
			return r.passSpectra(line), nil
		}
		h, next, err := readCosmosHeader(r.text, line)
		if err != nil {
			return 0, err
		}
		if h.quantity() == quantitySpectra {
			return r.passSpectra(line), nil
		}
		r.header = h
		line = nextText(r.text, next)
	case r.header != nil && isCosmosDataLine(words(r.text, line)):
		inherited = true
	default:
		return 0, refuse(line, "", "expected the first line of a section, found %s", found(words(r.text, line)))
	}
	d, err := readCosmosData(r.text, line)
	if err != nil {
		return 0, err
	}
	if quantity, err := r.quantity(d, inherited); err != nil {
		return 0, err
	} else if quantity != quantityAcceleration {
		return r.pass(d, quantity)
	}
	return r.keep(d, inherited)
}

// quantity decides what a section holds. The data line speaks for its own
// section; the headers may be those of the section before.
func (r *cosmosReader) quantity(d *cosmosData, inherited bool) (string, error) {
	header := r.header.quantity()
	switch {
	case d.quantity == "" && !inherited:
		return header, nil
	case header != "" && header != d.quantity && !inherited:
		return "", refuse(d.line, "quantity", "the data line says %s, the header %s", d.quantity, header)
	}
	return d.quantity, nil
}

// pass skips the data of a section that is not wanted.
func (r *cosmosReader) pass(d *cosmosData, quantity string) (int, error) {
	if quantity == "" {
		return 0, refuse(d.line, "quantity", "neither the header nor the data line says what the values are")
	}
	r.skipped[quantity]++
	next, err := d.layout.skip(r.text, d.line+1, d.count, quantity)
	if err != nil {
		var ok bool
		if _, next, ok = blankSeparated(r.text, d.line+1, d.count, d.layout.decimals > 0); !ok {
			return 0, err
		}
	}
	next, _, err = r.end(next, d, quantity)
	return next, err
}

// keep reads the data of a section of acceleration.
func (r *cosmosReader) keep(d *cosmosData, inherited bool) (int, error) {
	c := Channel{Line: d.line + 1}
	r.header.describe(&c)
	r.header.intHeader.warnGaps(&c)
	r.header.realHeader.warnGaps(&c)
	if inherited {
		c.HeaderPeak = Number{}
	}
	next, err := r.values(&c, d)
	if err != nil {
		return 0, err
	}
	next, ended, err := r.end(next, d, quantityAcceleration)
	if err != nil {
		return 0, err
	}
	if !ended {
		c.warn("the section has no end line")
	}
	if err := r.header.convert(&c, d, r.hints); err != nil {
		return 0, err
	}
	r.channels = append(r.channels, c)
	return next, nil
}

// values reads the samples by the format of the data line. Where that fails, a
// file whose numbers are parted by blanks and whose count comes out exactly is
// read all the same, with a warning.
func (r *cosmosReader) values(c *Channel, d *cosmosData) (int, error) {
	values, next, err := d.layout.series(r.text, d.line+1, d.count, quantityAcceleration)
	if err != nil {
		var ok bool
		if values, next, ok = blankSeparated(r.text, d.line+1, d.count, d.layout.decimals > 0); !ok {
			return 0, err
		}
		c.warn("values do not stand in the columns of format %s; they were read by the blanks between them", d.format)
	}
	c.Acceleration = values
	return next, nil
}

// blankSeparated reads numbers parted by blanks up to the end line of a
// section; it reports whether all were numbers and the count was exact. Where the
// format has decimals, a number without a point could mean two things and is
// none.
func blankSeparated(t *Text, line, count int, points bool) ([]float64, int, bool) {
	var values []float64
	for ; line <= t.Len(); line++ {
		b := bytes.TrimSpace(t.Bytes(line))
		if isEndLine(b) {
			break
		}
		for len(b) > 0 {
			n := bytes.IndexAny(b, " \t")
			if n < 0 {
				n = len(b)
			}
			v, ok := parseNumber(b[:n])
			if !ok || len(values) == count || points && v != 0 && bytes.IndexByte(b[:n], '.') < 0 {
				return nil, 0, false
			}
			values = append(values, v)
			b = bytes.TrimLeft(b[n:], " \t")
		}
	}
	return values, line, len(values) == count
}

// end passes over the end line of a section. A missing one is reported, unless
// more values stand in its place.
func (r *cosmosReader) end(line int, d *cosmosData, quantity string) (next int, ended bool, err error) {
	line = nextText(r.text, line)
	if line > r.text.Len() {
		return line, false, nil
	}
	b := bytes.TrimSpace(r.text.Bytes(line))
	if isEndLine(b) {
		return line + 1, true, nil
	}
	w := words(r.text, line)
	if cosmosOpening.MatchString(w) || isCosmosDataLine(w) {
		return line, false, nil
	}
	if startsNumber(b) {
		return 0, false, refuse(line, quantity, "more values than the %d announced", d.count)
	}
	return 0, false, refuse(line, quantity, "expected the end line of the section, found %s", found(w))
}

// passSpectra skips the spectra that begin at the given line, up to the first
// line of the next section or the end of the text, and returns that line.
func (r *cosmosReader) passSpectra(line int) int {
	r.skipped[quantitySpectra]++
	r.header = nil
	line++
	for line <= r.text.Len() && !cosmosOpening.MatchString(words(r.text, line)) {
		line++
	}
	return line
}

// result returns the channels, or why there are none.
func (r *cosmosReader) result() ([]Channel, error) {
	var others []string
	for _, q := range []string{quantityVelocity, quantityDisplacement, quantitySpectra, quantityOther} {
		if r.skipped[q] > 0 {
			others = append(others, q)
		}
	}
	list := strings.Join(others, " and ")
	switch {
	case len(r.channels) == 0 && list == quantitySpectra:
		return nil, &NotMotionError{Reason: "spectra, not a time series"}
	case len(r.channels) == 0:
		return nil, &NotMotionError{Reason: list + " only, no acceleration"}
	case list != "":
		for i := range r.channels {
			r.channels[i].warn("sections of %s in the file were passed over", list)
		}
	}
	return r.channels, nil
}
