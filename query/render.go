package query

import (
	"fmt"
	"io"
	"slices"
	"strconv"
	"strings"
	"unicode"
)

// Format is a way to write an answer.
type Format string

// The formats: aligned text for people, rows for spreadsheets, and JSON.
const (
	FormatTable Format = "table"
	FormatCSV   Format = "csv"
	FormatJSON  Format = "json"
)

// ParseFormat reads a format, one of those accepted or, where none is named, of
// all. The empty text gives FormatTable.
func ParseFormat(text string, accepted ...Format) (Format, error) {
	if text == "" {
		return FormatTable, nil
	}
	if len(accepted) == 0 {
		accepted = []Format{FormatTable, FormatCSV, FormatJSON}
	}
	f := Format(text)
	if !slices.Contains(accepted, f) {
		return f, usage("format", "unknown format %q; accepted here: %s", text, joinWords(accepted))
	}
	return f, nil
}

// Units are those of numbers for people.
type Units string

// UnitsSI writes m, m/s, kN, kN·m and kJ; UnitsUS writes in, in/s, kip and
// kip·in. Accelerations are in g in both.
const (
	UnitsSI Units = "si"
	UnitsUS Units = "us"
)

// ParseUnits reads "si" or "us". The empty text gives UnitsSI.
func ParseUnits(text string) (Units, error) {
	switch u := Units(text); u {
	case "":
		return UnitsSI, nil
	case UnitsSI, UnitsUS:
		return u, nil
	}
	return "", usage("units", "unknown units %q; accepted: si, us", text)
}

// One of the unit in SI, exact; see the sources in this package's table of
// units.
const (
	metresPerInch  = 0.0254
	newtonsPerKip  = 4448.2216152605
	joulesPerKipIn = newtonsPerKip * metresPerInch
)

// ofLength is a unit of SI that holds a length once, such as "m/s", in these units, with the
// value of one in SI; others stay.
func (u Units) ofLength(name string) (string, float64) {
	rest, ok := strings.CutPrefix(name, "m")
	if u != UnitsUS || !ok || rest != "" && rest[0] != '/' {
		return name, 1
	}
	return "in" + rest, metresPerInch
}

// Remarks returns the lines that belong to an answer beside its rows: what was
// left out and why, and notes. It is empty where there is none, and ends in a
// line end otherwise. Tables and JSON have them; beside CSV they go to people by
// another way.
func (r *SelectionReport) Remarks() string {
	var b strings.Builder
	for _, l := range r.LeftOut {
		fmt.Fprintf(&b, "left out: %s: %s\n", countOf(l.Records, "record", "records"), printable(l.Reason))
	}
	for _, n := range r.Notes {
		fmt.Fprintf(&b, "note: %s\n", printable(n))
	}
	return b.String()
}

// heading describes the selection in one line.
func (r *SelectionReport) heading() string {
	text := fmt.Sprintf("%s, %s, %s; component %s; siting %s", countOf(r.Records, "record", "records"),
		countOf(r.Spectra, "spectrum", "spectra"), countOf(r.Events, "event", "events"), r.Component.inWords(), r.Siting)
	text += r.Scope.words()
	if r.Where != "" {
		text += "; where " + r.Where
	}
	return printable(text)
}

// percentKey names a percentile: "16", "97.5".
func percentKey(p float64) string { return strconv.FormatFloat(p, 'f', -1, 64) }

// figure writes a number for people, in four significant digits.
func figure(x float64) string {
	const digits = 4
	switch {
	case !isDefined(x):
		return "-"
	case x == 0:
		return "0"
	}
	// The exponent is that of the rounded number: 9.9996 is 10.00.
	text := strconv.FormatFloat(x, 'e', digits-1, 64)
	_, power, _ := strings.Cut(text, "e")
	exponent, err := strconv.Atoi(power)
	if err != nil || exponent < -4 || exponent > 6 {
		return text
	}
	rounded, err := strconv.ParseFloat(text, 64)
	if err != nil {
		return text
	}
	return strconv.FormatFloat(rounded, 'f', max(0, digits-1-exponent), 64)
}

// printable puts "?" for what could move a terminal's cursor or break a line.
func printable(s string) string {
	return strings.Map(func(r rune) rune {
		if unicode.IsPrint(r) {
			return r
		}
		return '?'
	}, s)
}

// answer is what can be written in every format.
type answer struct {
	what   string // for errors
	table  func() []byte
	csv    func() []byte
	object func() object
}

// write renders the answer. The error is a UsageError for another format and otherwise one
// of w.
func (a answer) write(w io.Writer, format Format) error {
	var text []byte
	var err error
	switch format {
	case FormatTable, "":
		text = a.table()
	case FormatCSV:
		text = a.csv()
	case FormatJSON:
		text, err = jsonText(a.object())
	default:
		_, err = ParseFormat(string(format))
	}
	if err != nil {
		return err
	}
	return writeText(w, a.what, text)
}

func writeText(w io.Writer, what string, text []byte) error {
	if _, err := w.Write(text); err != nil {
		return fmt.Errorf("write %s: %w", what, err)
	}
	return nil
}

// shortest writes a number in the fewest digits that restore it.
func shortest(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }

// shortOrDash is for numbers that came from a text, such as a magnitude.
func shortOrDash(x *float64) string {
	if x == nil {
		return "-"
	}
	return shortest(*x)
}

func orDash(s *string) string {
	if s == nil {
		return "-"
	}
	return *s
}

func orEmpty(s *string) string {
	if s == nil {
		return ""
	}
	return *s
}

func lineText(n *int) string {
	if n == nil {
		return ""
	}
	return strconv.Itoa(*n)
}
