package ingest

import (
	"bytes"
	"errors"
	"fmt"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

// outcomeRow is a kind of file: a good one, the same damaged in the ways that
// every reader must see, and what becomes of each.
type outcomeRow struct {
	kind            string // the format, and what kind of it
	good            []byte
	between, within []byte // cut among the samples: at the end of a line or record, and inside one
	count, unit     []byte // announces another count, or another unit; nil where such files state none
	want            outcomes
}

// outcomes are the cells of a row. A file without a byte has the same in all.
type outcomes struct{ good, cutBetween, cutWithin, count, unit, page string }

// The cells of what cannot be wrong, and of the file without a byte.
const (
	statesNone = "does not apply: such files state none"
	wasEmpty   = "refused: f: file is empty"
)

// replace is a text and what comes in its place.
type replace struct{ old, new string }

// none stands for what such files do not state.
var none replace

// textRow is the row of a text that is cut behind line n, and in the line after
// it.
func textRow(t *testing.T, kind string, good []byte, n int, count, unit replace, want outcomes) outcomeRow {
	at := 0
	for range n {
		at += bytes.IndexByte(good[at:], '\n') + 1
	}
	return outcomeRow{
		kind: kind, good: good, between: good[:at], within: good[:at+bytes.IndexByte(good[at:], '\n')/2],
		count: replaced(t, good, count), unit: replaced(t, good, unit), want: want,
	}
}

func replaced(t *testing.T, data []byte, r replace) []byte {
	t.Helper()
	if r == none {
		return nil
	}
	if !bytes.Contains(data, []byte(r.old)) {
		t.Fatalf("no %q", r.old)
	}
	return bytes.Replace(data, []byte(r.old), []byte(r.new), 1)
}

// outcomeRows are the rows for all formats of the committed fixtures.
func outcomeRows(t *testing.T) []outcomeRow {
	file := func(folder, name string) []byte { return readFile(t, filepath.Join(recordsDir(folder), name)) }
	east := file("miniseed", "three-channels.mseed")[5632:] // its last channel
	return []outcomeRow{
		textRow(t, "california-v2", file("californiav2", "bridge-column.v2"), 52, replace{"    96 points", "    88 points"}, replace{"in cm/sec2", "in g"},
			outcomes{
				good:       "read: 96 samples",
				cutBetween: "refused: f:52: accel: truncated: announced 96 values, found 48",
				cutWithin:  "refused: f:53: accel: truncated: announced 96 values, found 52",
				count:      "refused: f:46: accel count: 96 values announced, line 16 says 88",
				unit:       "refused: f:46: unit: acceleration is in g; files of this layout are in cm/s2",
				page:       `refused: f:86: text "<html><body>503 Service Unavailable</bo…" after the end of a channel, expected the heading of another`,
			}),
		textRow(t, "california-v1", file("californiav1", "two-channels.v1"), 35, replace{"   157 points", "   149 points"}, replace{"in g.", "in cm."},
			outcomes{
				good:       "read: 157, 157 samples",
				cutBetween: "refused: f:35: accel: truncated: announced 157 values, found 80",
				cutWithin:  "refused: f:36: accel: truncated: announced 157 values, found 84",
				count:      "refused: f:11: dt: 149 values every 0.01 s do not last 1.57 s",
				unit:       `refused: f:25: unit: "cm" is a unit of length, not of acceleration`,
				page:       `refused: f:93: text "<html><body>503 Service Unavailable</bo…" after the end of a channel, expected the heading of another`,
			}),
		textRow(t, "cosmos", file("cosmos", "two-channels.v2c"), 60, replace{"     150 acceleration", "     142 acceleration"}, replace{"cm/sec2 (04)", "cm/sec2 (02)"},
			outcomes{
				good:       "read: 150, 150 samples",
				cutBetween: "refused: f:60: acceleration: truncated: announced 150 values, found 88",
				cutWithin:  "refused: f:61: acceleration: truncated: announced 150 values, found 92",
				count:      `refused: f:67: acceleration: text "10.179    -4.051" after the 6 values of the line`,
				unit:       "refused: f:49: unit: the data line's code says g, integer 3 says cm/s2",
				page:       `refused: f:139: expected the first line of a section, found "<html><body>503 Service Unavailable</bo…"`,
			}),
		textRow(t, "esm", file("esm", "XQ.BSC.00.HNE.D.20410507.031415.C.ACC.ASC"), 150, replace{"NDATA: 240", "NDATA: 239"}, replace{"UNITS: cm/s^2", "UNITS: m/s^2"},
			outcomes{
				good:       "read: 240 samples",
				cutBetween: "refused: f:150: samples: truncated: announced 240 values, found 86",
				cutWithin:  "refused: f:151: samples: truncated: announced 240 values, found 87",
				count:      "refused: f:304: samples: announced 239 values, found more",
				unit:       "refused: f:33: UNITS: acceleration is in m/s2; files of this layout are in cm/s2",
				page:       `refused: f:305: samples: text "<html><body>503 Service Unavailable</bo…" after the 240 values`,
			}),
		textRow(t, "jma-csv", file("jma-csv", "91017.csv"), 100, none, replace{"gal(cm/s/s)", "gal(m/s/s)"},
			outcomes{
				good:       "read: 150, 150, 150 samples",
				cutBetween: "read: 93, 93, 93 samples",
				cutWithin:  `refused: f:101: samples: expected three values, found "-16.094,3."`,
				count:      statesNone,
				unit:       "refused: f:5: unit: gal and m/s2 are two units",
				page:       `refused: f:158: samples: expected a number, found "<html><body>503 Service Unavailable</bo…"`,
			}),
		textRow(t, "knet", file("knet", "SWB0014103040812.NS"), 40, replace{"Duration Time(s)  3", "Duration Time(s)  2"}, replace{"2000(gal)", "2000(mm)"},
			outcomes{
				good:       "read: 300 samples",
				cutBetween: "refused: f:40: samples: truncated: announced 300 values, found 184",
				cutWithin:  "refused: f:41: samples: truncated: announced 300 values, found 188",
				count:      "refused: f:43: samples: announced 200 values, found more",
				unit:       `refused: f:14: Scale Factor: expected NUMBER(gal)/NUMBER, found "2000(mm)/8388608"`,
				page:       `refused: f:56: samples: expected an integer, found "<html><body>503"`,
			}),
		textRow(t, "at2", file("at2", "NWT_CDH000.AT2"), 30, replace{"NPTS=    197", "NPTS=    189"}, replace{"UNITS OF G", "UNITS OF CM/S"},
			outcomes{
				good:       "read: 197 samples",
				cutBetween: "refused: f:30: samples: truncated: announced 197 values, found 130",
				cutWithin:  "refused: f:31: samples: truncated: announced 197 values, found 133",
				count:      "refused: f:44: samples: announced 189 values, found 197",
				unit:       `refused: f:3: unit: "CM/S" is a unit of velocity, not of acceleration`,
				page:       `refused: f:45: samples: expected a number, found "<html><body>503"`,
			}),
		textRow(t, "smc", file("smc", "north.smc"), 40, replace{"       203", "       200"}, replace{"Invented for tests.", "Units: g"},
			outcomes{
				good:       "read: 203 samples",
				cutBetween: "refused: f:40: samples: truncated: announced 203 values, found 88",
				cutWithin:  "refused: f:41: samples: truncated: announced 203 values, found 92",
				count:      "refused: f:55: samples: more values than the 200 announced",
				unit:       "refused: f:28: unit: the comment says g, corrected series of this layout are in cm/s2",
				page:       `refused: f:56: samples: text "<html><body>503 Service Unavailable</bo…" after the 203 values`,
			}),
		textRow(t, "new-zealand", file("new-zealand", "uncorrected.v1a"), 30, replace{"       0     194", "       0     184"}, replace{"mm/s/s", "g"},
			outcomes{
				good:       "read: 194, 194, 194 samples",
				cutBetween: "refused: f:30: accel: truncated: announced 194 values, found 40",
				cutWithin:  "refused: f:31: accel: truncated: announced 194 values, found 45",
				count:      "refused: f:10: accel count: number of points is 194, integer 34 in line 20 says 184",
				unit:       "refused: f:11: unit: acceleration is in g; files of this layout are in mm/s2",
				page:       `refused: f:139: expected the next component or the end of the file after the samples of integers 34 to 36, found "<html><body>503 Service Unavailable</bo…"`,
			}),
		{kind: "miniseed", good: east, between: east[:2*512], within: east[:2*512+256],
			count: file("miniseed", "damaged-count.mseed"), unit: file("miniseed", "damaged-wrong-unit.mseed"),
			want: outcomes{
				good:       "read: 600 samples",
				cutBetween: "read: 266 samples",
				cutWithin:  "refused: f: record at byte 1024: truncated: its length is 512 bytes, 256 are there",
				count:      "refused: f: XX.TARN.00.HNE: record at byte 0: announced 65418 samples, found room for 721 in 448 bytes of encoding 11 (Steim-2)",
				unit:       `refused: f: XX.TARN.00.HNV: input unit of the sensitivity: unknown unit "V"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`,
				page:       "refused: f: record at byte 2048: no header of miniSEED",
			}},
		textRow(t, "plain", file("plain", "one-column.txt"), 100, none, replace{"# unit: g", "# unit: cm/s"},
			outcomes{
				good:       "read: 160 samples",
				cutBetween: "read: 93 samples",
				cutWithin:  `refused: f:101: samples: the last value "-0.0" is shorter than those before it, and no line end follows: cut off?`,
				count:      statesNone,
				unit:       `refused: f:6: unit: "cm/s" is a unit of velocity, not of acceleration`,
				page:       `refused: f:168: samples: expected a number, found "<html><body>503 Service Unavailable</bo…"`,
			}),
		textRow(t, "plain, with a count", replaced(t, file("plain", "one-column.txt"), replace{"# unit: g", "# unit: g\n# npts = 160"}), 100, replace{"# npts = 160", "# npts = 150"}, replace{"# unit: g", "# unit: cm/s"},
			outcomes{
				good:       "read: 160 samples",
				cutBetween: "refused: f:7: samples: announced 160 values, found 92",
				cutWithin:  "refused: f:7: samples: announced 160 values, found 93",
				count:      "refused: f:7: samples: announced 150 values, found 160",
				unit:       `refused: f:6: unit: "cm/s" is a unit of velocity, not of acceleration`,
				page:       `refused: f:169: samples: expected a number, found "<html><body>503 Service Unavailable</bo…"`,
			}),
		textRow(t, "quay-logger, layout", file("../layouts", "quay.txt"), 20, replace{"197 SAMPLES", "190 SAMPLES"}, none,
			outcomes{
				good:       "read: 197 samples",
				cutBetween: `refused: f:20: samples: truncated: no line matches data.ends_with "^END$" after 100 values`,
				cutWithin:  `refused: f:21: samples: truncated: no line matches data.ends_with "^END$" after 105 values`,
				count:      "refused: f:31: samples: announced 190 values, found 197",
				unit:       statesNone,
				page:       `refused: f:32: samples: text "<html><body>503 Service Unavailable</bo…" after the end of the data`,
			}),
		textRow(t, "tower-table, layout", file("../layouts", "tower.csv"), 100, none, none,
			outcomes{
				good:       "read: 160, 160, 160 samples",
				cutBetween: "read: 93, 93, 93 samples",
				cutWithin:  "refused: f:101: samples: line holds 3 values, expected 5",
				count:      statesNone,
				unit:       statesNone,
				page:       `refused: f:168: samples: expected a number, found "<html><body>503 Service Unavailable</bo…"`,
			}),
	}
}

// TestOutcomes makes the table of formats and damages: each cell says what is
// read, with its warnings, or in which words the file is refused. With -v the
// table is printed.
func TestOutcomes(t *testing.T) {
	hints := mseedHints(t)
	hints.Layouts = exampleLayouts(t)
	var left []string
	for _, info := range Formats(hints.Layouts) {
		left = append(left, info.Name)
	}
	var table strings.Builder
	for _, r := range outcomeRows(t) {
		format, _, _ := strings.Cut(r.kind, ",")
		left = slices.DeleteFunc(left, func(name string) bool { return name == format })
		for _, c := range []struct {
			damage string
			data   []byte
			want   string
		}{
			{"good", r.good, r.want.good},
			{"truncated between lines", r.between, r.want.cutBetween},
			{"truncated within a line", r.within, r.want.cutWithin},
			{"wrong count", r.count, r.want.count},
			{"wrong unit", r.unit, r.want.unit},
			{"junk appended", slices.Concat(r.good, []byte("<html><body>503 Service Unavailable</body></html>\n")), r.want.page},
			{"empty", []byte{}, wasEmpty},
		} {
			got := statesNone
			if c.data != nil {
				got = outcome(t, format, c.data, hints)
			}
			fmt.Fprintf(&table, "%-20s | %-23s | %s\n", r.kind, c.damage, got)
			if got != c.want {
				t.Errorf("%s, %s:\n got %s\nwant %s", r.kind, c.damage, got, c.want)
			}
		}
	}
	if len(left) > 0 {
		t.Errorf("no row for %v", left)
	}
	t.Log("\n" + table.String())
}

// outcome says what becomes of a file, which must be taken for one of the format
// unless it is empty.
func outcome(t *testing.T, format string, data []byte, hints Hints) string {
	t.Helper()
	got, channels, err := Parse(t.Context(), "f", data, hints)
	if got != format && len(data) > 0 {
		t.Errorf("taken for %q, want %q", got, format)
	}
	var words, warnings []string
	for i := range channels {
		words = append(words, fmt.Sprint(len(channels[i].Acceleration)))
		warnings = append(warnings, channels[i].Warnings...)
	}
	if len(words) > 0 {
		words = []string{"read: " + strings.Join(words, ", ") + " samples"}
	}
	for _, w := range slices.Compact(warnings) {
		words = append(words, "warning: "+w)
	}
	if skip, ok := errors.AsType[*NotMotionError](err); ok {
		words = append(words, "skipped: "+skip.Reason)
	} else if err != nil {
		words = append(words, "refused: "+err.Error())
	}
	return strings.Join(words, "; ")
}
