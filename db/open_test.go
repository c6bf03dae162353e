package db

import (
	"bytes"
	"context"
	"database/sql"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
	"testing/fstest"

	"golang.org/x/sync/errgroup"

	"swaybook/migrations"
	"swaybook/pipeline/condition"
)

func TestEveryConnectionHasThePragmas(t *testing.T) {
	s := newStore(t)
	want := map[string]string{"journal_mode": "wal", "foreign_keys": "1", "synchronous": "2", "busy_timeout": fmt.Sprint(busyTimeoutMS)}
	for name, handle := range map[string]*sql.DB{"write": s.write, "read": s.read} {
		// The last two are for macOS; elsewhere they do nothing.
		want["fullfsync"], want["checkpoint_fullfsync"] = "0", "0"
		if name == "write" {
			want["fullfsync"], want["checkpoint_fullfsync"] = "1", "1"
		}
		// Two connections at once, so that the second is not the first again.
		for range 2 {
			conn, err := handle.Conn(t.Context())
			if err != nil {
				t.Fatal(err)
			}
			for pragma, value := range want {
				var got string
				if err := conn.QueryRowContext(t.Context(), "PRAGMA "+pragma).Scan(&got); err != nil {
					t.Fatal(err)
				}
				if got != value {
					t.Errorf("%s: %s = %s, want %s", name, pragma, got, value)
				}
			}
			if name == "write" {
				conn.Close()
				break
			}
			defer conn.Close()
		}
	}
	if _, err := s.read.ExecContext(t.Context(), `DELETE FROM event`); err == nil {
		t.Error("the read pool writes")
	}
}

func TestOpenRefuses(t *testing.T) {
	dir := t.TempDir()
	if _, err := Open(t.Context(), filepath.Join(dir, "none.db"), testSolver); !errors.Is(err, ErrNoStore) {
		t.Errorf("missing store: %v, want ErrNoStore", err)
	}
	junk := filepath.Join(dir, "junk.db")
	if err := os.WriteFile(junk, []byte(strings.Repeat("not a database ", 100)), 0o644); err != nil {
		t.Fatal(err)
	}
	for name, open := range map[string]func(context.Context, string, string) (*Store, error){"Open": Open, "Create": Create} {
		if _, err := open(t.Context(), junk, testSolver); err == nil || !strings.Contains(err.Error(), "not a swaybook store") {
			t.Errorf("%s of junk: %v", name, err)
		}
	}
	foreign := filepath.Join(dir, "foreign.db")
	raw := must(sql.Open("sqlite", foreign))
	if _, err := raw.Exec(`CREATE TABLE song (id INTEGER)`); err != nil {
		t.Fatal(err)
	}
	raw.Close()
	before := must(os.ReadFile(foreign))
	for name, open := range map[string]func(context.Context, string, string) (*Store, error){"Open": Open, "Create": Create} {
		if _, err := open(t.Context(), foreign, testSolver); err == nil || !strings.Contains(err.Error(), "another program") {
			t.Errorf("%s of a foreign database: %v", name, err)
		}
	}
	if !bytes.Equal(before, must(os.ReadFile(foreign))) {
		t.Error("a foreign database was changed")
	}
	if _, err := Create(t.Context(), filepath.Join(dir, "no", "such", "folder.db"), testSolver); err == nil {
		t.Error("no error for a missing folder")
	}
}

func TestOpenRefusesANewerOrEditedStore(t *testing.T) {
	tests := []struct {
		name, change string
		want         error
	}{
		{"newer", `INSERT INTO schema_step VALUES (99999, '99999_future.sql', 'x')`, ErrNewer},
		{"edited", `UPDATE schema_step SET sha256 = 'other' WHERE number = 1`, ErrEdited},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			path := filepath.Join(t.TempDir(), "s.db")
			s := must(Create(t.Context(), path, testSolver))
			if _, err := s.write.Exec(tt.change); err != nil {
				t.Fatal(err)
			}
			s.Close()
			if _, err := Open(t.Context(), path, testSolver); !errors.Is(err, tt.want) {
				t.Errorf("Open: %v, want %v", err, tt.want)
			}
			if _, err := Create(t.Context(), path, testSolver); !errors.Is(err, tt.want) {
				t.Errorf("Create: %v, want %v", err, tt.want)
			}
		})
	}
}

func TestMigrationsAreNumberedInOrder(t *testing.T) {
	if _, err := steps(); err != nil {
		t.Error(err)
	}
	if _, err := readSteps(fstest.MapFS{"00001_a.sql": {}, "00003_c.sql": {}}); err == nil {
		t.Error("no error for a gap")
	}
}

// A question makes no store, and a store without a generation answers that it
// is empty.
func TestOpenOfNothing(t *testing.T) {
	path := filepath.Join(t.TempDir(), "empty.db")
	if err := os.WriteFile(path, nil, 0o644); err != nil {
		t.Fatal(err)
	}
	if _, err := Open(t.Context(), path, testSolver); !errors.Is(err, ErrNoStore) {
		t.Errorf("Open of an empty file = %v, want ErrNoStore", err)
	}
	if info, err := os.Stat(path); err != nil || info.Size() != 0 {
		t.Errorf("the empty file was changed: %v, %v", info, err)
	}
	if err := newStore(t).View(t.Context(), func(*Snapshot) error { return nil }); !errors.Is(err, ErrEmpty) {
		t.Errorf("View = %v, want ErrEmpty", err)
	}
}

// A store in a folder that may not be written to still answers.
func TestOpenInAReadOnlyFolder(t *testing.T) {
	if os.Geteuid() == 0 || runtime.GOOS == "windows" {
		t.Skip("this user may write anywhere")
	}
	dir := t.TempDir()
	path := filepath.Join(dir, "s.db")
	if err := must(Create(t.Context(), path, testSolver)).Close(); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		path string
		mode os.FileMode
	}{{path, 0o444}, {dir, 0o555}} {
		if err := os.Chmod(c.path, c.mode); err != nil {
			t.Fatal(err)
		}
	}
	t.Cleanup(func() { os.Chmod(dir, 0o755) })
	s, err := Open(t.Context(), path, testSolver)
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	if err := s.View(t.Context(), func(*Snapshot) error { return nil }); !errors.Is(err, ErrEmpty) {
		t.Errorf("View = %v, want ErrEmpty", err)
	}
}

// Several processes, here handles, may make one store at the same time.
func TestCreateAtTheSameTime(t *testing.T) {
	for range 20 {
		path := filepath.Join(t.TempDir(), "s.db")
		var group errgroup.Group
		for range 4 {
			group.Go(func() error {
				s, err := Create(t.Context(), path, testSolver)
				if err != nil {
					return err
				}
				return s.Close()
			})
		}
		if err := group.Wait(); err != nil {
			t.Fatal(err)
		}
	}
}

// A store that this program could not use is left as it is, for the program that
// can.
func TestAnotherSolversStoreIsNotMigrated(t *testing.T) {
	path := filepath.Join(t.TempDir(), "s.db")
	s := must(Create(t.Context(), path, testSolver))
	err := s.Update(t.Context(), func(tx *Tx) error {
		_, err := tx.PutGeneration(t.Context(), Recipe{Name: "as-delivered", Steps: "[]"}, testGrid, testSolver)
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	// As if the last step were not there yet; it would fail if it were applied.
	if _, err := s.write.Exec(`DELETE FROM schema_step WHERE number > 1`); err != nil {
		t.Fatal(err)
	}
	s.Close()
	for name, open := range map[string]func(context.Context, string, string) (*Store, error){"Open": Open, "Create": Create} {
		if _, err := open(t.Context(), path, "solver 2"); !errors.Is(err, ErrOtherGeneration) {
			t.Errorf("%s: %v, want %v", name, err, ErrOtherGeneration)
		}
	}
}

// The migration that came with the version of the steps wrote the canonical form of the one
// recipe that has none, with its hash.
func TestAsDeliveredIsWhatTheMigrationWrote(t *testing.T) {
	step, err := migrations.FS.ReadFile("00009_renew_recipes_for_arrivals.sql")
	if err != nil {
		t.Fatal(err)
	}
	r := Recipe{Name: "as-delivered", Steps: condition.AsDelivered().Canonical()}
	if !strings.Contains(string(step), "steps = '"+r.Steps+"', hash = '"+r.Hash()+"'") {
		t.Errorf("the migration does not write %s with hash %s", r.Steps, r.Hash())
	}
}

// A disk that is full is told as that, once, however many have a hand in the message. SQLite
// says the same of a file that has reached its bound.
func TestFullIsSaidOnce(t *testing.T) {
	s := newStore(t)
	err := s.Update(t.Context(), func(tx *Tx) error {
		if err := tx.exec(t.Context(), `PRAGMA max_page_count = 1`); err != nil { // as many as there are
			return err
		}
		return explain(tx.exec(t.Context(), `CREATE TABLE more AS SELECT randomblob(1 << 20)`))
	})
	if !errors.Is(err, ErrFull) {
		t.Fatalf("%v, want ErrFull", err)
	}
	if text := fmt.Errorf("twice: %w", explain(err)).Error(); strings.Count(text, ErrFull.Error()) != 1 || !strings.Contains(text, s.Path()) {
		t.Errorf("%q, want the store and %q once", text, ErrFull)
	}
}
