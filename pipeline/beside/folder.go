package beside

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
)

// WriteFolder has fill write a folder's files into a hidden one beside it, which takes the name
// when all is on the disk: the folder is there whole, or as it was before. Where it is there
// already and not empty, mayReplace says whether it may be replaced, or why not; nil replaces
// nothing, and the error wraps fs.ErrExist. An error of fill is returned as it is. The folder
// around it must be there. A process that is killed leaves the hidden one.
func WriteFolder(path string, mayReplace func(folder string) error, fill func(folder string) error) error {
	name, err := folderName(path)
	if err == nil {
		err = checkReplace(name, mayReplace)
	}
	var hidden string
	if err == nil {
		hidden, err = os.MkdirTemp(filepath.Dir(name), "."+filepath.Base(name)+".part-*")
	}
	if err != nil {
		return fmt.Errorf("write %s: %w", path, err)
	}
	var errFill error
	err = replaceFolder(hidden, name, mayReplace, func(part string) error {
		errFill = fill(part)
		return errFill
	})
	if err == nil || errFill != nil {
		return err
	}
	return fmt.Errorf("write %s: %w", path, err)
}

// replaceFolder writes the folder inside a hidden one, which it removes.
func replaceFolder(hidden, name string, mayReplace, fill func(string) error) (err error) {
	part, before := filepath.Join(hidden, "new"), filepath.Join(hidden, "before")
	defer func() {
		// The second is not empty where what was there could not be put back.
		err = errors.Join(err, os.RemoveAll(part), os.Remove(hidden))
	}()
	if err := os.Mkdir(part, 0o777); err != nil {
		return err
	}
	if err := fill(part); err != nil {
		return err
	}
	if err := settle(part); err != nil {
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

// folderName is what a path names, behind links.
func folderName(path string) (string, error) {
	name, err := filepath.EvalSymlinks(path)
	if errors.Is(err, fs.ErrNotExist) {
		name, err = path, nil
	}
	if err != nil {
		return "", err
	}
	return filepath.Abs(name)
}

// checkReplace returns why what is there may not be replaced, nil where nothing is.
func checkReplace(name string, mayReplace func(string) error) error {
	entries, err := os.ReadDir(name)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil
	case err != nil:
		if info, errInfo := os.Stat(name); errInfo == nil && !info.IsDir() {
			return errors.New("what is there is no folder")
		}
		return err
	case len(entries) == 0:
		return nil
	case mayReplace == nil:
		return fs.ErrExist
	}
	return mayReplace(name)
}

// settle waits until all that is in the folder is on the disk.
func settle(folder string) error {
	return filepath.WalkDir(folder, func(path string, e fs.DirEntry, err error) error {
		if err != nil {
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

// exchange has the folder take the name. Where it cannot, all is as before.
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
	if isThere {
		return os.RemoveAll(before)
	}
	return nil
}
