package ingest

import (
	"bytes"
	"regexp"
	"slices"
	"strings"
	"time"
)

// The keys of the header that are used.
const (
	esmEventName      = "EVENT_NAME"
	esmEventID        = "EVENT_ID"
	esmEventDate      = "EVENT_DATE_YYYYMMDD"
	esmEventTime      = "EVENT_TIME_HHMMSS"
	esmEventLatitude  = "EVENT_LATITUDE_DEGREE"
	esmEventLongitude = "EVENT_LONGITUDE_DEGREE"
	esmEventDepth     = "EVENT_DEPTH_KM"
	esmMagnitudeW     = "MAGNITUDE_W"
	esmMagnitudeL     = "MAGNITUDE_L"
	esmNetwork        = "NETWORK"
	esmStation        = "STATION_CODE"
	esmStationName    = "STATION_NAME"
	esmLatitude       = "STATION_LATITUDE_DEGREE"
	esmLongitude      = "STATION_LONGITUDE_DEGREE"
	esmElevation      = "STATION_ELEVATION_M"
	esmLocation       = "LOCATION"
	esmSensorDepth    = "SENSOR_DEPTH_M"
	esmVs30           = "VS30_M/S"
	esmSiteClass      = "SITE_CLASSIFICATION_EC8"
	esmDistance       = "EPICENTRAL_DISTANCE_KM"
	esmStart          = "DATE_TIME_FIRST_SAMPLE_YYYYMMDD_HHMMSS"
	esmStep           = "SAMPLING_INTERVAL_S"
	esmCount          = "NDATA"
	esmDuration       = "DURATION_S"
	esmStream         = "STREAM"
	esmUnits          = "UNITS"
	esmPeak           = "PGA_CM/S^2"
	esmBaseline       = "BASELINE_CORRECTION"
	esmLowCut         = "LOW_CUT_FREQUENCY_HZ"
	esmHighCut        = "HIGH_CUT_FREQUENCY_HZ"
	esmTrigger        = "LATE/NORMAL_TRIGGERED"
	esmType           = "DATA_TYPE"
	esmProcessing     = "PROCESSING"
)

const (
	// esmNull and all numbers below it stand for "not stated".
	esmNull = -999
	// maxESMHeader is the longest header read, in lines; one has 64.
	maxESMHeader = 200
)

// esmHeader holds the values of the header by their keys, trimmed; keys whose
// value says that there is none are there with an empty text.
type esmHeader struct {
	values map[string]statement
	data   int // line of the first sample
}

var esmKeyText = regexp.MustCompile(`^[A-Z][A-Z0-9_/^]*$`)

// esmKey splits a header line at its first colon; ok reports whether it is one.
func esmKey(line string) (key, value string, ok bool) {
	key, value, ok = strings.Cut(line, ":")
	key = strings.TrimSpace(key)
	if !ok || !esmKeyText.MatchString(key) {
		return "", "", false
	}
	return key, strings.TrimSpace(value), true
}

// readESMHeader reads the lines before the first that is no key and value, and
// no words either: a long value may go on in the next line.
func readESMHeader(t *Text) (*esmHeader, error) {
	h := &esmHeader{values: map[string]statement{}}
	key := ""
	first := nextText(t, 1)
	for n := first; n <= t.Len(); n++ {
		line := bytes.TrimSpace(t.Bytes(n))
		if len(line) == 0 {
			continue
		}
		if n >= first+maxESMHeader {
			return nil, refuse(n, "header", "no values in the first %d lines", maxESMHeader)
		}
		next, value, ok := esmKey(latin(line))
		switch {
		case ok:
			key = next
			if held, twice := h.values[key]; twice && held.text != value {
				return nil, refuse(n, key, "line %d says %s, line %d %s", held.line, found(held.text), n, found(value))
			}
			h.values[key] = statement{value, n}
		case countNumbers(line) == 0 && hasWords(line):
			if s := h.values[key]; len(s.text)+len(line) < maxHeading {
				h.values[key] = statement{strings.TrimSpace(s.text + " " + latin(line)), s.line}
			}
		default:
			h.data = n
			return h, nil
		}
	}
	return nil, refuse(t.Len(), "samples", "truncated: the file ends before the values")
}

// nothing are the words that stand for an empty value.
var nothing = []string{"", "none", "-", "nan"}

// at returns the value of a key; its text is empty where the file says nothing.
func (h *esmHeader) at(key string) statement {
	s := h.values[key]
	if slices.Contains(nothing, strings.ToLower(s.text)) {
		s.text = ""
	}
	return s
}

// text returns the value of a key, "" where the file says nothing.
func (h *esmHeader) text(key string) string { return h.at(key).text }

// hasKey reports whether the header has a key that begins so.
func (h *esmHeader) hasKey(prefix string) bool {
	for key := range h.values {
		if strings.HasPrefix(key, prefix) {
			return true
		}
	}
	return false
}

// number returns the number of a key, unknown where the file says nothing. What
// is no number is unknown, with a warning.
func (h *esmHeader) number(c *Channel, key string) Number {
	s := h.at(key)
	if s.text == "" || s.text == "U" {
		return Number{}
	}
	v, ok := parseNumber([]byte(s.text))
	switch {
	case !ok:
		c.warn("line %d: %s %s not understood", s.line, key, found(s.text))
		return Number{}
	case v <= esmNull:
		return Number{}
	}
	return Known(v)
}

// positive returns the number of a key where it is above zero: a zero is how
// files leave some quantities out.
func (h *esmHeader) positive(c *Channel, key string) Number {
	if n := h.number(c, key); n.Value > 0 {
		return n
	}
	return Number{}
}

// time reads the value of a key by a layout, after the text of before, with or
// without decimals of the second; zero where the file says nothing. What does
// not fit is zero, with a warning.
func (h *esmHeader) time(c *Channel, key, layout, before string) time.Time {
	s := h.at(key)
	if s.text == "" {
		return time.Time{}
	}
	at, err := time.Parse(layout, before+s.text)
	if err != nil {
		c.warn("line %d: %s %s not understood", s.line, key, found(s.text))
	}
	return at
}
