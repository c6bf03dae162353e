package main

import (
	"bytes"
	"context"
	"database/sql"
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

// slowIngest writes an archive of some hundred files and returns the command that reads it
// into a store, slowly enough to be stopped on the way; args follow its own.
func slowIngest(t *testing.T) func(store string, args ...string) *exec.Cmd {
	t.Helper()
	if testing.Short() {
		t.Skip("writes and reads an archive of some hundred files")
	}
	files := filepath.Join(t.TempDir(), "files")
	if _, err := demo.Write(files, demo.Options{Events: 8, Stations: 20, Seed: 2}); err != nil {
		t.Fatal(err)
	}
	// Enough oscillators that the work outlasts the first batch on any machine.
	periods := "0.1"
	for i := range 60 {
		periods += fmt.Sprintf(",0.%d", 200+i)
	}
	return func(store string, args ...string) *exec.Cmd {
		return exec.Command("swaybook", append([]string{"--quiet", "--store", store, "ingest", files, "--periods", periods, "--workers", "1"}, args...)...)
	}
}

func mustRun(t *testing.T, cmd *exec.Cmd) {
	t.Helper()
	if out, err := cmd.CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
}

func skipWithoutSignals(t *testing.T) {
	if runtime.GOOS == "windows" {
		t.Skip("no signals to send on this system")
	}
}

// A process that is stopped in the middle of an ingest, politely or not, leaves
// whole batches; the next run finishes, and nobody can tell the difference.
func TestAStoppedIngestIsFinishedByTheNext(t *testing.T) {
	skipWithoutSignals(t)
	ingest, dir := slowIngest(t), t.TempDir()
	undisturbed := filepath.Join(dir, "undisturbed.db")
	mustRun(t, ingest(undisturbed))
	want, digest := exported(t, undisturbed), wholeDigest(t, undisturbed)

	for name, sig := range map[string]os.Signal{"kill": os.Kill, "interrupt": os.Interrupt, "terminate": syscall.SIGTERM} {
		t.Run(name, func(t *testing.T) {
			store := filepath.Join(dir, name+".db")
			stop(t, ingest(store), "after", sig, func() bool { return componentsIn(t.Context(), store) > 0 })
			mustRun(t, ingest(store))
			if got := exported(t, store); !bytes.Equal(got, want) {
				t.Error("the ordinates differ from those of an undisturbed run")
			}
			if got := wholeDigest(t, store); got != digest {
				t.Errorf("digest %s, of an undisturbed run %s", got, digest)
			}
		})
	}
	// The later stages are the same of every store that holds the files.
	t.Run("while rotating", func(t *testing.T) {
		store := filepath.Join(dir, "rotating.db")
		mustRun(t, ingest(store, "--rotation=false"))
		for _, sig := range []os.Signal{syscall.SIGTERM, os.Kill} {
			before := rotatedIn(t.Context(), store)
			stop(t, ingest(store), "while rotating", sig, func() bool { return rotatedIn(t.Context(), store) > before })
		}
		mustRun(t, ingest(store))
		if got := exported(t, store); !bytes.Equal(got, want) {
			t.Error("the ordinates differ from those of an undisturbed run")
		}
	})
	t.Run("while computing", func(t *testing.T) {
		other := func(store string) *exec.Cmd { return ingest(store, "--recipe", "as-delivered") }
		fresh, store := filepath.Join(dir, "fresh.db"), undisturbed
		mustRun(t, other(fresh))
		for _, sig := range []os.Signal{syscall.SIGTERM, os.Kill} {
			before := solvedAnewIn(t.Context(), store)
			stop(t, other(store), "while computing", sig, func() bool { return solvedAnewIn(t.Context(), store) > before })
			if got := exported(t, store); !bytes.Equal(got, want) {
				t.Error("a generation that is not complete can be seen")
			}
		}
		mustRun(t, other(store))
		if got := exported(t, store); !bytes.Equal(got, exported(t, fresh)) || bytes.Equal(got, want) {
			t.Error("the ordinates differ from those of an undisturbed run, or not from those of the former recipe")
		}
	})
}

// What somebody stopped says in which stage it was.
func TestInterruptionNamesTheStage(t *testing.T) {
	for want, s := range map[string]pipeline.Summary{
		"interrupted after 7 files; run the same command again to finish the rest":                           {Files: 7},
		"interrupted while computing, 3 of 9 held components; run the same command again to finish the rest": {Files: 7, Recomputed: 2, NotRecomputed: 1, Uncomputed: 6},
		"interrupted while rotating, 4 of 10 records; run the same command again to finish the rest":         {Files: 7, Rotated: 2, NotRotated: 1, Damaged: 1, Unrotated: 6},
	} {
		if err := interruption(s, db.Gathered{}); err.Error() != want || !errors.Is(err, errInterrupted) {
			t.Errorf("interruption(%+v) = %v, want %s", s, err, want)
		}
	}
	const want = "interrupted after 300 files and 900 results were taken over; run the same command again to finish the rest"
	if err := interruption(pipeline.Summary{}, db.Gathered{Files: 300, Computations: 900}); err.Error() != want {
		t.Errorf("interruption while shards were taken over: %v, want %s", err, want)
	}
	if err := interruption(pipeline.Summary{Files: 7}, db.Gathered{Files: 300}); !strings.Contains(err.Error(), "after 7 files;") {
		t.Errorf("interruption behind that: %v", err)
	}
}

// process is a command at work.
type process struct {
	*exec.Cmd
	stderr bytes.Buffer
	ended  chan error
}

// begin starts the command and waits for what another process does that tells nobody.
func begin(t *testing.T, cmd *exec.Cmd, begun func() bool) *process {
	t.Helper()
	p, ok := watch(t, cmd, begun)
	if !ok {
		t.Fatalf("the run ended before it was so far: %v, %s", <-p.ended, p.stderr.String())
	}
	return p
}

// watch is begin for a command that may end before it is so far; ok is false then.
func watch(t *testing.T, cmd *exec.Cmd, begun func() bool) (p *process, ok bool) {
	t.Helper()
	p = &process{Cmd: cmd, ended: make(chan error, 1)}
	cmd.Stderr = &p.stderr
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	go func() { p.ended <- cmd.Wait() }()
	tick := time.NewTicker(time.Millisecond)
	defer tick.Stop()
	for !begun() {
		select {
		case err := <-p.ended:
			p.ended <- err
			return p, false
		case <-tick.C:
		}
	}
	return p, true
}

// stop starts the command and sends it the signal as soon as it has begun. One that can
// be caught ends it in order, and it says where it stopped.
func stop(t *testing.T, cmd *exec.Cmd, where string, sig os.Signal, begun func() bool) {
	t.Helper()
	p := begin(t, cmd, begun)
	if err := p.Process.Signal(sig); err != nil {
		t.Fatal(err)
	}
	exit, ok := errors.AsType[*exec.ExitError](<-p.ended)
	if !ok {
		t.Fatal("the run ended before it was stopped")
	}
	if said := p.stderr.String(); sig != os.Kill &&
		(exit.ExitCode() != exitInterrupted || !strings.Contains(said, "interrupted "+where) || !strings.Contains(said, "run the same command again")) {
		t.Errorf("exit code %d, stderr %q", exit.ExitCode(), said)
	}
	t.Logf("%v: %s", sig, p.stderr.String())
}

// counted is what a query counts in a store, published or not; 0 as long as there is none.
func counted(ctx context.Context, path, query string) (n int) {
	if _, err := os.Stat(path); err != nil {
		return 0
	}
	client, err := sql.Open("sqlite", path)
	if err != nil {
		return 0
	}
	defer client.Close()
	if client.QueryRowContext(ctx, query).Scan(&n) != nil {
		return 0
	}
	return n
}

// wholeDigest is the digest of a store that has no fault.
func wholeDigest(t *testing.T, store string) string {
	t.Helper()
	v, err := pipeline.Verify(t.Context(), store, pipeline.VerifyOptions{Sample: 100, Clock: time.Now})
	if err != nil || len(v.Faults)+len(v.Remarks) > 0 {
		t.Errorf("%s: %v, %v, %v", store, v.Faults, v.Remarks, err)
	}
	digest, err := db.Digest(t.Context(), store)
	if err != nil {
		t.Error(err)
	}
	return digest
}

func componentsIn(ctx context.Context, path string) int {
	return counted(ctx, path, `SELECT count(*) FROM component`)
}

func rotatedIn(ctx context.Context, path string) int {
	return counted(ctx, path, `SELECT count(*) FROM computed WHERE role = 'rotd50'`)
}

// solvedAnewIn counts the components that have their spectra in the newest generation.
func solvedAnewIn(ctx context.Context, path string) int {
	return counted(ctx, path, `SELECT count(*) FROM computed WHERE role IN ('h1', 'h2', 'v') AND generation_id = (SELECT max(id) FROM generation HAVING count(*) > 1)`)
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
