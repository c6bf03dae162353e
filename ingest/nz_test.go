package ingest

import (
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"
)

func readNZFixture(t *testing.T, name string) []Channel {
	t.Helper()
	path := filepath.Join(recordsDir("new-zealand"), name)
	format, channels, err := Parse(t.Context(), path, readFile(t, path), Hints{})
	if err != nil || format != "new-zealand" {
		t.Fatalf("Parse(%s) = %s, %v", path, format, err)
	}
	return channels
}

func TestNZUncorrected(t *testing.T) {
	channels := readNZFixture(t, "uncorrected.v1a")
	if len(channels) != 3 {
		t.Fatalf("%d channels, want 3", len(channels))
	}
	orientations := []Orientation{
		{Axis: AxisHorizontal, AzimuthDeg: Known(166), Label: "S14E"},
		{Axis: AxisHorizontal, AzimuthDeg: Known(76), Label: "N76E"},
		{Axis: AxisVertical, Label: "Up"},
	}
	event := Event{Name: "Cape Plover, 24 km north of Quartz Bay", Origin: time.Date(2041, 3, 5, 4, 15, 6, 400e6, time.UTC),
		Latitude: Known(-41), Longitude: Known(174.6), DepthKM: Known(12), Magnitude: Known(5.7)}
	station := Station{Code: "QZTB", Name: "Quartz Bay Reserve", // 41°12'30" S, 174°30'15" E
		Latitude: Known(-(41 + 750.0/3600)), Longitude: Known(174 + 1815.0/3600)}
	for i, c := range channels {
		wantSeries(t, &c, nzRaw[i].x, nzRaw[i].form)
		if c.Orientation != orientations[i] || c.Event != event || c.Station != station || len(c.Warnings) > 0 {
			t.Errorf("component %d: %+v\n%+v\n%+v\nwarnings %q", i+1, c.Orientation, c.Event, c.Station, c.Warnings)
		}
		if c.StepS != 0.005 || c.Unit != "mm/s2" || c.UnitMPS2 != 0.001 || c.Line != 27+46*i || c.Processing != ProcessingRaw || !c.HeaderPeak.Known {
			t.Errorf("component %d: dt %g s, unit %s, line %d, %s, peak %v", i+1, c.StepS, c.Unit, c.Line, c.Processing, c.HeaderPeak)
		}
		if !c.Start.Equal(time.Date(2041, 3, 5, 4, 15, 9, 250e6, time.UTC)) || c.Distances.EpicentralKM != Known(24) || c.Instrument != "20" || c.Siting != SitingUnknown {
			t.Errorf("component %d: start %v, %v km, %q, %s", i+1, c.Start, c.Distances.EpicentralKM, c.Instrument, c.Siting)
		}
		if id, ok := RecordID(&c, "stem"); id != "20410305T041506_QZTB_20" || !ok {
			t.Errorf("component %d: RecordID = %s", i+1, id)
		}
	}
}

// TestNZCorrected has the factor 0.5, an event that was not located, and series of
// velocity and displacement to pass over.
func TestNZCorrected(t *testing.T) {
	channels := readNZFixture(t, "corrected.v2a")
	if len(channels) != 3 {
		t.Fatalf("%d channels, want 3", len(channels))
	}
	for i, c := range channels {
		wantSeries(t, &c, nzCorrected[i].x, nzCorrected[i].form)
		if c.UnitMPS2 != 0.0005 || c.Unit != "0.5 mm/s2" || c.StepS != 0.02 || c.Processing != ProcessingCorrected || len(c.Warnings) > 0 {
			t.Errorf("component %d: unit %s of %g, dt %g s, %s, warnings %q", i+1, c.Unit, c.UnitMPS2, c.StepS, c.Processing, c.Warnings)
		}
		if c.Event != (Event{}) || c.Distances.EpicentralKM.Known || c.LowCutHz != Known(0.1) || c.HighCutHz != Known(40) {
			t.Errorf("component %d: event %+v, distance %v, corners %v, %v", i+1, c.Event, c.Distances.EpicentralKM, c.LowCutHz, c.HighCutHz)
		}
	}
	if a := channels[0].Orientation.AzimuthDeg; a != Known(346) || channels[2].Orientation.Axis != AxisVertical {
		t.Errorf("azimuth %v, third %+v", a, channels[2].Orientation)
	}
}

func TestNZCutFile(t *testing.T) {
	channels := readNZFixture(t, "two-components.v1a")
	if len(channels) != 2 {
		t.Fatalf("%d channels, want 2", len(channels))
	}
	for _, c := range channels {
		if want := []string{"2 of the 3 components of this layout in the file"}; !slices.Equal(c.Warnings, want) {
			t.Errorf("warnings %q, want %q", c.Warnings, want)
		}
	}
}

// nzSet replaces integer i of the component that begins in line first.
func nzSet(t *testing.T, lines []string, first, i int, v string) []string {
	t.Helper()
	n := first + 16 + (i-1)/10
	at := (i - 1) % 10 * 8
	return edit(t, lines, n, lines[n-1], lines[n-1][:at]+v+lines[n-1][at+8:])
}

// TestNZVariants edits a file of one component and looks at what changes.
func TestNZVariants(t *testing.T) {
	base := nzRaw[0].lines()
	corrected := nzCorrected[0].lines()
	set := func(i int, v string) []string { return nzSet(t, base, 1, i, v) }
	all := func(*Channel) bool { return true }
	cases := []struct {
		name    string
		lines   []string
		check   func(*Channel) bool
		warning string // beside the one on the components
	}{
		{"north as 0 in the integers", edit(t, set(28, "       0"), 13, "S14E", "N01W"),
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(359) }, ""},
		{"direction of the integers alone", edit(t, base, 13, "Component S14E", ""),
			func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(166) && c.Orientation.Label == "166" }, ""},
		{"direction in degrees", edit(t, base, 13, "S14E", "165"), func(c *Channel) bool { return c.Orientation.AzimuthDeg == Known(165) }, ""},
		{"vertical without the word component", edit(t, set(28, "       0"), 13, "Component S14E", "Up"),
			func(c *Channel) bool { return c.Orientation.Axis == AxisVertical }, ""},
		{"no direction", edit(t, set(28, "       0"), 13, "Component S14E", ""),
			func(c *Channel) bool { return c.Orientation.Axis == AxisUnknown }, "direction is not known: no component in the text, 0 in integer 28"},
		{"unit without a factor", edit(t, base, 11, "1.00 ", ""), func(c *Channel) bool { return c.UnitMPS2 == 0.001 }, ""},
		{"unit spelt otherwise", edit(t, base, 11, "mm/s/s at", "mm/sec/sec, at"), func(c *Channel) bool { return c.UnitMPS2 == 0.001 }, ""},
		{"the interval of the raw record beside it", edit(t, corrected, 5, "Resolution 24 bits", "Sampled at intervals of 0.005 s"),
			func(c *Channel) bool { return c.StepS == 0.02 }, ""},
		{"the same interval with fewer digits", edit(t, base, 10, "Duration", "intervals of .01 s, duration"),
			func(c *Channel) bool { return c.StepS == 0.005 }, ""},
		{"depth of the centroid", nzSet(t, set(17, "       0"), 1, 18, "      15"), func(c *Channel) bool { return c.Event.DepthKM == Known(15) }, ""},
		{"no depth", set(17, "       0"), func(c *Channel) bool { return !c.Event.DepthKM.Known }, ""},
		{"epicentre in the north", set(11, "     -41"), func(c *Channel) bool { return c.Event.Latitude == Known(41) }, ""},
		{"magnitude with its scale", edit(t, base, 9, "M 5.70", "ML 5.70"), func(c *Channel) bool { return c.Event.MagnitudeType == "ML" }, ""},
		{"magnitude zero", edit(t, base, 9, "M 5.70", "M 0.00"), func(c *Channel) bool { return !c.Event.Magnitude.Known }, ""},
		{"distances differ", edit(t, base, 9, "Distance 24", "Distance 42"), func(c *Channel) bool { return c.Distances.EpicentralKM == Known(24) },
			"distance is 42 km in line 9 and 24 km in the integers; the latter taken"},
		{"site north", edit(t, base, 2, "30S", "30N"), func(c *Channel) bool { return c.Station.Latitude.Value > 41 },
			"the site is north of the equator by line 2"},
		{"site west by its letter", edit(t, base, 2, "15E", "15W"), func(c *Channel) bool { return c.Station.Longitude.Value < -174 }, ""},
		{"site beyond 180 degrees", edit(t, nzSet(t, set(24, "     183"), 1, 25, "      30"), 2, "174 30 15E", "176 29 45W"),
			func(c *Channel) bool { return c.Station.Longitude == Known(183+1815.0/3600-360) }, ""},
		{"site of two places", set(22, "      42"), func(c *Channel) bool { return c.Station.Latitude == Known(-(41 + 2550.0/3600)) },
			"site is at -41.2083, 174.5042 in line 2 and at -41.7083, 174.5042 in the integers; the latter taken"},
		{"network of the agency", edit(t, base, 1, "Invented Agency", "GNS Science"), func(c *Channel) bool { return c.Station.Network == "NZ" }, ""},
		{"another record in line 6", edit(t, base, 6, "QZTB_20", "QZTB_21"), all,
			"record is 20410305_041512_QZTB_20 in line 1 and 20410305_041512_QZTB_21 in line 6"},
		{"another site in line 2", edit(t, base, 2, "QZTB", "QZTX"), func(c *Channel) bool { return c.Station.Code == "QZTX" },
			"site is QZTB in line 1 and QZTX in line 2; the latter taken"},
		{"no record's name", edit(t, edit(t, base, 1, "20410305_041512_QZTB_20", "A41Z12"), 6, "20410305_041512_QZTB_20", "A41Z12"),
			func(c *Channel) bool { return c.Instrument == "" }, ""},
		{"structure by the name", edit(t, base, 3, "Reserve", "Dam Crest"), func(c *Channel) bool { return c.Siting == SitingStructure },
			"siting structure is taken from the station's name"},
		{"transition bands", edit(t, corrected, 12, "from 0.10 Hz to", "0.05-0.10 Hz to 35.00 to"), func(c *Channel) bool { return !c.LowCutHz.Known && !c.HighCutHz.Known },
			"filter corners are not known: line 12 has no two frequencies in order"},
		{"no count in the text", edit(t, base, 10, "Number of points", ""), all, ""},
		{"no peak", edit(t, base, 14, "Peak", ""), func(c *Channel) bool { return !c.HeaderPeak.Known }, ""},
		{"peak 2.5 % off", edit(t, base, 14, "2080.5", "2133.0"), all, "peak of the samples and of the header differ by more than 2 %"},
		{"overflow in an unused integer", set(7, "********"), all, "fields without a number in the integer header: 1, the first at position 7 in line 17"},
		{"blank lines and a form feed at the end", append(slices.Clone(base), "", "\f"), all, ""},
		{"blank lines before", append([]string{"", ""}, base...), func(c *Channel) bool { return c.Line == 29 }, ""},
		{"lower case", edit(t, edit(t, base, 1, "Uncorrected accelerogram", "UNCORRECTED ACCELEROGRAM"), 2, "Site", "SITE"), all, ""},
	}
	for _, tc := range cases {
		t.Run(tc.name, func(t *testing.T) {
			format, channels, err := parseLines(tc.lines, Hints{})
			if err != nil || format != "new-zealand" || len(channels) != 1 {
				t.Fatalf("Parse = %s, %d channels, %v", format, len(channels), err)
			}
			c := channels[0]
			if !tc.check(&c) {
				t.Errorf("read %+v %+v %+v", c.Orientation, c.Event, c.Station)
			}
			want := []string{"1 of the 3 components of this layout in the file"}
			if tc.warning != "" {
				want = append(want, tc.warning)
			}
			got := slices.Sorted(slices.Values(c.Warnings))
			slices.Sort(want)
			if !slices.Equal(got, want) {
				t.Errorf("warnings %q, want %q", got, want)
			}
		})
	}
}

func TestNZRefusals(t *testing.T) {
	one := nzRaw[0].lines()
	three := nzFile(nzRaw)
	corrected := nzFile(nzCorrected)
	set := func(i int, v string) []string { return nzSet(t, one, 1, i, v) }
	second := func(s nzSample) []string { return append(nzRaw[0].lines(), s.lines()...) }
	coarse, short := nzRaw[1], nzRaw[1]
	coarse.step, short.x = 0.01, nzRaw[1].x[:180]
	zeros := one
	for i := 21; i <= 26; i++ {
		zeros = nzSet(t, zeros, 1, i, "       0")
	}
	checkRefusals(t, []refusal{
		{"truncated at a line end", three[:120], Hints{}, "case:120: accel: truncated: announced 194 values, found 20"},
		{"truncated in a line", append(slices.Clone(three[:120]), three[120][:30]), Hints{}, `case:121: accel: value 24 is "-469": it has no decimal point`},
		{"truncated between samples", append(slices.Clone(three[:120]), three[120][:32]), Hints{}, "case:121: accel: truncated: announced 194 values, found 24"},
		{"truncated in the text", one[:10], Hints{}, "case:10: integer header: truncated: announced 40 values, found 0"},
		{"truncated in the integers", one[:18], Hints{}, "case:18: integer header: truncated: announced 40 values, found 20"},
		{"truncated in the reals", one[:24], Hints{}, "case:24: real header: truncated: announced 60 values, found 40"},
		{"truncated in the displacement", corrected[:60], Hints{}, "case:60: displ: truncated: announced 130 values, found 80"},
		{"a line is missing", without(three, 30, 30), Hints{}, "case:45: accel: line holds 4 values, expected 10"},
		{"a text line is missing", without(one, 10, 10), Hints{}, "case:20: integer 32: 0.7 is not an integer"},
		{"count too small", nzSet(t, one, 1, 34, "     184"), Hints{}, "case:10: accel count: number of points is 194, integer 34 in line 20 says 184"},
		{"both counts too small", edit(t, nzSet(t, three, 1, 34, "     190"), 10, "194   Duration 0.965", "190   Duration 0.945"), Hints{},
			`case:46: expected the next component or the end of the file after the samples of integers 34 to 36, found "   -33.1    54.3   164.3   268.1"`},
		{"count zero", set(34, "       0"), Hints{}, `case:20: accel count: "0" of integer 34 is not a number of values`},
		{"count negative", set(35, "      -1"), Hints{}, `case:20: veloc count: "-1" of integer 35 is not a number of values`},
		{"velocity announced", set(35, "     194"), Hints{}, "case:46: veloc: truncated: announced 194 values, found 0"},
		{"velocity not announced", nzSet(t, corrected, 1, 35, "       0"), Hints{}, `case:53: expected the next component or the end of the file after the samples of integers 34 to 36, found "  0.0000  0.5751  1.3910  2.4901  3.677…"`},
		{"unit", edit(t, one, 11, "mm/s/s", "cm/s/s"), Hints{}, "case:11: unit: acceleration is in cm/s2; files of this layout are in mm/s2"},
		{"unit unknown", edit(t, one, 11, "mm/s/s", "furlongs"), Hints{}, `case:11: unit: unknown unit "furlongs"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`},
		{"unit missing", edit(t, one, 11, "units of", ""), Hints{}, "case:1: unit: the heading has no line with the unit of the samples"},
		{"factor zero", edit(t, one, 11, "1.00", "0.00"), Hints{}, `case:11: unit: factor "0.00" is not a number over zero`},
		{"factor no number", edit(t, one, 11, "1.00", "1.0.0"), Hints{}, `case:11: unit: factor "1.0.0" is not a number over zero`},
		{"unit of the hint", one, Hints{Unit: "g", UnitFrom: "--unit"}, "case:11: unit: the file says mm/s2, --unit says g"},
		{"interval missing", edit(t, one, 11, "intervals of", "intervals"), Hints{}, "case:1: dt: the heading has no line with the interval between samples"},
		{"interval zero", edit(t, one, 11, "0.0050", "0.0000"), Hints{}, "case:11: dt: time step 0 s is not positive"},
		{"interval no number", edit(t, one, 11, "0.0050", "0..005"), Hints{}, `case:11: dt: "0..005" is not a number`},
		{"two intervals", edit(t, one, 10, "Duration", "Intervals of 0.020 s"), Hints{}, "case:10: dt: time step 0.02 s, but line 11 says 0.005 s"},
		{"interval of the hint", one, Hints{StepS: 0.01, StepFrom: "--dt"}, "case:11: dt: the file says 0.005 s, --dt says 0.01 s"},
		{"duration", edit(t, one, 10, "0.965", "1.965"), Hints{}, "case:10: dt: 194 values every 0.005 s do not last 1.965 s"},
		{"overflow", edit(t, one, 30, one[29][8:16], "********"), Hints{}, `case:30: accel: value 32 is "********": the number did not fit its field`},
		{"blank value", edit(t, one, 30, one[29][8:16], "        "), Hints{}, "case:30: accel: value 32 is blank"},
		{"value without point", edit(t, one, 30, one[29][8:16], "    1234"), Hints{}, `case:30: accel: value 32 is "1234": it has no decimal point`},
		{"direction", edit(t, one, 13, "S14E", "S17E"), Hints{}, `case:13: component: the text says "S17E", integer 28 in line 19 says 166 degrees`},
		{"peak", edit(t, one, 14, "2080.5", "3080.5"), Hints{}, "case:27: peak: samples reach 2.0805 m/s², the header says 3.0805 m/s²"},
		{"site all zero", zeros, Hints{}, "case:19: site: coordinates are all zero"},
		{"site with 60 minutes", set(22, "      60"), Hints{}, "case:19: site: integers 21 to 26 are not degrees, minutes and seconds"},
		{"site off the globe", set(21, "      95"), Hints{}, "case:19: site: no place is at -95.20833333333333, 174.50416666666666"},
		{"year", set(1, "     204"), Hints{}, "case:17: integer 1: 204 is no year"},
		{"integer with a fraction", set(3, "     5.5"), Hints{}, "case:17: integer 3: 5.5 is not an integer"},
		{"integer no number", set(3, "    five"), Hints{}, `case:17: integer 3: "five" is not a number`},
		{"Californian layout", edit(t, v2Bridge.lines(), 2, "Uncorrected", "Site QXYZ "), Hints{}, `case:17: integer 1: "At equal" is not a number`},
		{"page appended", append(slices.Clone(three), "<html></html>"), Hints{},
			`case:139: expected the next component or the end of the file after the samples of integers 34 to 36, found "<html></html>"`},
		{"more values", append(slices.Clone(one), "     1.0"), Hints{},
			`case:47: expected the next component or the end of the file after the samples of integers 34 to 36, found "     1.0"`},
		{"a fourth component", append(slices.Clone(three), one...), Hints{},
			`case:139: text "Uncorrected accelerogram 20410305_04151…" after the 3 components of a file`},
		{"a second component without a site", append(slices.Clone(one), edit(t, one, 2, "Site", "Size")...), Hints{},
			`case:47: expected the heading of a component with its site, found "Uncorrected accelerogram 20410305_04151…"`},
		{"steps differ", second(coarse), Hints{}, "case:47: dt: component 2 has a time step of 0.01 s, the first 0.005 s"},
		{"counts differ", second(short), Hints{}, "case:47: accel count: component 2 has 180 values, the first 194"},
		{"sites differ", append(slices.Clone(one), nzSet(t, edit(t, nzRaw[1].lines(), 2, "41 12", "42 12"), 1, 21, "      42")...), Hints{},
			"case:47: site: component 2 is of QZTB at -42.208333333333336, 174.50416666666666, the first of QZTB at -41.208333333333336, 174.50416666666666"},
		{"states differ", append(slices.Clone(one), edit(t, nzRaw[1].lines(), 1, "Uncorrected", "Corrected")...), Hints{},
			"case:47: component 2 is corrected, the first raw"},
	})
}

func TestDamagedNZFiles(t *testing.T) {
	wantDamaged(t, "new-zealand", map[string]string{
		"damaged-truncated.v1a":     "120: accel: truncated: announced 194 values, found 20",
		"damaged-count.v1a":         "10: accel count: number of points is 194, integer 34 in line 20 says 184",
		"damaged-unit.v1a":          "11: unit: acceleration is in g; files of this layout are in mm/s2",
		"damaged-overflow.v1a":      `30: accel: value 32 is "********": the number did not fit its field`,
		"damaged-page-appended.v1a": `139: expected the next component or the end of the file after the samples of integers 34 to 36, found "<html><body>503 Service Unavailable</bo…"`,
	})
}

func TestNZSniff(t *testing.T) {
	for head, want := range map[string]bool{
		"Uncorrected accelerogram X\nSite ABCD": true, "  CORRECTED ACCELEROGRAM\nSITE": true,
		"Corrected accelerogram\nUncorrected Accelerogram Data": false, "Corrected accelerogram": false,
		"Corrected acceleration\nSite ABCD": false, "Site ABCD\nCorrected accelerogram": false, "Corrected accelerogram\nSites": false,
	} {
		content, _ := newContent(t.Context(), []byte(head+"\n"))
		if got := (newZealand{}).Sniff(content); (got != "") != want {
			t.Errorf("Sniff(%q) = %q, want accepted %v", head, got, want)
		}
	}
}

func FuzzNewZealand(f *testing.F) {
	addFixtures(f, "new-zealand")
	huge := strings.Join(nzRaw[0].lines(), "\n")
	f.Add([]byte(strings.ReplaceAll(huge, "     194", "99999999")))
	f.Fuzz(func(t *testing.T, data []byte) { fuzzFormat(t, newZealand{}, data) })
}
