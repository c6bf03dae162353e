package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"

	"modernc.org/sqlite"
	sqlite3 "modernc.org/sqlite/lib"
)

// Backup copies the store at path to file, while others may write to it, and returns the
// size of the copy: the store as it was, whole, between two transactions. A store of another
// solver or another schema is copied as it is. The copy is made beside the file and takes its
// name when it is whole and on the disk; where something has that name already, which the
// error wraps fs.ErrExist for, only if it may be replaced.
func Backup(ctx context.Context, path, file string, replace bool) (size int64, err error) {
	size, err = backup(ctx, path, file, replace)
	if err != nil {
		return 0, fmt.Errorf("back up store %s to %s: %w", path, file, explain(err))
	}
	return size, nil
}

func backup(ctx context.Context, path, file string, replace bool) (int64, error) {
	source, err := os.Stat(path)
	if errors.Is(err, fs.ErrNotExist) || err == nil && source.Size() == 0 {
		return 0, ErrNoStore
	}
	if err != nil {
		return 0, err
	}
	if err := refuseTarget(path, file, replace); err != nil {
		return 0, err
	}
	part, err := makePart(file, source.Mode().Perm())
	if err != nil {
		return 0, err
	}
	size, err := fillPart(ctx, path, part)
	if err == nil {
		err = refuseTarget(path, file, replace) // it may have come meanwhile
	}
	if err == nil {
		err = os.Rename(part, file)
	}
	if err != nil {
		return 0, errors.Join(err, removePart(part))
	}
	syncFolder(filepath.Dir(file))
	return size, nil
}

// refuseTarget returns why the copy may not have this name.
func refuseTarget(path, file string, replace bool) error {
	for own, what := range Files(path) {
		if IsSameFile(own, file) {
			return fmt.Errorf("that is %s", what)
		}
	}
	// SQLite would take a log that lies there for the copy's own.
	for _, suffix := range logSuffixes {
		if _, err := os.Lstat(file + suffix); err == nil {
			return fmt.Errorf("the log %s stands beside it, of a store that is in use or was when its program ended; choose another name, or open that store once", file+suffix)
		}
	}
	info, err := os.Lstat(file)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil
	case err != nil:
		return err
	case !info.Mode().IsRegular():
		return errors.New("that is no regular file")
	case !replace:
		return fs.ErrExist
	}
	return nil
}

// IsSameFile reports whether two paths name one file, which need not be there.
func IsSameFile(a, b string) bool {
	infoA, errA := os.Stat(a)
	infoB, errB := os.Stat(b)
	if errA == nil && errB == nil {
		return os.SameFile(infoA, infoB)
	}
	realA, errA := resolve(a)
	realB, errB := resolve(b)
	return errA == nil && errB == nil && realA == realB
}

// makePart makes the file that the copy is made in.
func makePart(file string, mode fs.FileMode) (string, error) {
	f, err := os.CreateTemp(filepath.Dir(file), filepath.Base(file)+".part-*")
	if err != nil {
		return "", err
	}
	if err := errors.Join(f.Chmod(mode), f.Close()); err != nil {
		return "", errors.Join(err, removePart(f.Name()))
	}
	return f.Name(), nil
}

func removePart(part string) error {
	var errs []error
	for _, suffix := range append([]string{""}, logSuffixes...) {
		if err := os.Remove(part + suffix); !errors.Is(err, fs.ErrNotExist) {
			errs = append(errs, err)
		}
	}
	return errors.Join(errs...)
}

// fillPart copies the store and waits until the copy is on the disk.
func fillPart(ctx context.Context, path, part string) (int64, error) {
	err := copyPages(ctx, dsn(path, "rw", busyTimeoutMS, "_pragma=query_only(1)"), part)
	if isReadOnly(err) && !hasLog(path) {
		err = copyPages(ctx, dsn(path, "ro", busyTimeoutMS, frozen), part)
	}
	if err != nil {
		return 0, err
	}
	f, err := os.OpenFile(part, os.O_RDWR, 0)
	if err != nil {
		return 0, err
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return 0, err
	}
	return info.Size(), f.Sync()
}

// copier is what the driver's connection can do beside that of every database.
type copier interface {
	NewBackup(to string) (*sqlite.Backup, error)
}

// copyPages copies the store as one transaction reads it.
func copyPages(ctx context.Context, source, part string) error {
	handle, err := sql.Open("sqlite", source)
	if err != nil {
		return err
	}
	defer handle.Close()
	conn, err := handle.Conn(ctx)
	if err != nil {
		return err
	}
	defer conn.Close()
	// The pages are read within this transaction: without it every batch that another
	// process writes would begin the copy anew.
	tx, err := conn.BeginTx(ctx, nil)
	if err != nil {
		return err
	}
	defer tx.Rollback()
	if err := claimable(ctx, tx); err != nil {
		return err
	}
	return conn.Raw(func(driver any) error { return stepThrough(ctx, driver.(copier), part) })
}

// stepPages are copied between two looks at the context: 1 MB.
const stepPages = 256

func stepThrough(ctx context.Context, from copier, part string) error {
	// The whole copy is synchronised once, at the end.
	b, err := from.NewBackup(dsn(part, "rw", 0, "_pragma=synchronous(off)"))
	if err != nil {
		return err
	}
	for more := true; more && err == nil; {
		if more, err = b.Step(stepPages); err == nil {
			err = ctx.Err()
		}
	}
	if errFinish := b.Finish(); err == nil {
		err = errFinish // else it says the same again
	}
	return explainDisk(err)
}

// explainDisk says in words what is the matter with the disk: of an error in the copy the
// driver gives the number, and the text of the last error in the store.
func explainDisk(err error) error {
	switch codeOf(err) {
	case sqlite3.SQLITE_FULL:
		return ErrFull
	case sqlite3.SQLITE_IOERR:
		return fmt.Errorf("the store cannot be read or the copy cannot be written: %w", err)
	}
	return err
}

// syncFolder waits until the names in the folder are on the disk, where the system can do
// that: Windows cannot, nor can some file systems. What is in the file is on the disk before.
func syncFolder(folder string) {
	if f, err := os.Open(folder); err == nil {
		f.Sync()
		f.Close()
	}
}
