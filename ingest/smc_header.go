package ingest

import (
	"bytes"
	"fmt"
	"math"
	"regexp"
	"strings"
	"time"
)

// smcHeader is all that stands before the series.
type smcHeader struct {
	text            *Text
	kind            int // the figure of line 1
	integers, reals *numericHeader
	comments        int // line after the comments
}

// smcNullInteger is the null of the integers in common use, and smcNullReal the
// size from which a real is one: 1.7E+38 is in use. A file states its own at
// position 1 of each table.
const (
	smcNullInteger = -32768
	smcNullReal    = 1e38
)

// readSMCHeader reads the tables at their lines and the kind of line 1.
func readSMCHeader(t *Text) (*smcHeader, error) {
	h := &smcHeader{text: t, comments: smcCommentLine}
	m := smcTitle.FindStringSubmatch(words(t, 1))
	h.kind = int(m[1][0] - '0')
	if want := smcKinds[h.kind-1].words; !strings.HasPrefix(strings.ToLower(m[2]), want) {
		return nil, refuse(1, "kind", "figure %d stands for %s, the words are %s", h.kind, want, found(strings.TrimSpace(words(t, 1))))
	}
	var err error
	if h.integers, _, err = readHeader(t, smcIntegerLine, smcIntegerCount, smcIntegers, "integer", smcNullInteger); err != nil {
		return nil, err
	}
	if err = h.integers.whole(); err != nil {
		return nil, err
	}
	h.reals, _, err = readHeader(t, smcRealLine, smcRealCount, smcReals, "real", math.NaN())
	return h, err
}

// integer returns integer i, unknown where it is a null.
func (h *smcHeader) integer(i int) Number {
	n := h.integers.at(i)
	if own := h.integers.values[0]; own != 0 && n.Value == own {
		return Number{}
	}
	return n
}

// real returns real i, unknown where it is a null.
func (h *smcHeader) real(i int) Number {
	n := h.reals.at(i)
	if h.isRealNull(n.Value) {
		return Number{}
	}
	return n
}

func (h *smcHeader) isRealNull(v float64) bool {
	own := h.reals.values[0]
	return math.Abs(v) >= smcNullReal || own != 0 && v == own
}

// passComments counts the comments, which begin with a bar, and returns the
// line after them. One more than integer 16 says is a warning, one less an
// error, since then something is missing.
func (h *smcHeader) passComments(c *Channel) (int, error) {
	for bytes.HasPrefix(bytes.TrimLeft(h.text.Bytes(h.comments), " "), []byte("|")) {
		h.comments++
	}
	announced, got := h.integer(16).Value, float64(h.comments-smcCommentLine)
	line := h.integers.line(16)
	switch {
	case got < announced:
		return 0, refuse(min(h.comments, h.text.Len()), "comments", "announced %g lines in line %d, found %g", announced, line, got)
	case got > announced:
		c.warn("%g comment lines announced, found %g", announced, got)
	}
	return h.comments, nil
}

// find returns the first group of pattern in text lines 2 to 11 and its line,
// "" and 0 where there is none. A lone asterisk is an empty value.
func (h *smcHeader) find(pattern *regexp.Regexp) (string, int) {
	m, line := findText(h.text, 2, smcTextLines, pattern)
	if m == nil {
		return "", 0
	}
	return strings.Trim(m[1], " *"), line
}

// findNumber returns the first group of pattern as a quantity.
func (h *smcHeader) findNumber(pattern *regexp.Regexp) (Number, int) {
	s, line := h.find(pattern)
	v, ok := parseNumber([]byte(s))
	if !ok {
		return Number{}, line
	}
	return Known(v), line
}

var (
	smcStation   = regexp.MustCompile(`(?i)\bstation\s*=\s*(.*?)\s*(?:\bcomponent\s*=.*)?$`)
	smcComponent = regexp.MustCompile(`(?i)\bcomponent\s*=\s*(.*?)\s*$`)
	smcDistance  = regexp.MustCompile(`(?i)\bepicentral dist(?:ance)?\s*=\s*([-+.\deE]+)`)
	smcPeak      = regexp.MustCompile(`(?i)\bpk\.? acc\.?\s*=\s*([-+.\deE]+)`)
)

// smcMagnitudes are the scales by preference, their reals and their text.
var smcMagnitudes = []struct {
	scale string
	real  int
	text  *regexp.Regexp
}{
	{"Mw", 6, regexp.MustCompile(`(?i)\bmoment mag(?:nitude)?\s*=\s*([-+.\d]+)`)},
	{"ML", 8, regexp.MustCompile(`(?i)\bml\s*=\s*([-+.\d]+)`)},
	{"Ms", 7, regexp.MustCompile(`(?i)\bms\s*=\s*([-+.\d]+)`)},
}

// describe fills in what the header says of event, station, sensor and peak.
func (h *smcHeader) describe(c *Channel) error {
	h.integers.warnGaps(c)
	h.reals.warnGaps(c)
	if n := h.integer(18); n.Value != 0 {
		c.warn("the header's problem flag is %g: see its comments", n.Value)
	}
	h.describeEvent(c)
	h.describeStation(c)
	h.warnLongitude(c)
	low, high := h.real(26), h.real(27)
	if low.Value > 0 && high.Value > low.Value {
		c.LowCutHz, c.HighCutHz = low, high
	}
	var err error
	if c.Orientation, err = h.orientation(c); err != nil {
		return err
	}
	return h.peak(c)
}

// smcMagnitudeSlack is how far two prints of one magnitude may be apart.
const smcMagnitudeSlack = 0.05

// describeEvent reads the names of lines 2 and 3, the time of line 4, and
// positions and sizes from the tables. Integers 2 to 8 are the time of the
// first sample in some files and of the event in others, so that only their day
// is used.
func (h *smcHeader) describeEvent(c *Channel) {
	e := &c.Event
	for _, n := range []int{2, 3} {
		if s := beforeGap(words(h.text, n)); e.Name == "" && strings.Trim(s, "* ") != "" {
			e.Name = s
		}
	}
	h.describeTime(c)
	e.Latitude, e.Longitude = position(h.real(3), h.real(4))
	if depth := h.real(5); depth.Value > 0 {
		e.DepthKM = depth
	}
	for _, m := range smcMagnitudes {
		text, line := h.findNumber(m.text)
		n := h.both(c, m.scale, text, line, h.real(m.real), m.real, smcMagnitudeSlack)
		if n.Value > 0 && n.Value < 11 && !e.Magnitude.Known {
			e.Magnitude, e.MagnitudeType = n, m.scale
		}
	}
}

// smcStart is a comment that states the time of the first sample.
var smcStart = regexp.MustCompile(`(?i)\b(?:start(?:ing)? time|time of (?:the )?first (?:sample|point|value))\b`)

// describeTime reads the event's time and day and the time of the first sample,
// which only comments state beyond doubt.
func (h *smcHeader) describeTime(c *Channel) {
	for line := smcCommentLine; line < h.comments; line++ {
		if s := words(h.text, line); smcStart.MatchString(s) {
			if at, ok := parseStamp(s); ok {
				c.Start = at.time
			}
		}
	}
	day := h.day()
	stated, ok := parseStamp(words(h.text, 4))
	text := stated.time
	if !ok {
		text, _ = parseDate(words(h.text, 4))
	}
	// Zones and midnight may shift the day by one.
	if !day.IsZero() && !text.IsZero() && text.Sub(day).Abs() > 48*time.Hour {
		c.warn("event is of %s in line 4 and of %s in the integers; the latter taken", text.Format(time.DateOnly), day.Format(time.DateOnly))
		ok, text = false, day
	}
	switch {
	case ok:
		c.Event.Origin = text
	case !day.IsZero():
		c.Event.Date = day
	default:
		c.Event.Date = text
	}
}

// day returns the day of integers 2 (year) and 3 (day of the year).
func (h *smcHeader) day() time.Time {
	year, day := h.integer(2), h.integer(3)
	t, ok := civil(int(year.Value), 1, 1, 0, 0, 0)
	if !ok || !day.Known || day.Value < 1 || day.Value > 366 {
		return time.Time{}
	}
	if t = t.AddDate(0, 0, int(day.Value)-1); t.Year() != int(year.Value) {
		return time.Time{}
	}
	return t
}

// both returns what text and real i say of one quantity. Where they differ by
// more than slack the text is taken, since the positions are less certain.
func (h *smcHeader) both(c *Channel, what string, text Number, line int, real Number, i int, slack float64) Number {
	switch {
	case !(text.Value > 0):
		return real
	case real.Value > 0 && math.Abs(text.Value-real.Value) > slack:
		c.warn("%s is %g in line %d and %g in real %d; the former taken", what, text.Value, line, real.Value, i)
	case real.Value > 0:
		return real
	}
	return text
}

// describeStation reads name and place of the station.
func (h *smcHeader) describeStation(c *Channel) {
	s := &c.Station
	s.Name, _ = h.find(smcStation)
	s.Name = strings.Join(strings.Fields(s.Name), " ")
	s.Latitude, s.Longitude = position(h.real(11), h.real(12))
	s.ElevationM = h.real(13)
	sitingFromName(c)
	c.Siting = sitingWithHeight(c, c.Siting, h.real(16))
	text, line := h.findNumber(smcDistance)
	distance := h.both(c, "epicentral distance", text, line, h.real(17), 17, 0.5+float64(0.01*text.Value))
	if distance.Value > 0 {
		c.Distances.EpicentralKM = distance
	}
}

// smcWest are places that lie west of Greenwich.
var smcWest = regexp.MustCompile(`\b(?:CA|CALIF(?:ORNIA)?|NV|NEVADA|OREGON|WASHINGTON|AK|ALASKA|HAWAII|UTAH|IDAHO|MONTANA|ARIZONA|WYOMING|` +
	`MEXICO|BAJA|GUATEMALA|EL SALVADOR|HONDURAS|NICARAGUA|COSTA RICA|PANAMA|COLOMBIA|ECUADOR|PERU|CHILE|ARGENTINA|VENEZUELA|PUERTO RICO)\b`)

// warnLongitude notes an eastern longitude of a place that is in the west: a few
// old files count positive to the west.
func (h *smcHeader) warnLongitude(c *Channel) {
	if !(c.Station.Longitude.Value > 0) && !(c.Event.Longitude.Value > 0) {
		return
	}
	for _, s := range []string{words(h.text, 2), words(h.text, 3), c.Station.Name} {
		if place := smcWest.FindString(strings.ToUpper(s)); place != "" {
			c.warn("longitude is east of Greenwich, but the text names %s: it may be positive to the west", place)
			return
		}
	}
}

// smcSlackDeg is how far the direction in words and integer 14 may be apart.
const smcSlackDeg = 1

// orientation joins the component of the text with integers 13, the angle from
// straight up, and 14, the azimuth, which is one only where 13 is level. A
// tilted sensor is refused, whatever the text says.
func (h *smcHeader) orientation(c *Channel) (Orientation, error) {
	label, line := h.find(smcComponent)
	label = beforeGap(label)
	text := smcDirection(label)
	tilt, azimuth := h.integer(13), h.integer(14)
	axis := AxisUnknown
	if tilt.Known && tilt.Value >= 0 && tilt.Value <= 180 {
		var err error
		if axis, err = axisOfDip(tilt.Value - 90); err != nil {
			return text, refuse(h.integers.line(13), h.integers.what(13), "%g° from straight up: %w", tilt.Value, err)
		}
	}
	level := axis == AxisHorizontal && azimuth.Known && azimuth.Value >= 0 && azimuth.Value <= 360
	switch {
	case text.AzimuthDeg.Known && level && angleBetween(text.AzimuthDeg.Value, azimuth.Value) > smcSlackDeg:
		return text, refuse(line, "component", "the text says %s, integer 14 in line %d says %g degrees", found(label), h.integers.line(14), azimuth.Value)
	case text.AzimuthDeg.Known && axis == AxisVertical:
		c.warn("direction is %s in the text and vertical by integer 13; the former taken", found(label))
	case text.Axis != AxisUnknown:
	case level:
		text = Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(math.Mod(azimuth.Value, 360)), Label: orElse(label, fmt.Sprintf("%g", azimuth.Value))}
	case axis == AxisVertical || azimuth == Known(500) || azimuth == Known(600):
		text = Orientation{Axis: AxisVertical, Label: orElse(label, "vertical")}
	}
	if axis == text.Axis {
		warnDip(c, tilt.Value-90, axis)
	}
	return text, nil
}

// smcDirection reads "125", "S00E", "UP", or the codes 500 and 600 for up and
// down.
func smcDirection(label string) Orientation {
	if o, ok := direction(label); ok {
		return o
	}
	if deg, ok := bearing(label); ok {
		return Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(deg), Label: label}
	}
	if label == "500" || label == "600" {
		return Orientation{Axis: AxisVertical, Label: label}
	}
	return orientationFromWords(label)
}

// peak reads the peak in cm/s² of reals 29 and 31 and of the text. Reals and
// text may be apart as samples and header may.
func (h *smcHeader) peak(c *Channel) error {
	text, line := h.findNumber(smcPeak)
	text.Value = math.Abs(text.Value)
	reals := max(math.Abs(h.real(29).Value), math.Abs(h.real(31).Value))
	peak := reals
	if peak == 0 {
		peak = text.Value
	}
	if peak == 0 {
		return nil
	}
	c.HeaderPeak = Known(peak / 100)
	off := math.Abs(text.Value - peak)
	switch {
	case text.Value == 0:
	case off > 0.20*peak:
		return refuse(line, "peak", "the text says %g cm/s2, reals 29 and 31 say %g cm/s2", text.Value, peak)
	case off > 0.01*peak:
		c.warn("peak is %g cm/s2 in line %d and %g cm/s2 in the reals", text.Value, line, peak)
	}
	return nil
}
