package ingest

import (
	"errors"
	"math"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"
)

func TestSMCHeader(t *testing.T) {
	c := readFixture(t, "smc", "north.smc", Hints{})
	want := asPrinted(t, smcNorth.x, "%.3E")
	for i := range want {
		want[i] = float64(want[i]*0.01) + 0
	}
	if !equalSeries(c.Acceleration, want) {
		t.Errorf("samples from line %d differ from those printed", c.Line)
	}
	if c.StepS != 0.005 || c.Unit != "cm/s2" || c.UnitMPS2 != 0.01 || c.Line != 30 || c.HeaderPeak != Known(1.87) {
		t.Errorf("dt %g s, unit %s, line %d, peak %v", c.StepS, c.Unit, c.Line, c.HeaderPeak)
	}
	event := Event{Name: "BRACKEN FORK EARTHQUAKE", Origin: time.Date(2041, 3, 18, 5, 6, 7, 0, time.UTC),
		Latitude: Known(39.25), Longitude: Known(-123.5), DepthKM: Known(11), Magnitude: Known(6.1), MagnitudeType: "Mw"}
	if c.Event != event {
		t.Errorf("event %+v, want %+v", c.Event, event)
	}
	station := Station{Name: "OTTER MILL SCHOOL, CA", Latitude: Known(39.125), Longitude: Known(-123.25), ElevationM: Known(214)}
	if c.Station != station || c.Distances.EpicentralKM != Known(23.4) || c.Siting != SitingUnknown {
		t.Errorf("station %+v at %v km, %s; want %+v", c.Station, c.Distances.EpicentralKM, c.Siting, station)
	}
	if want := (Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(5), Label: "005"}); c.Orientation != want {
		t.Errorf("orientation %+v, want %+v", c.Orientation, want)
	}
	if c.LowCutHz != Known(0.25) || c.HighCutHz != Known(35) || c.Processing != ProcessingCorrected || !c.Start.IsZero() || len(c.Warnings) > 0 {
		t.Errorf("corners %v, %v, %s, start %v, warnings %q", c.LowCutHz, c.HighCutHz, c.Processing, c.Start, c.Warnings)
	}
}

// TestSMCSeries reads the other components, whose exponents have no letter, whose
// rate is not quite an integer, or whose unit is that of a comment.
func TestSMCSeries(t *testing.T) {
	for name, s := range map[string]smcSample{"east-bare-exponents.smc": smcEast, "up.smc": smcUp, "uncorrected.smc": smcRaw} {
		c := readFixture(t, "smc", name, Hints{})
		want := asPrinted(t, s.x, "%.3E")
		for i := range want {
			want[i] = float64(want[i]*0.01) + 0
		}
		if !equalSeries(c.Acceleration, want) {
			t.Errorf("%s: samples from line %d differ from those printed", name, c.Line)
		}
	}
	up := readFixture(t, "smc", "up.smc", Hints{})
	if up.Orientation.Axis != AxisVertical || up.StepS != 0.005 || !up.Start.Equal(time.Date(2041, 3, 18, 5, 6, 12, 250e6, time.UTC)) {
		t.Errorf("%+v, step %g s, start %v", up.Orientation, up.StepS, up.Start)
	}
	if want := []string{"sampling rate 199.99 /s taken for 200 /s"}; !slices.Equal(up.Warnings, want) {
		t.Errorf("warnings %q, want %q", up.Warnings, want)
	}
	if raw := readFixture(t, "smc", "uncorrected.smc", Hints{}); raw.Processing != ProcessingRaw {
		t.Errorf("processing %s, want raw", raw.Processing)
	}
}

// TestSMCVariants edits a good file and looks at what changes.
func TestSMCVariants(t *testing.T) {
	base := smcNorth.lines()
	up := smcUp.lines()
	raw := smcRaw.lines()
	const null = "  1.7000000E+38"
	real := func(lines []string, i int, v string) []string {
		line := 18 + (i-1)/5
		at := (i - 1) % 5 * 15
		old := lines[line-1]
		return edit(t, lines, line, old, old[:at]+v+old[at+15:])
	}
	integer := func(lines []string, i int, v string) []string {
		line := 12 + (i-1)/8
		at := (i - 1) % 8 * 10
		old := lines[line-1]
		return edit(t, lines, line, old, old[:at]+v+old[at+10:])
	}
	all := func(*Channel) bool { return true }
	cases := []struct {
		name    string
		lines   []string
		hints   Hints
		check   func(*Channel) bool
		warning string // the only warning, "" for none
	}{
		{"bearing in line 6", edit(t, base, 6, "component= 005", "component= N05E"), Hints{},
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(5) && c.Orientation.Label == "N05E" }, ""},
		{"north as 360 and 0", integer(edit(t, base, 6, "= 005", "= 360"), 14, "         0"), Hints{},
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(0) }, ""},
		{"azimuths over north, one degree apart", integer(edit(t, base, 6, "= 005", "= 360"), 14, "         1"), Hints{},
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(0) }, ""},
		{"no component in the text", edit(t, base, 6, "component= 005", ""), Hints{},
			func(c *Channel) bool {
				return c.Orientation.AzimuthDeg == Known(5) && c.Station.Name == "OTTER MILL SCHOOL, CA"
			}, ""},
		{"azimuth is a null", integer(base, 14, "    -32768"), Hints{},
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(5) }, ""},
		{"text against a vertical integer 13", integer(base, 13, "         0"), Hints{},
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(5) },
			`direction is "005" in the text and vertical by integer 13; the former taken`},
		{"vertical by integer 13 alone", integer(edit(t, base, 6, "component= 005", ""), 13, "       180"), Hints{},
			func(c *Channel) bool { return c.Orientation.Axis == AxisVertical }, ""},
		{"level but for a little", integer(edit(t, base, 6, "component= 005", ""), 13, "        85"), Hints{},
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(5) }, ""},
		{"as far from level as may be", integer(edit(t, base, 6, "component= 005", ""), 13, "       105"), Hints{},
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(5) }, "a dip of 15°: taken for horizontal"},
		{"as far from upright as may be", integer(edit(t, base, 6, "component= 005", ""), 13, "        15"), Hints{},
			func(c *Channel) bool { return c.Orientation.Axis == AxisVertical }, "a dip of -75°: taken for vertical"},
		{"integer 13 that is no angle from upright", integer(base, 13, "       225"), Hints{},
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(5) }, ""},
		{"vertical by code 500 alone", integer(integer(edit(t, base, 6, "component= 005", ""), 13, "    -32768"), 14, "       500"), Hints{},
			func(c *Channel) bool { return c.Orientation.Axis == AxisVertical }, ""},
		{"up as 500 in the text", edit(t, base, 6, "= 005", "= 500"), Hints{},
			func(c *Channel) bool { return c.Orientation.Axis == AxisVertical }, ""},
		{"up overrides level", edit(t, base, 6, "= 005", "= UP"), Hints{},
			func(c *Channel) bool { return c.Orientation.Axis == AxisVertical }, ""},
		{"direction unknown", integer(edit(t, base, 6, "= 005", "= *"), 13, "    -32768"), Hints{},
			func(c *Channel) bool { return c.Orientation == Orientation{} }, ""},
		{"another integer null", integer(integer(base, 1, "     -9999"), 14, "     -9999"), Hints{},
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(5) }, ""},
		{"another real null", real(real(base, 1, " -9.9990000E+02"), 13, " -9.9990000E+02"), Hints{},
			func(c *Channel) bool { return !c.Station.ElevationM.Known }, ""},
		{"no position", real(real(base, 11, null), 12, null), Hints{},
			func(c *Channel) bool { return !c.Station.Latitude.Known && !c.Station.Longitude.Known }, ""},
		{"two zeros are no position", real(real(base, 3, "  0.0000000E+00"), 4, "  0.0000000E+00"), Hints{},
			func(c *Channel) bool { return !c.Event.Latitude.Known && !c.Event.Longitude.Known }, ""},
		{"west counted positive", real(base, 12, "  1.2325000E+02"), Hints{},
			func(c *Channel) bool { return c.Station.Longitude == Known(123.25) },
			"longitude is east of Greenwich, but the text names CA: it may be positive to the west"},
		{"header trimmed on the right", func() []string {
			out := slices.Clone(integer(base, 48, "          "))
			for i := range out {
				out[i] = strings.TrimRight(out[i], " ")
			}
			return out
		}(), Hints{}, all, "fields without a number in the integer header: 1, the first at position 48 in line 17"},
		{"one comment more than announced", integer(base, 16, "         1"), Hints{}, all, "1 comment lines announced, found 2"},
		{"comments not counted", integer(base, 16, "    -32768"), Hints{}, all, "0 comment lines announced, found 2"},
		{"rate of single precision", real(base, 2, "  2.0000001E+02"), Hints{}, func(c *Channel) bool { return c.StepS == 0.005 }, ""},
		{"rate that is no integer", real(base, 2, "  3.3333333E+01"), Hints{},
			func(c *Channel) bool { return math.Abs(c.StepS*33.333333-1) < 1e-15 }, ""},
		{"step from a hint", real(base, 2, null), Hints{StepS: 0.005}, func(c *Channel) bool { return c.StepS == 0.005 }, ""},
		{"corners out of order", real(base, 26, "  3.6000000E+01"), Hints{},
			func(c *Channel) bool { return !c.LowCutHz.Known && !c.HighCutHz.Known }, ""},
		{"one corner", real(base, 27, null), Hints{}, func(c *Channel) bool { return !c.LowCutHz.Known && !c.HighCutHz.Known }, ""},
		{"magnitudes differ", edit(t, base, 5, "Mag= 6.1", "Mag= 6.3"), Hints{}, func(c *Channel) bool { return c.Event.Magnitude == Known(6.3) },
			"Mw is 6.3 in line 5 and 6.1 in real 6; the former taken"},
		{"local magnitude alone", real(edit(t, base, 5, "6.1", "   "), 6, null), Hints{},
			func(c *Channel) bool { return c.Event.Magnitude == Known(5.9) && c.Event.MagnitudeType == "ML" }, ""},
		{"magnitude of the text alone", real(base, 6, null), Hints{}, func(c *Channel) bool { return c.Event.Magnitude == Known(6.1) }, ""},
		{"distances differ", edit(t, base, 7, "23.4", "32.4"), Hints{}, func(c *Channel) bool { return c.Distances.EpicentralKM == Known(32.4) },
			"epicentral distance is 32.4 in line 7 and 23.4 in real 17; the former taken"},
		{"name in line 3", edit(t, edit(t, base, 3, "*", base[1]), 2, base[1], "*"), Hints{},
			func(c *Channel) bool { return c.Event.Name == "BRACKEN FORK EARTHQUAKE" }, ""},
		{"day of the integers", edit(t, base, 4, base[3], "*"), Hints{},
			func(c *Channel) bool {
				return c.Event.Origin.IsZero() && c.Event.Date.Equal(time.Date(2041, 3, 18, 0, 0, 0, 0, time.UTC))
			}, ""},
		{"day of the text", integer(edit(t, base, 4, " UTC", ""), 2, "    -32768"), Hints{},
			func(c *Channel) bool { return c.Event.Date.Equal(time.Date(2041, 3, 18, 0, 0, 0, 0, time.UTC)) }, ""},
		{"days contradict each other", integer(base, 3, "        80"), Hints{},
			func(c *Channel) bool { return c.Event.Origin.IsZero() && c.Event.Date.Day() == 21 },
			"event is of 2041-03-18 in line 4 and of 2041-03-21 in the integers; the latter taken"},
		{"no day 366 in 2041", integer(edit(t, base, 4, base[3], "*"), 3, "       366"), Hints{},
			func(c *Channel) bool { return c.Event.Date.IsZero() }, ""},
		{"problem flag", integer(base, 18, "         3"), Hints{}, all, "the header's problem flag is 3: see its comments"},
		{"siting by the name", edit(t, base, 6, "SCHOOL, CA ", "DAM, CREST "), Hints{},
			func(c *Channel) bool { return c.Siting == SitingStructure }, "siting structure is taken from the station's name"},
		{"siting by the sensor's height", real(base, 16, "  1.2000000E+01"), Hints{},
			func(c *Channel) bool { return c.Siting == SitingStructure }, ""},
		{"peak of the text alone", real(real(base, 29, null), 31, null), Hints{}, func(c *Channel) bool { return c.HeaderPeak == Known(1.87) }, ""},
		{"no peak", edit(t, real(real(base, 29, null), 31, null), 7, "pk acc =  -187.00", ""), Hints{},
			func(c *Channel) bool { return !c.HeaderPeak.Known }, ""},
		{"peaks of text and reals differ", edit(t, base, 7, "-187.00", "-190.00"), Hints{}, all, "peak is 190 cm/s2 in line 7 and 187 cm/s2 in the reals"},
		{"samples off both peaks", edit(t, real(base, 31, " -1.9200000E+02"), 7, "-187.00", "-192.00"), Hints{}, all,
			"peak of the samples and of the header differ by more than 2 %"},
		{"length of a comment", edit(t, base, 28, "Invented for tests.", "Record length = 2.02 sec"), Hints{}, all,
			"203 values every 0.005 s do not last the 2.02 s of the comment in line 28"},
		{"unit confirmed by the peak", edit(t, raw, 28, "| Units: cm/s/s", "|"), Hints{}, func(c *Channel) bool { return c.Unit == "cm/s2" }, ""},
		{"unit of a comment for a corrected file", edit(t, base, 28, "Invented for tests.", "units of cm/sec/sec"), Hints{}, all, ""},
		{"units of something else", edit(t, base, 28, "Invented for tests.", "units: V/g"), Hints{}, all, ""},
		{"blank last lines and a form feed", append(slices.Clone(base), "", "\f"), Hints{}, all, ""},
		{"exponents of two digits and D", edit(t, base, 31, " 7.454E+1", "7.454D+01"), Hints{}, all, ""},
		{"agreeing hints", up, Hints{Unit: "gal", StepS: 0.005}, all, "sampling rate 199.99 /s taken for 200 /s"},
	}
	for _, tc := range cases {
		t.Run(tc.name, func(t *testing.T) {
			format, channels, err := parseLines(tc.lines, tc.hints)
			if err != nil || format != "smc" || len(channels) != 1 {
				t.Fatalf("Parse = %s, %d channels, %v", format, len(channels), err)
			}
			c := channels[0]
			if !tc.check(&c) {
				t.Errorf("read %+v %+v", c.Orientation, c.Event)
			}
			if got := strings.Join(c.Warnings, "; "); got != tc.warning {
				t.Errorf("warnings %q, want %q", got, tc.warning)
			}
		})
	}
}

// TestSMCUnknownUnit reads an uncorrected file that states neither unit nor peak.
func TestSMCUnknownUnit(t *testing.T) {
	const null = "  1.7000000E+38"
	lines := edit(t, smcRaw.lines(), 28, "| Units: cm/s/s", "|")
	lines = edit(t, lines, 7, "pk acc =", "        ")
	for _, n := range []int{23, 24} {
		old := lines[n-1]
		kept := old[:45] + null + null
		if n == 24 {
			kept = null + old[15:]
		}
		lines = edit(t, lines, n, old, kept)
	}
	checkRefusals(t, []refusal{
		{"no unit", lines, Hints{}, "case: unit: the file states no unit: give it with --unit or in the catalogue's unit column"},
	})
	_, channels, err := parseLines(lines, Hints{Unit: "mm/s2"})
	if err != nil || channels[0].Unit != "mm/s2" || channels[0].HeaderPeak.Known {
		t.Errorf("%v, %+v", err, channels)
	}
}

func TestSMCRefusals(t *testing.T) {
	base := smcNorth.lines()
	raw := smcRaw.lines()
	tilted := func(integer13 string) []string { return edit(t, base, 13, base[12][40:50], integer13) }
	const turn = " is neither horizontal (up to 15°) nor vertical (from 75°): the three channels of the sensor must be turned into vertical, north and east first"
	noRate := func(lines []string, v string) []string {
		return edit(t, lines, 18, lines[17][15:30], v)
	}
	const null = "  1.7000000E+38"
	checkRefusals(t, []refusal{
		{"truncated at a line end", base[:40], Hints{}, "case:40: samples: truncated: announced 203 values, found 88"},
		{"truncated in a line", append(slices.Clone(base[:40]), base[40][:30]), Hints{}, "case:41: samples: truncated: announced 203 values, found 91"},
		{"truncated in the comments", base[:28], Hints{}, "case:28: comments: announced 2 lines in line 13, found 1"},
		{"truncated in the reals", base[:22], Hints{}, "case:22: real header: truncated: announced 50 values, found 25"},
		{"truncated in the integers", base[:14], Hints{}, "case:14: integer header: truncated: announced 48 values, found 24"},
		{"no series", base[:29], Hints{}, "case:29: samples: truncated: announced 203 values, found 0"},
		{"a line is missing", without(base, 35, 35), Hints{}, "case:54: samples: truncated: announced 203 values, found 195"},
		{"count too small", edit(t, base, 14, "203", "195"), Hints{}, `case:54: samples: text "-2.463E+1 -1.400E+1 -1.094E+0  9.227E+0…" after the 3 values of the line`},
		{"count a line too small", edit(t, base, 14, "203", "200"), Hints{}, "case:55: samples: more values than the 200 announced"},
		{"count too large", edit(t, base, 14, "203", "204"), Hints{}, "case:55: samples: truncated: announced 204 values, found 203"},
		{"count zero", edit(t, base, 14, "203", "  0"), Hints{}, `case:14: integer 17: "0" is not a number of values`},
		{"count null", edit(t, base, 14, "       203", "    -32768"), Hints{}, `case:14: integer 17: "-32768" is not a number of values`},
		{"count overflows", edit(t, base, 14, "       203", "**********"), Hints{}, `case:14: integer 17: "**********" is not a number of values`},
		{"integer with a fraction", edit(t, base, 14, "       203", "     203.5"), Hints{}, "case:14: integer 17: 203.5 is not an integer"},
		{"integer no number", edit(t, base, 12, "2041", "2O41"), Hints{}, `case:12: integer 2: "2O41" is not a number`},
		{"real no number", edit(t, base, 18, "2.0000000E+02", "2.0000000E+O2"), Hints{}, `case:18: real 2: "2.0000000E+O2" is not a number`},
		{"a text line too few", without(base, 10, 10), Hints{}, `case:17: integer 42: "0E+38  2.0" is not a number`},
		{"an integer line too few", without(base, 14, 14), Hints{}, `case:17: integer 42: "0E+38  2.0" is not a number`},
		{"too few comments", edit(t, base, 13, "         2", "         4"), Hints{}, "case:30: comments: announced 4 lines in line 13, found 2"},
		{"figure and words", edit(t, base, 1, "2 C", "1 C"), Hints{}, `case:1: kind: figure 1 stands for uncorrected, the words are "1 CORRECTED ACCELEROGRAM"`},
		{"null among the samples", edit(t, base, 33, base[32][10:20], " 1.700E+38"), Hints{}, "case:33: samples: value 26 is 1.7e+38, which stands for no value"},
		{"not finite", edit(t, base, 33, base[32][10:20], "       NaN"), Hints{}, `case:33: samples: value 26 is "NaN": not a number`},
		{"overflow", edit(t, base, 33, base[32][10:20], "**********"), Hints{}, `case:33: samples: value 26 is "**********": the number did not fit its field`},
		{"blank value", edit(t, base, 33, base[32][10:20], "          "), Hints{}, "case:33: samples: value 26 is blank"},
		{"scaled integers", edit(t, base, 33, base[32][10:20], "      1242"), Hints{}, `case:33: samples: value 26 is "1242": it has no decimal point`},
		{"one exponent without its letter", edit(t, base, 33, base[32][10:20], "   1.242+2"), Hints{}, `case:33: samples: value 26 is "1.242+2": not a number`},
		{"one exponent with its letter", edit(t, smcEast.lines(), 33, smcEast.lines()[32][30:40], " 5.584E+01"), Hints{}, `case:33: samples: value 44 is "5.584E+01": not a number`},
		{"uneven", noRate(raw, null), Hints{StepS: 0.01}, "case:18: dt: uneven uncorrected record: the header states no sampling rate"},
		{"pairs", smcTimed().lines(), Hints{}, "case:28: samples: uneven uncorrected record: times and amplitudes in pairs"},
		{"no rate", noRate(base, null), Hints{}, "case:18: dt: the file states no time step: give it with --dt or in the catalogue's dt_s column"},
		{"rate too high", noRate(base, "  1.0000000E+04"), Hints{}, "case:18: dt: sampling rate 10000 /s is outside 1 to 2000 /s"},
		{"rate negative", noRate(base, " -2.0000000E+02"), Hints{}, "case:18: dt: sampling rate -200 /s is outside 1 to 2000 /s"},
		{"tilted", tilted("        55"), Hints{}, "case:13: integer 13: 55° from straight up: a dip of -35°" + turn},
		{"tilted, just beyond the horizontal", tilted("       106"), Hints{}, "case:13: integer 13: 106° from straight up: a dip of 16°" + turn},
		{"tilted, just beyond the vertical", tilted("        16"), Hints{}, "case:13: integer 13: 16° from straight up: a dip of -74°" + turn},
		{"directions differ", edit(t, base, 6, "= 005", "= 007"), Hints{}, `case:6: component: the text says "007", integer 14 in line 13 says 5 degrees`},
		{"peaks differ", edit(t, base, 7, "-187.00", "-287.00"), Hints{}, "case:7: peak: the text says 287 cm/s2, reals 29 and 31 say 187 cm/s2"},
		{"samples and peak differ", edit(t, edit(t, base, 24, "-1.8700000E+02", "-3.8700000E+02"), 7, "-187.00", "-387.00"), Hints{},
			"case:30: peak: samples reach 1.87 m/s², the header says 3.87 m/s²"},
		{"unit of the comment", edit(t, base, 28, "Invented for tests.", "Units: g"), Hints{}, "case:28: unit: the comment says g, corrected series of this layout are in cm/s2"},
		{"counts", edit(t, raw, 28, "cm/s/s", "counts"), Hints{}, "case:28: unit: raw counts need a scale; convert them to a unit of acceleration first"},
		{"other unit", base, Hints{Unit: "g", UnitFrom: "--unit"}, "case:1: unit: the file says cm/s2, --unit says g"},
		{"other step", base, Hints{StepS: 0.01, StepFrom: "--dt"}, "case:18: dt: the file says 0.005 s, --dt says 0.01 s"},
		{"page appended", append(slices.Clone(base), "<html></html>"), Hints{}, `case:56: samples: text "<html></html>" after the 203 values`},
		{"second file", append(slices.Clone(base), base...), Hints{}, "case:56: samples: more values than the 203 announced"},
	})
}

func TestSMCNotMotion(t *testing.T) {
	for name, want := range map[string]string{
		"velocity.smc": "velocity series, not acceleration",
		"spectra.smc":  "response spectra, not a time series",
	} {
		format, _, err := Parse(t.Context(), "f", readFile(t, filepath.Join(recordsDir("smc"), name)), Hints{})
		if not, ok := errors.AsType[*NotMotionError](err); !ok || not.Reason != want || format != "smc" {
			t.Errorf("%s: Parse = %s, %v, want a NotMotionError %q", name, format, err, want)
		}
	}
	for title, want := range map[string]string{
		"4 DISPLACEMENT": "displacement series, not acceleration", "6 FOURIER AMPLITUDE SPECTRA": "Fourier spectra, not a time series",
	} {
		s := smcNorth
		s.title = title
		_, _, err := parseLines(s.lines(), Hints{})
		if not, ok := errors.AsType[*NotMotionError](err); !ok || not.Reason != want {
			t.Errorf("%s: Parse = %v, want a NotMotionError %q", title, err, want)
		}
	}
}

func TestDamagedSMCFiles(t *testing.T) {
	wantDamaged(t, "smc", map[string]string{
		"damaged-truncated.smc":     "40: samples: truncated: announced 203 values, found 88",
		"damaged-count.smc":         "55: samples: more values than the 200 announced",
		"damaged-unit.smc":          "28: unit: the comment says g, corrected series of this layout are in cm/s2",
		"damaged-page-appended.smc": `56: samples: text "<html><body>503 Service Unavailable</bo…" after the 203 values`,
		"damaged-null.smc":          "33: samples: value 26 is 1.7e+38, which stands for no value",
		"damaged-uneven.smc":        "28: samples: uneven uncorrected record: times and amplitudes in pairs",
	})
}

func TestSMCSniff(t *testing.T) {
	base := smcNorth.lines()
	for name, k := range map[string]struct {
		lines []string
		want  bool
	}{
		"whole":                   {base, true},
		"lower case":              {edit(t, base, 1, "CORRECTED ACCELEROGRAM", "corrected accelerogram"), true},
		"integers damaged":        {edit(t, base, 12, "2041", "2O41"), true},
		"reals damaged":           {edit(t, base, 18, "2.0000000E+02", "2.0000000E+O2"), true},
		"both damaged":            {edit(t, edit(t, base, 12, "2041", "2O41"), 18, "E", "X"), false},
		"no figure":               {edit(t, base, 1, "2 ", ""), false},
		"another figure":          {edit(t, base, 1, "2 ", "7 "), false},
		"no tables":               {base[:11], false},
		"prose after the figures": {edit(t, base, 1, "2 CORRECTED ACCELEROGRAM", "2 corrections"), false},
	} {
		content, _ := newContent(t.Context(), []byte(strings.Join(k.lines, "\n")))
		if got := (smc{}).Sniff(content); (got != "") != k.want {
			t.Errorf("%s: Sniff = %q, want accepted %v", name, got, k.want)
		}
	}
}

func TestBearing(t *testing.T) {
	for s, want := range map[string]float64{
		"N00E": 0, "N76E": 76, "S14E": 166, "S76W": 256, "N14W": 346, "S00E": 180, "N90W": 270, "s 14 e": 166, "N12.5E": 12.5, "N00W": 0,
	} {
		if got, ok := bearing(s); got != want || !ok {
			t.Errorf("bearing(%q) = %g, %v, want %g", s, got, ok, want)
		}
	}
	for _, s := range []string{"", "N", "N91E", "E10N", "N10", "166", "N100E", "N-5E"} {
		if got, ok := bearing(s); ok {
			t.Errorf("bearing(%q) = %g, want none", s, got)
		}
	}
}

func TestParseBareExponent(t *testing.T) {
	for s, want := range map[string]float64{"1.2345+0": 1.2345, "-1.2345-1": -0.12345, ".5+2": 50, "0.0+0": 0, "1.5-12": 1.5e-12} {
		if got, ok := parseBareExponent([]byte(s)); got != want || !ok {
			t.Errorf("parseBareExponent(%q) = %g, %v, want %g", s, got, ok, want)
		}
	}
	for _, s := range []string{"", "1", "1.5", "-1.5", "1.5E+2", "15+2", "1.5+", "1.5+123", "1.5+2.5", "+-1", "1.5-2-3"} {
		if got, ok := parseBareExponent([]byte(s)); ok {
			t.Errorf("parseBareExponent(%q) = %g, want none", s, got)
		}
	}
}

func FuzzSMC(f *testing.F) {
	addFixtures(f, "smc")
	f.Add([]byte(strings.Join(edit(f, smcNorth.lines(), 14, "       203", "2000000000"), "\n")))
	f.Fuzz(func(t *testing.T, data []byte) { fuzzFormat(t, smc{}, data) })
}
