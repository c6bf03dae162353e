package ingest

import (
	"fmt"
	"slices"
	"strings"
	"testing"
	"time"
)

// v1Sample is an invented uncorrected channel: the text that a corrected one
// repeats, numbers that mean nothing to the reader, and one block in g.
type v1Sample struct {
	v2Sample
	unit string // with the words around it, as the count line has them
}

func (s v1Sample) lines() []string {
	text := s.text()[1:14]
	peak, _ := peakOf(s.x)
	text[11] = fmt.Sprintf("                                     Uncor Max  =  %s g, at   1.000 sec.", dropZero(fmt.Sprintf("%.3f", peak)))
	numbers := make([]int, 50)
	numbers[0], numbers[9] = s.channel, s.n
	lines := append(text, integers(numbers, 5, 16)...)
	lines = append(lines, fixed(make([]float64, 50), "%10.3f", 8, true)...)
	lines = append(lines, fmt.Sprintf("%6d points of accel data equally spaced at  %s sec%s", s.n, s.stepText, s.unit))
	lines = append(lines, fixed(s.x, s.form, 8, true)...)
	return append(lines, fmt.Sprintf("/&  ----------  End of data for channel %2d  ----------", s.channel))
}

// The invented channels that the fixtures hold.
var (
	v1East = v1Sample{v2Sample{n: 157, channel: 2, station: 99323, direction: 80, stationChannel: 5, location: "Free Field",
		step: 0.01, stepText: ".010", x: ring(157, 0.312, 1.7, 0.97), form: "%10.6f", named: true}, ", in g. (8f10.6)"}
	v1Up = v1Sample{v2Sample{n: 157, channel: 3, station: 99323, direction: 500, label: " Up", stationChannel: 6, location: "Free Field",
		step: 0.01, stepText: ".010", x: ring(157, -0.124, 1.6, 0.96), form: "%10.6f", named: true}, ", in g. (8f10.6)"}
)

// v1Fixtures are the uncorrected files under testdata/records/californiav1.
func v1Fixtures(t testing.TB) []ringFixture {
	const format = "californiav1"
	east := v1East.lines()
	count := len(v1Head(t))
	uneven := edit(t, east, count, "equally spaced at  .010 sec, in g. (8f10.6)", "and times, in g and sec. (8f10.6)")
	return []ringFixture{
		{format, "two-channels.v1", append(slices.Clone(east), v1Up.lines()...), "\r\n"},
		{format, "damaged-truncated.v1", east[:35], "\n"},
		{format, "damaged-count.v1", edit(t, east, count, "   157", "   149"), "\n"},
		{format, "damaged-unit.v1", edit(t, east, count, "in g.", "in g/10"), "\n"},
		{format, "damaged-uneven.v1", uneven, "\n"},
		{format, "damaged-page-appended.v1", append(slices.Clone(east), "<html><body>503 Service Unavailable</body></html>"), "\n"},
	}
}

// v1Head returns the lines up to the count line.
func v1Head(t testing.TB) []string {
	t.Helper()
	lines := v1East.lines()
	for i, l := range lines {
		if strings.Contains(l, "equally spaced at") {
			return lines[:i+1]
		}
	}
	t.Fatal("no count line")
	return nil
}

func TestV1(t *testing.T) {
	data := readFile(t, recordsDir("californiav1")+"/two-channels.v1")
	format, channels, err := Parse(t.Context(), "f", data, Hints{})
	if err != nil || format != "california-v1" || len(channels) != 2 {
		t.Fatalf("Parse = %s, %d channels, %v", format, len(channels), err)
	}
	for i, s := range []v1Sample{v1East, v1Up} {
		c := channels[i]
		wantSeries(t, &c, s.x, s.form)
		if c.StepS != 0.01 || c.Unit != "g" || c.UnitMPS2 != StandardGravity || c.Processing != ProcessingRaw || len(c.Warnings) > 0 {
			t.Errorf("channel %d: dt %g s, unit %s, %s, warnings %q", i+1, c.StepS, c.Unit, c.Processing, c.Warnings)
		}
		station := Station{Network: "CE", Code: "99323", Name: "Fiddlers Gap - Route 7 Bridge", Latitude: Known(39.1), Longitude: Known(-123.25)}
		if c.Station != station || c.Siting != SitingFreeField || c.Instrument != "Free Field" {
			t.Errorf("channel %d: station %+v, %s at %q", i+1, c.Station, c.Siting, c.Instrument)
		}
		if e := c.Event; e.Name != "Larkspur Hollow Earthquake" || e.Origin.Format(time.RFC3339Nano) != "1984-03-14T13:06:07.8Z" || e.Magnitude != Known(5.6) {
			t.Errorf("channel %d: event %+v", i+1, e)
		}
		if c.Start.Format(time.RFC3339Nano) != "1984-03-14T13:06:11.2Z" || c.LowCutHz.Known || c.HighCutHz.Known {
			t.Errorf("channel %d: start %v, corners %v, %v", i+1, c.Start, c.LowCutHz, c.HighCutHz)
		}
	}
	if o := channels[0].Orientation; o != (Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(80), Label: "80 Deg"}) || channels[0].ChannelCode != "5" {
		t.Errorf("first: %+v, channel %s", o, channels[0].ChannelCode)
	}
	if channels[0].HeaderPeak != Known(0.312*StandardGravity) || channels[1].Orientation.Axis != AxisVertical {
		t.Errorf("peak %v, second %+v", channels[0].HeaderPeak, channels[1].Orientation)
	}
}

func TestV1Variants(t *testing.T) {
	base := v1East.lines()
	count := len(v1Head(t))
	all := func(*Channel) bool { return true }
	cases := []struct {
		name    string
		lines   []string
		hints   Hints
		check   func(*Channel) bool
		warning string
	}{
		{"a first line as of a corrected channel", append([]string{"Uncorrected accelerogram   99323-Q0042      Chan  2:  80 Deg"}, base...), Hints{},
			func(c *Channel) bool {
				return c.Orientation.AzimuthDeg == Known(80) && c.Station.Code == "99323" && !c.Event.Origin.IsZero()
			}, ""},
		{"more lines of text", slices.Insert(slices.Clone(base), 13, "   157 points of uncorrected accelerogram data", "At equally-spaced intervals of  .0100 sec."), Hints{},
			func(c *Channel) bool { return c.Station.Code == "99323" }, ""},
		{"upper case", func() []string {
			out := slices.Clone(base)
			for i := range out {
				out[i] = strings.ToUpper(out[i])
			}
			return out
		}(), Hints{}, func(c *Channel) bool { return c.Unit == "g" && c.Orientation.AzimuthDeg == Known(80) }, ""},
		{"raw accel", edit(t, base, count, "points of accel", "points of raw accel"), Hints{}, all, ""},
		{"unit in brackets, no format", edit(t, base, count, ", in g. (8f10.6)", ".  (UNITS: G)"), Hints{}, func(c *Channel) bool { return c.Unit == "g" }, ""},
		{"unit of a hint", edit(t, base, count, ", in g. (8f10.6)", "."), Hints{Unit: "g", UnitFrom: "--unit"}, func(c *Channel) bool { return c.Unit == "g" }, ""},
		{"no station number", edit(t, base, 5, "Station No.", "Station    "), Hints{},
			func(c *Channel) bool {
				return c.Station == Station{} && c.Event == Event{} && c.Siting == SitingUnknown
			},
			"the heading has no station number in its place: event, station and direction are not known"},
		{"peak of few digits", edit(t, base, 12, ".312", ".31 "), Hints{}, func(c *Channel) bool { return !c.HeaderPeak.Known }, ""},
		{"peak 2.5 % off", edit(t, base, 12, ".312", ".320"), Hints{}, all, "peak of the samples and of the header differ by more than 2 %"},
		{"no end line", base[:len(base)-1], Hints{}, all, "the channel has no end line"},
	}
	for _, tc := range cases {
		t.Run(tc.name, func(t *testing.T) {
			format, channels, err := parseLines(tc.lines, tc.hints)
			if err != nil || format != "california-v1" || len(channels) != 1 {
				t.Fatalf("Parse = %s, %d channels, %v", format, len(channels), err)
			}
			c := channels[0]
			if !tc.check(&c) {
				t.Errorf("read %+v %+v %+v", c.Orientation, c.Event, c.Station)
			}
			if got := strings.Join(c.Warnings, "; "); got != tc.warning {
				t.Errorf("warnings %q, want %q", got, tc.warning)
			}
		})
	}
}

func TestV1Refusals(t *testing.T) {
	base := v1East.lines()
	count := len(v1Head(t))
	if count != 25 {
		t.Fatalf("count line %d, want 25 as in the messages below", count)
	}
	checkRefusals(t, []refusal{
		{"truncated", base[:35], Hints{}, "case:35: accel: truncated: announced 157 values, found 80"},
		{"truncated headers", base[:20], Hints{}, "case:1: accel count: uncorrected accelerogram without a line that says how many values stand at which spacing; use the corrected V2 file"},
		{"no count line", without(base, count, count), Hints{}, "case:1: accel count: uncorrected accelerogram without a line that says how many values stand at which spacing; use the corrected V2 file"},
		{"uneven", edit(t, base, count, "equally spaced at  .010 sec, in g. (8f10.6)", "and times, in g and sec. (8f10.6)"), Hints{},
			`case:25: accel count: uncorrected accelerogram whose count line states no equal spacing: found "   157 points of accel data and times, …"; use the corrected V2 file`},
		{"count too small", edit(t, base, count, "   157", "   149"), Hints{}, "case:11: dt: 149 values every 0.01 s do not last 1.57 s"},
		{"both counts too small", edit(t, edit(t, base, count, "   157", "   149"), 11, "1.570", "1.490"), Hints{}, `case:44: accel: text "-.017597  -.025387  -.026252" after the 5 values of the line`},
		{"count of the text", slices.Insert(slices.Clone(base), 13, "   158 points of uncorrected accelerogram data"), Hints{}, "case:26: accel count: 157 values announced, line 14 says 158"},
		{"step of the text", slices.Insert(slices.Clone(base), 13, "At equally-spaced intervals of  .020 sec."), Hints{}, "case:26: dt: time step 0.01 s, but line 14 says 0.02 s"},
		{"step zero", edit(t, base, count, ".010", ".000"), Hints{}, "case:25: dt: time step 0 s is not positive"},
		{"count zero", edit(t, base, count, "   157", "     0"), Hints{}, "case:25: accel count: 0 values announced"},
		{"unit unknown", edit(t, base, count, "in g.", "in g/10"), Hints{}, `case:25: unit: unknown unit "g/10"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`},
		{"unit missing", edit(t, base, count, ", in g. (8f10.6)", "."), Hints{}, "case: unit: the file states no unit: give it with --unit or in the catalogue's unit column"},
		{"unit of the hint", base, Hints{Unit: "gal", UnitFrom: "--unit"}, "case:25: unit: the file says g, --unit says gal"},
		{"step of the hint", base, Hints{StepS: 0.02, StepFrom: "--dt"}, "case:25: dt: the file says 0.01 s, --dt says 0.02 s"},
		{"peak", edit(t, base, 12, ".312", ".512"), Hints{}, "case:26: peak: samples reach 3.0597 m/s², the header says 5.021 m/s²"},
		{"overflow", edit(t, base, 30, base[29][10:20], "**********"), Hints{}, `case:30: accel: value 34 is "**********": the number did not fit its field`},
		{"page appended", append(slices.Clone(base), "<html></html>"), Hints{}, `case:47: text "<html></html>" after the end of a channel, expected the heading of another`},
		{"a corrected channel after it", append(slices.Clone(base), v2Bridge.lines()...), Hints{},
			`case:47: text "Corrected accelerogram   99322-Q0042-99…" after the end of a channel, expected the heading of another`},
	})
}

func TestDamagedV1Files(t *testing.T) {
	wantDamaged(t, "californiav1", map[string]string{
		"damaged-truncated.v1":     "35: accel: truncated: announced 157 values, found 80",
		"damaged-count.v1":         "11: dt: 149 values every 0.01 s do not last 1.57 s",
		"damaged-unit.v1":          `25: unit: unknown unit "g/10"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`,
		"damaged-uneven.v1":        `25: accel count: uncorrected accelerogram whose count line states no equal spacing: found "   157 points of accel data and times, …"; use the corrected V2 file`,
		"damaged-page-appended.v1": `47: text "<html><body>503 Service Unavailable</bo…" after the end of a channel, expected the heading of another`,
	})
}

func FuzzCaliforniaV1(f *testing.F) {
	addFixtures(f, "californiav1")
	f.Add([]byte(strings.ReplaceAll(strings.Join(v1East.lines(), "\n"), "   157", "2000000000")))
	f.Fuzz(func(t *testing.T, data []byte) { fuzzFormat(t, californiaV1{}, data) })
}
