package ingest

import (
	"math"
	"regexp"
	"strconv"
	"strings"
	"time"
	"unicode/utf8"
)

// latin returns header bytes as valid UTF-8. Bytes that are not UTF-8 are taken
// for ISO 8859-1, where each byte is the code point of its character.
func latin(b []byte) string {
	if utf8.Valid(b) {
		return string(b)
	}
	r := make([]rune, len(b))
	for i, c := range b {
		r[i] = rune(c)
	}
	return string(r)
}

// words returns line n of the text as UTF-8 without trailing blanks.
func words(t *Text, n int) string { return strings.TrimRight(latin(t.Bytes(n)), " \t") }

// columns returns the characters lo to hi of s, both counted from 1, without
// blanks round them.
func columns(s string, lo, hi int) string {
	r := []rune(s)
	if lo > len(r) {
		return ""
	}
	return strings.TrimSpace(string(r[lo-1 : min(hi, len(r))]))
}

// beforeGap returns the text up to the first run of two blanks: headings keep
// several items on one line that way.
func beforeGap(s string) string {
	s = strings.TrimSpace(s)
	if i := strings.Index(s, "  "); i >= 0 {
		s = s[:i]
	}
	return s
}

// zoneHours are the zones that headings name, in hours from UTC. "CST" is left
// out: it is the time of Chicago and of Taipei. Source: common practice.
var zoneHours = map[string]int{
	"UTC": 0, "UT": 0, "GMT": 0, "Z": 0,
	"PST": -8, "PDT": -7, "MST": -7, "MDT": -6, "EST": -5, "EDT": -4,
	"AKST": -9, "AKDT": -8, "HST": -10,
}

// stamp is a date and time from a heading, in UTC.
type stamp struct {
	time time.Time
	// seconds says whether the text goes below the minute.
	seconds bool
}

const clock = `\s*,?\s+(\d{1,2}):\s?(\d{2})(?::\s?(\d{1,2}(?:\.\d*)?))?[\s,]*([A-Za-z]*)`

var (
	numericStamp = regexp.MustCompile(`(\d{1,2})/\s?(\d{1,2})/\s?(\d{4}|\d{2})` + clock)
	wordStamp    = regexp.MustCompile(`([A-Za-z]{3})[a-z]*\.?\s+(\d{1,2}),\s+(\d{4})` + clock)
	wordDate     = regexp.MustCompile(`([A-Za-z]{3,9})\.?\s+(\d{1,2}),\s+(\d{4})`)
	numericDate  = regexp.MustCompile(`(\d{1,2})/\s?(\d{1,2})/\s?(\d{4}|\d{2})`)
)

// centuryPivot splits two-digit years: the first strong-motion accelerograms
// are of March 1933 (a fact of common knowledge), so 33 to 99 are 19xx.
const centuryPivot = 33

func fullYear(s string) int {
	y, _ := strconv.Atoi(s)
	switch {
	case len(s) > 2:
		return y
	case y < centuryPivot:
		return 2000 + y
	}
	return 1900 + y
}

// monthNumber returns 1 to 12 for an English month name or its first three
// letters, in any case, else 0.
func monthNumber(s string) int {
	for m := time.January; m <= time.December; m++ {
		if name := m.String(); len(s) >= 3 && len(s) <= len(name) && strings.EqualFold(s, name[:len(s)]) {
			return int(m)
		}
	}
	return 0
}

// parseStamp reads the first "month/day/year, hour:minute:second zone" or
// "Jan 4, 2018 02:39:22.0 PST" in s. It reports false where there is none, or
// where the zone is missing or not known: a local time without its zone is no
// time.
func parseStamp(s string) (stamp, bool) {
	if m := numericStamp.FindStringSubmatch(s); m != nil {
		month, _ := strconv.Atoi(m[1])
		return newStamp(fullYear(m[3]), month, m[2], m[4:])
	}
	if m := wordStamp.FindStringSubmatch(s); m != nil {
		return newStamp(fullYear(m[3]), monthNumber(m[1]), m[2], m[4:])
	}
	return stamp{}, false
}

// newStamp takes the day and the hour, minute, second and zone of clock as text.
func newStamp(year, month int, dayText string, rest []string) (stamp, bool) {
	hours, ok := zoneHours[strings.ToUpper(rest[3])]
	if !ok {
		return stamp{}, false
	}
	day, _ := strconv.Atoi(dayText)
	hour, _ := strconv.Atoi(rest[0])
	minute, _ := strconv.Atoi(rest[1])
	second, _ := parseNumber([]byte(rest[2]))
	t, ok := civil(year, month, day, hour, minute, second)
	if !ok {
		return stamp{}, false
	}
	return stamp{t.Add(time.Duration(-hours) * time.Hour), rest[2] != ""}, true
}

// civil returns a UTC time, or false where the parts are no date and time.
func civil(year, month, day, hour, minute int, second float64) (time.Time, bool) {
	if year < 1900 || year > 2100 || month < 1 || month > 12 || day < 1 || day > 31 || hour < 0 || hour > 23 ||
		minute < 0 || minute > 59 || !(second >= 0 && second <= 60) {
		return time.Time{}, false
	}
	t := time.Date(year, time.Month(month), day, 0, 0, 0, 0, time.UTC)
	if t.Day() != day {
		return time.Time{}, false
	}
	// Microseconds are finer than any heading; they keep 37.7 s from becoming
	// 37.699999999 s.
	sinceMidnight := time.Duration(hour)*time.Hour + time.Duration(minute)*time.Minute +
		time.Duration(math.Round(second*1e6))*time.Microsecond
	return t.Add(sinceMidnight), true
}

// parseDate reads the first date in s, in figures or with the month in words.
func parseDate(s string) (time.Time, bool) {
	if m := numericDate.FindStringSubmatch(s); m != nil {
		month, _ := strconv.Atoi(m[1])
		day, _ := strconv.Atoi(m[2])
		return civil(fullYear(m[3]), month, day, 0, 0, 0)
	}
	if m := wordDate.FindStringSubmatch(s); m != nil {
		day, _ := strconv.Atoi(m[2])
		return civil(fullYear(m[3]), monthNumber(m[1]), day, 0, 0, 0)
	}
	return time.Time{}, false
}

var (
	letterPosition = regexp.MustCompile(`(?i)(\d+\.\d*)\s*([NS])[\s,]+(\d+\.\d*)\s*([EW])`)
	signedPosition = regexp.MustCompile(`([-+]?\d+\.\d+)[\s,]+([-+]?\d+\.\d+)`)
	depthText      = regexp.MustCompile(`(?i)\bH\s*=\s*(\d+(?:\.\d*)?)\s*KM`)
	magnitudeText  = regexp.MustCompile(`(?i)\b(M[A-Z]{1,3})\s*[:=]\s*(\d+(?:\.\d+)?)`)
)

// parsePosition reads "40.503N, 124.100W" or, failing that, two signed decimal
// numbers as latitude and longitude. Both are unknown where there are none.
func parsePosition(s string) (latitude, longitude Number) {
	var lat, lon float64
	if m := letterPosition.FindStringSubmatch(s); m != nil {
		lat, lon = decimal(m[1]), decimal(m[3])
		if strings.EqualFold(m[2], "S") {
			lat = -lat
		}
		if strings.EqualFold(m[4], "W") {
			lon = -lon
		}
	} else if m := signedPosition.FindStringSubmatch(s); m != nil {
		lat, lon = decimal(m[1]), decimal(m[2])
	}
	return position(Known(lat), Known(lon))
}

// position returns latitude and longitude where both are stated. Two zeros are
// how headings leave them out.
func position(latitude, longitude Number) (Number, Number) {
	lat, lon := latitude.Value, longitude.Value
	if !latitude.Known || !longitude.Known || lat == 0 && lon == 0 {
		return Number{}, Number{}
	}
	return latitude, longitude
}

// decimal reads a number that a pattern has already matched, 0 where it is none.
func decimal(s string) float64 {
	v, _ := parseNumber([]byte(s))
	return v
}

// parseDepth reads "H=17KM".
func parseDepth(s string) Number {
	if m := depthText.FindStringSubmatch(s); m != nil {
		return Known(decimal(m[1]))
	}
	return Number{}
}

// magnitudeScales are the scales by preference, where a heading states several:
// moment magnitude does not saturate, the local one is the network's own.
var magnitudeScales = []string{"Mw", "ML", "Ms", "mb", "Md"}

// parseMagnitude reads the preferred of the magnitudes in s, written "ML=5.1"
// or "Mw: 6.7".
func parseMagnitude(s string) (Number, string) {
	all := magnitudeText.FindAllStringSubmatch(s, -1)
	for _, scale := range magnitudeScales {
		for _, m := range all {
			if v := decimal(m[2]); strings.EqualFold(m[1], scale) && v > 0 {
				return Known(v), scale
			}
		}
	}
	return Number{}, ""
}

var bearingText = regexp.MustCompile(`(?i)^\s*([NS])\s*(\d{1,2}(?:\.\d*)?)\s*([EW])\s*$`)

// bearing reads a direction as surveyors write it, an angle from north or south
// to the east or west, as degrees clockwise from north in [0, 360): S14E is 166.
func bearing(s string) (deg float64, ok bool) {
	m := bearingText.FindStringSubmatch(s)
	if m == nil {
		return 0, false
	}
	angle := decimal(m[2])
	if angle > 90 {
		return 0, false
	}
	if strings.EqualFold(m[3], "W") {
		angle = -angle
	}
	if strings.EqualFold(m[1], "S") {
		angle = 180 - angle
	}
	return math.Mod(angle+360, 360), true
}

// angleBetween returns the angle between two directions in degrees, at most 180.
func angleBetween(a, b float64) float64 {
	off := math.Mod(math.Abs(a-b), 360)
	return min(off, 360-off)
}

// findText returns the groups of pattern in the first of the lines first to last
// that has it, and that line; nil and 0 where none has.
func findText(t *Text, first, last int, pattern *regexp.Regexp) (groups []string, line int) {
	for n := first; n <= last; n++ {
		if m := pattern.FindStringSubmatch(words(t, n)); m != nil {
			return m, n
		}
	}
	return nil, 0
}

// sitingFromName takes the siting from the station's name, for formats that have
// no other words for the place of the instrument.
func sitingFromName(c *Channel) {
	c.Siting = SitingFromWords(c.Station.Name)
	if c.Siting != SitingUnknown {
		c.warn("siting %s is taken from the station's name", c.Siting)
	}
}
