package tomlfile

import (
	"testing"
)

const sample = "\xef\xbb\xbfname = \"a\" # line 1\n" +
	"list = [\n  'x',\n  # no element\n  2.5,\n  { deep = 1 },\n]\n" + // 2 to 7
	"[table.inner]\nkey = 1\n" + // 8, 9
	"in.line = { a = 1, b = 2 }\n" + // 10
	"[[row]]\nkey = 1\n[[row]]\n\nkey = 2\n[[row.cell]]\n[row.more]\nkey = 3\n[table]\n" // 11 to 19

func TestLines(t *testing.T) {
	d, err := Parse([]byte(sample))
	if err != nil {
		t.Fatal(err)
	}
	for path, want := range map[string]int{
		"name": 1, "list": 2, "list.0": 3, "list.1": 5, "list.2": 6, "list.2.deep": 6,
		"table": 8, "table.inner": 8, "table.inner.key": 9, "table.inner.in": 10, "table.inner.in.line.b": 10,
		"row": 11, "row.0": 11, "row.0.key": 12, "row.1": 13, "row.1.key": 15, "row.1.cell.0": 16, "row.1.more.key": 18,
		"table.inner.missing": 8, "row.1.missing": 13, "missing": 0, "": 0,
	} {
		if got := d.Line(path); got != want {
			t.Errorf("Line(%q) = %d, want %d", path, got, want)
		}
	}
	if d.Values["name"] != "a" {
		t.Errorf("name is %v, want a", d.Values["name"])
	}
}

func TestNoDocument(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		{"a = 1\n\na = 2\n", "line 3: a is given twice, first in line 1"},
		{"[s.a]\n[s]\n[s.b]\n[s.a]\n", "line 4: s.a is given twice, first in line 1"},
		{"[t]\na.b = 1\na.b = 2\n", "line 3: t.a.b is given twice, first in line 2"},
		{"[a.b]\n[a]\nc = 1\nx = \n", "line 4: unexpected character U+000A at start of value"},
		{"a = 1\n[b\n", "line 2: expected ']' to close table name"},
	} {
		_, err := Parse([]byte(c.text))
		if err == nil || err.Error() != c.want {
			t.Errorf("Parse(%q): %v, want %s", c.text, err, c.want)
		}
	}
}

func TestNearestKey(t *testing.T) {
	known := []string{"catalogue", "name", "sources"}
	for name, want := range map[string]string{"catalog": "catalogue", "nmae": "name", "source": "sources", "xy": "", "n": "", "periods": ""} {
		if got := NearestKey(name, known); got != want {
			t.Errorf("NearestKey(%q) = %q, want %q", name, got, want)
		}
	}
	if got := DidYouMean(""); got != "" {
		t.Errorf("DidYouMean of nothing is %q", got)
	}
}
