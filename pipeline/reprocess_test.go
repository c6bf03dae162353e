package pipeline

import (
	"context"
	"errors"
	"os"
	"path/filepath"
	"reflect"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/pipeline/condition"
)

func approve(context.Context, int64, int64) (bool, error) { return true, nil }

var inventedStudy = Study{Name: "Quays of Ardmoor", File: "quays.toml", Decided: "1", Approve: approve}

func reprocess(t *testing.T, store Store, opts Options, study Study) Reprocessed {
	t.Helper()
	r, err := Reprocess(t.Context(), store, opts, study)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// age makes all files look as if nobody had touched them for long.
func age(t *testing.T, dir string) {
	t.Helper()
	err := filepath.WalkDir(dir, func(path string, _ os.DirEntry, err error) error {
		return errors.Join(err, os.Chtimes(path, time.Time{}, time.Date(2026, 3, 1, 0, 0, 0, 0, time.UTC)))
	})
	if err != nil {
		t.Fatal(err)
	}
}

// After any history the store is that of the files as they are, to the last digit.
func TestReprocessedStoresAreAsNew(t *testing.T) {
	dir, store := recordFiles(t, 4), newStore(t)
	opts := options(dir)
	move := func(from, to string) {
		if err := os.Rename(filepath.Join(dir, from), filepath.Join(dir, to)); err != nil {
			t.Fatal(err)
		}
	}
	for i, c := range []struct {
		change         func()
		computed, pair int // components and records that have to be computed
	}{
		{func() {}, 12, 4},
		{func() { put(t, dir, "EV1_ST00UP.AT2", at2("Invented", "Site 00", "UP", 77)) }, 1, 0},
		{func() { put(t, dir, "EV1_ST01090.AT2", at2("Invented", "Site 01", "080", 11)) }, 0, 1}, // a header: the samples are the same
		{func() { move("EV1_ST02000.AT2", "sub/moved.AT2") }, 0, 0},
		{func() { put(t, dir, "AAA_first.AT2", at2("Invented", "Site 55", "000", 99)) }, 1, 0},
		{func() { os.Remove(filepath.Join(dir, "EV1_ST03000.AT2")) }, 0, 0},
		{func() { put(t, dir, "EV1_ST03000.AT2", at2("Invented", "Site 03", "000", 30)) }, 0, 0}, // back again
		{func() { opts.Recipe = new(condition.AsDelivered()) }, 0, 0},
		{func() { opts.Recipe = new(condition.Standard()) }, 0, 0},
	} {
		c.change()
		got, fresh := reprocess(t, store, opts, inventedStudy), newStore(t)
		reprocess(t, fresh, opts, inventedStudy)
		if got, want := dump(t, store), dump(t, fresh); !reflect.DeepEqual(got, want) {
			t.Errorf("change %d: the store differs from a new one:\n%v\nwant\n%v", i, got[:12], want[:12])
		}
		if opts.Recipe == nil && (got.Recomputed != c.computed || got.Rotated != c.pair) {
			t.Errorf("change %d: %d components and %d pairs computed, want %d and %d", i, got.Recomputed, got.Rotated, c.computed, c.pair)
		}
		if !got.IsRead || !got.IsNew || got.Published != got.Run || got.IsHeld {
			t.Errorf("change %d: %+v", i, got)
		}
	}
}

// What has not changed is neither read nor published again, unless somebody asks.
func TestReprocessLeavesTheUnchanged(t *testing.T) {
	dir, store := recordFiles(t, 2), newStore(t)
	age(t, dir)
	first := reprocess(t, store, options(dir), inventedStudy)
	want := dump(t, store)
	for name, c := range map[string]struct {
		study Study
		reads bool
	}{
		"unchanged": {inventedStudy, false},
		"rehash":    {Study{Decided: "1", Rehash: true, Approve: approve}, true},
		"decided":   {Study{Decided: "2", Approve: approve}, true},
		"back":      {inventedStudy, true},
	} {
		r := reprocess(t, store, options(dir), c.study)
		if name != "back" && r.IsRead != c.reads || r.IsNew || r.Published != first.Run || r.Recomputed+r.Rotated != 0 || r.Run == first.Run {
			t.Errorf("%s: %+v", name, r)
		}
		if got := dump(t, store); !reflect.DeepEqual(got, want) {
			t.Errorf("%s: the store changed", name)
		}
	}
	if _, err := Run(t.Context(), store, options(dir)); err == nil {
		t.Error("ingest writes to the store of a study")
	}
}

// What is not approved is held back until it is; a run that is stopped leaves what was
// published, and the next finishes.
func TestReprocessHoldsBackAndGoesOn(t *testing.T) {
	dir, store := recordFiles(t, 3), newStore(t)
	first := reprocess(t, store, options(dir), inventedStudy)
	before := shown(t, store)
	put(t, dir, "EV1_ST00000.AT2", at2("Invented", "Site 00", "000", 88))
	age(t, dir)
	refuse := inventedStudy
	asked, instead := int64(0), int64(0)
	refuse.Approve = func(_ context.Context, edition, published int64) (bool, error) {
		asked, instead = edition, published
		return false, nil
	}
	r := reprocess(t, store, options(dir), refuse)
	if !r.IsHeld || r.Published != first.Run || asked != r.Run || instead != first.Run || !reflect.DeepEqual(shown(t, store), before) {
		t.Errorf("held back: %+v, asked of run %d", r, asked)
	}
	if again := reprocess(t, store, options(dir), refuse); !again.IsHeld || again.IsRead || asked != r.Run {
		t.Errorf("held back again: %+v, asked of run %d", again, asked)
	}
	put(t, dir, "EV1_ST01000.AT2", at2("Invented", "Site 01", "000", 89))
	opts := options(dir)
	ctx, cancel := context.WithCancel(t.Context())
	opts.Recomputed = func(Recomputed) { cancel() }
	if _, err := Reprocess(ctx, store, opts, inventedStudy); !errors.Is(err, context.Canceled) || !reflect.DeepEqual(shown(t, store), before) {
		t.Errorf("stopped: %v, or what it left can be seen", err)
	}
	reprocess(t, store, options(dir), inventedStudy)
	fresh := newStore(t)
	reprocess(t, fresh, options(dir), inventedStudy)
	if got, want := dump(t, store), dump(t, fresh); !reflect.DeepEqual(got, want) {
		t.Error("the finished store differs from a new one")
	}
	if err := store.View(t.Context(), func(v *db.Snapshot) error { return nil }); err != nil {
		t.Error(err)
	}
}

// Where somebody has published an earlier edition, that stays until files change.
func TestReprocessLeavesWhatSomebodyPublished(t *testing.T) {
	dir, store := recordFiles(t, 2), newStore(t)
	first := reprocess(t, store, options(dir), inventedStudy)
	put(t, dir, "EV1_ST00000.AT2", at2("Invented", "Site 00", "000", 88))
	age(t, dir)
	second := reprocess(t, store, options(dir), inventedStudy)
	if second.Published != second.Run || second.Before != first.Run {
		t.Fatalf("the second run: %+v", second)
	}
	if err := store.Update(t.Context(), func(tx *db.Tx) error { return tx.Publish(t.Context(), first.Run) }); err != nil {
		t.Fatal(err)
	}
	refuse := inventedStudy
	refuse.Approve = func(context.Context, int64, int64) (bool, error) {
		t.Error("it was asked whether what somebody took back may be published")
		return true, nil
	}
	if r := reprocess(t, store, options(dir), refuse); r.Published != first.Run || r.Edition != second.Run || r.IsHeld {
		t.Errorf("after publishing an earlier edition: %+v", r)
	}
	put(t, dir, "EV1_ST00000.AT2", at2("Invented", "Site 00", "000", 89))
	if r := reprocess(t, store, options(dir), inventedStudy); r.Published != r.Run || r.Before != first.Run {
		t.Errorf("after a change: %+v", r)
	}
}
