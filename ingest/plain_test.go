package ingest

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"
	"time"
)

func TestPlainOneColumn(t *testing.T) {
	c := readFixture(t, "plain", "one-column.txt", Hints{})
	if c.Unit != "g" || c.StepS != 0.01 || len(c.Acceleration) != 160 || c.Line != 8 {
		t.Errorf("unit %s, step %g s, %d samples from line %d", c.Unit, c.StepS, len(c.Acceleration), c.Line)
	}
	if c.Event.ID != "2041nwt" || c.Event.Magnitude != Known(5.7) || c.Station.Code != "CDH9" {
		t.Errorf("event %+v, station %+v", c.Event, c.Station)
	}
	if o := (Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(35), Label: "35"}); c.Orientation != o {
		t.Errorf("orientation %+v, want %+v", c.Orientation, o)
	}
	want := asPrinted(t, ring(160, 0.31, 1.7, 0.97), "%.6f")
	scale(want, 9.80665)
	if !equalSeries(c.Acceleration, want) {
		t.Error("samples differ from the printed ones times 9.80665 m/s²")
	}
}

func TestPlainTimeValue(t *testing.T) {
	c := readFixture(t, "plain", "time-value.csv", Hints{})
	if c.Unit != "cm/s2" || c.StepS != 0.005 || len(c.Acceleration) != 160 {
		t.Errorf("unit %s, step %g s, %d samples", c.Unit, c.StepS, len(c.Acceleration))
	}
	want := ring(160, -0.27, 1.75, 0.96)
	for i := range want {
		want[i] *= 981
	}
	want = asPrinted(t, want, "%.4f")
	scale(want, 0.01)
	if !equalSeries(c.Acceleration[1:], want[1:]) {
		t.Error("samples differ from the printed ones times 0.01 m/s²")
	}
	if c.Orientation.Axis != AxisUnknown {
		t.Errorf("orientation %+v, the file states none", c.Orientation)
	}
	r := readFixture(t, "plain", "rounded-times.txt", Hints{})
	if r.StepS != 1.0/300 || r.Unit != "m/s2" {
		t.Errorf("rounded times: step %g s, unit %s, want 1/300 s and m/s2", r.StepS, r.Unit)
	}
}

func TestPlainDirections(t *testing.T) {
	_, channels, err := parseLines(fixtureLines(t, "plain", "three-directions.csv"), Hints{})
	if err != nil {
		t.Fatal(err)
	}
	var labels []string
	var all []Orientation
	for _, c := range channels {
		labels = append(labels, c.Orientation.Label)
		all = append(all, c.Orientation)
		if c.StepS != 0.02 || c.Unit != "mg" || len(c.Acceleration) != 160 {
			t.Errorf("%s: step %g s, unit %s, %d samples", c.Orientation.Label, c.StepS, c.Unit, len(c.Acceleration))
		}
	}
	if got := fmt.Sprint(labels, AssignRoles(all)); got != "[NS EW UD] [h1 h2 v]" {
		t.Errorf("directions and roles %s", got)
	}
	mg := 9.80665e-3
	if want := 104.072 * mg; channels[0].Acceleration[1] != want {
		t.Errorf("second sample of NS %g m/s², want %g", channels[0].Acceleration[1], want)
	}
}

// column returns n invented numbers, printed with the format.
func column(n int, form string) []string {
	var out []string
	for _, x := range ring(n, 0.3, 0.3, 0.97) {
		out = append(out, fmt.Sprintf(form, x))
	}
	return out
}

// timed puts times before the numbers of column.
func timed(times []float64, form, separator string) []string {
	out := column(len(times), "%.5f")
	for i, at := range times {
		out[i] = fmt.Sprintf(form, at) + separator + out[i]
	}
	return out
}

func even(n int, step float64) []float64 {
	out := make([]float64, n)
	for i := range out {
		out[i] = float64(i) * step
	}
	return out
}

func head(first []string, rest []string) []string {
	return append(append([]string(nil), first...), rest...)
}

func decimalComma(lines []string) []string {
	return strings.Split(strings.ReplaceAll(strings.Join(lines, "\n"), ".", ","), "\n")
}

// TestPlainReads lists what is read, with the step and unit that come of it.
func TestPlainReads(t *testing.T) {
	known := Hints{Unit: "g", UnitFrom: "--unit", StepS: 0.01, StepFrom: "--dt"}
	unit := Hints{Unit: "g"}
	values := column(20, "%.5f")
	cases := []struct {
		name     string
		lines    []string
		hints    Hints
		step     float64
		unit     string
		samples  int
		warnings int
	}{
		{"silent with hints", values, known, 0.01, "g", 20, 0},
		{"hints that agree", head([]string{"# dt=0.01, unit=g"}, values), known, 0.01, "g", 20, 0},
		{"rate", head([]string{"% sampling rate: 200 Hz", "% units: gal"}, values), Hints{}, 0.005, "gal", 20, 0},
		{"step in ms", head([]string{"// dt = 5 ms"}, values), unit, 0.005, "g", 20, 0},
		{"unit beside the key", head([]string{"! dt (s): 0.02"}, values), unit, 0.02, "g", 20, 0},
		{"name with unit", head([]string{"Acceleration (cm/s^2)"}, values), Hints{StepS: 0.01}, 0.01, "cm/s2", 20, 0},
		{"name in words", head([]string{"acceleration in ft/s/s"}, values), Hints{StepS: 0.01}, 0.01, "ft/s2", 20, 0},
		{"names in a comment", head([]string{"# time (s), acc (g)"}, timed(even(20, 0.02), "%.2f", " ")), Hints{}, 0.02, "g", 20, 0},
		{"comment that names nothing", head([]string{"# time (local)"}, values), known, 0.01, "g", 20, 0},
		{"no names", timed(even(20, 0.02), "%.2f", "\t"), unit, 0.02, "g", 20, 0},
		{"title", head([]string{"Acceleration record"}, timed(even(20, 0.02), "%.2f", "  ")), unit, 0.02, "g", 20, 0},
		{"time in ms", head([]string{"time(ms);acc [g]"}, timed(even(20, 5), "%.0f", ";")), Hints{}, 0.005, "g", 20, 0},
		{"time before the event", timed([]float64{-0.02, -0.01, 0, 0.01, 0.02, 0.03, 0.04, 0.05, 0.06, 0.07}, "%.2f", ","), unit, 0.01, "g", 10, 0},
		{"sample numbers", timed(even(20, 1), "%.0f", " "), known, 0.01, "g", 20, 0},
		{"trailing delimiter", timed(even(20, 0.02), "%.2f,", ""), unit, 0.02, "g", 20, 0},
		{"quotes", timed(even(20, 0.02), `"%.2f"`, ";"), unit, 0.02, "g", 20, 0},
		{"decimal comma, one column", decimalComma(values), known, 0.01, "g", 20, 0},
		{"decimal comma, blanks", decimalComma(timed(even(20, 0.02), "%.2f", "   ")), unit, 0.02, "g", 20, 0},
		{"decimal comma, tabs", decimalComma(timed(even(20, 0.02), "%.2f", "\t")), unit, 0.02, "g", 20, 0},
		{"D exponents", column(20, "%.3fD+00"), known, 0.01, "g", 20, 0},
		{"count", head([]string{"20"}, values), known, 0.01, "g", 20, 0},
		{"count over two columns", head([]string{"20"}, timed(even(20, 0.02), "%.2f", " ")), unit, 0.02, "g", 20, 0},
		{"blank lines", head([]string{"0.1", "", "0.2", ""}, values), known, 0.01, "g", 22, 0},
		{"unicode minus", []string{"1", "\u22121", "2", "\u22122", "3", "\u22123", "4", "\u22124", "5", "\u22125"}, Hints{Unit: "mg", StepS: 0.01}, 0.01, "mg", 10, 1},
		{"velocity beside it", head([]string{"time vel acc"}, timed(even(20, 0.02), "%.2f", " 0.5 ")), unit, 0.02, "g", 20, 0},
		{"offset", []string{"1", "2", "1", "2", "1", "3", "1", "2", "1", "2"}, Hints{Unit: "mg", StepS: 0.01}, 0.01, "mg", 10, 1},
		{"clipped", head(values, []string{"0.5", "0.5", "0.5", "0.5", "-0.4", "-0.4", "-0.4", "-0.4"}), known, 0.01, "g", 28, 1},
	}
	for _, k := range cases {
		format, channels, err := parseLines(k.lines, k.hints)
		if err != nil || format != "plain" || len(channels) != 1 {
			t.Errorf("%s: %s, %d channels, %v", k.name, format, len(channels), err)
			continue
		}
		c := channels[0]
		if c.StepS != k.step || c.Unit != k.unit || len(c.Acceleration) != k.samples || len(c.Warnings) != k.warnings {
			t.Errorf("%s: step %g s, unit %s, %d samples, warnings %q; want %g, %s, %d and %d", k.name,
				c.StepS, c.Unit, len(c.Acceleration), c.Warnings, k.step, k.unit, k.samples, k.warnings)
		}
	}
}

func TestPlainRefusals(t *testing.T) {
	known := Hints{Unit: "g", UnitFrom: "--unit", StepS: 0.01, StepFrom: "--dt"}
	unit := Hints{Unit: "g"}
	values := column(20, "%.5f")
	times := func(change func([]float64) []float64) []string {
		return timed(change(even(60, 0.01)), "%.2f", ",")
	}
	shifted := func(from int, by float64) func([]float64) []float64 {
		return func(xs []float64) []float64 {
			for i := from; i < len(xs); i++ {
				xs[i] += by
			}
			return xs
		}
	}
	changedRate := func(xs []float64) []float64 {
		for i := 40; i < len(xs); i++ {
			xs[i] = xs[i-1] + 0.02
		}
		return xs
	}
	checkRefusals(t, []refusal{
		{"no unit", values, Hints{StepS: 0.01}, `case: unit: the file states no unit: give it with --unit or in the catalogue's unit column`},
		{"no step", values, unit, `case: dt: the file states no time step: give it with --dt or in the catalogue's dt_s column`},
		{"unit disagrees", head([]string{"# unit: gal"}, values), known, `case:1: unit: the file says gal, --unit says g`},
		{"units disagree", head([]string{"# unit: gal", "time,acc (g)"}, timed(even(20, 0.01), "%.2f", ",")), Hints{}, `case:2: unit: the column says g, the comment on line 1 says gal`},
		{"unit unknown", head([]string{"acc (bar)"}, values), Hints{StepS: 0.01}, `case:1: unit: unknown unit "bar"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`},
		{"counts", head([]string{"# unit = counts"}, values), known, `case:1: unit: raw counts need a scale; convert them to a unit of acceleration first`},
		{"step disagrees", head([]string{"# dt = 0.02"}, values), known, `case:1: dt: the file says 0.02 s, --dt says 0.01 s`},
		{"times disagree", head([]string{"# dt = 0.02"}, timed(even(20, 0.01), "%.2f", " ")), unit, `case:1: dt: the comment says 0.02 s, the time column steps by 0.01 s`},
		{"times against a hint", timed(even(20, 0.02), "%.2f", " "), known, `case:1: dt: the file says 0.02 s, --dt says 0.01 s`},
		{"step unreadable", head([]string{"# dt = fast"}, values), unit, `case:1: dt: expected a time step over zero in s, found "fast"`},
		{"step negative", head([]string{"# dt = -0.01"}, values), unit, `case:1: dt: expected a time step over zero in s, found "-0.01"`},
		{"rate zero", head([]string{"# rate = 0 Hz"}, values), unit, `case:1: rate: expected a sampling rate over zero in Hz, found "0 Hz"`},
		{"step out of range", head([]string{"# dt = 0.5"}, values), unit, `case:2: dt: time step 0.5 s is outside 0.0005 to 0.1 s`},
		{"time unit", head([]string{"time (min),acc (g)"}, timed(even(20, 0.02), "%.2f", ",")), Hints{}, `case:1: time: unknown unit "min" of time; known are s and ms`},

		{"missing sample", times(shifted(30, 0.01)), unit, `case:31: time: step 0.02 where the median is 0.01 (from 0.01 to 0.02): a missing sample`},
		{"missing samples", times(shifted(30, 0.03)), unit, `case:31: time: step 0.04 where the median is 0.01 (from 0.01 to 0.04): 3 missing samples`},
		{"duplicate time", times(shifted(30, -0.01)), unit, `case:31: time: step 0 where the median is 0.01 (from 0 to 0.01): a duplicate time`},
		{"time going back", times(shifted(30, -0.29)), unit, `case:31: time: step -0.28 where the median is 0.01 (from -0.28 to 0.01): time goes back, two records in one file?`},
		{"changed rate", times(changedRate), unit, `case:41: time: step 0.02 where the median is 0.01 (from 0.01 to 0.02): the sampling rate changes`},
		{"uneven", times(shifted(30, 0.014)), unit, `case:31: time: step 0.02 where the median is 0.01 (from 0.01 to 0.02): a missing sample`},
		{"uneven, finer", timed(shifted(30, 0.004)(even(60, 0.01)), "%.3f", ","), unit, `case:31: time: step 0.014 where the median is 0.01 (from 0.01 to 0.014): uneven times`},
		{"missing sample in fixture", fixtureLines(t, "plain", "damaged-missing-sample.csv"), Hints{}, `case:61: time: step 0.01 where the median is 0.005 (from 0.005 to 0.01): a missing sample`},

		{"missing value", fixtureLines(t, "plain", "damaged-missing-value.csv"), Hints{}, `case:42: samples: value "NaN": missing values are not read`},
		{"missing values", edit(t, edit(t, values, 5, values[4], "NULL"), 9, values[8], "n/a"), known, `case:5: samples: value "NULL": missing values are not read (2 lines at fault: 5 9)`},
		{"missing first value", head([]string{"NaN"}, values), known, `case:1: samples: value "NaN": missing values are not read`},
		{"number", edit(t, values, 7, values[6], "0.1x"), known, `case:7: samples: expected a number, found "0.1x"`},
		{"text after the data", head(values, []string{"end of record"}), known, `case:21: samples: expected a number, found "end of record"`},
		{"comment in the data", head(values, []string{"# second part", "0.1"}), known, `case:21: samples: comment "second part" among the numbers: a second record? if not, state their count as # npts = …`},
		{"more fields", edit(t, values, 7, values[6], "0.1 0.2"), known, `case:7: samples: expected a number, found "0.1 0.2"`},
		{"overflow", edit(t, values, 7, values[6], "1e38"), known, `case:7: samples: value "1e38" is an overflow mark`},
		{"asterisks", edit(t, values, 7, values[6], "********"), known, `case:7: samples: value "********": missing values are not read`},
		{"mark", edit(t, values, 7, values[6], "-999"), Hints{Unit: "cm/s2", StepS: 0.01}, `case:7: samples: value -999 is apart from all others: a mark for a missing value?`},
		{"marks", head([]string{"-999", "0.1", "-999"}, values), Hints{Unit: "cm/s2", StepS: 0.01}, `case:1: samples: value -999 occurs 2 times, first as value 1, apart from all others: a mark for missing values?`},
		{"blank lines", head(values, []string{"", "", "0.1"}), known, `case:23: samples: 2 blank lines inside the data: a second record?`},
		{"mixed decimals", head(values, []string{"0,5"}), known, `case:21: samples: "0,5": decimal points and decimal commas in one file (the others are in line 1)`},
		{"touching", []string{"0.0012-0.0034", "0.0021-0.0043", "0.0013-0.0035", "0.1-0.2"}, known, `case:1: samples: "0.0012-0.0034": fields touch, as in a fixed-width file; give their widths in a layout, with --layout`},
		{"thousands", []string{"1.234,5", "1,5", "2,5", "1.111,5", "1.222,5"}, known, `case:1: samples: "1.234,5": thousands separators are not read`},
		{"clock times", []string{"00:00:00.00 0.1", "00:00:00.01 0.2", "00:00:00.02 0.3"}, known, `case:1: samples: "00:00:00.00" is a clock time; give seconds from the start`},
		{"count and step", head([]string{"20 0.01"}, values), unit, `case:1: samples: "20 0.01": a count and a time step before the values? remove the line and give the step with --dt`},
		{"wrong count", head([]string{"19"}, timed(even(20, 0.02), "%.2f", " ")), unit, `case:1: samples: line holds 1 value where the others hold 2, and is no count of the 20 lines below`},

		{"two readings of a comma", []string{"1,25", "2,31", "3,11", "5,12"}, known, `case:1: samples: "1,25" may be one number with a decimal comma or two integers; write decimal points`},
		{"commas twice", []string{"0,01,1,25", "0,02,1,31", "0,03,1,11"}, known, `case:1: samples: "0,01,1,25": commas may separate numbers or mark decimals; write decimal points`},
		{"wrapped", []string{"1 2 3 4 5 6 7 8", "1 2 3 4 5 6 7 8", "1 2 3"}, known, `case:1: samples: 8 values a line and no names over them: a wrapped series needs a count (# npts = N) or a layout, with --layout; columns need names`},
		{"wrapped in two", []string{"0.1 0.3", "-0.1 0.2", "0.3 0.4", "-0.2 -0.3"}, known, `case:1: columns: two columns, and the first does not rise like a time: a wrapped series needs a count (# npts = N) or a layout, with --layout; columns need names`},
		{"two ramps", []string{"0.1 0.1", "0.2 0.3", "0.3 0.4", "0.4 0.6"}, known, `case:1: columns: both columns rise throughout, either may be the time; name the columns`},
		{"unknown name", head([]string{"time,acc,foo"}, timed(even(20, 0.02), "%.2f", ",1,")), known, `case:1: columns: column 3 is "foo"; known are time, acc, velocity, displacement and directions (NS EW UD, N E Z, H1 H2 V, azimuths)`},
		{"two of a name", head([]string{"time,acc,acc"}, timed(even(20, 0.02), "%.2f", ",1,")), known, `case:2: columns: column "acc": several columns of accelerations need different directions as names`},
		{"two times", head([]string{"time,t"}, timed(even(20, 0.02), "%.2f", ",")), known, `case:2: columns: more than one time column`},
		{"no acceleration", head([]string{"index"}, values), known, `case:2: columns: no column of accelerations`},
		{"direction", head([]string{"# component: sideways"}, values), known, `case:1: component: unknown direction "sideways"`},

		{"short", values[:9], known, `case:1: samples: 9 values; a record needs at least 10`},
		{"UTF-16", []string{strings.Join(strings.Split("0.1\n0.2\n0.3\n0.4\n0.5\n", ""), "\x00") + "\x00"}, known, `case: file looks like UTF-16 without a byte order mark; save it as UTF-8`},
		{"over-long line", []string{strings.Repeat("1", MaxLine+1)}, known, `case:1: line of 1048577 bytes is longer than the limit of 1048576`},
		{"prose", []string{"The quick brown fox", "jumps over 13 lazy dogs."}, known, `case:1: unknown format: found "The quick brown fox"; no reader recognises this content`},
	})
}

func TestPlainNotMotion(t *testing.T) {
	for name, want := range map[string]string{
		"velocity (cm/s)":        "velocity series, not acceleration",
		"time (s),displ_cm":      "displacement series, not acceleration",
		"time (s),Vel NS (cm/s)": "velocity series, not acceleration",
		"time (s),something":     "",
		"time (s),velocity":      "velocity series, not acceleration",
		"time (s),displacement ": "displacement series, not acceleration",
	} {
		lines := column(20, "%.4f")
		if strings.Contains(name, ",") {
			lines = timed(even(20, 0.02), "%.2f", ",")
		}
		_, _, err := parseLines(head([]string{name}, lines), Hints{Unit: "g", StepS: 0.02})
		skip, ok := errors.AsType[*NotMotionError](err)
		if ok != (want != "") || ok && skip.Reason != want {
			t.Errorf("%q: error %v, want %q", name, err, want)
		}
	}
}

func TestPlainComments(t *testing.T) {
	lines := head([]string{
		"# Cedar Hill: free text that means nothing here",
		"# event: Northwater main shock", "# origin_time: 2041-03-04T08:12:00+09:00", "# magnitude: 5.7", "# magnitude type: Mw",
		"# event latitude: 30.1", "# event longitude: 150.2", "# depth_km: 25", "# distance_km = 61.5",
		"# station: CDH9", "# station name: Cedar Hill", "# network: ZZ", "# latitude: 30.5", "# longitude: high", "# vs30: 360",
		"# siting: free field", "# start_time: 2041-03-03T23:12:16Z", "# low_cut_hz: 0.1", "# high_cut_hz: 40", "# unit: gal", "# dt: 0.01",
		"# epicentral_km: 60", "# hypocentral_km: 65", "# rupture_km: 52.5", "# jb_km: 45.25",
	}, column(20, "%.4f"))
	_, channels, err := parseLines(lines, Hints{})
	if err != nil {
		t.Fatal(err)
	}
	c := channels[0]
	event := Event{Name: "Northwater main shock", Origin: time.Date(2041, 3, 3, 23, 12, 0, 0, time.UTC), Magnitude: Known(5.7), MagnitudeType: "Mw",
		Latitude: Known(30.1), Longitude: Known(150.2), DepthKM: Known(25)}
	if c.Event != event {
		t.Errorf("event %+v, want %+v", c.Event, event)
	}
	station := Station{Network: "ZZ", Code: "CDH9", Name: "Cedar Hill", Vs30: Known(360)}
	if c.Station != station {
		t.Errorf("station %+v, want %+v", c.Station, station)
	}
	if want := (Distances{EpicentralKM: Known(60), HypocentralKM: Known(65), RuptureKM: Known(52.5), JoynerBooreKM: Known(45.25)}); c.Distances != want {
		t.Errorf("distances %+v, want %+v", c.Distances, want)
	}
	if c.DistanceKM != Known(61.5) || c.Siting != SitingFreeField || c.LowCutHz != Known(0.1) || c.HighCutHz != Known(40) ||
		!c.Start.Equal(time.Date(2041, 3, 3, 23, 12, 16, 0, time.UTC)) {
		t.Errorf("distance %+v, siting %s, corners %+v %+v, start %v", c.DistanceKM, c.Siting, c.LowCutHz, c.HighCutHz, c.Start)
	}
	// Half a position is none.
	if want := []string{`line 14: longitude "high" not understood`, "position of the station is incomplete or none, not used"}; !slices.Equal(c.Warnings, want) {
		t.Errorf("warnings %q, want %q", c.Warnings, want)
	}
}

// A count that a comment announces is held to.
func TestPlainCount(t *testing.T) {
	lines := []string{"# unit: g", "# dt = 0.01", "# npts = 20"}
	for i := range 20 {
		lines = append(lines, fmt.Sprintf("%.3f", 0.1*math.Sin(float64(i))))
	}
	if _, _, err := parseLines(lines, Hints{}); err != nil {
		t.Error(err)
	}
	for text, want := range map[string]string{
		"# npts = 40": "samples: announced 40 values, found 20", "# samples: 19": "samples: announced 19 values, found 20",
		"# count = many": `samples: expected a number of values, found "many"`,
	} {
		lines[2] = text
		_, _, err := parseLines(lines, Hints{})
		if pe, ok := errors.AsType[*ParseError](err); !ok || pe.Line != 3 || pe.Cause() != want {
			t.Errorf("%q: %v, want %s in line 3", text, err, want)
		}
	}
}

// What was stated for all files serves silent ones; a file that says otherwise
// keeps its own, with a warning, and the same from the catalogue is an error.
func TestPlainAgainstHintsForAll(t *testing.T) {
	lines := []string{"time(s),acc(g)"}
	for i := range 20 {
		lines = append(lines, fmt.Sprintf("%.2f,%.3f", 0.02*float64(i), 0.1*math.Sin(float64(i))))
	}
	hints := Hints{Unit: "gal", UnitFrom: "--unit", UnitForAll: true, StepS: 0.01, StepFrom: "--dt", StepForAll: true}
	_, channels, err := parseLines(lines, hints)
	if err != nil {
		t.Fatal(err)
	}
	want := []string{"the file says g: gal from --unit not used", "the file says a step of 0.02 s: 0.01 s from --dt not used"}
	if c := channels[0]; c.Unit != "g" || c.StepS != 0.02 || !slices.Equal(c.Warnings, want) {
		t.Errorf("unit %s, step %g, warnings %q", c.Unit, c.StepS, c.Warnings)
	}
	hints.UnitForAll = false
	if _, _, err := parseLines(lines, hints); err == nil || !strings.Contains(err.Error(), "the file says g, --unit says gal") {
		t.Errorf("a unit for this file: %v", err)
	}
}

func FuzzPlain(f *testing.F) {
	for _, x := range plainFixtures(f) {
		f.Add([]byte(strings.Join(x.lines, x.ending)))
	}
	f.Add([]byte("# dt=0.01, unit=g\n1 0.1\n2 \u22120.2\n"))
	f.Add([]byte("# component: 3G\n# dt = 0.01\n# unit: g\n0"))
	f.Add([]byte("NS;EW\n1,5;2\n\n3;4\n"))
	f.Add([]byte("# scale: 0.5\nTime (s),HNE (gal),XX.ABC.00.HNZ\n0,1,2\n# gap?\n0.01,2,3\n\n# dt = 0.01\n#\n"))
	f.Fuzz(func(t *testing.T, data []byte) { fuzzFormat(t, plain{}, data) })
}

func BenchmarkPlain(b *testing.B) {
	blanks := timed(even(40000, 0.005), "%.3f", " ")
	stated := []string{"# npts = 40000", "# dt = 0.005"}
	var wrapped []string
	for eight := range slices.Chunk(column(40000, "%10.5f"), 8) {
		wrapped = append(wrapped, strings.Join(eight, " "))
	}
	for name, lines := range map[string][]string{
		"blanks":         blanks,
		"commas":         timed(even(40000, 0.005), "%.3f", ","),
		"decimal commas": decimalComma(blanks),
		"rounded times":  timed(even(40000, 1.0/128), "%.4f", " "),
		"one a line":     head(stated, column(40000, "%.5f")),
		"wrapped":        head(stated, wrapped),
	} {
		data := []byte(strings.Join(lines, "\n"))
		text, err := NewText(data)
		if err != nil {
			b.Fatal(err)
		}
		b.Run(name, func(b *testing.B) {
			b.SetBytes(int64(len(data)))
			b.ReportAllocs()
			for b.Loop() {
				if _, err := (plain{}).Parse(&Content{Text: text}, Hints{Unit: "g"}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
