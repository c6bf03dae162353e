//go:build unix

package main

import (
	"bytes"
	"errors"
	"io/fs"
	"maps"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/pipeline/demo"
)

const faultStudyText = `name = "Wharves"
store = "store/wharves.db"
sources = "records"
catalogue = "records/catalogue.csv"
recipe = "RECIPE"
periods = [0.1, 0.2, 0.3, 0.5, 0.7, 1, 1.5, 2]
dampings = ["2%", "5%"]
keep = 2
state = "state.json"
metrics = "wharves.prom"

[selection.all]
screen = "none"

[spectrum.each]
selection = "all"
component = "each"
files = ["out/each.csv", "out/each.json"]

[demand.tank]
selection = "all"
period = "0.6s"
weight = "500kN"
files = ["out/tank.json", "out/tank.txt"]

[records.held]
files = "lists/held.csv"
`

// faultFolders have what runs write that must be whole; the state and the metrics tell of
// the run itself.
var faultFolders = []string{"store", "out", "lists"}

// faultStudy is a study in a folder, whose files and recipe can be set to be one way or another.
type faultStudy struct {
	t                *testing.T
	dir, file, store string
}

// newFaultStudy writes records for a study into the folder.
func newFaultStudy(t *testing.T, dir string) *faultStudy {
	t.Helper()
	s := &faultStudy{t: t, dir: dir, file: filepath.Join(dir, "wharves.toml"), store: filepath.Join(dir, "store", "wharves.db")}
	if _, err := demo.Write(s.at("records"), demo.Options{Events: 3, Stations: 4, Seed: 5}); err != nil {
		t.Fatal(err)
	}
	s.check(os.RemoveAll(s.at("records/damaged")))
	s.check(os.Mkdir(s.at("store"), 0o777))
	s.be("standard", false)
	return s
}

func (s *faultStudy) at(name string) string { return filepath.Join(s.dir, filepath.FromSlash(name)) }

func (s *faultStudy) check(err error) {
	s.t.Helper()
	if err != nil {
		s.t.Fatal(err)
	}
}

// be sets the recipe, and whether the files are those of later on: one is another, one is new
// and one is gone. All look old, and what changed has another time.
func (s *faultStudy) be(recipe string, isLater bool) {
	s.t.Helper()
	s.check(os.WriteFile(s.file, []byte(strings.Replace(faultStudyText, "RECIPE", recipe, 1)), 0o666))
	for _, name := range []string{"NWT_CDH000.AT2", "NWT_CDH090.AT2", "NWT_CDH-UP.AT2"} {
		s.add(name)
	}
	gone := "NWT_CDH-UP.AT2"
	if isLater {
		s.change("NWT_CDH000.AT2")
		gone = "NWT_CDH090.AT2"
	}
	s.check(os.Remove(s.at("records/" + gone)))
	s.age(isLater)
}

// add puts one more file among the records.
func (s *faultStudy) add(name string) {
	s.t.Helper()
	text, err := os.ReadFile(filepath.Join("..", "..", "testdata", "records", "at2", name))
	s.check(err)
	s.check(os.WriteFile(s.at("records/"+name), text, 0o666))
}

// change makes another record of a file.
func (s *faultStudy) change(name string) {
	s.t.Helper()
	text, err := os.ReadFile(s.at("records/" + name))
	s.check(err)
	other := bytes.Replace(text, []byte("E-01"), []byte("E-02"), 1)
	if bytes.Equal(other, text) {
		s.t.Fatalf("%s does not change", name)
	}
	s.check(os.WriteFile(s.at("records/"+name), other, 0o666))
}

// age has all files look a day old, or a bit less.
func (s *faultStudy) age(isLater bool) {
	s.t.Helper()
	old := time.Date(2026, 3, 1, 0, 0, 0, 0, time.UTC)
	if isLater {
		old = old.Add(time.Hour)
	}
	s.check(filepath.WalkDir(s.at("records"), func(path string, e fs.DirEntry, err error) error {
		if err != nil || e.IsDir() {
			return err
		}
		return os.Chtimes(path, old, old)
	}))
}

// reprocess and ingest are commands on the study.
func (s *faultStudy) reprocess(args ...string) *exec.Cmd {
	return exec.Command("swaybook", append([]string{"--quiet", "reprocess", s.file}, args...)...)
}

func (s *faultStudy) ingest(recipe string, args ...string) *exec.Cmd {
	return exec.Command("swaybook", append([]string{"--quiet", "--store", s.store, "ingest", s.at("records"), "--recipe", recipe,
		"--catalogue", s.at("records/catalogue.csv"), "--periods", "0.1,0.2,0.3,0.5,0.7,1,1.5,2", "--dampings", "2%,5%"}, args...)...)
}

func (s *faultStudy) ingestStandard() *exec.Cmd { return s.ingest("standard") }

// outcome is what a run leaves for others.
type outcome struct {
	digest string            // of what is published, "" for nothing
	files  map[string]string // of products, by path
}

// left is what the last run left.
func (s *faultStudy) left() outcome {
	s.t.Helper()
	o := outcome{files: map[string]string{}}
	var err error
	o.digest, err = db.Digest(s.t.Context(), s.store)
	if err != nil && !errors.Is(err, db.ErrEmpty) && !errors.Is(err, db.ErrUnpublished) && !errors.Is(err, db.ErrNoStore) && !errors.Is(err, db.ErrOlder) {
		s.t.Fatal(err)
	}
	for _, folder := range faultFolders[1:] {
		for _, name := range s.names(folder, false) {
			text, err := os.ReadFile(s.at(name))
			s.check(err)
			o.files[name] = string(text)
		}
	}
	return o
}

func (o outcome) equals(p outcome) bool { return o.digest == p.digest && maps.Equal(o.files, p.files) }

// names lists the files of a folder, the hidden ones or the others.
func (s *faultStudy) names(folder string, hidden bool) (names []string) {
	entries, err := os.ReadDir(s.at(folder))
	if !errors.Is(err, fs.ErrNotExist) {
		s.check(err)
	}
	for _, e := range entries {
		if !e.IsDir() && strings.HasPrefix(e.Name(), ".") == hidden {
			names = append(names, filepath.Join(folder, e.Name()))
		}
	}
	return names
}

// finished fails the test unless the last run, of which it was one, left what it should, and
// nothing else.
func (s *faultStudy) finished(what string, want outcome) {
	s.t.Helper()
	if got := s.left(); !got.equals(want) {
		s.t.Errorf("%s: what is left differs from what an undisturbed run leaves: digests %s and %s, files %v", what, got.digest, want.digest, differing(got.files, want.files))
	}
	for _, folder := range append([]string{"."}, faultFolders...) {
		if hidden := s.names(folder, true); len(hidden) > 0 {
			s.t.Errorf("%s: left over: %v", what, hidden)
		}
	}
	if _, err := os.Stat(s.store + ".lock"); err == nil {
		s.t.Errorf("%s: the lock is left over", what)
	}
	var stdout, stderr bytes.Buffer
	code := run(s.t.Context(), []string{"swaybook", "--quiet", "--store", s.store, "verify", "--all"}, &stdout, &stderr)
	if code != exitDone || !strings.Contains(stdout.String(), "no fault found") {
		s.t.Errorf("%s: verify: %d: %s%s", what, code, stdout.String(), stderr.String())
	}
}

func differing(a, b map[string]string) (names []string) {
	for name := range a {
		if text, ok := b[name]; !ok || text != a[name] {
			names = append(names, name)
		}
	}
	for name := range b {
		if _, ok := a[name]; !ok {
			names = append(names, name)
		}
	}
	return names
}

// save keeps what runs have written, and restore has it be there again, with its times.
func (s *faultStudy) save(to string) {
	s.t.Helper()
	for _, folder := range faultFolders {
		s.check(copyTree(s.at(folder), filepath.Join(to, folder)))
	}
}

func (s *faultStudy) restore(from string) {
	s.t.Helper()
	for _, folder := range faultFolders {
		s.check(os.RemoveAll(s.at(folder)))
		if from != "" {
			s.check(copyTree(filepath.Join(from, folder), s.at(folder)))
		}
	}
	s.check(os.MkdirAll(s.at("store"), 0o777))
}

// copyTree copies a folder, if it is there, with the times of its files.
func copyTree(from, to string) error {
	return filepath.WalkDir(from, func(path string, e fs.DirEntry, err error) error {
		if errors.Is(err, fs.ErrNotExist) && path == from {
			return nil
		}
		if err != nil {
			return err
		}
		rel, err := filepath.Rel(from, path)
		if err != nil {
			return err
		}
		if e.IsDir() {
			return os.MkdirAll(filepath.Join(to, rel), 0o777)
		}
		info, err := e.Info()
		if err != nil {
			return err
		}
		text, err := os.ReadFile(path)
		if err == nil {
			err = os.WriteFile(filepath.Join(to, rel), text, info.Mode().Perm())
		}
		return errors.Join(err, os.Chtimes(filepath.Join(to, rel), info.ModTime(), info.ModTime()))
	})
}
