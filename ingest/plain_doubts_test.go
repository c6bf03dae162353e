package ingest

import (
	"fmt"
	"slices"
	"strings"
	"testing"
)

// wrappedLines prints n invented values, perLine to the line.
func wrappedLines(n, perLine int) []string {
	var lines []string
	for group := range slices.Chunk(column(n, "%.5f"), perLine) {
		lines = append(lines, strings.Join(group, " "))
	}
	return lines
}

// TestPlainEncodings reads one file in the ways that its bytes may be written.
func TestPlainEncodings(t *testing.T) {
	lines := head([]string{"# unit: gal", "# dt = 0.01", "# Ort: K\u00f6nigsh\u00f6he"}, column(20, "%.5f"))
	want := asPrinted(t, ring(20, 0.3, 0.3, 0.97), "%.5f")
	scale(want, 0.01)
	text := strings.Join(lines, "\n") + "\n"
	wide := func(order func(r rune) string) string {
		var b strings.Builder
		for _, r := range text {
			b.WriteString(order(r))
		}
		return b.String()
	}
	for name, data := range map[string]string{
		"LF":                 text,
		"CRLF":               strings.ReplaceAll(text, "\n", "\r\n"),
		"lone CR":            strings.ReplaceAll(text, "\n", "\r"),
		"no last line end":   strings.TrimSuffix(text, "\n"),
		"byte order mark":    "\ufeff" + text,
		"mark and CRLF":      "\ufeff" + strings.ReplaceAll(text, "\n", "\r\n"),
		"Ctrl-Z at the end":  text + "\x1a",
		"Ctrl-Z, CRLF":       strings.ReplaceAll(text+"\x1a\n", "\n", "\r\n"),
		"Ctrl-Z, several":    text + "\x1a\r\n\x1a\n\x1a\x1a\r\n",
		"NUL at the end":     text + "\x00\x00\x00",
		"ISO 8859-1":         strings.ReplaceAll(text, "\u00f6", "\xf6"),
		"UTF-16, low first":  "\xff\xfe" + wide(func(r rune) string { return string([]byte{byte(r), byte(r >> 8)}) }),
		"UTF-16, high first": "\xfe\xff" + wide(func(r rune) string { return string([]byte{byte(r >> 8), byte(r)}) }),
		"tabs round values":  strings.ReplaceAll(text, "\n0.", "\n\t0."),
		"blank lines at end": text + "\n\n\n",
		"decimal comma":      strings.Join(append(slices.Clone(lines[:3]), decimalComma(lines[3:])...), "\n"),
		"D exponents":        strings.Join(append(slices.Clone(lines[:3]), suffixed(lines[3:], "D+00")...), "\n"),
		"d exponents":        strings.Join(append(slices.Clone(lines[:3]), suffixed(lines[3:], "d0")...), "\n"),
		"Unicode minus":      strings.ReplaceAll(text, "\n-", "\n\u2212"),
	} {
		format, channels, err := Parse(t.Context(), "f", []byte(data), Hints{})
		if err != nil || format != "plain" || len(channels) != 1 {
			t.Errorf("%s: %q, %d channels, %v", name, format, len(channels), err)
			continue
		}
		if c := channels[0]; !equalSeries(c.Acceleration, want) || c.Unit != "gal" || c.StepS != 0.01 {
			t.Errorf("%s: unit %s, step %g, %d values from %g", name, c.Unit, c.StepS, len(c.Acceleration), c.Acceleration[0])
		}
	}
}

// suffixed returns the lines with the suffix.
func suffixed(lines []string, suffix string) []string {
	out := slices.Clone(lines)
	for i := range out {
		out[i] += suffix
	}
	return out
}

// An exponent without letter is one where other numbers show theirs, and two
// fields that touch elsewhere.
func TestPlainLetterlessExponents(t *testing.T) {
	lines := []string{"# unit: g", "# dt = 0.01"}
	lines = append(lines, column(20, "%.4E")...)
	lines[7], lines[9] = "0.1234-102", "-1.5+000"
	_, channels, err := parseLines(lines, Hints{})
	if err != nil {
		t.Fatal(err)
	}
	if x := channels[0].Acceleration; x[5] != 0.1234e-102*9.80665 || x[7] != -1.5*9.80665 {
		t.Errorf("0.1234-102 is %g, -1.5+000 is %g", x[5], x[7])
	}
	for i, v := range column(20, "%.4f") {
		lines[2+i] = v
	}
	lines[7] = "0.1234-102"
	checkRefusals(t, []refusal{{"without letters", lines, Hints{},
		`case:8: samples: "0.1234-102": fields touch, as in a fixed-width file; give their widths in a layout, with --layout`}})
}

// TestPlainWrapped has series of several values a line.
func TestPlainWrapped(t *testing.T) {
	known := Hints{Unit: "gal", StepS: 0.01}
	want := asPrinted(t, ring(43, 0.3, 0.3, 0.97), "%.5f")
	scale(want, 0.01)
	for name, lines := range map[string][]string{
		"count in a comment":  head([]string{"# npts = 43"}, wrappedLines(43, 8)),
		"count on the line":   head([]string{"43"}, wrappedLines(43, 8)),
		"two a line":          head([]string{"# npts = 43"}, wrappedLines(43, 2)),
		"full last line":      head([]string{"# npts = 43"}, wrappedLines(43, 43)),
		"one a line":          head([]string{"# npts = 43"}, wrappedLines(43, 1)),
		"count and a title":   head([]string{"Cedar Hill, invented", "43"}, wrappedLines(43, 5)),
		"semicolons, commas":  head([]string{"# npts = 43"}, decimalComma(strings.Split(strings.ReplaceAll(strings.Join(wrappedLines(43, 5), "\n"), " ", ";"), "\n"))),
		"blank line inside":   head([]string{"# npts = 43"}, head(wrappedLines(43, 5)[:3], head([]string{""}, wrappedLines(43, 5)[3:]))),
		"trailing delimiters": head([]string{"# npts = 43"}, suffixed(strings.Split(strings.ReplaceAll(strings.Join(wrappedLines(43, 5), "\n"), " ", ","), "\n"), ",")),
	} {
		_, channels, err := parseLines(lines, known)
		if err != nil || len(channels) != 1 {
			t.Errorf("%s: %d channels, %v", name, len(channels), err)
			continue
		}
		if !equalSeries(channels[0].Acceleration, want) {
			t.Errorf("%s: %d values", name, len(channels[0].Acceleration))
		}
	}
	half := head([]string{"# npts = 40"}, timed(even(20, 0.02), "%.2f", " "))
	checkRefusals(t, []refusal{
		{"truncated", head([]string{"# npts = 43"}, wrappedLines(40, 8)), known, `case:6: samples: announced 43 values, found 40 in lines of 8`},
		{"more", head([]string{"40"}, wrappedLines(43, 8)), known, `case:7: samples: announced 40 values, found 43 in lines of 8`},
		{"no count", wrappedLines(43, 8), known, `case:1: samples: 8 values a line and no names over them: a wrapped series needs a count (# npts = N) or a layout, with --layout; columns need names`},
		{"rows that are half as many as announced", half, Hints{Unit: "g"}, `case:1: samples: announced 40 values, found 20`},
		{"rows of three that are a third", head([]string{"# npts = 60"}, timed(even(20, 0.02), "%.2f", " 1 ")), known,
			`case:2: samples: 3 values a line and no names over them: a wrapped series needs a count (# npts = N) or a layout, with --layout; columns need names`},
	})
}

// TestPlainDoubts lists what could be read in a way that is wrong and is refused
// by name.
func TestPlainDoubts(t *testing.T) {
	known := Hints{Unit: "gal", UnitFrom: "--unit", StepS: 0.01, StepFrom: "--dt"}
	values := column(20, "%.5f")
	rows := timed(even(20, 0.02), "%.2f", ",")
	rate := func(factor float64, form string) []string {
		times := even(20, 0.01)
		scale(times, factor)
		return timed(times, form, " ")
	}
	checkRefusals(t, []refusal{
		{"wrong count over one column", head([]string{"200"}, values), known, `case:1: samples: "200" looks like a count of the values below, and there are 20`},
		{"count and step over two columns", head([]string{"20 0.02"}, timed(even(20, 0.02), "%.2f", " ")), known, `case:1: samples: "20 0.02": a count and a time step before the values? remove the line and give the step with --dt`},
		{"two steps", head([]string{"# dt = 0.01", "# time step: 0.02"}, values), known, `case:2: time_step: "0.02" here, "0.01" in line 1`},
		{"two units", head([]string{"# unit: gal", "# units: g"}, values), known, `case:2: units: "g" here, "gal" in line 1`},
		{"two counts", head([]string{"# npts = 20", "# samples = 21"}, values), known, `case:2: samples: "21" here, "20" in line 1`},
		{"step and rate", head([]string{"# dt = 0.01", "# rate = 200 Hz"}, values), known, `case:2: rate: 200 Hz here, a time step of 0.01 s in line 1`},
		{"peak", head([]string{"# PGA: 4.5 gal"}, values), known, `case:2: peak: samples reach 0.003 m/s², the header says 0.045 m/s²`},
		{"milliseconds", rate(1000, "%.0f"), known, `case:1: time: steps of 10 in a column of times without unit: milliseconds? write time (ms) over it`},
		{"days", rate(1.0/86400, "%.12f"), known, `case:1: time: steps of 1.15741e-07 in the time column: fractions of a day? give seconds`},
		{"ISO 8601", []string{"2041-03-04T08:12:16.00 0.1", "2041-03-04T08:12:16.01 0.2", "2041-03-04T08:12:16.02 0.3"}, known, `case:1: samples: "2041-03-04T08:12:16.00" is a clock time; give seconds from the start`},
		{"empty field", edit(t, rows, 7, ",", ",,"), known, `case:7: samples: value 2 of the line is empty: missing values are not read`},
		{"empty fields at the end", suffixed(values, ",,"), known, `case:1: samples: "0.00000,,": a field is empty: missing values are not read`},
		{"empty time", edit(t, rows, 7, "0.12", ""), known, `case:7: samples: value 1 of the line is empty: missing values are not read`},
		{"hexadecimal", edit(t, values, 7, values[6], "0x1F"), known, `case:7: samples: expected a number, found "0x1F"`},
		{"not a number, as printed", edit(t, values, 7, values[6], "1.#IND"), known, `case:7: samples: value "1.#IND": missing values are not read`},
		{"touching, positive", []string{"10.001211.0034", "10.002112.0043", "10.0013-11.0035"}, known, `case:1: samples: "10.001211.0034": fields touch, as in a fixed-width file; give their widths in a layout, with --layout`},
		{"touching exponents", edit(t, values, 7, values[6], "1.0E-021.5E-03"), known, `case:7: samples: "1.0E-021.5E-03": fields touch, as in a fixed-width file; give their widths in a layout, with --layout`},
		{"thousands, comma", suffixed([]string{"1", "2", "3", "4", "5", "6", "7", "8", "9", "8"}, ",234.5"), known, `case:1: samples: "1,234.5": thousands separators are not read`},
		{"thousands, blanks", suffixed([]string{"1", "2", "1", "4", "5", "6", "7", "8", "9", "8"}, " 234,5"), known, `case:1: samples: "1 234,5": thousands separators are not read`},
		{"marks", head([]string{"9999", "0.1", "9999"}, values), known, `case:1: samples: value 9999 occurs 2 times, first as value 1, apart from all others: a mark for missing values?`},
		{"not UTF-8 in the data", edit(t, values, 7, values[6], "0.\xb5"), known, `case:7: samples: expected a number, found "0.µ"`},
	})
}

// What is doubtful and read all the same is said with the channel.
func TestPlainWarnings(t *testing.T) {
	values := column(20, "%.5f")
	long := strings.Split(strings.Repeat("0.1\n-0.1\n0.2\n-0.2\n", 20000), "\n")
	for _, c := range []struct {
		lines []string
		hints Hints
		want  []string
	}{
		{head([]string{"# PGA: high"}, values), Hints{Unit: "gal", StepS: 0.01}, []string{`line 1: peak "high" not understood`}},
		{head([]string{"# PGA = 0.31"}, values), Hints{Unit: "gal", StepS: 0.01}, []string{"peak of the samples and of the header differ by more than 2 %"}},
		{head([]string{"# low_cut_hz: 40", "# high_cut_hz: 0.1"}, values), Hints{Unit: "gal", StepS: 0.01}, []string{"filter corners 40 and 0.1 Hz contradict each other, not used"}},
		{long[:len(long)-1], Hints{Unit: "gal", StepS: 0.1}, []string{"2.22 hours long: a continuous recording?"}},
		{edit(t, values, 2, values[1], "1.0E\u221205"), Hints{Unit: "gal", StepS: 0.01}, []string{"line 2: U+2212 read as a minus sign"}},
	} {
		_, channels, err := parseLines(c.lines, c.hints)
		if err != nil || fmt.Sprint(channels[0].Warnings) != fmt.Sprint(c.want) {
			t.Errorf("%s: %v, want the warnings %q", c.lines[0], err, c.want)
			if err == nil {
				t.Errorf("  got %q", channels[0].Warnings)
			}
		}
	}
	_, channels, err := parseLines(head([]string{"# longitude: 210.5", "# latitude: -30.5", "# dt = 0.01", "# sampling rate: 100 Hz", "# PGA = 0.3 gal"}, values), Hints{Unit: "gal"})
	if err != nil || channels[0].Station.Longitude != Known(-149.5) || len(channels[0].Warnings) > 0 || channels[0].HeaderPeak != Known(0.3*0.01) {
		t.Errorf("%v, %+v", err, channels)
	}
}

// A mark for missing values is no peak.
func TestPlainPeakUnknown(t *testing.T) {
	var cases []headCase
	for _, mark := range []string{"-999", "-999.0 gal", "9999", "-99", "n/a", "-", "NaN", "0"} {
		cases = append(cases, headCase{"# PGA: " + mark, "gal 0.01;"})
	}
	checkHeads(t, append(cases, headCase{"# PGA: 99 gal", `case:2: peak: samples reach 0.003 m/s², the header says 0.99 m/s²`}), column(20, "%.5f"), Hints{Unit: "gal", StepS: 0.01})
}
