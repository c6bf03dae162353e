//go:build linux

package main

import (
	"flag"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"

	"swaybook/db"
)

var allFaults = flag.Bool("faults", false, "try every limit and wait out every timeout in the tests of faults, for some minutes")

// thinned are the first, the middle and the last of cases unless all are to be tried.
func thinned[T any](cases ...T) []T {
	if *allFaults || len(cases) < 3 {
		return cases
	}
	return []T{cases[0], cases[len(cases)/2], cases[len(cases)-1]}
}

// laterStudy is a study whose first run has ended and whose files and recipe have changed since,
// with what an undisturbed second run leaves. again has it be so again.
func laterStudy(t *testing.T) (s *faultStudy, before, after outcome, again func()) {
	t.Helper()
	if testing.Short() {
		t.Skip("runs a study many times")
	}
	t.Parallel()
	s = newFaultStudy(t, t.TempDir())
	toTheEnd(s)
	saved := t.TempDir()
	s.save(saved)
	before = s.left()
	s.be("as-delivered", true)
	toTheEnd(s)
	after = s.left()
	if before.equals(after) {
		t.Fatal("the second run changes nothing")
	}
	again = func() { s.restore(saved) }
	again()
	return s, before, after, again
}

// untouched fails the test unless what is published, and the files, are as before the run.
func (s *faultStudy) untouched(what string, before outcome) {
	s.t.Helper()
	if got := s.left(); !got.equals(before) {
		s.t.Errorf("%s: what is left has changed: digests %s and %s, files %v", what, got.digest, before.digest, differing(got.files, before.files))
	}
}

// Under a limit on the size of files a run ends with 0 and all that it should leave, or with
// 1, the name of what it could not write, and what was published before.
func TestFilesMayNotGrow(t *testing.T) {
	s, before, after, again := laterStudy(t)
	failed, done := map[string]int{}, 0
	for _, blocks := range thinned(0, 16, 64, 200, 400, 600, 800, 1000, 1200, 1600, 2000, 2400, 2800, 3200, 20000) {
		again()
		what := fmt.Sprintf("%d blocks of 512 bytes", blocks)
		cmd := exec.Command("sh", "-c", fmt.Sprintf(`ulimit -f %d && exec swaybook --quiet reprocess "$0"`, blocks), s.file)
		text, err := cmd.CombinedOutput()
		if err == nil {
			done++
			s.finished(what, after)
			continue
		}
		failed[s.failedToWrite(what, string(text), cmd.ProcessState.ExitCode(), s.store, s.at("out"), s.at("lists"))]++
		s.untouched(what, before)
		mustRun(t, s.reprocess())
		s.finished("after "+what, after)
	}
	t.Logf("failed at %v, done %d", failed, done)
	if len(failed) == 0 || done == 0 {
		t.Errorf("failed at %v, done %d: the limits meet nothing, or all", failed, done)
	}
}

// A log that cannot be carried over into the store stays beside it, and nothing is lost: the
// commits are in it, and the next run carries it over.
func TestTheLogCannotBeCarriedOver(t *testing.T) {
	s, before, _, again := laterStudy(t)
	again()
	s.be("standard", false)
	s.check(os.Remove(s.at("out/each.csv")))
	// More than the log of a run that finds nothing changed, less than the store.
	cmd := exec.Command("sh", "-c", `ulimit -f 400 && exec swaybook --quiet reprocess "$0"`, s.file)
	mustRun(t, cmd)
	log, err := os.Stat(s.store + "-wal")
	if err != nil || log.Size() == 0 {
		t.Fatalf("the log was carried over: %v", err)
	}
	s.untouched("with a log", before)
	mustRun(t, s.reprocess())
	s.finished("carried over", before)
	if _, err := os.Stat(s.store + "-wal"); err == nil {
		t.Error("the log is still there")
	}
}

// failedToWrite fails the test unless the run failed and names one of the places. It returns
// what of it the message tells.
func (s *faultStudy) failedToWrite(what, text string, code int, places ...string) string {
	s.t.Helper()
	_, message, ok := strings.Cut(text, "swaybook: ")
	message, _, _ = strings.Cut(message, "\n")
	if code == exitFailed && ok {
		for _, place := range places {
			if strings.Contains(message, place) {
				return strings.TrimPrefix(place, s.dir)
			}
		}
	}
	s.t.Errorf("%s: exit code %d, %q names none of %v", what, code, text, places)
	return ""
}

// mount mounts a file system, and takes it off at the end of the test, or skips it.
func mount(t *testing.T, source, at, kind string, flags uintptr, data string) {
	t.Helper()
	if err := syscall.Mount(source, at, kind, flags, data); err != nil {
		t.Skipf("mount %s: %v; needs the rights of the system's administrator", at, err)
	}
	t.Cleanup(func() {
		if err := syscall.Unmount(at, 0); err != nil {
			t.Errorf("unmount %s: %v", at, err)
		}
	})
}

// onDisk puts a small disk at a folder, with what is in it.
func (s *faultStudy) onDisk(folder, size string) {
	s.t.Helper()
	kept := filepath.Join(s.t.TempDir(), "kept")
	s.check(copyTree(s.at(folder), kept))
	mount(s.t, "tmpfs", s.at(folder), "tmpfs", 0, size)
	s.check(copyTree(kept, s.at(folder)))
}

// refill has a disk hold what another folder does, and nothing else.
func (s *faultStudy) refill(folder, from string) {
	s.t.Helper()
	entries, err := os.ReadDir(s.at(folder))
	s.check(err)
	for _, e := range entries {
		s.check(os.RemoveAll(filepath.Join(s.at(folder), e.Name())))
	}
	s.check(copyTree(filepath.Join(from, folder), s.at(folder)))
}

// fillUp leaves so many bytes free on the disk of a folder, or what there is.
func (s *faultStudy) fillUp(folder string, free uint64) (ballast string) {
	s.t.Helper()
	var fs syscall.Statfs_t
	s.check(syscall.Statfs(s.at(folder), &fs))
	ballast = filepath.Join(s.at(folder), "ballast")
	if there := fs.Bavail * uint64(fs.Bsize); there > free {
		s.check(os.WriteFile(ballast, make([]byte, there-free), 0o666))
	}
	return ballast
}

// On a disk that is full, of the store or of the products, a run fails and says where, and
// what others see stays; where room is enough it ends as ever.
func TestDiskIsFull(t *testing.T) {
	s, before, after, _ := laterStudy(t)
	saved := t.TempDir()
	s.save(saved)
	t.Run("store", func(t *testing.T) {
		s.t = t
		s.onDisk("store", "size=16m")
		s.full(saved, before, after, reprocessAll, "store", s.store, 0, 16<<10, 64<<10, 128<<10, 256<<10, 512<<10, 768<<10, 1<<20, 1280<<10, 1536<<10, 2<<20, 8<<20)
	})
	t.Run("combined store", func(t *testing.T) {
		s.t = t
		s.refillAll(saved)
		fillShards(s)
		shards := t.TempDir()
		s.save(shards)
		s.onDisk("store", "size=32m")
		s.full(shards, before, after, combineShards, "store", s.store, 0, 16<<10, 64<<10, 128<<10, 256<<10, 512<<10, 768<<10, 1<<20, 1280<<10, 1536<<10, 2<<20, 16<<20)
	})
	t.Run("products", func(t *testing.T) {
		s.t = t
		s.onDisk("out", "size=1m")
		s.full(saved, before, after, reprocessAll, "out", s.at("out"), 0, 4<<10, 16<<10, 28<<10, 64<<10, 512<<10)
	})
	// A name takes room as well: here the files can be written, but not all be kept beside
	// what replaces them.
	for _, names := range thinned(6, 7, 8, 9, 10, 11, 12) {
		t.Run(fmt.Sprintf("%d names", names), func(t *testing.T) {
			s.t = t
			s.refillAll(saved)
			s.onDisk("out", fmt.Sprintf("size=1m,nr_inodes=%d", names))
			cmd := s.reprocess()
			text, err := cmd.CombinedOutput()
			t.Logf("%s", lastLine(text))
			if err == nil {
				s.finished("names", after)
				return
			}
			s.failedToWrite("names", string(text), cmd.ProcessState.ExitCode(), s.at("out"))
			s.untouched("names", before)
			if hidden := s.names("out", true); len(hidden) > 0 {
				t.Errorf("left over: %v", hidden)
			}
		})
	}
}

func lastLine(text []byte) string {
	lines := strings.Split(strings.TrimSpace(string(text)), "\n")
	return lines[len(lines)-1]
}

func (s *faultStudy) refillAll(saved string) {
	s.t.Helper()
	for _, folder := range faultFolders {
		s.refill(folder, saved)
	}
}

// full runs a command of the study with so much room in a folder, and then with enough of it.
func (s *faultStudy) full(saved string, before, after outcome, run func(*faultStudy) *exec.Cmd, folder, place string, room ...uint64) {
	s.t.Helper()
	failed, done := 0, 0
	for _, free := range thinned(room...) {
		s.refillAll(saved)
		what := fmt.Sprintf("%d bytes free in %s", free, folder)
		ballast := s.fillUp(folder, free)
		cmd := run(s)
		text, err := cmd.CombinedOutput()
		removed := os.Remove(ballast)
		s.t.Logf("%s: %s", what, lastLine(text))
		if n := strings.Count(string(text), db.ErrFull.Error()); n > 1 {
			s.t.Errorf("%s: said %d times: %s", what, n, text)
		}
		if err == nil {
			done++
			s.check(removed)
			s.finished(what, after)
			continue
		}
		failed++
		s.failedToWrite(what, string(text), cmd.ProcessState.ExitCode(), place)
		s.untouched(what, before)
		mustRun(s.t, run(s))
		s.finished("after "+what, after)
	}
	if failed == 0 || done == 0 {
		s.t.Errorf("failed %d times, done %d", failed, done)
	}
}

// The state of a run on a full disk cannot be left, and the run says so; what it published is.
func TestNoRoomForTheState(t *testing.T) {
	s, _, after, _ := laterStudy(t)
	s.check(os.Mkdir(s.at("small"), 0o777))
	text, err := os.ReadFile(s.file)
	s.check(err)
	s.check(os.WriteFile(s.file, []byte(strings.Replace(string(text), `"state.json"`, `"small/state.json"`, 1)), 0o666))
	mount(t, "tmpfs", s.at("small"), "tmpfs", 0, "size=64k")
	ballast := s.fillUp("small", 0)
	cmd := s.reprocess()
	out, _ := cmd.CombinedOutput()
	s.failedToWrite("no room", string(out), cmd.ProcessState.ExitCode(), s.at("small"))
	if got := s.left(); got.digest != after.digest {
		t.Errorf("digest %s, want %s", got.digest, after.digest)
	}
	s.check(os.Remove(ballast))
	mustRun(t, s.reprocess())
	s.finished("with room", after)
}
