package ingest

import (
	"strings"
	"testing"
)

// withRemarks puts lines behind the first k of others.
func withRemarks(lines []string, k int, remarks ...string) []string {
	return head(lines[:k], head(remarks, lines[k:]))
}

// Comments below the numbers are part of the head, and those among them are passed over
// where times or a count say that the numbers are one record.
func TestPlainRemarks(t *testing.T) {
	known := Hints{Unit: "gal", UnitFrom: "--unit", UnitForAll: true, StepS: 0.01, StepFrom: "--dt", StepForAll: true}
	values, rows := column(20, "%.5f"), timed(even(20, 0.01), "%.2f", ",")
	for name, c := range map[string]struct {
		lines []string
		unit  string
	}{
		"at the end":          {withRemarks(values, 20, "# end of file"), "gal"},
		"behind blanks":       {withRemarks(values, 20, "", "", "// end", "%"), "gal"},
		"statements below":    {withRemarks(values, 20, "# unit: g", "# npts = 20"), "g"},
		"within times":        {withRemarks(rows, 7, "# gap?", "#"), "gal"},
		"within a count":      {head([]string{"# npts = 20"}, withRemarks(values, 7, "! page 2")), "gal"},
		"count on a line":     {head([]string{"20"}, withRemarks(values, 7, "% page 2")), "gal"},
		"wrapped, at the end": {head([]string{"# npts = 43"}, withRemarks(wrappedLines(43, 8), 6, "# end")), "gal"},
	} {
		_, channels, err := parseLines(c.lines, known)
		if err != nil || len(channels) != 1 {
			t.Errorf("%s: %d channels, %v", name, len(channels), err)
			continue
		}
		want := asPrinted(t, ring(20, 0.3, 0.3, 0.97), "%.5f")
		if strings.HasPrefix(name, "wrapped") {
			want = asPrinted(t, ring(43, 0.3, 0.3, 0.97), "%.5f")
		}
		if got := channels[0]; got.Unit != c.unit || len(got.Acceleration) != len(want) || got.StepS != 0.01 {
			t.Errorf("%s: unit %s, %d values", name, got.Unit, len(got.Acceleration))
		}
	}
	const second = ` among the numbers: a second record?`
	checkRefusals(t, []refusal{
		{"no count", withRemarks(values, 7, "# page 2"), known, `case:8: samples: comment "page 2"` + second + ` if not, state their count as # npts = …`},
		{"a direction", withRemarks(rows, 7, "# EW"), known, `case:8: samples: "EW"` + second},
		{"a statement", withRemarks(rows, 7, "# unit: g"), known, `case:8: samples: "unit: g"` + second},
		{"a number", withRemarks(values, 20, "# 0.1"), known, `case:21: samples: expected a number, found "# 0.1"`},
		{"no value", withRemarks(values, 20, "#N/A"), known, `case:21: samples: expected a number, found "#N/A"`},
		{"a cell's error", withRemarks(values, 20, "#VALUE!"), known, `case:21: samples: expected a number, found "#VALUE!"`},
		{"an empty field", withRemarks(strings.Split(strings.ReplaceAll(strings.Join(rows, "\n"), ",", ";"), "\n"), 7, ";gap"), known, `case:8: samples: value 1 of the line is empty: missing values are not read`},
		{"a wrong count", withRemarks(values, 20, "# npts = 21"), known, `case:21: samples: announced 21 values, found 20`},
		{"another unit", withRemarks(values, 20, "# all values in g"), known, `case:21: unit: "all values in g" speaks of g, --unit says gal: state the unit as # unit: …`},
		{"two units", head([]string{"# unit: gal"}, withRemarks(values, 20, "# unit: g")), known, `case:22: unit: "g" here, "gal" in line 1`},
		{"a second record", head(rows, head([]string{"# then"}, rows)), known, `case:22: time: step -0.19 where the median is 0.01 (from -0.19 to 0.01): time goes back, two records in one file?`},
	})
}
