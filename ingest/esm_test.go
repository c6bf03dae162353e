package ingest

import (
	"errors"
	"slices"
	"strings"
	"testing"
	"time"
)

const esmEastFile = "XQ.BSC.00.HNE.D.20410507.031415.C.ACC.ASC"

func TestESMProcessed(t *testing.T) {
	c := readFixture(t, "esm", esmEastFile, Hints{})
	s := esmEast()
	wantSeries(t, &c, s.x, s.format)
	event := Event{ID: "INV-20410507_0000012", Name: "MONTE_INVENTATO", Origin: time.Date(2041, 5, 7, 3, 14, 15, 0, time.UTC),
		Latitude: Known(40), Longitude: Known(5.5), DepthKM: Known(8.2), Magnitude: Known(5.6), MagnitudeType: "Mw"}
	if c.Event != event {
		t.Errorf("event = %+v, want %+v", c.Event, event)
	}
	station := Station{Network: "XQ", Code: "BSC", Name: "Borgo Scuro - Via: del Mulino", Latitude: Known(40.1), Longitude: Known(5.65),
		ElevationM: Known(312), Vs30: Known(450), SiteClass: "B"}
	if c.Station != station {
		t.Errorf("station = %+v, want %+v", c.Station, station)
	}
	// The sphere of 6371 km through both points gives 16.93 km.
	if want := (Distances{EpicentralKM: Known(16.9)}); c.Distances != want || c.DistanceKM.Known {
		t.Errorf("distances = %+v, %+v, want %+v alone", c.Distances, c.DistanceKM, want)
	}
	if want := time.Date(2041, 5, 7, 3, 14, 12, 250e6, time.UTC); !c.Start.Equal(want) || c.StepS != 0.005 || c.Line != 65 {
		t.Errorf("start %v, step %g s, line %d, want %v, 0.005 s, 65", c.Start, c.StepS, c.Line, want)
	}
	if c.Unit != "cm/s2" || c.UnitMPS2 != 0.01 || c.HeaderPeak != Known(152.25*0.01) || c.Processing != ProcessingCorrected ||
		c.LowCutHz != Known(0.08) || c.HighCutHz != Known(40) {
		t.Errorf("unit %s, peak %+v, %s, corners %+v %+v", c.Unit, c.HeaderPeak, c.Processing, c.LowCutHz, c.HighCutHz)
	}
	if c.Orientation != (Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(90), Label: "E"}) || c.ChannelCode != "HNE" ||
		c.Instrument != "00 HN" || c.Siting != SitingUnknown || len(c.Warnings) > 0 {
		t.Errorf("%+v, channel %q of %q, %s, warnings %q", c.Orientation, c.ChannelCode, c.Instrument, c.Siting, c.Warnings)
	}
}

// TestESMRecord puts the components of one instrument into one record.
func TestESMRecord(t *testing.T) {
	for stream, axis := range map[string]Axis{"HNE": AxisHorizontal, "HNN": AxisHorizontal, "HNZ": AxisVertical} {
		c := readFixture(t, "esm", strings.Replace(esmEastFile, "HNE", stream, 1), Hints{})
		id, ok := RecordID(&c, "stem")
		if want := "INV-20410507-0000012_XQ.BSC_00-hn"; id != want || !ok || c.Orientation.Axis != axis || len(c.Warnings) > 0 {
			t.Errorf("%s: RecordID = %s, %v, want %s; %+v, warnings %q", stream, id, ok, want, c.Orientation, c.Warnings)
		}
	}
}

// TestESMUnprocessed reads a header that leaves out what it can.
func TestESMUnprocessed(t *testing.T) {
	c := readFixture(t, "esm", "XQ.BSC..HG2.D.20410507.031415.X.ACC.ASC", Hints{})
	s := esmOld()
	wantSeries(t, &c, s.x, s.format)
	if c.Event.Name != "" || c.Event.Magnitude != Known(5.4) || c.Event.MagnitudeType != "ML" || c.Station.Vs30.Known || c.Station.SiteClass != "" || !c.Start.IsZero() {
		t.Errorf("event %+v, station %+v, start %v", c.Event, c.Station, c.Start)
	}
	if c.Orientation != (Orientation{Axis: AxisHorizontal, Label: "2", Order: 2}) || c.Instrument != "HG" || c.Unit != "gal" ||
		c.Processing != ProcessingRaw || c.LowCutHz.Known || c.HighCutHz.Known {
		t.Errorf("%+v, %q, %s, %s", c.Orientation, c.Instrument, c.Unit, c.Processing)
	}
	want := []string{"the baseline was not removed", "triggered late: the first arrival of the P wave is missing"}
	if !slices.Equal(c.Warnings, want) {
		t.Errorf("warnings %q, want %q", c.Warnings, want)
	}
}

func TestESMVariants(t *testing.T) {
	base := esmEast()
	wrapped := slices.Insert(base.lines(), base.line("DATA_CITATION"), "in a paper whose title goes on and on")
	reordered := base.lines()
	reordered[27], reordered[28] = reordered[28], reordered[27]
	cases := []struct {
		name    string
		lines   []string
		check   func(*Channel) bool
		warning string
	}{
		{"citation wrapped", wrapped, func(c *Channel) bool { return c.Line == 66 }, ""},
		{"keys in another order", reordered, func(c *Channel) bool { return c.StepS == 0.005 }, ""},
		{"unknown key", slices.Insert(base.lines(), 60, "USER6: more"), func(c *Channel) bool { return c.Line == 66 }, ""},
		{"blank lines first and last", slices.Concat([]string{"", ""}, base.lines(), []string{"", ""}), func(c *Channel) bool { return c.Line == 67 }, ""},
		{"Latin-1 name", base.with("STATION_NAME", "Citt\xe0").lines(), func(c *Channel) bool { return c.Station.Name == "Città" }, ""},
		{"unit cm/sec^2", base.with("UNITS", "cm/sec^2").lines(), func(c *Channel) bool { return c.Unit == "cm/s2" }, ""},
		{"duration of all steps", base.with("DURATION_S", "1.200000").lines(), func(c *Channel) bool { return len(c.Acceleration) == 240 }, ""},
		{"no duration", base.with("DURATION_S", "").lines(), func(c *Channel) bool { return len(c.Acceleration) == 240 }, ""},
		{"no peak", base.with("PGA_CM/S^2", "").lines(), func(c *Channel) bool { return !c.HeaderPeak.Known }, ""},
		{"type not stated", base.with("DATA_TYPE", "").lines(), func(c *Channel) bool { return len(c.Acceleration) == 240 }, ""},
		{"day alone", base.with("EVENT_TIME_HHMMSS", "").lines(),
			func(c *Channel) bool {
				return c.Event.Origin.IsZero() && c.Event.Date.Equal(time.Date(2041, 5, 7, 0, 0, 0, 0, time.UTC))
			}, ""},
		{"decimals of the origin", base.with("EVENT_TIME_HHMMSS", "031415.5").lines(), func(c *Channel) bool { return c.Event.Origin.Nanosecond() == 5e8 }, ""},
		{"origin not understood", base.with("EVENT_TIME_HHMMSS", "3h14").lines(),
			func(c *Channel) bool { return c.Event.Origin.IsZero() && c.Event.Date.Day() == 7 }, `line 4: EVENT_TIME_HHMMSS "3h14" not understood`},
		{"magnitude zero", base.with("MAGNITUDE_W", "0").lines(), func(c *Channel) bool { return c.Event.MagnitudeType == "ML" }, ""},
		{"no magnitude", base.with("MAGNITUDE_W", "U", "MAGNITUDE_L", "NaN").lines(),
			func(c *Channel) bool { return !c.Event.Magnitude.Known && c.Event.MagnitudeType == "" }, ""},
		{"position not stated", base.with("EVENT_LATITUDE_DEGREE", "-999.0", "STATION_LONGITUDE_DEGREE", "-").lines(),
			func(c *Channel) bool {
				return !c.Event.Latitude.Known && !c.Event.Longitude.Known && !c.Station.Latitude.Known
			}, ""},
		{"number not understood", base.with("STATION_ELEVATION_M", "312m").lines(),
			func(c *Channel) bool { return !c.Station.ElevationM.Known }, `line 19: STATION_ELEVATION_M "312m" not understood`},
		{"class inferred", base.with("SITE_CLASSIFICATION_EC8", "C (inferred from geology)").lines(), func(c *Channel) bool { return c.Station.SiteClass == "C" }, ""},
		{"class S1", base.with("SITE_CLASSIFICATION_EC8", "S1").lines(), func(c *Channel) bool { return c.Station.SiteClass == "S1" }, ""},
		{"class not understood", base.with("SITE_CLASSIFICATION_EC8", "rock").lines(),
			func(c *Channel) bool { return c.Station.SiteClass == "" }, `line 23: SITE_CLASSIFICATION_EC8 "rock" not understood`},
		{"sensor at depth", base.with("SENSOR_DEPTH_M", "32.0").lines(), func(c *Channel) bool { return c.Siting == SitingBorehole }, ""},
		{"sensor at the surface", base.with("SENSOR_DEPTH_M", "0").lines(), func(c *Channel) bool { return c.Siting == SitingUnknown }, ""},
		{"old stream of one letter", base.with("STREAM", "N", "LOCATION", "").lines(),
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(0) && c.Instrument == "" }, ""},
		{"stream X", base.with("STREAM", "HNX").lines(), func(c *Channel) bool { return c.Orientation == Orientation{Axis: AxisHorizontal, Label: "X", Order: 1} }, ""},
		{"stream 3", base.with("STREAM", "HN3").lines(), func(c *Channel) bool { return c.Orientation == Orientation{Axis: AxisHorizontal, Label: "3"} }, ""},
		{"stream unknown", base.with("STREAM", "HNQ").lines(), func(c *Channel) bool { return c.Orientation == Orientation{Label: "HNQ"} }, `STREAM "HNQ" names no known direction`},
		{"no stream", base.with("STREAM", "").lines(), func(c *Channel) bool { return c.Orientation == Orientation{} && c.Instrument == "00" }, `STREAM "" names no known direction`},
		{"none but filtered", base.with("PROCESSING", "none").lines(),
			func(c *Channel) bool { return c.Processing == ProcessingCorrected && c.LowCutHz == Known(0.08) },
			"PROCESSING is none, but filter corners are stated: taken as filtered"},
		{"processed without corners", base.with("LOW_CUT_FREQUENCY_HZ", "", "HIGH_CUT_FREQUENCY_HZ", "").lines(),
			func(c *Channel) bool { return c.Processing == ProcessingCorrected }, `PROCESSING is "manual (invented)", but no filter corners are stated`},
		{"corners exchanged", base.with("LOW_CUT_FREQUENCY_HZ", "40", "HIGH_CUT_FREQUENCY_HZ", "0.08", "PROCESSING", "").lines(),
			func(c *Channel) bool { return !c.LowCutHz.Known && c.Processing == ProcessingUnknown },
			"filter corners of 40 and 0.08 Hz are not used: the low one must be the smaller"},
		{"state not said", base.with("PROCESSING", "").lines(), func(c *Channel) bool { return c.Processing == ProcessingCorrected }, ""},
	}
	for _, tc := range cases {
		t.Run(tc.name, func(t *testing.T) {
			format, channels, err := parseLines(tc.lines, Hints{})
			if err != nil || format != "esm" {
				t.Fatalf("Parse = %s, %v", format, err)
			}
			c := channels[0]
			if !tc.check(&c) {
				t.Errorf("read %+v", Channel{Event: c.Event, Station: c.Station, Orientation: c.Orientation, Processing: c.Processing, Line: c.Line})
			}
			if tc.warning == "" && len(c.Warnings) > 0 || tc.warning != "" && !slices.Equal(c.Warnings, []string{tc.warning}) {
				t.Errorf("warnings %q, want %q", c.Warnings, tc.warning)
			}
		})
	}
}

func TestESMRefusals(t *testing.T) {
	base := esmEast()
	lines := base.lines()
	units := Hints{Unit: "g", UnitFrom: "--unit"}
	cases := []struct {
		name  string
		lines []string
		hints Hints
		want  string
	}{
		{"truncated", lines[:150], Hints{}, "case:150: samples: truncated: announced 240 values, found 86"},
		{"truncated in the header", lines[:40], Hints{}, "case:40: samples: truncated: the file ends before the values"},
		{"too many announced", base.with("NDATA", "250", "DURATION_S", "").lines(), Hints{}, "case:304: samples: truncated: announced 250 values, found 240"},
		{"too few announced", base.with("NDATA", "239").lines(), Hints{}, "case:304: samples: announced 239 values, found more"},
		{"count absurd", base.with("NDATA", "2000000000", "DURATION_S", "").lines(), Hints{}, "case:304: samples: truncated: announced 2000000000 values, found 240"},
		{"count no number", base.with("NDATA", "many").lines(), Hints{}, `case:30: NDATA: expected a number of values, found "many"`},
		{"count zero", base.with("NDATA", "0").lines(), Hints{}, `case:30: NDATA: expected a number of values, found "0"`},
		{"no count", without(lines, 30, 30), Hints{}, `case: NDATA: expected a number of values, found ""`},
		{"count against the length", base.with("DURATION_S", "2.4").lines(), Hints{}, "case:31: DURATION_S: 240 values every 0.005 s do not last 2.4 s"},
		{"step zero", base.with("SAMPLING_INTERVAL_S", "0").lines(), Hints{}, `case:29: SAMPLING_INTERVAL_S: expected a time step over zero in s, found "0"`},
		{"step empty", base.with("SAMPLING_INTERVAL_S", "").lines(), Hints{}, `case:29: SAMPLING_INTERVAL_S: expected a time step over zero in s, found ""`},
		{"other step", lines, Hints{StepS: 0.01, StepFrom: "--dt"}, "case:29: dt: the file says 0.005 s, --dt says 0.01 s"},
		{"unit empty", base.with("UNITS", "").lines(), Hints{}, "case:33: UNITS: the header states no unit"},
		{"no unit", without(lines, 33, 33), Hints{}, "case: UNITS: the header states no unit"},
		{"unit unknown", base.with("UNITS", "furlongs").lines(), Hints{}, `case:33: UNITS: unknown unit "furlongs"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`},
		{"unit of a velocity", base.with("UNITS", "cm/s").lines(), Hints{}, `case:33: UNITS: "cm/s" is a unit of velocity, not of acceleration`},
		{"unit of other files", base.with("UNITS", "g").lines(), Hints{}, "case:33: UNITS: acceleration is in g; files of this layout are in cm/s2"},
		{"other unit", lines, units, "case:33: unit: the file says cm/s2, --unit says g"},
		{"key twice", edit(t, lines, 63, "USER4:", "NDATA: 241"), Hints{}, `case:63: NDATA: line 30 says "240", line 63 "241"`},
		{"header peak", base.with("PGA_CM/S^2", "-200").lines(), Hints{}, "case:65: peak: samples reach 1.5225 m/s², the header says 2 m/s²"},
		{"type unknown", base.with("DATA_TYPE", "STRAIN").lines(), Hints{}, `case:50: DATA_TYPE: unknown type of data "STRAIN"`},
		{"type against the peak", base.renamed("PGA_CM/S^2", "PGV_CM/S").lines(), Hints{}, "case:50: DATA_TYPE: the file holds acceleration, its peak is one of velocity"},
		{"two values in the first line", edit(t, lines, 65, "0.000000", "0.000000 1.0"), Hints{}, "case:65: samples: line holds 2 values, expected 1"},
		{"two values in a line", edit(t, lines, 100, ".", ".0 0."), Hints{}, "case:100: samples: line holds 2 values, expected 1"},
		{"word", edit(t, lines, 100, ".", ".x"), Hints{}, `case:100: samples: expected a number, found "` + strings.Replace(strings.TrimSpace(lines[99]), ".", ".x", 1) + `"`},
		{"not finite first", edit(t, lines, 65, "0.000000", "     NaN"), Hints{}, `case:65: samples: expected a number, found "NaN"`},
		{"overflow", edit(t, lines, 70, strings.TrimSpace(lines[69]), "**********"), Hints{}, `case:70: samples: expected a number, found "**********"`},
		{"page appended", append(slices.Clone(lines), "<html>"), Hints{}, `case:305: samples: text "<html>" after the 240 values`},
		{"second file", append(slices.Clone(lines), lines...), Hints{}, `case:305: samples: text "EVENT_NAME: MONTE_INVENTATO" after the 240 values`},
		{"header without end", append(slices.Clone(lines[:64]), slices.Repeat([]string{"citation"}, 200)...), Hints{}, "case:201: header: no values in the first 200 lines"},
	}
	for _, tc := range cases {
		t.Run(tc.name, func(t *testing.T) {
			wantRefusal(t, tc.lines, tc.hints, "esm", tc.want)
		})
	}
	wantRefusal(t, []string{""}, Hints{}, "", "case: file holds only blanks")
	if _, _, err := Parse(t.Context(), "f", nil, Hints{}); err == nil || err.Error() != "f: file is empty" {
		t.Errorf("Parse of nothing = %v", err)
	}
}

func TestDamagedESMFiles(t *testing.T) {
	wantDamaged(t, "esm", map[string]string{
		"damaged-truncated.asc":     "150: samples: truncated: announced 240 values, found 86",
		"damaged-count.asc":         "295: samples: announced 230 values, found more",
		"damaged-unit.asc":          "33: UNITS: acceleration is in m/s2; files of this layout are in cm/s2",
		"damaged-peak.asc":          "65: peak: samples reach 1.5225 m/s², the header says 0.15225 m/s²",
		"damaged-page-appended.asc": `305: samples: text "<html>" after the 240 values`,
	})
}

func TestESMNotMotion(t *testing.T) {
	base := esmEast()
	read := func(name string) []string { return fixtureLines(t, "esm", name) }
	pairs := base.with("DATA_TYPE", "").renamed("PGA_CM/S^2", "USER7").lines()[:64]
	cases := []struct {
		name, want string
		lines      []string
	}{
		{"velocity", "velocity only, no acceleration", read(strings.Replace(esmEastFile, "ACC", "VEL", 1))},
		{"spectrum", "spectra, not a time series", read(strings.Replace(esmEastFile, "ACC", "SA", 1))},
		{"spectrum by the name of its type", "spectra, not a time series", base.with("DATA_TYPE", "PSV").lines()},
		{"rotation", "another quantity only, no acceleration", base.with("DATA_TYPE", "ROTATION RATE").lines()},
		{"spectrum by its columns", "spectra, not a time series", append(pairs, "  0.0100   1.5", "  0.0200   1.6")},
		{"displacement by its peak", "displacement only, no acceleration", base.with("DATA_TYPE", "", "UNITS", "cm").renamed("PGA_CM/S^2", "PGD_CM").lines()},
	}
	for _, tc := range cases {
		format, _, err := parseLines(tc.lines, Hints{})
		if not, ok := errors.AsType[*NotMotionError](err); !ok || not.Reason != tc.want || format != "esm" {
			t.Errorf("%s: Parse = %s, %v, want a NotMotionError of %q", tc.name, format, err, tc.want)
		}
	}
}

func TestESMSniff(t *testing.T) {
	for text, want := range map[string]bool{
		"EVENT_NAME: a\nNDATA: 9\nUNITS: cm/s^2\n":             true,
		"\nEVENT_NAME:\nSTREAM: HNE\nSAMPLING_INTERVAL_S: 1\n": true,
		"EVENT_NAME: a\nNDATA: 9\n":                            false,
		"EVENT: a\nNDATA: 9\nUNITS: cm/s^2\n":                  false,
		"# event_name: a\n# ndata: 9\n# units: gal\n1\n":       false,
	} {
		lines, err := NewText([]byte(text))
		if err != nil {
			t.Fatal(err)
		}
		if got := (esm{}).Sniff(&Content{Text: lines}); (got != "") != want {
			t.Errorf("Sniff(%q) = %q, want accepted %v", text, got, want)
		}
	}
}

func FuzzESM(f *testing.F) {
	addFixtures(f, "esm")
	f.Fuzz(func(t *testing.T, data []byte) { fuzzFormat(t, esm{}, data) })
}
