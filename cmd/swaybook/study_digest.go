package main

import (
	"crypto/rand"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"swaybook/pipeline/study"
)

// digester hashes what a study says, with the contents of the files that it names.
type digester struct {
	text strings.Builder
	err  error
}

func (d *digester) add(words ...any) { fmt.Fprintf(&d.text, "%q\n", words) }

// sum is the digest; of what could not be read, one that no other equals.
func (d *digester) sum() string {
	if d.err != nil {
		d.add(d.err, rand.Text())
	}
	sum := sha256.Sum256([]byte(d.text.String()))
	return hex.EncodeToString(sum[:])
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
func (d *digester) file(path string) { d.contents(path, func(name string) string { return name }) }

// contents does so under other names.
func (d *digester) contents(path string, called func(name string) string) {
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
		d.add(called(name), sum)
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

// Digests are made before the files are read for what they say: what is written into one
// between the two counts as new for the next run.

// decidedBy is the digest of all that decides, beside the files, how these are read. What
// they are computed by is not in it: nothing need be read anew for another recipe.
func decidedBy(s *study.Study) string {
	d := &digester{}
	d.add(program())
	for _, source := range s.Sources {
		d.add("source", source.Value)
	}
	for _, pattern := range s.Include {
		d.add("include", pattern.Value)
	}
	for _, pattern := range s.Exclude {
		d.add("exclude", pattern.Value)
	}
	d.settings(slices.DeleteFunc(slices.Clone(s.Ingest), func(s study.Setting) bool {
		return s.Key == "recipe" || s.Key == "periods" || s.Key == "dampings"
	}))
	return d.sum()
}

// decidedByFlags is the same of an ingest without a study, but for the program. Where the
// files lie that its flags name does not matter: shards may be filled by several machines.
func decidedByFlags(c *cli.Context) string {
	d := &digester{}
	d.add(c.String("unit"), c.Float64("dt"))
	for _, flag := range []string{"metadata", "layout", "catalogue"} {
		paths := c.StringSlice(flag)
		if flag == "catalogue" && c.IsSet(flag) {
			paths = []string{c.String(flag)}
		}
		for _, path := range paths {
			d.add(flag)
			d.contents(path, filepath.Base)
		}
	}
	return d.sum()
}

// pageBy is the digest of all that a report is made of beside what is published.
func pageBy(p *studyPlan, held int64) string {
	d := &digester{}
	d.add(program(), p.study.File, p.study.Name.Value, p.study.Purpose.Value, held)
	if p.study.MaxDrift != nil {
		d.add(*p.study.MaxDrift)
	}
	for _, one := range p.products {
		d.add(one.path, one.asked)
	}
	for _, chosen := range p.study.Selections {
		d.add(chosen.Path())
		d.settings(chosen.Settings)
	}
	return d.sum()
}

// askedBy is the digest of a product's question.
func askedBy(p *study.Product) string {
	d := &digester{}
	d.add(program(), p.Kind)
	d.settings(p.Settings)
	return d.sum()
}
