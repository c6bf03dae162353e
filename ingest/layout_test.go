package ingest

import (
	"errors"
	"fmt"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"
)

// readExample reads an example file by the example layouts.
func readExample(t *testing.T, name, format string) []Channel {
	t.Helper()
	got, channels, err := Parse(t.Context(), name, readFile(t, filepath.Join(layoutsDir, name)), Hints{Layouts: exampleLayouts(t)})
	if err != nil || got != format {
		t.Fatalf("Parse(%s) = %q, %d channels, %v", name, got, len(channels), err)
	}
	return channels
}

func TestLayoutOfCounts(t *testing.T) {
	channels := readExample(t, "quay.txt", "quay-logger")
	if len(channels) != 1 {
		t.Fatalf("%d channels", len(channels))
	}
	c := channels[0]
	if c.Unit != "counts" || c.StepS != 0.005 || len(c.Acceleration) != 197 || c.Line != 11 {
		t.Errorf("unit %s, step %g s, %d samples from line %d", c.Unit, c.StepS, len(c.Acceleration), c.Line)
	}
	if want := (Station{Network: "PN", Code: "QUAY7", Name: "North mole, on the ground", Latitude: Known(30.5), Longitude: Known(150.21)}); c.Station != want {
		t.Errorf("station %+v, want %+v", c.Station, want)
	}
	if c.Event.ID != "2041nwt" || c.Siting != SitingGround || short(c.Orientation) != "h 125" {
		t.Errorf("event %+v, siting %s, orientation %+v", c.Event, c.Siting, c.Orientation)
	}
	// 09:12:16.5 ten hours east of Greenwich.
	if want := time.Date(2041, 3, 3, 23, 12, 16, 5e8, time.UTC); !c.Start.Equal(want) {
		t.Errorf("start %v, want %v", c.Start, want)
	}
	// The largest of the counts is 999000; each is 0.00025 gal = 2.5e-6 m/s².
	if peak, _ := peakOf(c.Acceleration); peak != -999000*2.5e-6 {
		t.Errorf("peak %v m/s²", peak)
	}
	if c.HeaderPeak != Known(2.4975) || len(c.Warnings) > 0 {
		t.Errorf("header peak %+v, warnings %q", c.HeaderPeak, c.Warnings)
	}
}

// The description that README.md shows reads the example too.
func TestLayoutInReadme(t *testing.T) {
	readme := string(readFile(t, filepath.Join("..", "README.md")))
	_, rest, _ := strings.Cut(readme, "### Layouts\n")
	_, rest, _ = strings.Cut(rest, "```toml\n")
	text, _, ok := strings.Cut(rest, "```")
	if !ok {
		t.Fatal("no description in README.md")
	}
	hints := Hints{Layouts: mustRead(t, text)}
	_, channels, err := Parse(t.Context(), "quay.txt", readFile(t, filepath.Join(layoutsDir, "quay.txt")), hints)
	if err != nil {
		t.Fatal(err)
	}
	want := readExample(t, "quay.txt", "quay-logger")[0]
	if c := channels[0]; !equalSeries(c.Acceleration, want.Acceleration) || c.StepS != want.StepS || !c.Start.Equal(want.Start) || c.Station.Code != "QUAY7" {
		t.Errorf("step %g s, %d samples, start %v, station %+v", c.StepS, len(c.Acceleration), c.Start, c.Station)
	}
}

func TestLayoutOfColumns(t *testing.T) {
	channels := readExample(t, "tower.csv", "tower-table")
	var all []Orientation
	for _, c := range channels {
		all = append(all, c.Orientation)
		if c.Unit != "m/s2" || c.UnitMPS2 != 1 || c.StepS != 0.005 || len(c.Acceleration) != 160 || c.Line != 8 || len(c.Warnings) > 0 {
			t.Errorf("unit %s of %g, step %g s, %d samples from line %d, warnings %q", c.Unit, c.UnitMPS2, c.StepS, len(c.Acceleration), c.Line, c.Warnings)
		}
		start := time.Date(2041, 3, 4, 8, 12, 16, 25e7, time.UTC)
		if c.Station.Code != "CDH9" || c.LowCutHz != Known(0.05) || !c.Start.Equal(start) || c.Siting != SitingFreeField {
			t.Errorf("station %+v, low cut %v, start %v", c.Station, c.LowCutHz, c.Start)
		}
	}
	if got := fmt.Sprint(AssignRoles(all)); got != "[h1 h2 v]" {
		t.Errorf("roles %s", got)
	}
	for i, x := range [][]float64{ring(160, 1.31, 1.7, 0.97), ring(160, -0.97, 1.75, 0.96), ring(160, 0.52, 1.5, 0.95)} {
		if want := asPrinted(t, x, "%.5f"); !equalSeries(channels[i].Acceleration[1:], want[1:]) {
			t.Errorf("channel %d differs from what was printed", i+1)
		}
	}
}

// The example takes no table of other units or with its columns in another order.
func TestLayoutRecognisesWholeLines(t *testing.T) {
	hints := Hints{Layouts: exampleLayouts(t)}
	tower := towerTable(160)
	if format, _, err := parseLines(tower, hints); format != "tower-table" || err != nil {
		t.Fatalf("%q, %v", format, err)
	}
	for name, lines := range map[string][]string{
		"unit of time":          edit(t, tower, 7, "ms;", "s;"),
		"unit of acceleration":  edit(t, tower, 7, "m/s2;m/s2", "cm/s2;m/s2"),
		"columns interchanged":  edit(t, tower, 6, "X;Y", "Y;X"),
		"a column more":         edit(t, tower, 6, "Z", "Z;W"),
		"temperature elsewhere": edit(t, tower, 6, "Temp.;X;Y;Z", "X;Y;Z;Temp."),
	} {
		if format, _, _ := parseLines(lines, hints); format == "tower-table" {
			t.Errorf("%s: taken for a table of the layout", name)
		}
	}
}

// readDescription reads a layout from the lines of its description.
func readDescription(lines ...string) (*Layout, error) {
	var ls Layouts
	if err := ls.Read("case.toml", strings.NewReader(strings.Join(lines, "\n"))); err != nil {
		return nil, err
	}
	return ls[0], nil
}

// mustRead is readText where the description is right.
func mustRead(t testing.TB, lines ...string) Layouts {
	t.Helper()
	l, err := readDescription(lines...)
	if err != nil {
		t.Fatal(err)
	}
	return Layouts{l}
}

// arrayLayout has several channels, each with its own header, one after another.
var arrayLayout = []string{
	`name = "array"`,
	`recognise = [{ line = 1, pattern = '^ARRAY' }]`,
	`blocks.begin = '^CHANNEL '`,
	`data = { after = '^data', trailer = true }`,
	`numbers = { separator = "blanks", per_line = 4 }`,
	`directions = { X = "35", Y = "125", Z = "UP" }`,
	`fixed = { unit = "mg" }`,
	`[[header]]`, `in = "file"`, `pattern = 'CHANNELS=(?P<channels>\d+) DT=(?P<dt_s>\S+)'`,
	`[[header]]`, `line = 1`, `pattern = '^CHANNEL (?P<channel>\d+) (?P<direction>\w+)'`,
	`[[header]]`, `pattern = '^(?P<count>\d+) VALUES'`,
	`[[header]]`, `pattern = '^RATE (?P<rate_hz>\S+)'`, `optional = true`,
}

// arrayFile is a file of arrayLayout.
func arrayFile() []string {
	lines := []string{"ARRAY", "CHANNELS=3 DT=0.01"}
	for i, word := range []string{"X", "Y", "Z"} {
		lines = append(lines, fmt.Sprintf("CHANNEL %d %s", i+1, word), "22 VALUES", "data")
		lines = append(lines, fixed(ring(22, float64(100+i), 1.2, 0.9), " %.3f", 4, false)...)
		lines = append(lines, "sum of channel")
	}
	return lines
}

func TestLayoutOfBlocks(t *testing.T) {
	hints := Hints{Layouts: mustRead(t, arrayLayout...)}
	format, channels, err := parseLines(arrayFile(), hints)
	if err != nil || format != "array" {
		t.Fatal(format, err)
	}
	var got []string
	for i, c := range channels {
		got = append(got, c.ChannelCode+c.Orientation.Label+" "+short(c.Orientation))
		want := asPrinted(t, ring(22, float64(100+i), 1.2, 0.9), "%.3f")
		scale(want, 9.80665e-3)
		if c.StepS != 0.01 || c.Unit != "mg" || !equalSeries(c.Acceleration, want) {
			t.Errorf("channel %d: step %g, unit %s, %d values", i+1, c.StepS, c.Unit, len(c.Acceleration))
		}
	}
	if s := strings.Join(got, ", "); s != "1X h 35, 2Y h 125, 3Z v" {
		t.Errorf("channels %s", s)
	}
	good := arrayFile()
	checkRefusals(t, []refusal{
		{"channels", without(good, 21, 30), hints, `case:2: channels: announced 3 channels, found 2`},
		{"no channel", good[:2], hints, `case:2: blocks: no line matches blocks.begin "^CHANNEL "`},
		{"no data", edit(t, good, 15, "data", "text"), hints, `case:22: data: no line matches data.after "^data"`},
		{"direction", edit(t, good, 13, "Y", "Q"), hints, `case:13: direction: unknown direction "Q"; say under [directions] what it means`},
		{"rate", edit(t, good, 4, "22 VALUES", "22 VALUES\nRATE 200"), hints, `case:5: rate_hz: 200 Hz here, a time step of 0.01 s in line 2`},
		{"two counts", edit(t, good, 4, "22 VALUES", "22 VALUES\n23 VALUES"), hints, `case:5: count: "23" here, "22" in line 4: the layout must say which line counts`},
		{"short line", edit(t, good, 7, good[6], strings.Replace(good[6][1:], " ", "\n", 1)), hints, `case:7: samples: line holds 1 values, expected 4`},
		{"truncated", without(good, 11, 11), hints, `case:11: samples: truncated: announced 22 values, found 20`},
		{"more than announced", edit(t, good, 4, "22", "21"), hints, `case:11: samples: announced 21 values, found 22`},
		{"no count", without(good, 4, 4), hints, `case:4: count: not found: no line from 3 to 4 gives it by the pattern "^(?P<count>\\d+) VALUES"`},
	})
}

// TestLayoutRefusals has what is refused beside the damages of TestOutcomes.
func TestLayoutRefusals(t *testing.T) {
	hints := Hints{Layouts: exampleLayouts(t)}
	quay, tower := quayLogger(197), towerTable(160)
	checkRefusals(t, []refusal{
		{"more announced", edit(t, quay, 7, "197", "200"), hints, `case:31: samples: announced 200 values, found 197`},
		{"another unit in the catalogue", quay, Hints{Layouts: hints.Layouts, Unit: "g", UnitFrom: "catalogue line 3"}, `case: unit: the file says gal, catalogue line 3 says g`},
		{"wrong scale", edit(t, quay, 8, "0.00025", "0.0025"), hints, `case:11: peak: samples reach 24.975 m/s², the header says 2.4975 m/s²`},
		{"scale of zero", edit(t, quay, 8, "0.00025", "0"), hints, `case:8: scale: expected a number over zero, found "0"`},
		{"no scale", without(quay, 8, 8), hints, `case:9: scale: not found: no line from 1 to 9 gives it by the pattern "^SCALE +(?P<scale>\\S+) GAL/COUNT"`},
		{"wrong step", quay, Hints{Layouts: hints.Layouts, StepS: 0.01, StepFrom: "catalogue line 3"}, `case:7: dt: the file says 0.005 s, catalogue line 3 says 0.01 s`},
		{"a line of text", edit(t, quay, 15, quay[14], "error in logger"), hints, `case:15: samples: expected a number, found "error i"`},
		{"a field too many", edit(t, quay, 15, quay[14], quay[14]+"      1"), hints, `case:15: samples: text "1" after the 10 values of the line`},
		{"a field is blank", edit(t, quay, 15, quay[14][:14], quay[14][:7]+"       "), hints, `case:15: samples: value 2 of the line is blank`},
		{"a line is short", edit(t, quay, 15, quay[14], quay[14][:63]), hints, `case:15: samples: line holds 9 values, expected 10`},
		{"overflow", edit(t, quay, 15, quay[14][:7], "*******"), hints, `case:15: samples: value "*******": missing values are not read`},
		{"two records", head(quay, quay), hints, `case:32: samples: text "PORT OF NORTHWATER MOTION LOGGER      I…" after the end of the data`},
		{"nine values", append(edit(t, quay, 7, "197", "9")[:10], quay[10][:63], "END"), hints, `case:11: samples: 9 values; a record needs at least 10`},
		{"header alone", quay[:10], hints, `case:10: data: the lines end before the first number`},
		{"start", edit(t, quay, 7, "200 HZ", "fast HZ"), hints, `case:7: rate_hz: expected a number over zero, found "fast"`},

		{"missing sample", without(tower, 60, 60), hints, `case:60: time: step 10 where the median is 5 (from 5 to 10): a missing sample`},
		{"missing value", edit(t, tower, 12, "1,31000", "-9999"), hints, `case:12: samples: value -9999: the layout says it is missing; 1 such values`},
		{"decimal point", edit(t, tower, 12, "1,31000", "1.31000"), hints, `case:12: samples: expected a number, found "1.31000"`},
		{"blank lines", edit(t, tower, 20, tower[19], "\n\n"+tower[19]), hints, `case:22: samples: 2 blank lines inside the data: a second record?`},
	})
}

// A file that two formats recognise is rejected, whether they are built in or
// described.
func TestLayoutsMeet(t *testing.T) {
	twin := mustRead(t, strings.Split(strings.Replace(string(readFile(t, filepath.Join(layoutsDir, "quay-logger.toml"))), "quay-logger", "twin", 1), "\n")...)
	knet := mustRead(t, `name = "imitation"`, `recognise = [{ first = 3, pattern = '^Origin Time' }]`, `data = { line = 18, open_end = true }`, `numbers.separator = "blanks"`)
	for _, c := range []struct {
		lines   []string
		layouts Layouts
		want    string
	}{
		{quayLogger(197), append(twin, exampleLayouts(t)...), "file looks like more than one format: twin (matches the layout's patterns), quay-logger (matches the layout's patterns)"},
		{knetNS.lines(), knet, "file looks like more than one format: knet (header labels of K-NET ASCII), imitation (matches the layout's patterns)"},
	} {
		_, _, err := parseLines(c.lines, Hints{Layouts: c.layouts})
		if pe, ok := errors.AsType[*ParseError](err); !ok || pe.Cause() != c.want {
			t.Errorf("error %v, want %s", err, c.want)
		}
	}
}

// TestLayoutReads lists short descriptions and what they make of short files.
func TestLayoutReads(t *testing.T) {
	begin := []string{`name = "short"`, `recognise = [{ line = 1, pattern = '^SHORT' }]`}
	ten := "1 2 3 4 5\n-6 -5 -4 -3 -2\n"
	cases := []struct {
		name        string
		description []string
		text        string
		want        string // step, unit and its size, count, first and last value, warnings
	}{
		{"fixed values", []string{`data = { line = 2, open_end = true }`, `numbers.separator = "blanks"`, `fixed = { unit = "gal", dt_s = 0.02 }`},
			"SHORT\n" + ten, "0.02 gal 0.01 10 0.01 -0.02 []"},
		{"count ends, text follows", []string{`data = { line = 2, trailer = true }`, `numbers.separator = "blanks"`, `fixed = { unit = "gal", rate_hz = 50, count = 10 }`},
			"SHORT\n" + ten + "7 8 9\nend\n", "0.02 gal 0.01 10 0.01 -0.02 []"},
		{"pattern ends", []string{`data = { after = '^SHORT', skip = 1, ends_with = '^-9 *$' }`, `numbers.separator = "blanks"`, `fixed = { unit = "gal", dt_s = 0.02 }`},
			"SHORT\nskipped\n" + ten + "-9\n", "0.02 gal 0.01 10 0.01 -0.02 []"},
		{"scale and divisor", []string{`data = { line = 2, open_end = true }`, `numbers.separator = "blanks"`, `fixed = { unit = "gal", dt_s = 0.02 }`,
			`[[header]]`, `pattern = '(?P<scale>\d+)\(gal\)/(?P<scale_divisor>\d+)'`}, "SHORT 2000(gal)/8000\n" + ten, "0.02 counts 0.0025 10 0.0025 -0.005 []"},
		{"comments, commas", []string{`data = { line = 2, open_end = true, comment = "!" }`, `numbers = { separator = "comma", per_line = 5 }`, `fixed = { unit = "gal", dt_s = 0.02 }`},
			"SHORT\n! one\n" + strings.ReplaceAll(ten, " ", ","), "0.02 gal 0.01 10 0.01 -0.02 []"},
		{"widths", []string{`data = { line = 2, open_end = true }`, `numbers = { separator = "fixed", widths = [4, 3, 5] }`, `fixed = { unit = "gal", dt_s = 0.02 }`,
			`column = [{ number = 3, holds = "acceleration" }]`}, "SHORT\n" + strings.Repeat("00010 x 1.25\n0002999-1.50\n", 5), "0.02 gal 0.01 10 0.0125 -0.015 []"},
		{"characters, not bytes", []string{`data = { line = 2, open_end = true }`, `numbers = { separator = "fixed", width = 5, per_line = 2 }`, `fixed = { unit = "gal", dt_s = 0.02 }`},
			"SHORT\n" + strings.Repeat("\u22121.25\u22122.50\n 1.25 2.50\n", 3), "0.02 gal 0.01 12 -0.0125 0.025 [line 2: U+2212 read as a minus sign]"},
		{"unit of a column", []string{`data = { line = 2, open_end = true }`, `numbers.separator = "tab"`, `fixed.dt_s = 0.02`,
			`column = [{ number = 2, holds = "acceleration", unit = "cm/s2", scale = 2 }]`}, "SHORT\n" + strings.Repeat("x\t1\ny y\t-1\n", 5), "0.02 counts 0.02 10 0.02 -0.02 []"},
		{"unit found", []string{`data = { line = 3, open_end = true }`, `numbers.separator = "semicolon"`,
			`header = [{ pattern = 'UNIT (\S+)', gives = "unit" }, { pattern = '^step (?P<dt_s>.*) s', line = 2 }]`}, "SHORT UNIT cm/s/s\nstep 0.02 s\n1;2;3;4;5;\n-6;-5;-4;-3;-2\n", "0.02 cm/s2 0.01 10 0.01 -0.02 []"},
		{"what makes no sense is a warning", []string{`data = { line = 2, open_end = true }`, `numbers.separator = "blanks"`, `fixed = { unit = "gal", dt_s = 0.02 }`,
			`[[header]]`, `pattern = 'M=(?P<magnitude>\S+)'`}, "SHORT M=big\n" + ten, `0.02 gal 0.01 10 0.01 -0.02 [line 1: magnitude "big" not understood]`},
	}
	for _, c := range cases {
		hints := Hints{Layouts: mustRead(t, append(slices.Clone(begin), c.description...)...)}
		_, channels, err := Parse(t.Context(), "case", []byte(c.text), hints)
		if err != nil || len(channels) != 1 {
			t.Errorf("%s: %d channels, %v", c.name, len(channels), err)
			continue
		}
		x := channels[0].Acceleration
		got := fmt.Sprintf("%g %s %g %d %g %g %v", channels[0].StepS, channels[0].Unit, channels[0].UnitMPS2, len(x), x[0], x[len(x)-1], channels[0].Warnings)
		if got != c.want {
			t.Errorf("%s: %s, want %s", c.name, got, c.want)
		}
	}
}

// TestLayoutOfColumnsWithHeaders has quantities that differ from column to
// column, and a day without an hour.
func TestLayoutOfColumnsWithHeaders(t *testing.T) {
	hints := Hints{Layouts: mustRead(t,
		`name = "twins"`, `recognise = [{ line = 1, pattern = '^TWINS' }]`, `data = { after = '^--', open_end = true }`, `numbers.separator = "blanks"`,
		`[fixed]`, `unit = "gal"`, `dt_s = 0.01`, `processing = "corrected"`, `low_cut_hz = 0.1`, `high_cut_hz = 25`,
		`[[column]]`, `number = 1`, `holds = "acceleration"`, `azimuth_deg = 350`, `scale = 2`,
		`[[column]]`, `number = 2`, `holds = "acceleration"`, `unit = "g"`,
		`[[header]]`, `column = 1`, `pattern = '^MAX (?P<peak>\S+)'`,
		`[[header]]`, `column = 2`, `pattern = '^MAX \S+ (?P<peak>\S+)'`,
		`[[header]]`, `column = 2`, `pattern = '^DIR (?P<direction>\S+)'`,
		`[[header]]`, `pattern = '^DAY (?P<origin_time>.+), (?P<event_name>.+), (?P<siting>.+)'`, `time = "D DD/MM/YY"`,
	)}
	lines := []string{"TWINS", "MAX 14 0.09", "DIR UP", "DAY D 04/03/41, Northwater main shock, roof of the depot", "--"}
	for i := range 12 {
		lines = append(lines, fmt.Sprintf("%d %.2f", i%8, 0.01*float64(i%10)))
	}
	_, channels, err := parseLines(lines, hints)
	if err != nil || len(channels) != 2 {
		t.Fatal(len(channels), err)
	}
	a, b := channels[0], channels[1]
	if a.Unit != "counts" || a.UnitMPS2 != 0.02 || a.HeaderPeak != Known(0.14) || short(a.Orientation) != "h 350" || a.Acceleration[7] != 0.14 {
		t.Errorf("first: %s of %g, peak %+v, %s, %g", a.Unit, a.UnitMPS2, a.HeaderPeak, short(a.Orientation), a.Acceleration[7])
	}
	if b.Unit != "g" || b.HeaderPeak != Known(0.09*9.80665) || short(b.Orientation) != "v" {
		t.Errorf("second: %s, peak %+v, %s", b.Unit, b.HeaderPeak, short(b.Orientation))
	}
	for _, c := range channels {
		want := Event{Name: "Northwater main shock", Date: time.Date(1941, 3, 4, 0, 0, 0, 0, time.UTC)}
		if c.Event != want || c.Siting != SitingStructure || c.Processing != ProcessingCorrected || c.LowCutHz != Known(0.1) || c.HighCutHz != Known(25) {
			t.Errorf("event %+v, siting %s, %s %v %v", c.Event, c.Siting, c.Processing, c.LowCutHz, c.HighCutHz)
		}
	}
	checkRefusals(t, []refusal{
		{"peak of the second", edit(t, lines, 2, "0.09", "0.9"), hints, `case:6: peak: channel UP: samples reach 0.8826 m/s², the header says 8.826 m/s²`},
		{"no direction of the second", without(lines, 3, 3), hints, `case:5: direction: several channels, and the layout finds no direction of number 2`},
		{"a line with one value", edit(t, lines, 9, "3 0.03", "3"), hints, `case:9: samples: line holds 1 values, expected 2`},
		{"a line with three", edit(t, lines, 9, "3 0.03", "3 4 5"), hints, `case:9: samples: text "5" after the 2 values of the line`},
	})
	_, channels, err = parseLines(edit(t, lines, 4, "04/03/41", "04/13/41"), hints)
	if err != nil || !slices.Contains(channels[0].Warnings, "line 4: origin_time not understood") {
		t.Errorf("a day that is none: %v, %q", err, channels[0].Warnings)
	}
	_, channels, err = parseLines(edit(t, lines, 4, "04/03/41", "March"), hints)
	if err != nil || !slices.Contains(channels[1].Warnings, `line 4: origin_time "D March" not understood`) || !channels[1].Event.Date.IsZero() {
		t.Errorf("another form: %v, %q, %v", err, channels[1].Warnings, channels[1].Event.Date)
	}
}

// A pattern that is not called optional and matches nothing is no secret.
func TestLayoutPatternsThatMatchNothing(t *testing.T) {
	layout := readFile(t, filepath.Join(layoutsDir, "quay-logger.toml"))
	text := strings.Replace(string(readFile(t, filepath.Join(layoutsDir, "quay.txt"))), "SITE ", "SITES ", 1)
	_, channels, err := Parse(t.Context(), "quay.txt", []byte(text), Hints{Layouts: mustRead(t, string(layout))})
	if err != nil {
		t.Fatal(err)
	}
	found := slices.ContainsFunc(channels[0].Warnings, func(w string) bool { return strings.HasPrefix(w, `station not found by the pattern "^SITE`) })
	if !found || channels[0].Station.Code != "" {
		t.Errorf("station %q, warnings %q", channels[0].Station.Code, channels[0].Warnings)
	}
}
