package study

import (
	"fmt"
	"slices"
	"strings"

	"swaybook/ingest/tomlfile"
)

// use is a path that the study reads or writes, and what names it.
type use struct {
	Text
	key string
}

// where says for people where a path was given.
func (u use) where() string {
	if u.Line == 0 {
		return u.key
	}
	return fmt.Sprintf("%s in line %d", u.key, u.Line)
}

// checkPaths refuses to write to a place that is given twice, or that is read.
func (r *reader) checkPaths(v Vocabulary) {
	s := r.study
	read, written := r.read(v), r.written()
	s.Reads, s.Writes = settings(read), settings(written)
	seen := map[string]use{}
	for _, u := range slices.Concat(s.own(), read) {
		if _, known := seen[u.Value]; !known {
			seen[u.Value] = u
		}
	}
	for i, source := range s.Sources {
		if slices.ContainsFunc(s.Sources[:i], func(before Text) bool { return before.Value == source.Value }) {
			r.failAt(source.Line, "sources", "%s is given twice", s.Short(source.Value))
		}
	}
	for _, u := range written {
		if before, known := seen[u.Value]; known {
			r.failAt(u.Line, u.key, "%s is the path of %s too", s.Short(u.Value), before.where())
			continue
		}
		seen[u.Value] = u
	}
}

func settings(uses []use) []Setting {
	var out []Setting
	for _, u := range uses {
		out = append(out, Setting{Key: u.key, Text: u.Text})
	}
	return out
}

// own are files that nothing else may be.
func (s *Study) own() []use {
	out := []use{{Text{Value: s.Path()}, "the study itself"}}
	if s.Store.Value != "" {
		for _, tail := range []string{"-wal", "-shm", "-journal"} { // SQLite's
			out = append(out, use{Text{Value: s.Store.Value + tail}, "the store's log"})
		}
		out = append(out, use{Text{Value: s.Store.Value + ".lock"}, "the store's lock"})
	}
	return out
}

// read are the paths that a run reads, in the order of the file.
func (r *reader) read(v Vocabulary) []use {
	var out []use
	for _, source := range r.study.Sources {
		out = append(out, use{source, "sources"})
	}
	add := func(path string, settings []Setting, flags []Flag) {
		for _, s := range settings {
			at := slices.IndexFunc(flags, func(f Flag) bool { return f.Name == s.Key })
			if flags[at].namesFile(s.Value) {
				out = append(out, use{Text{strings.TrimPrefix(s.Value, "@"), s.Line}, tomlfile.Join(path, s.Key)})
			}
		}
	}
	add("", r.study.Ingest, v.Ingest)
	for _, p := range r.study.Products {
		add(p.Path(), p.own, v.Products[p.Kind])
	}
	slices.SortStableFunc(out, byLine)
	return out
}

// written are the paths that a run writes, in the order of the file.
func (r *reader) written() []use {
	s := r.study
	out := []use{{s.Store, "store"}, {s.State, "state"}, {s.Metrics, "metrics"}, {s.Report, "report"}}
	for _, p := range s.Products {
		for _, f := range p.Files {
			out = append(out, use{f.Text, p.Path() + ".files"})
		}
	}
	out = slices.DeleteFunc(out, func(u use) bool { return u.Value == "" })
	slices.SortStableFunc(out, byLine)
	return out
}

func byLine(a, b use) int { return a.Line - b.Line }
