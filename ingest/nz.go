package ingest

import (
	"math"
	"regexp"
	"strings"
)

// newZealand reads the accelerograms of New Zealand's strong-motion network,
// uncorrected (V1A) and corrected (V2A): three components one after another, each
// of 16 lines of text, 40 integers, 60 reals, and samples of acceleration, of
// velocity and of displacement, of which only the first are kept.
//
// Sources: GeoNet, "Strong motion file formats"; W. J. Cousins, Accelerogram data
// files, standard format, GNS, 22 January 2008, for the integers and the reals 1
// to 6. What the other reals mean was not at hand: step, unit, magnitude and
// filter are those of the text. The width of the samples' fields is from memory.
type newZealand struct{}

// The parts of a component.
const (
	nzComponents   = 3
	nzTextLines    = 16
	nzIntegerCount = 40
	nzRealCount    = 60
)

var (
	nzIntegers = fieldLayout{perLine: 10, width: 8}
	nzReals    = fieldLayout{perLine: 10, width: 8, decimals: pointExplicit}
)

var (
	nzOpening = regexp.MustCompile(`(?i)^\s*(un)?corrected accelerogram\b`)
	nzSite    = regexp.MustCompile(`(?i)^\s*site\b\s*(\S*)`)
)

// Info describes the format.
func (newZealand) Info() Info {
	return Info{
		Name: "new-zealand", Title: "New Zealand V1A and V2A text", Channels: "three",
		Unit: "mm/s², times the factor of the heading",
	}
}

// Sniff looks at the first words and for the site in the second line, which
// Californian files that open alike do not have.
func (newZealand) Sniff(c *Content) string {
	if line := nextText(c.Text, 1); isNewZealand(c.Text, line) {
		return "heading of an accelerogram with the site in the line below"
	}
	return ""
}

// isNewZealand reports whether a component begins at the given line.
func isNewZealand(t *Text, line int) bool {
	return nzOpening.MatchString(words(t, line)) && nzSite.MatchString(words(t, line+1))
}

// Parse reads the components of a file. Fewer than three, each of them whole,
// are read with a warning.
func (newZealand) Parse(content *Content, hints Hints) ([]Channel, error) {
	t := content.Text
	var channels []Channel
	for line := nextText(t, 1); line <= t.Len(); line = nextText(t, line) {
		if len(channels) == nzComponents {
			return nil, refuse(line, "", "text %s after the %d components of a file", found(words(t, line)), nzComponents)
		}
		h, err := readNZHeading(t, line)
		if err != nil {
			return nil, err
		}
		var c *Channel
		if c, line, err = h.channel(hints); err != nil {
			return nil, err
		}
		if len(channels) > 0 {
			if err := h.compare(c, &channels[0], len(channels)+1); err != nil {
				return nil, err
			}
		}
		channels = append(channels, *c)
	}
	if n := len(channels); n < nzComponents {
		for i := range channels {
			channels[i].warn("%d of the %d components of this layout in the file", n, nzComponents)
		}
	}
	return channels, nil
}

// nzHeading is all that stands before the samples of a component.
type nzHeading struct {
	text            *Text
	first           int // line of the first text line
	data            int // line of the first sample
	corrected       bool
	integers, reals *numericHeader
}

func readNZHeading(t *Text, line int) (*nzHeading, error) {
	m := nzOpening.FindStringSubmatch(words(t, line))
	if m == nil || !isNewZealand(t, line) {
		return nil, refuse(line, "", "expected the heading of a component with its site, found %s", found(words(t, line)))
	}
	h := &nzHeading{text: t, first: line, corrected: m[1] == ""}
	var err error
	if h.integers, h.data, err = readHeader(t, line+nzTextLines, nzIntegerCount, nzIntegers, "integer", math.NaN()); err != nil {
		return nil, err
	}
	if err = h.integers.whole(); err != nil {
		return nil, err
	}
	if year := h.integers.at(1).Value; year != 0 && (year < 1900 || year > 2100) {
		return nil, refuse(h.integers.line(1), h.integers.what(1), "%g is no year", year)
	}
	h.reals, h.data, err = readHeader(t, h.data, nzRealCount, nzReals, "real", math.NaN())
	return h, err
}

// channel reads the component and returns the line after it.
func (h *nzHeading) channel(hints Hints) (*Channel, int, error) {
	c := &Channel{Line: h.data, Processing: ProcessingRaw}
	if h.corrected {
		c.Processing = ProcessingCorrected
	}
	if err := h.describe(c); err != nil {
		return nil, 0, err
	}
	count, err := h.count(34, "accel", 1)
	if err != nil {
		return nil, 0, err
	}
	if err := h.scaling(c, count, hints); err != nil {
		return nil, 0, err
	}
	line := h.data
	if c.Acceleration, line, err = nzReals.series(h.text, line, count, "accel"); err != nil {
		return nil, 0, err
	}
	scale(c.Acceleration, c.UnitMPS2)
	if line, err = h.pass(line); err != nil {
		return nil, 0, err
	}
	return c, line, nil
}

// pass skips velocity and displacement and holds the component to end there.
func (h *nzHeading) pass(line int) (int, error) {
	t := h.text
	for _, b := range []struct {
		integer int
		name    string
	}{{35, "veloc"}, {36, "displ"}} {
		count, err := h.count(b.integer, b.name, 0)
		if err != nil {
			return 0, err
		}
		if line, err = nzReals.skip(t, line, count, b.name); err != nil {
			return 0, err
		}
	}
	line = nextText(t, line)
	if line <= t.Len() && !nzOpening.MatchString(words(t, line)) {
		return 0, refuse(line, "", "expected the next component or the end of the file after the samples of integers 34 to 36, found %s", found(words(t, line)))
	}
	return line, nil
}

// count returns integer i, a number of samples of at least least.
func (h *nzHeading) count(i int, name string, least float64) (int, error) {
	n := h.integers.at(i)
	if !n.Known || n.Value < least || n.Value > math.MaxInt32 {
		return 0, refuse(h.integers.line(i), name+" count", "%s of %s is not a number of values", found(strings.TrimSpace(latin(h.integers.field(i)))), h.integers.what(i))
	}
	return int(n.Value), nil
}

// compare holds a component to what the first says of all: step, count and site.
func (h *nzHeading) compare(c, first *Channel, number int) error {
	switch {
	case c.StepS != first.StepS:
		return refuse(h.first, "dt", "component %d has a time step of %g s, the first %g s", number, c.StepS, first.StepS)
	case len(c.Acceleration) != len(first.Acceleration):
		return refuse(h.first, "accel count", "component %d has %d values, the first %d", number, len(c.Acceleration), len(first.Acceleration))
	case c.Station != first.Station:
		return refuse(h.first, "site", "component %d is of %s at %g, %g, the first of %s at %g, %g", number,
			c.Station.Code, c.Station.Latitude.Value, c.Station.Longitude.Value,
			first.Station.Code, first.Station.Latitude.Value, first.Station.Longitude.Value)
	case c.Processing != first.Processing:
		return refuse(h.first, "", "component %d is %s, the first %s", number, c.Processing, first.Processing)
	}
	return nil
}
