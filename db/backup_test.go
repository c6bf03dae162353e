package db

import (
	"bytes"
	"context"
	"database/sql"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"sync/atomic"
	"testing"
)

// names are the files in the folder.
func names(t *testing.T, dir string) string {
	t.Helper()
	var out []string
	for _, e := range must(os.ReadDir(dir)) {
		out = append(out, e.Name())
	}
	return strings.Join(out, " ")
}

// recordsIn counts the records of a store, whose integrity it checks.
func recordsIn(t *testing.T, path string) (n int) {
	t.Helper()
	s, err := Open(t.Context(), path, testSolver)
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	var sound string
	if err := s.read.QueryRow(`SELECT (SELECT count(*) FROM record), (SELECT integrity_check FROM pragma_integrity_check)`).Scan(&n, &sound); err != nil || sound != "ok" {
		t.Fatalf("%s: %v, %s", path, err, sound)
	}
	return n
}

func storeWithRecord(t *testing.T) (*Store, Generation) {
	t.Helper()
	s, g := filledStore(t)
	update(t, s, func(ctx context.Context, tx *Tx) error { return add(ctx, tx, g, "EV1-ONE", RoleH1, 1) })
	return s, g
}

// enlarge makes the copy of a store take so many steps at least.
func enlarge(t *testing.T, s *Store, steps int) {
	t.Helper()
	ballast := fmt.Sprintf(`CREATE TABLE ballast (bytes BLOB); INSERT INTO ballast VALUES (zeroblob(%d))`, steps*stepPages*4096)
	if _, err := s.write.Exec(ballast); err != nil {
		t.Fatal(err)
	}
}

func TestBackupIsTheStore(t *testing.T) {
	s, _ := storeWithRecord(t)
	want := recordsIn(t, s.Path()) // while the log holds it
	dir := t.TempDir()
	file := filepath.Join(dir, "copy of a & b?.db")
	size, err := Backup(t.Context(), s.Path(), file, false)
	if err != nil {
		t.Fatal(err)
	}
	if info := must(os.Stat(file)); info.Size() != size || info.Mode().Perm() != must(os.Stat(s.Path())).Mode().Perm() {
		t.Errorf("the copy has %d bytes and the mode %v, %d were reported", info.Size(), info.Mode(), size)
	}
	if got := names(t, dir); got != filepath.Base(file) {
		t.Errorf("beside the copy lie %s", got)
	}
	if got := recordsIn(t, file); got != want || want == 0 {
		t.Errorf("the copy has %d records, want %d", got, want)
	}
}

// A writer that goes on all the time holds no backup up, and is not held up; the copy is one
// of the states that it left.
func TestBackupWhileAnotherWrites(t *testing.T) {
	s, g := storeWithRecord(t)
	const together = 3 // records in a transaction
	start := recordsIn(t, s.Path())
	ctx, stop := context.WithCancel(t.Context())
	wrote, began := make(chan error, 1), make(chan struct{})
	go func() {
		defer close(began)
		wrote <- func() error {
			for batch := 0; ctx.Err() == nil; batch++ {
				err := s.Update(context.WithoutCancel(ctx), func(tx *Tx) error {
					for i := range together {
						if err := add(t.Context(), tx, g, fmt.Sprintf("NEW-%d-%d", batch, i), RoleH1, 1); err != nil {
							return err
						}
					}
					return nil
				})
				if err != nil {
					return err
				}
				select {
				case began <- struct{}{}:
				default:
				}
			}
			return nil
		}()
	}()
	last := start
	for i := range 5 {
		// The first may be of a batch that the last copy has; the second began after it.
		for range 2 {
			<-began
		}
		file := filepath.Join(t.TempDir(), fmt.Sprint(i))
		if _, err := Backup(t.Context(), s.Path(), file, false); err != nil {
			stop()
			t.Fatal(err, <-wrote)
		}
		got := recordsIn(t, file)
		if got <= last || (got-start)%together != 0 {
			t.Errorf("a copy has %d records, %d at the beginning and %d before, of batches of %d", got, start, last, together)
		}
		last = got
	}
	stop()
	if err := <-wrote; err != nil {
		t.Error(err)
	}
}

// busy is a context that writes into a store whenever it is asked whether it has ended,
// which package sql does from goroutines of its own too.
type busy struct {
	context.Context
	write func(turn int64)
	turns atomic.Int64
}

func (c *busy) Err() error {
	c.write(c.turns.Add(1))
	return nil
}

// A batch between any two steps of a backup does not begin it anew.
func TestBackupIsNotBegunAnew(t *testing.T) {
	s, g := storeWithRecord(t)
	const steps, limit = 10, 100
	enlarge(t, s, steps)
	ctx := &busy{Context: t.Context(), write: func(turn int64) {
		if turn <= limit {
			// The records are counted below.
			_ = s.Update(t.Context(), func(tx *Tx) error { return add(t.Context(), tx, g, fmt.Sprint("NEW-", turn), RoleH1, 1) })
		}
	}}
	file := filepath.Join(t.TempDir(), "copy.db")
	if _, err := Backup(ctx, s.Path(), file, false); err != nil {
		t.Fatal(err)
	}
	if turns := ctx.turns.Load(); turns < steps || turns >= 2*steps {
		t.Errorf("the copy took %d steps, of %d", turns, steps)
	}
	if got, last := recordsIn(t, file), recordsIn(t, s.Path()); got > last-steps {
		t.Errorf("the copy has %d records of %d: it is not of the time when it began", got, last)
	}
}

func TestBackupRefuses(t *testing.T) {
	s, _ := storeWithRecord(t)
	dir := t.TempDir()
	file, taken, used := filepath.Join(dir, "new.db"), filepath.Join(dir, "taken"), filepath.Join(dir, "used")
	for _, name := range []string{taken, used + "-wal", filepath.Join(dir, "junk"), filepath.Join(dir, "empty")} {
		if err := os.WriteFile(name, []byte(strings.Repeat("mine", 1000)), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	if err := os.Truncate(filepath.Join(dir, "empty"), 0); err != nil {
		t.Fatal(err)
	}
	foreign := filepath.Join(dir, "foreign")
	raw := must(sql.Open("sqlite", foreign))
	if _, err := raw.Exec(`CREATE TABLE song (id INTEGER)`); err != nil {
		t.Fatal(err)
	}
	raw.Close()
	before := names(t, dir)
	for _, c := range []struct {
		store, file string
		replace     bool
		want        string
	}{
		{s.Path(), taken, false, "file already exists"},
		{s.Path(), dir, true, "no regular file"},
		{s.Path(), s.Path(), true, "the store itself"},
		{s.Path(), s.Path() + "-wal", true, "the store's log"},
		{s.Path(), s.Path() + ".lock", true, "the store's lock"},
		{s.Path(), used, true, "used-wal stands beside it"},
		{s.Path(), filepath.Join(dir, "no", "such"), false, "no such file or directory"},
		{filepath.Join(dir, "none"), file, false, "no such store"},
		{filepath.Join(dir, "empty"), file, false, "no such store"},
		{filepath.Join(dir, "junk"), file, false, "not a swaybook store"},
		{foreign, file, false, "another program"},
	} {
		_, err := Backup(t.Context(), c.store, c.file, c.replace)
		if err == nil || runtime.GOOS != "windows" && !strings.Contains(err.Error(), c.want) {
			t.Errorf("Backup(%s, %s, %t) = %v, want %q", c.store, c.file, c.replace, err, c.want)
		}
		if errors.Is(err, fs.ErrExist) != (c.file == taken) {
			t.Errorf("Backup(%s, %s, %t) = %v", c.store, c.file, c.replace, err)
		}
	}
	if got := names(t, dir); got != before {
		t.Errorf("the folder holds %s, held %s", got, before)
	}
	if !bytes.Equal(must(os.ReadFile(taken)), []byte(strings.Repeat("mine", 1000))) {
		t.Error("a file that was in the way was changed")
	}
	if _, err := Backup(t.Context(), s.Path(), taken, true); err != nil || recordsIn(t, taken) == 0 {
		t.Errorf("Backup that may replace the file: %v", err)
	}
}

// The store's own files are known by whatever link they are named.
func TestBackupToALinkOfTheStore(t *testing.T) {
	s, _ := storeWithRecord(t)
	folder := filepath.Join(t.TempDir(), "folder")
	if err := os.Symlink(filepath.Dir(s.Path()), folder); err != nil {
		t.Skip(err)
	}
	for _, suffix := range []string{"", ".lock", "-journal"} {
		if _, err := Backup(t.Context(), s.Path(), filepath.Join(folder, filepath.Base(s.Path())+suffix), true); err == nil || !strings.Contains(err.Error(), "that is the store") {
			t.Errorf("Backup to the store's own file by way of a link = %v", err)
		}
	}
}

// asked is a context that ends when it has been asked so often whether it has.
type asked struct {
	context.Context
	left atomic.Int64
}

func (c *asked) Err() error {
	if c.left.Add(-1) < 0 {
		return context.Canceled
	}
	return nil
}

// A backup that is stopped at any time leaves nothing, and what it would have replaced stays.
func TestBackupThatIsStopped(t *testing.T) {
	s, _ := storeWithRecord(t)
	const steps = 5
	enlarge(t, s, steps)
	dir := t.TempDir()
	file := filepath.Join(dir, "copy.db")
	if err := os.WriteFile(file, []byte("former"), 0o666); err != nil {
		t.Fatal(err)
	}
	stopped, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := Backup(stopped, s.Path(), file, true); !errors.Is(err, context.Canceled) {
		t.Errorf("Backup of nobody who waits = %v", err)
	}
	for n := int64(0); ; n++ {
		ctx := &asked{Context: t.Context()}
		ctx.left.Store(n)
		_, err := Backup(ctx, s.Path(), file, true)
		if err == nil {
			if n < steps {
				t.Errorf("a backup asks %d times whether it shall go on, want %d at least", n, steps)
			}
			break
		}
		if got := names(t, dir); !errors.Is(err, context.Canceled) || got != "copy.db" || string(must(os.ReadFile(file))) != "former" {
			t.Errorf("a backup that was stopped the %dth time that it asked: %v, left %s", n, err, got)
		}
	}
	if recordsIn(t, file) == 0 {
		t.Error("a backup that was not stopped replaced nothing")
	}
}

// What a program of another time or solver made can be copied: before it is brought up to
// date, say.
func TestBackupOfAnotherProgramsStore(t *testing.T) {
	s, _ := storeWithRecord(t)
	if _, err := s.write.Exec(`INSERT INTO schema_step VALUES (99999, '99999_future.sql', 'x')`); err != nil {
		t.Fatal(err)
	}
	file := filepath.Join(t.TempDir(), "copy.db")
	if _, err := Backup(t.Context(), s.Path(), file, false); err != nil {
		t.Fatal(err)
	}
	if _, err := Open(t.Context(), file, testSolver); !errors.Is(err, ErrNewer) {
		t.Errorf("Open of the copy = %v, want what is said of the store, %v", err, ErrNewer)
	}
}
