package beside

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"slices"
	"strings"
	"syscall"
)

// ErrNotEmpty is of a folder in which something is that may not be replaced.
var ErrNotEmpty = errors.New("the folder is not empty")

// LeftError says that a folder is written, whole and in its place, and that a hidden one, with
// what was there before, could not be removed.
type LeftError struct {
	Folder string // the hidden one
	Err    error
}

func (e *LeftError) Error() string { return fmt.Sprintf("%s is left: %v", e.Folder, e.Err) }

// Unwrap returns the cause.
func (e *LeftError) Unwrap() error { return e.Err }

// WriteFolder has fill write a folder's files into a hidden one, and has them take their places
// when all is on the disk: they are there whole, or all is as it was.
//
// A folder that is there and empty stays the one that it is, be it a mount point or the one that
// is worked in: the hidden one lies in it, and what is in that moves up. Otherwise the hidden one
// lies beside it and takes the name; the folder around it must be there. Where files are in the
// folder, mayReplace says of each whether it may be replaced, by its path in the folder, or why
// not; nil replaces nothing, and the error wraps ErrNotEmpty. Before fill begins it is found out
// whether the folder can be replaced.
//
// An error of fill is returned as it is, and a LeftError where nothing else went wrong. Until
// files take their places the context stops it, with nothing done. A process that is killed leaves
// the hidden folder: in a folder it counts as nothing. Killed while files move up, it leaves some
// of them.
func WriteFolder(ctx context.Context, path string, mayReplace func(path string, e fs.DirEntry) error, fill func(folder string) error) error {
	var errFill error
	err := writeFolder(ctx, path, mayReplace, func(folder string) error {
		errFill = fill(folder)
		return errFill
	})
	if _, isLeft := errors.AsType[*LeftError](err); err == nil || errFill != nil || isLeft {
		return err
	}
	return fmt.Errorf("write %s: %w", path, err)
}

func writeFolder(ctx context.Context, path string, mayReplace func(string, fs.DirEntry) error, fill func(string) error) error {
	name, err := folderName(path)
	if err != nil {
		return err
	}
	is, err := look(name)
	switch {
	case err != nil:
		return err
	case is == emptyFolder:
		return fillEmpty(ctx, name, fill)
	}
	return replaceFolder(ctx, name, mayReplace, fill)
}

// What may stand where a folder shall be.
const (
	nothing = iota
	emptyFolder
	fullFolder
)

// look tells which of them does.
func look(name string) (is int, err error) {
	entries, err := os.ReadDir(name)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nothing, nil
	case err != nil:
		if info, errInfo := os.Stat(name); errInfo == nil && !info.IsDir() {
			return nothing, errors.New("what is there is no folder")
		}
		return nothing, err
	case slices.ContainsFunc(entries, func(e fs.DirEntry) bool { return !isLeft(e) }):
		return fullFolder, nil
	}
	return emptyFolder, nil
}

// hiddenInside names the hidden folder in one that is filled; the system adds digits.
const hiddenInside = ".part-"

// isLeft reports whether an entry of a folder is a hidden one, of a process that was killed or
// is at work.
func isLeft(e fs.DirEntry) bool {
	digits, ok := strings.CutPrefix(e.Name(), hiddenInside)
	return ok && e.IsDir() && digits != "" && strings.Trim(digits, "0123456789") == ""
}

// fillEmpty writes into an empty folder.
func fillEmpty(ctx context.Context, name string, fill func(string) error) (err error) {
	hidden, err := os.MkdirTemp(name, hiddenInside+"*")
	if err != nil {
		return err
	}
	defer func() { err = cleared(err, hidden, os.RemoveAll(hidden)) }()
	if err := fill(hidden); err != nil {
		return err
	}
	if err := settle(ctx, hidden); err != nil {
		return err
	}
	is, err := look(name)
	if err == nil && is == fullFolder { // something came meanwhile
		err = ErrNotEmpty
	}
	if err != nil {
		return err
	}
	return moveUp(hidden, name)
}

// moveUp has what is in the hidden folder move into the one around it. Where something cannot,
// all is as before.
func moveUp(hidden, name string) error {
	entries, err := os.ReadDir(hidden)
	if err != nil {
		return err
	}
	for i, e := range entries {
		if err := os.Rename(filepath.Join(hidden, e.Name()), filepath.Join(name, e.Name())); err != nil {
			for _, e := range entries[:i] {
				err = errors.Join(err, os.Rename(filepath.Join(name, e.Name()), filepath.Join(hidden, e.Name())))
			}
			return err
		}
	}
	settleNames(name)
	return nil
}

// replaceFolder writes a folder that takes the name.
func replaceFolder(ctx context.Context, name string, mayReplace func(string, fs.DirEntry) error, fill func(string) error) (err error) {
	if err := checkReplace(name, mayReplace); err != nil {
		return err
	}
	hidden, err := makeBeside(name)
	if err != nil {
		return err
	}
	part, before := filepath.Join(hidden, "new"), filepath.Join(hidden, "before")
	defer func() {
		if err == nil {
			err = cleared(nil, hidden, os.RemoveAll(hidden))
			return
		}
		// The second is not empty where what was there could not be put back.
		err = errors.Join(err, os.RemoveAll(part), os.Remove(hidden))
	}()
	if err := os.Mkdir(part, 0o777); err != nil {
		return err
	}
	if err := fill(part); err != nil {
		return err
	}
	if err := settle(ctx, part); err != nil {
		return err
	}
	if err := checkReplace(name, mayReplace); err != nil { // it may have come meanwhile
		return err
	}
	if info, err := os.Stat(name); err == nil {
		if err := os.Chmod(part, info.Mode().Perm()); err != nil {
			return err
		}
	}
	return exchange(part, name, before)
}

// cleared is the error of a folder whose hidden one was removed, or why not.
func cleared(err error, hidden string, errRemove error) error {
	if err == nil && errRemove != nil {
		return &LeftError{hidden, errRemove}
	}
	return errors.Join(err, errRemove)
}

// makeBeside makes the hidden folder beside what is there, which must be such that it can be
// moved into that.
func makeBeside(name string) (hidden string, err error) {
	hidden, err = os.MkdirTemp(filepath.Dir(name), "."+filepath.Base(name)+".part-*")
	info, errThere := os.Stat(name)
	if errThere != nil {
		return hidden, err // nothing is there
	}
	if err == nil {
		if err = checkMovable(name, info, hidden); err == nil {
			return hidden, nil
		}
		err = errors.Join(err, os.Remove(hidden))
	}
	return "", fmt.Errorf("it cannot be replaced by another folder: %w; once it is empty it will be filled instead", err)
}

// checkMovable returns why a folder cannot be moved into another, without moving it: the place it
// would go to is taken, which a system finds after all other reasons.
func checkMovable(name string, info fs.FileInfo, into string) error {
	switch {
	case isWorkedIn(info):
		return errors.New("it is the current directory, or holds it")
	case runtime.GOOS == "windows": // has the same error for what is taken and what may not be
		return nil
	}
	taken := filepath.Join(into, "taken")
	if err := os.MkdirAll(filepath.Join(taken, "by"), 0o777); err != nil {
		return err
	}
	err := syscall.Rename(name, taken) // os.Rename would not ask the system
	switch {
	case err == nil: // it has been moved, which no system should do
		return errors.Join(errors.New("the system moves folders in the place of others"), syscall.Rename(taken, name))
	case errors.Is(err, fs.ErrExist):
		err = nil
	case errors.Is(err, syscall.EBUSY):
		err = fmt.Errorf("it is a mount point (%w)", err)
	}
	return errors.Join(err, os.RemoveAll(taken))
}

// isWorkedIn reports whether a folder is the current directory or around it.
func isWorkedIn(info fs.FileInfo) bool {
	here, err := os.Getwd()
	if err == nil {
		here, err = filepath.EvalSymlinks(here)
	}
	for above := ""; err == nil && here != above; above, here = here, filepath.Dir(here) {
		if at, err := os.Stat(here); err == nil && os.SameFile(at, info) {
			return true
		}
	}
	return false
}

// folderName is what a path names, behind links, which must lead to something.
func folderName(path string) (string, error) {
	name, err := filepath.EvalSymlinks(path)
	if errors.Is(err, fs.ErrNotExist) {
		name, err = filepath.Clean(path), nil
		if to, errLink := os.Readlink(name); errLink == nil {
			return "", fmt.Errorf("it is a link to %s, and nothing is there", to)
		}
	}
	if err != nil {
		return "", err
	}
	return filepath.Abs(name)
}

// checkReplace returns why what is there may not be replaced, nil where nothing is.
func checkReplace(name string, mayReplace func(string, fs.DirEntry) error) error {
	is, err := look(name)
	switch {
	case err != nil || is != fullFolder:
		return err
	case mayReplace == nil:
		return ErrNotEmpty
	}
	return filepath.WalkDir(name, func(path string, e fs.DirEntry, err error) error {
		switch {
		case err != nil:
			return err
		case e.IsDir() && isLeft(e) && filepath.Dir(path) == name:
			return fs.SkipDir
		case e.IsDir():
			return nil
		}
		if path, err = filepath.Rel(name, path); err != nil {
			return err
		}
		return mayReplace(path, e)
	})
}

// settle waits until all that is in the folder is on the disk, which takes long where much is.
func settle(ctx context.Context, folder string) error {
	return filepath.WalkDir(folder, func(path string, e fs.DirEntry, err error) error {
		if err := errors.Join(err, ctx.Err()); err != nil {
			return err
		}
		if e.IsDir() {
			settleNames(path)
			return nil
		}
		f, err := os.OpenFile(path, os.O_RDWR, 0)
		if err != nil {
			return err
		}
		return errors.Join(f.Sync(), f.Close())
	})
}

// settleNames waits until the names in the folder are on the disk, where the system can.
func settleNames(folder string) {
	if d, err := os.Open(folder); err == nil {
		d.Sync()
		d.Close()
	}
}

// exchange has the folder take the name, and what was there another. Where it cannot, all is as
// before.
func exchange(part, name, before string) error {
	err := os.Rename(name, before)
	isThere := err == nil
	if err != nil && !errors.Is(err, fs.ErrNotExist) {
		return err
	}
	if err := os.Rename(part, name); err != nil {
		if isThere {
			err = errors.Join(err, os.Rename(before, name))
		}
		return err
	}
	settleNames(filepath.Dir(name))
	return nil
}
