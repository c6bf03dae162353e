package design

import (
	"cmp"
	"errors"
	"fmt"
	"maps"
	"slices"
	"strconv"
	"strings"

	"swaybook/ingest/tomlfile"
)

// FileError is a mistake in a spectrum's file, or in the table that it names.
type FileError struct {
	Path string
	Line int    // from 1; 0 where the mistake is of no one line
	Key  string // "" where it is of none
	Err  error
}

// Error returns "path:12: key: cause".
func (e *FileError) Error() string {
	text := e.Path
	if e.Line > 0 {
		text += ":" + strconv.Itoa(e.Line)
	}
	if e.Key != "" {
		text += ": " + e.Key
	}
	return text + ": " + e.Err.Error()
}

// Unwrap returns the cause.
func (e *FileError) Unwrap() error { return e.Err }

// document is what the tables of one file share.
type document struct {
	*tomlfile.Document
	path string
	err  *FileError // the first mistake
}

// keys is a table whose keys are asked for one by one. The first mistake stays
// in the document; what is asked for after it means nothing.
type keys struct {
	document *document
	name     string // "" of the document itself
	values   map[string]any
}

func parseTOML(path string, text []byte) (*keys, error) {
	d, err := tomlfile.Parse(text)
	if wrong, ok := errors.AsType[*tomlfile.Error](err); ok {
		return nil, &FileError{Path: path, Line: wrong.Line, Err: wrong.Err}
	}
	return &keys{&document{Document: d, path: path}, "", d.Values}, nil
}

// fail keeps the first mistake, of a key, or of the table itself where key is
// "". A key that is missing has its table's line.
func (k *keys) fail(key, format string, args ...any) { k.failWith(key, fmt.Errorf(format, args...)) }

func (k *keys) failWith(key string, err error) {
	if k.document.err != nil {
		return
	}
	name := tomlfile.Join(k.name, key)
	k.document.err = &FileError{k.document.path, k.document.Line(name), name, err}
}

// has reports whether the table has the key.
func (k *keys) has(key string) bool {
	_, ok := k.values[key]
	return ok
}

// only refuses all other keys, the first in the file.
func (k *keys) only(known ...string) {
	line := func(key string) int { return k.document.Line(tomlfile.Join(k.name, key)) }
	inOrder := slices.SortedFunc(maps.Keys(k.values), func(a, b string) int {
		return cmp.Or(line(a)-line(b), strings.Compare(a, b))
	})
	for _, key := range inOrder {
		if !slices.Contains(known, key) {
			k.fail(key, "unknown key; known here are %s", strings.Join(known, ", "))
		}
	}
}

// text returns the text at key, without blanks round it.
func (k *keys) text(key string) string {
	text, ok := k.values[key].(string)
	switch text = strings.TrimSpace(text); {
	case !k.has(key):
		k.fail(key, "is missing")
	case !ok:
		k.fail(key, "want a text in quotes, found %s", found(k.values[key]))
	case text == "":
		k.fail(key, "is empty")
	}
	return text
}

// word returns the text at key, one of words; otherwise where there is none,
// which is a mistake if that is "".
func (k *keys) word(key, otherwise string, words ...string) string {
	if !k.has(key) && otherwise != "" {
		return otherwise
	}
	if !k.has(key) {
		k.fail(key, "is missing; want %s", listed(words))
		return ""
	}
	text, ok := k.values[key].(string)
	if !ok || !slices.Contains(words, text) {
		k.fail(key, "want %s, found %s", listed(words), found(k.values[key]))
		return ""
	}
	return text
}

// listed writes "a", "b" or "c".
func listed(words []string) string {
	text := strconv.Quote(words[0])
	for i, w := range words[1:] {
		between := ", "
		if i == len(words)-2 {
			between = " or "
		}
		text += between + strconv.Quote(w)
	}
	return text
}

// number returns the number at key, within low and high.
func (k *keys) number(key string, low, high float64) float64 {
	if !k.has(key) {
		k.fail(key, "is missing")
		return low
	}
	var x float64
	switch v := k.values[key].(type) {
	case int64:
		x = float64(v)
	case float64:
		x = v
	default:
		k.fail(key, "want a number, found %s", found(v))
		return low
	}
	if !(x >= low && x <= high) {
		k.fail(key, "%v is outside %v to %v", x, low, high)
		return low
	}
	return x
}

// numberOr returns the number at key, otherwise where there is none.
func (k *keys) numberOr(key string, otherwise, low, high float64) float64 {
	if !k.has(key) {
		return otherwise
	}
	return k.number(key, low, high)
}

// ratio returns the damping ratio at key, written "5%" or 0.05.
func (k *keys) ratio(key string) float64 {
	var x float64
	var err error
	switch v := k.values[key].(type) {
	case int64:
		x = float64(v)
	case float64:
		x = v
	case string:
		figure, isPercent := strings.CutSuffix(strings.TrimSpace(v), "%")
		figure = strings.TrimSpace(figure)
		if isPercent {
			figure += "e-2" // shifted in the text, the ratio is rounded once
		}
		x, err = strconv.ParseFloat(figure, 64)
	default:
		err = strconv.ErrSyntax
	}
	if err != nil || !(x >= 0 && x <= maxDamping) {
		k.fail(key, "want a damping ratio such as \"5%%\" or 0.05, up to %s, found %s", percent(maxDamping), found(k.values[key]))
		return 0
	}
	return x
}

// maxDamping is the largest damping ratio for which a table may be.
const maxDamping = 0.9

// table returns the table at key.
func (k *keys) table(key string) *keys {
	values, ok := k.values[key].(map[string]any)
	if !ok {
		k.fail(key, "want a table such as { s = 1.15, tb_s = 0.2, tc_s = 0.6, td_s = 2 }, found %s", found(k.values[key]))
	}
	return &keys{k.document, tomlfile.Join(k.name, key), values}
}

// found names a value for messages.
func found(v any) string {
	switch v := v.(type) {
	case string:
		if runes := []rune(v); len(runes) > 40 {
			v = string(runes[:40]) + "…"
		}
		return strconv.Quote(v)
	case int64, float64, bool:
		return fmt.Sprint(v)
	case []any:
		return "a list"
	case map[string]any:
		return "a table"
	}
	return "a date or time"
}

// percent writes a ratio as a percentage in at most six digits.
func percent(ratio float64) string { return strconv.FormatFloat(100*ratio, 'g', 6, 64) + " %" }
