package ingest

import (
	"bytes"
	"errors"
	"math"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// minimal is the shortest description; the tests of mistakes change it.
var minimal = []string{
	`name = "short"`,
	`recognise = [{ line = 1, pattern = '^SHORT' }]`,
	`data = { line = 2, open_end = true }`,
	`numbers = { separator = "blanks" }`,
	`fixed = { unit = "gal", dt_s = 0.02 }`,
}

// TestLayoutMistakes changes one line of the shortest description, or adds
// some, and compares the whole message.
func TestLayoutMistakes(t *testing.T) {
	if _, err := readDescription(minimal...); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		line int // replaced; 0 to add
		text string
		want string
	}{
		{1, ``, `case.toml: name: missing: the short name to keep with every channel`},
		{1, `name = "Short one"`, `case.toml:1: name: "Short one": want lower-case letters, digits and hyphens, a letter first, 40 at most`},
		{1, `name = "knet"`, `case.toml:1: name: "knet" is the name of another format`},
		{1, `name = "plain"`, `case.toml:1: name: "plain" is the name of another format`},
		{1, `name = 7`, `case.toml:1: name: expected a text, found a number`},
		{1, `name = "a`, `case.toml:1: basic strings cannot have new lines`},
		{1, "name = \"short\"\nname = \"again\"", `case.toml:2: name is given twice, first in line 1`},
		{1, "name = \"short\"\ncolour = 1", `case.toml:2: colour: unknown key; known are blocks, column, data, directions, fixed, header, name, numbers, recognise, title`},

		{2, ``, `case.toml: recognise: missing: say by [[recognise]] what lines show that a file is of this layout`},
		{2, `recognise = []`, `case.toml:2: recognise: missing: say by [[recognise]] what lines show that a file is of this layout`},
		{2, `recognise = "SHORT"`, `case.toml:2: recognise: expected a list in [ ], found the text "SHORT"`},
		{2, `recognise = ["SHORT"]`, `case.toml:2: recognise: expected tables, found the text "SHORT"`},
		{2, `recognise = [{ line = 1, pattern = 'a(b' }]`, "case.toml:2: recognise.pattern: missing closing ): `a(b`"},
		{2, "recognise = [\n{ first = 1, pattern = 'a' },\n{ first = 1, pattern = '[' },\n]", "case.toml:4: recognise.pattern: missing closing ]: `[`"},
		{2, `recognise = [{ line = 1, pattern = '(?:a{500}){500}' }]`, "case.toml:2: recognise.pattern: invalid repeat count: `{500}`"},
		{2, `recognise = [{ line = 1, pattern = 'a*' }]`, `case.toml:2: recognise.pattern: matches an empty line, and so says nothing`},
		{2, `recognise = [{ line = 1, first = 2, pattern = 'a' }]`, `case.toml:2: recognise.line: want either line = N or first = N, for "any of the first N lines"`},
		{2, `recognise = [{ line = 0, pattern = 'a' }]`, `case.toml:2: recognise.line: 0 is outside 1 to 10000`},
		{2, `recognise = [{ line = 1.5, pattern = 'a' }]`, `case.toml:2: recognise.line: expected a whole number, found a number`},
		{2, `recognise = [{ line = 1, patern = 'a' }]`, `case.toml:2: recognise.patern: unknown key (did you mean pattern?); known are first, line, pattern`},
		{2, `recognise = [{ line = 1 }]`, `case.toml:2: recognise.pattern: missing: a regular expression`},
		{2, `recognize = [{ line = 1, pattern = 'a' }]`, `case.toml:2: recognize: unknown key (did you mean recognise?); known are blocks, column, data, directions, fixed, header, name, numbers, recognise, title`},

		{3, ``, `case.toml: data: missing: say where the numbers begin and end`},
		{3, `data = { open_end = true }`, `case.toml:3: data.line: want either line = N or after = a regular expression for the line before the numbers`},
		{3, `data = { line = 2 }`, `case.toml:3: data.ends_with: nothing says where the numbers end: want ends_with, a count, or open_end = true where only the file's end does`},
		{3, `data = { line = 2, open_end = true, ends_with = 'x' }`, `case.toml:3: data.open_end: the end is announced: by a count or by ends_with`},
		{3, `data = { line = 2, open_end = true, trailer = true }`, `case.toml:3: data.trailer: cannot be told from numbers whose end nothing announces`},
		{3, `data = { line = 2, open_end = "yes" }`, `case.toml:3: data.open_end: expected true or false, found the text "yes"`},
		{3, "data = { line = 2, open_end = true, from = 3 }", `case.toml:3: data.from: unknown key; known are after, comment, ends_with, line, open_end, skip, trailer`},

		{3, `data = { lnie = 2, open_end = true }`, `case.toml:3: data.lnie: unknown key (did you mean line?); known are after, comment, ends_with, line, open_end, skip, trailer`},

		{4, `number = { separator = "blanks" }`, `case.toml:4: number: unknown key (did you mean numbers?); known are blocks, column, data, directions, fixed, header, name, numbers, recognise, title`},
		{4, `numbers = { separator = "fixed", width = 7, perline = 2 }`, `case.toml:4: numbers.perline: unknown key (did you mean per_line?); known are decimal, missing, per_line, separator, width, widths`},
		{4, `numbers = { seperator = "blanks" }`, `case.toml:4: numbers.seperator: unknown key (did you mean separator?); known are decimal, missing, per_line, separator, width, widths`},
		{4, ``, `case.toml: numbers: missing: say at least numbers.separator`},
		{4, `numbers = {}`, `case.toml:4: numbers.separator: missing: blanks, comma, semicolon, tab or fixed`},
		{4, `numbers = { separator = "colon" }`, `case.toml:4: numbers.separator: expected blanks, comma, semicolon, tab, fixed, found "colon"`},
		{4, `numbers = { separator = "comma", decimal = "comma" }`, `case.toml:4: numbers.decimal: commas cannot separate numbers and mark decimals`},
		{4, `numbers = { separator = "fixed" }`, `case.toml:4: numbers.width: fixed fields need width and per_line, or widths`},
		{4, `numbers = { separator = "fixed", width = 8 }`, `case.toml:4: numbers.per_line: missing: how many fields of this width a line has`},
		{4, `numbers = { separator = "fixed", widths = [8, 0] }`, `case.toml:4: numbers.widths: 0 is outside 1 to 40`},
		{4, `numbers = { separator = "fixed", widths = [8, 8], per_line = 3 }`, `case.toml:4: numbers.widths: want one width for each field of a line`},
		{4, `numbers = { separator = "blanks", width = 8 }`, `case.toml:4: numbers.separator: widths are for separator = "fixed"`},
		{4, `numbers = { separator = "blanks", missing = [-999] }`, `case.toml:4: numbers.missing: expected texts, as in ["-999", "NaN"]`},

		{5, `fixed = { unit = "m" }`, `case.toml:5: fixed.unit: "m" is a unit of length, not of acceleration`},
		{5, `fixed = { dt_s = 2 }`, `case.toml:5: fixed.dt_s: 2 is outside 0.0005 to 0.1`},
		{5, `fixed = { rate_hz = 0 }`, `case.toml:5: fixed.rate_hz: 0 is outside 10 to 2000`},
		{5, `fixed = { unit = "gal", dts = 0.02 }`, `case.toml:5: fixed.dts: unknown key (did you mean dt_s?); known are ` + strings.Join(quantityNames(), ", ")},
		{5, `fixed = { unit = "gal", pga = 0.02 }`, `case.toml:5: fixed.pga: unknown key; known are ` + strings.Join(quantityNames(), ", ")},
		{5, `fixed = { unti = "bar", dt_s = 2 }`, `case.toml:5: fixed.dt_s: 2 is outside 0.0005 to 0.1`},
		{5, `fixed = { scale = -1 }`, `case.toml:5: fixed.scale: expected a number over zero, found "-1"`},
		{5, `fixed = { count = 1.5 }`, `case.toml:5: fixed.count: expected a whole number over zero, found "1.5"`},
		{5, `fixed = { peak = "high" }`, `case.toml:5: fixed.peak: expected a number, found "high"`},
		{5, `fixed = { start_time = "today" }`, `case.toml:5: fixed.start_time: expected a time as 2006-01-02T15:04:05Z, found "today"`},
		{5, `fixed = { direction = "sideways" }`, `case.toml:5: fixed.direction: unknown direction "sideways"`},
		{5, `fixed = { processing = "some" }`, `case.toml:5: fixed.processing: expected raw, corrected, mean-removed or unknown, found "some"`},
		{5, `fixed = { siting = true }`, `case.toml:5: fixed.siting: expected a text or a number, found true or false`},
		{5, `fixed = { station_latitude = 91 }`, `case.toml:5: fixed.station_latitude: 91 is outside -90 to 90`},

		{0, "column = [{ holds = \"time\" }]", `case.toml:6: column.number: missing: the number of the column, from 1`},
		{0, "column = [{ number = 1, holds = \"time\" }]", `case.toml:6: column: none holds accelerations`},
		{0, "column = [{ number = 1 }]", `case.toml:6: column.holds: missing: time or acceleration`},
		{0, "column = [{ number = 1, holds = \"acceleration\" }, { number = 1, holds = \"acceleration\" }]", `case.toml:6: column.number: column 1 is described twice`},
		{0, "column = [{ number = 1, holds = \"acceleration\" }, { number = 2, holds = \"acceleration\" }]", `case.toml:6: column: column 1: several columns of accelerations need a direction or azimuth_deg each`},
		{0, "column = [{ number = 1, holds = \"acceleration\", direction = \"N\" }, { number = 2, holds = \"acceleration\", azimuth_deg = 0 }]", `case.toml:6: column: column 2 has the direction of column 1`},
		{0, "column = [{ number = 1, holds = \"acceleration\", direction = \"N90E\" }, { number = 2, holds = \"acceleration\", azimuth_deg = 90 }]", `case.toml:6: column: column 2 has the direction of column 1`},
		{0, "column = [{ number = 1, holds = \"time\", unit = \"min\" }]", `case.toml:6: column.unit: expected s, ms, found "min"`},
		{0, "[[column]]\nnumber = 1\nholds = \"acceleration\"\nmagnitude = 5", `case.toml:9: column.magnitude: unknown key; known are azimuth_deg, channel, direction, holds, instrument, number, peak, scale, scale_divisor, unit`},
		{0, "numbers.per_line = 2", `case.toml:6: key numbers is already defined`},

		{0, "[[header]]\npattern = 'x(.)'", `case.toml:7: header.pattern: gives nothing: name a group, as in (?P<dt_s>...), or say gives beside one group`},
		{0, "[[header]]\npattern = 'x(?P<dt>.)'", `case.toml:7: header.pattern: unknown quantity dt; known are ` + strings.Join(quantityNames(), ", ")},
		{0, "[[header]]\npattern = 'x(?P<statoin>.)'", `case.toml:7: header.pattern: unknown quantity statoin (did you mean station?); known are ` + strings.Join(quantityNames(), ", ")},
		{0, "[[header]]\npatern = 'x'\ngives = \"peak\"\ntime = \"hh\"", `case.toml:7: header.patern: unknown key (did you mean pattern?); known are column, gives, in, line, optional, pattern, time, zone`},
		{0, "[[column]]\nnumber = 1\nhold = \"acceleration\"\ndirection = \"N\"", `case.toml:8: column.hold: unknown key (did you mean holds?); known are azimuth_deg, channel, direction, holds, instrument, number, peak, scale, scale_divisor, unit`},
		{0, "[[header]]\npattern = 'x(?P<station>.)'\ngives = \"event\"", `case.toml:8: header.gives: wants a pattern of one group in parentheses without a name`},
		{0, "[[header]]\npattern = 'x(?P<peak>.) (?P<peak>.)'", `case.toml:7: header.pattern: two groups named peak`},
		{0, "[[header]]\ngives = \"peak\"", `case.toml:6: header.pattern: missing: a regular expression`},
		{0, "[[header]]\npattern = 'x(?P<peak>.)'\n[[header]]\npattern = 'y(?P<peak>.)'", `case.toml:9: header.pattern: peak is given by the pattern of line 6 too`},
		{0, "[[header]]\npattern = 'x(?P<unit>.)'", `case.toml:5: fixed.unit: is found by the [[header]] pattern of line 6 too; make that optional, or leave one out`},
		{0, "[[header]]\npattern = 'x(?P<channels>.)'", `case.toml:7: header.pattern: channels are announced before the first one: want [blocks] and in = "file"`},
		{0, "[[header]]\npattern = 'x(?P<peak>.)'\nin = \"file\"", `case.toml:8: header.in: there is only one channel's header without [blocks]`},
		{0, "[[header]]\npattern = 'x(?P<peak>.)'\ncolumn = 2", `case.toml:8: header.column: column 2 is not described as one of accelerations`},
		{0, "[[header]]\npattern = 'x(?P<station>.)'\ncolumn = 2", `case.toml:8: header.column: station is the same for all columns`},
		{0, "[[header]]\npattern = 'x(?P<peak>.)'\ntime = \"hh:mm\"", `case.toml:8: header.time: the pattern gives no start_time and no origin_time`},
		{0, "[[header]]\npattern = 'x(?P<start_time>.)'", `case.toml:6: header.time: missing: how the time is written, as in "YYYY-MM-DD hh:mm:ss"`},
		{0, "[[header]]\npattern = 'x(?P<start_time>.)'\ntime = \"soon\"", `case.toml:8: header.time: "soon" holds none of the words YYYY YY MM MON DD DOY hh mm ss zone`},
		{0, "[[header]]\npattern = 'x(?P<start_time>.)'\ntime = \"hh:hh\"", `case.toml:8: header.time: hh stands twice in "hh:hh"`},
		{0, "[[header]]\npattern = 'x(?P<start_time>.)'\ntime = \"hh:mm\"\nzone = \"here\"", `case.toml:9: header.zone: unknown zone "here"; want "UTC" or hours from it, as in "+09:00"`},
		{0, "[[header]]\npattern = 'x(?P<start_time>.)'\ntime = \"hh:mm zone\"\nzone = \"UTC\"", `case.toml:9: header.zone: the time itself holds a zone`},
		{0, "[[header]]\npattern = 'x(?P<start_time>.)'\ntime = \"hh:mm\"", `case.toml:6: header: start_time: no pattern gives the year`},
		{0, "[[header]]\npattern = 'x(?P<start_time>.)'\ntime = \"YYYY hh:mm\"", `case.toml:6: header: start_time: no pattern gives month and day`},
		{0, "[[header]]\npattern = 'x(?P<start_time>.)'\ntime = \"YYYY DOY\"", `case.toml:6: header: start_time: no pattern gives the hour`},
		{0, "[[header]]\npattern = 'x(?P<start_time>.)'\ntime = \"YYYY DOY hh\"", `case.toml:6: header: start_time: hours, minutes and seconds do not fit together`},
		{0, "[[header]]\npattern = 'x(?P<origin_time>.)'\ntime = \"YYYY DOY hh:mm\"", `case.toml:6: header: origin_time: zone is missing, as in zone = "UTC" or zone = "+09:00"`},

		{0, "directions = { A = \"about north\" }", `case.toml:6: directions.A: unknown direction; known are N, E, S, W, NS, EW, UD, H1, H2, V, the like, azimuths and N45E`},
		{0, "blocks = {}", `case.toml:6: blocks.begin: missing: a regular expression for the line that begins a channel`},
		{0, "title = \"" + strings.Repeat("x", maxDescription) + "\"", `case.toml: description of 65537 bytes is larger than the limit of 65536`},
		{0, "blocks = { begin = '" + strings.Repeat("x", 1001) + "' }", `case.toml:6: blocks.begin: pattern of 1001 bytes is longer than the limit of 1000`},
	} {
		lines := append([]string(nil), minimal...)
		if c.line > 0 {
			lines[c.line-1] = c.text
		} else {
			lines = append(lines, c.text)
		}
		_, err := readDescription(lines...)
		if err == nil || err.Error() != c.want {
			t.Errorf("%.60s\n gives %v\n want  %s", c.text, err, c.want)
		}
		if _, ok := errors.AsType[*ParseError](err); err != nil && !ok {
			t.Errorf("%s: error of type %T", c.text, err)
		}
	}
}

// TestLayoutInfo has who states unit and step: the description, the header, a
// column of times, or whoever runs the program.
func TestLayoutInfo(t *testing.T) {
	const flags, noStep = "that of --unit or the catalogue's unit", "files without --dt or the catalogue's dt_s"
	begin := minimal[:4]
	for _, c := range []struct {
		name, text, unit, notRead string
	}{
		{"both fixed", `fixed = { unit = "gal", dt_s = 0.02 }`, "gal", ""},
		{"rate fixed", `fixed = { rate_hz = 50 }`, flags, ""},
		{"neither", ``, flags, noStep},
		{"both found", "[[header]]\npattern = '(?P<unit>.) (?P<rate_hz>.)'", "as the header says", ""},
		{"unit found or fixed", "fixed.unit = 'gal'\n[[header]]\npattern = '(?P<unit>.)'\noptional = true", "as the header says, else gal", noStep},
		{"a column of times", `column = [{ number = 1, holds = "time" }, { number = 2, holds = "acceleration" }]`, flags, ""},
		{"units by column", `column = [{ number = 1, holds = "acceleration", unit = "g", direction = "N" }, { number = 2, holds = "acceleration", unit = "mg", direction = "E" }]`, "g, mg", noStep},
		{"one unit of two", `column = [{ number = 1, holds = "acceleration", unit = "g", direction = "N" }, { number = 2, holds = "acceleration", direction = "E" }]`, "g, " + flags, noStep},
		{"found for one column", "column = [{ number = 2, holds = 'acceleration' }]\n[[header]]\ncolumn = 2\npattern = '(?P<unit>.)'", "as the header says", noStep},
	} {
		l, err := readDescription(append(begin[:4:4], c.text)...)
		if err != nil {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		if info := l.Info(); info.Unit != c.unit || info.NotRead != c.notRead {
			t.Errorf("%s: unit %q, not read %q, want %q, %q", c.name, info.Unit, info.NotRead, c.unit, c.notRead)
		}
	}
}

func TestLayoutNamesDiffer(t *testing.T) {
	ls := exampleLayouts(t)
	again := readFile(t, filepath.Join(layoutsDir, "quay-logger.toml"))
	err := ls.Read("again.toml", bytes.NewReader(again))
	if err == nil || err.Error() != `again.toml:3: name: "quay-logger" is the name of another format` {
		t.Errorf("the same layout twice: %v", err)
	}
	if len(ls) != 2 {
		t.Errorf("%d layouts after a mistake, want 2", len(ls))
	}
}

func TestTimeForms(t *testing.T) {
	day := func(y int, m time.Month, d int) time.Time { return time.Date(y, m, d, 0, 0, 0, 0, time.UTC) }
	for _, c := range []struct {
		form, zone, text string
		want             time.Time // zero: refused
	}{
		{"YYYY-MM-DD hh:mm:ss", "UTC", "2041-03-04 08:12:16", day(2041, 3, 4).Add(8*time.Hour + 12*time.Minute + 16*time.Second)},
		{"YYYY-MM-DD hh:mm:ss", "UTC", "2041-03-04   08:12:16.25", day(2041, 3, 4).Add(8*time.Hour + 12*time.Minute + 16250*time.Millisecond)},
		{"YYYY/MM/DD hh:mm", "+05:30", "2041/3/ 4 8: 2", day(2041, 3, 4).Add(2*time.Hour + 32*time.Minute)},
		{"DD.MM.YY hh:mm:ss", "-3", "04.03.41 23:30:00,5", day(1941, 3, 5).Add(2*time.Hour + 30*time.Minute + 500*time.Millisecond)},
		{"YYYYMMDDhhmmss", "Z", "20410304081216", day(2041, 3, 4).Add(8*time.Hour + 12*time.Minute + 16*time.Second)},
		{"YYYYMMDDhhmmss", "Z", "2041034081216", time.Time{}},
		{"DDMONYYYY hhmm", "UTC", "04Mar2041 0812", day(2041, 3, 4).Add(8*time.Hour + 12*time.Minute)},
		{"MON DD, YYYY hh:mm zone", "", "March 4, 2041 08:12 PST", day(2041, 3, 4).Add(16*time.Hour + 12*time.Minute)},
		{"YYYY-MM-DDThh:mm:sszone", "", "2041-03-04T08:12:16Z", day(2041, 3, 4).Add(8*time.Hour + 12*time.Minute + 16*time.Second)},
		{"YYYY-MM-DDThh:mm:sszone", "", "2041-03-04T08:12:16-0100", day(2041, 3, 4).Add(9*time.Hour + 12*time.Minute + 16*time.Second)},
		{"YYYY.DOY.hh:mm", "UTC", "2040.366.00:00", day(2040, 12, 31)},
		{"YYYY.DOY.hh:mm", "UTC", "2041.366.00:00", time.Time{}},
		{"YYYY DOY hh:mm", "UTC", "2041   1 00:00", day(2041, 1, 1)},
		{"YYYY-MM-DD hh:mm", "UTC", "2041-02-29 00:00", time.Time{}},
		{"YYYY-MM-DD hh:mm", "UTC", "2041-02-28 24:00", time.Time{}},
		{"YYYY-MM-DD hh:mm zone", "", "2041-02-28 12:00 XXX", time.Time{}},
		{"Jahr YYYY, MM/DD, hh h mm", "UTC", "Jahr 2041, 03/04, 8 h 12", day(2041, 3, 4).Add(8*time.Hour + 12*time.Minute)},
		{"YYYY年MM月DD日 hh:mm", "+9", "2041年3月4日 9:12", day(2041, 3, 4).Add(12 * time.Minute)},
	} {
		f, err := parseTimeForm(c.form)
		if err != nil {
			t.Errorf("%s: %v", c.form, err)
			continue
		}
		if c.zone != "" {
			f.zone, _ = parseZone(c.zone)
		}
		var p timeParts
		ok := p.add(f, c.text, 1)
		var at time.Time
		if ok {
			at, _, ok = p.instant()
		}
		if !at.Equal(c.want) || ok != !c.want.IsZero() {
			t.Errorf("%q as %q: %v, %v, want %v", c.text, c.form, at, ok, c.want)
		}
	}
	f, _ := parseTimeForm("YYYY-MM-DD")
	var p timeParts
	if at, d, ok := p.instant(); ok {
		t.Errorf("no parts give %v, %v", at, d)
	}
	p.add(f, "2041-03-04", 1)
	if at, d, ok := p.instant(); !ok || !at.IsZero() || !d.Equal(day(2041, 3, 4)) {
		t.Errorf("a date gives %v, %v, %v", at, d, ok)
	}
	if p.add(f, "2041-03-05", 2) {
		t.Error("two days for one time passed")
	}
}

func TestDegrees(t *testing.T) {
	for text, want := range map[string]float64{
		"30.5": 30.5, "-30.5": -30.5, "+30.5": 30.5, "30.5N": 30.5, "30.5 S": -30.5, "W150.25": -150.25, "150 15.0 E": 150.25, "150 15 36 W": -150.26,
		"150°15'36\"E": 150.26, "150° 15.6′ e": 150.26, "-0 30": -0.5, "30 30.0 N": 30.5,
	} {
		if got, err := degrees(text); err != nil || math.Abs(got-want) > 1e-12 {
			t.Errorf("degrees(%q) = %g, %v, want %g", text, got, err, want)
		}
	}
	for _, text := range []string{"", "N", "30 60", "30.5NE", "30.5Q", "-30 S", "1 2 3 4", "30 -5", "about 30"} {
		if got, err := degrees(text); err == nil {
			t.Errorf("degrees(%q) = %g, want an error", text, got)
		}
	}
}

// FuzzLayout reads any bytes as a description and, where they are one, any other
// bytes by it.
func FuzzLayout(f *testing.F) {
	quay, tower := readFile(f, filepath.Join(layoutsDir, "quay-logger.toml")), readFile(f, filepath.Join(layoutsDir, "tower-table.toml"))
	for _, x := range layoutFixtures() {
		data := []byte(strings.Join(x.lines, x.ending))
		f.Add(quay, data)
		f.Add(tower, data)
	}
	f.Add([]byte(strings.Join(arrayLayout, "\n")), []byte(strings.Join(arrayFile(), "\n")))
	f.Add([]byte(strings.Join(minimal, "\n")), []byte("SHORT\n1 2 3 4 5\n-6 -5 -4 -3 -2\n"))
	f.Fuzz(func(t *testing.T, description, data []byte) {
		before := bytes.Clone(description)
		var ls Layouts
		err := ls.Read("f", bytes.NewReader(description))
		if !bytes.Equal(description, before) {
			t.Error("Read changed its input")
		}
		if err != nil {
			pe, ok := errors.AsType[*ParseError](err)
			if !ok {
				t.Fatalf("error of type %T: %v", err, err)
			}
			if lines := 1 + bytes.Count(description, []byte("\n")); pe.Line < 0 || pe.Line > lines {
				t.Fatalf("error in line %d of %d: %v", pe.Line, lines, err)
			}
			return
		}
		fuzzFormat(t, ls[0], data)
	})
}

func BenchmarkLayout(b *testing.B) {
	for name, lines := range map[string][]string{"fixed": quayLogger(40000), "columns": towerTable(20000)} {
		layouts := exampleLayouts(b)
		data := []byte(strings.Join(lines, "\r\n"))
		b.Run(name, func(b *testing.B) {
			b.SetBytes(int64(len(data)))
			b.ReportAllocs()
			for b.Loop() {
				if _, _, err := Parse(b.Context(), "f", data, Hints{Layouts: layouts}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
