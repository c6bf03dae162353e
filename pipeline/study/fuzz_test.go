package study

import (
	"errors"
	"slices"
	"strings"
	"testing"
)

// FuzzStudy: whatever the bytes, there is a study that keeps its promises or mistakes in
// order, each with a line of the file.
func FuzzStudy(f *testing.F) {
	f.Add([]byte(coast))
	f.Add([]byte(least + "[selection.a]\nwhere=1\n[records.b]\nselection='a'\nfiles=['b.csv']\n"))
	f.Add([]byte(least + "spectrum={a={files='a.csv'},'b c'={}}\n[[demand]]\nx=[[1],{y=2}]\n"))
	f.Add([]byte(least + "include=['**','a/**/b','[x','!']\nmax-drift='1e-2 %'\nperiods=[1,2041-01-01,nan]\n"))
	f.Fuzz(func(t *testing.T, text []byte) {
		before := slices.Clone(text)
		s, err := Parse("x.toml", "/region", text, words)
		if !slices.Equal(text, before) {
			t.Fatal("the input was changed")
		}
		lines := strings.Count(string(text), "\n") + 1
		if err != nil {
			checkMistakes(t, err, lines)
			return
		}
		checkStudy(t, s, lines)
	})
}

func checkMistakes(t *testing.T, err error, lines int) {
	t.Helper()
	mistakes, ok := errors.AsType[Mistakes](err)
	if !ok || len(mistakes) == 0 {
		t.Fatalf("the error is %T: %v", err, err)
	}
	last := 0
	for _, m := range mistakes {
		if m.Line < last || m.Line > lines || m.Err == nil || m.Error() == "" {
			t.Fatalf("%d lines, line %d after %d: %v", lines, m.Line, last, m)
		}
		last = m.Line
	}
}

func checkStudy(t *testing.T, s *Study, lines int) {
	t.Helper()
	if s.Name.Value == "" || s.Store.Value == "" || len(s.Sources) == 0 || s.Keep < 0 {
		t.Fatalf("what is needed is missing: %+v", s)
	}
	names, written := map[string]bool{}, map[string]bool{s.Store.Value: true}
	for _, p := range s.Products {
		if names[p.Name] || p.Line < 1 || p.Line > lines {
			t.Fatalf("product %s in line %d of %d", p.Path(), p.Line, lines)
		}
		names[p.Name] = true
		if p.Selection != "" && !slices.ContainsFunc(s.Selections, func(c Selection) bool { return c.Name == p.Selection }) {
			t.Fatalf("%s: no selection %s", p.Path(), p.Selection)
		}
		for i, one := range p.Settings {
			if slices.ContainsFunc(p.Settings[:i], func(o Setting) bool { return o.Key == one.Key }) {
				t.Fatalf("%s: %s twice", p.Path(), one.Key)
			}
		}
		for _, f := range p.Files {
			if written[f.Value] || !strings.HasPrefix(f.Value, "/") {
				t.Fatalf("%s writes %s", p.Path(), f.Value)
			}
			written[f.Value] = true
		}
	}
	for _, path := range []string{"", "a", "a/b.V2", "a.zip!b/c.zip!d", "!!/"} {
		if s.Takes(path, false) && !s.Takes(path, true) {
			t.Fatalf("%q is taken, but not as an archive", path)
		}
	}
}
