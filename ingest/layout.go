package ingest

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"path/filepath"
	"slices"
	"strings"
)

// Layout is a text format that a user has described. It is recognised, read and
// checked like the formats that are built in.
type Layout struct {
	name, title string
	marks       []layoutMark
	begin       *linePattern // a line that begins a channel; nil where the file is one
	data        layoutData
	numbers     layoutNumbers
	finds       []layoutFind
	// fixed is what the description says of all files, by quantity and column.
	fixed      map[quantityKey]string
	directions map[string]Orientation
}

// layoutMark is one thing that a file is recognised by.
type layoutMark struct {
	line, last int // the line, or the first and last of those that may match
	pattern    *linePattern
}

// layoutData is where the numbers of a channel stand.
type layoutData struct {
	line    int          // of the channel's lines, from 1; 0 where after is given
	after   *linePattern // the line before
	skip    int          // lines passed over after that
	end     *linePattern // the line that ends the numbers, nil for none
	open    bool         // nothing announces the end
	trailer bool         // text may follow the numbers
	comment []byte       // what lines to pass over begin with, nil for none
}

// layoutNumbers is how the numbers stand on a line.
type layoutNumbers struct {
	form    numberForm // fields is 0 where a line of a wrapped series may hold any number
	widths  []int      // of fixed-width fields, nil for others
	columns []layoutColumn
	missing []string  // marks of values that are not there, in lower case
	marks   []float64 // those of them that are numbers
}

// layoutColumn is one column that is read.
type layoutColumn struct {
	number int     // from 1
	time   bool    // of times and not of accelerations
	scale  float64 // s per unit of a column of times
}

// layoutFind is a pattern on the lines before the numbers and what its groups
// give.
type layoutFind struct {
	pattern  *linePattern
	gives    []string // quantity of each group, "" for none
	line     int      // the only line looked at, 0 for all
	inFile   bool     // looked for before the first channel
	column   int      // the column spoken of, 0 for all
	optional bool
	time     *timeForm
	at       int // line in the description
}

// Layouts are what users have described, in the order in which it was read.
type Layouts []*Layout

// Read adds the layout that r describes in TOML, as the README has it; name is
// the path that errors give. The error is a *ParseError that names line and key.
func (ls *Layouts) Read(name string, r io.Reader) error {
	data, err := io.ReadAll(io.LimitReader(r, maxDescription+1))
	if err != nil {
		return &ParseError{Path: name, Err: fmt.Errorf("read layout: %w", err)}
	}
	l, err := readLayout(data, filepath.Base(name), *ls)
	if pe, ok := errors.AsType[*ParseError](err); ok {
		pe.Path = name
	}
	if err != nil {
		return err
	}
	*ls = append(*ls, l)
	return nil
}

// Info describes the layout, and says where it leaves unit and step to flags or a
// catalogue.
func (l *Layout) Info() Info {
	info := Info{Name: l.name, Title: l.title, Channels: "one", Unit: l.units()}
	if n := l.numbers.channels(); n > 1 {
		info.Channels = fmt.Sprint(n)
	}
	if l.begin != nil {
		info.Channels = "several"
	}
	timed := slices.ContainsFunc(l.numbers.columns, func(c layoutColumn) bool { return c.time })
	if !timed && l.whence("dt_s", 0) == "" && l.whence("rate_hz", 0) == "" {
		info.NotRead = "files without --dt or the catalogue's dt_s"
	}
	return info
}

// units says what the channels' units are, or who states them.
func (l *Layout) units() string {
	columns := l.numbers.columns
	if l.numbers.wrapped() {
		columns = []layoutColumn{{}}
	}
	var units []string
	for _, c := range columns {
		unit := orElse(l.whence("unit", c.number), "that of --unit or the catalogue's unit")
		if !c.time && !slices.Contains(units, unit) {
			units = append(units, unit)
		}
	}
	return strings.Join(units, ", ")
}

// whence says what the description fixes of a quantity of the column, or that the
// header says it, "" where neither does.
func (l *Layout) whence(name string, column int) string {
	header := ""
	for _, k := range []quantityKey{{name, column}, {name, 0}} {
		if slices.ContainsFunc(l.finds, func(f layoutFind) bool { return f.column == k.column && slices.Contains(f.gives, name) }) {
			header = "as the header says"
		}
		if s, ok := l.fixed[k]; ok && header != "" {
			return header + ", else " + s
		} else if ok {
			return s
		}
	}
	return header
}

// channels returns how many columns hold accelerations.
func (n *layoutNumbers) channels() int {
	count := 0
	for _, c := range n.columns {
		if !c.time {
			count++
		}
	}
	return max(1, count)
}

// Sniff looks for all the marks of the layout.
func (l *Layout) Sniff(c *Content) string {
	for _, m := range l.marks {
		at := m.line
		for at <= m.last && !m.pattern.matches(c.Text.Bytes(at)) {
			at++
		}
		if at > min(m.last, c.Text.Len()) {
			return ""
		}
	}
	return "matches the layout's patterns"
}

// span is a run of lines, both ends included.
type span struct{ first, last int }

// Parse reads the channels.
func (l *Layout) Parse(content *Content, hints Hints) ([]Channel, error) {
	t := content.Text
	all := span{1, t.Len()}
	blocks := []span{all}
	var shared layoutValues
	if l.begin != nil {
		head, found := l.split(t)
		if len(found) == 0 {
			return nil, refuse(t.Len(), "blocks", "no line matches blocks.begin %s", l.begin)
		}
		blocks = found
		var err error
		if shared, err = l.find(t, head, true); err != nil {
			return nil, err
		}
	}
	var out []Channel
	for _, b := range blocks {
		channels, err := l.block(t, b, shared, hints)
		if err != nil {
			return nil, err
		}
		out = append(out, channels...)
	}
	if err := l.checkChannels(shared, len(blocks)); err != nil {
		return nil, err
	}
	if len(out) > 1 {
		for i := range out {
			if out[i].Orientation.Axis == AxisUnknown {
				return nil, refuse(out[i].Line, "direction", "several channels, and the layout finds no direction of number %d", i+1)
			}
		}
	}
	return out, nil
}

// split returns the lines before the first channel and those of each channel.
func (l *Layout) split(t *Text) (head span, blocks []span) {
	head = span{1, t.Len()}
	for n := 1; n <= t.Len(); n++ {
		if !l.begin.matches(t.Bytes(n)) {
			continue
		}
		if len(blocks) == 0 {
			head.last = n - 1
		} else {
			blocks[len(blocks)-1].last = n - 1
		}
		blocks = append(blocks, span{n, t.Len()})
	}
	return head, blocks
}

// checkChannels holds the number of channels to the one announced before them.
func (l *Layout) checkChannels(shared layoutValues, n int) error {
	s, ok := l.stated(shared, "channels", 0)
	if !ok {
		return nil
	}
	announced, err := wholeNumber(s.text)
	switch {
	case err != nil:
		return refuse(s.line, "channels", "%w", err)
	case announced != n:
		return refuse(s.line, "channels", "announced %d channels, found %d", announced, n)
	}
	return nil
}

// block reads the channels of one run of lines: the whole file, or what begins
// with a line that begins a channel.
func (l *Layout) block(t *Text, b span, shared layoutValues, hints Hints) ([]Channel, error) {
	start, err := l.dataStart(t, b)
	if err != nil {
		return nil, err
	}
	own, err := l.find(t, span{b.first, start - 1}, false)
	if err != nil {
		return nil, err
	}
	values := own.over(shared)
	count := -1
	if s, ok := l.stated(values, "count", 0); ok {
		if count, err = wholeNumber(s.text); err != nil {
			return nil, refuse(s.line, "count", "%w", err)
		}
	}
	series, err := l.series(t, span{start, b.last}, count)
	if err != nil {
		return nil, err
	}
	if n := series.len(); n < MinSamples { // before many channels of nothing are made
		return nil, refuse(series.line(0), "samples", "%d values; a record needs at least %d", n, MinSamples)
	}
	step, err := l.step(values, series, hints)
	if err != nil {
		return nil, err
	}
	var out []Channel
	for i := range series.values {
		if series.columns[i].time {
			continue
		}
		c, err := l.channel(series, i, values, step, hints)
		if err != nil {
			return nil, err
		}
		out = append(out, c)
	}
	return out, nil
}

// dataStart returns the line of the first numbers.
func (l *Layout) dataStart(t *Text, b span) (int, error) {
	d := &l.data
	start := b.first + d.line - 1
	if d.after != nil {
		n := b.first
		for n <= b.last && !d.after.matches(t.Bytes(n)) {
			n++
		}
		if n > b.last {
			return 0, refuse(b.last, "data", "no line matches data.after %s", d.after)
		}
		start = n + 1
	}
	start += d.skip
	for start <= b.last && len(bytes.TrimSpace(t.Bytes(start))) == 0 {
		start++
	}
	if start > b.last {
		return 0, refuse(b.last, "data", "the lines end before the first number")
	}
	return start, nil
}

// String returns the pattern in quotes, shortened.
func (p *linePattern) String() string { return found(p.Regexp.String()) }

// isLayoutName reports whether s is a name as formats have: letters in lower
// case, digits and hyphens, a letter first.
func isLayoutName(s string) bool {
	return len(s) <= 40 && s != "" && s[0] >= 'a' && s[0] <= 'z' && strings.Trim(s, "abcdefghijklmnopqrstuvwxyz0123456789-") == ""
}

// knownFormat reports whether a format or one of the layouts has the name.
func knownFormat(name string, others Layouts) bool {
	return slices.ContainsFunc(Formats(others), func(i Info) bool { return i.Name == name })
}
