package ingest

import (
	"slices"
	"strings"
	"testing"
	"time"
)

func TestJMAFile(t *testing.T) {
	format, channels, err := parseLines(jmaLines(), Hints{})
	if err != nil || format != "jma-csv" || len(channels) != 3 {
		t.Fatalf("Parse = %s, %d channels, %v", format, len(channels), err)
	}
	ns, ew, ud := jmaSeries()
	labels := []string{"NS", "EW", "UD"}
	for i, x := range [][]float64{ns, ew, ud} {
		c := channels[i]
		wantSeries(t, &c, x, "%.3f")
		station := Station{Code: "91017", Name: "Aranai-mura", Latitude: Known(30.5), Longitude: Known(149.75)}
		if c.Station != station || c.Unit != "gal" || c.UnitMPS2 != 0.01 || c.StepS != 0.01 || c.Line != 8 || len(c.Warnings) > 0 {
			t.Errorf("%+v, %s, dt %g s, line %d, warnings %q", c.Station, c.Unit, c.StepS, c.Line, c.Warnings)
		}
		if want := time.Date(2041, 3, 3, 23, 12, 16, 0, time.UTC); !c.Start.Equal(want) || c.Event != (Event{}) || c.HeaderPeak.Known {
			t.Errorf("start %v, want %v; event %+v", c.Start, want, c.Event)
		}
		if o, _ := direction(labels[i]); c.Orientation != o || c.Siting != SitingUnknown || c.Processing != ProcessingUnknown {
			t.Errorf("%+v, want %+v; %s, %s", c.Orientation, o, c.Siting, c.Processing)
		}
	}
}

func TestJMAVariants(t *testing.T) {
	base := jmaLines()
	blanks := slices.Clone(base)
	for i := 7; i < len(blanks); i++ {
		blanks[i] = " " + strings.ReplaceAll(blanks[i], ",", " ,  ") + " ,,"
	}
	cases := []struct {
		name    string
		lines   []string
		hints   Hints
		check   func([]Channel) bool
		warning string
	}{
		{"Shift-JIS name", fixtureLines(t, "jma-csv", "91017-shift-jis.csv"), Hints{}, func(cs []Channel) bool { return cs[0].Station.Code == "91017" && cs[0].Station.Name == "" }, ""},
		{"commas of a spreadsheet", edit(t, edit(t, base, 2, "30.5000", "30.5000,,"), 7, "NS,EW,UD", "NS,EW,UD,"), Hints{}, func(cs []Channel) bool { return cs[2].Station.Latitude == Known(30.5) }, ""},
		{"columns in another order", edit(t, base, 7, "NS,EW,UD", "UD,NS,EW"), Hints{}, func(cs []Channel) bool { return cs[0].Orientation.Axis == AxisVertical && cs[0].Acceleration[4] != 0 }, ""},
		{"blanks round the values", blanks, Hints{}, func(cs []Channel) bool { return len(cs[0].Acceleration) == 150 }, ""},
		{"unknown key", slices.Insert(slices.Clone(base), 3, "SENSOR=invented"), Hints{}, func(cs []Channel) bool { return cs[0].Line == 9 }, ""},
		{"site alone", edit(t, base, 1, ",Aranai-mura", ""), Hints{}, func(cs []Channel) bool { return cs[0].Station.Code == "91017" && cs[0].Station.Name == "" }, ""},
		{"no position", without(base, 2, 3), Hints{}, func(cs []Channel) bool { return !cs[0].Station.Latitude.Known }, ""},
		{"no start", without(base, 6, 6), Hints{}, func(cs []Channel) bool { return cs[0].Start.IsZero() }, ""},
		{"start not understood", edit(t, base, 6, "2041 03", "2041 March"), Hints{}, func(cs []Channel) bool { return cs[0].Start.IsZero() }, `line 6: INITIALTIME "2041 March 04 08 12 16" not understood`},
		{"start with stops", edit(t, base, 6, "2041 03 04 08 12 16", "2041/03/04 08:12:16.25"), Hints{}, func(cs []Channel) bool { return cs[0].Start.Nanosecond() == 25e7 }, ""},
		{"unit of one name", edit(t, base, 5, "gal(cm/s/s)", "mm/s2"), Hints{}, func(cs []Channel) bool { return cs[0].UnitMPS2 == 0.001 }, ""},
		{"no unit, a hint", without(base, 5, 5), Hints{Unit: "gal"}, func(cs []Channel) bool { return cs[0].Unit == "gal" }, ""},
		{"no rate, a hint", without(base, 4, 4), Hints{StepS: 0.02}, func(cs []Channel) bool { return cs[0].StepS == 0.02 }, ""},
		{"rate without unit", edit(t, base, 4, "100Hz", "200"), Hints{}, func(cs []Channel) bool { return cs[0].StepS == 0.005 }, ""},
		{"blank lines last", append(slices.Clone(base), "", " "), Hints{}, func(cs []Channel) bool { return len(cs[0].Acceleration) == 150 }, ""},
	}
	for _, tc := range cases {
		t.Run(tc.name, func(t *testing.T) {
			format, channels, err := parseLines(tc.lines, tc.hints)
			if err != nil || format != "jma-csv" || len(channels) != 3 {
				t.Fatalf("Parse = %s, %d channels, %v", format, len(channels), err)
			}
			if !tc.check(channels) {
				t.Errorf("read %+v %+v, start %v, line %d", channels[0].Station, channels[0].Orientation, channels[0].Start, channels[0].Line)
			}
			for _, c := range channels {
				if tc.warning == "" && len(c.Warnings) > 0 || tc.warning != "" && !slices.Equal(c.Warnings, []string{tc.warning}) {
					t.Errorf("warnings %q, want %q", c.Warnings, tc.warning)
				}
			}
		})
	}
}

func TestJMARefusals(t *testing.T) {
	base := jmaLines()
	row := func(text string) []string { return slices.Replace(slices.Clone(base), 49, 50, text) }
	cases := []struct {
		name  string
		lines []string
		hints Hints
		want  string
	}{
		{"truncated in a row", append(slices.Clone(base[:100]), "1.250,-3.5"), Hints{}, `case:101: samples: expected three values, found "1.250,-3.5"`},
		{"truncated in the header", base[:5], Hints{}, "case:5: columns: no row that names three directions, such as NS,EW,UD"},
		{"no values", base[:7], Hints{}, "case:7: samples: truncated: the file ends before the values"},
		{"few values", base[:12], Hints{}, "case:8: samples: channel NS: 5 values; a record needs at least 10\n" +
			"case:8: samples: channel EW: 5 values; a record needs at least 10\ncase:8: samples: channel UD: 5 values; a record needs at least 10"},
		{"no names of columns", without(base, 7, 7), Hints{}, "case:7: columns: values before a row that names three directions, such as NS,EW,UD"},
		{"two columns named", edit(t, base, 7, "NS,EW,UD", "NS,EW"), Hints{}, "case:7: columns: 2 columns are named, expected 3 directions"},
		{"a time column", edit(t, base, 7, "NS,EW,UD", "T,NS,EW,UD"), Hints{}, "case:7: columns: 4 columns are named, expected 3 directions"},
		{"unknown direction", edit(t, base, 7, "NS,EW,UD", "NS,EW,XX"), Hints{}, `case:7: columns: unknown direction "XX"`},
		{"one direction twice", edit(t, base, 7, "NS,EW,UD", "NS,EW,N-S"), Hints{}, `case:7: columns: "NS" and "N-S" are one direction`},
		{"no unit", without(base, 5, 5), Hints{}, "case: unit: the file states no unit: give it with --unit or in the catalogue's unit column"},
		{"unit unknown", edit(t, base, 5, "gal(cm/s/s)", "kine"), Hints{}, `case:5: unit: unknown unit "kine"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`},
		{"two units", edit(t, base, 5, "gal(cm/s/s)", "gal(m/s/s)"), Hints{}, "case:5: unit: gal and m/s2 are two units"},
		{"second unit unknown", edit(t, base, 5, "gal(cm/s/s)", "gal(cm/s)"), Hints{}, `case:5: unit: "cm/s" is a unit of velocity, not of acceleration`},
		{"other unit", base, Hints{Unit: "g", UnitFrom: "--unit"}, "case:5: unit: the file says gal, --unit says g"},
		{"no rate", without(base, 4, 4), Hints{}, "case: dt: the file states no time step: give it with --dt or in the catalogue's dt_s column"},
		{"rate zero", edit(t, base, 4, "100Hz", "0Hz"), Hints{}, `case:4: rate: expected a sampling rate over zero in Hz, found "0Hz"`},
		{"rate in other words", edit(t, base, 4, "100Hz", "0.01sec"), Hints{}, `case:4: rate: expected a sampling rate over zero in Hz, found "0.01sec"`},
		{"other step", base, Hints{StepS: 0.005, StepFrom: "--dt"}, "case:4: dt: the file says 0.01 s, --dt says 0.005 s"},
		{"key twice", slices.Insert(slices.Clone(base), 4, "SAMPLING RATE=200Hz"), Hints{}, `case:5: SAMPLINGRATE: line 4 says "100Hz", line 5 "200Hz"`},
		{"value missing", row("1.250,,0.5"), Hints{}, `case:50: samples: expected a number, found ""`},
		{"not a number", row("1.250,NaN,0.5"), Hints{}, `case:50: samples: expected a number, found "NaN"`},
		{"four values", row("1.250,1,2,3"), Hints{}, `case:50: samples: expected three values, found "1.250,1,2,3"`},
		{"blank line within", row(""), Hints{}, "case:50: samples: blank line before more values"},
		{"page appended", append(slices.Clone(base), "<html>"), Hints{}, `case:158: samples: expected a number, found "<html>"`},
		{"second file", append(slices.Clone(base), base...), Hints{}, `case:158: samples: expected a number, found "SITE CODE=91017"`},
	}
	for _, tc := range cases {
		t.Run(tc.name, func(t *testing.T) {
			wantRefusal(t, tc.lines, tc.hints, "jma-csv", tc.want)
		})
	}
}

func TestDamagedJMAFiles(t *testing.T) {
	wantDamaged(t, "jma-csv", map[string]string{
		"damaged-truncated.csv":     `101: samples: expected three values, found "-16.094,3"`,
		"damaged-unit.csv":          "5: unit: gal and m/s2 are two units",
		"damaged-columns.csv":       "7: columns: 2 columns are named, expected 3 directions",
		"damaged-page-appended.csv": `158: samples: expected a number, found "<html>"`,
	})
}

func FuzzJMA(f *testing.F) {
	addFixtures(f, "jma-csv")
	f.Fuzz(func(t *testing.T, data []byte) { fuzzFormat(t, jma{}, data) })
}
