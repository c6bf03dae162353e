package ingest

import (
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
		{"one may be a spike", series(0.01, 100), ""},
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
