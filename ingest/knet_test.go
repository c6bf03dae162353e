package ingest

import (
	"errors"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// readFixture parses a committed file, which must have one channel.
func readFixture(t *testing.T, format, name string, hints Hints) Channel {
	t.Helper()
	data, err := os.ReadFile(filepath.Join(recordsDir(format), name))
	if err != nil {
		t.Fatal(err)
	}
	got, channels, err := Parse(t.Context(), name, data, hints)
	if err != nil || got != format || len(channels) != 1 {
		t.Fatalf("Parse(%s) = %q, %d channels, %v", name, got, len(channels), err)
	}
	return channels[0]
}

// refusals parses each case and compares the whole message.
type refusal struct {
	name  string
	lines []string
	hints Hints
	want  string
}

func checkRefusals(t *testing.T, cases []refusal) {
	t.Helper()
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			_, channels, err := parseLines(c.lines, c.hints)
			if err == nil {
				t.Fatalf("read %d channels, want the error %q", len(channels), c.want)
			}
			if err.Error() != c.want {
				t.Errorf("error %q, want %q", err, c.want)
			}
			if _, ok := errors.AsType[*ParseError](err); !ok {
				t.Errorf("error is a %T, want a *ParseError", err)
			}
		})
	}
}

// TestKNETScale has ten counts whose scale can be followed by hand: their mean is
// 100, a count is 2000/8000 = 0.25 gal = 0.0025 m/s².
func TestKNETScale(t *testing.T) {
	s := knetNS
	s.rate, s.seconds, s.numerator, s.denominator = 10, 1, 2000, 8000
	lines := append(s.lines()[:17:17], "      100      102       98      104       96      100      110       90", "      100      100")
	lines[14] = "Max. Acc. (gal)   2.500"
	_, channels, err := parseLines(lines, Hints{})
	if err != nil {
		t.Fatal(err)
	}
	c := channels[0]
	want := []float64{0, 0.005, -0.005, 0.01, -0.01, 0, 0.025, -0.025, 0, 0}
	if !equalSeries(c.Acceleration, want) {
		t.Errorf("samples %v m/s², want %v", c.Acceleration, want)
	}
	if c.UnitMPS2 != 0.0025 || c.Unit != "counts" || c.StepS != 0.1 {
		t.Errorf("unit %q of %g m/s², step %g s, want counts of 0.0025 m/s² and 0.1 s", c.Unit, c.UnitMPS2, c.StepS)
	}
}

func TestKNETHeader(t *testing.T) {
	c := readFixture(t, "knet", "SWB0014103040812.NS", Hints{})
	want := Channel{
		Event: Event{
			Origin:   time.Date(2041, 3, 3, 23, 12, 0, 0, time.UTC), // 08:12 in Japan
			Latitude: Known(30.125), Longitude: Known(150.25), DepthKM: Known(25), Magnitude: Known(5.7), MagnitudeType: "MJMA",
		},
		Station:     Station{Code: "SWB001", Latitude: Known(30.5), Longitude: Known(149.75), ElevationM: Known(12)},
		Siting:      SitingFreeField,
		Orientation: Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(0), Label: "N-S"},
		Start:       time.Date(2041, 3, 3, 23, 12, 16, 0, time.UTC), // 15 s before the record time
		StepS:       0.01,
	}
	if c.Event != want.Event {
		t.Errorf("event %+v, want %+v", c.Event, want.Event)
	}
	if c.Station != want.Station {
		t.Errorf("station %+v, want %+v", c.Station, want.Station)
	}
	if !c.Start.Equal(want.Start) || c.StepS != want.StepS || c.Orientation != want.Orientation || c.Siting != want.Siting {
		t.Errorf("start %v step %g %+v %s, want %v %g %+v %s", c.Start, c.StepS, c.Orientation, c.Siting,
			want.Start, want.StepS, want.Orientation, want.Siting)
	}
	if c.Processing != ProcessingMeanRemoved || c.Instrument != "" || c.ChannelCode != "" || len(c.Acceleration) != 300 || c.Line != 18 {
		t.Errorf("processing %s, instrument %q, channel %q, %d samples from line %d", c.Processing, c.Instrument, c.ChannelCode, len(c.Acceleration), c.Line)
	}
	if peak, _ := peakOf(c.Acceleration); math.Abs(math.Abs(peak)-c.HeaderPeak.Value) > 5e-6 || !c.HeaderPeak.Known {
		t.Errorf("peak %g m/s², header %+v, want within half of the last digit printed (0.0005 gal)", peak, c.HeaderPeak)
	}
	if len(c.Warnings) > 0 {
		t.Errorf("warnings %q, want none", c.Warnings)
	}
}

func TestKiKnetPlaces(t *testing.T) {
	cases := []struct {
		ending, place, channel, label, id string
		siting                            Siting
		axis                              Axis
	}{
		{"NS1", "borehole", "1", "N-S", "20410303T231200_SWBH02_borehole", SitingBorehole, AxisHorizontal},
		{"EW1", "borehole", "2", "E-W", "20410303T231200_SWBH02_borehole", SitingBorehole, AxisHorizontal},
		{"UD1", "borehole", "3", "U-D", "20410303T231200_SWBH02_borehole", SitingBorehole, AxisVertical},
		{"NS2", "surface", "4", "N-S", "20410303T231200_SWBH02_surface", SitingFreeField, AxisHorizontal},
		{"EW2", "surface", "5", "E-W", "20410303T231200_SWBH02_surface", SitingFreeField, AxisHorizontal},
		{"UD2", "surface", "6", "U-D", "20410303T231200_SWBH02_surface", SitingFreeField, AxisVertical},
	}
	for _, k := range cases {
		c := readFixture(t, "knet", "SWBH024103040812."+k.ending, Hints{})
		if c.Instrument != k.place || c.ChannelCode != k.channel || c.Orientation.Label != k.label || c.Siting != k.siting || c.Orientation.Axis != k.axis {
			t.Errorf("%s: %q channel %q %q %s axis %d", k.ending, c.Instrument, c.ChannelCode, c.Orientation.Label, c.Siting, c.Orientation.Axis)
		}
		if id, ok := RecordID(&c, "stem"); id != k.id || !ok {
			t.Errorf("%s: RecordID = %s, %v, want %s", k.ending, id, ok, k.id)
		}
		if nominal := k.place == "borehole" && k.axis == AxisHorizontal; nominal != (len(c.Warnings) == 1) {
			t.Errorf("%s: warnings %q", k.ending, c.Warnings)
		}
		if c.Station.ElevationM.Known {
			t.Errorf("%s: height %+v, want unknown for -9999", k.ending, c.Station.ElevationM)
		}
	}
}

// TestKNETSpellings reads what other years and hands made of the same file.
func TestKNETSpellings(t *testing.T) {
	base := knetNS.lines()
	plain := readFixture(t, "knet", "SWB0014103040812.NS", Hints{})
	cases := map[string][]string{
		"Lon.":             edit(t, edit(t, base, 3, "Long.", "Lon."), 8, "Station Long.", "Station Lon."),
		"Max Acc.":         edit(t, base, 15, "Max. Acc. (gal)", "Max Acc. (gal)"),
		"minutes":          edit(t, base, 1, "08:12:00", "08:12"),
		"rate without Hz":  edit(t, base, 11, "100Hz", "100"),
		"byte order mark":  edit(t, base, 1, "Origin", "\ufeffOrigin"),
		"blank lines last": append(append([]string(nil), base...), "", ""),
		"lower case":       edit(t, edit(t, base, 13, "N-S", "n-s"), 11, "Sampling Freq", "sampling freq"),
		"agreeing hints":   base,
	}
	for name, lines := range cases {
		hints := Hints{}
		if name == "agreeing hints" {
			hints = Hints{Unit: "cm/s2", StepS: 0.01}
		}
		_, channels, err := parseLines(lines, hints)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		if c := channels[0]; !equalSeries(c.Acceleration, plain.Acceleration) || c.Event != plain.Event || c.Station != plain.Station {
			t.Errorf("%s: another channel than without it", name)
		}
	}
}

// TestKNETUnknownEvent reads a file that no earthquake was assigned to.
func TestKNETUnknownEvent(t *testing.T) {
	lines := knetNS.lines()
	copy(lines, []string{"Origin Time", "Lat.", "Long.", "Depth. (km)", "Mag."})
	lines[9] = "Record Time"
	_, channels, err := parseLines(lines, Hints{})
	if err != nil {
		t.Fatal(err)
	}
	c := channels[0]
	if c.Event != (Event{}) || !c.Start.IsZero() {
		t.Errorf("event %+v, start %v, want unknown", c.Event, c.Start)
	}
	if want := "record time is blank: the time of the first sample is unknown"; len(c.Warnings) != 1 || c.Warnings[0] != want {
		t.Errorf("warnings %q, want %q", c.Warnings, want)
	}
}

func TestKNETWarnings(t *testing.T) {
	base := knetNS.lines()
	clipped := append([]string(nil), base...)
	clipped[17] = "    71230    71230    71230    71230" + clipped[17][36:]
	cases := map[string]struct {
		lines []string
		want  string
	}{
		"clipping": {edit(t, clipped, 15, "14.551", ""), "5 consecutive samples at the extreme, from sample 1 on: clipped?"},
		"peak":     {edit(t, base, 15, "14.551", "14.451"), "samples reach 14.551 gal, the header says 14.451 gal"},
	}
	for name, k := range cases {
		_, channels, err := parseLines(k.lines, Hints{})
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		if w := channels[0].Warnings; len(w) != 1 || w[0] != k.want {
			t.Errorf("%s: warnings %q, want %q", name, w, k.want)
		}
	}
}

// TestKNETSmallPeak has a peak of the size of the printed resolution: 0.03 gal
// by the samples, 0.025 gal by the header.
func TestKNETSmallPeak(t *testing.T) {
	s := knetNS
	s.rate, s.seconds, s.numerator, s.denominator = 10, 1, 1, 100
	lines := append(s.lines()[:17:17], "  1  -1  2  -2  3  -3  1  -1  2  -2")
	lines[14] = "Max. Acc. (gal)   0.025"
	_, channels, err := parseLines(lines, Hints{})
	if err != nil || channels[0].HeaderPeak.Known || len(channels[0].Warnings) > 0 {
		t.Errorf("%v, %+v", err, channels)
	}
}

func TestKNETRefusals(t *testing.T) {
	base := knetNS.lines()
	swapped := append([]string(nil), base...)
	swapped[1], swapped[2] = swapped[2], swapped[1]
	dead := append([]string(nil), base[:17]...)
	for range 30 {
		dead = append(dead, strings.Repeat("     7001", 10))
	}
	long := append([]string(nil), base...)
	long[20] = strings.Repeat(" 1", MaxLine)
	checkRefusals(t, []refusal{
		{"short header", base[:12], Hints{}, `case:12: header: 12 lines; the header has 17`},
		{"labels out of order", swapped, Hints{}, `case:2: header: expected "Lat.", found "Long.             150.250"`},
		{"latitude", edit(t, base, 2, "30.125", "thirty"), Hints{}, `case:2: Lat.: expected a number, found "thirty"`},
		{"origin", edit(t, base, 1, "2041/03/04", "2041/13/04"), Hints{}, `case:1: Origin Time: expected a time as YYYY/MM/DD HH:MM:SS, found "2041/13/04 08:12:00"`},
		{"rate missing", edit(t, base, 11, "100Hz", ""), Hints{}, `case:11: Sampling Freq(Hz): expected a number over zero, found ""`},
		{"rate zero", edit(t, base, 11, "100Hz", "0Hz"), Hints{}, `case:11: Sampling Freq(Hz): expected a number over zero, found "0Hz"`},
		{"rate too low", edit(t, edit(t, base, 11, "100Hz", "5Hz"), 12, "3", "60"), Hints{}, `case:18: dt: time step 0.2 s is outside 0.0005 to 0.1 s`},
		{"duration negative", edit(t, base, 12, "3", "-3"), Hints{}, `case:12: Duration Time(s): expected a number over zero, found "-3"`},
		{"too many announced", edit(t, base, 12, "3", "3e9"), Hints{}, `case:12: Duration Time(s): 100 Hz for 3e+09 s make no number of samples`},
		{"announced beyond file", edit(t, base, 12, "3", "2e7"), Hints{}, `case:55: samples: truncated: announced 2000000000 values, found 300`},
		{"direction", edit(t, base, 13, "N-S", "7"), Hints{}, `case:13: Dir.: unknown direction "7"; known are N-S, E-W, U-D and 1 to 6`},
		{"scale without gal", edit(t, base, 14, "(gal)", ""), Hints{}, `case:14: Scale Factor: expected NUMBER(gal)/NUMBER, found "2000/8388608"`},
		{"scale unreadable", edit(t, base, 14, "8388608", "********"), Hints{}, `case:14: Scale Factor: expected NUMBER(gal)/NUMBER, found "2000(gal)/********"`},
		{"scale zero", edit(t, base, 14, "8388608", "0"), Hints{}, `case:14: Scale Factor: "2000(gal)/0" is not a scale over zero`},
		{"peak", edit(t, base, 14, "2000", "2200"), Hints{}, `case:15: Max. Acc. (gal): samples reach 16.006 gal, the header says 14.551 gal: wrong scale or damaged samples`},
		{"peak unreadable", edit(t, base, 15, "14.551", "high"), Hints{}, `case:15: Max. Acc. (gal): expected a number, found "high"`},
		{"truncated", base[:40], Hints{}, `case:40: samples: truncated: announced 300 values, found 184`},
		{"second file", append(append([]string(nil), base...), base...), Hints{}, `case:56: samples: expected an integer, found "Origin"`},
		{"too long", append(append([]string(nil), base...), "  100"), Hints{}, `case:56: samples: announced 300 values, found more`},
		{"not an integer", edit(t, base, 30, " ", " 1.5 "), Hints{}, `case:30: samples: expected an integer, found "1.5"`},
		{"count beyond 32 bits", edit(t, base, 18, "10230", "99999999999"), Hints{}, `case:18: samples: expected an integer, found "99999999999"`},
		{"dead channel", dead, Hints{}, `case:18: samples: all 300 values are equal: a dead channel`},
		{"other unit", base, Hints{Unit: "g", UnitFrom: "--unit"}, `case:14: unit: the file says gal, --unit says g`},
		{"other step", base, Hints{StepS: 0.02, StepFrom: "catalogue line 3"}, `case:11: dt: the file says 0.01 s, catalogue line 3 says 0.02 s`},
		{"over-long line", long, Hints{}, `case:21: line of 2097152 bytes is longer than the limit of 1048576`},
	})
}

func FuzzKNET(f *testing.F) {
	for _, x := range knetFixtures(f) {
		f.Add([]byte(strings.Join(x.lines, x.ending)))
	}
	f.Fuzz(func(t *testing.T, data []byte) { fuzzFormat(t, knet{}, data) })
}

func TestParseInteger(t *testing.T) {
	for text, want := range map[string]int64{"0": 0, "-0": 0, "7": 7, "+12345678": 12345678, "-2147483647": -2147483647, "00000000012": 12} {
		if v, ok := parseInteger([]byte(text)); v != want || !ok {
			t.Errorf("parseInteger(%q) = %d, %v, want %d", text, v, ok, want)
		}
	}
	for _, text := range []string{"", "+", "-", "--1", "1.0", "1e3", "12a45678", "123456789a", "2147483648", "-2147483648", "000000000012", "1-2", "*****"} {
		if v, ok := parseInteger([]byte(text)); ok {
			t.Errorf("parseInteger(%q) = %d, want a refusal", text, v)
		}
	}
}
