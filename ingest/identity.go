package ingest

import (
	"fmt"
	"hash/fnv"
	"math"
	"regexp"
	"strings"
	"unicode"
	"unicode/utf8"
)

// stampLayout writes a time in an id, UTC.
const stampLayout = "20060102T150405"

// The longest parts of an id, in characters. Longer ones are cut and end in a
// hash of the whole.
const (
	maxPart = 48
	maxStem = 120
)

// RecordID returns the id of the record that a channel belongs to, and whether
// it comes from what the channel itself states:
//
//	event _ station
//	event _ station _ instrument    where the station has more than one
//
// with the event of EventCode and the station's network and StationCode. Where
// one of the two is unknown, the id is the base of the file's stem as SplitStem
// gives it, or all of the stem where it ends in the station's code. Ids hold only A–Z, a–z, 0–9, stop, hyphen and the underscore between
// parts, are at most 160 characters long and never empty.
func RecordID(c *Channel, stem string) (id string, fromHeader bool) {
	event, station := EventCode(c), StationCode(c)
	if event == "" || station == "" {
		base, o := SplitStem(stem)
		if c.namesStation(o) {
			base = stem
		}
		return orElse(clean(base, "_", maxStem), "record"), false
	}
	if c.Station.Code != "" {
		station = clean(withNetwork(c.Station), "", maxPart)
	}
	id = event + "_" + station
	if slug := Slug(c.Instrument); slug != "" {
		id += "_" + slug
	}
	return id, true
}

// withNetwork is the station's code after its network's, as seismologists write
// it: XX.ABC.
func withNetwork(s Station) string {
	if s.Network == "" {
		return s.Code
	}
	return s.Network + "." + s.Code
}

// EventCode returns the code of the channel's event: its ID, else its origin
// time as 20060102T150405, else its name in words with its day where that is
// known, else the time of the first sample; "" where nothing is known.
func EventCode(c *Channel) string {
	e := &c.Event
	if code := clean(e.ID, "", maxPart); code != "" {
		return code
	}
	if !e.Origin.IsZero() {
		return e.Origin.UTC().Format(stampLayout)
	}
	if slug := Slug(e.Name); slug != "" {
		if !e.Date.IsZero() {
			slug += e.Date.UTC().Format("-20060102")
		}
		return slug
	}
	if !c.Start.IsZero() {
		return c.Start.UTC().Format(stampLayout)
	}
	return ""
}

// StationCode returns the code of the channel's station without the network,
// else its name as a slug, else "".
func StationCode(c *Channel) string {
	return orElse(clean(c.Station.Code, "", maxPart), Slug(c.Station.Name))
}

// Slug returns words as a part of an id: lower case, accents dropped, and one
// hyphen for whatever lies between letters and digits. Letters that ASCII has no
// base for are told apart by a hash at the end. The slug of no letters is "".
func Slug(s string) string {
	return clean(strings.ReplaceAll(strings.ToLower(s), ".", " "), "", maxPart)
}

// accents folds the Latin letters of ISO 8859-1 to ASCII.
var accents = strings.NewReplacer(
	"à", "a", "á", "a", "â", "a", "ã", "a", "ä", "a", "å", "a", "æ", "ae", "ç", "c", "è", "e", "é", "e", "ê", "e", "ë", "e",
	"ì", "i", "í", "i", "î", "i", "ï", "i", "ñ", "n", "ò", "o", "ó", "o", "ô", "o", "õ", "o", "ö", "o", "ø", "o", "ß", "ss",
	"ù", "u", "ú", "u", "û", "u", "ü", "u", "ý", "y", "ÿ", "y",
	"À", "A", "Á", "A", "Â", "A", "Ã", "A", "Ä", "A", "Å", "A", "Æ", "AE", "Ç", "C", "È", "E", "É", "E", "Ê", "E", "Ë", "E",
	"Ì", "I", "Í", "I", "Î", "I", "Ï", "I", "Ñ", "N", "Ò", "O", "Ó", "O", "Ô", "O", "Õ", "O", "Ö", "O", "Ø", "O",
	"Ù", "U", "Ú", "U", "Û", "U", "Ü", "U", "Ý", "Y",
)

// clean reduces s to the characters of an id and those of also, with one hyphen
// for each run of others, and cuts it to limit characters.
func clean(s, also string, limit int) string {
	var b strings.Builder
	gap, lost := false, false
	for _, r := range accents.Replace(s) {
		switch {
		case r < utf8.RuneSelf && (isLetter(byte(r)) || isDigit(byte(r))) || r == '.' && b.Len() > 0 || strings.ContainsRune(also, r):
			if gap && b.Len() > 0 {
				b.WriteByte('-')
			}
			gap = false
			b.WriteRune(r)
		default:
			gap = true
			lost = lost || r >= utf8.RuneSelf && (r == utf8.RuneError || unicode.IsLetter(r) || unicode.IsDigit(r))
		}
	}
	out := strings.TrimRight(b.String(), ".")
	if !lost && len(out) <= limit {
		return out
	}
	h := fnv.New32a()
	h.Write([]byte(s))
	return strings.Trim(fmt.Sprintf("%s-%08x", out[:min(len(out), limit-9)], h.Sum32()), "-")
}

// directionWords are the direction labels that mean the same in every format.
// NS and EW are positive to north and east, common practice.
var directionWords = map[string]Orientation{
	"N": azimuth(0), "E": azimuth(90), "S": azimuth(180), "W": azimuth(270),
	"NORTH": azimuth(0), "EAST": azimuth(90), "NS": azimuth(0), "EW": azimuth(90), "N-S": azimuth(0), "E-W": azimuth(90),
	"NORTH-SOUTH": azimuth(0), "EAST-WEST": azimuth(90),
	"L": ranked(1), "T": ranked(2), "LONGITUDINAL": ranked(1), "TRANSVERSE": ranked(2), "LONG": ranked(1), "TRAN": ranked(2), "TRANS": ranked(2),
	"H1": ranked(1), "H2": ranked(2), "1": ranked(1), "2": ranked(2),
	"V": vertical, "Z": vertical, "U": vertical, "UD": vertical, "U-D": vertical, "UP": vertical, "VER": vertical,
	"VRT": vertical, "VERT": vertical, "VERTICAL": vertical, "DN": vertical, "DWN": vertical, "DOWN": vertical,
}

var vertical = Orientation{Axis: AxisVertical}

func azimuth(deg float64) Orientation {
	return Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(math.Mod(deg, 360))}
}

func ranked(order int) Orientation { return Orientation{Axis: AxisHorizontal, Order: order} }

// direction reads the direction label of a header or column: a word of
// directionWords in any case, or an azimuth of up to three digits with or
// without "deg". 1 and 2 are ranks, not azimuths.
func direction(label string) (Orientation, bool) {
	word := strings.ToUpper(strings.Trim(label, " ."))
	o, ok := directionWords[word]
	if !ok {
		number := strings.TrimSpace(strings.TrimSuffix(strings.TrimSuffix(word, "DEGREES"), "DEG"))
		v, isNumber := parseNumber([]byte(number))
		if !isNumber || strings.Trim(number, "0123456789") != "" || len(number) > 3 || v > 360 {
			return Orientation{Label: label}, false
		}
		o = azimuth(v)
	}
	o.Label = label
	return o, true
}

var (
	// stemToken is a direction after a separator at the end of a stem; a digit
	// after NS, EW or UD numbers the sensor.
	stemToken = regexp.MustCompile(`(?i)^(.*?)[-_. ]+(N-S|E-W|U-D|H1|H2|(?:NS|EW|UD)\d?|LONG|TRANS?|VERT?|VRT|UP|DO?WN|DN|[NESWZVULT]|\d{3}|(?-i:` + stemCodes + `))$`)
	// stemDigits are three digits that touch a letter. After a digit they may be
	// part of a station code, a date or a time.
	stemDigits = regexp.MustCompile(`^(.*[A-Za-z])(\d{3})$`)
	// stemNumbered are NS, EW or UD touching a station code's digit, with the
	// number of the sensor or without.
	stemNumbered = regexp.MustCompile(`(?i)^(.*\d)((?:NS|EW|UD)\d?)$`)
	// stemSequence are the verticals of the names that begin with a record
	// sequence number; elsewhere such letters may end any word.
	stemSequence = regexp.MustCompile(`(?i)^(RSN\d+.*[A-Z0-9])(UP|DWN|VER)$`)
)

// stemCodes are the channel codes that count at the end of a stem: those of accelerometers
// that are in common use. Others are codes of stations more often.
const stemCodes = `[HBELC]N[ENZ]`

var stemCode = regexp.MustCompile(`^` + stemCodes + `$`)

// SplitStem splits the direction off a file's base name without extension and
// returns what is left, which the components of one record share, and the
// direction:
//
//	after a separator  H1 H2 V, N E Z, S W, NS EW UD, N-S E-W U-D, NS1 EW1 UD1 …,
//	                   UP DN DWN DOWN, VER VERT VRT, L T, LONG TRAN, 000 to 360,
//	                   HNE HNN HNZ and those of the bands B, E, L, C in capitals
//	touching           000 to 360 after a letter, NS EW UD after a digit, and UP DWN
//	                   VER in names that begin with RSN and a number
//
// Case does not matter. Numbers of one or two digits and those from 001 to 009 are
// left alone, since they count files more often than they give a direction. The number
// of a sensor (NS1) stays with the base, and so do band and instrument of a channel
// code (HN), of which a station may have several. Where no direction is found, or nothing but it, the base is the
// whole stem.
func SplitStem(stem string) (base string, o Orientation) {
	if o, ok := stemDirection(stem); ok {
		return stem, o // nothing but a direction
	}
	for _, form := range []*regexp.Regexp{stemToken, stemNumbered, stemSequence, stemDigits} {
		m := form.FindStringSubmatch(stem)
		if m == nil {
			continue
		}
		base, token := strings.TrimRight(m[1], "-_. "), m[2]
		sensor := ""
		if n := len(token); n == 3 && isLetter(token[0]) && isDigit(token[2]) {
			token, sensor = token[:2], "_"+token[2:]
		} else if isStemCode(token) {
			sensor = "_" + token[:2]
		}
		if o, ok := stemDirection(token); ok && base != "" {
			return base + sensor, o
		}
	}
	return stem, Orientation{}
}

// stemDirection is direction without the numbers that count files.
func stemDirection(token string) (Orientation, bool) {
	if n := len(token); n > 0 && isDigit(token[0]) && (n < 3 || "001" <= token && token <= "009") {
		return Orientation{}, false
	}
	o, ok := direction(token)
	if !ok && isStemCode(token) {
		o, ok = codeOf(token).direction()
	}
	if !ok {
		return Orientation{}, false
	}
	return o, true
}

// isStemCode reports whether a token of a stem is a channel code that gives a direction.
func isStemCode(token string) bool { return stemCode.MatchString(token) }

// namesStation reports whether what looks like a channel code at the end of a stem is
// the code or name of the channel's station.
func (c *Channel) namesStation(o Orientation) bool {
	return isStemCode(o.Label) && (strings.EqualFold(o.Label, c.Station.Code) || strings.EqualFold(o.Label, c.Station.Name))
}

// CheckStem takes a direction that a file's stem gave back where it is the station's
// code, and warns of one by a channel code, which may be that of a station nobody
// states, or in degrees, unless it is along an axis: other numbers of three digits at
// the end of a name may count something.
func (c *Channel) CheckStem(stem string) {
	_, o := SplitStem(stem)
	switch {
	case o.Label == "" || c.Orientation != o:
	case c.namesStation(o):
		c.Orientation = Orientation{}
	case isStemCode(o.Label):
		c.warn("direction of channel %s taken from the file's name", o.Label)
	case isDigit(o.Label[0]) && math.Mod(o.AzimuthDeg.Value, 90) != 0:
		c.warn("direction %g° taken from the file's name", o.AzimuthDeg.Value)
	}
}
