package ingest

import (
	"fmt"
	"regexp"
	"strconv"
	"strings"
	"time"
	"unicode/utf8"
)

// timeForm is how a time, or a part of one, is written.
type timeForm struct {
	pattern *regexp.Regexp
	parts   []string // the word of each group
	zone    *time.Location
}

// timeWords are the words of a time form, of those that begin alike the longer
// first, with what each stands for.
var timeWords = []struct{ word, free, fixed string }{
	{"YYYY", `(\d{4})`, `(\d{4})`},
	{"YY", `(\d{2})`, `(\d{2})`},
	{"MON", `([A-Za-z]{3,9})\.?`, `([A-Za-z]{3})`},
	{"MM", `\s?(\d{1,2})`, `(\d{2})`},
	{"DOY", `\s{0,2}(\d{1,3})`, `(\d{3})`},
	{"DD", `\s?(\d{1,2})`, `(\d{2})`},
	{"hh", `\s?(\d{1,2})`, `(\d{2})`},
	{"mm", `\s?(\d{1,2})`, `(\d{2})`},
	{"ss", `\s?(\d{1,2}(?:[.,]\d*)?)`, `(\d{2}(?:[.,]\d*)?)`},
	{"zone", `([A-Za-z]{1,4}|(?:UTC|GMT)?[-+]\d{1,2}(?::?\d{2})?)`, `([A-Za-z]{1,4}|[-+]\d{1,2}(?::?\d{2})?)`},
}

// parseTimeForm reads a form such as "YYYY-MM-DD hh:mm:ss": words for parts of
// the time, a blank for any blanks, and all else as it stands. A word that
// touches another has exactly as many digits as letters.
func parseTimeForm(form string) (*timeForm, error) {
	f := &timeForm{}
	var pattern strings.Builder
	pattern.WriteString("^")
	for rest, touching := form, false; rest != ""; {
		word, expression := timeWord(rest, touching)
		if word == "" {
			r, size := utf8.DecodeRuneInString(rest)
			pattern.WriteString(literalTime(r))
			rest, touching = rest[size:], false
			continue
		}
		for _, p := range f.parts {
			if p == word || p[0] == word[0] && p[0] == 'Y' {
				return nil, fmt.Errorf("%s stands twice in %s", word, found(form))
			}
		}
		f.parts = append(f.parts, word)
		pattern.WriteString(expression)
		rest, touching = rest[len(word):], true
	}
	if len(f.parts) == 0 {
		return nil, fmt.Errorf("%s holds none of the words YYYY YY MM MON DD DOY hh mm ss zone", found(form))
	}
	pattern.WriteString("$")
	var err error
	f.pattern, err = regexp.Compile(pattern.String())
	return f, err
}

// timeWord returns the word that rest begins with and the expression for it,
// which has a fixed width where it touches the word before or after it.
func timeWord(rest string, touching bool) (word, expression string) {
	for _, w := range timeWords {
		after, ok := strings.CutPrefix(rest, w.word)
		if !ok {
			continue
		}
		if next, _ := timeWord(after, false); touching || next != "" && next != "zone" {
			return w.word, w.fixed
		}
		return w.word, w.free
	}
	return "", ""
}

func literalTime(r rune) string {
	if r == ' ' {
		return `\s+`
	}
	return regexp.QuoteMeta(string(r))
}

// has reports whether the form gives one of the words.
func (f *timeForm) has(words ...string) bool {
	for _, p := range f.parts {
		for _, w := range words {
			if p == w {
				return true
			}
		}
	}
	return false
}

// timeParts are the parts of one time, by word, perhaps from several places.
type timeParts struct {
	text map[string]string
	zone *time.Location
	line int
}

// add reads text; it reports false where text is not written as the form says,
// and where a part contradicts what another place said of it.
func (p *timeParts) add(f *timeForm, text string, line int) bool {
	m := f.pattern.FindStringSubmatch(text)
	if m == nil {
		return false
	}
	if p.text == nil {
		p.text = map[string]string{}
		p.line = line
	}
	for i, word := range f.parts {
		if before, ok := p.text[word]; ok && before != m[i+1] {
			return false
		}
		p.text[word] = m[i+1]
	}
	if f.zone != nil {
		p.zone = f.zone
	}
	return true
}

// instant joins the parts to a time in UTC, or to a day where no hour is known;
// it reports false where they make none.
func (p *timeParts) instant() (at, day time.Time, ok bool) {
	number := func(word string) int {
		n, _ := strconv.Atoi(p.text[word])
		return n
	}
	year, month, dayOfMonth := number("YYYY"), number("MM"), number("DD")
	if yy, ok := p.text["YY"]; ok {
		year = fullYear(yy)
	}
	if name, ok := p.text["MON"]; ok {
		month = monthNumber(name)
	}
	if _, ok := p.text["DOY"]; ok {
		d := time.Date(year, 1, number("DOY"), 0, 0, 0, 0, time.UTC)
		if d.Year() != year {
			return at, day, false
		}
		month, dayOfMonth = int(d.Month()), d.Day()
	}
	second, _ := parseNumber([]byte(strings.Replace(p.text["ss"], ",", ".", 1)))
	t, ok := civil(year, month, dayOfMonth, number("hh"), number("mm"), second)
	if !ok {
		return at, day, false
	}
	if p.text["hh"] == "" {
		return at, t, true
	}
	zone := p.zone
	if text := p.text["zone"]; text != "" {
		if zone, ok = parseZone(text); !ok {
			return at, day, false
		}
	}
	if zone == nil {
		return at, day, false
	}
	_, offset := t.In(zone).Zone()
	return t.Add(-time.Duration(offset) * time.Second), day, true
}

var zoneText = regexp.MustCompile(`^(?:UTC|GMT)?([-+])(\d{1,2})(?::?(\d{2}))?$`)

// parseZone reads a zone as a name of zoneHours or as hours and minutes from
// UTC: "UTC", "+09:00", "-3", "UTC+5:30".
func parseZone(text string) (*time.Location, bool) {
	if hours, ok := zoneHours[strings.ToUpper(text)]; ok {
		return time.FixedZone(text, hours*3600), true
	}
	m := zoneText.FindStringSubmatch(strings.ToUpper(text))
	if m == nil {
		return nil, false
	}
	hours, _ := strconv.Atoi(m[2])
	minutes, _ := strconv.Atoi(m[3])
	if hours > 14 || minutes > 59 {
		return nil, false
	}
	seconds := hours*3600 + minutes*60
	if m[1] == "-" {
		seconds = -seconds
	}
	return time.FixedZone(text, seconds), true
}
