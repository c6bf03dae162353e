package ingest

import (
	"errors"
	"os"
	"path/filepath"
	"testing"
)

func TestNotMotion(t *testing.T) {
	cases := []struct {
		name, text     string
		skip, rejected string
	}{
		{"catalogue", "file,unit,dt_s\na.txt,g,0.01\n", "a catalogue of records, not a record", ""},
		{"catalogue with semicolons", "# invented\n\nEvent; Station; Distance km\ne;s;10\n", "a catalogue of records, not a record", ""},
		{"ordinates", "record,component,damping,period_s,sd_m\nr,h1,0.05,0.1,1e-3\n", "spectral ordinates exported as a table, not a time series", ""},
		{"page", "\n<!DOCTYPE HTML><html>", "", "case:2: an HTML page, not a record: a download that went wrong?"},
		{"report", "<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n<meta name=\"generator\" content=\"swaybook\">\n", "a report, not a record", ""},
		{"page in XML", "<?xml version='1.0'?>\n<html xmlns='x'>", "", "case:1: an HTML page, not a record: a download that went wrong?"},
		{"XML", "<?xml version='1.0'?>\n<quake/>", "an XML document, not a record", ""},
		{"JSON", "{\n  \"unit\": \"g\"\n}\n", "a JSON document, not a record; what it says of records belongs in the catalogue", ""},
		{"JSON in one line", "{\"unit\": \"g\"}\n", "a JSON document, not a record; what it says of records belongs in the catalogue", ""},
		{"columns", "time,acc\n0,1\n", "", ""},
		{"one known name", "station\nABC\n", "", ""},
		{"no key", "magnitude,depth_km\n5,10\n", "", ""},
	}
	for _, k := range cases {
		text, err := NewText([]byte(k.text))
		if err != nil {
			t.Fatal(err)
		}
		err = notMotion(text)
		if pe, ok := errors.AsType[*ParseError](err); ok {
			pe.Path = "case"
		}
		want := k.skip + k.rejected
		if _, skip := errors.AsType[*NotMotionError](err); skip != (k.skip != "") || (err == nil) != (want == "") || err != nil && err.Error() != want {
			t.Errorf("%s: %v, want %q", k.name, err, want)
		}
	}
}

// A database is none, however large, and is not read to its end to see that.
func TestADatabaseIsNoRecord(t *testing.T) {
	data := []byte(DatabaseMark + "\x10\x00\x01\x01 and more")
	format, _, err := Parse(t.Context(), "store.db", data, Hints{})
	if skip, ok := errors.AsType[*NotMotionError](err); !ok || skip.Reason != "a database, not a record" || format != "" {
		t.Errorf("Parse = %q, %v", format, err)
	}
	file := filepath.Join(t.TempDir(), "store.db")
	if err := os.WriteFile(file, data, 0o666); err != nil {
		t.Fatal(err)
	}
	if _, _, err := readLimited(file, int64(len(data))-1); !errors.Is(err, errDatabase) {
		t.Errorf("read beyond the limit: %v", err)
	}
	if got, _, err := readLimited(file, int64(len(data))); string(got) != string(data) || err != nil {
		t.Errorf("read up to the limit: %q, %v", got, err)
	}
}

func TestSkipByName(t *testing.T) {
	for name, want := range map[string]string{
		"README": "a readme", "Readme.txt": "a readme", "README.md": "a readme", "notes.md": "a Markdown text", "x.markdown": "a Markdown text", "study.TOML": "a TOML text, as of a study",
		"LICENSE": "a licence", "licence.txt": "a licence", "COPYING": "a licence", ".gitignore": "a hidden file", "._quake.v2": "a hidden file",
		".DS_Store": "a file of the operating system", "Thumbs.db": "a file of the operating system", "desktop.ini": "a file of the operating system",
		"~$list.xlsx": "a file of the operating system",
		"quake.v2":    "", "readme2.v2": "", "ABC001.NS": "", "": "",
	} {
		if got := SkipByName(name); got != want {
			t.Errorf("SkipByName(%q) = %q, want %q", name, got, want)
		}
	}
}

func TestSkipMember(t *testing.T) {
	for name, want := range map[string]string{
		"__MACOSX/x.v2": "a file of the operating system", "a/__MACOSX/b/x.v2": "a file of the operating system", ".git/x.v2": "in a hidden folder",
		"a/.b/x.v2": "in a hidden folder", "a/README": "a readme", "a/._x.v2": "a hidden file", "a/x.v2": "", "x.v2": "", "a..b/x.v2": "",
	} {
		if got := SkipMember(name); got != want {
			t.Errorf("SkipMember(%q) = %q, want %q", name, got, want)
		}
	}
}
