package ingest

import (
	"math"
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
			return refuse(s.line, s.key, "unknown direction %s%s", found(s.value), codeOf(s.value).whyNone())
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
	if o, ok := codeOf(c.ChannelCode).direction(); ok && c.Orientation.Axis == AxisUnknown {
		c.Orientation = o
	}
	return nil
}

// checkAxes refuses columns of accelerations that are named for one direction, or along
// one line, and a W beside U or V that no column of known azimuth makes west: U, V and W
// are axes of any direction.
func checkAxes(columns []plainColumn) error {
	for i, c := range columns {
		if c.kind != columnValue {
			continue
		}
		for _, other := range columns[:i] {
			if other.kind == columnValue && alongOneLine(c.orientation, other.orientation) {
				return refuse(c.line, "columns", "columns %s and %s are of one direction, or U, V, W of any: name the directions (NS EW UD, or azimuths)", found(other.name), found(c.name))
			}
		}
	}
	isLetter := func(letters string) func(plainColumn) bool {
		return func(c plainColumn) bool {
			word := directionWord(c)
			return c.kind == columnValue && len(word) == 1 && strings.Contains(letters, word)
		}
	}
	w := slices.IndexFunc(columns, isLetter("W"))
	if w < 0 || !slices.ContainsFunc(columns, isLetter("UV")) || slices.ContainsFunc(columns, func(c plainColumn) bool {
		return c.kind == columnValue && c.orientation.AzimuthDeg.Known && directionWord(c) != "W"
	}) {
		return nil
	}
	return refuse(columns[w].line, "columns", "column %s beside U or V may be of any direction: name the directions (NS EW UD, or azimuths)", found(columns[w].name))
}

// directionWord returns the last word of a column's direction, in upper case: W of
// Acc W.
func directionWord(c plainColumn) string {
	word := strings.ToUpper(commentKey(c.orientation.Label))
	return word[strings.LastIndexByte(word, '_')+1:]
}

// alongOneLine reports whether two directions are surely one, or opposite.
func alongOneLine(a, b Orientation) bool {
	switch {
	case a.Axis != b.Axis || a.Axis == AxisUnknown:
		return false
	case a.Axis == AxisVertical || a.AzimuthDeg.Known && b.AzimuthDeg.Known && math.Mod(math.Abs(a.AzimuthDeg.Value-b.AzimuthDeg.Value), 180) == 0:
		return true
	}
	return !a.AzimuthDeg.Known && !b.AzimuthDeg.Known && a.Order != 0 && a.Order == b.Order
}

// locates reports whether lines speak of the way from the epicentre, as an azimuth
// may then do too.
func (h *plainHead) locates() bool {
	return slices.ContainsFunc(h.lines, func(l heading) bool {
		text := strings.ToLower(l.text)
		return strings.Contains(text, "distance") || strings.Contains(text, "epicent")
	})
}

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
	} else {
		o, ok = codeOf(text).direction()
	}
	o.Label = text
	return o, ok
}
