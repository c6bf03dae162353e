package ingest

import (
	"regexp"
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
	if columns == nil || err != nil || h.lines[at].isStatement(columns) {
		return nil, err
	}
	for i := range columns {
		columns[i].byComment = !sure
		columns[i].dropProse(len(columns) == 1)
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

// isStatement reports whether a line of comment, or one over a single column, holds
// a key or a number of its own, as no row of names does.
func (l heading) isStatement(columns []plainColumn) bool {
	if l.sure && len(columns) > 1 {
		return false
	}
	return strings.ContainsAny(l.text, ":=") || slices.ContainsFunc(columns, func(c plainColumn) bool {
		base, _ := splitUnit(c.name)
		return slices.ContainsFunc(strings.Fields(base), func(word string) bool {
			return isDigit(word[0]) && len(word) < 3 || strings.Trim(word, "0123456789.,") == ""
		})
	})
}

// dropProse makes a column unknown whose name only begins like a quantity or a
// direction: in a comment, and over a single column, every word must be understood,
// and a comment over a single column must be a quantity with its unit.
func (c *plainColumn) dropProse(single bool) {
	if !single && !c.byComment {
		return
	}
	base, unit := splitUnit(c.name)
	if at := strings.LastIndexByte(base, ','); unit == "" && at > 0 {
		base, unit = base[:at], strings.TrimSpace(base[at+1:])
	}
	isOther := c.kind == columnIgnored || c.kind == columnSpectral
	switch {
	case isOther && !isOtherName(commentKey(base)):
		c.kind = columnUnknown
	case single && c.byComment && !(c.kind == columnValue && c.unit.text != "" || isOther && (isUnitWord(unit) || isSeriesName(commentKey(base)))):
		c.kind, c.orientation = columnUnknown, Orientation{}
	}
}

// numbersNamed are words for the numbers that begin a sentence on their unit.
var numbersNamed = regexp.MustCompile(`(?i)^(?:(?:acceleration|accel|acc) +)?(?:values|data|amplitudes?|samples)$`)

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
	case sure && isTitle(columns):
		return true
	case len(columns) > 2:
		return !sure || !known
	case !sure:
		return len(columns) == 1 || first.kind != columnTime && first.kind != columnSpectral && !isSeconds(first.unit.text)
	case len(columns) == 1:
		base, unit := splitUnit(first.name)
		return strings.ContainsAny(first.name, " \t") && (!isUnitWord(unit) || numbersNamed.MatchString(base))
	}
	return false
}

// otherMeasures are words, or their beginnings, that name a time or another quantity
// than acceleration in some language, so that they are no title.
var otherMeasures = regexp.MustCompile(`(?i)^(?:vel|vit|gesch|disp|d[eé]pl|desp|spost|versch|intens|temp|tiem|zeit|zaman|time|arias|husid|energ|jerk|tilt|rotat|strain|press|volt|count|perio|freq|magn|dist|depth|sa|psa|sv|psv|sd|psd|rs|fas)$|^(?:velo|vites|geschw|displ|d[eé]plac|despl|spost|versch|intens|temper|temps|tempo|tiempo|zeit|pressu|strain|volt|counts|period|spect|espec|spekt)`)

// isTitle reports whether one or two words that begin no known name are a title: no
// unit stands with them, and none names another quantity.
func isTitle(columns []plainColumn) bool {
	for _, c := range columns {
		_, unit := splitUnit(c.name)
		if unit != "" || otherMeasures.MatchString(c.name) {
			return false
		}
	}
	return len(columns) <= 2 && columns[0].kind == columnUnknown
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
		if !sure && form.fields == 1 {
			return nil, false, nil // a word of a comment
		}
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
		c, err := nameColumn(name, row.line)
		if unit := bare(units[i]); unit != "" && err == nil && unitLine != row.line {
			if err := c.contradicts(unit, unitLine, row.line); err != nil {
				return nil, false, err
			}
		}
		if base, unit := splitUnit(name); unit == "" && bare(units[i]) != "" {
			c, err = nameColumn(base+" ("+bare(units[i])+")", row.line)
		}
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
	settleUnits(columns)
	columns, err = settleLetters(columns)
	return columns, sure, err
}

// settleUnits gives two columns their meaning by their units, one of time and one of
// acceleration, whatever their names; but not those that speak of periods or spectra.
func settleUnits(columns []plainColumn) {
	if len(columns) != 2 {
		return
	}
	times, values := -1, -1
	for i, c := range columns {
		_, unit := splitUnit(c.name)
		if name, after, ok := strings.Cut(c.name, "/"); ok && !strings.ContainsAny(name, "([") {
			unit = strings.Trim(after, " ()") // Time/s, a / (m/s^2)
		}
		if _, err := ParseUnit(unit); err == nil && (c.kind == columnUnknown || c.kind == columnValue) {
			values = i
			columns[i].unit = statement{unit, c.line}
		} else if isTimeUnit(unit) && (c.kind == columnUnknown || c.kind == columnTime) {
			times = i
		}
		if spectralStem.MatchString(c.name) {
			return
		}
	}
	if times < 0 || values < 0 {
		return
	}
	columns[values].kind = columnValue
	if c := &columns[times]; c.kind == columnUnknown {
		c.kind, c.scale = columnTime, 1
		if strings.HasSuffix(strings.ToLower(strings.Trim(c.name, " )]")), "ms") {
			c.scale = 1e-3
		}
	}
}

// spectralStem is in the words for period, frequency and spectrum of many languages.
var spectralStem = regexp.MustCompile(`(?i)perio|freq|frec|frek|spe[ck]t|spett|espec|周期|周波|スペクトル|応答`)

// contradicts refuses a unit below a name that says another one.
func (c plainColumn) contradicts(unit string, line, named int) error {
	below, err := nameColumn("time ("+unit+")", line)
	isTime := c.kind == columnTime && c.scale != 0 && err == nil && below.scale != 0
	if isTime && c.scale != below.scale || c.kind == columnValue && c.unit.text != "" && !sameStatement(c.unit.text, unit) {
		return refuse(line, "columns", "unit %s here, column %s in line %d", found(unit), found(c.name), named)
	}
	return nil
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
			for i := range names {
				names[i] = strings.Trim(names[i], " \t\"'")
			}
			return names
		}
	}
	return nil
}

// bracketed is a unit in brackets, as rows of units are written.
var bracketed = regexp.MustCompile(`^(?:\([^()]*\)|\[[^\[\]]*\])$`)

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
	if fields := strings.Fields(text); !slices.ContainsFunc(fields, func(f string) bool { return !bracketed.MatchString(f) }) {
		ways = append(ways, fields)
	}
	ways = append(ways, words)
	if form.fields == 1 {
		ways = append(ways, []string{text})
	}
	return ways
}
