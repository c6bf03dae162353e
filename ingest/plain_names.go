package ingest

import (
	"slices"
	"strings"
)

// titleWords are those of titles over columns, which name none.
var titleWords = []string{"record", "records", "history", "histories", "data", "series", "file", "values", "motion"}

// named reads the line over the numbers as names of the columns, where that is a
// comment without names the one before; nil where there are none. A header row that
// is not all understood is refused, as is one of a spectrum.
func (h *plainHead) named(form numberForm) ([]plainColumn, error) {
	for i := len(h.lines) - 1; i >= 0; i-- {
		if columns, err := h.namedBy(i, form); columns != nil || err != nil || h.lines[i].sure {
			return columns, err
		}
	}
	return nil, nil
}

// namedBy reads one of the lines as names.
func (h *plainHead) namedBy(at int, form numberForm) ([]plainColumn, error) {
	columns, sure, err := h.readNames(at, form)
	if columns == nil || err != nil {
		return nil, err
	}
	isSpectral := func(c plainColumn) bool { return c.kind == columnSpectral }
	unknown := slices.IndexFunc(columns, func(c plainColumn) bool { return c.kind == columnUnknown })
	switch {
	case slices.ContainsFunc(columns, isSpectral) && (sure || unknown < 0):
		return nil, &NotMotionError{spectraReason}
	case unknown < 0:
		return columns, ambiguousLetter(columns)
	case isProse(columns, sure, form.delimiter == ' '):
		return nil, nil
	}
	title := ""
	if len(columns) <= 2 {
		title = "; a title or comment begins with #"
	}
	return nil, refuse(columns[unknown].line, "columns", "column %d is %s; known are time, acc, velocity, displacement and directions (NS EW UD, N E Z, H1 H2 V, azimuths)%s",
		unknown+1, found(columns[unknown].name), title)
}

// isProse reports whether a line, of whose words some are no names of columns, is
// none of names: a title, of blanks between words perhaps, or, of comments, whatever
// does not begin with a time.
func isProse(columns []plainColumn, sure, blanks bool) bool {
	known := false
	for _, c := range columns {
		if c.kind != columnUnknown {
			known = true
		} else if word := commentKey(c.name); blanks && slices.Contains(titleWords, word) || strings.ContainsAny(word, ":=") {
			return true
		}
	}
	first := columns[0]
	switch {
	case len(columns) > 2:
		return !sure || !known
	case !sure:
		return len(columns) == 1 || first.kind != columnTime && first.kind != columnSpectral && !isSeconds(first.unit.text)
	case len(columns) == 1:
		_, unit := splitUnit(first.name)
		return strings.ContainsAny(first.name, " \t") && !isUnitWord(unit)
	}
	return false
}

// ambiguousLetter refuses a v or u beside a time alone.
func ambiguousLetter(columns []plainColumn) error {
	if len(columns) != 2 || columns[0].kind != columnTime || columns[1].unit.text != "" {
		return nil
	}
	other := map[string]string{"v": "velocity", "u": "displacement"}[commentKey(columns[1].name)]
	if other == "" {
		return nil
	}
	return refuse(columns[1].line, "columns", "column %s: vertical or %s? write UD, or %s", found(columns[1].name), other, other)
}

// readNames reads one of the lines, or that one of units and the line above it, as
// names, and reports whether they are surely no comment. They are nil where there is
// none for each column.
func (h *plainHead) readNames(at int, form numberForm) (columns []plainColumn, sure bool, err error) {
	row, above := h.lines[at], heading{}
	if at > 0 {
		above = h.lines[at-1]
	}
	sure, unitLine := row.sure, row.line
	names := row.split(form)
	units := make([]string, len(names))
	if areUnits(names) {
		units = names
		names = make([]string, len(units))
		for i, unit := range units {
			if names[i] = "acc"; isTimeUnit(bare(unit)) {
				names[i] = "time"
			}
		}
		if over := above.split(form); over != nil && (form.fields > 1 || isKnownName(over[0])) {
			names, row, sure = over, above, sure && above.sure
		}
	}
	for i, name := range names {
		if base, unit := splitUnit(name); unit == "" && bare(units[i]) != "" {
			name = base + " (" + bare(units[i]) + ")"
		}
		c, err := nameColumn(name, row.line)
		if err != nil {
			if !sure {
				return nil, false, nil // a comment may speak of anything
			}
			return nil, false, err
		}
		if c.unit.text != "" && bare(units[i]) != "" {
			c.unit.line = unitLine
		}
		c.line = row.line
		columns = append(columns, c)
	}
	columns, err = settleLetters(columns)
	return columns, sure, err
}

// isKnownName reports whether a name alone says what a column holds.
func isKnownName(name string) bool {
	c, err := nameColumn(name, 0)
	return err == nil && c.kind != columnUnknown
}

// settleLetters takes T beside L for transverse. Of two the first is the time.
func settleLetters(columns []plainColumn) ([]plainColumn, error) {
	var ts []int
	longitudinal := false
	for i, c := range columns {
		base, unit := splitUnit(c.name)
		switch word := commentKey(base); {
		case word == "l":
			longitudinal = true
		case word == "t" && !isTimeUnit(unit):
			ts = append(ts, i)
		}
	}
	for _, i := range ts {
		if c := columns[i]; !longitudinal && c.unit.text != "" {
			return nil, refuse(c.line, "time", "unknown unit %s of time; known are s and ms", found(c.unit.text))
		}
	}
	if !longitudinal {
		return columns, nil
	}
	if len(ts) == 2 {
		ts = ts[1:]
	}
	for _, i := range ts {
		base, unit := splitUnit(columns[i].name)
		o := ranked(2)
		o.Label = base
		columns[i].kind, columns[i].orientation, columns[i].unit = columnValue, o, statement{unit, columns[i].line}
	}
	return columns, nil
}

// heading is a line before the numbers, without its comment mark.
type heading struct {
	text string // "" where there is none that can be one of names
	line int
	sure bool
}

// split splits the line into a name for each column, in the ways that it may be
// written: with the delimiter of the numbers, else with another one, else as one
// name. It is nil where none gives as many.
func (l heading) split(form numberForm) []string {
	if l.text == "" {
		return nil
	}
	for _, names := range splitNames(l.text, form) {
		if len(names) == form.fields {
			return names
		}
	}
	return nil
}

// splitNames splits a header row in the ways it may be written: with the
// delimiter of the numbers, else with another one, else as one name.
func splitNames(text string, form numberForm) [][]string {
	var ways [][]string
	for _, d := range []byte{form.delimiter, '\t', ';', ','} {
		if d != ' ' && strings.IndexByte(text, d) >= 0 {
			names := strings.Split(text, string(d))
			if n := len(names); strings.TrimSpace(names[n-1]) == "" {
				names = names[:n-1]
			}
			ways = append(ways, names)
		}
	}
	words := []string{}
	for _, w := range strings.Fields(text) {
		if n := len(words); n > 0 && (w[0] == '(' || w[0] == '[' || strings.Count(words[n-1], "[")+strings.Count(words[n-1], "(") > strings.Count(words[n-1], "]")+strings.Count(words[n-1], ")")) {
			words[n-1] += " " + w
			continue
		}
		words = append(words, w)
	}
	ways = append(ways, words)
	if form.fields == 1 {
		ways = append(ways, []string{text})
	}
	return ways
}

// nameColumn reads one name: a quantity or direction, with its unit in brackets,
// behind it or not at all.
func nameColumn(name string, line int) (plainColumn, error) {
	name = strings.Trim(name, " \t\"'")
	base, unit := splitUnit(name)
	c := plainColumn{name: name}
	word := strings.TrimRight(commentKey(base), ".")
	switch {
	case slices.Contains(timeNames, word):
		return c.asTime(word, unit, line)
	case slices.Contains(indexNames, word):
		c.kind = columnIgnored
		return c, nil
	case slices.Contains(spectralNames, firstWord(word)) || strings.EqualFold(unit, "hz"):
		c.kind = columnSpectral
		return c, nil
	case otherQuantity(word) != "":
		c.kind = columnIgnored
		return c, nil
	}
	if unit == "" {
		word, unit = cutUnitWord(word)
	}
	if slices.Contains(accelerationNames, word) {
		c.kind = columnValue
	} else if o, ok := columnDirection(base, word); ok {
		c.kind, c.orientation = columnValue, o
	}
	if unit != "" {
		c.unit = statement{unit, line}
	}
	return c, nil
}

// The words by which columns are named, as commentKey spells them.
var (
	timeNames         = []string{"t", "time", "sec", "seconds", "time_s", "time_sec", "time_seconds", "t_s", "time_ms", "t_ms"}
	indexNames        = []string{"index", "sample", "sample_number", "no", "n_sample"}
	accelerationNames = []string{"acceleration", "accel", "acc", "a", "ag", "ground_acceleration", "acceleration_x", "acceleration_y", "accel_x", "accel_y", "acc_x", "acc_y"}
	spectralNames     = []string{"period", "periods", "freq", "frequency", "frequencies"}
	ordinateNames     = []string{"sa", "psa", "sv", "psv", "sd", "psd", "fas", "rs", "spectral", "spectrum", "spectra", "fourier", "pseudo"}
)

// spectraReason is why a table of spectra is skipped.
const spectraReason = "spectra, not a time series"

// asTime makes a column of times, whose unit is in its name, in brackets or unknown.
func (c plainColumn) asTime(word, unit string, line int) (plainColumn, error) {
	c.kind = columnTime
	switch {
	case isSeconds(unit) || unit == "" && word != "t" && word != "time" && !strings.HasSuffix(word, "_ms"):
		c.scale = 1
	case strings.EqualFold(unit, "ms") || unit == "" && strings.HasSuffix(word, "_ms"):
		c.scale = 1e-3
	case unit != "" && word == "t" && isUnitWord(unit):
		c.unit = statement{unit, line} // of T beside L
		return c, nil
	case unit != "":
		return c, refuse(line, "time", "unknown unit %s of time; known are s and ms", found(unit))
	}
	return c, nil
}

// columnDirection reads the direction that a column is named by, perhaps after a
// word for acceleration.
func columnDirection(base, word string) (Orientation, bool) {
	for _, quantity := range []string{"acceleration", "accel", "acc", "a"} {
		if rest, ok := strings.CutPrefix(word, quantity+"_"); ok {
			word = rest
			break
		}
	}
	for _, label := range []string{base, word, strings.ReplaceAll(word, "_", "-")} {
		o, ok := direction(label)
		if deg, isBearing := bearing(label); isBearing {
			o, ok = azimuth(deg), true
		}
		if ok {
			o.Label = base
			return o, true
		}
	}
	return Orientation{}, false
}

// cutUnitWord splits the unit off a word that ends in one: acc_gal, ns_cm_s2,
// acc_cms2. The unit is "" where it ends in none.
func cutUnitWord(word string) (rest, unit string) {
	for i := range word {
		if word[i] != '_' || i == 0 {
			continue
		}
		text := strings.ReplaceAll(word[i+1:], "_", "")
		if length, ok := strings.CutSuffix(text, "s2"); ok && lengthWords[length] != "" {
			text = length + "/s2"
		}
		if u, err := ParseUnit(text); err == nil {
			return word[:i], u.Name
		}
	}
	return word, ""
}

func firstWord(word string) string {
	first, _, _ := strings.Cut(word, "_")
	return first
}

// otherQuantity returns why a column is passed over whose name begins with another
// quantity than acceleration, or has the words of spectra in it; "" for all else.
func otherQuantity(word string) string {
	switch {
	case strings.HasPrefix(word, "vel"):
		return "velocity series, not acceleration"
	case strings.HasPrefix(word, "disp"):
		return "displacement series, not acceleration"
	}
	for _, part := range strings.FieldsFunc(word, func(r rune) bool { return r == '_' || r == '(' || r == '[' }) {
		if slices.Contains(ordinateNames, part) {
			return spectraReason
		}
	}
	return ""
}

// areUnits reports whether a row holds units and nothing else, one at least that is
// none of time.
func areUnits(fields []string) bool {
	some := false
	for _, f := range fields {
		f = bare(f)
		if f != "" && !isUnitWord(f) {
			return false
		}
		some = some || f != "" && !isTimeUnit(f)
	}
	return some
}

// bare takes brackets, quotes and a dash for "none" off a unit.
func bare(unit string) string {
	return strings.Trim(strings.Trim(unit, " \t\"'"), " ()[]-")
}

// isUnitWord reports whether text is a unit of time, acceleration, velocity or
// length, or counts.
func isUnitWord(text string) bool {
	if _, err := ParseUnit(text); err == nil || IsCounts(text) || isTimeUnit(text) {
		return true
	}
	spelled := unitSpelling.Replace(strings.ToLower(text))
	_, isVelocity := cutUnit(spelled, perSecond)
	return isVelocity || lengthWords[spelled] != ""
}

func isTimeUnit(text string) bool { return isSeconds(text) || strings.EqualFold(text, "ms") }

// splitUnit splits "Acc (cm/s^2)", "acc [g]" or "Acceleration in g" into name
// and unit.
func splitUnit(name string) (base, unit string) {
	for _, brackets := range []string{"[]", "()"} {
		open, end := strings.IndexByte(name, brackets[0]), strings.LastIndexByte(name, brackets[1])
		if open >= 0 && end > open && strings.TrimSpace(name[end+1:]) == "" {
			return strings.TrimSpace(name[:open]), strings.TrimSpace(name[open+1 : end])
		}
	}
	if base, unit, ok := strings.Cut(name, " in "); ok {
		return strings.TrimSpace(base), strings.TrimSpace(unit)
	}
	return name, ""
}
