package ingest

import (
	"regexp"
	"slices"
	"strings"
)

// channelCode is a code of band, instrument and orientation, perhaps behind those of
// network, station and location. The bands are those of 10 samples a second and more,
// and M and L below, which older networks used; the instruments accelerometers (N, once
// G) and velocity sensors (H, L, P).
//
// Source: FDSN, Standard for the Exchange of Earthquake Data, version 2.4, appendix A,
// and source identifiers (2023) (from memory).
var channelCode = regexp.MustCompile(`^(?:[A-Z0-9-]*[._])*([FGDCESHBML])([NGHLP])([A-Z0-9])$`)

// codedChannel is what a channel code says.
type codedChannel struct {
	code     string // of three letters, "" for none
	velocity bool   // of a sensor of velocity
}

// codeOf reads a channel code, perhaps after a word for acceleration.
func codeOf(text string) codedChannel {
	for _, quantity := range accelerationNames {
		if n := len(quantity); len(text) > n && strings.EqualFold(text[:n], quantity) && strings.IndexByte(" _", text[n]) >= 0 {
			text = text[n+1:]
			break
		}
	}
	m := channelCode.FindStringSubmatch(text)
	if m == nil || m[1]+m[2] == "CH" && (m[3] == "N" || isDigit(m[3][0])) {
		return codedChannel{} // CH1 and CHN are a channel and its number more often
	}
	return codedChannel{m[1] + m[2] + m[3], m[2] != "N" && m[2] != "G"}
}

// direction is that of the letters E, N and Z; other letters, and digits, say none.
func (c codedChannel) direction() (o Orientation, ok bool) {
	if c.code == "" || !strings.Contains("ENZ", c.code[2:]) {
		return Orientation{}, false
	}
	o, ok = direction(c.code[2:])
	o.Label = c.code
	return o, ok
}

// whyNone says why a code gives no direction, "" for what is no code.
func (c codedChannel) whyNone() string {
	if _, ok := c.direction(); ok || c.code == "" {
		return ""
	}
	return ": orientation code " + c.code[2:] + " may be of any direction"
}

// checkCodes refuses several columns of which one is named by a code that gives no
// direction.
func checkCodes(columns []plainColumn) error {
	values := 0
	for _, c := range columns {
		if c.kind == columnValue {
			values++
		}
	}
	for _, c := range columns {
		if why := c.channel.whyNone(); c.kind == columnValue && why != "" && values > 1 {
			return refuse(c.line, "columns", "column %s%s: name the directions (NS EW UD, or azimuths)", found(c.name), why)
		}
	}
	return nil
}

// checkSensor refuses to take a unit from hints for all files where a code says that
// the sensor measures velocity.
func (h *plainHead) checkSensor(col plainColumn, hints Hints) error {
	channel, line := col.channel, col.line
	for _, c := range h.comments {
		if !channel.velocity && (c.key == "channel" || c.key == "channel_code" || slices.Contains(directionKeys, c.key)) {
			channel, line = codeOf(c.value), c.line
		}
	}
	if !channel.velocity || hints.Unit != "" && !hints.UnitForAll {
		return nil
	}
	return refuse(line, "unit", "%s is the channel of a velocity sensor: if the numbers are accelerations, state their unit as # unit: …", channel.code)
}
