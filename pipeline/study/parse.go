package study

import (
	"bytes"
	"errors"
	"fmt"
	"path/filepath"
	"slices"
	"strings"
	"unicode"
	"unicode/utf8"

	"swaybook/ingest/tomlfile"
)

// Limits of what is read.
const (
	maxText = 1 << 20 // bytes
	maxName = 80      // characters
	maxKeep = 1_000_000

	maxPurpose = 2000 // bytes
)

// Parse reads the file that is called so, and lies in dir, an absolute path. The error
// is Mistakes; beside them is what could be read, so that the rest can be looked at too,
// nil where nothing could.
func Parse(file, dir string, text []byte, v Vocabulary) (*Study, error) {
	s := &Study{File: file, Dir: filepath.Clean(dir)}
	if err := checkText(text); err != nil {
		return nil, Mistakes{s.Mistake(0, "", err)}
	}
	doc, err := tomlfile.Parse(text)
	if wrong, ok := errors.AsType[*tomlfile.Error](err); ok {
		return nil, Mistakes{s.Mistake(wrong.Line, "", wrong.Err)}
	}
	r := &reader{study: s, doc: doc}
	r.document(&table{reader: r, values: doc.Values}, v)
	r.checkPaths(v)
	if len(r.mistakes) > 0 {
		return s, r.mistakes.Sorted()
	}
	return s, nil
}

func checkText(text []byte) error {
	switch {
	case len(text) > maxText:
		return fmt.Errorf("is larger than %d bytes", maxText)
	case bytes.HasPrefix(text, []byte("\xff\xfe")), bytes.HasPrefix(text, []byte("\xfe\xff")):
		return errors.New("is UTF-16; save it as UTF-8")
	case !utf8.Valid(text):
		return errors.New("is not UTF-8")
	}
	return nil
}

// reader reads one file and collects what is wrong with it.
type reader struct {
	study    *Study
	doc      *tomlfile.Document
	mistakes Mistakes
}

func (r *reader) document(t *table, v Vocabulary) {
	s := r.study
	if s.Name = t.text("name", true); !isPrintable(s.Name.Value) {
		t.fail("name", "want at most %d characters that can be printed, on one line", maxName)
	}
	if s.Purpose = t.text("purpose", false); len(s.Purpose.Value) > maxPurpose {
		t.fail("purpose", "is longer than %d bytes", maxPurpose)
	}
	s.Store = r.path(t.text("store", true))
	for _, source := range t.texts("sources", true) {
		s.Sources = append(s.Sources, r.path(source))
	}
	s.Include, s.Exclude = t.patterns("include"), t.patterns("exclude")
	s.MaxDrift = t.ratio("max-drift")
	s.Keep = t.whole("keep", 1, maxKeep)
	s.State, s.Metrics = r.path(t.text("state", false)), r.path(t.text("metrics", false))
	if s.Report = r.path(t.text("report", false)); s.Report.Value != "" && !strings.EqualFold(filepath.Ext(s.Report.Value), ".html") {
		t.fail("report", "%s: want a name that ends in .html", tomlfile.Quote(filepath.Base(s.Report.Value)))
	}
	s.Ingest = t.settings(v.Ingest)
	r.selections(t, v.Selection)
	for _, kind := range Kinds() {
		r.products(t, kind, v)
	}
	t.done()
	slices.SortStableFunc(s.Products, func(a, b Product) int { return a.Line - b.Line })
	r.checkNames()
}

// path makes the path in a text absolute.
func (r *reader) path(t Text) Text {
	if t.Value != "" {
		t.Value = r.study.At(t.Value)
	}
	return t
}

func isPrintable(name string) bool {
	return utf8.RuneCountInString(name) <= maxName && !strings.ContainsFunc(name, func(c rune) bool { return !unicode.IsPrint(c) })
}

// isName reports whether a table may be called so: the name stands in reports and
// in names of metrics.
func isName(name string) bool {
	return name != "" && utf8.RuneCountInString(name) <= maxName && !strings.ContainsFunc(name, func(c rune) bool {
		return c != '-' && c != '_' && !unicode.IsLetter(c) && !unicode.IsDigit(c)
	})
}

// named returns the tables in the table at key in the order of the file.
func (r *reader) named(t *table, key string) []*table {
	outer := t.table(key)
	if outer == nil {
		return nil
	}
	var out []*table
	for _, name := range outer.keys() {
		line := r.doc.Line(tomlfile.Join(key, name))
		switch inner, ok := outer.values[name].(map[string]any); {
		case !ok:
			r.failAt(line, tomlfile.Join(key, name), "want a table with a name, [%s.NAME], found %s", key, tomlfile.Kind(outer.values[name]))
		case !isName(name):
			r.failAt(line, key, "%s is no name: want letters, digits, - and _, at most %d", tomlfile.Quote(name), maxName)
		default:
			out = append(out, &table{reader: r, path: tomlfile.Join(key, name), name: name, line: line, values: inner})
		}
	}
	return out
}

func (r *reader) selections(t *table, flags []Flag) {
	for _, in := range r.named(t, "selection") {
		r.study.Selections = append(r.study.Selections, Selection{in.name, in.line, in.settings(flags)})
		in.done()
	}
}

func (r *reader) products(t *table, kind Kind, v Vocabulary) {
	for _, in := range r.named(t, string(kind)) {
		flags := v.Products[kind]
		p := Product{Kind: kind, Name: in.name, Line: in.line, Settings: in.settings(flags)}
		p.own = p.Settings
		if chosen := in.text("selection", false); chosen.Line > 0 {
			p.Selection = chosen.Value
			p.Settings = r.withSelection(in, p, flags)
		}
		for _, file := range in.texts("files", false) {
			if f, err := fileOf(r.path(file)); err != nil {
				r.failAt(file.Line, in.pathOf("files"), "%w", err)
			} else {
				p.Files = append(p.Files, f)
			}
		}
		if _, ok := in.values["format"]; ok {
			in.fail("format", "follows from the names of the files")
			in.asked = append(in.asked, "format")
		}
		in.done()
		r.study.Products = append(r.study.Products, p)
	}
}

// withSelection returns the settings of the selection that the product names, and then
// its own.
func (r *reader) withSelection(in *table, p Product, flags []Flag) []Setting {
	selections := r.study.Selections
	at := slices.IndexFunc(selections, func(s Selection) bool { return s.Name == p.Selection })
	if at < 0 {
		var names []string
		for _, s := range selections {
			names = append(names, s.Name)
		}
		in.fail("selection", "there is no [selection.%s]%s", p.Selection, tomlfile.DidYouMean(tomlfile.NearestKey(p.Selection, names)))
		return p.Settings
	}
	chosen := selections[at]
	for _, own := range p.Settings {
		if i := slices.IndexFunc(chosen.Settings, func(s Setting) bool { return s.Key == own.Key }); i >= 0 {
			r.failAt(own.Line, in.pathOf(own.Key), "is said by the selection %s too, in line %d", chosen.Name, chosen.Settings[i].Line)
		}
	}
	for _, s := range chosen.Settings {
		if !slices.ContainsFunc(flags, func(f Flag) bool { return f.Name == s.Key }) {
			in.fail("selection", "%s says %s, in line %d, which %s does not take", chosen.Name, s.Key, s.Line, p.Kind)
		}
	}
	return slices.Concat(chosen.Settings, p.Settings)
}

func fileOf(t Text) (File, error) {
	switch f := Format(strings.ToLower(strings.TrimPrefix(filepath.Ext(t.Value), "."))); f {
	case CSV, JSON, TXT, SVG, PNG:
		return File{t, f}, nil
	}
	return File{}, fmt.Errorf("%s: want a name that ends in .csv, .json, .txt, .svg or .png", tomlfile.Quote(filepath.Base(t.Value)))
}

// checkNames refuses a name that two products have, of whatever kind: reports go by it.
func (r *reader) checkNames() {
	first := map[string]Product{}
	for _, p := range r.study.Products {
		before, known := first[p.Name]
		if !known {
			first[p.Name] = p
			continue
		}
		r.failAt(p.Line, p.Path(), "%s is called so too, in line %d; every product needs a name of its own", before.Path(), before.Line)
	}
}
