package tomlfile

import (
	"bytes"
	"errors"
	"fmt"
	"strconv"
	"strings"

	"github.com/pelletier/go-toml/v2"
	"github.com/pelletier/go-toml/v2/unstable"
)

// Error is what makes a text no document.
type Error struct {
	Line int // from 1; 0 where it is of no one line
	Err  error
}

// Error returns "line 12: cause".
func (e *Error) Error() string {
	if e.Line == 0 {
		return e.Err.Error()
	}
	return fmt.Sprintf("line %d: %v", e.Line, e.Err)
}

// Unwrap returns the cause.
func (e *Error) Unwrap() error { return e.Err }

// Document is a TOML document.
//
// A path names a key, a table or an element of a list in it, the parts joined
// by points: "data.after", and "header.2.pattern" in the third [[header]].
// Where a part has a point of its own, two paths may look alike; only lines
// could tell.
type Document struct {
	// Values are decoded as go-toml does: string, int64, float64, bool, time.Time
	// and the Local… types of dates, []any and map[string]any.
	Values map[string]any
	lines  map[string]int
}

// Parse reads a document, which may begin with a byte order mark. The error is
// an *Error.
func Parse(text []byte) (*Document, error) {
	text = bytes.TrimPrefix(text, []byte("\xef\xbb\xbf"))
	w := walk{text: text, line: 1, lines: map[string]int{}, count: map[string]int{}, twice: map[int]error{}}
	w.document()
	d := &Document{Values: map[string]any{}, lines: w.lines}
	err := toml.Unmarshal(text, &d.Values)
	if err == nil {
		return d, nil
	}
	line := 0
	if at, ok := errors.AsType[*toml.DecodeError](err); ok {
		line, _ = at.Position()
	}
	if twice, ok := w.twice[line]; ok {
		return nil, &Error{line, twice}
	}
	return nil, &Error{line, errors.New(strings.TrimPrefix(err.Error(), "toml: "))}
}

// Line returns the line of what has the path, or else of the innermost table
// round it that has one: of a missing key that is its table's. It is 0 for a
// key that the document itself lacks.
func (d *Document) Line(path string) int {
	for {
		if line, ok := d.lines[path]; ok {
			return line
		}
		at := strings.LastIndexByte(path, '.')
		if at < 0 {
			return 0
		}
		path = path[:at]
	}
}

// Join appends a part to a path; either may be empty.
func Join(path, part string) string {
	if path == "" || part == "" {
		return path + part
	}
	return path + "." + part
}

// walk notes where all that has a path stands. It goes through the text once,
// in order.
type walk struct {
	text  []byte
	done  int // how far lines are counted
	line  int // of the byte at done
	lines map[string]int
	count map[string]int // tables of a list that [[…]] makes, by its path
	twice map[int]error  // by line, what may have been given before; the decoder knows
}

func (w *walk) document() {
	parser := unstable.Parser{}
	parser.Reset(w.text)
	table := ""
	for parser.NextExpression() {
		switch e := parser.Expression(); e.Kind {
		case unstable.Table:
			table = w.key("", e, false)
		case unstable.ArrayTable:
			table = w.key("", e, true)
		case unstable.KeyValue:
			w.pair(table, e)
		}
	}
}

// key notes a key below a table, and returns its path. The parts before its last
// one, tables that it makes, have its line where they were not made before.
func (w *walk) key(table string, e *unstable.Node, isList bool) string {
	path, at := table, 0
	for keys := e.Key(); keys.Next(); {
		part := string(keys.Node().Data)
		at = w.lineAt(int(keys.Node().Raw.Offset))
		if n := w.count[path]; n > 0 {
			path = Join(path, strconv.Itoa(n-1)) // [list.key] is of its last table
		}
		path = Join(path, part)
		if first, known := w.lines[path]; !known {
			w.lines[path] = at
		} else if keys.IsLast() && !isList {
			w.twice[at] = fmt.Errorf("%s is given twice, first in line %d", path, first)
		}
	}
	if isList {
		w.count[path]++
		path = Join(path, strconv.Itoa(w.count[path]-1))
		w.lines[path] = at
	}
	return path
}

// lineAt returns the line of an offset, none before those it was asked for.
func (w *walk) lineAt(offset int) int {
	if offset > w.done {
		w.line += bytes.Count(w.text[w.done:offset], []byte("\n"))
		w.done = offset
	}
	return w.line
}

// pair notes a key and what is in its value.
func (w *walk) pair(table string, e *unstable.Node) { w.value(w.key(table, e, false), e.Value()) }

// value notes the keys in inline tables and the elements of lists.
func (w *walk) value(path string, v *unstable.Node) {
	i := 0
	for it := v.Children(); it.Next(); {
		n := it.Node()
		switch {
		case v.Kind == unstable.InlineTable && n.Kind == unstable.KeyValue:
			w.pair(path, n)
		case v.Kind == unstable.Array && n.Kind != unstable.Comment:
			element := Join(path, strconv.Itoa(i))
			if n.Kind != unstable.Array { // of lists the parser keeps no place
				w.lines[element] = w.lineAt(int(n.Raw.Offset))
			}
			w.value(element, n)
			i++
		}
	}
}
