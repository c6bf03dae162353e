package ingest

import (
	"slices"
	"testing"
)

// TestFixedWidthOutcomes damages the same good file of each layout in the same
// ways and looks at what becomes of it: read, or refused in these words.
func TestFixedWidthOutcomes(t *testing.T) {
	v1, v2, smc, nz := v1East.lines(), v2Bridge.lines(), smcNorth.lines(), nzFile(nzRaw)
	const junk = "junk"
	for _, f := range []struct {
		format                                   string
		good, truncated, count, unit             []string
		wantTruncated, wantCount, wantUnit, tail string
	}{
		{
			format: "california-v1", good: v1, truncated: v1[:35], count: edit(t, v1, 25, "   157", "   165"), unit: edit(t, v1, 25, "in g.", "in cm."),
			wantTruncated: "case:35: accel: truncated: announced 157 values, found 80",
			wantCount:     "case:11: dt: 165 values every 0.01 s do not last 1.57 s",
			wantUnit:      `case:25: unit: "cm" is a unit of length, not of acceleration`,
			tail:          `case:47: text "junk" after the end of a channel, expected the heading of another`,
		},
		{
			format: "california-v2", good: v2, truncated: v2[:52], count: edit(t, v2, 46, "    96", "   104"), unit: edit(t, v2, 46, "cm/sec2", "g"),
			wantTruncated: "case:52: accel: truncated: announced 96 values, found 48",
			wantCount:     "case:46: accel count: 104 values announced, integer 53 in line 29 says 96",
			wantUnit:      "case:46: unit: acceleration is in g; files of this layout are in cm/s2",
			tail:          `case:86: text "junk" after the end of a channel, expected the heading of another`,
		},
		{
			format: "smc", good: smc, truncated: smc[:40], count: edit(t, smc, 14, "       203", "       211"), unit: edit(t, smc, 28, "Invented for tests.", "Units: m/s/s"),
			wantTruncated: "case:40: samples: truncated: announced 203 values, found 88",
			wantCount:     "case:55: samples: truncated: announced 211 values, found 203",
			wantUnit:      "case:28: unit: the comment says m/s/s, corrected series of this layout are in cm/s2",
			tail:          `case:56: samples: text "junk" after the 203 values`,
		},
		{
			format: "new-zealand", good: nz, truncated: nz[:120], count: nzSet(t, nz, 1, 34, "     204"), unit: edit(t, nz, 11, "mm/s/s", "mm/s"),
			wantTruncated: "case:120: accel: truncated: announced 194 values, found 20",
			wantCount:     "case:10: accel count: number of points is 194, integer 34 in line 20 says 204",
			wantUnit:      `case:11: unit: "mm/s" is a unit of velocity, not of acceleration`,
			tail:          `case:139: expected the next component or the end of the file after the samples of integers 34 to 36, found "junk"`,
		},
	} {
		t.Run(f.format, func(t *testing.T) {
			if format, channels, err := parseLines(f.good, Hints{}); err != nil || format != f.format || len(channels) == 0 {
				t.Fatalf("Parse = %s, %d channels, %v", format, len(channels), err)
			}
			wantRefusal(t, f.truncated, Hints{}, f.format, f.wantTruncated)
			wantRefusal(t, f.count, Hints{}, f.format, f.wantCount)
			wantRefusal(t, f.unit, Hints{}, f.format, f.wantUnit)
			wantRefusal(t, append(slices.Clone(f.good), junk), Hints{}, f.format, f.tail)
		})
	}
	if _, _, err := Parse("case", nil, Hints{}); err == nil || err.Error() != "case: file is empty" {
		t.Errorf("empty file: %v", err)
	}
}
