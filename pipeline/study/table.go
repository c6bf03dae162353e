package study

import (
	"cmp"
	"errors"
	"fmt"
	"maps"
	"math"
	"slices"
	"strconv"
	"strings"
	"time"

	"swaybook/ingest/tomlfile"
)

// table is a table of the file whose keys are asked for one by one.
type table struct {
	reader *reader
	path   string // "" of the document itself
	name   string
	line   int
	values map[string]any
	asked  []string
}

func (t *table) pathOf(key string) string { return tomlfile.Join(t.path, key) }

func (t *table) lineOf(key string) int { return t.reader.doc.Line(t.pathOf(key)) }

// fail notes a mistake at a key; one that is missing has its table's line.
func (t *table) fail(key, format string, args ...any) {
	t.reader.failAt(t.lineOf(key), t.pathOf(key), format, args...)
}

func (r *reader) failAt(line int, key, format string, args ...any) {
	r.mistakes = append(r.mistakes, r.study.Mistake(line, key, fmt.Errorf(format, args...)))
}

// keys returns the table's keys in the order of the file.
func (t *table) keys() []string {
	return slices.SortedFunc(maps.Keys(t.values), func(a, b string) int {
		return cmp.Or(t.lineOf(a)-t.lineOf(b), strings.Compare(a, b))
	})
}

// value returns what stands at key, nil where nothing does, which is a mistake where the
// key is needed.
func (t *table) value(key string, isNeeded bool) any {
	t.asked = append(t.asked, key)
	v, ok := t.values[key]
	if !ok && isNeeded {
		t.fail(key, "is missing")
	}
	return v
}

// text returns the text at key.
func (t *table) text(key string, isNeeded bool) Text {
	v := t.value(key, isNeeded)
	if v == nil {
		return Text{}
	}
	text, err := textOf(v)
	if err != nil {
		t.fail(key, "%w", err)
		return Text{}
	}
	return Text{text, t.lineOf(key)}
}

// textOf returns a text that says something.
func textOf(v any) (string, error) {
	text, ok := v.(string)
	switch {
	case !ok:
		return "", fmt.Errorf("want a text in quotes, found %s", tomlfile.Kind(v))
	case strings.TrimSpace(text) == "":
		return "", errors.New("is empty")
	case strings.ContainsRune(text, 0):
		return "", errors.New("holds a zero byte")
	}
	return text, nil
}

// texts returns the texts of the list at key, where one may stand without brackets.
func (t *table) texts(key string, isNeeded bool) []Text {
	v := t.value(key, isNeeded)
	if v == nil {
		return nil
	}
	list, isList := v.([]any)
	if !isList {
		list = []any{v}
	}
	if isNeeded && len(list) == 0 {
		t.fail(key, "is empty")
	}
	var out []Text
	for i, v := range list {
		line := t.lineOf(tomlfile.Join(key, strconv.Itoa(i)))
		text, err := textOf(v)
		if err != nil {
			t.reader.failAt(line, t.pathOf(key), "%w", err)
			continue
		}
		out = append(out, Text{text, line})
	}
	return out
}

// patterns returns the patterns at key.
func (t *table) patterns(key string) []Pattern {
	var out []Pattern
	for _, text := range t.texts(key, false) {
		p, err := parsePattern(text)
		if err != nil {
			t.reader.failAt(text.Line, key, "%s: %w", tomlfile.Quote(text.Value), err)
			continue
		}
		out = append(out, p)
	}
	return out
}

// whole returns the whole number at key, within low and high; 0 where there is none.
func (t *table) whole(key string, low, high int64) int {
	switch v := t.value(key, false).(type) {
	case nil:
	case int64:
		if v >= low && v <= high {
			return int(v)
		}
		t.fail(key, "%d is outside %d to %d", v, low, high)
	default:
		t.fail(key, "want a whole number, found %s", tomlfile.Kind(v))
	}
	return 0
}

// maxRatio is beyond what any bound of change could mean.
const maxRatio = 10

// ratio returns the ratio at key, "5%" or 0.05; nil where there is none.
func (t *table) ratio(key string) *float64 {
	var x float64
	var err error
	switch v := t.value(key, false).(type) {
	case nil:
		return nil
	case int64:
		x = float64(v)
	case float64:
		x = v
	case string:
		x, err = ParseRatio(v)
	default:
		err = errRatio
	}
	if err != nil || !isRatio(x) {
		t.fail(key, "%w", errRatio)
		return nil
	}
	return &x
}

// errRatio says what a ratio looks like.
var errRatio = fmt.Errorf(`want a ratio such as "5%%" or 0.05, from 0 to %d`, maxRatio)

func isRatio(x float64) bool { return x >= 0 && x <= maxRatio }

// ParseRatio reads "5%" or "0.05".
func ParseRatio(text string) (float64, error) {
	figure, isPercent := strings.CutSuffix(strings.TrimSpace(text), "%")
	if figure = strings.TrimSpace(figure); isPercent {
		figure += "e-2" // shifted in the text, the ratio is rounded once
	}
	x, err := strconv.ParseFloat(figure, 64)
	if err != nil || !isRatio(x) {
		return 0, errRatio
	}
	return x, nil
}

// table returns the table at key, nil where there is none.
func (t *table) table(key string) *table {
	v := t.value(key, false)
	values, ok := v.(map[string]any)
	if v != nil && !ok {
		t.fail(key, "want tables with names, [%s.NAME], found %s", key, tomlfile.Kind(v))
	}
	if !ok {
		return nil
	}
	return &table{reader: t.reader, path: t.pathOf(key), values: values}
}

// settings returns the flags that the table sets, in the order of the file.
func (t *table) settings(flags []Flag) []Setting {
	var out []Setting
	for _, key := range t.keys() {
		at := slices.IndexFunc(flags, func(f Flag) bool { return f.Name == key })
		if at < 0 {
			continue
		}
		for _, s := range t.setting(flags[at]) {
			if flags[at].namesFile(s.Value) {
				s.Value = t.reader.file(s.Value)
			}
			out = append(out, s)
		}
	}
	for _, f := range flags {
		t.value(f.Name, f.IsNeeded)
	}
	return out
}

// setting returns the values of one flag.
func (t *table) setting(f Flag) []Setting {
	v, line := t.values[f.Name], t.lineOf(f.Name)
	list, isList := v.([]any)
	switch {
	case f.Form == Switch:
		isOn, ok := v.(bool)
		if !ok {
			t.fail(f.Name, "want true or false, without quotes, found %s", tomlfile.Kind(v))
		}
		if !isOn {
			return nil // as if it were not there
		}
		return []Setting{{f.Name, Text{"true", line}}}
	case f.Form == Repeated:
		var out []Setting
		for _, text := range t.texts(f.Name, false) {
			out = append(out, Setting{f.Name, text})
		}
		return out
	case !isList:
		list = []any{v}
	case f.Form != List:
		t.fail(f.Name, "takes one value, found a list")
		return nil
	case len(list) == 0:
		t.fail(f.Name, "is empty")
		return nil
	}
	var words []string
	for i, v := range list {
		word, err := wordOf(v)
		if err != nil {
			t.reader.failAt(t.lineOf(tomlfile.Join(f.Name, strconv.Itoa(i))), t.pathOf(f.Name), "%w", err)
			return nil
		}
		words = append(words, word)
	}
	return []Setting{{f.Name, Text{strings.Join(words, ","), line}}}
}

// wordOf writes a value as the command line has it.
func wordOf(v any) (string, error) {
	switch v := v.(type) {
	case int64:
		return strconv.FormatInt(v, 10), nil
	case float64:
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return "", errors.New("want a finite number")
		}
		return strconv.FormatFloat(v, 'g', -1, 64), nil
	case time.Time:
		return v.Format(time.RFC3339Nano), nil
	case fmt.Stringer: // dates without a zone
		return v.String(), nil
	case string:
		return textOf(v)
	}
	return "", fmt.Errorf("want a text or a number, found %s", tomlfile.Kind(v))
}

// namesFile reports whether a value of the flag is a file.
func (f Flag) namesFile(value string) bool {
	if f.Form == List && strings.HasPrefix(value, "@") {
		return true
	}
	return f.IsFile && !slices.Contains(f.Words, value)
}

// file makes the file in a value absolute.
func (r *reader) file(value string) string {
	if name, isList := strings.CutPrefix(value, "@"); isList {
		return "@" + r.study.At(name)
	}
	return r.study.At(value)
}

// done refuses keys that nobody asked for.
func (t *table) done() {
	known := slices.Sorted(slices.Values(t.asked))
	known = slices.Compact(known)
	for _, key := range t.keys() {
		if slices.Contains(known, key) {
			continue
		}
		if near := tomlfile.NearestKey(key, known); near != "" {
			t.fail(key, "unknown key%s", tomlfile.DidYouMean(near))
		} else {
			t.fail(key, "unknown key; known here are %s", strings.Join(known, ", "))
		}
	}
}
