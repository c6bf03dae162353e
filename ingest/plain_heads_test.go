package ingest

import (
	"errors"
	"fmt"
	"strings"
	"testing"
)

// headCase is a head over numbers and what comes of it: unit, step and direction of
// the only channel, or words of the error.
type headCase struct{ head, want string }

// checkHeads reads each head over the numbers.
func checkHeads(t *testing.T, cases []headCase, numbers []string, hints Hints) {
	t.Helper()
	for _, c := range cases {
		_, channels, err := parseLines(head(strings.Split(c.head, "\n"), numbers), hints)
		var got string
		skip, isSkip := errors.AsType[*NotMotionError](err)
		switch {
		case isSkip:
			got = "skip: " + skip.Reason
		case err != nil:
			got = err.Error()
		default:
			for _, ch := range channels {
				got += strings.TrimRight(fmt.Sprintf("%s %g %s", ch.Unit, ch.StepS, short(ch.Orientation)), " ") + ";"
			}
			got += strings.Join(channels[0].Warnings, ";")
		}
		if got != c.want {
			t.Errorf("%q: %s, want %s", c.head, got, c.want)
		}
	}
}

// Prose, in a comment or not, names no columns, decides nothing and skips nothing.
func TestPlainHeadsOfProse(t *testing.T) {
	const read = "gal 0.01;"
	stated := Hints{Unit: "gal", StepS: 0.01}
	var cases []headCase
	for _, line := range []string{
		"# Fourier filter 0.1-25 Hz", "# Frequency 100 Hz", "# Frequency = 100 Hz", "Frequency = 100 Hz", "# Station RS 12", "Station SA 12", "# San Diego SD",
		"# Event: SA 3", "# Velocity model: local 1D", "# displacement at end 0.03 cm", "# Velocity and displacement are in other files",
		"# Period of record 15 s", "# spectral corner f0 0.1", "Fourier-filtered record",
		"# 1", "# 12", "# E", "# W", "# NS", "# Time", "# t", "# m", "# s", "# DOWN",
	} {
		cases = append(cases, headCase{line, read})
	}
	for _, line := range []string{"# 1", "# E", "# 12", "# W"} {
		cases = append(cases, headCase{line + "\n# component: N", "gal 0.01 h 0;"})
	}
	cases = append(cases, []headCase{
		{"# Acc (gal)", read}, {"# Acc, gal", read},
		{"# Velocity (cm/s)", "skip: velocity series, not acceleration"}, {"# velocity", "skip: velocity series, not acceleration"},
		{"# Sa (g)", "skip: " + spectraReason}, {"# Spectral acceleration", "skip: " + spectraReason},
	}...)
	checkHeads(t, cases, column(20, "%.5f"), stated)

	cases = nil
	for _, line := range []string{"# No. 12", "# 1 2", "# 01 12", "# N S", "# Fourier filtered", "# Station RS"} {
		cases = append(cases, headCase{line, read})
	}
	checkHeads(t, cases, timed(even(20, 0.01), "%.2f", " "), Hints{Unit: "gal"})
	checkHeads(t, []headCase{{"# RS station, NS", read}, {"# N,E", read}, {"# Frequency 100, gal", read}}, timed(even(20, 0.01), "%.2f", ","), Hints{Unit: "gal"})
}

// A digit counts channels, and is no direction.
func TestPlainHeadsOfCounters(t *testing.T) {
	hints := Hints{Unit: "gal", StepS: 0.02}
	checkHeads(t, []headCase{
		{"Time (s),1,2,3", `case:2: columns: column "2": several columns of accelerations need different directions as names`},
	}, fourColumns(0.02), hints)
	checkHeads(t, []headCase{{"Time (s),1", "gal 0.02;"}, {"Time (s),3 (gal)", "gal 0.02;"}}, timed(even(20, 0.02), "%.2f", ","), Hints{Unit: "gal", UnitForAll: true, StepS: 0.02})
	checkHeads(t, []headCase{
		{"# component: 1", `gal 0.02;line 1: component "1" is no direction`}, {"# component: 3", `gal 0.02;line 1: component "3" is no direction`}, {"Component: 2", `gal 0.02;line 1: component "2" is no direction`},
		{"# component: H2", "gal 0.02 h #2;"}, {"# component: 010", "gal 0.02 h 10;"}, {"# component: 0", "gal 0.02 h 0;"},
	}, column(20, "%.4f"), hints)
}

// Names and the units below them do not contradict each other.
func TestPlainHeadsOfTwoUnits(t *testing.T) {
	checkHeads(t, []headCase{
		{"Time (s),Acc (g)\ns,cm/s2", `case:2: columns: unit "cm/s2" here, column "Acc (g)" in line 1`},
		{"Time,acc_gal\ns,g", `case:2: columns: unit "g" here, column "acc_gal" in line 1`},
		{"time_ms,Acc (gal)\ns,gal", `case:2: columns: unit "s" here, column "time_ms" in line 1`},
		{"Time (s),Acc (gal)\nsec,cm/s2", "gal 0.02;"},
	}, timed(even(20, 0.02), "%.2f", ","), Hints{})
}

// Directions are stated by keys that speak of the component. An azimuth may be that
// of the epicentre.
func TestPlainHeadsOfDirections(t *testing.T) {
	hints := Hints{Unit: "gal", StepS: 0.02}
	checkHeads(t, []headCase{
		{"Azimuth: 214", "gal 0.02;line 1: azimuth \"214\" may be another than the component's, not used: state it as component"},
		{"# azimuth: 214", "gal 0.02 h 214;"}, {"# azimuth: 90.0", "gal 0.02 h 90;"}, {"# azimuth: N45E", "gal 0.02 h 45;"},
		{"# epicentral distance: 34 km\n# azimuth: 214", "gal 0.02;line 2: azimuth \"214\" may be another than the component's, not used: state it as component"},
		{"Sensor azimuth: 214", "gal 0.02 h 214;"}, {"# component azimuth: 214", "gal 0.02 h 214;"}, {"# orientation: EW", "gal 0.02 h 90;"},
		{"# component: 090°", "gal 0.02 h 90;"}, {"# component: 90 deg", "gal 0.02 h 90;"}, {"Component: HNE", "gal 0.02 h 90;"}, {"# component: HNZ", "gal 0.02 v;"},
		{"Component: radial", `gal 0.02;line 1: component "radial" not understood`},
		{"# component: N\n# direction: E", `case:2: direction: "E" here, "N" in line 1`},
		{"# component: N\n# direction: NS", "gal 0.02 h 0;"},
		{"NS (gal)\n# component: EW", `case:2: component: "EW" here, column NS over the numbers`},
		{"NS (gal)\n# component: north", "gal 0.02 h 0;"},
	}, column(20, "%.4f"), hints)
}
