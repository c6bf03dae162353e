package ingest

import "regexp"

// californiaV1 reads the uncorrected accelerograms (V1) of the Californian
// fixed-width text layout, of one channel or of several after one another: text,
// numbers, and one block of acceleration whose count line says how many values
// of which unit stand at which equal spacing. A file without such a line is
// refused: what its values are would be a guess.
//
// Sources: corrected files as distributed by the California Geological Survey,
// which repeat the text of the uncorrected record from their second line on. The
// numbers between text and count line are not used, since no description of
// their positions was at hand.
type californiaV1 struct{}

const (
	// v1Reach is how many lines below its first the count line of a channel is
	// looked for: the headers of a corrected channel, which are the longer ones,
	// have 45.
	v1Reach = 60
	// v1StationLine is the text line with the station's number, counted from 1 as
	// in a corrected channel.
	v1StationLine = 6
)

// Info describes the format.
func (californiaV1) Info() Info {
	return Info{
		Name: "california-v1", Title: "California strong-motion V1, fixed-width text", Channels: "one or more",
		Unit: "as stated in the count line", NotRead: "files whose count line does not state an equal spacing",
	}
}

// Sniff looks at the first words.
func (californiaV1) Sniff(c *Content) string { return sniffCalifornia(c.Text, v1Opening) }

// Parse reads all channels of the file.
func (californiaV1) Parse(content *Content, hints Hints) ([]Channel, error) {
	return readCalifornia(content.Text, v1Opening, hints, readV1Channel)
}

// readV1Channel reads the channel whose first text line is given and returns it
// with the line after it.
func readV1Channel(t *Text, line int, hints Hints) (*Channel, int, error) {
	count, err := findV1Count(t, line)
	if err != nil {
		return nil, 0, err
	}
	h := &v1Heading{text: t, first: line, count: count}
	c := &Channel{Processing: ProcessingRaw, Siting: SitingUnknown}
	h.describe(c)
	next, err := readV2Blocks(t, count, v1Opening, c, func(b *v2Block, line int) error {
		return h.settle(c, b, line, hints)
	})
	return c, next, err
}

var v1Points = regexp.MustCompile(`(?i)\bpoints\b.*\baccel`)

// findV1Count returns the count line of the channel that begins at the given
// line, or why there is none.
func findV1Count(t *Text, line int) (int, error) {
	other := 0
	for n := line + 1; n <= min(t.Len(), line+v1Reach); n++ {
		s := words(t, n)
		switch {
		case v2CountLine.MatchString(s):
			return n, nil
		case v1Points.MatchString(s):
			other = n
		}
	}
	if other > 0 {
		return 0, refuse(other, "accel count", "uncorrected accelerogram whose count line states no equal spacing: found %s; use the corrected V2 file", found(words(t, other)))
	}
	return 0, refuse(line, "accel count", "uncorrected accelerogram without a line that says how many values stand at which spacing; use the corrected V2 file")
}

// v1Heading is all that stands before the block of an uncorrected channel.
type v1Heading struct {
	text         *Text
	first, count int // the first text line and the count line
}

// describe fills in what the text says of event, station and channel. It is laid
// out as that of a corrected channel about the line with the station's number.
func (h *v1Heading) describe(c *Channel) {
	_, at := h.find(v2Station)
	first := at - v1StationLine + 1 // as of a corrected channel, whose first line may be missing
	if first < h.first-1 {
		c.warn("the heading has no station number in its place: event, station and direction are not known")
		return
	}
	none := &numericHeader{}
	(&v2Heading{text: h.text, first: first}).describe(c, none, none)
}

var (
	v1Peak   = regexp.MustCompile(`(?i)\buncor\w*\.? max\w*\.?\s*=\s*-?(\d*\.\d+)\s*g\b`)
	v1Length = regexp.MustCompile(`(?i)\brecord length\s*=\s*(\d+(?:\.\d*)?)\s*sec`)
)

// v1PeakDigits is how exact a printed peak must be, relative, to be compared: the
// samples are held to 1 % of it.
const v1PeakDigits = 0.005

// settle takes step and unit of the block, which the count line states, compares
// them with the text, and takes the peak of the text, which is in g.
func (h *v1Heading) settle(c *Channel, b *v2Block, line int, hints Hints) error {
	if err := h.compareCount(b, line); err != nil {
		return err
	}
	step, err := h.step(b)
	if err != nil {
		return err
	}
	c.StepS = step.value
	if err := checkStep(step.value, step.line, hints); err != nil {
		return err
	}
	if m, at := h.find(v1Length); m != nil {
		if length := decimal(m[1]); !lengthAgrees(length, c.StepS, b.count) {
			return refuse(at, "dt", "%d values every %g s do not last %g s", b.count, c.StepS, length)
		}
	}
	unit, warning, err := chooseUnit(statement{b.unit, line}, hints)
	if err != nil {
		return err
	}
	if warning != "" {
		c.warn("%s", warning)
	}
	c.Unit, c.UnitMPS2 = unit.Name, unit.MPS2
	h.peak(c)
	return nil
}

// find returns the groups of pattern in the text and their line.
func (h *v1Heading) find(pattern *regexp.Regexp) ([]string, int) {
	return findText(h.text, h.first, h.count-1, pattern)
}

// compareCount compares the block's count with that of the text.
func (h *v1Heading) compareCount(b *v2Block, line int) error {
	if b.count < 1 {
		return refuse(line, "accel count", "%d values announced", b.count)
	}
	m, at := h.find(v2Points)
	if m == nil {
		return nil
	}
	if n, ok := valueCount(m[1]); ok && n != b.count {
		return refuse(line, "accel count", "%d values announced, line %d says %d", b.count, at, n)
	}
	return nil
}

// step returns the time step of the count line or of the text, whichever is
// printed to more digits.
func (h *v1Heading) step(b *v2Block) (printed, error) {
	stated := []printed{b.step}
	if m, at := h.find(v2Interval); m != nil {
		p, err := newPrinted(m[1], at, "dt")
		if err != nil {
			return printed{}, err
		}
		stated = append(stated, p)
	}
	return finest(stated)
}

// peak takes the peak of the text where its digits say enough.
func (h *v1Heading) peak(c *Channel) {
	m, at := h.find(v1Peak)
	if m == nil {
		return
	}
	p, err := newPrinted(m[1], at, "peak")
	if err == nil && p.value > 0 && p.half <= v1PeakDigits*p.value {
		c.HeaderPeak = Known(p.value * StandardGravity)
	}
}
