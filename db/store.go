package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"io/fs"
	"net/url"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"time"

	"modernc.org/sqlite"
	sqlite3 "modernc.org/sqlite/lib"
)

// busyTimeoutMS is how long a connection waits for another process's write
// transaction. Batches take well under a second; half a minute rides out a
// slow disk.
const busyTimeoutMS = 30000

// asideTimeoutMS is how long a writer waits that can as well not write: several batches
// of another process, and no longer than people do.
const asideTimeoutMS = 5000

// Store is an open store. It is safe for concurrent use; writes are one at a
// time.
type Store struct {
	path  string
	write *sql.DB // nil in a store opened for reading
	read  *sql.DB
	aside *sql.DB // keeps what questions computed; nil where that is not possible

	mutex  sync.Mutex
	unkept error // the first by which something was not kept
}

// Create opens the store at path for reading and writing, makes it where there
// is none, and applies the migrations that it lacks; but nothing to a store that
// another version of the solver computed, which the error says, unless AnySolver is given.
func Create(ctx context.Context, path, solver string) (*Store, error) {
	s, err := openWriter(ctx, path, solver)
	if err != nil {
		return nil, fmt.Errorf("open store %s: %w", path, err)
	}
	return s, nil
}

// AnySolver is for who computes anew what another version of the solver computed.
const AnySolver = ""

// MustExist returns an error that wraps ErrNoStore where there is no store at the path.
func MustExist(path string) error {
	if isAbsent(path) {
		return fmt.Errorf("open store %s: %w", path, ErrNoStore)
	}
	return nil
}

// refuseFolder says that a folder is no store, which SQLite would take for a broken disk.
func refuseFolder(path string) error {
	if info, err := os.Stat(path); err == nil && info.IsDir() {
		return errors.New("it is a folder")
	}
	return nil
}

// isAbsent reports whether nothing is at the path, or nothing in the file.
func isAbsent(path string) bool {
	info, err := os.Stat(path)
	return errors.Is(err, fs.ErrNotExist) || err == nil && info.Size() == 0
}

// Open opens the store at path for reading. A store that lacks migrations is
// brought up to date first, as Create does. The error is ErrNoStore where there is
// no file and ErrNewer where a newer program wrote it.
func Open(ctx context.Context, path, solver string) (*Store, error) {
	s, err := openReader(ctx, path, solver)
	if err != nil {
		return nil, fmt.Errorf("open store %s: %w", path, err)
	}
	return s, nil
}

// Close releases the store.
func (s *Store) Close() error {
	var errs []error
	for _, handle := range []*sql.DB{s.write, s.aside, s.read} {
		if handle != nil {
			errs = append(errs, handle.Close())
		}
	}
	return errors.Join(errs...)
}

// Path returns the path under which the store was opened.
func (s *Store) Path() string { return s.path }

// writing are the pragmas of the connection that writes. The pages of a batch need
// not all stay in memory, since those that find no room go to the log at once; 8 MB
// hold the upper levels of the indices.
const writing = "_txlock=immediate&_pragma=cache_size(-8192)"

// A commit that is durable waits until its log is on the disk, on macOS in the drive and
// not in the drive's memory: what a run reports as stored no power cut takes back. One that
// is only whole may be lost, with all of its kind that came later; neither damages the file.
const (
	durable = "&_pragma=synchronous(full)&_pragma=fullfsync(1)&_pragma=checkpoint_fullfsync(1)"
	whole   = "&_pragma=synchronous(normal)"
)

func openWriter(ctx context.Context, path, solver string) (*Store, error) {
	if err := refuseForeign(ctx, path); err != nil {
		return nil, err
	}
	write, err := sql.Open("sqlite", dsn(path, "rwc", busyTimeoutMS, writing+durable))
	if err != nil {
		return nil, err
	}
	write.SetMaxOpenConns(1)
	if err := prepareWriter(ctx, write, solver); err != nil {
		return nil, errors.Join(explain(err), write.Close())
	}
	s, err := openPool(path)
	if err != nil {
		return nil, errors.Join(err, write.Close())
	}
	s.write = write
	return s, nil
}

// refuseForeign looks, without changing it, whether the file at path is another
// program's.
func refuseForeign(ctx context.Context, path string) error {
	if err := refuseFolder(path); err != nil {
		return err
	}
	if info, err := os.Stat(path); err != nil || info.Size() == 0 {
		return nil // a new store
	}
	look, err := sql.Open("sqlite", dsn(path, "ro", busyTimeoutMS, "_pragma=query_only(1)"))
	if err != nil {
		return err
	}
	defer look.Close()
	err = claimable(ctx, look)
	if isReadOnly(err) {
		return nil // a log waits to be read; the writer will look again
	}
	return explain(err)
}

func prepareWriter(ctx context.Context, write *sql.DB, solver string) error {
	mode, err := switchToLog(ctx, write)
	if err != nil {
		return err
	}
	if !strings.EqualFold(mode, "wal") {
		return fmt.Errorf("write-ahead log refused: the journal mode is %q; is the folder on a file system without shared memory?", mode)
	}
	return migrate(ctx, write, solver)
}

// switchToLog asks for the write-ahead log, which the file then keeps, and
// returns the mode that SQLite gave. Of several processes that do so at once on
// a new file all but one are turned away without the busy timeout, so ask again.
func switchToLog(ctx context.Context, write *sql.DB) (mode string, err error) {
	for wait := time.Millisecond; ; wait *= 2 {
		err = write.QueryRowContext(ctx, "PRAGMA journal_mode = wal").Scan(&mode)
		if !isBusy(err) || wait > busyTimeoutMS*time.Millisecond {
			return mode, err
		}
		select {
		case <-ctx.Done():
			return "", ctx.Err()
		case <-time.After(wait):
		}
	}
}

func isBusy(err error) bool { return codeOf(err) == sqlite3.SQLITE_BUSY }

// codeOf returns SQLite's primary result code of an error, 0 where there is
// none.
func codeOf(err error) int {
	if e, ok := errors.AsType[*sqlite.Error](err); ok {
		return e.Code() & 0xff
	}
	return 0
}

func openReader(ctx context.Context, path, solver string) (*Store, error) {
	if err := refuseFolder(path); err != nil {
		return nil, err
	}
	if isAbsent(path) {
		return nil, ErrNoStore
	}
	s, err := openPool(path)
	if err != nil {
		return nil, err
	}
	current, err := isCurrent(ctx, s.read)
	if isReadOnly(err) && !hasLog(path) {
		return openFrozen(ctx, path, s)
	}
	if err != nil {
		return nil, errors.Join(explain(err), s.Close())
	}
	if current {
		return s, nil
	}
	if err := s.Close(); err != nil {
		return nil, err
	}
	return openWriter(ctx, path, solver)
}

// frozen reads a file that nobody writes to.
const frozen = "immutable=1&_pragma=query_only(1)"

// openFrozen opens a store that this process may not write to, nor its folder,
// where the log would be. Nobody is writing to it as long as there is no log.
func openFrozen(ctx context.Context, path string, denied *Store) (*Store, error) {
	if err := denied.Close(); err != nil {
		return nil, err
	}
	read, err := sql.Open("sqlite", dsn(path, "ro", busyTimeoutMS, frozen))
	if err != nil {
		return nil, err
	}
	current, err := isCurrent(ctx, read)
	if err == nil && !current {
		err = errors.New("it was made by an earlier program and has to be brought up to date, but is read-only")
	}
	if err != nil {
		return nil, errors.Join(explain(err), read.Close())
	}
	return &Store{path: path, read: read}, nil
}

// isReadOnly reports whether SQLite could not write where it had to.
func isReadOnly(err error) bool {
	code := codeOf(err)
	return code == sqlite3.SQLITE_READONLY || code == sqlite3.SQLITE_CANTOPEN
}

// hasLog reports whether changes wait in the store's write-ahead log.
func hasLog(path string) bool {
	info, err := os.Stat(path + "-wal")
	return err == nil && info.Size() > 0
}

// openPool opens the connections for reading, and that for what questions keep, which
// is made when it is needed. A question reads most pages once: a cache larger than the
// upper levels of the indices only costs the time to touch its memory, which was a tenth
// of a query over 9000 components with 2 MB and two thirds with 16 MB.
func openPool(path string) (*Store, error) {
	read, err := sql.Open("sqlite", dsn(path, "rw", busyTimeoutMS, "_pragma=query_only(1)&_pragma=cache_size(-400)"))
	if err != nil {
		return nil, err
	}
	aside, err := sql.Open("sqlite", dsn(path, "rw", asideTimeoutMS, writing+whole))
	if err != nil {
		return nil, errors.Join(err, read.Close())
	}
	aside.SetMaxOpenConns(1)
	return &Store{path: path, read: read, aside: aside}, nil
}

// dsn is a file: URI, since a plain path would drop the mode without a word.
// The pragmas of a connection stand in it, so that each of a pool has them; the
// write-ahead log is the file's. No pragma may stand in it twice: the driver sorts them.
func dsn(path, mode string, timeoutMS int, more string) string {
	pragmas := fmt.Sprintf("_pragma=busy_timeout(%d)&_pragma=foreign_keys(1)", timeoutMS)
	u := url.URL{Scheme: "file", Opaque: url.PathEscape(filepath.ToSlash(path))}
	return u.String() + "?mode=" + mode + "&" + pragmas + "&" + more
}

// ErrFull says that there is no room on the disk.
var ErrFull = errors.New("the disk is full")

// explained is an error of the driver's, with our words for it.
type explained struct{ what, err error }

func (e *explained) Error() string   { return e.what.Error() + ": " + e.err.Error() }
func (e *explained) Unwrap() []error { return []error{e.what, e.err} }

// explain turns the driver's words for what people meet into ours, once, however many call it.
func explain(err error) error {
	if err == nil {
		return nil
	}
	if _, isDone := errors.AsType[*explained](err); isDone {
		return err
	}
	if what := meaning(err); what != nil {
		return &explained{what, err}
	}
	return err
}

// meaning is what an error of the driver's means for people, nil where it says it itself.
func meaning(err error) error {
	text := err.Error()
	switch {
	case strings.Contains(text, "file is not a database"):
		return errors.New("the file is not a swaybook store")
	case strings.Contains(text, "unable to open database file"):
		return errors.New("the file or its folder cannot be opened")
	case isBusy(err):
		return errors.New("another process is writing to the store")
	case strings.Contains(text, "readonly database"):
		return errors.New("the file or its folder may not be written to")
	case codeOf(err) == sqlite3.SQLITE_FULL:
		return ErrFull
	case codeOf(err) == sqlite3.SQLITE_CORRUPT:
		return errors.New("the file is damaged, or not all of it is there")
	case codeOf(err) == sqlite3.SQLITE_IOERR:
		return errors.New("the system cannot read or write its files, for want of room or of a sound disk")
	}
	return nil
}
