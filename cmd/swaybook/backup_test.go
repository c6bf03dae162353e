package main

import (
	"bytes"
	"context"
	"os"
	"os/exec"
	"path/filepath"
	"testing"

	"swaybook/db"
	"swaybook/pipeline"
)

// A backup that is made while a run writes is the store between two batches: the same run
// finishes it as it finishes the store.
func TestBackupWhileARunWrites(t *testing.T) {
	ingest, dir := slowIngest(t), t.TempDir()
	store, copied := filepath.Join(dir, "s.db"), filepath.Join(dir, "copy.db")
	run := begin(t, ingest(store), func() bool { return componentsIn(t.Context(), store) > 0 })
	mustRun(t, exec.Command("swaybook", "--store", store, "backup", copied))
	select {
	case err := <-run.ended:
		t.Fatalf("the run ended before the backup: %v", err)
	default:
	}
	n := componentsIn(t.Context(), copied)
	if err := <-run.ended; err != nil {
		t.Fatalf("a run that was backed up: %v, %s", err, run.stderr.String())
	}
	if all := componentsIn(t.Context(), store); n == 0 || n >= all {
		t.Errorf("the copy has %d components of %d", n, all)
	}
	mustRun(t, ingest(copied))
	if !bytes.Equal(exported(t, copied), exported(t, store)) {
		t.Error("the ordinates differ")
	}
	for _, name := range []string{copied + "-wal", copied + ".lock"} {
		if _, err := os.Stat(name); err == nil {
			t.Errorf("%s stays", name)
		}
	}
}

// A backup that somebody stops says so by its exit code and leaves nothing.
func TestBackupThatIsStopped(t *testing.T) {
	dir := t.TempDir()
	store, file := filepath.Join(dir, "s.db"), filepath.Join(dir, "copy.db")
	made, err := db.Create(t.Context(), store, pipeline.SolverVersion)
	if err != nil {
		t.Fatal(err)
	}
	defer made.Close()
	stopped, cancel := context.WithCancel(t.Context())
	cancel()
	var stdout, stderr bytes.Buffer
	if code := run(stopped, []string{"swaybook", "--store", store, "backup", file}, &stdout, &stderr); code != exitInterrupted || stdout.Len() > 0 {
		t.Errorf("exit code %d, %s%s", code, &stdout, &stderr)
	}
	if found, err := filepath.Glob(file + "*"); err != nil || len(found) > 0 {
		t.Errorf("%v stays, %v", found, err)
	}
}
