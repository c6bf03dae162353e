package db

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"syscall"
	"testing"
	"testing/synctest"
	"time"

	"github.com/gofrs/flock"
)

var (
	firstHolder  = Holder{PID: 123, Host: "tarn", Since: time.Date(2026, 12, 1, 3, 0, 0, 0, time.UTC), Command: "swaybook ingest records"}
	secondHolder = Holder{PID: 7, Host: "fell", Since: time.Date(2026, 12, 2, 3, 0, 0, 0, time.UTC), Command: "swaybook ingest more"}
)

// lockedBy fails unless the store's lock is held by the holder.
func lockedBy(t *testing.T, store string, want Holder) {
	t.Helper()
	_, err := TakeLock(t.Context(), store, secondHolder)
	locked, ok := errors.AsType[*LockedError](err)
	if !ok || locked.Holder == nil || *locked.Holder != want {
		t.Fatalf("TakeLock(%s) = %v, want it held by %v", store, err, want)
	}
}

func takeLockOf(t *testing.T, store string, holder Holder) *Lock {
	t.Helper()
	l, err := TakeLock(t.Context(), store, holder)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

func TestLockNamesItsHolder(t *testing.T) {
	store := filepath.Join(t.TempDir(), "s.db")
	l := takeLockOf(t, store, firstHolder)
	_, err := TakeLock(t.Context(), store, secondHolder)
	want := "another run holds the store " + store + ": process 123 on host tarn since 2026-12-01T03:00:00Z, swaybook ingest records"
	if err == nil || err.Error() != want {
		t.Errorf("TakeLock = %v, want %s", err, want)
	}
	if err := l.Release(); err != nil {
		t.Fatal(err)
	}
	if _, err := os.Stat(store + ".lock"); runtime.GOOS != "windows" && !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("the lock's file stays behind: %v", err)
	}
	if err := takeLockOf(t, store, secondHolder).Release(); err != nil {
		t.Error(err)
	}
}

// What a run that was killed left behind holds nobody up and is overwritten whole, though
// it is longer.
func TestLockOfADeadHolder(t *testing.T) {
	store := filepath.Join(t.TempDir(), "s.db")
	dead := firstHolder
	dead.Command += strings.Repeat(" more", 100)
	leaveBehind(t, store, dead)
	l := takeLockOf(t, store, firstHolder)
	defer l.Release()
	lockedBy(t, store, firstHolder)
	if text := string(must(os.ReadFile(store + ".lock"))); strings.Contains(text, "more") {
		t.Errorf("the lock still says %q", text)
	}
}

// leaveBehind leaves the file of a holder that died with the lock.
func leaveBehind(t *testing.T, store string, dead Holder) {
	t.Helper()
	l := takeLockOf(t, store, dead)
	// To unlock alone is what the system does for a process that was killed.
	if err := l.lock.Unlock(); err != nil {
		t.Fatal(err)
	}
}

// Whoever comes between a run's locking and its writing into the lock does not take a dead
// run for the holder.
func TestLockShowsNoDeadHolder(t *testing.T) {
	store := filepath.Join(t.TempDir(), "s.db")
	leaveBehind(t, store, firstHolder)
	synctest.Test(t, func(t *testing.T) {
		taken := flock.New(store + ".lock")
		if ok, err := taken.TryLock(); !ok || err != nil {
			t.Fatal(ok, err)
		}
		answer := make(chan error, 1)
		go func() {
			_, err := TakeLock(t.Context(), store, secondHolder)
			answer <- err
		}()
		synctest.Wait() // it has read the lock once
		if _, err := (&Lock{taken}).heldBy(secondHolder); err != nil {
			t.Fatal(err)
		}
		locked, ok := errors.AsType[*LockedError](<-answer)
		if !ok || locked.Holder == nil || *locked.Holder != secondHolder {
			t.Errorf("TakeLock: %v, want it held by %v", locked, secondHolder)
		}
		taken.Unlock()
	})
}

// A lock that says nothing, or what nobody can read, is held all the same.
func TestLockOfAHolderWithoutName(t *testing.T) {
	for name, text := range map[string]string{"empty": "", "junk": "\nheld", "binary": "\n{\x00\xff"} {
		t.Run(name, func(t *testing.T) {
			store := filepath.Join(t.TempDir(), "s.db")
			if err := os.WriteFile(store+".lock", []byte(text), 0o666); err != nil {
				t.Fatal(err)
			}
			other := flock.New(store + ".lock")
			if ok, err := other.TryLock(); !ok || err != nil {
				t.Fatal(ok, err)
			}
			defer other.Unlock()
			_, err := TakeLock(t.Context(), store, secondHolder)
			if locked, ok := errors.AsType[*LockedError](err); !ok || locked.Holder != nil || !strings.Contains(err.Error(), "does not say which") {
				t.Errorf("TakeLock = %v", err)
			}
		})
	}
}

// Runs that come and go all the time are on the store one at a time, though each removes
// the file that others are about to lock.
func TestLockIsHeldByOneAtATime(t *testing.T) {
	store := filepath.Join(t.TempDir(), "s.db")
	// Each writes into the file that nobody else must write to meanwhile.
	runs, errs := 4, make(chan error)
	for run := range runs {
		go func() {
			errs <- func() error {
				for turns := 0; turns < 50; {
					l, err := tryLock(store+".lock", 0o666)
					if err != nil {
						return err
					}
					if l == nil {
						runtime.Gosched()
						continue
					}
					turns++
					if err := os.WriteFile(store, fmt.Append(nil, run), 0o666); err != nil {
						return err
					}
					runtime.Gosched()
					if text, err := os.ReadFile(store); err != nil || string(text) != fmt.Sprint(run) {
						return fmt.Errorf("%d has the lock and finds %s, %v", run, text, err)
					}
					if err := l.Release(); err != nil {
						return err
					}
				}
				return nil
			}()
		}()
	}
	for range runs {
		if err := <-errs; err != nil {
			t.Error(err)
		}
	}
}

// A store has one lock, by whatever links it is named, and before it is there.
func TestLockFollowsLinks(t *testing.T) {
	dir := t.TempDir()
	for _, folder := range []string{"real/stores", "links"} {
		if err := os.MkdirAll(filepath.Join(dir, folder), 0o777); err != nil {
			t.Fatal(err)
		}
	}
	store := filepath.Join(dir, "real", "stores", "s.db")
	names := map[string]string{
		"links/absolute.db": store,
		"links/relative.db": filepath.Join("..", "real", "stores", "s.db"),
		"links/twice.db":    "relative.db",
		"links/folder":      filepath.Join(dir, "real", "stores"),
	}
	for name, target := range names {
		if err := os.Symlink(target, filepath.Join(dir, name)); err != nil {
			t.Skip(err) // Windows lets few people make links
		}
	}
	for _, made := range []bool{false, true} {
		l := takeLockOf(t, filepath.Join(dir, "links", "twice.db"), firstHolder)
		for _, name := range []string{"real/stores/s.db", "links/absolute.db", "links/relative.db", "links/folder/s.db", "links/folder/../stores/s.db"} {
			lockedBy(t, dir+"/"+name, firstHolder)
		}
		if err := l.Release(); err != nil {
			t.Fatal(err)
		}
		if !made {
			// The link leads to nothing, and SQLite makes the store there.
			if err := must(Create(t.Context(), filepath.Join(dir, "links", "twice.db"), testSolver)).Close(); err != nil {
				t.Fatal(err)
			}
			if _, err := os.Stat(store); err != nil {
				t.Fatal(err)
			}
		}
	}
	if err := os.Symlink("circle.db", filepath.Join(dir, "circle.db")); err != nil {
		t.Fatal(err)
	}
	if _, err := TakeLock(t.Context(), filepath.Join(dir, "circle.db"), firstHolder); err == nil || !strings.Contains(err.Error(), "links") {
		t.Errorf("TakeLock through a circle of links = %v", err)
	}
}

// A run's own files are known by both names where the store is a link.
func TestFilesOfALink(t *testing.T) {
	dir := must(filepath.EvalSymlinks(t.TempDir()))
	link := filepath.Join(dir, "link.db")
	if err := os.Symlink("s.db", link); err != nil {
		t.Skip(err)
	}
	files := Files(link)
	for _, name := range []string{"link.db", "link.db.lock", "s.db", "s.db-wal", "s.db-shm", "s.db.lock"} {
		if files[filepath.Join(dir, name)] == "" {
			t.Errorf("Files(%s) lacks %s: %v", link, name, files)
		}
	}
}

func TestLockWhereItCannotBe(t *testing.T) {
	dir := t.TempDir()
	if _, err := TakeLock(t.Context(), filepath.Join(dir, "no", "such.db"), firstHolder); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("TakeLock in a missing folder = %v", err)
	}
	for want, cause := range map[string]error{
		"may not be written to": syscall.EROFS,
		"has no locks":          syscall.ENOLCK,
		"keep it on a local":    syscall.ENOTSUP,
	} {
		err := explainLock(&fs.PathError{Op: "open", Path: "s.db.lock", Err: cause})
		if !strings.Contains(err.Error(), want) || !errors.Is(err, cause) {
			t.Errorf("explainLock(%v) = %v, want %q", cause, err, want)
		}
	}
	if os.Geteuid() == 0 || runtime.GOOS == "windows" {
		t.Skip("this user may write anywhere")
	}
	if err := os.Chmod(dir, 0o555); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { os.Chmod(dir, 0o755) })
	if _, err := TakeLock(t.Context(), filepath.Join(dir, "s.db"), firstHolder); err == nil || !strings.Contains(err.Error(), "may not be written to") {
		t.Errorf("TakeLock in a read-only folder = %v", err)
	}
}

// What a lock's file says goes to a terminal.
func TestHolderOfOddWords(t *testing.T) {
	h := Holder{PID: 1, Host: "a\x1b[2J", Command: "swaybook ingest 'b\nc'"}
	if got := h.String(); strings.ContainsAny(got, "\x1b\n") {
		t.Errorf("%q", got)
	}
}
