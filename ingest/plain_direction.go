package ingest

import (
	"regexp"
	"slices"
	"strings"
)

// The keys of lines that state a direction. An azimuth alone may as well be that of
// the epicentre.
var (
	directionKeys = []string{"component", "comp", "direction", "dir", "orientation", "sensor_azimuth", "component_azimuth"}
	azimuthKeys   = []string{"azimuth", "azimuth_deg"}
)

// direct gives the only channel of a file the direction that lines before the numbers
// state, which its column's name must not contradict.
func (h *plainHead) direct(c *Channel) error {
	var first comment
	for _, s := range h.comments {
		isAzimuth := slices.Contains(azimuthKeys, s.key)
		if !isAzimuth && !slices.Contains(directionKeys, s.key) {
			continue
		}
		o, ok := statedDirection(s.value)
		switch {
		case isAzimuth && (s.sure || h.locates()):
			c.warn("line %d: %s %s may be another than the component's, not used: state it as component", s.line, s.key, found(s.value))
		case !ok && s.sure:
			c.warn("line %d: %s %s not understood", s.line, s.key, found(s.value))
		case !ok:
			return refuse(s.line, s.key, "unknown direction %s", found(s.value))
		case o.Axis == AxisUnknown:
			c.warn("line %d: %s %s is no direction", s.line, s.key, found(s.value))
		case c.Orientation.Axis == AxisUnknown:
			c.Orientation, first = o, s
		case c.Orientation.same(o):
		case first.line != 0:
			return refuse(s.line, s.key, "%s here, %s in line %d", found(s.value), found(first.value), first.line)
		default:
			return refuse(s.line, s.key, "%s here, column %s over the numbers", found(s.value), c.Orientation.Label)
		}
	}
	return nil
}

// locates reports whether lines speak of the way from the epicentre, as an azimuth
// may then do too.
func (h *plainHead) locates() bool {
	return slices.ContainsFunc(h.lines, func(l heading) bool {
		text := strings.ToLower(l.text)
		return strings.Contains(text, "distance") || strings.Contains(text, "epicent")
	})
}

// channelCode is a code of band, instrument and direction.
//
// Source: FDSN, Standard for the Exchange of Earthquake Data, version 2.4, appendix A
// (from memory).
var channelCode = regexp.MustCompile(`^[A-Z]{2}[ENZ]$`)

// statedDirection reads a direction in the ways that people write one: as direction
// does, in degrees with decimals or their sign, from north to east (N45E), by a
// channel code. Its axis is unknown for a single digit, which counts.
func statedDirection(text string) (o Orientation, ok bool) {
	text = strings.TrimSpace(text)
	number := strings.TrimSpace(strings.TrimSuffix(strings.TrimSuffix(text, "°"), " deg"))
	if isCounter(text) {
		return Orientation{Label: text}, true
	}
	if o, ok = direction(text); ok {
		return o, true
	}
	if deg, isBearing := bearing(text); isBearing {
		o, ok = azimuth(deg), true
	} else if v, isNumber := parseNumber([]byte(number)); isNumber && v >= 0 && v <= 360 {
		o, ok = azimuth(v), true
	} else if channelCode.MatchString(text) {
		o, ok = direction(text[2:])
	}
	o.Label = text
	return o, ok
}
