package ingest

import (
	"slices"
	"strings"
)

// columnKind is what a column holds.
type columnKind int

const (
	columnUnknown columnKind = iota
	columnTime
	columnValue   // acceleration
	columnIgnored // velocity, displacement, sample number
)

// plainColumn is the meaning of one column.
type plainColumn struct {
	kind        columnKind
	name        string
	orientation Orientation
	unit        statement // of a value column
	scale       float64   // s per unit of a time column whose name states it, else 0
}

// columns gives the columns their meaning by the names over them. Unnamed, one
// column is the values, and two wait for settleColumns; three and more are
// refused, as is a name that nobody knows among them.
func (h *plainHead) columns(form numberForm) ([]plainColumn, error) {
	columns, known, err := h.named(form)
	if err != nil {
		return nil, err
	}
	if columns == nil || !known && (!h.sure || form.fields <= 2) {
		columns = make([]plainColumn, form.fields)
	}
	if form.fields > 2 && !known {
		return nil, refuse(h.first, "samples", "%d values a line and no names over them: a wrapped series needs a count (# npts = N) or a layout, with --layout; columns need names", form.fields)
	}
	if form.fields == 1 && columns[0].kind == columnUnknown {
		columns[0].kind = columnValue
	}
	for i, c := range columns {
		if form.fields > 2 && c.kind == columnUnknown {
			return nil, refuse(h.namesLine, "columns", "column %d is %s; known are time, acc, velocity, displacement and directions (NS EW UD, N E Z, H1 H2 V, azimuths)", i+1, found(c.name))
		}
	}
	return columns, nil
}

// named reads the line over the numbers as names and reports whether they mean
// something. The columns are nil where the line does not hold a name for each. Of
// three and more in a comment all must be known, since prose has such words too.
func (h *plainHead) named(form numberForm) (columns []plainColumn, known bool, err error) {
	columns, err = h.readNames(form)
	unknown := func(c plainColumn) bool { return c.kind == columnUnknown }
	switch {
	case columns == nil || err != nil:
		return nil, false, err
	case !h.sure && form.fields > 2:
		known = !slices.ContainsFunc(columns, unknown)
	default:
		known = slices.ContainsFunc(columns, func(c plainColumn) bool { return !unknown(c) })
	}
	return columns, known, nil
}

// readNames reads the line over the numbers as names, nil where it does not hold
// one for each column.
func (h *plainHead) readNames(form numberForm) ([]plainColumn, error) {
	if h.namesLine == 0 {
		return nil, nil
	}
	for _, names := range splitNames(h.names, form) {
		if len(names) != form.fields {
			continue
		}
		columns := make([]plainColumn, len(names))
		for i, name := range names {
			var err error
			if columns[i], err = nameColumn(name, h.namesLine); err != nil {
				if !h.sure {
					return nil, nil // a comment may speak of anything
				}
				return nil, err
			}
		}
		return columns, nil
	}
	return nil, nil
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

// nameColumn reads one name: a quantity or direction, with its unit in brackets
// or not.
func nameColumn(name string, line int) (plainColumn, error) {
	name = strings.Trim(name, " \t\"'")
	base, unit := splitUnit(name)
	c := plainColumn{name: name}
	switch word := commentKey(base); word {
	case "t", "time", "sec", "seconds", "time_s", "time_sec", "t_s":
		c.kind = columnTime
		switch {
		case isSeconds(unit) || unit == "" && word != "t" && word != "time":
			c.scale = 1
		case strings.EqualFold(unit, "ms"):
			c.scale = 1e-3
		case unit != "":
			return c, refuse(line, "time", "unknown unit %s of time; known are s and ms", found(unit))
		}
		return c, nil
	case "acc", "acceleration", "a", "ag", "accel":
		c.kind = columnValue
	case "index", "sample", "sample_number", "no", "n_sample":
		c.kind = columnIgnored
		return c, nil
	default:
		if otherQuantity(word) != "" {
			c.kind = columnIgnored
			return c, nil
		}
		for _, quantity := range []string{"acceleration", "accel", "acc", "a"} {
			if rest, ok := strings.CutPrefix(word, quantity+"_"); ok {
				word = rest
				break
			}
		}
		if o, ok := direction(word); ok {
			o.Label = base
			c.kind, c.orientation = columnValue, o
		}
	}
	if unit != "" {
		c.unit = statement{unit, line}
	}
	return c, nil
}

// otherQuantity returns the quantity that a name begins with where that is not
// acceleration.
func otherQuantity(word string) string {
	switch {
	case strings.HasPrefix(word, "vel"):
		return "velocity"
	case strings.HasPrefix(word, "disp"):
		return "displacement"
	}
	return ""
}

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

// settleColumns decides by the numbers what names leave open, and checks that
// what is left can be read.
func settleColumns(columns []plainColumn, rows *plainRows) ([]plainColumn, error) {
	if len(columns) == 2 {
		if err := settlePair(columns, rows); err != nil {
			return nil, err
		}
	}
	times, values := 0, 0
	for i := range columns {
		switch columns[i].kind {
		case columnTime:
			if times++; times > 1 {
				return nil, refuse(rows.line[0], "columns", "more than one time column")
			}
			if columns[i].scale == 0 && countsSamples(rows.values[i]) {
				columns[i].kind = columnIgnored
			}
		case columnValue:
			values++
		}
	}
	if values == 0 {
		for _, c := range columns {
			if quantity := otherQuantity(commentKey(c.name)); quantity != "" {
				return nil, &NotMotionError{quantity + " series, not acceleration"}
			}
		}
		return nil, refuse(rows.line[0], "columns", "no column of accelerations")
	}
	return columns, checkDirections(columns, rows.line[0])
}

// checkDirections refuses value columns that cannot be told apart.
func checkDirections(columns []plainColumn, line int) error {
	var labels []string
	unlabelled := 0
	for _, c := range columns {
		if c.kind != columnValue {
			continue
		}
		label := strings.ToUpper(c.orientation.Label)
		if label == "" {
			unlabelled++
		}
		if slices.Contains(labels, label) || unlabelled > 0 && len(labels) > 0 {
			return refuse(line, "columns", "column %s: several columns of accelerations need different directions as names", found(c.name))
		}
		labels = append(labels, label)
	}
	if len(labels) > 3 {
		return refuse(line, "columns", "%d columns of accelerations; a record has three at most", len(labels))
	}
	return nil
}

// settlePair decides which of two columns is the time. Names settle it; where one
// of them says nothing, the first is the time if it rises evenly and the second
// does not rise throughout.
func settlePair(columns []plainColumn, rows *plainRows) error {
	a, b := &columns[0], &columns[1]
	switch {
	case a.kind != columnUnknown && b.kind != columnUnknown:
		return nil
	case a.kind == columnTime:
		b.kind = columnValue
		return nil
	case b.kind == columnTime:
		a.kind = columnValue
		return nil
	}
	first, second := rows.values[0], rows.values[1]
	switch rising := isRising(second); {
	case (isRising(first) || isMostlyEven(first)) && !rising:
		*a = plainColumn{kind: columnTime}
		b.kind = columnValue
		return nil
	case thousands.MatchString(rows.head) || spaced.MatchString(rows.head):
		return refuse(rows.line[0], "samples", "%s", badLine([]byte(rows.head)))
	case rising:
		return refuse(rows.line[0], "columns", "both columns rise throughout, either may be the time; name the columns")
	}
	return refuse(rows.line[0], "columns", "two columns, and the first does not rise like a time: a wrapped series needs a count (# npts = N) or a layout, with --layout; columns need names")
}

func isRising(xs []float64) bool {
	for i := 1; i < len(xs); i++ {
		if !(xs[i] > xs[i-1]) {
			return false
		}
	}
	return len(xs) > 1
}

// isMostlyEven reports whether nine in ten steps are the median step within a
// tenth of it, and that one is over zero.
func isMostlyEven(xs []float64) bool {
	steps := stepsOf(xs)
	if len(steps) == 0 {
		return false
	}
	m, even := median(steps), 0
	for _, s := range steps {
		if s >= 0.9*m && s <= 1.1*m {
			even++
		}
	}
	return m > 0 && even*10 >= len(steps)*9
}

// countsSamples reports whether xs is a column of sample numbers: whole, each
// one more than the last.
func countsSamples(xs []float64) bool {
	for i := range xs {
		if i > 0 && xs[i]-xs[i-1] != 1 {
			return false
		}
	}
	return len(xs) > 1
}
