package main

import (
	"context"
	"errors"
	"io"
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

// Wherever an export is stopped, nothing is left of it, and what was there before stays.
func TestAStoppedExportLeavesNothing(t *testing.T) {
	dir := t.TempDir()
	store, err := db.Open(t.Context(), storeOfAT2(t, dir), pipeline.SolverVersion)
	if err != nil {
		t.Fatal(err)
	}
	defer store.Close()
	places := filepath.Join(dir, "places")
	before := filepath.Join(places, "before")
	if err := os.MkdirAll(filepath.Join(before, "records"), 0o777); err != nil {
		t.Fatal(err)
	}
	was := filepath.Join(before, "records", "part-0001.parquet")
	if err := os.WriteFile(was, []byte("before"), 0o666); err != nil {
		t.Fatal(err)
	}
	stops := 0
	for n := int64(1); ; n += 1 + n/8 {
		inner, cancel := context.WithCancel(t.Context())
		ctx := &stoppedAt{Context: inner, cancel: cancel}
		ctx.left.Store(n)
		err := runExportParquet(ctx, store, parquetOptions{question: query.DatasetQuestion{Program: "swaybook", Version: version}, dir: before, force: true}, io.Discard, io.Discard)
		isDone := ctx.left.Load() > 0
		cancel()
		if isDone && err == nil {
			break
		}
		if err == nil { // the last look came too late
			continue
		}
		stops++
		content, errRead := os.ReadFile(was)
		entries, errDir := os.ReadDir(places)
		if !errors.Is(err, context.Canceled) || errRead != nil || string(content) != "before" || errDir != nil || len(entries) != 1 {
			t.Fatalf("stopped at look %d (%v): %q is left of what was there, beside it %v (%v, %v)", n, err, content, entries, errRead, errDir)
		}
	}
	if stops < 10 {
		t.Errorf("stopped at %d places only", stops)
	}
	if content, err := os.ReadFile(was); err != nil || string(content) == "before" {
		t.Errorf("the export did not come in its place: %v", err)
	}
}
