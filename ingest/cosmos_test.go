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

func readCosmosFixture(t *testing.T, name string) []Channel {
	t.Helper()
	path := filepath.Join(recordsDir("cosmos"), name)
	format, channels, err := Parse(t.Context(), path, readFile(t, path), Hints{})
	if err != nil || format != "cosmos" {
		t.Fatalf("Parse(%s) = %s, %v", path, format, err)
	}
	return channels
}

func TestCosmosCorrected(t *testing.T) {
	channels := readCosmosFixture(t, "corrected.v2c")
	if len(channels) != 1 {
		t.Fatalf("%d channels, want 1", len(channels))
	}
	c := channels[0]
	wantSeries(t, &c, cosmosBase.x, cosmosBase.form)
	if c.StepS != 0.01 || c.Unit != "cm/s2" || c.UnitMPS2 != 0.01 || c.Line != 50 || c.HeaderPeak != Known(-213.4*0.01) {
		t.Errorf("dt %g s, unit %s, line %d, peak %v", c.StepS, c.Unit, c.Line, c.HeaderPeak)
	}
	e := c.Event
	if e.Name != "Mallow Creek Earthquake" || e.Origin.Format(time.RFC3339Nano) != "2019-03-04T05:15:20.3Z" ||
		e.Latitude != Known(36.4) || e.Longitude != Known(-121.1) || e.DepthKM != Known(9) || e.Magnitude != Known(5) || e.MagnitudeType != "Mw" {
		t.Errorf("event = %+v", e)
	}
	want := Station{Network: "XQ", Code: "T4711", Name: "Thistle Bend - Weir Road School", Latitude: Known(36.5), Longitude: Known(-121.25),
		ElevationM: Known(212), Vs30: Known(340)}
	if c.Station != want {
		t.Errorf("station = %+v, want %+v", c.Station, want)
	}
	// The sphere through both points of 6371 km gives 17.43 km.
	if want := (Distances{EpicentralKM: Known(17.43)}); c.Distances != want || c.DistanceKM.Known {
		t.Errorf("distances = %+v and %+v of unknown kind, want %+v alone", c.Distances, c.DistanceKM, want)
	}
	if c.Start.Format(time.RFC3339Nano) != "2019-03-04T05:15:22.25Z" {
		t.Errorf("start = %v", c.Start)
	}
	if c.ChannelCode != "1" || c.Instrument != "Free field" || c.Siting != SitingFreeField ||
		c.Orientation != (Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(0), Label: "360 deg"}) {
		t.Errorf("channel %s at %q, %s, %+v", c.ChannelCode, c.Instrument, c.Siting, c.Orientation)
	}
	if c.LowCutHz != Known(0.12) || c.HighCutHz != Known(45) || c.Processing != ProcessingCorrected {
		t.Errorf("corners %v, %v, %s", c.LowCutHz, c.HighCutHz, c.Processing)
	}
	if !slices.Equal(c.Warnings, []string{"sections of velocity and displacement in the file were passed over"}) {
		t.Errorf("warnings %q", c.Warnings)
	}
}

func TestCosmosTwoChannels(t *testing.T) {
	channels := readCosmosFixture(t, "two-channels.v2c")
	if len(channels) != 2 {
		t.Fatalf("%d channels, want 2", len(channels))
	}
	wantSeries(t, &channels[0], cosmosBase.x, cosmosBase.form)
	vertical := cosmosVertical()
	wantSeries(t, &channels[1], vertical.x, vertical.form)
	if c := channels[1]; c.Orientation != (Orientation{Axis: AxisVertical, Label: "Up"}) || c.ChannelCode != "2" || len(c.Warnings) != 0 {
		t.Errorf("second channel %s, %+v, warnings %q", c.ChannelCode, c.Orientation, c.Warnings)
	}
}

func TestCosmosUncorrected(t *testing.T) {
	c := readCosmosFixture(t, "uncorrected.v1c")[0]
	s := cosmosUncorrected()
	wantSeries(t, &c, s.x, s.form)
	if c.Unit != "g" || c.UnitMPS2 != StandardGravity || c.Processing != ProcessingRaw || c.LowCutHz.Known || c.Siting != SitingStructure {
		t.Errorf("%s, %s, low cut %v, %s", c.Unit, c.Processing, c.LowCutHz, c.Siting)
	}
}

// TestCosmosRawCounts checks the scale by hand: 2.5 µV a count over 1.25 V/g is
// 2·10⁻⁶ g a count, so that a swing of 81920 counts is 0.16384 g.
func TestCosmosRawCounts(t *testing.T) {
	c := readCosmosFixture(t, "raw-counts.v0")[0]
	if c.Unit != "counts" || math.Abs(c.UnitMPS2-2e-6*9.80665) > 1e-20 || c.Processing != ProcessingMeanRemoved || c.HeaderPeak.Known {
		t.Fatalf("%s of %g m/s², %s, peak %v", c.Unit, c.UnitMPS2, c.Processing, c.HeaderPeak)
	}
	counts := asPrinted(t, cosmosRaw().x, "%8.0f")
	mean := 0.0
	for _, v := range counts {
		mean += v / float64(len(counts))
	}
	sum := 0.0
	for i, v := range counts {
		want := (v - mean) * 2e-6 * 9.80665
		if math.Abs(c.Acceleration[i]-want) > 1e-12 {
			t.Fatalf("sample %d = %g m/s², want %g", i, c.Acceleration[i], want)
		}
		sum += c.Acceleration[i]
	}
	if math.Abs(sum) > 1e-12 {
		t.Errorf("the samples sum to %g m/s², want 0", sum)
	}
	if c.Orientation != (Orientation{Axis: AxisHorizontal, Label: "Long", Order: 1}) || c.Siting != SitingUnknown {
		t.Errorf("%+v, %s", c.Orientation, c.Siting)
	}
}

// TestCosmosOldVersion reads a file of version 1.00, whose numeric headers hold
// other things in the same places.
func TestCosmosOldVersion(t *testing.T) {
	c := readCosmosFixture(t, "version-1-00.v2c")[0]
	wantSeries(t, &c, cosmosBase.x, cosmosBase.form)
	if c.StepS != 0.01 || c.HeaderPeak.Known || c.Orientation.AzimuthDeg != Known(0) || c.Processing != ProcessingCorrected ||
		c.Station.Latitude != Known(36.5) || c.Station.Code != "T4711" || c.LowCutHz != Known(0.12) || len(c.Warnings) != 0 {
		t.Errorf("read %+v %+v, dt %g s, warnings %q", c.Station, c.Orientation, c.StepS, c.Warnings)
	}
}

// Lines of the section that cosmosBase makes.
const (
	lineInts  = 15 // integers 1 to 10
	lineReals = 26 // reals 1 to 5
	lineData  = 49
)

// blankParted returns a section whose values stand in no columns.
func blankParted(lines []string) []string {
	out := slices.Clone(lines)
	for i := lineData; i < len(out)-1; i++ {
		out[i] = strings.Join(strings.Fields(out[i]), " ")
	}
	return out
}

func TestCosmosVariants(t *testing.T) {
	base := cosmosBase.lines()
	raw := cosmosRaw().lines()
	code := func(n string) []string { return edit(t, edit(t, base, 9, "360 deg", ""), lineInts+5, "     360", n) }
	free := blankParted(base)
	cases := []struct {
		name    string
		lines   []string
		check   func(*Channel) bool
		warning string
	}{
		{"code 700 is longitudinal", code("     700"), func(c *Channel) bool { return c.Orientation.Order == 1 }, ""},
		{"code 701 is transverse", code("     701"), func(c *Channel) bool { return c.Orientation.Order == 2 }, ""},
		{"code 401 is vertical", code("     401"), func(c *Channel) bool { return c.Orientation.Axis == AxisVertical }, ""},
		{"code 1030 is from a local reference", code("    1030"),
			func(c *Channel) bool { return c.Orientation == Orientation{Axis: AxisHorizontal, Label: "code 1030"} }, ""},
		{"code 999 is unknown", code("     999"),
			func(c *Channel) bool { return c.Orientation == Orientation{Label: "code 999"} }, "999 is not known"},
		{"code null, direction from the text", edit(t, base, lineInts+5, "     360", "    -999"),
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(0) }, ""},
		{"code against the text", edit(t, base, lineInts+5, "     360", "      90"),
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(90) }, "90 taken"},
		{"no distance", edit(t, base, lineReals+3, "      17.430000", "    -999.000000"), func(c *Channel) bool { return c.Distances == Distances{} }, ""},
		{"distance left at zero", edit(t, base, lineReals+3, "      17.430000", "       0.000000"), func(c *Channel) bool { return c.Distances == Distances{} }, ""},
		{"other null", edit(t, edit(t, base, 13, "-999, -999.0", "-32768, 1.0E30"), lineInts+4, "      63", "  -32768"),
			func(c *Channel) bool { return c.StepS == 0.01 }, ""},
		{"dt from the raw interval", edit(t, base, lineReals+12, "      10.000000", "    -999.000000"),
			func(c *Channel) bool { return c.StepS == 0.01 }, ""},
		{"dt of the data line", edit(t, edit(t, edit(t, base, lineReals+12, "      10.000000", "    -999.000000"), lineReals+6, "       0.010000", "    -999.000000"),
			lineData, "approx    2 secs", "at 100 pts/sec"), func(c *Channel) bool { return c.StepS == 0.01 }, ""},
		{"dt of the length", edit(t, edit(t, base, lineReals+12, "      10.000000", "    -999.000000"), lineReals+6, "       0.010000", "    -999.000000"),
			func(c *Channel) bool { return c.StepS == 0.01 }, "taken from the length"},
		{"raw interval of a corrected series", edit(t, base, lineReals+6, "       0.010000", "       0.005000"),
			func(c *Channel) bool { return c.StepS == 0.01 }, "raw record was sampled every 0.005 s"},
		{"corners exchanged in the reals", edit(t, edit(t, base, lineReals+10, "       0.120000", "      45.000000"), lineReals+11, "      45.000000", "       0.120000"),
			func(c *Channel) bool { return c.LowCutHz == Known(0.12) && c.HighCutHz == Known(45) }, ""},
		{"corners from the text", edit(t, base, lineReals+10, "       0.120000", "    -999.000000"),
			func(c *Channel) bool { return c.LowCutHz == Known(0.12) && c.HighCutHz == Known(45) }, ""},
		{"corners differ", edit(t, base, lineReals+10, "       0.120000", "       0.500000"),
			func(c *Channel) bool { return c.LowCutHz == Known(0.12) }, "the text taken"},
		{"corners only in the reals", edit(t, base, 12, "Hz", "--"),
			func(c *Channel) bool { return c.LowCutHz == Known(0.12) && c.HighCutHz == Known(45) }, ""},
		{"local stamp", edit(t, edit(t, base, lineInts+4, "       3       4       5      15", "       3       3      21      15"), lineReals+6, "    -999.000000", "    -999.000000"),
			func(c *Channel) bool { return c.Start.Format(time.RFC3339Nano) == "2019-03-04T05:15:22.25Z" }, "the text taken"},
		{"local stamp with its offset", edit(t, edit(t, base, lineInts+4, "       3       4       5      15", "       3       3      21      15"), lineReals+6, "    -999.000000    -999.000000", "    -999.000000      -8.000000"),
			func(c *Channel) bool { return c.Start.Format(time.RFC3339Nano) == "2019-03-04T05:15:22.25Z" }, ""},
		{"offset beside a stamp that is UTC", edit(t, base, lineReals+6, "    -999.000000    -999.000000", "    -999.000000      -8.000000"),
			func(c *Channel) bool { return c.Start.Format(time.RFC3339Nano) == "2019-03-04T05:15:22.25Z" }, ""},
		{"offset alone decides", edit(t, edit(t, base, 8, " UTC", "    "), lineReals+6, "    -999.000000    -999.000000", "    -999.000000      -8.000000"),
			func(c *Channel) bool { return c.Start.Format(time.RFC3339Nano) == "2019-03-04T13:15:22.25Z" }, "-8 h from UTC"},
		{"stamp in the text only", edit(t, base, lineInts+3, "    2019", "    -999"),
			func(c *Channel) bool { return c.Start.Format(time.RFC3339Nano) == "2019-03-04T05:15:22.25Z" }, ""},
		{"no end line", base[:len(base)-1], func(c *Channel) bool { return len(c.Acceleration) == 150 }, "no end line"},
		{"checksum after the end", edit(t, base, len(base), "acceleration", "acceleration  CRC 12AB"), func(c *Channel) bool { return len(c.Acceleration) == 150 }, ""},
		{"free format", free, func(c *Channel) bool { return len(c.Acceleration) == 150 && c.Acceleration[1] == -71.642*0.01 }, "by the blanks"},
		{"no comments", without(base, 46, 48), func(c *Channel) bool { return c.Line == 47 }, ""},
		{"milli-g", edit(t, edit(t, edit(t, base, lineInts, "       4", "      11"), lineData, "cm/sec2 (04)", "mg (11)"), lineReals+12, "    -213.400000", "    -213.400000"),
			func(c *Channel) bool { return c.Unit == "mg" && c.Acceleration[4] == -213.4*(9.80665/1000) }, ""},
		{"micro-g by its code", edit(t, edit(t, base, lineInts, "       4", "      12"), lineData, "cm/sec2 (04)", "ug (12)"),
			func(c *Channel) bool { return c.Unit == "micro-g" && c.UnitMPS2 == 9.80665/1e6 }, ""},
		{"gal and cm/s2 are one size", edit(t, base, lineData, "cm/sec2 (04)", "gal (10)"), func(c *Channel) bool { return c.Unit == "gal" }, ""},
		{"no unit text", edit(t, base, lineData, "units=cm/sec2 (04),", ""), func(c *Channel) bool { return c.Unit == "cm/s2" }, ""},
		{"gain of 10", edit(t, raw, lineReals+9, "       1.000000", "      10.000000"),
			func(c *Channel) bool { return math.Abs(c.UnitMPS2-2e-7*9.80665) < 1e-20 }, ""},
		{"volts at a gain of 100000", edit(t, edit(t, edit(t, raw, lineInts, "      50     120", "      51     120"), lineData, "counts (50)", "volts (51)"), lineReals+9, "       1.000000", "  100000.000000"),
			func(c *Channel) bool { return c.Unit == "volts" && math.Abs(c.UnitMPS2-9.80665/125000) < 1e-18 }, ""},
		{"millivolts by their code", edit(t, edit(t, edit(t, raw, lineInts, "      50     120", "      52     120"), lineData, "units=counts (50),", ""), lineReals+9, "       1.000000", "     100.000000"),
			func(c *Channel) bool { return c.Unit == "millivolts" && math.Abs(c.UnitMPS2-9.80665/125000) < 1e-18 }, ""},
		{"counts of an uncorrected file", edit(t, edit(t, raw, 1, "Raw acceleration counts", "Uncorrected acceleration"), lineInts, "       0       1      50", "       1       1      50"),
			func(c *Channel) bool {
				return c.Unit == "counts" && c.Processing == ProcessingMeanRemoved && math.Abs(c.UnitMPS2-2e-6*9.80665) < 1e-20
			}, ""},
		{"sections of other quantities", slices.Concat(base, cosmosBase.as("Rotational acceleration", "angular acceleration", "rad/s/s", 9, 60).lines()),
			func(c *Channel) bool { return len(c.Acceleration) == 150 }, "sections of another quantity in the file were passed over"},
		{"velocity parted by blanks", slices.Concat(base, blankParted(cosmosBase.as("Corrected velocity", "velocity", "cm/sec", 2, 5).lines())),
			func(c *Channel) bool { return len(c.Acceleration) == 150 }, "sections of velocity in the file were passed over"},
		{"gain not stated", edit(t, raw, lineReals+9, "       1.000000", "    -999.000000"),
			func(c *Channel) bool { return math.Abs(c.UnitMPS2-2e-6*9.80665) < 1e-20 }, ""},
		{"station name in Latin-1", edit(t, base, 5, "Weir", "W\xe9ir"), func(c *Channel) bool { return c.Station.Name == "Thistle Bend - Wéir Road School" }, ""},
		{"station name two columns early", edit(t, base, 5, "INV  Thistle", "INV Thistle"), func(c *Channel) bool { return c.Station.Name == "Thistle Bend - Weir Road School" }, ""},
		{"sensor high, no words", edit(t, edit(t, base, 9, "Free field", ""), lineReals+10, "    -999.000000    -999.000000", "    -999.000000      14.500000"),
			func(c *Channel) bool { return c.Siting == SitingStructure }, ""},
		{"sensor deep, no words", edit(t, edit(t, base, 9, "Free field", ""), lineReals+10, "    -999.000000    -999.000000", "    -999.000000     -31.000000"),
			func(c *Channel) bool { return c.Siting == SitingBorehole }, ""},
		{"sensor deep in a free field", edit(t, base, lineReals+10, "    -999.000000    -999.000000", "    -999.000000     -31.000000"),
			func(c *Channel) bool { return c.Siting == SitingFreeField }, "-31 m from the station's reference height"},
		{"magnitude and place from the text", edit(t, edit(t, edit(t, base, lineReals+2, "       5.000000", "    -999.000000"), lineReals+2, "       4.800000", "    -999.000000"), lineReals+1, "      36.400000", "    -999.000000"),
			func(c *Channel) bool { return c.Event.Magnitude == Known(5) && c.Event.Longitude == Known(-121.1) }, ""},
		{"codes by their columns", edit(t, base, 5, "Statn No: 99- 4711   Code:XQ-T4711  INV", "Statn No: 99- 4711       XQ-T4711   INV "),
			func(c *Channel) bool { return c.Station.Network == "XQ" && c.Station.Code == "T4711" }, ""},
		{"station number alone", edit(t, base, 5, "Code:XQ-T4711", "             "),
			func(c *Channel) bool { return c.Station.Network == "" && c.Station.Code == "4711" }, ""},
		{"local magnitude", edit(t, base, lineReals+2, "       5.000000", "    -999.000000"),
			func(c *Channel) bool { return c.Event.Magnitude == Known(4.8) && c.Event.MagnitudeType == "ML" }, ""},
		{"version 1.00, uncorrected", edit(t, cosmosOld().lines(), 1, "Corrected acceleration  ", "Uncorrected acceleration"),
			func(c *Channel) bool { return c.Processing == ProcessingRaw }, ""},
		{"version 1.00, unnamed processing", edit(t, cosmosOld().lines(), 1, "Corrected acceleration", "Acceleration"),
			func(c *Channel) bool { return c.Processing == ProcessingUnknown }, ""},
		{"no origin leaves the day", edit(t, base, 4, "03/04/2019, 05:15:20.3 UTC", ""),
			func(c *Channel) bool { return c.Event.Date.Equal(time.Date(2019, 3, 3, 0, 0, 0, 0, time.UTC)) }, ""},
	}
	for _, tc := range cases {
		t.Run(tc.name, func(t *testing.T) {
			_, channels, err := parseLines(tc.lines, Hints{})
			if err != nil {
				t.Fatal(err)
			}
			c := channels[0]
			if !tc.check(&c) {
				c.Acceleration = c.Acceleration[:5]
				t.Errorf("read %+v", c)
			}
			if got := strings.Join(c.Warnings, "; "); tc.warning == "" && got != "" || !strings.Contains(got, tc.warning) || len(c.Warnings) > 1 {
				t.Errorf("warnings %q, want %q", c.Warnings, tc.warning)
			}
		})
	}
}

func TestCosmosHints(t *testing.T) {
	base := cosmosBase.lines()
	unitless := edit(t, edit(t, base, lineInts, "       4     120", "    -999     120"), lineData, "units=cm/sec2 (04),", "")
	_, channels, err := parseLines(unitless, Hints{Unit: "gal", UnitFrom: "--unit"})
	if err != nil || channels[0].Unit != "gal" {
		t.Errorf("unit from the hint: %v", err)
	}
	stepless := edit(t, edit(t, base, lineReals+12, "      10.000000       1.500000", "    -999.000000    -999.000000"), lineReals+6, "       0.010000", "    -999.000000")
	_, channels, err = parseLines(stepless, Hints{StepS: 0.02, StepFrom: "--dt"})
	if err != nil || channels[0].StepS != 0.02 {
		t.Errorf("step from the hint: %v", err)
	}
	wantRefusal(t, base, Hints{StepS: 0.02, StepFrom: "--dt"}, "cosmos", "case:38: dt: the file says 0.01 s, --dt says 0.02 s")
	wantRefusal(t, base, Hints{Unit: "g", UnitFrom: "--unit"}, "cosmos", "case:49: unit: the file says cm/s2, --unit says g")
	wantRefusal(t, cosmosRaw().lines(), Hints{Unit: "g", UnitFrom: "--unit"}, "cosmos", "case:49: unit: the file says counts, --unit says g")
	wantRefusal(t, unitless, Hints{}, "cosmos", "case:49: unit: the file states no unit: give it with --unit or in the catalogue's unit column")
	wantRefusal(t, stepless, Hints{}, "cosmos", "case:49: dt: the file states no time step: give it with --dt or in the catalogue's dt_s column")
}

func TestCosmosRefusals(t *testing.T) {
	base := cosmosBase.lines()
	raw := cosmosRaw().lines()
	end := len(base)
	cases := []struct {
		name  string
		lines []string
		want  string
	}{
		{"truncated", base[:60], "case:60: acceleration: truncated: announced 150 values, found 88"},
		{"end line too early", append(slices.Clone(base[:60]), base[end-1]), "case:61: acceleration: truncated: announced 150 values, found 88"},
		{"too many values", slices.Insert(slices.Clone(base), end-1, base[end-3]), "case:69: acceleration: more values than the 150 announced"},
		{"one value too many", edit(t, base, end-1, "12.036", "12.036     1.000"), `case:68: acceleration: text "1.000" after the 6 values of the line`},
		{"truncated text header", base[:5], "case:5: integer header: truncated: the file ends before it"},
		{"truncated integers", base[:20], "case:20: integer header: truncated: announced 100 values, found 60"},
		{"truncated reals", base[:30], "case:30: real header: truncated: announced 100 values, found 25"},
		{"truncated comments", base[:47], "case:46: comments: truncated: announced 2 lines, found 1"},
		{"no data", base[:48], "case:48: data line: truncated: the file ends before the data"},
		{"text lines miscounted", edit(t, base, 1, "13 text", "12 text"), `case:13: integer header: expected its start line, found "Values used when parameter or data valu…"`},
		{"text lines absurd", edit(t, base, 1, "13 text", "2000000000 text"), "case:1: text header: 2000000000 text lines announced, expected 13"},
		{"integer lines miscounted", edit(t, base, 14, " 10 lines", "  9 lines"), "case:14: integer header: 100 values in format (10I8) take 10 lines, 9 announced"},
		{"integer count absurd", edit(t, edit(t, base, 14, " 100 ", " 2000000000 "), 14, " 10 lines", " 200000000 lines"), "case:14: integer header: 2000000000 values announced, expected 100"},
		{"integer format unreadable", edit(t, base, 14, "(10I8)", "(10X8)"), `case:14: integer header: format "(10X8)" is not one repeated number descriptor such as (8F10.3)`},
		{"real line lost", without(base, 30, 30), `case:45: real 96: "2 Comment li" is not a number`},
		{"comment without bar", edit(t, base, 47, "| ", "  "), `case:47: comments: line 1 of 2 does not begin with |: found "Invented data: a ringing series, no ear…"`},
		{"real no number", edit(t, base, lineReals+12, "10.000000", "10.00a000"), `case:38: real 62: "10.00a000" is not a number`},
		{"data format unreadable", edit(t, base, lineData, "(8F10.3)", "(free)"), `case:49: data line: format "(free)" is not one repeated number descriptor such as (8F10.3)`},
		{"data format missing", edit(t, base, lineData, ",Format=(8F10.3)", ""), "case:49: data line: no format of the values is stated"},
		{"data count absurd", edit(t, base, lineData, "     150", "2000000000"), "case:68: acceleration: truncated: announced 2000000000 values, found 150"},
		{"data count beyond counting", edit(t, base, lineData, "     150", "99999999999"), `case:49: data line: "99999999999 acceleration pts, approx   …" is not a count of values`},
		{"dt zero everywhere", edit(t, edit(t, base, lineReals+12, "      10.000000       1.500000", "       0.000000       0.000000"), lineReals+6, "       0.010000", "       0.000000"),
			"case:49: dt: the file states no time step: give it with --dt or in the catalogue's dt_s column"},
		{"dt negative", edit(t, base, lineReals+12, "      10.000000", "     -10.000000"), "case:38: dt: time step -0.01 s is not positive"},
		{"dt differs from the data line", edit(t, base, lineData, "approx    2 secs", "at 200 pts/sec"), "case:49: dt: real 62 says 0.01 s, the data line says 0.005 s"},
		{"dt differs from the raw record", edit(t, raw, lineReals+6, "       0.010000", "       0.005000"), "case:32: dt: real 62 says 0.01 s, real 34 says 0.005 s"},
		{"dt differs from the length", edit(t, base, lineReals+12, "       1.500000", "       3.000000"), "case:38: dt: 150 values every 0.01 s do not last the 3 s of real 63"},
		{"rate zero", edit(t, base, lineData, "approx    2 secs", "at 0 pts/sec"), `case:49: dt: sampling rate "0" is not a positive number`},
		{"unit and code differ", edit(t, edit(t, base, lineInts, "       4     120", "    -999     120"), lineData, "(04)", "(02)"), "case:49: unit: the text says cm/s2, the code says g"},
		{"codes differ", edit(t, base, lineData, "(04)", "(02)"), "case:49: unit: the data line's code says g, integer 3 says cm/s2"},
		{"code of a velocity", edit(t, base, lineData, "(04)", "(05)"), "case:49: unit: the data line: unit code 5 is none of acceleration"},
		{"unit unknown", edit(t, base, lineData, "cm/sec2", "furlongs"), `case:49: unit: unknown unit "furlongs"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`},
		{"counts of version 1.00", edit(t, edit(t, cosmosOld().lines(), 1, "Corrected acceleration ", "Raw acceleration counts"), lineData, "cm/sec2", "counts"),
			"case:49: calibration: raw counts without a positive microvolts per count (real 22) cannot be scaled"},
		{"truncated velocity", append(slices.Clone(base), cosmosBase.as("Corrected velocity", "velocity", "cm/sec", 2, 5).lines()[:55]...),
			"case:124: velocity: truncated: announced 150 values, found 48"},
		{"volts without a sensitivity", edit(t, edit(t, edit(t, raw, lineInts, "      50     120", "      51     120"), lineData, "counts (50)", "volts (51)"), lineReals+8, "       1.250000", "    -999.000000"),
			"case:49: calibration: raw volts without a positive volts per g (real 42) cannot be scaled"},
		{"counts and volts", edit(t, raw, lineData, "counts (50)", "counts (51)"), "case:49: unit: the data line's code says volts, integer 3 says counts"},
		{"text says volts, code counts", edit(t, raw, lineData, "counts (50)", "V (50)"), "case:49: unit: the text says volts, the code says counts"},
		{"counts without volts", edit(t, raw, lineReals+8, "       1.250000", "    -999.000000"), "case:49: calibration: raw counts without a positive volts per g (real 42) cannot be scaled"},
		{"counts without microvolts", edit(t, raw, lineReals+4, "       2.500000", "    -999.000000"), "case:49: calibration: raw counts without a positive microvolts per count (real 22) cannot be scaled"},
		{"text says counts, code cm/s2", edit(t, base, lineData, "cm/sec2", "counts"), "case:49: unit: the text says counts, the code says cm/s2"},
		{"quantities differ", edit(t, base, lineData, "acceleration", "velocity"), "case:49: quantity: the data line says velocity, the header acceleration"},
		{"overflow", edit(t, base, 51, "  -125.926", "**********"), `case:51: acceleration: value 15 is "**********": the number did not fit its field`},
		{"not finite", edit(t, base, 51, "  -125.926", "       NaN"), `case:51: acceleration: value 15 is "NaN": not a number`},
		{"mixed points", edit(t, base, 51, "  -125.926", "   -125926"), "case:51: acceleration: values with and without a decimal point in one series"},
		{"header peak", edit(t, base, lineReals+12, "    -213.400000", "    -413.400000"), "case:50: peak: samples reach 2.134 m/s², the header says 4.134 m/s²"},
		{"numeric headers without text", append(slices.Clone(base), base[13:]...), `case:70: expected the first line of a section, found " 100 Integer-header values follow on  1…"`},
		{"data line without quantity after the end", append(slices.Clone(base), edit(t, cosmosBase.data(), 1, "acceleration", "unnamed")...), "case:70: quantity: neither the header nor the data line says what the values are"},
		{"text after the section", append(slices.Clone(base), "the end"), `case:70: expected the first line of a section, found "the end"`},
		{"text for the end line", edit(t, base, end, "End-of-data for", "Finis"), `case:69: acceleration: expected the end line of the section, found "Finis Chan   1 acceleration"`},
	}
	for _, tc := range cases {
		t.Run(tc.name, func(t *testing.T) {
			wantRefusal(t, tc.lines, Hints{}, "cosmos", tc.want)
		})
	}
}

func TestDamagedCosmosFiles(t *testing.T) {
	wantDamaged(t, "cosmos", map[string]string{
		"damaged-truncated.v2c": "60: acceleration: truncated: announced 150 values, found 88",
		"damaged-overflow.v2c":  `50: acceleration: value 2 is "**********": the number did not fit its field`,
		"damaged-unit.v2c":      "49: unit: the data line's code says g, integer 3 says cm/s2",
	})
}

func TestCosmosNotMotion(t *testing.T) {
	velocity := cosmosBase.as("Corrected velocity", "velocity", "cm/sec", 2, 5).lines()
	spectra := fixtureLines(t, "cosmos", "spectra.v3c")
	cases := []struct {
		name, want string
		lines      []string
	}{
		{"spectra by the title", "spectra, not a time series", spectra},
		{"spectra by stage 3", "spectra, not a time series", edit(t, cosmosBase.lines(), lineInts, "       2       1       4", "       3       1       4")},
		{"velocity", "velocity only, no acceleration", velocity},
		{"strain", "another quantity only, no acceleration",
			edit(t, edit(t, cosmosBase.lines(), lineInts, "       1", "       7"), lineData, "acceleration", "strain")},
		{"displacement of version 1.00", "displacement only, no acceleration",
			edit(t, edit(t, cosmosOld().lines(), 1, "Corrected acceleration", "Corrected displacement"), lineData, "acceleration pts, at 100 pts/sec, units=cm/sec2", "displacement pts, at 100 pts/sec, units=cm")},
		{"velocity and spectra", "velocity and spectra only, no acceleration", append(slices.Clone(velocity), spectra...)},
	}
	for _, tc := range cases {
		format, _, err := parseLines(tc.lines, Hints{})
		if not, ok := errors.AsType[*NotMotionError](err); !ok || not.Reason != tc.want || format != "cosmos" {
			t.Errorf("%s: Parse = %s, %v, want a NotMotionError of %q", tc.name, format, err, tc.want)
		}
	}
}

func TestCosmosSniff(t *testing.T) {
	for first, want := range map[string]bool{
		"Corrected acceleration    (Format v01.20 with 13 text lines) Src:": true,
		"RAW ACCELERATION COUNTS (FORMAT V01.20 WITH 13 TEXT LINES)":        true,
		"Corrected acceleration    (Format v01.00 with 13 text lines)":      true,
		"Corrected accelerogram   99321":                                    false, "Format v01.20": false, "(Format vX with 13 text lines)": false,
	} {
		text, err := NewText([]byte(first + "\n"))
		if err != nil {
			t.Fatal(err)
		}
		if got := (cosmos{}).Sniff(&Content{Text: text}); (got != "") != want {
			t.Errorf("Sniff(%q) = %q, want accepted %v", first, got, want)
		}
	}
}
