package ingest

import (
	"errors"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"
)

func readV2Fixture(t *testing.T, name string) []Channel {
	t.Helper()
	path := filepath.Join(recordsDir("californiav2"), name)
	format, channels, err := Parse(t.Context(), path, readFile(t, path), Hints{})
	if err != nil || format != "california-v2" {
		t.Fatalf("Parse(%s) = %s, %v", path, format, err)
	}
	return channels
}

// wantSeries checks the samples against what the fixture prints, in the unit of
// the file.
func wantSeries(t *testing.T, c *Channel, x []float64, form string) {
	t.Helper()
	want := asPrinted(t, x, form)
	for i := range want {
		want[i] = float64(want[i]*c.UnitMPS2) + 0 // no negative zeros
	}
	if !equalSeries(c.Acceleration, want) {
		t.Errorf("samples from line %d differ from those printed", c.Line)
	}
}

func TestV2Old(t *testing.T) {
	channels := readV2Fixture(t, "old-uppercase.v2")
	if len(channels) != 1 {
		t.Fatalf("%d channels, want 1", len(channels))
	}
	c := channels[0]
	wantSeries(t, &c, v2Old.x, v2Old.form)
	if c.StepS != 0.02 || c.Unit != "cm/s2" || c.UnitMPS2 != 0.01 || c.Line != 47 || c.HeaderPeak != Known(160*0.01) {
		t.Errorf("dt %g s, unit %s, line %d, peak %v", c.StepS, c.Unit, c.Line, c.HeaderPeak)
	}
	e := c.Event
	if e.Name != "LARKSPUR HOLLOW EARTHQUAKE" || e.Origin.Format(time.RFC3339Nano) != "1984-03-14T13:06:07.8Z" || !e.Date.IsZero() {
		t.Errorf("event = %+v", e)
	}
	if e.Latitude != Known(39.25) || e.Longitude != Known(-123.5) || e.DepthKM != Known(11) || e.Magnitude != Known(5.6) || e.MagnitudeType != "Mw" {
		t.Errorf("event = %+v, want the moment magnitude before the local one", e)
	}
	want := Station{Network: "CE", Code: "99321", Name: "FIDDLERS GAP - ROUTE 7 BRIDGE", Latitude: Known(39.1), Longitude: Known(-123.25)}
	if c.Station != want {
		t.Errorf("station = %+v, want %+v", c.Station, want)
	}
	if c.Start.Format(time.RFC3339Nano) != "1984-03-14T13:06:11.2Z" {
		t.Errorf("start = %v", c.Start)
	}
	if c.ChannelCode != "12" || c.Instrument != "FREE FIELD" || c.Siting != SitingFreeField {
		t.Errorf("channel %s at %q: %s", c.ChannelCode, c.Instrument, c.Siting)
	}
	if o := c.Orientation; o.Axis != AxisHorizontal || o.AzimuthDeg != Known(270) || o.Label != "270 DEG" {
		t.Errorf("orientation = %+v", o)
	}
	if c.LowCutHz != Known(0.4) || c.HighCutHz != Known(23) || c.Processing != ProcessingCorrected || len(c.Warnings) != 0 {
		t.Errorf("corners %v, %v, %s, warnings %q", c.LowCutHz, c.HighCutHz, c.Processing, c.Warnings)
	}
}

func TestV2SeveralChannels(t *testing.T) {
	channels := readV2Fixture(t, "three-channels.v2")
	if len(channels) != 3 {
		t.Fatalf("%d channels, want 3", len(channels))
	}
	for i, want := range []Orientation{
		{Axis: AxisHorizontal, AzimuthDeg: Known(20), Label: "20 Deg"},
		{Axis: AxisVertical, Label: "Up"},
		{Axis: AxisHorizontal, AzimuthDeg: Known(0), Label: "360 Deg"},
	} {
		c := channels[i]
		wantSeries(t, &c, v2Three[i].x, v2Three[i].form)
		if c.Orientation != want || len(c.Warnings) != 0 {
			t.Errorf("channel %d: orientation = %+v, want %+v; warnings %q", i+1, c.Orientation, want, c.Warnings)
		}
	}
}

func TestV2Structure(t *testing.T) {
	c := readV2Fixture(t, "bridge-column.v2")[0]
	wantSeries(t, &c, v2Bridge.x, v2Bridge.form)
	if c.Siting != SitingStructure || c.ChannelCode != "9" || c.Orientation != (Orientation{Axis: AxisHorizontal, Label: "Long", Order: 1}) {
		t.Errorf("%s, channel %s, %+v", c.Siting, c.ChannelCode, c.Orientation)
	}
	if c.Event.Name != "" || !c.Event.Origin.IsZero() || !c.Event.Date.IsZero() || c.Event.Magnitude.Known {
		t.Errorf("event = %+v, want nothing known", c.Event)
	}
	if c.Start.Format(time.RFC3339Nano) != "2027-06-06T11:05:06.5Z" {
		t.Errorf("start = %v", c.Start)
	}
}

// TestV2Variants edits one line of a good file and looks at what changes.
func TestV2Variants(t *testing.T) {
	base := fixtureLines(t, "californiav2", "bridge-column.v2")
	old := fixtureLines(t, "californiav2", "old-uppercase.v2")
	cases := []struct {
		name    string
		lines   []string
		check   func(*Channel) bool
		warning string // part of the only warning, "" for none
	}{
		{"minute only, line 3 has the seconds", edit(t, base, 5, "11:05:06.5 UTC (GPS)", "11:05 UTC (*LoQ*)"),
			func(c *Channel) bool { return c.Start.Format(time.RFC3339Nano) == "2027-06-06T11:05:06.5Z" }, ""},
		{"no start time", edit(t, base, 5, "Start time:  6/06/27, 11:05:06.5 UTC (GPS)", ""),
			func(c *Channel) bool { return c.Start.Format(time.RFC3339Nano) == "2027-06-06T11:05:06.5Z" }, ""},
		{"daylight time in line 5", edit(t, old, 5, "13:06:11.2 GMT", "06:06:11.2 PDT"),
			func(c *Channel) bool { return c.Start.Format(time.RFC3339Nano) == "1984-03-14T13:06:11.2Z" }, ""},
		{"no zone", edit(t, old, 5, " GMT", "    "),
			func(c *Channel) bool { return c.Start.IsZero() }, "no known date and zone"},
		{"month 13", edit(t, old, 5, "03/14/84", "13/14/84"),
			func(c *Channel) bool { return c.Start.IsZero() }, "no known date and zone"},
		{"day in figures", edit(t, edit(t, old, 4, "(ORIGIN(INV): 03/14/84, 13:06:07.8 GMT)", ""), 4, "MARCH 14, 1984", "3/14/84       "),
			func(c *Channel) bool { return c.Event.Date.Equal(time.Date(1984, 3, 14, 0, 0, 0, 0, time.UTC)) }, ""},
		{"no counts in the text", edit(t, base, 16, "96 points of", "          of"), func(c *Channel) bool { return len(c.Acceleration) == 96 }, ""},
		{"no interval in the text", edit(t, base, 17, "intervals of", "intervals"), func(c *Channel) bool { return c.StepS == 0.01 }, ""},
		{"origin to be determined leaves the day", edit(t, old, 4, "(ORIGIN(INV): 03/14/84, 13:06:07.8 GMT)", "(ORIGIN: TO BE DETERMINED)"),
			func(c *Channel) bool {
				return c.Event.Origin.IsZero() && c.Event.Date.Equal(time.Date(1984, 3, 14, 0, 0, 0, 0, time.UTC))
			}, ""},
		{"text and integer direction differ", edit(t, edit(t, base, 8, "Long", " 180"), 27, "800", "182"),
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(182) }, "182 taken"},
		{"north as 0", edit(t, edit(t, base, 8, "Long   ", "  0 Deg"), 27, "800", "  0"),
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(0) }, ""},
		{"integer 0 beside Up is no north", edit(t, edit(t, base, 8, "Long", "Up  "), 27, "800", "  0"),
			func(c *Channel) bool { return c.Orientation.Axis == AxisVertical }, ""},
		{"unknown direction code", edit(t, edit(t, base, 8, "Long", "Tran"), 27, "800", "777"),
			func(c *Channel) bool { return c.Orientation.Order == 2 && !c.Orientation.AzimuthDeg.Known }, "777 is not known"},
		{"transverse", edit(t, edit(t, base, 8, "Long", "Tran"), 27, "800", "900"),
			func(c *Channel) bool { return c.Orientation.Order == 2 }, ""},
		{"corners not stated", edit(t, edit(t, base, 41, "   .100000", "-999.00000"), 42, " 50.000000", "   .000000"),
			func(c *Channel) bool { return !c.LowCutHz.Known && !c.HighCutHz.Known }, ""},
		{"corners exchanged", edit(t, edit(t, base, 41, "   .100000", " 50.000000"), 42, " 50.000000", "   .100000"),
			func(c *Channel) bool { return !c.LowCutHz.Known && !c.HighCutHz.Known }, "filter corners"},
		{"peak not stated", edit(t, base, 41, " 25.000000", "-999.00000"),
			func(c *Channel) bool { return !c.HeaderPeak.Known }, ""},
		{"peak 1.9 % off", edit(t, base, 41, " 25.000000", " 25.480000"),
			func(c *Channel) bool { return c.HeaderPeak.Value > 0.254 }, ""},
		{"peak 2.3 % off", edit(t, base, 41, " 25.000000", " 25.600000"),
			func(c *Channel) bool { return c.HeaderPeak.Value > 0.255 }, "more than 2 %"},
		{"an unused integer overflows", edit(t, base, 26, "    7    0", "    7*****"),
			func(c *Channel) bool { return len(c.Acceleration) == 96 }, "fields without a number in the integer header: 1, the first at position 2 in line 26"},
		{"counts of the header overflow", edit(t, edit(t, base, 29, "   96", "*****"), 29, "   96", " -999"),
			func(c *Channel) bool { return len(c.Acceleration) == 96 }, "position 53 in line 29"},
		{"a header line is cut", edit(t, base, 41, base[40][40:], ""),
			func(c *Channel) bool { return !c.LowCutHz.Known && c.HighCutHz == Known(50) }, "fields without a number in the real header: 4"},
		{"no format in the count line", edit(t, base, 46, "(8f10.6)", ""),
			func(c *Channel) bool { return len(c.Acceleration) == 96 }, ""},
		{"step of 1/120 s, rounded in the text", edit(t, edit(t, edit(t, base, 46, ".010", ".008"), 17, ".010", ".008"), 40, "  .010000", "  .008333"),
			func(c *Channel) bool { return c.StepS == 0.008333 }, ""},
		{"a station name in Latin-1", edit(t, base, 7, "Gap", "Gu\xe9"),
			func(c *Channel) bool { return c.Station.Name == "Fiddlers Gué - Route 7 Bridge" }, ""},
		{"a station name of full width", edit(t, base, 7, "Route 7 Bridge             ", "Route 7 Bridge on the Marsh"),
			func(c *Channel) bool { return c.Station.Name == "Fiddlers Gap - Route 7 Bridge on the Marsh" }, ""},
		{"station number differs", edit(t, base, 6, "99322", "99323"),
			func(c *Channel) bool { return c.Station.Code == "99322" }, "99322 taken"},
		{"no velocity and displacement", without(base, 59, 84), func(c *Channel) bool { return len(c.Acceleration) == 96 }, ""},
		{"no end line", without(base, len(base), len(base)), func(c *Channel) bool { return len(c.Acceleration) == 96 }, "no end line"},
		{"blank lines at the end", append(slices.Clone(base), "", "  "), func(c *Channel) bool { return len(c.Acceleration) == 96 }, ""},
		{"blank first line", append([]string{""}, base...), func(c *Channel) bool { return c.Line == 48 }, ""},
		{"carriage returns alone", strings.Split(strings.Join(base, "\r"), "\n"), func(c *Channel) bool { return c.Line == 47 }, ""},
	}
	for _, tc := range cases {
		t.Run(tc.name, func(t *testing.T) {
			_, channels, err := parseLines(tc.lines, Hints{})
			if err != nil {
				t.Fatal(err)
			}
			c := channels[0]
			if !tc.check(&c) {
				t.Errorf("read %+v", c)
			}
			if got := strings.Join(c.Warnings, "; "); tc.warning == "" && got != "" || !strings.Contains(got, tc.warning) || len(c.Warnings) > 1 {
				t.Errorf("warnings %q, want %q", c.Warnings, tc.warning)
			}
		})
	}
}

func TestV2Refusals(t *testing.T) {
	base := fixtureLines(t, "californiav2", "bridge-column.v2")
	cases := []struct {
		name  string
		lines []string
		hints Hints
		want  string
	}{
		{"truncated at a line end", base[:52], Hints{}, "case:52: accel: truncated: announced 96 values, found 48"},
		{"truncated in a line", append(slices.Clone(base[:52]), base[52][:30]), Hints{}, "case:53: accel: truncated: announced 96 values, found 51"},
		{"end line too early", append(slices.Clone(base[:52]), base[len(base)-1]), Hints{}, "case:53: accel: truncated: announced 96 values, found 48"},
		{"a line is missing", without(base, 50, 50), Hints{}, "case:58: accel: truncated: announced 96 values, found 88"},
		{"truncated headers", base[:20], Hints{}, "case:20: text header: truncated: announced 25 lines, found 20"},
		{"truncated in the integers", base[:28], Hints{}, "case:28: integer header: truncated: announced 100 values, found 48"},
		{"truncated in the reals", base[:40], Hints{}, "case:40: real header: truncated: announced 100 values, found 64"},
		{"truncated velocity", base[:65], Hints{}, "case:65: veloc: truncated: announced 96 values, found 48"},
		{"no number", edit(t, base, 48, "-20.745161", "-20.7x5161"), Hints{}, `case:48: accel: value 10 is "-20.7x5161": not a number`},
		{"overflow", edit(t, base, 51, "-10.051215", "**********"), Hints{}, `case:51: accel: value 36 is "**********": the number did not fit its field`},
		{"not finite", edit(t, base, 48, "-20.745161", "       NaN"), Hints{}, `case:48: accel: value 10 is "NaN": not a number`},
		{"blank value", edit(t, base, 48, "-20.745161", "          "), Hints{}, "case:48: accel: value 10 is blank"},
		{"value without point", edit(t, base, 48, "-20.745161", "-207451610"), Hints{}, `case:48: accel: value 10 is "-207451610": it has no decimal point`},
		{"short line", edit(t, base, 48, "  3.801763 12.792013", ""), Hints{}, "case:48: accel: line holds 6 values, expected 8"},
		{"long line", edit(t, base, 48, "12.792013", "12.792013  1.0"), Hints{}, `case:48: accel: text "1.0" after the 8 values of the line`},
		{"short line of velocity", edit(t, base, 62, base[61][60:], ""), Hints{}, "case:62: veloc: line holds 6 values, expected 8"},
		{"too many values", slices.Insert(slices.Clone(base), 58, "  1.000000"), Hints{}, "case:59: more values than the 96 announced"},
		{"too many values in the last block", slices.Insert(slices.Clone(base), 84, "  1.000000"), Hints{}, "case:85: more values than the 96 announced"},
		{"text after a block", slices.Insert(slices.Clone(base), 58, "velocity follows"), Hints{}, `case:59: expected the count line of a block or the end line, found "velocity follows"`},
		{"shifted line", edit(t, base, 48, "-17.436512", " -17.436512"), Hints{}, `case:48: accel: value 10 is "2-20.74516": not a number`},
		{"dt zero", edit(t, base, 46, ".010 sec", ".000 sec"), Hints{}, "case:46: dt: time step 0 s is not positive"},
		{"dt negative", edit(t, base, 46, ".010 sec", "-.01 sec"), Hints{}, "case:46: dt: time step -0.01 s is not positive"},
		{"dt no number", edit(t, base, 46, ".010 sec", "**** sec"), Hints{}, `case:46: dt: "****" is not a number`},
		{"dt differs from the reals", edit(t, base, 40, "  .010000", "  .020000"), Hints{}, "case:46: dt: time step 0.01 s, but line 40 says 0.02 s"},
		{"dt differs from the text", edit(t, base, 17, ".010", ".005"), Hints{}, "case:46: dt: time step 0.01 s, but line 17 says 0.005 s"},
		{"dt differs from the hint", base, Hints{StepS: 0.02, StepFrom: "--dt"}, "case:40: dt: the file says 0.01 s, --dt says 0.02 s"},
		{"count differs from integer 53", edit(t, base, 29, "   96", "   97"), Hints{}, "case:46: accel count: 96 values announced, integer 53 in line 29 says 97"},
		{"count differs from the text", edit(t, base, 16, "96", "95"), Hints{}, "case:46: accel count: 96 values announced, line 16 says 95"},
		{"count too large", edit(t, base, 46, "    96", "9999999999"), Hints{}, `case:46: accel count: "9999999999" is not a count of values`},
		{"count zero", edit(t, base, 46, "    96", "     0"), Hints{}, "case:46: accel count: 0 values announced"},
		{"count of two thousand million", edit(t, edit(t, edit(t, edit(t, base, 46, "96", "2000000000"), 29, "   96", "    0"), 29, "   96", "    0"), 16, "96", "  "),
			Hints{}, "case:59: accel: truncated: announced 2000000000 values, found 96"},
		{"unit is g", edit(t, base, 46, "cm/sec2", "g"), Hints{}, "case:46: unit: acceleration is in g; files of this layout are in cm/s2"},
		{"unit is a velocity", edit(t, base, 46, "cm/sec2", "cm/sec"), Hints{}, `case:46: unit: "cm/sec" is a unit of velocity, not of acceleration`},
		{"unit unknown", edit(t, base, 46, "cm/sec2", "furlongs"), Hints{}, `case:46: unit: unknown unit "furlongs"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`},
		{"unit missing", edit(t, base, 46, "in cm/sec2.", ""), Hints{}, "case:46: unit: unit is empty"},
		{"unit differs from the hint", base, Hints{Unit: "g", UnitFrom: "--unit"}, "case:46: unit: the file says cm/s2, --unit says g"},
		{"format unreadable", edit(t, base, 46, "(8f10.6)", "(8f99.6)"), Hints{}, `case:46: accel count: format "(8f99.6)" is outside what a line can hold`},
		{"header peak", edit(t, base, 41, " 25.000000", " 35.000000"), Hints{}, "case:47: peak: samples reach 0.25 m/s², the header says 0.35 m/s²"},
		{"no acceleration", without(base, 46, 58), Hints{}, "case:72: accel: the channel has no block of acceleration"},
		{"two accelerations", slices.Insert(slices.Clone(base), 58, base[45:58]...), Hints{}, "case:59: accel: second block of acceleration in one channel"},
		{"a text line too few", without(base, 23, 23), Hints{}, "case:25: text header: integers after fewer than 25 lines of text"},
		{"a text line too many", slices.Insert(slices.Clone(base), 8, "wrapped"), Hints{}, `case:26: integer header: expected 16 integers of 5 characters after 25 lines of text, found " Long"`},
		{"no integers", edit(t, base, 26, "    7", "seven"), Hints{}, `case:26: integer header: expected 16 integers of 5 characters after 25 lines of text, found "seven    0    0    0    0    0    0    …"`},
		{"real no number", edit(t, base, 41, " 25.000000", " 25.0 0000"), Hints{}, `case:41: real 66: "25.0 0000" is not a number`},
		{"text after the end", append(slices.Clone(base), "the end"), Hints{}, `case:86: text "the end" after the end of a channel, expected the heading of another`},
	}
	for _, tc := range cases {
		t.Run(tc.name, func(t *testing.T) {
			wantRefusal(t, tc.lines, tc.hints, "california-v2", tc.want)
		})
	}
}

// wantRefusal checks that the lines are refused in exactly these words.
func wantRefusal(t *testing.T, lines []string, hints Hints, format, want string) {
	t.Helper()
	got, channels, err := parseLines(lines, hints)
	if _, ok := errors.AsType[*ParseError](err); !ok {
		t.Fatalf("Parse = %d channels, %v, want a *ParseError", len(channels), err)
	}
	if err.Error() != want || got != format {
		t.Errorf("%s:\n got %s\nwant %s", got, err, want)
	}
}

// TestDamagedV2Files reads the files that are named for their damage.
func TestDamagedV2Files(t *testing.T) {
	wantDamaged(t, "californiav2", map[string]string{
		"damaged-truncated.v2": "52: accel: truncated: announced 96 values, found 48",
		"damaged-overflow.v2":  `50: accel: value 26 is "**********": the number did not fit its field`,
		"damaged-step.v2":      "46: dt: time step 0.02 s, but line 40 says 0.01 s",
	})
}

// wantDamaged checks every file of the folder whose name begins with "damaged".
func wantDamaged(t *testing.T, format string, want map[string]string) {
	t.Helper()
	entries, err := os.ReadDir(recordsDir(format))
	if err != nil {
		t.Fatal(err)
	}
	seen := 0
	for _, e := range entries {
		if !strings.HasPrefix(e.Name(), "damaged") {
			continue
		}
		seen++
		path := filepath.Join(recordsDir(format), e.Name())
		if _, _, err := Parse(t.Context(), "f", readFile(t, path), Hints{}); err == nil || err.Error() != "f:"+want[e.Name()] {
			t.Errorf("Parse(%s) = %v, want %s", path, err, want[e.Name()])
		}
	}
	if seen != len(want) {
		t.Errorf("%d damaged files, want %d", seen, len(want))
	}
}

func TestV2SpectraAreNotMotion(t *testing.T) {
	_, _, err := Parse(t.Context(), "f", readFile(t, filepath.Join(recordsDir("californiav2"), "spectra.v3")), Hints{})
	if not, ok := errors.AsType[*NotMotionError](err); !ok || not.Reason != "response and Fourier spectra, not a time series" {
		t.Errorf("Parse = %v, want a NotMotionError", err)
	}
}

func TestV2Sniff(t *testing.T) {
	for first, want := range map[string]bool{
		"Corrected accelerogram   99321": true, "CORRECTED ACCELEROGRAM": true, "  corrected accelerogram": true,
		"Uncorrected accelerogram": false, "Response and Fourier amplitude spectra (80 periods": true,
		"Corrected accelerogram\nSite QXYZ":                            false,
		"Corrected acceleration    (Format v01.20 with 13 text lines)": false,
		"Corrected accelerogram (Format v01.20 with 13 text lines)":    false,
		"2 CORRECTED ACCELEROGRAM":                                     false, "time,acc": false, "Uncorrected": false,
	} {
		text, err := NewText([]byte(first + "\nsecond\n"))
		if err != nil {
			t.Fatal(err)
		}
		if got := (californiaV2{}).Sniff(&Content{Text: text}); (got != "") != want {
			t.Errorf("Sniff(%q) = %q, want accepted %v", first, got, want)
		}
	}
}
