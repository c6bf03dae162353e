package ingest

import (
	"fmt"
	"strings"
	"testing"
)

// Marks of missing values never become data, in whatever unit the file is.
func TestMarksOfMissingValues(t *testing.T) {
	series := func(unit float64, at ...int) *Channel {
		c := &Channel{StepS: 0.01, Unit: "cm/s2", UnitMPS2: unit, Acceleration: ring(400, 100*unit, 1.9, 0.99)}
		for _, i := range at {
			c.Acceleration[i] = -999 * unit
		}
		return c
	}
	for _, test := range []struct {
		name string
		c    *Channel
		want string
	}{
		{"several", series(0.01, 100, 200, 300), "value -999 occurs 3 times, first as value 101"},
		{"several in a row", series(0.01, 100, 101), "occurs 2 times"},
		{"one in binary may be a spike", series(0.01, 100), ""},
		{"none", series(0.01), ""},
		{"a motion that reaches it", func() *Channel {
			c := series(0.01, 100, 101)
			c.Acceleration[102] = 600 * 0.01
			return c
		}(), ""},
	} {
		err := check(test.c)
		if (err == nil) != (test.want == "") || err != nil && !strings.Contains(err.Error(), test.want) {
			t.Errorf("%s: %v, want %q", test.name, err, test.want)
		}
	}
}

// A single mark in a text is refused with its line, in whatever it is written; what
// is no mark, or not apart from all else, is data.
func TestOneMarkInAText(t *testing.T) {
	jma, at2Lines := jmaLines(), fixtureLines(t, "at2", "NWT_CDH090.AT2")
	gal := Hints{Unit: "gal", StepS: 0.01}
	var values []string
	for _, x := range ring(400, 95, 1.9, 0.99) {
		values = append(values, fmt.Sprintf("%.3f", x))
	}
	with := func(mark string) []string { return edit(t, values, 100, values[99], mark) }
	for _, c := range []struct {
		name  string
		lines []string
		hints Hints
		want  string
	}{
		{"plain, -9999", with("-9999"), gal, "case:100: samples: value -9999 is apart from all others: a mark for a missing value?"},
		{"plain, -999", with("-999"), gal, "case:100: samples: value -999 is apart"},
		{"plain, 999.9", with("999.9"), gal, "case:100: samples: value 999.9 is apart"},
		{"plain, 999.99", with("999.99"), gal, "case:100: samples: value 999.99 is apart"},
		{"plain, decimal comma", decimalComma(with("9999.999")), gal, "case:100: samples: value 9999.999 is apart"},
		{"plain, two marks", edit(t, with("-9999"), 200, values[199], "999"), gal, "case:100: samples: value -9999 is apart"},
		{"plain, five digits are beyond 20 g as well", with("99999"), gal, "case:100: samples: value 99999 is apart"},
		{"JMA, -9999", edit(t, jma, 50, strings.Split(jma[49], ",")[1], "-9999"), Hints{}, "case:50: samples: channel EW: value -9999 is apart"},
		{"JMA, -999.000", edit(t, jma, 50, strings.Split(jma[49], ",")[0], "-999.000"), Hints{}, "case:50: samples: channel NS: value -999 is apart"},
		{"JMA, 9999.999", edit(t, jma, 50, strings.Split(jma[49], ",")[2], "9999.999"), Hints{}, "case:50: samples: channel UD: value 9999.999 is apart"},
		{"AT2", edit(t, at2Lines, 8, strings.Fields(at2Lines[7])[2], "9.99"), Hints{}, "case:8: samples: value 9.99 is apart"},
		{"AT2, exponents", edit(t, at2Lines, 8, strings.Fields(at2Lines[7])[2], "9.9900000E+00"), Hints{}, "case:8: samples: value 9.99 is apart"},

		{"other digits", with("-998"), gal, ""},
		{"two nines", with("99"), gal, ""},
		{"not apart", edit(t, with("999"), 101, values[100], "334"), gal, ""},
	} {
		_, _, err := parseLines(c.lines, c.hints)
		if (err == nil) != (c.want == "") || err != nil && !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, want %q", c.name, err, c.want)
		}
	}
}

func TestIsMark(t *testing.T) {
	for _, v := range []float64{999, -999, 9999, 99999, 999999, 999.9, -999.99, 9999.999, 99.9, 9.99, 999.000, 99999 * 0.01 / 0.01} {
		if !isMark(v) {
			t.Errorf("%g is no mark", v)
		}
	}
	for _, v := range []float64{0, 9, 99, 9.9, 0.999, 998, 1000, 999.8, 9989, 899, 99.8, 1e300, 990} {
		if isMark(v) {
			t.Errorf("%g is a mark", v)
		}
	}
}
