package ingest

import (
	"bytes"
	"path"
	"strings"
)

// notMotion recognises text that is no record and is not meant to be one, a
// *NotMotionError, and an HTML page, which is what a download leaves when the
// server had something else to say: a *ParseError. It returns nil for all else.
func notMotion(t *Text) error {
	n := nextText(t, 1)
	line := bytes.ToLower(bytes.TrimSpace(t.Bytes(n)))
	switch {
	case isHTML(t, n) && isReport(t, n):
		return &NotMotionError{"a report, not a record"}
	case isHTML(t, n):
		return refuse(n, "", "an HTML page, not a record: a download that went wrong?")
	case bytes.HasPrefix(line, []byte("<?xml")):
		return &NotMotionError{"an XML document, not a record"}
	case bytes.HasPrefix(line, []byte("{\"")) || string(line) == "{":
		return &NotMotionError{"a JSON document, not a record; what it says of records belongs in the catalogue"}
	case bytes.HasPrefix(line, []byte("record,component,damping,period_s")):
		return &NotMotionError{"spectral ordinates exported as a table, not a time series"}
	case isCatalogueHeader(t):
		return &NotMotionError{"a catalogue of records, not a record"}
	}
	return nil
}

// DatabaseMark begins every SQLite database (SQLite's file format, 1.3), of which stores are.
const DatabaseMark = "SQLite format 3\x00"

// errDatabase says so.
var errDatabase = &NotMotionError{"a database, not a record"}

// isHTML looks for the tags that open a page in the first lines from line on.
func isHTML(t *Text, line int) bool {
	for n := line; n < line+5; n++ {
		text := bytes.ToLower(bytes.TrimSpace(t.Bytes(n)))
		if bytes.HasPrefix(text, []byte("<!doctype html")) || bytes.HasPrefix(text, []byte("<html")) {
			return true
		}
	}
	return false
}

// isReport looks for what this program's own pages say of themselves at their head.
func isReport(t *Text, line int) bool {
	for n := line; n < line+8; n++ {
		if bytes.Contains(t.Bytes(n), []byte(`<meta name="generator" content="swaybook">`)) {
			return true
		}
	}
	return false
}

// isCatalogueHeader reports whether the first line that is no comment names at
// least two columns of a catalogue, one of which says what its rows are about.
func isCatalogueHeader(t *Text) bool {
	n := nextText(t, 1)
	for n <= t.Len() && bytes.HasPrefix(bytes.TrimSpace(t.Bytes(n)), []byte("#")) {
		n = nextText(t, n+1)
	}
	known, keys := 0, 0
	for _, name := range strings.FieldsFunc(t.Line(n), func(r rune) bool { return r == ',' || r == ';' }) {
		name = commentKey(strings.Trim(name, " \t\""))
		if _, ok := catalogueColumns[name]; !ok {
			continue
		}
		known++
		if name == "file" || name == "event" || name == "station" {
			keys++
		}
	}
	return known >= 2 && keys >= 1
}

// SkipMember says why a member of an archive is no record whatever it holds: its
// name says so, or that of a folder in which it lies, such as Discover passes over.
// It returns "" for every other path.
func SkipMember(name string) string {
	folders, base := path.Split(name)
	for _, folder := range strings.Split(folders, "/") {
		switch {
		case folder == "__MACOSX":
			return "a file of the operating system"
		case strings.HasPrefix(folder, "."):
			return "in a hidden folder"
		}
	}
	return SkipByName(base)
}

// SkipByName says why a file of this base name is no record whatever it holds:
// a text about the records, or a file that an operating system left behind. It
// returns "" for every other name.
func SkipByName(base string) string {
	name := strings.ToLower(base)
	stem, _, _ := strings.Cut(name, ".")
	switch {
	case name == "thumbs.db" || name == "desktop.ini" || name == ".ds_store" || name == "icon\r" || strings.HasPrefix(name, "~$"):
		return "a file of the operating system"
	case strings.HasPrefix(name, "."):
		return "a hidden file"
	case stem == "readme":
		return "a readme"
	case stem == "licence" || stem == "license" || stem == "copying":
		return "a licence"
	case strings.HasSuffix(name, ".md") || strings.HasSuffix(name, ".markdown"):
		return "a Markdown text"
	case strings.HasSuffix(name, ".toml"):
		return "a TOML text, as of a study"
	}
	return ""
}
