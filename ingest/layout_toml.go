package ingest

import (
	"bytes"
	"errors"
	"maps"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"swaybook/ingest/tomlfile"
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
	*tomlfile.Document
	err error // the first mistake, a *ParseError without path
	// lacking is the table in which that is a missing key, nil for another mistake.
	lacking *tomlTable
}

// parseTOML reads a document. The error is a *ParseError without path.
func parseTOML(data []byte) (*tomlTable, error) {
	if len(data) > maxDescription {
		return nil, refuse(0, "", "description of %d bytes is larger than the limit of %d", len(data), maxDescription)
	}
	d, err := tomlfile.Parse(data)
	if wrong, ok := errors.AsType[*tomlfile.Error](err); ok {
		return nil, &ParseError{Line: wrong.Line, Err: wrong.Err}
	}
	return &tomlTable{document: &tomlDocument{Document: d}, values: d.Values, asked: map[string]bool{}}, nil
}

// fail keeps the first mistake, at a key of the table or, where key is "", at
// the table itself.
func (t *tomlTable) fail(key, format string, args ...any) {
	d := t.document
	if d.err != nil {
		return
	}
	d.err = refuse(d.Line(tomlfile.Join(t.path, key)), tomlfile.Join(t.name, key), format, args...)
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
		t.fail(key, "expected a text, found %s", tomlfile.Kind(v))
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
		t.fail(key, "expected a whole number, found %s", tomlfile.Kind(v))
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
		t.fail(key, "expected true or false, found %s", tomlfile.Kind(v))
	}
	return b
}

// list returns the values of the list at key.
func (t *tomlTable) list(key string) []any {
	v := t.value(key)
	list, ok := v.([]any)
	if v != nil && !ok {
		t.fail(key, "expected a list in [ ], found %s", tomlfile.Kind(v))
	}
	return list
}

// table returns the table at key, nil where there is none.
func (t *tomlTable) table(key string) *tomlTable {
	v := t.value(key)
	values, ok := v.(map[string]any)
	if v != nil && !ok {
		t.fail(key, "expected a table, found %s", tomlfile.Kind(v))
	}
	if !ok {
		return nil
	}
	return &tomlTable{t.document, tomlfile.Join(t.path, key), tomlfile.Join(t.name, key), values, map[string]bool{}}
}

// tables returns the tables of the list at key.
func (t *tomlTable) tables(key string) []*tomlTable {
	var out []*tomlTable
	for i, v := range t.list(key) {
		values, ok := v.(map[string]any)
		if !ok {
			t.fail(key, "expected tables, found %s", tomlfile.Kind(v))
			return nil
		}
		out = append(out, &tomlTable{t.document, tomlfile.Join(tomlfile.Join(t.path, key), strconv.Itoa(i)), tomlfile.Join(t.name, key), values, map[string]bool{}})
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
		t.fail(key, "unknown key%s; known are %s", tomlfile.DidYouMean(tomlfile.NearestKey(key, known)), strings.Join(known, ", "))
	}
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
