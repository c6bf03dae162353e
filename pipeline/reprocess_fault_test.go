package pipeline

import (
	"os"
	"path"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/ingest/archive/archivetest"
)

// ageFile makes a file look as if it had been changed a day after age.
func ageFile(t *testing.T, file string) {
	t.Helper()
	if err := os.Chtimes(file, time.Time{}, time.Date(2026, 3, 2, 0, 0, 0, 0, time.UTC)); err != nil {
		t.Fatal(err)
	}
}

// causesIn has the options note why the file of that name is rejected.
func causesIn(opts *Options, name string) *[]string {
	var causes []string
	opts.Progress = func(p Progress) {
		for _, c := range p.File.Causes {
			if filepath.Base(p.File.Path) == name {
				causes = append(causes, c.Text)
			}
		}
	}
	return &causes
}

// asFresh fails the test unless the store is that of a new one of the files as they are.
func asFresh(t *testing.T, store *db.Store, opts Options) {
	t.Helper()
	fresh := newStore(t)
	reprocess(t, fresh, opts, inventedStudy)
	if got, want := dump(t, store), dump(t, fresh); !reflect.DeepEqual(got, want) {
		t.Errorf("the store differs from a new one: %d lines, want %d", len(got), len(want))
	}
}

// onLook has the options call f after the run has looked at the file of that name, and before
// it opens any.
func onLook(opts Options, name string, f func()) Options {
	isDone := false
	opts.Takes = func(rel string, _ bool) bool {
		if path.Base(rel) == name && !isDone {
			isDone = true
			f()
		}
		return true
	}
	return opts
}

// A file that is gone when its turn comes is rejected with its cause, all others are read, and
// when it is back the next run reads it, though it has the size and time that it had.
func TestAFileVanishesBeforeItIsRead(t *testing.T) {
	dir, store := recordFiles(t, 3), newStore(t)
	age(t, dir)
	reprocess(t, store, options(dir), inventedStudy)
	want := dump(t, store)
	name, away := "EV1_ST01000.AT2", filepath.Join(t.TempDir(), "away")
	move := func(from, to string) {
		if err := os.Rename(from, to); err != nil {
			t.Fatal(err)
		}
	}
	opts := onLook(options(dir), name, func() { move(filepath.Join(dir, name), away) })
	rehash := inventedStudy
	rehash.Rehash = true
	causes := causesIn(&opts, name)
	reprocess(t, store, opts, rehash)
	if got := *causes; len(got) != 1 || !strings.Contains(got[0], "open: ") {
		t.Errorf("causes of %s: %q", name, got)
	}
	asFresh(t, store, options(dir))
	move(away, filepath.Join(dir, name))
	r := reprocess(t, store, options(dir), inventedStudy)
	if !r.IsRead || !reflect.DeepEqual(dump(t, store), want) {
		t.Errorf("the file is back: %+v", r)
	}
	if r = reprocess(t, store, options(dir), inventedStudy); r.IsRead {
		t.Error("all files were read, and are read again")
	}
}

// So it is with an archive, also where the patterns take its members only.
func TestAnArchiveVanishesBeforeItIsRead(t *testing.T) {
	dir, store := t.TempDir(), newStore(t)
	var members []archivetest.Member
	for _, c := range []string{"000", "090", "UP"} {
		members = append(members, archivetest.Member{Name: "EV1_" + c + ".AT2", Content: at2("Invented", "Site 07", c, 7)})
	}
	put(t, dir, "more.zip", string(archivetest.Zip(members...)))
	put(t, dir, "EV1_ST00000.AT2", at2("Invented", "Site 00", "000", 1))
	age(t, dir)
	at, away := filepath.Join(dir, "more.zip"), filepath.Join(t.TempDir(), "away")
	opts := options(dir)
	isAway := false
	opts.Takes = func(rel string, isArchive bool) bool {
		if rel == "more.zip" && !isAway {
			isAway = true
			if err := os.Rename(at, away); err != nil {
				t.Error(err)
			}
		}
		return isArchive || strings.HasSuffix(rel, ".AT2")
	}
	causes := causesIn(&opts, "more.zip")
	reprocess(t, store, opts, inventedStudy)
	if got := *causes; len(got) != 1 || !strings.Contains(got[0], "open: ") {
		t.Errorf("causes of the archive: %q", got)
	}
	if err := os.Rename(away, at); err != nil {
		t.Fatal(err)
	}
	if r := reprocess(t, store, opts, inventedStudy); !r.IsRead || r.Stored != 4 {
		t.Errorf("the archive is back: %+v", r)
	}
}

// A file that grows while a run is at work is read by the next, whatever became of it in
// this one.
func TestAFileGrowsWhileARunIsAtWork(t *testing.T) {
	dir := recordFiles(t, 2)
	whole := at2("Invented", "Site 77", "000", 77)
	put(t, dir, "EV1_ST77000.AT2", whole[:2000])
	age(t, dir)
	grow := func() {
		f, err := os.OpenFile(filepath.Join(dir, "EV1_ST77000.AT2"), os.O_APPEND|os.O_WRONLY, 0)
		if err == nil {
			_, err = f.WriteString(whole[2000:])
		}
		if err != nil {
			t.Fatal(err)
		}
		f.Close()
	}
	store := newStore(t)
	opts := onLook(options(dir), "EV1_ST77000.AT2", grow)
	causes := causesIn(&opts, "EV1_ST77000.AT2")
	reprocess(t, store, opts, inventedStudy)
	if len(*causes) != 0 {
		t.Errorf("read whole, and rejected: %q", *causes)
	}
	if r := reprocess(t, store, options(dir), inventedStudy); !r.IsRead {
		t.Error("a file that grew since it was looked at is not looked into")
	}
	asFresh(t, store, options(dir))
}

// Runs whose clock goes back give what runs give whose clock does not, are told apart by their
// numbers, and trust no time of a file that lies ahead of the clock.
func TestTheClockGoesBack(t *testing.T) {
	dir, store := recordFiles(t, 2), newStore(t)
	age(t, dir)
	at := time.Date(2026, 5, 1, 12, 0, 0, 0, time.UTC)
	opts := options(dir)
	opts.Clock = func() time.Time { at = at.Add(-time.Minute); return at }
	changed, last := "EV1_ST00000.AT2", int64(0)
	for i, c := range []struct {
		back   time.Duration
		change func()
		reads  bool
	}{
		{0, func() {}, true},
		{time.Hour, func() {}, false},
		{24 * time.Hour, func() {
			put(t, dir, changed, at2("Invented", "Site 00", "000", 88))
			ageFile(t, filepath.Join(dir, changed))
		}, true},
		// The files are of March: they lie ahead of the clock, so that nothing vouches for them.
		{100 * 24 * time.Hour, func() {}, true},
		{0, func() { os.Remove(filepath.Join(dir, "EV1_ST01UP.AT2")) }, true},
		{0, func() {}, true},
		{-200 * 24 * time.Hour, func() {}, true}, // right again
		{0, func() {}, false},
	} {
		at = at.Add(-c.back)
		opts.Started = at
		c.change()
		r := reprocess(t, store, opts, inventedStudy)
		if r.IsRead != c.reads || r.Run <= last {
			t.Errorf("run %d: %+v, want read %v, a number above %d", i, r, c.reads, last)
		}
		last = r.Run
		asFresh(t, store, opts)
	}
	runs, err := store.Runs(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	for i := range runs {
		if i > 0 && runs[i].ID <= runs[i-1].ID {
			t.Errorf("runs are not listed by number: %d after %d", runs[i].ID, runs[i-1].ID)
		}
	}
	if len(runs) != 8 {
		t.Errorf("%d runs are listed, want 8", len(runs))
	}
}
