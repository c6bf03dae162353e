package ingest

import (
	"bytes"
	"fmt"
	"math"
	"regexp"
	"slices"
	"strings"
)

// plainHead is what stands before the numbers of a plain file.
type plainHead struct {
	first    int // line of the first numbers
	comments []comment
	// lines are the lines before the numbers that are not blank, the last of names
	// perhaps.
	lines []heading
	// doubts are warnings of lines that are not understood.
	doubts []string
}

// comment is one key and value of a comment line.
type comment struct {
	key, value string
	line       int
	sure       bool // on a line that is no comment
}

// firstNumbers returns the first line of numbers, the first that looks like it
// where none is well formed, or 0 where the preamble is too long.
func firstNumbers(t *Text) int {
	like := 0
	for n := 1; n <= min(t.Len(), plainPreamble+1); n++ {
		line := t.Bytes(n)
		if isComment(line) || !numberLike(line) {
			continue
		}
		for _, f := range numberForms {
			if _, ok := f.count(line); ok {
				return n
			}
		}
		if like == 0 {
			like = n
		}
	}
	return like
}

// maxHeading is the longest line, in bytes, that is looked at for names, keys
// and values.
const maxHeading = 1000

func readPlainHead(t *Text) (*plainHead, error) {
	h := &plainHead{first: firstNumbers(t)}
	if h.first == 0 {
		return nil, refuse(min(t.Len(), plainPreamble), "samples", "no data found in the first %d lines", plainPreamble)
	}
	for n := 1; n < h.first; n++ {
		if len(bytes.TrimSpace(t.Bytes(n))) == 0 {
			continue
		}
		l := newHeading(t, n)
		if l.text != "" && strings.Trim(l.text, "-=_+|*, ;\t") == "" {
			continue // a rule under the names
		}
		h.add(l)
	}
	if n := len(h.lines); n > 0 && h.lines[n-1].sure && h.lines[n-1].text != "" {
		last := h.lines[n-1]
		if _, values := likeNumbers([]byte(last.text)); values {
			return nil, refuse(last.line, "samples", "%s", badLine(t.Bytes(last.line)))
		}
	}
	return h, nil
}

// splitComment returns the keys and values of a comment: "dt = 0.01",
// "unit: cm/s2", or several "key=value" between commas or semicolons.
func splitComment(text string, line int) []comment {
	text = strings.TrimRight(text, "\" ,;\t")
	parts := splitStatements(text)
	var out []comment
	for _, p := range parts {
		at := strings.IndexAny(p, "=:")
		if at < 0 {
			continue
		}
		key, unit := splitUnit(strings.TrimSpace(p[:at]))
		value := strings.TrimSpace(p[at+1:])
		if value == "" {
			continue
		}
		if unit != "" {
			value += " " + unit
		}
		out = append(out, comment{key: commentKey(key), value: value, line: line})
	}
	return out
}

var (
	// pairs is a line of nothing but key=value between blanks.
	pairs = regexp.MustCompile(`^(?:\w+ *= *[^\s=,;]+(?: +(?i:s|sec|seconds|hz|sps|ms|g|gal))?(?:[\s,;]+|$)){2,}$`)
	pair  = regexp.MustCompile(`\w+ *= *[^\s=,;]+(?: +(?i:s|sec|seconds|hz|sps|ms|g|gal)\b)?`)
)

// splitStatements splits a line between its statements: where all that commas or
// semicolons part are key=value, where blanks part such, and else before keys that
// decide what the numbers mean.
func splitStatements(text string) []string {
	parts := strings.FieldsFunc(text, func(r rune) bool { return r == ',' || r == ';' })
	if !slices.ContainsFunc(parts, func(p string) bool { return strings.Count(p, "=") != 1 }) {
		return parts
	}
	if pairs.MatchString(text) {
		return pair.FindAllString(text, -1)
	}
	from, at := 0, 0
	var out []string
	for _, p := range parts[:max(0, len(parts)-1)] {
		at += len(p) + 1
		rest := text[min(at, len(text)):]
		if end := strings.IndexAny(rest, "=:"); end > 0 && isDeciding(rest[:end]) {
			out = append(out, strings.Trim(text[from:at-1], " ,;"))
			from = at
		}
	}
	return append(out, strings.Trim(text[from:], " ,;"))
}

// isDeciding reports whether a key decides what the numbers mean.
func isDeciding(key string) bool {
	key, _ = splitUnit(strings.TrimSpace(key))
	key = commentKey(key)
	return slices.ContainsFunc([][]string{unitKeys, stepKeys, rateKeys, countKeys, directionKeys}, func(keys []string) bool { return slices.Contains(keys, key) })
}

// commentKey spells a key in lower case with underscores.
func commentKey(key string) string {
	return strings.Join(strings.FieldsFunc(strings.ToLower(key), func(r rune) bool {
		return r == ' ' || r == '\t' || r == '-' || r == '_'
	}), "_")
}

// stated returns what the first comment of any of the keys says.
func (h *plainHead) stated(keys ...string) statement {
	for _, c := range h.comments {
		for _, k := range keys {
			if c.key == k {
				return statement{c.value, c.line}
			}
		}
	}
	return statement{}
}

// doubt adds a warning, once.
func (h *plainHead) doubt(form string, values ...any) {
	if text := fmt.Sprintf(form, values...); !slices.Contains(h.doubts, text) {
		h.doubts = append(h.doubts, text)
	}
}

// isSure reports whether a line of the head is no comment.
func (h *plainHead) isSure(line int) bool {
	return slices.ContainsFunc(h.lines, func(l heading) bool { return l.line == line && l.sure })
}

// checkCount holds the number of values a channel has to the one that a comment
// announces.
func (h *plainHead) checkCount(values int) error {
	s := h.stated(countKeys...)
	if s.text == "" {
		return nil
	}
	v, unit, ok := quantity(s.text)
	if !ok || unit != "" || v != math.Trunc(v) {
		if h.isSure(s.line) {
			h.doubt("line %d: count %s not understood", s.line, found(s.text))
			return nil
		}
		return refuse(s.line, "samples", "expected a number of values, found %s", found(s.text))
	}
	if int(v) != values {
		return refuse(s.line, "samples", "announced %.0f values, found %d", v, values)
	}
	return nil
}

// statedStep returns the time step in s that comments state as step or rate,
// which must agree, 0 where none does. With an error it returns the line of the only
// statement, which is not understood, and no step.
func (h *plainHead) statedStep() (step float64, line int, err error) {
	if s := h.stated(stepKeys...); s.text != "" {
		v, unit, ok := quantity(s.text)
		switch {
		case ok && v > 0 && (unit == "" || isSeconds(unit)):
			step, line = v, s.line
		case ok && v > 0 && (unit == "ms" || unit == "msec"):
			step, line = v/1000, s.line
		default:
			if h.stated(rateKeys...).text == "" {
				line = s.line
			}
			return 0, line, refuse(s.line, "dt", "expected a time step over zero in s, found %s", found(s.text))
		}
	}
	if s := h.stated(rateKeys...); s.text != "" {
		v, unit, ok := quantity(s.text)
		switch {
		case !ok || !(v > 0) || unit != "" && !slices.Contains(perSecondOf, unit):
			if step == 0 {
				line = s.line
			}
			return step, line, refuse(s.line, "rate", "expected a sampling rate over zero in Hz, found %s", found(s.text))
		case step == 0:
			return 1 / v, s.line, nil
		case math.Abs(step*v-1) > stepAgreement:
			return 0, 0, refuse(s.line, "rate", "%g Hz here, a time step of %g s in line %d", v, step, line)
		}
	}
	return step, line, nil
}

func isSeconds(unit string) bool {
	switch strings.ToLower(unit) {
	case "s", "sec", "secs", "second", "seconds":
		return true
	}
	return false
}

// twice is a quantity that is repeated in other units in brackets, 100 Hz (0.01 s),
// or has its own there.
var twice = regexp.MustCompile(`^([\d.]+(?: *[A-Za-z]+)?) *(?:\([\d.]+ *[A-Za-z]+\)|\(([A-Za-z]+)\))$`)

// perSecondOf are the ways to write samples a second.
var perSecondOf = []string{"hz", "sps", "samples/s", "samples/sec", "samples/second", "samples per second", "samples per sec"}

// quantity splits "0.01 s" or "100Hz" into number and unit, the unit in lower
// case.
func quantity(text string) (v float64, unit string, ok bool) {
	text = strings.TrimSpace(text)
	if m := twice.FindStringSubmatch(text); m != nil {
		text = m[1] + m[2]
	}
	if strings.HasPrefix(text, "0,") {
		text = strings.Replace(text, ",", ".", 1) // no thousands begin with 0
	}
	end := len(text)
	for end > 0 && !isDigit(text[end-1]) && text[end-1] != '.' {
		end--
	}
	v, ok = parseNumber([]byte(text[:end]))
	return v, strings.ToLower(strings.TrimSpace(text[end:])), ok
}

// describe fills in what comments say of the record. Keys that are not known
// are prose; a known one that makes no sense is a warning, but for unit, step
// and direction, which decide what the numbers mean.
func (h *plainHead) describe(c *Channel) error {
	for _, s := range h.comments {
		var ok bool
		switch s.key {
		case "event", "event_id", "event_name", "station", "station_code", "station_name", "network", "instrument", "channel", "magnitude_type":
			describeText(c, s)
			continue
		case "origin_time":
			c.Event.Origin, c.Event.Date, ok = parseInstant(s.value)
		case "start", "start_time":
			c.Start, _, ok = parseInstant(s.value)
			ok = ok && !c.Start.IsZero()
		case "siting":
			c.Siting, ok = parseSiting(s.value)
		case "processing":
			state, err := parseProcessing(s.value)
			c.Processing, ok = state, err == nil
		default:
			ok = describeNumber(c, s)
		}
		if !ok {
			c.warn("line %d: %s %s not understood", s.line, s.key, found(s.value))
		}
	}
	settlePlaces(c)
	return nil
}

// describeText sets a text. An event or station of one word is a code, of
// several a name.
func describeText(c *Channel, s comment) {
	word := !strings.ContainsAny(s.value, " \t")
	switch s.key {
	case "event", "event_id":
		if word || s.key == "event_id" {
			c.Event.ID = s.value
		} else {
			c.Event.Name = s.value
		}
	case "station", "station_code":
		if word || s.key == "station_code" {
			c.Station.Code = s.value
		} else {
			c.Station.Name = s.value
		}
	case "event_name":
		c.Event.Name = s.value
	case "station_name":
		c.Station.Name = s.value
	case "network":
		c.Station.Network = s.value
	case "instrument":
		c.Instrument = s.value
	case "channel":
		c.ChannelCode = s.value
	case "magnitude_type":
		c.Event.MagnitudeType = s.value
	}
}

// describeNumber sets a number; it reports false where a known key has none.
// What check holds to limits of its own is taken as it is.
func describeNumber(c *Channel, s comment) bool {
	anything, corner := limits{math.Inf(-1), math.Inf(1)}, limits{1e-6, 1e4}
	places := map[string]struct {
		place *Number
		limits
	}{
		"magnitude": {&c.Event.Magnitude, anything}, "distance_km": {&c.DistanceKM, anything},
		"epicentral_km": {&c.Distances.EpicentralKM, anything}, "hypocentral_km": {&c.Distances.HypocentralKM, anything},
		"rupture_km": {&c.Distances.RuptureKM, anything}, "jb_km": {&c.Distances.JoynerBooreKM, anything},
		"depth_km": {&c.Event.DepthKM, anything}, "vs30": {&c.Station.Vs30, anything}, "vs30_m_s": {&c.Station.Vs30, anything},
		"event_latitude": {&c.Event.Latitude, anything}, "event_longitude": {&c.Event.Longitude, anything},
		"station_latitude": {&c.Station.Latitude, anything}, "latitude": {&c.Station.Latitude, anything},
		"station_longitude": {&c.Station.Longitude, anything}, "longitude": {&c.Station.Longitude, anything},
		"elevation_m": {&c.Station.ElevationM, limits{-500, 9000}},
		"low_cut_hz":  {&c.LowCutHz, corner}, "high_cut_hz": {&c.HighCutHz, corner},
	}
	p, ok := places[s.key]
	if !ok {
		return true
	}
	v, ok := parseNumber([]byte(s.value))
	if !ok || !p.hold(v) {
		return false
	}
	*p.place = Known(v)
	return true
}
