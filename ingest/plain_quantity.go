package ingest

import (
	"regexp"
	"strings"
)

// quantityKeys are those of lines that say what the numbers are.
var quantityKeys = []string{"quantity", "type", "data_type"}

// otherSeries returns a *NotMotionError where a key says in whole words that the
// numbers are another quantity than acceleration, and no other line speaks of such or
// has its unit.
func (h *plainHead) otherSeries() error {
	s := h.stated(quantityKeys...)
	if word := commentKey(s.text); isSeriesName(word) {
		_, err := ParseUnit(h.stated(unitKeys...).text)
		return h.notMotion(orElse(otherQuantity(word), spectraReason), s.line, err != nil, "correct the line")
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
		reason, sure := spokenQuantity(l.words())
		switch {
		case reason == "" || stated:
		case hints.Unit == "" || hints.UnitForAll:
			return h.notMotion(reason, l.line, sure, "state their unit as # unit: …")
		default:
			h.doubt("line %d: %s speaks of another quantity: %s from %s taken", l.line, found(l.text), hints.Unit, orElse(hints.UnitFrom, "the hint"))
		}
	}
	return nil
}

// notMotion skips the file for the reason that the line gives, and refuses it where that
// is not sure, or other words of the head speak of acceleration, with what to do then.
func (h *plainHead) notMotion(reason string, line int, sure bool, cure string) error {
	said := ""
	for _, l := range h.lines {
		text := spectrumSpoken.ReplaceAllString(l.words(), "") // acceleration response spectrum
		if l.line == line {
			said = l.text
			if l.states(quantityKeys) {
				text = "" // quantity: spectral acceleration
			}
		}
		sure = sure && !strings.Contains(strings.ToLower(text), "acceler")
	}
	if sure {
		return &NotMotionError{reason}
	}
	return refuse(line, "quantity", "%s may say %s: if the numbers are accelerations, %s, else leave the file out", found(said), reason, cure)
}

// How a line says that the numbers are a velocity, a displacement or a spectrum, and
// the words of lines that speak of such beside the numbers.
var (
	seriesSpoken = regexp.MustCompile(`(?i)^(?:(?:(?:un)?corrected|raw|processed|filtered|ground|relative|absolute|total|integrated|horizontal|vertical|\d+) +)*(vel|disp)(?:ocity|lacement)s?` +
		`(?:$| *[,;(\[]| +(?:of|at|for) +(?:the +)?(?:station|site|ground|instrument|record)| +(?:time|histor|series|record|data|trace|component|values|points|in +(?:cm|mm|m|in|ft|inch|met|cent))[^,]*)`)
	seriesLast     = regexp.MustCompile(`(?i)(?:^|[\s,;])(vel|disp)(?:ocity|lacement)(?: *[(\[][^)\]]*[)\]])?$|(?:^|[\s,;])(vel|disp)(?:ocity|lacement)?[.,]? *[(\[]?(?:in +)?(?:cm|mm|m|in|ft)(?:/s(?:ec)?)?[)\]]?$`)
	notLast        = regexp.MustCompile(`(?i)\b(?:and|or|for|from|by|zero|constant|with|without|in +(?:vel|disp)|(?:mis)?fit(?:s|ted|ting)?|minimi[sz]\w*)\b`)
	seriesShort    = regexp.MustCompile(`^(VEL|DISP)(?:OC|L)?\.?(?: +[A-Z][A-Z0-9.-]*)*$`)
	spectrumSpoken = regexp.MustCompile(`(?i)^(?:(?:elastic|pseudo|absolute|relative|acceleration|velocity|displacement|acc) *[ -] *)*(?:response|fourier|amplitude|power) *(?:amplitude *)?spectr(?:um|a)\b`)
	spectralShort  = regexp.MustCompile(`^P?S[AVD]\b.*(?:%|damp)`)
	notSpoken      = regexp.MustCompile(`(?i)model|sensor|seismomet|transducer|shear|wave|\bvs\d*\b|peak|\bpg[vd]\b|max|filter|window|baseline|\bfiles?\b|drift|residual|final|permanent|\bnot?\b|available|[:=] *[-+]?\.?\d`)
	notSpectrum    = regexp.MustCompile(`(?i)match|compatib|target|design|\bscaled|filter|accelerogram|histor|\bnot?\b|\bfiles?\b|available|separat|\bsee\b|\balso\b|\bpeak\b`)
	// statedOrdinate is one in the head with its unit, of no table of them; statedNumber
	// may be the damping or a period of one.
	statedOrdinate = regexp.MustCompile(`(?i)[:=] *[-+]?\.?\d[\d.]*(?:e[-+]?\d+)? *(?:m?g|gals?|(?:cm|mm|m|in|ft)(?: */ *s\S*)?)(?:$|[\s,;)])`)
	statedNumber   = regexp.MustCompile(`[:=] *[-+]?\.?\d`)
)

// The rest of lines that are surely titles of spectra, what stands before the quantity
// in those of series, and words of lines that may speak of anything.
var (
	spectrumRest = regexp.MustCompile(`(?i)^(?:[^\pL]|\b(?:damp(?:ing|ed)?|ratio|ordinates|values|data|ns|ew|ud|g|gal|cm|m|s|sec|hz)\b|\b(?:of|for|station|component)\b.*)*$`)
	beforeSeries = regexp.MustCompile(`^(?:(?:[A-Z0-9][A-Z0-9._/-]*|(?i:(?:the|station|site|component|record|ground|(?:un)?corrected|recorded|processed|filtered|integrated(?: +(?:in)?to)?|converted +to|horizontal|vertical|north|east|up|\d+)))[\s,;:]+)*$`)
	doubtful     = regexp.MustCompile(`(?i)zero|initial|condition|\btype\b|seismogra|vel.*disp|disp.*vel`)
)

// spokenQuantity returns why a file is no acceleration of whose numbers a line in words
// speaks, "" where it says no such thing, and whether that is sure.
func spokenQuantity(text string) (reason string, sure bool) {
	if spectralShort.MatchString(text) && !statedOrdinate.MatchString(text) {
		return spectraReason, !statedNumber.MatchString(text)
	}
	if at := spectrumSpoken.FindStringIndex(text); at != nil && !notSpectrum.MatchString(text) {
		return spectraReason, spectrumRest.MatchString(text[at[1]:])
	}
	sure = !doubtful.MatchString(text)
	if m := seriesShort.FindStringSubmatch(text); m != nil {
		return otherQuantity(strings.ToLower(m[1])), sure && !notSpoken.MatchString(text)
	}
	if strings.Contains(strings.ToLower(text), "acc") || notSpoken.MatchString(text) {
		return "", false
	}
	if m := seriesSpoken.FindStringSubmatch(text); m != nil {
		return otherQuantity(strings.ToLower(m[1])), sure
	}
	at := seriesLast.FindStringSubmatchIndex(text)
	if at == nil || notLast.MatchString(text) {
		return "", false
	}
	if at[2] < 0 {
		at[2], at[3] = at[4], at[5]
	}
	return otherQuantity(strings.ToLower(text[at[2]:at[3]])), sure && beforeSeries.MatchString(text[:at[2]])
}
