//go:build linux

package main

import (
	"database/sql"
	"errors"
	"io/fs"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"
)

// nobody is the number of the user who owns nothing.
const nobody = 65534

// nobodysStudy is a study in a folder of a user whom modes of files bind, with a program
// that runs as him. The administrator is bound by none.
func nobodysStudy(t *testing.T) (s *faultStudy, asNobody func(*exec.Cmd) *exec.Cmd) {
	t.Helper()
	if testing.Short() {
		t.Skip("runs a study many times")
	}
	t.Parallel()
	dir, err := os.MkdirTemp("", "faults")
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { os.RemoveAll(dir) })
	s = newFaultStudy(t, dir)
	return s, nobodysCommands(t, dir)
}

// nobodysCommands gives a folder, and a program in it, to a user whom modes of files bind, and returns
// how commands run as his. One who is not the administrator is such a user.
func nobodysCommands(t *testing.T, dir string) func(*exec.Cmd) *exec.Cmd {
	t.Helper()
	if os.Geteuid() != 0 {
		return func(cmd *exec.Cmd) *exec.Cmd { return cmd }
	}
	own := filepath.Join(dir, "swaybook")
	program, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	text, err := os.ReadFile(program)
	if err == nil {
		err = os.WriteFile(own, text, 0o755)
	}
	if err != nil {
		t.Fatal(err)
	}
	err = filepath.WalkDir(dir, func(path string, _ fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		return os.Lchown(path, nobody, nobody)
	})
	if err != nil {
		t.Fatal(err)
	}
	return func(cmd *exec.Cmd) *exec.Cmd {
		out := exec.Command(own, cmd.Args[1:]...)
		out.Dir = dir
		out.SysProcAttr = &syscall.SysProcAttr{Credential: &syscall.Credential{Uid: nobody, Gid: nobody}}
		return out
	}
}

// changeMode changes modes for the length of f.
func (s *faultStudy) changeMode(mode fs.FileMode, paths []string, f func()) {
	s.t.Helper()
	before := map[string]fs.FileMode{}
	for _, path := range paths {
		info, err := os.Stat(path)
		s.check(err)
		before[path] = info.Mode().Perm()
		s.check(os.Chmod(path, mode))
	}
	f()
	for path, mode := range before {
		s.check(os.Chmod(path, mode))
	}
}

// A store, a folder of products or a folder of stores that may not be written to: a run says
// so and changes nothing, questions are answered.
func TestNothingMayBeWritten(t *testing.T) {
	s, asNobody := nobodysStudy(t)
	mustRun(t, asNobody(s.reprocess()))
	before := s.left()
	text, err := os.ReadFile(s.file)
	s.check(err)
	s.check(os.WriteFile(s.file, []byte(strings.Replace(string(text), `"standard"`, `"as-delivered"`, 1)), 0o666))
	for _, c := range []struct {
		what, named string
		paths       []string
		mode        fs.FileMode
	}{
		{"store", s.store, []string{s.store}, 0o444},
		{"folder of the store", s.store, []string{s.at("store")}, 0o555},
		{"products", s.at("out"), []string{s.at("out")}, 0o555},
	} {
		s.changeMode(c.mode, c.paths, func() {
			s.failedToWriteOf(c.what, asNobody(s.reprocess()), c.named)
			mustRun(t, asNobody(exec.Command("swaybook", "--store", s.store, "query", "spectrum", "--screen", "none", "--periods", "0.5", "--component", "each")))
		})
		s.untouched(c.what, before)
	}
	mustRun(t, asNobody(s.reprocess()))
	after := s.left()
	if after.digest == before.digest {
		t.Error("the last run changed nothing")
	}
	s.finished("writable", after)
}

// failedToWriteOf runs a command that must fail and name the place.
func (s *faultStudy) failedToWriteOf(what string, cmd *exec.Cmd, place string) {
	s.t.Helper()
	text, _ := cmd.CombinedOutput()
	s.failedToWrite(what, string(text), cmd.ProcessState.ExitCode(), place)
	s.t.Logf("%s: %s", what, lastLine(text))
}

// A file system that may only be read stops the administrator, too.
func TestReadOnlyFileSystem(t *testing.T) {
	s, before, after, _ := laterStudy(t)
	t.Run("mounted", func(t *testing.T) {
		s.t = t
		mount(t, s.at("store"), s.at("store"), "", syscall.MS_BIND, "")
		s.check(syscall.Mount("", s.at("store"), "", syscall.MS_BIND|syscall.MS_REMOUNT|syscall.MS_RDONLY, ""))
		s.failedToWriteOf("read-only file system", s.reprocess(), s.store)
		s.untouched("read-only file system", before)
		mustRun(t, exec.Command("swaybook", "--store", s.store, "query", "records"))
	})
	s.t = t
	mustRun(t, s.reprocess())
	s.finished("writable", after)
}

// A file among the records that may not be read is rejected with its cause, by a run that
// reads the others; once it may be, the next run reads it, though nothing about it has
// changed. A folder that may not be read could hold anything: the run fails, and nothing is
// changed, unless the study leaves the folder out.
func TestRecordsMayNotBeRead(t *testing.T) {
	s, asNobody := nobodysStudy(t)
	mustRun(t, asNobody(s.reprocess()))
	want := s.left()
	folders, err := filepath.Glob(s.at("records/q*"))
	s.check(err)
	for what, c := range map[string]struct {
		paths []string
		code  int
	}{
		"file":   {[]string{s.at("records/NWT_CDH000.AT2")}, exitRejected},
		"folder": {folders[:1], exitFailed},
	} {
		s.changeMode(0, c.paths, func() {
			// What was read is not read again unasked; what could not be is.
			for _, args := range [][]string{{"--rehash"}, nil} {
				var out strings.Builder
				cmd := asNobody(s.reprocess(args...))
				cmd.Stdout, cmd.Stderr = &out, &out
				if cmd.Run(); cmd.ProcessState.ExitCode() != c.code || !strings.Contains(out.String(), "permission denied") {
					t.Errorf("%s: exit code %d, %s", what, cmd.ProcessState.ExitCode(), out.String())
				}
			}
			if got := s.left(); (got.digest == want.digest) != (c.code == exitFailed) {
				t.Errorf("%s: its records are there: %v", what, got.digest == want.digest)
			}
		})
		mustRun(t, asNobody(s.reprocess()))
		s.finished(what, want)
	}
}

// holdStore has somebody else write to the store until release is called.
func (s *faultStudy) holdStore() (release func()) {
	s.t.Helper()
	other, err := sql.Open("sqlite", "file:"+s.store)
	s.check(err)
	conn, err := other.Conn(s.t.Context())
	s.check(err)
	_, err = conn.ExecContext(s.t.Context(), "BEGIN IMMEDIATE")
	s.check(err)
	return func() {
		_, err := conn.ExecContext(s.t.Context(), "ROLLBACK")
		s.check(errors.Join(err, conn.Close(), other.Close()))
	}
}

// A run waits for whoever else writes to the store.
func TestARunWaitsForAnotherWriter(t *testing.T) {
	s, before, after, _ := laterStudy(t)
	release := s.holdStore()
	p, _ := watch(t, s.reprocess(), func() bool { return isHeld(s) })
	select {
	case err := <-p.ended:
		t.Fatalf("the run did not wait: %v, %s", err, p.stderr.String())
	case <-time.After(500 * time.Millisecond):
	}
	s.untouched("while it waits", before)
	release()
	if err := <-p.ended; err != nil {
		t.Errorf("%v, %s", err, p.stderr.String())
	}
	s.finished("after it waited", after)
}

// A run does not wait for ever.
func TestARunGivesUpOnAnotherWriter(t *testing.T) {
	if !*allFaults {
		t.Skip("lasts half a minute; -faults tries it")
	}
	s, before, after, _ := laterStudy(t)
	release := s.holdStore()
	start := time.Now()
	s.failedToWriteOf("locked", s.reprocess(), s.store)
	t.Logf("gave up after %v", time.Since(start))
	s.untouched("locked", before)
	release()
	mustRun(t, s.reprocess())
	s.finished("unlocked", after)
}
