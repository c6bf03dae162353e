package ingest

import (
	"fmt"
	"strings"
	"testing"
)

// What a file states of unit and step, in whatever words, is not overridden by what
// was stated for all files.
func TestPlainStated(t *testing.T) {
	forAll := Hints{Unit: "mg", UnitFrom: "--unit", UnitForAll: true, StepS: 0.01, StepFrom: "--dt", StepForAll: true}
	pairs := func(step float64, heads ...string) []string { return head(heads, timed(even(20, step), "%.3f", ",")) }
	single := func(heads ...string) []string { return head(heads, column(20, "%.5f")) }
	for _, c := range []struct {
		lines []string
		unit  string
		step  float64
	}{
		{pairs(0.005, "Time,Acc", "s,g"), "g", 0.005},
		{pairs(0.005, "Time,Acc", "(s),(g)"), "g", 0.005},
		{pairs(0.005, "Time,Acc", "[s],[cm/s2]"), "cm/s2", 0.005},
		{pairs(5, "Time,Acc", "ms,m/s2"), "m/s2", 0.005},
		{pairs(0.005, "# Time,Acc", "# s,g"), "g", 0.005},
		{pairs(0.005, "s,gal"), "gal", 0.005},
		{single("Acc", "g"), "g", 0.01},
		{single("Cedar Hill, invented", "gal"), "gal", 0.01},
		{head([]string{"t NS EW UD", "s gal gal gal"}, strings.Split(strings.ReplaceAll(strings.Join(fourColumns(0.02), "\n"), ",", " "), "\n")), "gal", 0.02},

		{pairs(0.005, "Units: g"), "g", 0.005},
		{pairs(0.005, "Acceleration in g"), "g", 0.005},
		{pairs(0.005, "Acceleration (gal)"), "gal", 0.005},
		{pairs(0.005, "# acceleration in gal"), "gal", 0.005},
		{pairs(0.005, "# Acceleration (gal)", "# by the tower's logger"), "gal", 0.005},
		{pairs(0.005, "time,acc gal"), "gal", 0.005},
		{pairs(0.005, "time,acc_gal"), "gal", 0.005},
		{pairs(0.005, "time,acc_cms2"), "cm/s2", 0.005},
		{pairs(0.005, "Time_s,acc_cm_s2"), "cm/s2", 0.005},
		{pairs(5, "time_ms,acc_ns_g"), "g", 0.005},
		{pairs(0.005, "time,NS_m_s2"), "m/s2", 0.005},

		{single("Sampling rate: 200 Hz"), "mg", 0.005},
		{single("dt=0.005"), "mg", 0.005},
		{single("NPTS= 20, DT= .005"), "mg", 0.005},
		{single("# fs = 200"), "mg", 0.005},
		{single("# 200 samples per second"), "mg", 0.005},
		{single("# SAMPLING_INTERVAL_S: 0.005", "# UNITS: cm/s^2"), "cm/s2", 0.005},

		// What agrees, and what says nothing of the numbers.
		{single("# values in mg, every sample 0.01 s after the other"), "mg", 0.01},
		{single("# processing step 2 of 3: 20 time steps, generated with 25 Hz"), "mg", 0.01},
		{single("# filtered from 0.1 to 25 Hz, e.g. for tests", "# PGA: 0.0003 g", "# 100 Hz"), "mg", 0.01},
	} {
		name := strings.Join(c.lines[:2], " | ")
		_, channels, err := parseLines(c.lines, forAll)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		if got := channels[0]; got.Unit != c.unit || got.StepS != c.step {
			t.Errorf("%s: unit %s, step %g s, want %s and %g", name, got.Unit, got.StepS, c.unit, c.step)
		}
	}
}

// What is not understood, and speaks of another unit or step than was stated for all
// files, is refused.
func TestPlainMentions(t *testing.T) {
	hints := Hints{Unit: "gal", UnitFrom: "--unit", UnitForAll: true, StepS: 0.01, StepFrom: "--dt", StepForAll: true}
	values := column(20, "%.5f")
	for line, want := range map[string]string{
		"# all values in g":                  `unit: "all values in g" speaks of g, --unit says gal: state the unit as # unit: …`,
		"Corrected acceleration, m/s^2":      `unit: "Corrected acceleration, m/s^2" speaks of m/s2, --unit says gal: state the unit as # unit: …`,
		"# scaled to cm s-2 and then to mg":  `unit: "scaled to cm s-2 and then to mg" speaks of mg, --unit says gal: state the unit as # unit: …`,
		"# values [G] of the tower":          `unit: "values [G] of the tower" speaks of g, --unit says gal: state the unit as # unit: …`,
		"# the unit is mm/s/s here":          `unit: "the unit is mm/s/s here" speaks of mm/s2, --unit says gal: state the unit as # unit: …`,
		"# acquired at 200 sps by the tower": `dt: "acquired at 200 sps by the tower" speaks of 200 samples a second, --dt says a step of 0.01 s: state it as # rate = …`,
		"# sampled with 200 Hz":              `dt: "sampled with 200 Hz" speaks of 200 samples a second, --dt says a step of 0.01 s: state it as # rate = …`,
		"Time step 0.005 sec":                `dt: "Time step 0.005 sec" speaks of a step of 0.005 s, --dt says 0.01 s: state it as # dt = …`,
		"# samples at 5 ms intervals":        `dt: "samples at 5 ms intervals" speaks of a step of 0.005 s, --dt says 0.01 s: state it as # dt = …`,
	} {
		_, _, err := parseLines(head([]string{line}, values), hints)
		if err == nil || err.Error() != "case:1: "+want {
			t.Errorf("%s: %v, want %s", line, err, want)
		}
		stated := []string{line, "# unit: gal", "# dt = 0.01"}
		if _, _, err := parseLines(head(stated, values), hints); err != nil {
			t.Errorf("%s: stated beside it: %v", line, err)
		}
	}
}

// A line in front of a header of another format does not make columns of it.
func TestPlainLeavesOtherFormats(t *testing.T) {
	hints := Hints{Unit: "gal", UnitForAll: true, StepS: 0.01, StepForAll: true}
	for format, lines := range map[string][]string{
		"esm":     fixtureLines(t, "esm", "XQ.BSC.00.HNE.D.20410507.031415.C.ACC.ASC"),
		"jma-csv": jmaLines(),
	} {
		checkRefusals(t, []refusal{{format, head([]string{"# downloaded"}, lines), hints,
			"case:2: from here on a file of the format " + format + ": remove the lines before it"}})
	}
}

// TestPlainKeywordHeader has a header of keywords that are no comments.
func TestPlainKeywordHeader(t *testing.T) {
	lines := []string{"STATION= CDH9", "LAT.= 30.5", "SAMPLING RATE= 100Hz", "UNIT  = gal(cm/s/s)", "INITIAL TIME = 2041 03 04 08 12 00", "NS,EW,UD"}
	for i, v := range column(20, "%.3f") {
		lines = append(lines, fmt.Sprintf("%s,%d,%d", v, i%7-3, i%5-2))
	}
	_, channels, err := parseLines(lines, Hints{})
	if err != nil || len(channels) != 3 || short(channels[1].Orientation) != "h 90" {
		t.Fatalf("%d channels, %v", len(channels), err)
	}
	if c := channels[0]; c.Unit != "gal" || c.StepS != 0.01 || c.Station.Code != "CDH9" {
		t.Errorf("unit %s, step %g s, station %+v", c.Unit, c.StepS, c.Station)
	}
	checkRefusals(t, []refusal{
		{"another unit", lines, Hints{Unit: "g", UnitFrom: "catalogue line 2"}, `case:4: unit: the file says gal, catalogue line 2 says g`},
		{"two units in one", edit(t, lines, 4, "gal(cm/s/s)", "gal(m/s/s)"), Hints{}, `case:4: unit: unknown unit "gal(m/s/s)"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`},
	})
}
