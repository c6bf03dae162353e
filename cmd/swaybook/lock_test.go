//go:build unix

package main

import (
	"bytes"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
)

// One run at a time is on a store: a second one says which and leaves, questions do not
// care, and a run that was killed stands in nobody's way.
func TestOneRunAtATime(t *testing.T) {
	ingest, dir := slowIngest(t), t.TempDir()
	store, link := filepath.Join(dir, "s.db"), filepath.Join(dir, "link.db")
	if err := os.Symlink(store, link); err != nil {
		t.Fatal(err)
	}
	stop(t, ingest(store), "after", os.Interrupt, func() bool { return componentsIn(t.Context(), store) > 0 }) // which leaves something to ask for
	held := componentsIn(t.Context(), store)
	first := begin(t, ingest(store), func() bool { return componentsIn(t.Context(), store) > held })
	// Held still, so that it has the lock through all that follows; how it has it when it
	// runs freely is no different.
	if err := first.Process.Signal(syscall.SIGSTOP); err != nil {
		t.Fatal(err)
	}
	holder := fmt.Sprintf("another run holds the store %%s: process %d on host %s since 2", first.Process.Pid, hostname(t))
	for _, name := range []string{store, link} {
		for _, args := range [][]string{{"ingest", dir}, {"ingest", "--recipe", "as-delivered"}, {"demo", "--dir", filepath.Join(dir, "demo"), "--events", "1", "--stations", "1"}} {
			cmd := exec.Command("swaybook", append([]string{"--quiet", "--store", name}, args...)...)
			var stderr bytes.Buffer
			cmd.Stderr = &stderr
			exit, ok := errors.AsType[*exec.ExitError](cmd.Run())
			said := stderr.String()
			if !ok || exit.ExitCode() != exitLocked || !strings.Contains(said, fmt.Sprintf(holder, name)) || !strings.Contains(said, "Z, swaybook --quiet --store "+store+" ingest ") {
				t.Errorf("%v beside a run on %s: %v, %s", args, name, exit, said)
			}
		}
	}
	for _, args := range [][]string{{"query", "records"}, {"query", "spectrum", "--periods", "0.1"}, {"export", "ordinates"}} {
		if out, err := exec.Command("swaybook", append([]string{"--store", store}, args...)...).CombinedOutput(); err != nil {
			t.Errorf("%v beside a run: %v, %s", args, err, out)
		}
	}
	if err := first.Process.Kill(); err != nil {
		t.Fatal(err)
	}
	<-first.ended
	if left, err := os.ReadFile(store + ".lock"); err != nil || !bytes.Contains(left, fmt.Append(nil, first.Process.Pid)) {
		t.Errorf("the killed run left %q, %v behind; the next has nothing to overcome", left, err)
	}
	files := filepath.Join(dir, "files")
	if err := os.Mkdir(files, 0o777); err != nil {
		t.Fatal(err)
	}
	mustRun(t, exec.Command("swaybook", "--store", store, "ingest", files))
	if _, err := os.Stat(store + ".lock"); err == nil {
		t.Error("a run that ended left its lock behind")
	}
}

func hostname(t *testing.T) string {
	t.Helper()
	name, err := os.Hostname()
	if err != nil {
		t.Skip(err)
	}
	return name
}
