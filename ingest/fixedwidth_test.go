package ingest

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
	"time"
)

func TestParseFortran(t *testing.T) {
	for in, want := range map[string]fieldLayout{
		"(8F10.3)": {8, 10, 3}, "8F10.3": {8, 10, 3}, "(1F14.9  )": {1, 14, 9}, "( 5 F 15.6 )": {5, 15, 6}, "(10I8)": {10, 8, 0},
		"(1E15.6)": {1, 15, 6}, "e15.6": {1, 15, 6}, "(6D13.6)": {6, 13, 6}, "(8f10.0)": {8, 10, 0}, "(4ES20.12E3)": {4, 20, 12},
		"(F8)": {1, 8, 0}, "(5G15.7)": {5, 15, 7},
	} {
		if got, err := parseFortran(in); err != nil || got != want {
			t.Errorf("parseFortran(%q) = %+v, %v, want %+v", in, got, err, want)
		}
	}
	for _, in := range []string{
		"", "()", "(8X10)", "(F)", "(0F10.3)", "(8F0.3)", "(8F10.11)", "(999F10.3)", "(8F99.3)", "(1P8E10.3)", "(4F10.3,4F9.2)",
		"(8F10.3", "free", "(99999999999999999999F10.3)", "(8F99999999999999999999)", "(2(4F10.3))", "(A80)",
	} {
		if got, err := parseFortran(in); err == nil {
			t.Errorf("parseFortran(%q) = %+v, want an error", in, got)
		}
	}
}

// readText reads count values of a text by a format.
func readText(t *testing.T, format, text string, count int) ([]float64, int, error) {
	t.Helper()
	l, err := parseFortran(format)
	if err != nil {
		t.Fatal(err)
	}
	txt, err := NewText([]byte(text))
	if err != nil {
		t.Fatal(err)
	}
	return l.series(txt, 1, count, "samples")
}

func TestFixedWidthSeries(t *testing.T) {
	cases := []struct {
		name, format, text string
		count, next        int
		want               []float64
	}{
		{"touching", "(4F8.3)", "-123.456-999.999 100.000-100.000\n   1.000", 5, 3, []float64{-123.456, -999.999, 100, -100, 1}},
		{"exponents", "(3E12.4)", "  0.1234E+02 -1.5000D-03  .12345-103", 3, 2, []float64{12.34, -0.0015, 0.12345e-103}},
		{"trailing blanks missing", "(3F6.1)", "   1.0  2.0\n", 2, 2, []float64{1, 2}},
		{"left-justified", "(3F6.1)", "1.0   2.0   3.0   ", 3, 2, []float64{1, 2, 3}},
		{"text after the series is not read", "(2F4.1)", " 1.0 2.0\nEnd-of-data", 2, 2, []float64{1, 2}},
		{"implied point", "(3F6.2)", "   123  -250     0", 3, 2, []float64{1.23, -2.5, 0}},
		{"zero without a point among values with one", "(3F6.2)", "  1.23     0 -2.50", 3, 2, []float64{1.23, 0, -2.5}},
		{"explicit point wins", "(2F8.0)", "    1.25   -3.5", 2, 2, []float64{1.25, -3.5}},
		{"one a line", "(1F8.3)", "   1.000\n  -2.500\n", 2, 3, []float64{1, -2.5}},
		{"zero is zero under every reading", "(2F6.2)", "    0.   250\n   125     0\n", 4, 3, []float64{0, 2.5, 1.25, 0}},
		{"integers", "(4I3)", "  1 -2300", 3, 2, []float64{1, -2, 300}},
	}
	for _, tc := range cases {
		t.Run(tc.name, func(t *testing.T) {
			got, next, err := readText(t, tc.format, tc.text, tc.count)
			if err != nil || !slices.Equal(got, tc.want) || next != tc.next {
				t.Errorf("series = %v, %d, %v, want %v, %d", got, next, err, tc.want, tc.next)
			}
		})
	}
}

func TestFixedWidthRefusals(t *testing.T) {
	cases := []struct{ name, format, text, want string }{
		{"stars", "(2F4.1)", " 1.0****\n", `:1: samples: value 2 is "****": the number did not fit its field`},
		{"infinity", "(1F9.1)", " Infinity\n", `:1: samples: value 1 is "Infinity": not a number`},
		{"words", "(2F6.1)", "   1.0   2.0\nspectra follow\n", ":2: samples: truncated: announced 4 values, found 2"},
		{"two in a field", "(2F8.1)", " 1.0 2.0 3.0\n", `:1: samples: value 1 is "1.0 2.0": not a number`},
		{"tab", "(2F4.1)", "\t1.0 2.0\n", ""},
		{"blank line inside", "(2F4.1)", " 1.0 2.0\n\n 3.0 4.0\n", ":2: samples: line holds 0 values, expected 2"},
		{"mixed points", "(2F6.2)", "  1.23   250\n  1.00  1.00\n", ":1: samples: values with and without a decimal point in one series"},
		{"end line", "(2F4.1)", " 1.0 2.0\n/& end\n", ":2: samples: truncated: announced 4 values, found 2"},
		{"nothing", "(2F4.1)", " 1.0 2.0\n", ":1: samples: truncated: announced 4 values, found 2"},
		{"blanks at the end", "(2F4.1)", " 1.0 2.0\n   \n", ":2: samples: truncated: announced 4 values, found 2"},
	}
	for _, tc := range cases {
		t.Run(tc.name, func(t *testing.T) {
			got, _, err := readText(t, tc.format, tc.text, 4)
			if err == nil {
				t.Fatalf("series = %v, want an error", got)
			}
			if tc.want != "" && err.Error() != tc.want {
				t.Errorf("series: %v, want %s", err, tc.want)
			}
		})
	}
}

// TestFixedWidthRoundTrip prints seeded random series in many layouts and reads
// them back.
func TestFixedWidthRoundTrip(t *testing.T) {
	const seed = 41
	r := rand.New(rand.NewPCG(seed, 2))
	for n := 1; n <= 60; n++ {
		perLine, decimals := 1+r.IntN(12), r.IntN(8)
		width := decimals + 6 // a sign, four digits, a point: fields touch
		form := fmt.Sprintf("%%%d.%df", width, decimals)
		var b strings.Builder
		want := make([]float64, n)
		for i := range want {
			s := fmt.Sprintf(form, (r.Float64()-0.5)*19998)
			if decimals == 0 {
				s = s[1:] + "."
			}
			want[i], _ = parseNumber([]byte(strings.TrimSpace(s)))
			b.WriteString(s)
			if i%perLine == perLine-1 {
				b.WriteString("\n")
			}
		}
		got, next, err := readText(t, fmt.Sprintf("(%dF%d.%d)", perLine, width, decimals), b.String(), n)
		if err != nil || !slices.Equal(got, want) || next != 1+(n+perLine-1)/perLine {
			t.Fatalf("seed %d: %d values as %dF%d.%d: %v, next %d", seed, n, perLine, width, decimals, err, next)
		}
	}
}

func TestFixedWidthAllocatesByContent(t *testing.T) {
	text, err := NewText([]byte(strings.Repeat("\n", 100000) + "  1.0  2.0\n"))
	if err != nil {
		t.Fatal(err)
	}
	l := fieldLayout{perLine: 200, width: 5, decimals: 1}
	if got := l.room(text, 1, 2e9); got != 2 {
		t.Errorf("room for %d values, want 2", got)
	}
}

func TestParseStamp(t *testing.T) {
	for in, want := range map[string]string{
		"6/12/07, 07:23:37.7 UTC (WWVB)":              "2007-06-12T07:23:37.7Z",
		"11/21/86, 23:33:12.6 GMT":                    "1986-11-21T23:33:12.6Z",
		"1/28/15, 21:08 GMT (*LoQ*)":                  "2015-01-28T21:08:00Z",
		"03/10/33 17:54:08 PST":                       "1933-03-11T01:54:08Z",
		"01/02/32 00:00:00 UTC":                       "2032-01-02T00:00:00Z",
		"Record of Tue Jun 12, 2007 00:23:37.735 PDT": "2007-06-12T07:23:37.735Z",
		"03/04/2019, 23:59:60 UTC":                    "2019-03-05T00:00:00Z",
		"02/29/2020, 12:00:00.25 HST":                 "2020-02-29T22:00:00.25Z",
	} {
		got, ok := parseStamp(in)
		if !ok || got.time.Format(time.RFC3339Nano) != want {
			t.Errorf("parseStamp(%q) = %v, %v, want %s", in, got.time, ok, want)
		}
	}
	for _, in := range []string{
		"", "To be determined", "6/12/07, 07:23:37.7", "6/12/07, 07:23:37.7 CST", "13/12/07, 07:23:37.7 UTC", "2/30/07, 07:23:37.7 UTC",
		"6/12/07, 24:23:37.7 UTC", "6/12/07, 07:60:37.7 UTC", "6/12/07, 07:23:61 UTC", "Foo 12, 2007 00:23:37.7 PDT",
	} {
		if got, ok := parseStamp(in); ok {
			t.Errorf("parseStamp(%q) = %v, want none", in, got.time)
		}
	}
}

func TestParsePlaces(t *testing.T) {
	for in, want := range map[string][2]float64{
		"40.364N, 124.433W, H=17KM": {40.364, -124.433}, "Hypocenter: 36.400   -121.100   H= 9km": {36.4, -121.1},
		"41.5S 173.25E": {-41.5, 173.25}, "95.0N, 190.0W": {95, -190}, "-41.5, 173.25": {-41.5, 173.25},
	} {
		if lat, lon := parsePosition(in); lat != Known(want[0]) || lon != Known(want[1]) {
			t.Errorf("parsePosition(%q) = %v, %v, want %v", in, lat, lon, want)
		}
	}
	for _, in := range []string{"", "0.0N, 0.0W", "40 120"} {
		if lat, lon := parsePosition(in); lat.Known || lon.Known {
			t.Errorf("parsePosition(%q) = %v, %v, want unknown", in, lat, lon)
		}
	}
	for in, want := range map[string]string{
		"ML=5.1(BRK).": "5.1 ML", "ML: 5.1, Mw: 5.4": "5.4 Mw", "MS=6.0 MB=5.8": "6 Ms", "mb = 4": "4 mb",
		"ML: To be determined.": "0 ", "": "0 ", "Mw=77": "77 Mw", "Mw=0": "0 ", "RML=5.0": "0 ",
	} {
		if m, scale := parseMagnitude(in); fmt.Sprintf("%g %s", m.Value, scale) != want {
			t.Errorf("parseMagnitude(%q) = %v %s, want %s", in, m, scale, want)
		}
	}
}

func TestPrintedAgreement(t *testing.T) {
	for _, tc := range []struct {
		a, b string
		want bool
	}{
		{".008", "0.0083333", true}, {".010", "0.01", true}, {".005", ".010", false}, {".0050", ".0052", false},
		{".0050", ".0051", true}, // the digits are all that is known
	} {
		a, err := newPrinted(tc.a, 1, "dt")
		if err != nil {
			t.Fatal(err)
		}
		b, err := newPrinted(tc.b, 2, "dt")
		if err != nil {
			t.Fatal(err)
		}
		if a.agrees(b) != tc.want || b.agrees(a) != tc.want {
			t.Errorf("%s agrees with %s = %v, want %v", tc.a, tc.b, !tc.want, tc.want)
		}
	}
}

func TestLatin(t *testing.T) {
	if got := latin([]byte("Ca\xf1on")); got != "Cañon" {
		t.Errorf("latin = %q, want Cañon", got)
	}
	if got := latin([]byte("Cañon")); got != "Cañon" {
		t.Errorf("latin = %q, want UTF-8 as it is", got)
	}
}

func BenchmarkFixedWidthSeries(b *testing.B) {
	for _, form := range []string{"%10.5f", "%15.6E", "%8.0f"} {
		x := make([]float64, 20000)
		r := rand.New(rand.NewPCG(3, 3))
		for i := range x {
			x[i] = (r.Float64() - 0.5) * 800
		}
		data := []byte(strings.Join(fixed(x, form, 8, true), "\n"))
		text, err := NewText(data)
		if err != nil {
			b.Fatal(err)
		}
		l := fieldLayout{perLine: 8, width: len(fmt.Sprintf(form, 1.0)), decimals: pointExplicit}
		if form == "%8.0f" {
			l.decimals = 0
		}
		b.Run(form, func(b *testing.B) {
			b.SetBytes(int64(len(data)))
			b.ReportAllocs()
			for b.Loop() {
				if _, _, err := l.series(text, 1, len(x), "samples"); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

func TestRoomNeverExceedsFields(t *testing.T) {
	if got := (fieldLayout{perLine: 8, width: 10}).lines(math.MaxInt32); got != 1<<28 {
		t.Errorf("lines(2³¹-1) = %d, want 2²⁸", got)
	}
}
