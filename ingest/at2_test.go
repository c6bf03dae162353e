package ingest

import (
	"errors"
	"fmt"
	"strings"
	"testing"
	"time"
)

func TestAT2Fixture(t *testing.T) {
	c := readFixture(t, "at2", "NWT_CDH000.AT2", Hints{})
	want := asPrinted(t, at2North.x, "%15.7E")
	scale(want, 9.80665)
	if !equalSeries(c.Acceleration, want) {
		t.Error("samples differ from the printed ones times 9.80665 m/s²")
	}
	if c.Unit != "g" || c.UnitMPS2 != 9.80665 || c.StepS != 0.01 || c.Line != 5 {
		t.Errorf("unit %s of %g, step %g s, line %d", c.Unit, c.UnitMPS2, c.StepS, c.Line)
	}
	event := Event{Name: "Northwater", Date: time.Date(2041, 3, 4, 0, 0, 0, 0, time.UTC)}
	if c.Event != event {
		t.Errorf("event %+v, want %+v", c.Event, event)
	}
	if c.Station.Name != "Cedar Hill, Dam Crest Road" || c.Station.Code != "" {
		t.Errorf("station %+v", c.Station)
	}
	if o := (Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(0), Label: "000"}); c.Orientation != o {
		t.Errorf("orientation %+v, want %+v", c.Orientation, o)
	}
	if c.Processing != ProcessingUnknown || c.LowCutHz.Known || c.HighCutHz.Known || !c.Start.IsZero() {
		t.Errorf("processing %s, corners %+v %+v, start %v: the file states none", c.Processing, c.LowCutHz, c.HighCutHz, c.Start)
	}
	const id = "northwater-20410304_cedar-hill-dam-crest-road"
	if got, ok := RecordID(&c, "NWT_CDH000"); got != id || !ok {
		t.Errorf("RecordID = %s, %v, want %s", got, ok, id)
	}
	for _, name := range []string{"NWT_CDH090.AT2", "NWT_CDH-UP.AT2"} {
		other := readFixture(t, "at2", name, Hints{})
		if got, _ := RecordID(&other, "x"); got != id {
			t.Errorf("%s: RecordID = %s, want %s", name, got, id)
		}
	}
}

// TestAT2ValuesFirst reads the older layout, whose fields touch.
func TestAT2ValuesFirst(t *testing.T) {
	c := readFixture(t, "at2", "values-first.AT2", Hints{})
	want := asPrinted(t, at2Old.x, "%9.4f")
	scale(want, 0.01)
	for i := range want {
		want[i] += 0 // the first is printed as a negative zero
	}
	if !equalSeries(c.Acceleration, want) {
		t.Error("samples differ from the printed ones times 0.01 m/s²")
	}
	if c.Unit != "cm/s2" || c.StepS != 0.02 || c.LowCutHz != Known(0.2) || c.HighCutHz != Known(25) || c.Processing != ProcessingCorrected {
		t.Errorf("unit %s, step %g s, corners %+v %+v Hz, %s", c.Unit, c.StepS, c.LowCutHz, c.HighCutHz, c.Processing)
	}
	if c.Orientation.AzimuthDeg != Known(230) {
		t.Errorf("azimuth %+v, want 230", c.Orientation.AzimuthDeg)
	}
}

func TestAT2Pair(t *testing.T) {
	good := map[string]struct {
		n  int
		dt float64
	}{
		"NPTS=   4000, DT=   .0050 SEC":            {4000, 0.005},
		"NPTS=  4000, DT= .00500 SEC,":             {4000, 0.005},
		"NPTS =4000 , DT = 0.005 SEC":              {4000, 0.005},
		"4000    0.0050    NPTS, DT":               {4000, 0.005},
		"0.0050    4000    DT, NPTS":               {4000, 0.005},
		"4000   .005":                              {4000, 0.005},
		".005  4000":                               {4000, 0.005},
		"npts=\t4000.\tdt= 5.0E-03 sec":            {4000, 0.005},
		"DT= .005 SEC, NPTS= 4000":                 {4000, 0.005},
		"NPTS= 4000, DT= .005 SEC, DURATION= 20.0": {4000, 0.005},
		"NPTS= 4000, DT= 5.D-3 SEC":                {4000, 0.005},
	}
	for line, want := range good {
		if n, dt, err := at2Pair(line); n != want.n || dt != want.dt || err != nil {
			t.Errorf("at2Pair(%q) = %d, %g, %v, want %d, %g", line, n, dt, err, want.n, want.dt)
		}
	}
	bad := map[string]string{
		"100 1":                       "time step 1 s is not between 0 and 1 s",
		"NPTS= 4000, DT= 0 SEC":       "time step 0 s is not between 0 and 1 s",
		"NPTS= 4000, DT= -.01":        "time step -0.01 s is not between 0 and 1 s",
		"NPTS= 4000, DT= 1.5":         "time step 1.5 s is not between 0 and 1 s",
		"NPTS= 12.5, DT= .01":         "point count 12.5 is not an integer over 1",
		"NPTS= 1, DT= .01":            "point count 1 is not an integer over 1",
		"NPTS= , DT= .01":             `no number for point count or time step in "NPTS= , DT= .01"`,
		"NPTS= ****, DT= .01":         `no number for point count or time step in "NPTS= ****, DT= .01"`,
		"NPTS= 4000, DT=":             `no number for point count or time step in "NPTS= 4000, DT="`,
		"4000 .005 20.0":              `expected point count and time step, found "4000 .005 20.0"`,
		"NPTS= 99999999999, DT= .005": "point count 9.9999999999e+10 is not an integer over 1",
	}
	for line, want := range bad {
		if _, _, err := at2Pair(line); err == nil || err.Error() != want {
			t.Errorf("at2Pair(%q): error %v, want %q", line, err, want)
		}
	}
}

func TestAT2Unit(t *testing.T) {
	good := map[string]string{
		"ACCELERATION TIME SERIES IN UNITS OF G":                              "g",
		"Acceleration time history in units of G. Filter points: HP=0.1 LP=9": "g",
		"ACCELERATION TIME HISTORY IN UNITS OF G'S":                           "g",
		"ACCELERATION TIME HISTORY IN UNITS OF GAL":                           "gal",
		"ACCELERATION, UNITS: CM/SEC**2, CORRECTED":                           "cm/s2",
		"ACCELERATION IN UNITS OF CM / SEC / SEC":                             "cm/s2",
		"ACCELERATION TIME SERIES, UNITS = M/S**2":                            "m/s2",
		"ACCELERATION UNITS (CM/S^2)":                                         "cm/s2",
	}
	lines := at2North.lines()
	for quantity, want := range good {
		lines[2] = quantity
		_, channels, err := parseLines(lines, Hints{})
		if err != nil {
			t.Errorf("%q: %v", quantity, err)
		} else if channels[0].Unit != want {
			t.Errorf("%q: unit %s, want %s", quantity, channels[0].Unit, want)
		}
	}
	lines[2] = "ACCELERATION TIME SERIES"
	_, channels, err := parseLines(lines, Hints{Unit: "mg", UnitFrom: "--unit"})
	if err != nil || channels[0].UnitMPS2 != 9.80665e-3 {
		t.Errorf("hint for a silent file: %v", err)
	}
	lines[2] = "ACCELERATION TIME SERIES IN UNITS OF FURLONGS"
	_, channels, err = parseLines(lines, Hints{Unit: "mg", UnitFrom: "--unit"})
	if want := `line 3: unit "FURLONGS" not used, mg from --unit taken`; err != nil || len(channels[0].Warnings) != 1 || channels[0].Warnings[0] != want {
		t.Errorf("hint beside an unknown unit: %v, %v", channels, err)
	}
}

func TestAT2Describe(t *testing.T) {
	day := func(y, m, d int) time.Time { return time.Date(y, time.Month(m), d, 0, 0, 0, 0, time.UTC) }
	cases := []struct {
		line, event, station, label string
		date                        time.Time
		axis                        Axis
		warnings                    int
	}{
		{"Northwater, 3/4/2041, Cedar Hill, 35", "Northwater", "Cedar Hill", "35", day(2041, 3, 4), AxisHorizontal, 0},
		{"NORTHWATER 03/04/89 2319, CEDAR HILL, UP", "NORTHWATER", "CEDAR HILL", "UP", day(1989, 3, 4), AxisVertical, 0},
		{"Northwater, 12/31/07 23:59:59, A, B - C, D, DWN", "Northwater", "A, B - C, D", "DWN", day(2007, 12, 31), AxisVertical, 0},
		{"Northwater, 2041-03-04, Cedar Hill, H1", "Northwater", "Cedar Hill", "H1", day(2041, 3, 4), AxisHorizontal, 0},
		{"Northwater, 31/12/2041, Cedar Hill, 1", "Northwater", "Cedar Hill", "1", time.Time{}, AxisHorizontal, 1},
		{"Northwater, 3/4/2041, Cedar Hill, XYZ", "Northwater", "Cedar Hill", "XYZ", day(2041, 3, 4), AxisUnknown, 0},
		{"Northwater, Cedar Hill", "Northwater", "Cedar Hill", "", time.Time{}, AxisUnknown, 0},
		{"", "", "", "", time.Time{}, AxisUnknown, 0},
	}
	for _, k := range cases {
		var c Channel
		at2Describe(&c, k.line)
		if c.Event.Name != k.event || c.Station.Name != k.station || c.Orientation.Label != k.label || !c.Event.Date.Equal(k.date) ||
			c.Orientation.Axis != k.axis || len(c.Warnings) != k.warnings {
			t.Errorf("%q: %+v %+v %+v %q", k.line, c.Event, c.Station, c.Orientation, c.Warnings)
		}
	}
}

func TestNumberIn(t *testing.T) {
	cases := map[string][]string{
		"  .1234E-03-.2345E-03":   {".1234E-03", "-.2345E-03"},
		"-.1+.2-.3":               {"-.1", "+.2", "-.3"},
		" .12345-103 .5-102-.25":  {".12345-103", ".5-102", "-.25"},
		".12D-03-1.":              {".12D-03", "-1."},
		"1.-2.":                   {"1.", "-2."},
		"12-345":                  {"12", "-345"},
		"0.5E+00-123":             {"0.5E+00", "-123"},
		"\t1 \t 2  ":              {"1", "2"},
		"":                        nil,
		"1.0-1.0E-01-1.0E-02+.1":  {"1.0", "-1.0E-01", "-1.0E-02", "+.1"},
		"--1":                     {"--1"},
		"1.2345-1234":             {"1.2345", "-1234"},
		"-.12345-103-.12345-103 ": {"-.12345-103", "-.12345-103"},
	}
	for line, want := range cases {
		var got []string
		for rest := skipBlanks([]byte(line)); len(rest) > 0; rest = skipBlanks(rest) {
			v, length, ok := numberIn(rest)
			field := rest[:length]
			if want, wantOK := parseNumber(field); v != want || ok != wantOK {
				t.Errorf("numberIn(%q) = %v, %v, want %v, %v", rest, v, ok, want, wantOK)
			}
			got = append(got, string(field))
			rest = rest[length:]
		}
		if fmt.Sprint(got) != fmt.Sprint(want) || len(got) != len(want) {
			t.Errorf("fields of %q: %q, want %q", line, got, want)
		}
	}
}

// TestAT2Layouts reads the same samples from other layouts of the same file.
func TestAT2Layouts(t *testing.T) {
	base := at2North.lines()
	plain := readFixture(t, "at2", "NWT_CDH000.AT2", Hints{})
	join := func(lines ...[]string) []string {
		var all []string
		for _, l := range lines {
			all = append(all, l...)
		}
		return all
	}
	oneLine := strings.Join(base[4:], " ")
	cases := map[string][]string{
		"blank before the data": join(base[:4], []string{"", "  "}, base[4:]),
		"longer header":         join(base[:2], []string{"PROCESSED BY HAND"}, base[2:]),
		"one line":              join(base[:4], []string{oneLine}),
		"one a line":            join(base[:4], strings.Fields(oneLine)),
		"D exponents":           join(base[:4], strings.Split(strings.ReplaceAll(strings.Join(base[4:], "\n"), "E", "D"), "\n")),
		"no labels":             join(base[:3], []string{"  197  .01"}, base[4:]),
		"Ctrl-Z":                join(base, []string{"\x1a\x1a"}),
		"tabs":                  join(base[:4], strings.Split(strings.ReplaceAll(strings.Join(base[4:], "\n"), "  ", "\t"), "\n")),
	}
	for name, lines := range cases {
		_, channels, err := Parse(t.Context(), "case", []byte(strings.Join(lines, "\n")), Hints{})
		if err != nil {
			t.Errorf("%s: %v", name, err)
		} else if !equalSeries(channels[0].Acceleration, plain.Acceleration) {
			t.Errorf("%s: other samples than without it", name)
		}
	}
	_, channels, err := parseLines(join(base, []string{" .0000000E+00 0."}), Hints{})
	if want := "2 zeros beyond the announced 197 values dropped"; err != nil || len(channels[0].Warnings) != 1 || channels[0].Warnings[0] != want {
		t.Errorf("padding: %v, %v, want %q", channels, err, want)
	}
}

func TestAT2NotMotion(t *testing.T) {
	for name, want := range map[string]string{
		"NWT_CDH000.VT2": "velocity series, not acceleration",
		"NWT_CDH000.050": "a response spectrum, not a time series",
	} {
		_, _, err := parseLines(fixtureLines(t, "at2", name), Hints{})
		skip, ok := errors.AsType[*NotMotionError](err)
		if !ok || skip.Reason != want {
			t.Errorf("%s: error %v, want %q", name, err, want)
		}
	}
	lines := at2North.lines()
	lines[2] = "DISPLACEMENT TIME SERIES IN UNITS OF CM"
	_, _, err := parseLines(lines, Hints{})
	if skip, ok := errors.AsType[*NotMotionError](err); !ok || skip.Reason != "displacement series, not acceleration" {
		t.Errorf("displacement: error %v", err)
	}
}

// TestAT2SpectrumInTitle guards against skipping a series because its title
// speaks of a spectrum, as those of spectrum-compatible motions do.
func TestAT2SpectrumInTitle(t *testing.T) {
	lines := at2North.lines()
	lines[0] = "SPECTRUM-COMPATIBLE MOTION, DAMPING 5 PERCENT, INVENTED FOR TESTS"
	if format, _, err := parseLines(lines, Hints{}); format != "at2" || err != nil {
		t.Errorf("AT2: %s, %v", format, err)
	}
	columns := head([]string{"Spectrum-compatible motion", "invented", "for", "tests"}, timed(even(20, 0.02), "%.2f", " "))
	if format, _, err := parseLines(columns, Hints{Unit: "g"}); format != "plain" || err != nil {
		t.Errorf("columns: %s, %v", format, err)
	}
}

func TestAT2Refusals(t *testing.T) {
	base := at2North.lines()
	zeros := append(append([]string(nil), base[:4]...), strings.Repeat(" .0000000E+00", 197))
	loud := at2North
	loud.x = ring(197, 21.3, 1.7, 0.97)
	hundredfold := loud.lines()
	without := func(quantity string) []string { return edit(t, base, 3, at2Gravity, quantity) }
	checkRefusals(t, []refusal{
		{"truncated", base[:30], Hints{}, `case:30: samples: truncated: announced 197 values, found 130`},
		{"no data", base[:4], Hints{}, `case:4: samples: truncated: announced 197 values, found 0`},
		{"too many", append(append([]string(nil), base...), "0.1 0"), Hints{}, `case:45: samples: announced 197 values, found 199`},
		{"a line of zeros too many", append(append([]string(nil), base...), "0 0 0 0 0"), Hints{}, `case:45: samples: announced 197 values, found 202`},
		{"announced beyond file", edit(t, base, 4, "197", "2000000000"), Hints{}, `case:44: samples: truncated: announced 2000000000 values, found 197`},
		{"number", edit(t, base, 20, "E-0", "X-0"), Hints{}, `case:20: samples: expected a number, found "4.9115515X-02"`},
		{"stars", edit(t, base, 20, base[19][:15], "***************"), Hints{}, `case:20: samples: expected a number, found "***************"`},
		{"not a number", edit(t, base, 9, base[8][:15], "            NaN"), Hints{}, `case:9: samples: expected a number, found "NaN"`},
		{"page appended", fixtureLines(t, "at2", "damaged-page-appended.AT2"), Hints{}, `case:21: samples: expected a number, found "<html><body>503"`},
		{"page", fixtureLines(t, "at2", "damaged-page.AT2"), Hints{}, `case:1: an HTML page, not a record: a download that went wrong?`},
		{"step zero", edit(t, base, 4, ".0100", ".0000"), Hints{}, `case:4: NPTS, DT: time step 0 s is not between 0 and 1 s`},
		{"step coarse", edit(t, base, 4, ".0100", ".2000"), Hints{}, `case:5: dt: time step 0.2 s is outside 0.0005 to 0.1 s`},
		{"counts", fixtureLines(t, "at2", "damaged-unit.AT2"), Hints{}, `case:3: unit: raw counts need a scale; convert them to a unit of acceleration first`},
		{"counts with a hint", fixtureLines(t, "at2", "damaged-unit.AT2"), Hints{Unit: "g"}, `case:3: unit: raw counts need a scale; convert them to a unit of acceleration first`},
		{"unit unknown", without("ACCELERATION IN UNITS OF FURLONGS"), Hints{}, `case:3: unit: unknown unit "FURLONGS"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`},
		{"unit of velocity", without("ACCELERATION IN UNITS OF CM/S"), Hints{}, `case:3: unit: "CM/S" is a unit of velocity, not of acceleration`},
		{"no unit", without("ACCELERATION TIME SERIES"), Hints{}, `case: unit: the file states no unit: give it with --unit or in the catalogue's unit column`},
		{"other unit", base, Hints{Unit: "gal", UnitFrom: "--unit"}, `case:3: unit: the file says g, --unit says gal`},
		{"hint unknown", without("ACCELERATION TIME SERIES"), Hints{Unit: "gg", UnitFrom: "--unit"}, `case: unit: from --unit: unknown unit "gg"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`},
		{"other step", base, Hints{StepS: 0.02, StepFrom: "--dt"}, `case:4: dt: the file says 0.01 s, --dt says 0.02 s`},
		{"zeros", zeros, Hints{}, `case:5: samples: all 197 values are equal: a dead channel`},
		{"wrong unit", hundredfold, Hints{}, `case:5: samples: peak of 21.3 g is beyond 20 g: wrong unit "g" or scale?`},
		{"binary", []string{"\x01\x02\x00\x03"}, Hints{}, `case: file is binary, not a text record`},
		{"empty", nil, Hints{}, `case: file holds only blanks`},
	})
}

func BenchmarkAT2(b *testing.B) {
	s := at2North
	s.x = ring(40000, 0.3, 1.99, 0.999)
	s.pair = "NPTS=  40000, DT=   .0050 SEC"
	touching := s
	touching.form = "%15.7f"
	for name, s := range map[string]at2Sample{"exponents": s, "decimals": touching} {
		data := []byte(strings.Join(s.lines(), "\n"))
		text, err := NewText(data)
		if err != nil {
			b.Fatal(err)
		}
		b.Run(name, func(b *testing.B) {
			b.SetBytes(int64(len(data)))
			b.ReportAllocs()
			for b.Loop() {
				if _, err := (at2{}).Parse(&Content{Text: text}, Hints{}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

func FuzzAT2(f *testing.F) {
	for _, x := range at2Fixtures(f) {
		f.Add([]byte(strings.Join(x.lines, x.ending)))
	}
	f.Fuzz(func(t *testing.T, data []byte) { fuzzFormat(t, at2{}, data) })
}
