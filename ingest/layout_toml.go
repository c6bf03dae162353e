package ingest

import (
	"bytes"
	"errors"
	"maps"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"github.com/pelletier/go-toml/v2"
	"github.com/pelletier/go-toml/v2/unstable"
)

// maxDescription is the largest description of a layout that is read, in bytes.
const maxDescription = 64 << 10

// tomlTable is a table of a TOML document whose keys are asked for one by one.
// The first mistake stays in the document's error; what is asked for after it
// is the zero value.
type tomlTable struct {
	document *tomlDocument
	path     string // with indices: "header.2", "" for the document itself
	name     string // as people write it: "header"
	values   map[string]any
	asked    map[string]bool
}

// tomlDocument is what the tables of one document share.
type tomlDocument struct {
	lines map[string]int // of keys and tables by path
	err   error          // the first mistake, a *ParseError without path
	// lacking is the table in which that is a missing key, nil for another mistake.
	lacking *tomlTable
}

// parseTOML reads a document. The error is a *ParseError without path.
func parseTOML(data []byte) (*tomlTable, error) {
	if len(data) > maxDescription {
		return nil, refuse(0, "", "description of %d bytes is larger than the limit of %d", len(data), maxDescription)
	}
	data = bytes.TrimPrefix(data, []byte("\xef\xbb\xbf"))
	values := map[string]any{}
	if err := toml.Unmarshal(data, &values); err != nil {
		line := 0
		if de, ok := errors.AsType[*toml.DecodeError](err); ok {
			line, _ = de.Position()
		}
		return nil, refuse(line, "", "%s", strings.TrimPrefix(err.Error(), "toml: "))
	}
	d := &tomlDocument{lines: map[string]int{}}
	(&lineWalk{lines: d.lines, data: data, line: 1}).document()
	return &tomlTable{document: d, values: values, asked: map[string]bool{}}, nil
}

// lineWalk notes where each key and table of a document stands, which decoded
// values do not tell.
type lineWalk struct {
	lines map[string]int
	data  []byte
	done  int // how far lines are counted
	line  int // of the byte at done
}

func (w *lineWalk) document() {
	parser := unstable.Parser{}
	parser.Reset(w.data)
	table, count := "", map[string]int{}
	for parser.NextExpression() {
		switch e := parser.Expression(); e.Kind {
		case unstable.Table:
			table = keyPath("", e.Key())
			w.note(table, e)
		case unstable.ArrayTable:
			name := keyPath("", e.Key())
			table = join(name, strconv.Itoa(count[name]))
			w.note(table, e)
			if count[name]++; count[name] == 1 {
				w.lines[name] = w.line
			}
		case unstable.KeyValue:
			w.pair(table, e)
		}
	}
}

// note keeps the line of a key or table under its path. Nodes come in the order
// of the document.
func (w *lineWalk) note(path string, e *unstable.Node) {
	keys := e.Key()
	keys.Next()
	at := int(keys.Node().Raw.Offset)
	w.line += bytes.Count(w.data[w.done:at], []byte("\n"))
	w.done = at
	w.lines[path] = w.line
}

// pair notes a key and the keys in its value.
func (w *lineWalk) pair(table string, e *unstable.Node) {
	path := keyPath(table, e.Key())
	w.note(path, e)
	w.value(path, e.Value())
}

// value notes the keys in inline tables and in lists of them.
func (w *lineWalk) value(path string, v *unstable.Node) {
	i := 0
	for it := v.Children(); it.Next(); {
		switch {
		case v.Kind == unstable.InlineTable && it.Node().Kind == unstable.KeyValue:
			w.pair(path, it.Node())
		case v.Kind == unstable.Array && it.Node().Kind != unstable.Comment:
			w.value(join(path, strconv.Itoa(i)), it.Node())
			i++
		}
	}
}

func keyPath(table string, keys unstable.Iterator) string {
	for keys.Next() {
		table = join(table, string(keys.Node().Data))
	}
	return table
}

// join appends a part to a path.
func join(path, part string) string {
	if path == "" {
		return part
	}
	return path + "." + part
}

// line returns the line of a key, or of the table it is missing from.
func (d *tomlDocument) line(path string) int {
	for {
		if n, ok := d.lines[path]; ok {
			return n
		}
		at := strings.LastIndexByte(path, '.')
		if at < 0 {
			return 0
		}
		path = path[:at]
	}
}

// fail keeps the first mistake, at a key of the table or, where key is "", at
// the table itself.
func (t *tomlTable) fail(key, format string, args ...any) {
	d := t.document
	if d.err != nil {
		return
	}
	d.err = refuse(d.line(join(t.path, key)), strings.TrimPrefix(t.name+"."+key, "."), format, args...)
	if !t.has(key) {
		d.lacking = t
	}
}

// has reports whether the table has the key.
func (t *tomlTable) has(key string) bool {
	_, ok := t.values[key]
	return ok
}

// value returns what stands at key, nil where nothing does.
func (t *tomlTable) value(key string) any {
	t.asked[key] = true
	return t.values[key]
}

// text returns the text at key, without blanks round it.
func (t *tomlTable) text(key string) string {
	switch v := t.value(key).(type) {
	case nil:
	case string:
		if v = strings.TrimSpace(v); v != "" {
			return v
		}
		t.fail(key, "is empty")
	default:
		t.fail(key, "expected a text, found %s", tomlKind(v))
	}
	return ""
}

// word returns the text at key, which must be one of words.
func (t *tomlTable) word(key string, words ...string) string {
	s := t.text(key)
	if s != "" && !slices.Contains(words, s) {
		t.fail(key, "expected %s, found %s", strings.Join(words, ", "), found(s))
	}
	return s
}

// whole returns the number at key, which must be whole and within low and high;
// 0 where there is none.
func (t *tomlTable) whole(key string, low, high int) int {
	v := t.value(key)
	if v == nil {
		return 0
	}
	return t.wholeValue(key, v, low, high)
}

func (t *tomlTable) wholeValue(key string, v any, low, high int) int {
	n, ok := v.(int64)
	switch {
	case !ok:
		t.fail(key, "expected a whole number, found %s", tomlKind(v))
	case n < int64(low) || n > int64(high):
		t.fail(key, "%d is outside %d to %d", n, low, high)
	default:
		return int(n)
	}
	return 0
}

// flag returns the truth value at key.
func (t *tomlTable) flag(key string) bool {
	v := t.value(key)
	b, ok := v.(bool)
	if v != nil && !ok {
		t.fail(key, "expected true or false, found %s", tomlKind(v))
	}
	return b
}

// list returns the values of the list at key.
func (t *tomlTable) list(key string) []any {
	v := t.value(key)
	list, ok := v.([]any)
	if v != nil && !ok {
		t.fail(key, "expected a list in [ ], found %s", tomlKind(v))
	}
	return list
}

// table returns the table at key, nil where there is none.
func (t *tomlTable) table(key string) *tomlTable {
	v := t.value(key)
	values, ok := v.(map[string]any)
	if v != nil && !ok {
		t.fail(key, "expected a table, found %s", tomlKind(v))
	}
	if !ok {
		return nil
	}
	return &tomlTable{t.document, join(t.path, key), strings.TrimPrefix(t.name+"."+key, "."), values, map[string]bool{}}
}

// tables returns the tables of the list at key.
func (t *tomlTable) tables(key string) []*tomlTable {
	var out []*tomlTable
	for i, v := range t.list(key) {
		values, ok := v.(map[string]any)
		if !ok {
			t.fail(key, "expected tables, found %s", tomlKind(v))
			return nil
		}
		out = append(out, &tomlTable{t.document, join(join(t.path, key), strconv.Itoa(i)), strings.TrimPrefix(t.name+"."+key, "."), values, map[string]bool{}})
	}
	return out
}

// pattern returns the regular expression at key, nil where there is none.
func (t *tomlTable) pattern(key string) *linePattern {
	s, ok := t.value(key).(string)
	if !ok || s == "" {
		if t.has(key) {
			t.fail(key, "expected a regular expression in quotes")
		}
		return nil
	}
	if len(s) > maxPattern {
		t.fail(key, "pattern of %d bytes is longer than the limit of %d", len(s), maxPattern)
		return nil
	}
	re, err := regexp.Compile(s)
	if err != nil {
		t.fail(key, "%s", strings.TrimPrefix(err.Error(), "error parsing regexp: "))
		return nil
	}
	return newLinePattern(re)
}

// done refuses keys that nobody asked for. Where another key is missing this is
// the mistake to tell, since it may be that one.
func (t *tomlTable) done() {
	known := slices.Sorted(maps.Keys(t.asked))
	for _, key := range slices.Sorted(maps.Keys(t.values)) {
		if t.asked[key] {
			continue
		}
		if t.document.lacking == t {
			t.document.err, t.document.lacking = nil, nil
		}
		t.fail(key, "unknown key%s; known are %s", didYouMean(nearestKey(key, known)), strings.Join(known, ", "))
	}
}

// nearestKey returns the known key that is two edits away at most, and no more than
// half of the letters; "" for none.
func nearestKey(key string, known []string) string {
	return nearest(key, known, min(2, len(key)/2))
}

// tomlKind names the kind of a value for messages.
func tomlKind(v any) string {
	switch v := v.(type) {
	case string:
		return "the text " + found(v)
	case int64, float64:
		return "a number"
	case bool:
		return "true or false"
	case []any:
		return "a list"
	case map[string]any:
		return "a table"
	}
	return "a date or time"
}

// maxPattern is the longest regular expression that is read, in bytes.
const maxPattern = 1000

// linePattern is a regular expression that lines are held against. It sees the
// first maxHeading bytes of a line.
type linePattern struct {
	*regexp.Regexp
	literal []byte // what every match begins with
}

func newLinePattern(re *regexp.Regexp) *linePattern {
	literal, _ := re.LiteralPrefix()
	return &linePattern{re, []byte(literal)}
}

// matches reports whether the pattern occurs in the line. Few lines of numbers
// hold the literal, and looking for it costs little.
func (p *linePattern) matches(line []byte) bool {
	line = line[:min(len(line), maxHeading)]
	return (len(p.literal) == 0 || bytes.Contains(line, p.literal)) && p.Match(line)
}
