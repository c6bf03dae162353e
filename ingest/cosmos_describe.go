package ingest

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
	"time"
)

// describe fills in what the headers say of event, station and instrument. The
// peak stays in the file's unit, for convert to turn.
func (h *cosmosHeader) describe(c *Channel) {
	h.describeEvent(&c.Event)
	h.describeStation(&c.Station)
	h.describeSensor(c)
	c.Distances.EpicentralKM = h.distance()
	c.Start = h.start(c)
	c.LowCutHz, c.HighCutHz = h.corners(c)
	c.HeaderPeak = h.real(64)
	switch h.stage() {
	case Known(stageRaw), Known(stageUncorrected):
		c.Processing = ProcessingRaw
	case Known(stageCorrected):
		c.Processing = ProcessingCorrected
	default:
		c.Processing = ProcessingUnknown
	}
}

// describeEvent reads text lines 2 to 4 and reals 10 to 16.
func (h *cosmosHeader) describeEvent(e *Event) {
	if name := h.columns(2, 1, 40); !v2RecordOf.MatchString(name) && !strings.EqualFold(name, "unknown") {
		e.Name = name
	}
	if s, ok := parseStamp(h.columns(4, 1, 46)); ok {
		e.Origin = s.time
	} else if e.Name != "" {
		e.Date, _ = parseDate(h.columns(2, 41, 80))
	}
	if e.Latitude, e.Longitude = position(h.real(10), h.real(11)); !e.Latitude.Known {
		e.Latitude, e.Longitude = parsePosition(h.line(3))
	}
	e.DepthKM = h.real(12).Or(parseDepth(h.line(3)))
	for _, m := range []struct {
		index int
		scale string
	}{{13, "Mw"}, {15, "ML"}, {14, "Ms"}} {
		if n := h.real(m.index); n.Value > 0 && !e.Magnitude.Known {
			e.Magnitude, e.MagnitudeType = n, m.scale
		}
	}
	if !e.Magnitude.Known {
		e.Magnitude, e.MagnitudeType = parseMagnitude(h.line(3))
	}
}

var (
	cosmosCode  = regexp.MustCompile(`(?i)\bcode\s*:\s*([A-Z0-9]{1,2})?\s*-\s*(\w+)`)
	cosmosCodes = regexp.MustCompile(`^([A-Z0-9]{2})[-. ](\w+)$`) // by columns, where no word leads
)

// cosmosNameColumn is where the station name starts in text line 5. Producers
// are a few columns off it.
const cosmosNameColumn = 41

// describeStation reads text lines 5 and 6, integer 8 and reals 1 to 4.
func (h *cosmosHeader) describeStation(s *Station) {
	if m := cosmosCode.FindStringSubmatch(h.line(5)); m != nil {
		s.Network, s.Code = strings.ToUpper(m[1]), m[2]
	} else if m := cosmosCodes.FindStringSubmatch(h.columns(5, 26, 34)); m != nil {
		s.Network, s.Code = m[1], m[2]
	}
	if n := h.integer(8); s.Code == "" && n.Value > 0 {
		s.Code = strconv.FormatFloat(n.Value, 'f', -1, 64)
	}
	s.Name = h.stationName()
	if s.Latitude, s.Longitude = position(h.real(1), h.real(2)); !s.Latitude.Known {
		at := 6
		if !h.modern {
			at = 5
		}
		s.Latitude, s.Longitude = parsePosition(h.line(at))
	}
	s.ElevationM = h.real(3)
	if v := h.real(4); v.Value > 0 {
		s.Vs30 = v
	}
}

// distance returns the epicentral distance of real 17. A zero is a field that
// was left empty more often than a station on the epicentre.
func (h *cosmosHeader) distance() Number {
	if n := h.real(17); n.Value > 0 {
		return n
	}
	return Number{}
}

// stationName returns the name from its column on, or from the start of the
// word that stands across that column.
func (h *cosmosHeader) stationName() string {
	r := []rune(h.line(5))
	from := cosmosNameColumn - 1
	if from >= len(r) {
		return ""
	}
	for from > cosmosNameColumn-5 && r[from] != ' ' && r[from-1] != ' ' {
		from--
	}
	return strings.TrimSpace(string(r[from:]))
}

var (
	cosmosChannel   = regexp.MustCompile(`(?i)\bchan(?:nel)?\s*:?\s*(\d+)`)
	cosmosDirection = regexp.MustCompile(`(?i)\bchan(?:nel)?\s*\d*\s*:\s*(.*?)\s*(?:\(|\brcrdr\b|\blocation\b|$)`)
	cosmosLocation  = regexp.MustCompile(`(?i)\blocation\s*:\s*(.*)$`)
)

// describeSensor reads text line 9, integers 50 and 54, and the sensor's height
// in real 52.
func (h *cosmosHeader) describeSensor(c *Channel) {
	if m := cosmosChannel.FindStringSubmatch(h.line(9)); m != nil {
		c.ChannelCode = m[1]
	}
	if n := h.integer(50); n.Value > 0 {
		c.ChannelCode = strconv.FormatFloat(n.Value, 'f', -1, 64)
	}
	label := h.columns(9, 13, 20)
	if m := cosmosDirection.FindStringSubmatch(h.line(9)); m != nil {
		label = m[1]
	}
	c.Orientation = cosmosOrientation(c, label, h.integer(54))
	c.Instrument = h.columns(9, 47, 80)
	if m := cosmosLocation.FindStringSubmatch(h.line(9)); m != nil {
		c.Instrument = strings.TrimSpace(m[1])
	}
	c.Siting = sitingWithHeight(c, SitingFromWords(c.Instrument), h.real(52))
}

// sitingHeight is how far in m a sensor may stand above or below the station's
// reference and still be at its surface: more than a pier or a pit makes. Common
// practice, with no source.
const sitingHeight = 2

// sitingWithHeight adds what the sensor's height over the station's reference
// says. It decides only where the words say nothing: up is on a structure, down
// is in a hole; where the words say ground, it warns.
func sitingWithHeight(c *Channel, words Siting, up Number) Siting {
	if !up.Known || math.Abs(up.Value) <= sitingHeight {
		return words
	}
	switch {
	case words == SitingFreeField || words == SitingGround:
		c.warn("siting is %s in words, but the sensor stands %g m from the station's reference height", words, up.Value)
		return words
	case words != SitingUnknown:
		return words
	case up.Value > 0:
		return SitingStructure
	}
	return SitingBorehole
}

// cosmosOrientation joins the direction in words and the orientation code. A
// contradiction is a warning, and the code is kept.
//
// The codes are from memory.
func cosmosOrientation(c *Channel, label string, code Number) Orientation {
	text := orientationFromWords(label)
	if !code.Known {
		return text
	}
	coded := Orientation{Label: label}
	if label == "" {
		coded.Label = fmt.Sprintf("code %g", code.Value)
	}
	switch v := code.Value; {
	case v >= 0 && v <= 360:
		coded.Axis, coded.AzimuthDeg = AxisHorizontal, Known(math.Mod(v, 360))
	case v >= 400 && v <= 402:
		coded.Axis = AxisVertical
	case v == 500 || v == 501 || v == 700:
		coded.Axis, coded.Order = AxisHorizontal, 1
	case v == 600 || v == 601 || v == 701:
		coded.Axis, coded.Order = AxisHorizontal, 2
	case v > 1000 && v <= 1360:
		// Relative to a local reference: horizontal, with no azimuth from north.
		coded.Axis = AxisHorizontal
		return coded
	default:
		c.warn("orientation code %g is not known", v)
		coded.Label = fmt.Sprintf("code %g", v)
		return coded
	}
	if text.Axis != AxisUnknown && !text.same(coded) {
		c.warn("direction is %s in the text and %g in the integers; %g taken", found(label), code.Value, code.Value)
	}
	return coded
}

var cosmosHertz = regexp.MustCompile(`(?i)(\d*\.?\d+)\s*Hz`)

// corners returns the filter corners in Hz. Reals 54 and 57 (from memory) are
// an unordered pair; text line 12 confirms them, corrects them with a warning,
// or stands in where they are null.
func (h *cosmosHeader) corners(c *Channel) (low, high Number) {
	low, high = h.real(54), h.real(57)
	if !(low.Value > 0) || !(high.Value > 0) {
		low, high = Number{}, Number{}
	} else if low.Value > high.Value {
		low, high = high, low
	}
	stated, ok := h.statedCorners()
	switch {
	case !ok || !(stated[0].value > 0 && stated[0].value < stated[1].value):
		return low, high
	case low.Known && !(stated[0].agrees(exactly(low.Value)) && stated[1].agrees(exactly(high.Value))):
		c.warn("filter corners are %g and %g Hz in the reals and %g and %g Hz in the text; the text taken",
			low.Value, high.Value, stated[0].value, stated[1].value)
	case low.Known:
		return low, high
	}
	return Known(stated[0].value), Known(stated[1].value)
}

// statedCorners returns the two frequencies of text line 12, by their unit or
// else by their columns.
func (h *cosmosHeader) statedCorners() (corners [2]printed, ok bool) {
	texts := [2]string{h.columns(12, 22, 26), h.columns(12, 68, 72)}
	if m := cosmosHertz.FindAllStringSubmatch(h.line(12), -1); len(m) == 2 {
		texts = [2]string{m[0][1], m[1][1]}
	}
	for i, s := range texts {
		p, err := newPrinted(s, h.first+11, "filter")
		if err != nil {
			return corners, false
		}
		corners[i] = p
	}
	return corners, true
}

func exactly(v float64) printed { return printed{value: v} }

// start returns the time of the first sample, UTC. Integers 40 to 45 and real 30
// give it to the second's fraction, but not its zone beyond doubt: real 32 may
// hold the hours of a local stamp from UTC (from memory). Text line 8 names its
// zone and decides between the readings.
func (h *cosmosHeader) start(c *Channel) time.Time {
	s, worded := parseStamp(h.line(8))
	numbers, ok := h.numericStart()
	if !ok {
		return s.time
	}
	offset := h.real(32)
	shifted := numbers
	if offset.Known && math.Abs(offset.Value) <= 14 {
		shifted = numbers.Add(-time.Duration(offset.Value * float64(time.Hour)))
	}
	near := func(t time.Time) bool {
		if !s.seconds {
			t = t.Truncate(time.Minute)
		}
		return t.Sub(s.time).Abs() < time.Second
	}
	switch {
	case !worded:
		if !shifted.Equal(numbers) {
			c.warn("start time moved by the %g h from UTC of real 32", offset.Value)
		}
		return shifted
	case near(shifted):
		return shifted
	case near(numbers):
		return numbers
	}
	c.warn("start time is %s in the text and %s in the integers; the text taken",
		s.time.Format(time.RFC3339Nano), numbers.Format(time.RFC3339Nano))
	return s.time
}

// numericStart reads integers 40 (year), 42 to 45 (month, day, hour, minute) and
// real 30 (second).
func (h *cosmosHeader) numericStart() (time.Time, bool) {
	var parts [5]int
	for i, index := range []int{40, 42, 43, 44, 45} {
		n := h.integer(index)
		if !n.Known {
			return time.Time{}, false
		}
		parts[i] = int(n.Value)
	}
	second := h.real(30)
	if !second.Known {
		return time.Time{}, false
	}
	return civil(parts[0], parts[1], parts[2], parts[3], parts[4], second.Value)
}
