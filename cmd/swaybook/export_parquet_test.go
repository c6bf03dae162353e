package main

import (
	"context"
	"errors"
	"io"
	"io/fs"
	"maps"
	"os"
	"os/exec"
	"path/filepath"
	"sync/atomic"
	"testing"

	"swaybook/db"
	"swaybook/pipeline"
	"swaybook/query"
)

// stoppedAt is a context that is cancelled when it is asked for the nth time whether it is.
type stoppedAt struct {
	context.Context
	left   atomic.Int64
	cancel context.CancelFunc
}

func (c *stoppedAt) Err() error {
	if c.left.Add(-1) == 0 {
		c.cancel()
	}
	return c.Context.Err()
}

// storeOfAT2 is a small store in the folder.
func storeOfAT2(t *testing.T, dir string) (path string) {
	t.Helper()
	path = filepath.Join(dir, "s.db")
	ingest := exec.Command("swaybook", "--quiet", "--store", path, "ingest", filepath.Join("..", "..", "testdata", "records", "at2"))
	if exit, ok := errors.AsType[*exec.ExitError](ingest.Run()); !ok || exit.ExitCode() != exitRejected {
		t.Fatalf("ingest: %v", exit)
	}
	return path
}

// Wherever an export is stopped, nothing is left of it, and what was there before stays: an export
// that may be replaced, or an empty folder.
func TestAStoppedExportLeavesNothing(t *testing.T) {
	dir := t.TempDir()
	store, err := db.Open(t.Context(), storeOfAT2(t, dir), pipeline.SolverVersion)
	if err != nil {
		t.Fatal(err)
	}
	defer store.Close()
	for what, before := range map[string]map[string]string{"full": {"records/part-0001.parquet": "before"}, "empty": {}} {
		t.Run(what, func(t *testing.T) {
			places := t.TempDir()
			folder := filepath.Join(places, "out")
			if err := os.MkdirAll(filepath.Join(folder, "records"), 0o777); err != nil {
				t.Fatal(err)
			}
			for name, text := range before {
				if err := os.WriteFile(filepath.Join(folder, name), []byte(text), 0o666); err != nil {
					t.Fatal(err)
				}
			}
			if what == "empty" {
				if err := os.Remove(filepath.Join(folder, "records")); err != nil {
					t.Fatal(err)
				}
			}
			stopEverywhere(t, store, places, "out")
			if content, err := os.ReadFile(filepath.Join(folder, "records", "part-0001.parquet")); err != nil || string(content) == "before" {
				t.Errorf("the export did not come in its place: %v", err)
			}
		})
	}
}

// stopEverywhere stops exports into a folder ever later, until one is done. All that is around
// it must stay as it is.
func stopEverywhere(t *testing.T, store *db.Store, around, name string) {
	t.Helper()
	before, stops := treeOf(t, around), 0
	for n := int64(1); ; n += 1 + n/8 {
		inner, cancel := context.WithCancel(t.Context())
		ctx := &stoppedAt{Context: inner, cancel: cancel}
		ctx.left.Store(n)
		o := parquetOptions{question: query.DatasetQuestion{Program: "swaybook", Version: version}, dir: filepath.Join(around, name), force: true}
		err := runExportParquet(ctx, store, o, io.Discard, io.Discard)
		isDone := ctx.left.Load() > 0
		cancel()
		if err == nil {
			if isDone {
				break
			}
			t.Fatalf("stopped at look %d, and done", n)
		}
		stops++
		if after := treeOf(t, around); !errors.Is(err, context.Canceled) || !maps.Equal(after, before) {
			t.Fatalf("stopped at look %d (%v): %v is there, and was %v", n, err, after, before)
		}
	}
	if stops < 10 {
		t.Errorf("stopped at %d places only", stops)
	}
}

// treeOf is what is in a folder, by path: what is in files, and that of folders they are some.
func treeOf(t *testing.T, dir string) map[string]string {
	t.Helper()
	tree := map[string]string{}
	err := filepath.WalkDir(dir, func(path string, e fs.DirEntry, err error) error {
		if err != nil || e.IsDir() {
			tree[path] = "a folder"
			return err
		}
		text, err := os.ReadFile(path)
		tree[path] = string(text)
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return tree
}
