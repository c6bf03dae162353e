package ingest

import (
	"fmt"
	"math"
	"regexp"
	"strings"
)

// line returns text line n, counted from 1.
func (h *nzHeading) line(n int) string { return words(h.text, h.at(n)) }

// at returns the line of the file that text line n is.
func (h *nzHeading) at(n int) int { return h.first + n - 1 }

// find returns the groups of pattern in the text lines and the line of the file.
func (h *nzHeading) find(pattern *regexp.Regexp) ([]string, int) {
	return findText(h.text, h.first, h.at(nzTextLines), pattern)
}

// describe fills in what the heading says of event, site and component.
func (h *nzHeading) describe(c *Channel) error {
	h.integers.warnGaps(c)
	h.reals.warnGaps(c)
	h.describeEvent(c)
	if err := h.describeSite(c); err != nil {
		return err
	}
	h.describeRecord(c)
	h.describeFilter(c)
	var err error
	c.Orientation, err = h.orientation(c)
	return err
}

var (
	nzMagnitude = regexp.MustCompile(`\bM([LWSBlwsb]?)\s*=?\s*(\d+\.\d+)`)
	nzDistance  = regexp.MustCompile(`(?i)\bdistance\s*[:=]?\s*(\d+(?:\.\d*)?)\s*km`)
)

// describeEvent reads the origin and the place of integers 1 to 30, whose zeros
// mean that the event was not located, the name in line 7 and the magnitude.
func (h *nzHeading) describeEvent(c *Channel) {
	e := &c.Event
	e.Name = beforeGap(h.line(7))
	second := h.integers.at(6).Value / 10
	if t, ok := civil(h.integer(1), h.integer(2), h.integer(3), h.integer(4), h.integer(5), second); ok {
		e.Origin = t
	}
	second = h.integers.at(40).Value / 1000
	if t, ok := civil(h.integer(9), h.integer(10), h.integer(19), h.integer(20), h.integer(39), second); ok {
		c.Start = t
	}
	south, okSouth := h.sexagesimal(11)
	east, okEast := h.sexagesimal(14)
	if okSouth && okEast {
		e.Latitude, e.Longitude = position(Known(0-south), Known(turned(east)))
	}
	e.DepthKM = h.integers.positive(17).Or(h.integers.positive(18))
	if m, _ := findText(h.text, h.at(7), h.at(10), nzMagnitude); m != nil {
		if v := decimal(m[2]); v > 0 && v < 11 {
			e.Magnitude = Known(v)
			e.MagnitudeType = map[string]string{"L": "ML", "W": "Mw", "S": "Ms", "B": "mb"}[strings.ToUpper(m[1])]
		}
	}
	distance := h.integers.positive(30)
	c.Distances.EpicentralKM = distance
	if m, line := h.find(nzDistance); m != nil && distance.Known {
		if v := decimal(m[1]); math.Abs(v-distance.Value) > 1 {
			c.warn("distance is %g km in line %d and %g km in the integers; the latter taken", v, line, distance.Value)
		}
	}
}

// integer returns integer i, 0 where it is blank or no int32.
func (h *nzHeading) integer(i int) int {
	v := h.integers.at(i).Value
	if math.Abs(v) > math.MaxInt32 {
		return 0
	}
	return int(v)
}

// sexagesimal returns the angle of degrees, minutes and seconds that begins at
// integer i, and whether it is one. A sign at any of them is that of the angle.
func (h *nzHeading) sexagesimal(i int) (float64, bool) {
	d, m, s := h.integers.at(i), h.integers.at(i+1), h.integers.at(i+2)
	if !d.Known || !m.Known || !s.Known {
		return 0, false
	}
	return sexagesimal(d.Value, m.Value, s.Value)
}

func sexagesimal(d, m, s float64) (float64, bool) {
	negative := d < 0 || m < 0 || s < 0
	d, m, s = math.Abs(d), math.Abs(m), math.Abs(s)
	if d > 360 || m >= 60 || s >= 60 {
		return 0, false
	}
	angle := d + (float64(60*m)+s)/3600
	if negative {
		angle = -angle
	}
	return angle, true
}

// turned returns a longitude of 0 to 360 degrees as one of -180 to 180.
func turned(longitude float64) float64 {
	if longitude > 180 {
		return longitude - 360
	}
	return longitude
}

// nzAgency are those whose stations have the network code NZ, which the
// International Federation of Digital Seismograph Networks gives to GeoNet
// (common practice).
var nzAgency = regexp.MustCompile(`(?i)\bGNS\b|\bGeoNet\b|\bGeological\s+(?:&|and)\s+Nuclear\b`)

var nzPosition = regexp.MustCompile(`(?i)(\d+)[\s:]+(\d+)[\s:]+(\d+(?:\.\d*)?)\s*([NS])[\s,]+(\d+)[\s:]+(\d+)[\s:]+(\d+(?:\.\d*)?)\s*([EW])`)

// nzPositionSlack is how far in degrees the two statements of the site may be
// apart: about a kilometre.
const nzPositionSlack = 0.01

// describeSite reads code and name of the site in lines 2 and 3 and its place in
// integers 21 to 26, south and east. Line 2 says where it is not so.
func (h *nzHeading) describeSite(c *Channel) error {
	s := &c.Station
	s.Code = nzSite.FindStringSubmatch(h.line(2))[1]
	s.Name = beforeGap(h.line(3))
	if nzAgency.MatchString(h.line(1)) {
		s.Network = "NZ"
	}
	sitingFromName(c)
	at := h.integers.line(21)
	south, okSouth := h.sexagesimal(21)
	east, okEast := h.sexagesimal(24)
	switch {
	case !okSouth || !okEast:
		return refuse(at, "site", "integers 21 to 26 are not degrees, minutes and seconds")
	case south == 0 && east == 0:
		return refuse(at, "site", "coordinates are all zero")
	}
	latitude, longitude := 0-south, turned(east)
	m := nzPosition.FindStringSubmatch(h.line(2))
	if m != nil && strings.EqualFold(m[4], "N") {
		latitude = math.Abs(south)
		c.warn("the site is north of the equator by line %d", h.at(2))
	}
	if m != nil && strings.EqualFold(m[8], "W") && east <= 180 {
		longitude = -math.Abs(east)
	}
	if !latitudeLimits.hold(latitude) || !longitudeLimits.hold(longitude) {
		return refuse(at, "site", "no place is at %g, %g", latitude, longitude)
	}
	s.Latitude, s.Longitude = Known(latitude), Known(longitude)
	if m != nil {
		h.comparePosition(c, m)
	}
	return nil
}

// comparePosition compares the site with the place of line 2.
func (h *nzHeading) comparePosition(c *Channel, m []string) {
	latitude, okLat := sexagesimal(decimal(m[1]), decimal(m[2]), decimal(m[3]))
	longitude, okLon := sexagesimal(decimal(m[5]), decimal(m[6]), decimal(m[7]))
	if strings.EqualFold(m[4], "S") {
		latitude = -latitude
	}
	if longitude = turned(longitude); strings.EqualFold(m[8], "W") && longitude > 0 {
		longitude = -longitude
	}
	s := &c.Station
	if !okLat || !okLon || math.Abs(latitude-s.Latitude.Value) > nzPositionSlack || angleBetween(longitude, s.Longitude.Value) > nzPositionSlack {
		c.warn("site is at %.4f, %.4f in line %d and at %.4f, %.4f in the integers; the latter taken",
			latitude, longitude, h.at(2), s.Latitude.Value, s.Longitude.Value)
	}
}

// nzRecord is a record's name: day, time, site and location of the instrument.
var nzRecord = regexp.MustCompile(`\b\d{8}_\d{6}_([A-Za-z0-9]+)_([A-Za-z0-9]+)\b`)

// describeRecord reads the location of the instrument at the site from the
// record's name, which lines 1 and 6 should both give.
func (h *nzHeading) describeRecord(c *Channel) {
	m := nzRecord.FindStringSubmatch(h.line(1))
	if m == nil {
		return
	}
	c.Instrument = m[2]
	if other := nzRecord.FindString(h.line(6)); other != "" && other != m[0] {
		c.warn("record is %s in line %d and %s in line %d", m[0], h.at(1), other, h.at(6))
	}
	c.Station.Code = orElse(c.Station.Code, m[1])
	if !strings.EqualFold(m[1], c.Station.Code) {
		c.warn("site is %s in line %d and %s in line %d; the latter taken", m[1], h.at(1), c.Station.Code, h.at(2))
	}
}

var (
	nzFilter  = regexp.MustCompile(`(?i)^(.*\b(?:filter\w*|band\w*|\w+[- ]?pass\w*)\b.*)hz`)
	nzDecimal = regexp.MustCompile(`\d*\.\d+|\d+`)
)

// describeFilter reads the two frequencies of the filtering statement. One of
// several bands says where a filter begins and ends, not where its corner is.
func (h *nzHeading) describeFilter(c *Channel) {
	m, line := h.find(nzFilter)
	if m == nil {
		return
	}
	frequencies := nzDecimal.FindAllString(m[1], -1)
	if len(frequencies) == 2 {
		if low, high := decimal(frequencies[0]), decimal(frequencies[1]); low > 0 && low < high {
			c.LowCutHz, c.HighCutHz = Known(low), Known(high)
			return
		}
	}
	c.warn("filter corners are not known: line %d has no two frequencies in order", line)
}

var (
	nzComponent = regexp.MustCompile(`(?i)\bcomponent\b\s*[:=]?\s*([A-Za-z0-9.]+)`)
	nzVertical  = regexp.MustCompile(`(?i)^\s*(up|down|vert\w*)\b`)
)

// nzSlackDeg is how far the component in words and integer 28 may be apart.
const nzSlackDeg = 2

// orientation joins the component in words and integer 28, which for a vertical
// may be anything.
func (h *nzHeading) orientation(c *Channel) (Orientation, error) {
	m, line := h.find(nzComponent)
	o := Orientation{}
	if m != nil {
		o = nzDirection(m[1])
	}
	if o.Axis == AxisUnknown {
		if v, at := h.find(nzVertical); v != nil {
			o, line = Orientation{Axis: AxisVertical, Label: v[1]}, at
		}
	}
	code := h.integers.at(28)
	switch {
	case o.AzimuthDeg.Known && code.Known && angleBetween(o.AzimuthDeg.Value, code.Value) > nzSlackDeg:
		return o, refuse(line, "component", "the text says %s, integer 28 in line %d says %g degrees", found(o.Label), h.integers.line(28), code.Value)
	case o.Axis != AxisUnknown:
	case code.Value >= 1 && code.Value <= 360:
		return Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(math.Mod(code.Value, 360)), Label: orElse(o.Label, fmt.Sprintf("%g", code.Value))}, nil
	default:
		c.warn("direction is not known: no component in the text, %g in integer 28", code.Value)
	}
	return o, nil
}

// nzDirection reads "S14E", "166" or "Up".
func nzDirection(label string) Orientation {
	if deg, ok := bearing(label); ok {
		return Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(deg), Label: label}
	}
	o, _ := direction(label)
	return o
}
