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
