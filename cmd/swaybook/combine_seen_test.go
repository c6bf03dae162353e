package main

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// seenArchive is a folder of plain columns of one station each, whose earthquakes are in a
// catalogue, and shards of it.
type seenArchive struct {
	t           *testing.T
	dir         string
	archive     string
	ingest      []string
	shards      []string
	out, before string // what is combined, and its digest
}

func newSeenArchive(t *testing.T) *seenArchive {
	t.Helper()
	a := &seenArchive{t: t, dir: t.TempDir()}
	a.archive, a.out = filepath.Join(a.dir, "archive"), filepath.Join(a.dir, "out.db")
	if err := os.Mkdir(a.archive, 0o777); err != nil {
		t.Fatal(err)
	}
	for i := range 6 {
		a.write(i, "first")
	}
	a.catalogue("a.csv", "A")
	a.ingest = []string{"ingest", a.archive, "--catalogue", filepath.Join(a.dir, "a.csv"), "--periods", "0.1", "--dampings", "5%"}
	a.shards = ingestShards(t, a.dir, 2, a.ingest)
	combines(t, exitDone, a.out, a.shards...)
	a.before = digestOfStore(t, a.out)
	return a
}

// write writes the file of a station, of an earthquake of its own.
func (a *seenArchive) write(station int, event string) {
	a.t.Helper()
	text := fmt.Sprintf("# unit: g\n# dt = 0.01\n# component: 0\n# station: S%d\n# event: %s%d\n", station, event, station) +
		strings.Repeat("0.01\n-0.02\n0.03\n-0.01\n", 30)
	if err := os.WriteFile(filepath.Join(a.archive, fmt.Sprintf("s%d.csv", station)), []byte(text), 0o666); err != nil {
		a.t.Fatal(err)
	}
}

func (a *seenArchive) catalogue(name, event string) {
	a.t.Helper()
	text := "file,event\n"
	for i := range 6 {
		text += fmt.Sprintf("s%d.csv,%s%d\n", i, event, i)
	}
	if err := os.WriteFile(filepath.Join(a.dir, name), []byte(text), 0o666); err != nil {
		a.t.Fatal(err)
	}
}

// again fills a shard once more.
func (a *seenArchive) again(shard int, more ...string) {
	a.t.Helper()
	did(a.t, a.shards[shard-1], exitDone, append(append([]string{}, a.ingest...), append(more, "--shard", fmt.Sprintf("%d/2", shard))...)...)
}

// anew fills a shard's store from nothing, since a store without a study holds what files were.
func (a *seenArchive) anew(shard int) {
	a.t.Helper()
	if err := os.Remove(a.shards[shard-1]); err != nil {
		a.t.Fatal(err)
	}
	a.again(shard)
}

// refused fails the test unless the shards are refused in these words, and nothing changes.
func (a *seenArchive) refused(want string, shards ...string) {
	a.t.Helper()
	if text := combines(a.t, exitFailed, a.out, shards...); !strings.Contains(text, want) {
		a.t.Errorf("%q does not say %q", text, want)
	}
	if got := digestOfStore(a.t, a.out); got != a.before {
		a.t.Error("the store has changed")
	}
}

// whole fails the test unless what is combined is what one run makes of the files.
func (a *seenArchive) whole() {
	a.t.Helper()
	combines(a.t, exitDone, a.out, a.shards...)
	store := filepath.Join(a.t.TempDir(), "whole.db")
	did(a.t, store, exitDone, a.ingest...)
	if got, want := digestOfStore(a.t, a.out), digestOfStore(a.t, store); got != want {
		a.t.Errorf("digest %s, want %s", got, want)
	}
}

// Shards that read the same files by different catalogues would have records twice, or in
// neither.
func TestShardsOfDifferentCatalogues(t *testing.T) {
	a := newSeenArchive(t)
	a.catalogue("a.csv", "B")
	a.again(1)
	a.refused("with different content, or with another catalogue", a.shards...)
	a.refused("shard 2 of 2, which was combined before, saw other files than", a.shards[0])
	a.again(2)
	a.whole()
	a.again(2, "--unit", "gal")
	a.before = digestOfStore(t, a.out)
	a.refused("unit or step", a.shards...)
}

// A file that changed between the runs of two shards is in one as it was, or in neither.
func TestShardsOfDifferentContents(t *testing.T) {
	a := newSeenArchive(t)
	for i := range 6 {
		a.write(i, "second")
	}
	a.anew(1)
	a.refused(filepath.Join("archive", "s0.csv")+": ", a.shards...)
	a.anew(2)
	a.whole()
}

// Of an archive that grew between the runs of two shards what all have seen is right, and what
// may lack is told.
func TestShardsOfAnArchiveThatGrows(t *testing.T) {
	a := newSeenArchive(t)
	a.write(6, "third")
	a.write(7, "third")
	a.again(1)
	a.refused("shard 2 of 2, which was combined before, saw other files than", a.shards[0])
	text := combines(t, exitDone, a.out, a.shards...)
	if want := "whose records may lack: 2, the first " + filepath.Join(a.archive, "s6.csv"); !strings.Contains(text, want) {
		t.Errorf("%q does not say %q", text, want)
	}
	if text := combines(t, exitDone, a.out, append([]string{"--json"}, a.shards...)...); !strings.Contains(text, `"unseen": {`) {
		t.Errorf("JSON has no unseen files: %s", text)
	}
	a.before = digestOfStore(t, a.out)
	a.refused("saw other files than", a.shards[1])
	a.again(2)
	a.whole()
}
