// Package beside writes files beside those that they replace, and has them take their
// names together: what reads them sees each whole, old or new, and a failure leaves all as
// they were.
package beside

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
)

// Set is files that take their names together. The zero Set has none. A process that is
// killed leaves hidden files beside them, which the next Set that has the same files
// removes; two Sets may not have the same files at once.
type Set struct{ files []*file }

// file is one file of a Set. Its name is where the content goes, behind links.
type file struct {
	name    string
	isGone  bool // shall be there no longer
	isSame  bool // shall hold what it holds
	isThere bool // something was, before Swap
	isDone  bool // Swap has been at it
}

func (f *file) beside(what string) string {
	return filepath.Join(filepath.Dir(f.name), "."+filepath.Base(f.name)+"."+what)
}
func (f *file) part() string   { return f.beside("part") }
func (f *file) before() string { return f.beside("before") }

// WriteFile writes one file whole, or leaves it as it is.
func WriteFile(path string, fill func(io.Writer) error) error {
	var s Set
	err := s.Write(path, fill)
	if err == nil {
		err = s.Swap()
	}
	return errors.Join(err, s.Close())
}

// Write has fill write what a file shall hold, and waits until it is on the disk. Folders
// that are missing are made. The mode of a file that is there stays; one that holds just that
// already is left alone.
func (s *Set) Write(path string, fill func(io.Writer) error) error {
	f, err := newFile(path)
	if err == nil {
		s.files = append(s.files, f)
		err = f.write(fill)
	}
	if err == nil {
		f.isSame, err = isEqual(f.part(), f.name)
	}
	if err != nil {
		return fmt.Errorf("write %s: %w", path, err)
	}
	return nil
}

// isEqual reports whether two files hold the same; the other need not be there.
func isEqual(name, other string) (bool, error) {
	a, err := os.Open(name)
	if err != nil {
		return false, err
	}
	defer a.Close()
	b, err := os.Open(other)
	if err != nil {
		return false, nil // it is written anew, or says itself why it cannot be
	}
	defer b.Close()
	infoA, errA := a.Stat()
	infoB, errB := b.Stat()
	if errA != nil || errB != nil || infoA.Size() != infoB.Size() || !infoB.Mode().IsRegular() {
		return false, nil
	}
	readerA, readerB := bufio.NewReader(a), bufio.NewReader(b)
	for {
		x, err := readerA.ReadByte()
		y, errB := readerB.ReadByte()
		if errors.Is(err, io.EOF) && errors.Is(errB, io.EOF) {
			return true, nil
		}
		if err != nil || errB != nil || x != y {
			return false, nil
		}
	}
}

// Remove has a file be there no longer, if it is.
func (s *Set) Remove(path string) error {
	f, err := newFile(path)
	if err != nil {
		return fmt.Errorf("remove %s: %w", path, err)
	}
	f.isGone = true
	s.files = append(s.files, f)
	return nil
}

func newFile(path string) (*file, error) {
	name, err := filepath.EvalSymlinks(path)
	if errors.Is(err, fs.ErrNotExist) {
		name, err = path, nil
	}
	f := &file{name: name}
	return f, errors.Join(err, f.clear())
}

// clear removes what stands beside the file.
func (f *file) clear() error {
	var errs []error
	for _, name := range []string{f.part(), f.before()} {
		if err := os.Remove(name); !errors.Is(err, fs.ErrNotExist) {
			errs = append(errs, err) // or nil
		}
	}
	return errors.Join(errs...)
}

func (f *file) write(fill func(io.Writer) error) (err error) {
	if err := os.MkdirAll(filepath.Dir(f.name), 0o777); err != nil {
		return err
	}
	out, err := os.OpenFile(f.part(), os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, out.Close()) }()
	if info, err := os.Stat(f.name); err == nil {
		if err := out.Chmod(info.Mode().Perm()); err != nil {
			return err
		}
	}
	w := bufio.NewWriterSize(out, 1<<16)
	if err = fill(w); err == nil {
		err = w.Flush()
	}
	if err == nil {
		err = out.Sync()
	}
	return err
}

// Swap has all files take their names. Where one cannot, all are as before.
func (s *Set) Swap() error {
	for _, f := range s.files {
		if err := f.swap(); err != nil {
			return errors.Join(fmt.Errorf("put %s in its place: %w", f.name, err), s.Undo())
		}
	}
	s.sync()
	return nil
}

func (f *file) swap() error {
	if f.isSame {
		return nil
	}
	err := f.save()
	if err != nil {
		return err
	}
	f.isDone = true
	switch {
	case !f.isGone:
		return os.Rename(f.part(), f.name)
	case f.isThere:
		return os.Remove(f.name)
	}
	return nil
}

// save keeps what is there, beside it.
func (f *file) save() error {
	info, err := os.Lstat(f.name)
	if errors.Is(err, fs.ErrNotExist) {
		return nil
	}
	if err != nil {
		return err
	}
	if !info.Mode().IsRegular() {
		return errors.New("what is there is no file")
	}
	f.isThere = true
	if os.Link(f.name, f.before()) == nil {
		return nil
	}
	return copyFile(f.name, f.before(), info.Mode().Perm()) // not every file system has links
}

func copyFile(from, to string, mode fs.FileMode) (err error) {
	in, err := os.Open(from)
	if err != nil {
		return err
	}
	defer in.Close()
	out, err := os.OpenFile(to, os.O_WRONLY|os.O_CREATE|os.O_EXCL, mode)
	if err != nil {
		return err
	}
	_, err = io.Copy(out, in)
	return errors.Join(err, out.Sync(), out.Close())
}

// Undo has all files that Swap has been at be as they were.
func (s *Set) Undo() error {
	var errs []error
	for _, f := range s.files {
		if !f.isDone {
			continue
		}
		f.isDone = false
		if f.isThere {
			errs = append(errs, os.Rename(f.before(), f.name))
		} else if err := os.Remove(f.name); !errors.Is(err, fs.ErrNotExist) {
			errs = append(errs, err)
		}
	}
	s.sync()
	return errors.Join(errs...)
}

// Close removes what stands beside the files.
func (s *Set) Close() error {
	var errs []error
	for _, f := range s.files {
		errs = append(errs, f.clear())
	}
	s.files = nil
	return errors.Join(errs...)
}

// sync waits until the files' names are on the disk, where the system can tell.
func (s *Set) sync() {
	seen := map[string]bool{}
	for _, f := range s.files {
		dir := filepath.Dir(f.name)
		if seen[dir] {
			continue
		}
		seen[dir] = true
		settleNames(dir)
	}
}
