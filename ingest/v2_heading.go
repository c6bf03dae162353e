package ingest

import (
	"math"
	"regexp"
	"strconv"
	"strings"
	"time"
)

// v2Heading is the text header of a V2 channel. A heading that does not fit 80
// columns is broken in the middle of a word; the lines with a meaning for this
// reader fit.
type v2Heading struct {
	text  *Text
	first int // line of the first text line
}

// line returns text line n, counted from 1.
func (h *v2Heading) line(n int) string { return words(h.text, h.at(n)) }

// at returns the line of the file that text line n is.
func (h *v2Heading) at(n int) int { return h.first + n - 1 }

var (
	v2Points   = regexp.MustCompile(`(?i)^\s*(\d+)\s+points of\b`)
	v2Interval = regexp.MustCompile(`(?i)intervals of\s*(\S+)\s*sec`)
)

// points returns the count of text line 16 and its line, which is 0 where it
// gives none.
func (h *v2Heading) points() (count, line int) {
	m := v2Points.FindStringSubmatch(h.line(16))
	if m == nil {
		return 0, 0
	}
	n, ok := valueCount(m[1])
	if !ok {
		return 0, 0
	}
	return n, h.at(16)
}

// interval returns the time step of text line 17.
func (h *v2Heading) interval() (printed, bool) {
	m := v2Interval.FindStringSubmatch(h.line(17))
	if m == nil {
		return printed{}, false
	}
	p, err := newPrinted(m[1], h.at(17), "dt")
	return p, err == nil
}

// describe fills in what the headers say of event, station and instrument.
func (h *v2Heading) describe(c *Channel, integers, reals *numericHeader) {
	h.describeEvent(c)
	h.describeStation(c, integers, reals)
	h.describeStart(c)
	h.describeChannel(c, integers)
	c.LowCutHz, c.HighCutHz = reals.positive(72), reals.positive(73)
	if c.LowCutHz.Known && c.HighCutHz.Known && c.LowCutHz.Value >= c.HighCutHz.Value {
		c.warn("filter corners of %g and %g Hz are not used: the low one must be the smaller", c.LowCutHz.Value, c.HighCutHz.Value)
		c.LowCutHz, c.HighCutHz = Number{}, Number{}
	}
}

var (
	v2RecordOf = regexp.MustCompile(`(?i)^(?:record|rcrd) of\b`)
	v2Origin   = regexp.MustCompile(`(?i)\borigin\b[^:]*:(.*)`)
	v2Clock    = regexp.MustCompile(`(?i)\b(?:start|trigger)\s+time\s*:(.*)`)
)

// describeEvent reads the name of text line 3, the origin of line 4 and the
// hypocentre of line 10. A line 3 that says "Record of" and the time names no
// earthquake.
func (h *v2Heading) describeEvent(c *Channel) {
	if name := beforeGap(h.line(3)); !v2RecordOf.MatchString(name) {
		c.Event.Name = name
	}
	if m := v2Origin.FindStringSubmatch(h.line(4)); m != nil {
		if s, ok := parseStamp(m[1]); ok {
			c.Event.Origin = s.time
		}
	}
	if c.Event.Origin.IsZero() && c.Event.Name != "" {
		// The day stands before the bracket with the origin.
		day, _, _ := strings.Cut(h.line(4), "(")
		c.Event.Date, _ = parseDate(day)
	}
	hypocentre := h.line(10)
	if !opens(strings.ToLower(hypocentre), "hypocent") {
		return
	}
	c.Event.Latitude, c.Event.Longitude = parsePosition(hypocentre)
	c.Event.DepthKM = parseDepth(hypocentre)
	c.Event.Magnitude, c.Event.MagnitudeType = parseMagnitude(hypocentre)
}

var (
	v2Station = regexp.MustCompile(`(?i)\bstation no\.?\s*(\w+)`)
	v2Agency  = regexp.MustCompile(`\b(?:CDMG|CGS)\b`)
)

// v2NameWidth is the width of the station name in text line 7, where the agency
// follows.
const v2NameWidth = 42

// describeStation reads number, position and name of the station. The network
// code CE is the one that the International Federation of Digital Seismograph
// Networks gives the programme of CDMG, later CGS (common practice).
func (h *v2Heading) describeStation(c *Channel, integers, reals *numericHeader) {
	if m := v2Station.FindStringSubmatch(h.line(6)); m != nil {
		c.Station.Code = m[1]
	}
	if n := integers.positive(14); n.Known {
		code := strconv.FormatFloat(n.Value, 'f', -1, 64)
		if c.Station.Code != "" && strings.TrimLeft(c.Station.Code, "0") != code {
			c.warn("station number is %s in the text and %s in the integers; %s taken", c.Station.Code, code, code)
		}
		c.Station.Code = code
	}
	if v2Agency.MatchString(strings.ToUpper(h.line(2))) {
		c.Station.Network = "CE"
	}
	name := h.line(7)
	if v2Agency.MatchString(columns(name, v2NameWidth+1, v2NameWidth+4)) {
		name = columns(name, 1, v2NameWidth)
	}
	c.Station.Name = beforeGap(name)
	c.Station.Latitude, c.Station.Longitude = position(reals.at(29), reals.at(30))
	if !c.Station.Latitude.Known {
		c.Station.Latitude, c.Station.Longitude = parsePosition(h.line(6))
	}
}

// describeStart reads the start time of text line 5. Where it stops at the
// minute, or is missing, line 3 may give the time of the record to the second.
func (h *v2Heading) describeStart(c *Channel) {
	m := v2Clock.FindStringSubmatch(h.line(5))
	var start stamp
	ok := false
	if m != nil {
		start, ok = parseStamp(m[1])
		if !ok && numericDate.MatchString(m[1]) {
			c.warn("line %d: start time %s has no known date and zone and is not used", h.at(5), found(strings.TrimSpace(m[1])))
		}
	}
	if (!ok || !start.seconds) && v2RecordOf.MatchString(strings.TrimSpace(h.line(3))) {
		record, known := parseStamp(h.line(3))
		if known && record.seconds && (!ok || record.time.Truncate(time.Minute).Equal(start.time)) {
			start = record
		}
	}
	c.Start = start.time
}

var (
	v2Direction   = regexp.MustCompile(`(?i)\bchan\s*(\w+)\s*:\s*(.*?)\s*(?:\(|\bfrom\b|\blocation\b|$)`)
	v2StationChan = regexp.MustCompile(`(?i)\(\s*sta\.? chn?\s*:\s*(\w+)\s*\)`)
	v2Location    = regexp.MustCompile(`(?i)\blocation\s*:\s*(.*)`)
)

// describeChannel reads number, direction and place of the channel from text
// lines 8 and 1 and from integer 27.
func (h *v2Heading) describeChannel(c *Channel, integers *numericHeader) {
	label := ""
	for _, n := range []int{1, 8} {
		if m := v2Direction.FindStringSubmatch(h.line(n)); m != nil {
			c.ChannelCode = m[1]
			if m[2] != "" {
				label = m[2]
			}
		}
	}
	if m := v2StationChan.FindStringSubmatch(h.line(8)); m != nil {
		c.ChannelCode = m[1]
	}
	if m := v2Location.FindStringSubmatch(h.line(8)); m != nil {
		c.Instrument = strings.TrimSpace(m[1])
	}
	c.Siting = SitingFromWords(c.Instrument)
	c.Orientation = v2Orientation(c, label, integers.at(27))
}

// v2Orientation joins the direction in words and integer 27. Where they
// contradict each other the integer is kept; a zero, which may be north or
// nothing at all, yields to the words.
func v2Orientation(c *Channel, label string, code Number) Orientation {
	text := orientationFromWords(label)
	coded := Orientation{Label: label}
	switch v := code.Value; {
	case !code.Known:
	case v >= 0 && v <= 360 && v == math.Trunc(v):
		coded.Axis = AxisHorizontal
		coded.AzimuthDeg = Known(math.Mod(v, 360))
	case v == 500:
		coded.Axis = AxisVertical
	case v == 800:
		coded.Axis, coded.Order = AxisHorizontal, 1
	case v == 900:
		coded.Axis, coded.Order = AxisHorizontal, 2
	default:
		c.warn("direction code %g is not known; the direction %s is taken from the text", v, found(label))
	}
	switch {
	case coded.Axis == AxisUnknown || code.Value == 0 && text.Axis != AxisUnknown:
		return text
	case text.Axis != AxisUnknown && !text.same(coded):
		c.warn("direction is %s in the text and %g in the integers; %g taken", found(label), code.Value, code.Value)
	}
	return coded
}

var azimuthText = regexp.MustCompile(`(?i)^(\d{1,3})\s*(?:deg\.?|degrees)?$`)

// orientationFromWords reads a direction as the Californian and COSMOS headings
// write it: "110 Deg", "Up", "Long", "Tran", "Radial".
func orientationFromWords(label string) Orientation {
	o := Orientation{Label: label}
	if m := azimuthText.FindStringSubmatch(strings.TrimSpace(label)); m != nil {
		if v := decimal(m[1]); v <= 360 {
			o.Axis, o.AzimuthDeg = AxisHorizontal, Known(math.Mod(v, 360))
		}
		return o
	}
	word := strings.Trim(strings.ToLower(label), " .")
	switch {
	case word == "up" || word == "down" || word == "dn" || strings.HasPrefix(word, "vert"):
		o.Axis = AxisVertical
	case strings.HasPrefix(word, "long") || strings.HasPrefix(word, "radial"):
		o.Axis, o.Order = AxisHorizontal, 1
	case strings.HasPrefix(word, "tran"):
		o.Axis, o.Order = AxisHorizontal, 2
	}
	return o
}

// same reports whether both mean one direction, whatever their labels.
func (o Orientation) same(p Orientation) bool {
	return o.Axis == p.Axis && o.AzimuthDeg == p.AzimuthDeg && o.Order == p.Order
}
