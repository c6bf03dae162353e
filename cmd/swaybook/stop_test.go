package main

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"strings"
	"syscall"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/pipeline"
	"swaybook/pipeline/demo"
)

// A process that is stopped in the middle of an ingest, politely or not, leaves
// whole batches; the next run finishes, and nobody can tell the difference.
func TestAStoppedIngestIsFinishedByTheNext(t *testing.T) {
	if testing.Short() {
		t.Skip("writes and reads an archive of some hundred files")
	}
	if runtime.GOOS == "windows" {
		t.Skip("no signals to send on this system")
	}
	dir := t.TempDir()
	files := filepath.Join(dir, "files")
	if _, err := demo.Write(files, demo.Options{Events: 8, Stations: 20, Seed: 2}); err != nil {
		t.Fatal(err)
	}
	// Enough oscillators that the work outlasts the first batch on any machine.
	periods := "0.1"
	for i := range 60 {
		periods += fmt.Sprintf(",0.%d", 200+i)
	}
	ingest := func(store string) *exec.Cmd {
		return exec.Command("swaybook", "--quiet", "--store", store, "ingest", files, "--periods", periods, "--workers", "1")
	}
	undisturbed := filepath.Join(dir, "undisturbed.db")
	if out, err := ingest(undisturbed).CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	want := exported(t, undisturbed)

	for name, sig := range map[string]os.Signal{"kill": os.Kill, "interrupt": os.Interrupt, "terminate": syscall.SIGTERM} {
		t.Run(name, func(t *testing.T) {
			store := filepath.Join(dir, name+".db")
			stop(t, ingest(store), store, sig)
			if out, err := ingest(store).CombinedOutput(); err != nil {
				t.Fatalf("%v\n%s", err, out)
			}
			if got := exported(t, store); !bytes.Equal(got, want) {
				t.Error("the ordinates differ from those of an undisturbed run")
			}
		})
	}
}

// What somebody stopped says in which stage it was.
func TestInterruptionNamesTheStage(t *testing.T) {
	for want, s := range map[string]pipeline.Summary{
		"interrupted after 7 files; run the same command again to finish the rest":                           {Files: 7},
		"interrupted while computing, 3 of 9 held components; run the same command again to finish the rest": {Files: 7, Recomputed: 2, NotRecomputed: 1, Uncomputed: 6},
		"interrupted while rotating, 4 of 10 records; run the same command again to finish the rest":         {Files: 7, Rotated: 2, NotRotated: 1, Damaged: 1, Unrotated: 6},
	} {
		if err := interruption(s); err.Error() != want || !errors.Is(err, errInterrupted) {
			t.Errorf("interruption(%+v) = %v, want %s", s, err, want)
		}
	}
}

// stop starts the command and sends it the signal as soon as its store holds
// something.
func stop(t *testing.T, cmd *exec.Cmd, store string, sig os.Signal) {
	t.Helper()
	var stderr bytes.Buffer
	cmd.Stderr = &stderr
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	ended := make(chan error, 1)
	go func() { ended <- cmd.Wait() }()
	// Another process's store tells nobody that it grew.
	for tick := time.NewTicker(2 * time.Millisecond); componentsIn(t.Context(), store) == 0; {
		select {
		case err := <-ended:
			t.Fatalf("the run ended before it stored anything: %v, %s", err, stderr.String())
		case <-tick.C:
		}
	}
	if err := cmd.Process.Signal(sig); err != nil {
		t.Fatal(err)
	}
	exit, ok := errors.AsType[*exec.ExitError](<-ended)
	if !ok {
		t.Fatal("the run ended before it was stopped")
	}
	if sig != os.Kill {
		if exit.ExitCode() != exitInterrupted || !strings.Contains(stderr.String(), "run the same command again") {
			t.Errorf("exit code %d, stderr %q", exit.ExitCode(), stderr.String())
		}
	}
	t.Logf("stopped with %d components stored", componentsIn(t.Context(), store))
}

func componentsIn(ctx context.Context, path string) (n int) {
	store, err := db.Open(ctx, path, pipeline.SolverVersion)
	if err != nil {
		return 0
	}
	defer store.Close()
	_ = store.View(ctx, func(v *db.Snapshot) error {
		components, err := v.Components(ctx, 0)
		n = len(components)
		return err
	})
	return n
}

func exported(t *testing.T, store string) []byte {
	t.Helper()
	cmd := exec.Command("swaybook", "--store", store, "export", "ordinates")
	cmd.Stderr = io.Discard
	out, err := cmd.Output()
	if err != nil {
		t.Fatal(err)
	}
	return out
}
