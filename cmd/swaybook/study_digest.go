package main

import (
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"swaybook/pipeline/study"
)

// digester hashes what a study says, with the contents of the files that it names.
type digester struct {
	text strings.Builder
	err  error
}

func (d *digester) add(words ...any) { fmt.Fprintf(&d.text, "%q\n", words) }

func (d *digester) sum() (string, error) {
	sum := sha256.Sum256([]byte(d.text.String()))
	return hex.EncodeToString(sum[:]), d.err
}

// settings adds flags, whose order does not matter but among those of one name.
func (d *digester) settings(settings []study.Setting) {
	sorted := slices.Clone(settings)
	slices.SortStableFunc(sorted, func(a, b study.Setting) int { return strings.Compare(a.Key, b.Key) })
	for _, s := range sorted {
		d.add(s.Key, s.Value)
		if list, isList := strings.CutPrefix(s.Value, "@"); isList {
			d.file(list)
		} else if slices.Contains(fileKeys, s.Key) {
			d.file(s.Value)
		}
	}
}

// file adds what is in a file, or in the files of a folder.
func (d *digester) file(path string) {
	names := []string{path}
	if entries, err := os.ReadDir(path); err == nil {
		names = nil
		for _, e := range entries {
			if !e.IsDir() {
				names = append(names, filepath.Join(path, e.Name()))
			}
		}
	}
	for _, name := range names {
		sum, err := hashFile(name)
		if err != nil && d.err == nil {
			d.err = err
		}
		d.add(name, sum)
	}
}

func hashFile(name string) (string, error) {
	f, err := os.Open(name)
	if err != nil {
		return "", err
	}
	defer f.Close()
	h := sha256.New()
	if _, err := io.Copy(h, f); err != nil {
		return "", err
	}
	return hex.EncodeToString(h.Sum(nil)), nil
}

// decided is the digest of all that decides, beside the files, how these are read. What
// they are computed by is not in it: nothing need be read anew for another recipe.
func (p *studyPlan) decided() (string, error) {
	d := &digester{}
	d.add(p.ingest.pipeline.Program)
	for _, source := range p.study.Sources {
		d.add("source", source.Value)
	}
	for _, pattern := range p.study.Include {
		d.add("include", pattern.Value)
	}
	for _, pattern := range p.study.Exclude {
		d.add("exclude", pattern.Value)
	}
	d.settings(slices.DeleteFunc(slices.Clone(p.study.Ingest), func(s study.Setting) bool {
		return s.Key == "recipe" || s.Key == "periods" || s.Key == "dampings"
	}))
	return d.sum()
}

// asked is the digest of a product's question.
func (p *product) asked(program string) (string, error) {
	d := &digester{}
	d.add(program, p.kind)
	d.settings(p.settings)
	return d.sum()
}
