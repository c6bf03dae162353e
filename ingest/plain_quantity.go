package ingest

import (
	"regexp"
	"strings"
)

// quantityKeys are those of lines that say what the numbers are.
var quantityKeys = []string{"quantity", "type", "data_type"}

// otherSeries returns a *NotMotionError where a key says in whole words that the
// numbers are another quantity than acceleration.
func (h *plainHead) otherSeries() error {
	if word := commentKey(h.stated(quantityKeys...).text); isSeriesName(word) {
		return &NotMotionError{orElse(otherQuantity(word), spectraReason)}
	}
	return nil
}

// otherInWords is otherSeries for a line of words, which says nothing against a unit of
// acceleration that is stated, and is a warning where a unit was stated for this file.
func (h *plainHead) otherInWords(columns []plainColumn, hints Hints) error {
	_, err := ParseUnit(h.stated(unitKeys...).text)
	stated := err == nil
	for _, c := range columns {
		base, _ := splitUnit(c.name)
		stated = stated || c.kind == columnValue && (c.unit.text != "" || strings.HasPrefix(commentKey(base), "acc"))
	}
	for _, l := range h.lines {
		reason := spokenQuantity(l.words())
		switch {
		case reason == "" || stated:
		case hints.Unit == "" || hints.UnitForAll:
			return &NotMotionError{reason}
		default:
			h.doubt("line %d: %s speaks of another quantity: %s from %s taken", l.line, found(l.text), hints.Unit, orElse(hints.UnitFrom, "the hint"))
		}
	}
	return nil
}

// How a line says that the numbers are a velocity, a displacement or a spectrum, and
// the words of lines that speak of such beside the numbers.
var (
	seriesSpoken = regexp.MustCompile(`(?i)^(?:(?:(?:un)?corrected|raw|processed|filtered|ground|relative|absolute|total|integrated|horizontal|vertical|\d+) +)*(vel|disp)(?:ocity|lacement)s?` +
		`(?:$| *[,;(\[]| +(?:of|at|for) +(?:the +)?(?:station|site|ground|instrument|record)| +(?:time|histor|series|record|data|trace|component|values|points|in +(?:cm|mm|m|in|ft|inch|met|cent))[^,]*)`)
	seriesLast     = regexp.MustCompile(`(?i)(?:^|[\s,;])(vel|disp)(?:ocity|lacement)(?: *[(\[][^)\]]*[)\]])?$|(?:^|[\s,;])(vel|disp)(?:ocity|lacement)?[.,]? *[(\[]?(?:in +)?(?:cm|mm|m|in|ft)(?:/s(?:ec)?)?[)\]]?$`)
	notLast        = regexp.MustCompile(`(?i)\b(?:and|or|for|from|by|zero|constant|with|without|in +(?:vel|disp))\b`)
	seriesShort    = regexp.MustCompile(`^(VEL|DISP)(?:OC|L)?\.?(?: +[A-Z][A-Z0-9.-]*)*$`)
	spectrumSpoken = regexp.MustCompile(`(?i)^(?:(?:elastic|pseudo|absolute|relative|acceleration|velocity|displacement|acc) *[ -] *)*(?:response|fourier|amplitude|power) *(?:amplitude *)?spectr(?:um|a)\b`)
	spectralShort  = regexp.MustCompile(`^P?S[AVD]\b.*(?:%|damp)`)
	notSpoken      = regexp.MustCompile(`(?i)model|sensor|seismomet|transducer|shear|wave|\bvs\d*\b|peak|\bpg[vd]\b|max|filter|window|baseline|\bfiles?\b|drift|residual|final|permanent|\bnot?\b|available|[:=] *[-+]?\.?\d`)
	notSpectrum    = regexp.MustCompile(`(?i)match|compatib|target|design|\bscaled|filter|accelerogram|histor|\bnot?\b|\bfiles?\b|available|separat|\bsee\b|\balso\b`)
)

// spokenQuantity returns why a file is no acceleration of whose numbers a line in words
// speaks, "" where it says no such thing.
func spokenQuantity(text string) string {
	if spectralShort.MatchString(text) || spectrumSpoken.MatchString(text) && !notSpectrum.MatchString(text) {
		return spectraReason
	}
	m := seriesShort.FindStringSubmatch(text)
	if m == nil && !strings.Contains(strings.ToLower(text), "acc") && !notSpoken.MatchString(text) {
		m = seriesSpoken.FindStringSubmatch(text)
	}
	if m == nil && !strings.Contains(strings.ToLower(text), "acc") && !notSpoken.MatchString(text) && !notLast.MatchString(text) {
		m = seriesLast.FindStringSubmatch(text)
	}
	if m == nil {
		return ""
	}
	return otherQuantity(strings.ToLower(strings.Join(m[1:], "")))
}
