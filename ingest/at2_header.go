package ingest

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
	"time"
)

// at2Pair reads point count and time step from their line, in any of
//
//	NPTS=   4000, DT=   .0050 SEC
//	4000    0.0050    NPTS, DT
//	4000    .005
//
// Labels before the first number name the number after them, labels after it
// name the numbers in order, and without labels the integer is the count.
func at2Pair(line string) (count int, step float64, err error) {
	numbers, labels, labelFirst := at2Tokens(line)
	n, dt := math.NaN(), math.NaN()
	switch {
	case len(labels) == 0:
		if len(numbers) != 2 {
			return 0, 0, fmt.Errorf("expected point count and time step, found %s", found(line))
		}
		n, dt = numbers[0].value, numbers[1].value
		if isCount(dt) && n < 1 {
			n, dt = dt, n
		}
	default:
		for i, l := range labels {
			v := math.NaN()
			if labelFirst {
				v = numberAfter(numbers, l.at, labels, i)
			} else if i < len(numbers) {
				v = numbers[i].value
			}
			switch {
			case l.word == "NPTS" && math.IsNaN(n):
				n = v
			case l.word == "DT" && math.IsNaN(dt):
				dt = v
			}
		}
	}
	switch {
	case math.IsNaN(n) || math.IsNaN(dt):
		return 0, 0, fmt.Errorf("no number for point count or time step in %s", found(line))
	case !isCount(n):
		return 0, 0, fmt.Errorf("point count %g is not an integer over 1", n)
	case !(dt > 0 && dt < 1):
		return 0, 0, fmt.Errorf("time step %g s is not between 0 and 1 s", dt)
	}
	return int(n), dt, nil
}

// isCount reports whether v can be a number of points.
func isCount(v float64) bool { return v > 1 && v <= math.MaxInt32 && v == math.Trunc(v) }

// at2Token is a number or a label of the pair line and where it stands.
type at2Token struct {
	at    int
	word  string
	value float64
}

// at2MaxTokens is how many numbers and labels of a line are looked at.
const at2MaxTokens = 32

// at2Tokens splits a line into its numbers and the labels NPTS and DT;
// labelFirst says that a label precedes the first number.
func at2Tokens(line string) (numbers, labels []at2Token, labelFirst bool) {
	for i := 0; i < len(line) && len(numbers)+len(labels) < at2MaxTokens; {
		j := i + 1
		switch {
		case isLetter(line[i]):
			for j < len(line) && (isLetter(line[j]) || isDigit(line[j])) {
				j++
			}
			if w := strings.ToUpper(line[i:j]); w == "NPTS" || w == "DT" {
				labelFirst = labelFirst || len(numbers) == 0
				labels = append(labels, at2Token{at: i, word: w})
			}
		case isDigit(line[i]) || strings.IndexByte("+-.", line[i]) >= 0:
			for j < len(line) && (isDigit(line[j]) || strings.IndexByte("+-.EeDd", line[j]) >= 0) {
				j++
			}
			if v, ok := parseNumber([]byte(line[i:j])); ok {
				numbers = append(numbers, at2Token{at: i, value: v})
			}
		}
		i = j
	}
	return numbers, labels, labelFirst
}

// numberAfter returns the first number after label i and before the next label,
// NaN where there is none.
func numberAfter(numbers []at2Token, at int, labels []at2Token, i int) float64 {
	end := math.MaxInt
	if i+1 < len(labels) {
		end = labels[i+1].at
	}
	for _, n := range numbers {
		if n.at > at && n.at < end {
			return n.value
		}
	}
	return math.NaN()
}

func isLetter(b byte) bool { return 'a' <= b && b <= 'z' || 'A' <= b && b <= 'Z' }

// hasWord reports whether text holds word, in upper case, as a whole word in
// any case.
func hasWord(text, word string) bool { return wordAfter(text, word) >= 0 }

// wordAfter returns the index after the first occurrence of word as a whole
// word, -1 where there is none.
func wordAfter(text, word string) int {
	for i := 0; i+len(word) <= len(text); i++ {
		j := i + len(word)
		if strings.EqualFold(text[i:j], word) && (i == 0 || !isLetter(text[i-1])) && (j == len(text) || !isLetter(text[j])) {
			return j
		}
	}
	return -1
}

// at2Unit reads the unit after "UNITS OF" on the quantity's line.
func at2Unit(c *Channel, line string, n int, hints Hints) error {
	stated := statement{line: n}
	if at := wordAfter(line, "UNITS"); at >= 0 {
		rest := line[at:]
		if of := wordAfter(rest, "OF"); of >= 0 && strings.Trim(rest[:of-2], " \t:=") == "" {
			rest = rest[of:]
		}
		stated.text = unitToken(rest)
	}
	unit, warning, err := chooseUnit(stated, hints)
	if err != nil {
		return err
	}
	if warning != "" {
		c.warn("%s", warning)
	}
	c.Unit, c.UnitMPS2 = unit.Name, unit.MPS2
	return nil
}

// unitToken returns the unit at the beginning of text: the longest run of up to
// five words that is one ("CM / SEC / SEC"), else the first word.
func unitToken(text string) string {
	text, _, _ = strings.Cut(strings.TrimLeft(text, " \t:="), ",")
	words := strings.Fields(text)
	if len(words) == 0 {
		return ""
	}
	for n := min(5, len(words)); n >= 1; n-- {
		s := strings.Trim(strings.Join(words[:n], " "), ".,;:()[]")
		if _, err := ParseUnit(s); err == nil {
			return s
		}
	}
	return strings.Trim(words[0], ".,;:()[]")
}

// at2Corners reads filter corners written HP=… and LP=…, in Hz, on the
// quantity's line.
func at2Corners(c *Channel, line string) {
	for word, corner := range map[string]*Number{"HP": &c.LowCutHz, "LP": &c.HighCutHz} {
		at := wordAfter(line, word)
		if at < 0 {
			continue
		}
		rest := strings.TrimLeft(line[at:], " \t:=")
		field, _ := nextField([]byte(rest))
		if v, ok := parseNumber([]byte(strings.TrimRight(string(field), ",;.HhZz"))); ok && v > 0 {
			*corner = Known(v)
			c.Processing = ProcessingCorrected
		}
	}
}

// at2Describe reads line 2: event, date, station, component, between commas. A
// station's name may hold commas itself, so that the first field is the event,
// the last the component, and all else but the date is the station.
func at2Describe(c *Channel, line string) {
	fields := strings.Split(line, ",")
	for i := range fields {
		fields[i] = strings.Join(strings.Fields(fields[i]), " ")
	}
	if len(fields) >= 2 {
		last := fields[len(fields)-1]
		if o, ok := direction(last); ok {
			c.Orientation = o
			fields = fields[:len(fields)-1]
		} else if len(fields) >= 4 {
			c.Orientation.Label = last
			fields = fields[:len(fields)-1]
		}
	}
	var station []string
	dated := false
	for i, f := range fields {
		before, date, looks := cutDate(f)
		switch {
		case !looks || dated:
			before = f
		case date.IsZero():
			c.warn("date %s is not month/day/year: not used", found(f))
		default:
			c.Event.Date = date
		}
		dated = dated || looks
		switch {
		case i == 0:
			c.Event.Name = before
		case before != "":
			station = append(station, before)
		}
	}
	c.Station.Name = strings.Join(station, ", ")
}

// isoDate is a date as YYYY-MM-DD.
var isoDate = regexp.MustCompile(`\b(\d{4})-(\d{2})-(\d{2})\b`)

// cutDate looks for a date in field, written M/D/YYYY, MM/DD/YY or YYYY-MM-DD,
// and returns the text before it. Where something looks like a date and is none,
// the date is zero. A time of day after it is dropped: its zone is not stated.
func cutDate(field string) (before string, date time.Time, looks bool) {
	var year, month, day string
	at := numericDate.FindStringSubmatchIndex(field)
	if at != nil {
		month, day, year = field[at[2]:at[3]], field[at[4]:at[5]], field[at[6]:at[7]]
	} else if at = isoDate.FindStringSubmatchIndex(field); at != nil {
		year, month, day = field[at[2]:at[3]], field[at[4]:at[5]], field[at[6]:at[7]]
	} else {
		return field, time.Time{}, false
	}
	m, _ := strconv.Atoi(month)
	d, _ := strconv.Atoi(day)
	date, _ = civil(fullYear(year), m, d, 0, 0, 0)
	return strings.TrimSpace(field[:at[0]]), date, true
}
