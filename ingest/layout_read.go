package ingest

import (
	"fmt"
	"maps"
	"slices"
	"strconv"
	"strings"

	"swaybook/ingest/tomlfile"
)

// The bounds of what a description may ask for.
const (
	maxLayoutLine    = 10000 // lines before the numbers
	maxLayoutColumns = maxFieldsPerLine
)

// readLayout reads a description in TOML. file is its base name, for the title
// of one that has none; others have taken their names. The error is a
// *ParseError without path.
func readLayout(data []byte, file string, others Layouts) (*Layout, error) {
	t, err := parseTOML(data)
	if err != nil {
		return nil, err
	}
	l := &Layout{fixed: map[quantityKey]string{}, directions: map[string]Orientation{}}
	l.readName(t, file, others)
	l.readMarks(t)
	if b := t.table("blocks"); b != nil {
		if l.begin = b.pattern("begin"); l.begin == nil {
			b.fail("begin", "missing: a regular expression for the line that begins a channel")
		}
		b.done()
	}
	l.readNumbers(t)
	l.readDirections(t)
	l.readColumns(t)
	l.readFinds(t)
	l.readFixed(t)
	l.readData(t)
	l.checkTimes(t)
	l.checkColumns(t)
	t.done()
	return l, t.document.fault()
}

// fault returns the first mistake as an error.
func (d *tomlDocument) fault() error {
	if d.err == nil {
		return nil
	}
	return d.err
}

func (l *Layout) readName(t *tomlTable, file string, others Layouts) {
	l.name, l.title = t.text("name"), t.text("title")
	switch {
	case l.name == "":
		t.fail("name", "missing: the short name to keep with every channel")
	case !isLayoutName(l.name):
		t.fail("name", "%s: want lower-case letters, digits and hyphens, a letter first, 40 at most", found(l.name))
	case knownFormat(l.name, others):
		t.fail("name", "%s is the name of another format", found(l.name))
	}
	if l.title == "" {
		l.title = "layout " + file
	}
}

// readMarks reads what the layout is recognised by.
func (l *Layout) readMarks(t *tomlTable) {
	for _, m := range t.tables("recognise") {
		mark := layoutMark{pattern: m.pattern("pattern")}
		line, first := m.whole("line", 1, maxLayoutLine), m.whole("first", 1, maxLayoutLine)
		switch {
		case mark.pattern == nil:
			m.fail("pattern", "missing: a regular expression")
		case mark.pattern.MatchString(""):
			m.fail("pattern", "matches an empty line, and so says nothing")
		case m.has("line") == m.has("first"):
			m.fail("line", `want either line = N or first = N, for "any of the first N lines"`)
		}
		if mark.line, mark.last = line, line; m.has("first") {
			mark.line, mark.last = 1, first
		}
		m.done()
		l.marks = append(l.marks, mark)
	}
	if len(l.marks) == 0 {
		t.fail("recognise", "missing: say by [[recognise]] what lines show that a file is of this layout")
	}
}

// readNumbers reads how the numbers are written.
func (l *Layout) readNumbers(t *tomlTable) {
	n := t.table("numbers")
	if n == nil {
		t.fail("numbers", "missing: say at least numbers.separator")
		return
	}
	delimiters := map[string]byte{"blanks": ' ', "comma": ',', "semicolon": ';', "tab": '\t', "fixed": ' '}
	separator := n.word("separator", "blanks", "comma", "semicolon", "tab", "fixed")
	if !n.has("separator") {
		n.fail("separator", "missing: blanks, comma, semicolon, tab or fixed")
	}
	form := &l.numbers.form
	form.delimiter = delimiters[separator]
	form.comma = n.word("decimal", "point", "comma") == "comma"
	if form.comma && separator == "comma" {
		n.fail("decimal", "commas cannot separate numbers and mark decimals")
	}
	form.fields = n.whole("per_line", 1, maxLayoutColumns)
	l.readWidths(n, separator == "fixed")
	for _, v := range n.list("missing") {
		text, ok := v.(string)
		if text = strings.ToLower(strings.TrimSpace(text)); !ok || text == "" {
			n.fail("missing", "expected texts, as in [\"-999\", \"NaN\"]")
			break
		}
		l.numbers.missing = append(l.numbers.missing, text)
		if form.comma {
			text = strings.Replace(text, ",", ".", 1)
		}
		if v, ok := parseNumber([]byte(text)); ok {
			l.numbers.marks = append(l.numbers.marks, v)
		}
	}
	n.done()
}

// readWidths reads the widths of fixed-width fields: one for all, or each.
func (l *Layout) readWidths(n *tomlTable, fixed bool) {
	width := n.whole("width", 1, maxFieldWidth)
	var widths []int
	for _, v := range n.list("widths") {
		widths = append(widths, n.wholeValue("widths", v, 1, maxFieldWidth))
	}
	perLine := l.numbers.form.fields
	switch {
	case !fixed && (n.has("width") || n.has("widths")):
		n.fail("separator", `widths are for separator = "fixed"`)
	case !fixed:
	case n.has("width") == n.has("widths"):
		n.fail("width", "fixed fields need width and per_line, or widths")
	case n.has("width") && perLine == 0:
		n.fail("per_line", "missing: how many fields of this width a line has")
	case n.has("width"):
		l.numbers.widths = slices.Repeat([]int{width}, perLine)
	case len(widths) == 0 || len(widths) > maxLayoutColumns || n.has("per_line") && perLine != len(widths):
		n.fail("widths", "want one width for each field of a line")
	default:
		l.numbers.widths = widths
		l.numbers.form.fields = len(widths)
	}
}

// readColumns reads what the columns hold. Where none is said the lines are one
// wrapped series.
func (l *Layout) readColumns(t *tomlTable) {
	last, times := 0, 0
	for _, c := range t.tables("column") {
		col := layoutColumn{number: c.whole("number", 1, maxLayoutColumns)}
		if col.number == 0 {
			c.fail("number", "missing: the number of the column, from 1")
		}
		if slices.ContainsFunc(l.numbers.columns, func(o layoutColumn) bool { return o.number == col.number }) {
			c.fail("number", "column %d is described twice", col.number)
		}
		switch c.word("holds", "time", "acceleration") {
		case "time":
			col.time = true
			col.scale = map[string]float64{"": 1, "s": 1, "ms": 1e-3}[c.word("unit", "s", "ms")]
			if times++; times > 1 {
				c.fail("holds", "more than one column of times")
			}
		case "acceleration":
			l.fixAll(c, col.number)
		default:
			c.fail("holds", "missing: time or acceleration")
			l.fixAll(c, col.number)
		}
		c.done()
		last = max(last, col.number)
		l.numbers.columns = append(l.numbers.columns, col)
	}
	slices.SortFunc(l.numbers.columns, func(a, b layoutColumn) int { return a.number - b.number })
	if n := l.numbers.form.fields; n > 0 && n < last {
		t.fail("column", "column %d, and a line has %d fields", last, n)
	}
	if l.numbers.form.fields == 0 {
		l.numbers.form.fields = last
	}
	if len(l.numbers.columns) > 0 && times == len(l.numbers.columns) {
		t.fail("column", "none holds accelerations")
	}
}

// readDirections reads what the file's words for directions mean.
func (l *Layout) readDirections(t *tomlTable) {
	d := t.table("directions")
	if d == nil {
		return
	}
	for _, word := range slices.Sorted(maps.Keys(d.values)) {
		o, ok := layoutDirection(d.text(word))
		if !ok {
			d.fail(word, "unknown direction; known are N, E, S, W, NS, EW, UD, H1, H2, V, the like, azimuths and N45E")
		}
		l.directions[word] = o
	}
	d.done()
}

// readFixed reads what holds for all files.
func (l *Layout) readFixed(t *tomlTable) {
	f := t.table("fixed")
	if f == nil {
		return
	}
	l.fixAll(f, 0)
	for _, find := range l.finds {
		for _, name := range find.gives {
			if f.has(name) && find.column == 0 && !find.optional {
				f.fail(name, "is found by the [[header]] pattern of line %d too; make that optional, or leave one out", find.at)
			}
		}
	}
	f.done()
}

// fixAll keeps the quantities that a table states, of a column or, with column
// 0, of all.
func (l *Layout) fixAll(t *tomlTable, column int) {
	for _, name := range quantityNames() {
		if column > 0 && !ofColumns(name) {
			continue
		}
		if t.has(name) {
			l.fix(t, name, column)
		}
		t.asked[name] = true
	}
}

// fix keeps a quantity that the description states.
func (l *Layout) fix(t *tomlTable, name string, column int) {
	text := ""
	switch v := t.value(name).(type) {
	case string:
		text = strings.TrimSpace(v)
	case int64:
		text = strconv.FormatInt(v, 10)
	case float64:
		text = strconv.FormatFloat(v, 'g', -1, 64)
	default:
		t.fail(name, "expected a text or a number, found %s", tomlfile.Kind(v))
		return
	}
	l.fixed[quantityKey{name, column}] = text
	if _, named := l.directions[text]; named && name == "direction" {
		return
	}
	if err := checkQuantity(name, text); err != nil {
		t.fail(name, "%w", err)
	}
}

// readData reads where the numbers begin and end.
func (l *Layout) readData(t *tomlTable) {
	d := t.table("data")
	if d == nil {
		t.fail("data", "missing: say where the numbers begin and end")
		return
	}
	l.data = layoutData{
		line: d.whole("line", 1, maxLayoutLine), after: d.pattern("after"), skip: d.whole("skip", 0, maxLayoutLine),
		end: d.pattern("ends_with"), open: d.flag("open_end"), trailer: d.flag("trailer"),
	}
	if mark := d.text("comment"); mark != "" {
		l.data.comment = []byte(mark)
	}
	_, counted := l.fixed[quantityKey{"count", 0}]
	counted = counted || slices.ContainsFunc(l.finds, func(f layoutFind) bool { return slices.Contains(f.gives, "count") && !f.optional })
	switch {
	case d.has("line") == d.has("after"):
		d.fail("line", "want either line = N or after = a regular expression for the line before the numbers")
	case l.data.end == nil && !counted && !l.data.open:
		d.fail("ends_with", "nothing says where the numbers end: want ends_with, a count, or open_end = true where only the file's end does")
	case l.data.open && (l.data.end != nil || counted):
		d.fail("open_end", "the end is announced: by a count or by ends_with")
	case l.data.open && l.data.trailer:
		d.fail("trailer", "cannot be told from numbers whose end nothing announces")
	}
	d.done()
}

// checkColumns looks at the directions, which tell columns apart, as far as the
// description fixes them.
func (l *Layout) checkColumns(t *tomlTable) {
	seen := map[string]int{}
	for _, c := range l.numbers.columns {
		finds := func(name string) bool {
			return slices.ContainsFunc(l.finds, func(f layoutFind) bool { return f.column == c.number && slices.Contains(f.gives, name) })
		}
		if c.time || l.numbers.channels() < 2 || finds("direction") || finds("azimuth_deg") {
			continue
		}
		var probe Channel
		if err := l.orient(&probe, layoutValues{}, c.number); err != nil || probe.Orientation.Axis == AxisUnknown {
			t.fail("column", "column %d: several columns of accelerations need a direction or azimuth_deg each", c.number)
		}
		probe.Orientation.Label = ""
		key := fmt.Sprint(probe.Orientation, l.fixed[quantityKey{"channel", c.number}])
		if other, ok := seen[key]; ok && !finds("channel") {
			t.fail("column", "column %d has the direction of column %d", c.number, other)
		}
		seen[key] = c.number
	}
}
