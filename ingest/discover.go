package ingest

import (
	"cmp"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path"
	"path/filepath"
	"slices"
	"strings"

	"swaybook/ingest/archive"
)

// MaxFileSize is the largest file that is read, in bytes. A channel of an hour
// at 200 Hz takes a hundredth of it.
const MaxFileSize = 256 << 20

// Found is one file that Discover lists, or a folder that it could not list.
type Found struct {
	Path string // as it can be opened
	Rel  string // relative to the path given, with slashes; the base name of a file given itself
	Err  error  // why a folder, or the target of a link, could not be read
	// IsFolder says that it is a folder, of which some or all could not be listed.
	IsFolder bool
}

// Member is the member of that name in the file, an archive. Its paths can not be
// opened; they say where it lies.
func (f Found) Member(name string) Found {
	return Found{Path: archive.Join(f.Path, name), Rel: archive.Join(f.Rel, name)}
}

// Discover lists the files at paths and in all folders below them, sorted by
// path and without duplicates, so that neither the order of the arguments nor
// one inside another matters. It opens no files.
//
// Links to files are files; links to folders are followed once all other folders
// are listed, and no folder is listed twice, so that a loop ends. Inside a
// folder, hidden folders and what is neither file nor folder are passed over. A
// path that does not exist is an error; a folder or link that cannot be read is
// listed with its cause.
func Discover(paths []string) ([]Found, error) {
	roots := slices.Clone(paths)
	for i, p := range roots {
		if p == "" {
			return nil, errors.New("find records: empty path")
		}
		roots[i] = filepath.Clean(p)
	}
	slices.Sort(roots)
	w := walker{listed: map[string]bool{}}
	for _, root := range slices.Compact(roots) {
		info, err := os.Stat(root)
		switch {
		case err != nil:
			return nil, fmt.Errorf("find records: %w", err)
		case info.IsDir():
			w.folder(root, "")
		case info.Mode().IsRegular():
			w.found = append(w.found, Found{Path: root, Rel: filepath.Base(root)})
		default:
			return nil, fmt.Errorf("find records: %s is neither a file nor a folder", root)
		}
	}
	for len(w.links) > 0 {
		link := w.links[0]
		w.links = w.links[1:]
		w.folder(link.Path, link.Rel)
	}
	return w.sorted(), nil
}

// walker lists folders.
type walker struct {
	found  []Found
	links  []Found         // links to folders, not yet followed
	listed map[string]bool // folders by real path
}

// sorted returns what was found by path. Of two equal paths the one with the
// longer relative path stays: the file was found in a folder and also given
// itself, or one folder was given inside another.
func (w *walker) sorted() []Found {
	slices.SortStableFunc(w.found, func(a, b Found) int {
		return cmp.Or(cmp.Compare(a.Path, b.Path), cmp.Compare(len(b.Rel), len(a.Rel)))
	})
	return slices.CompactFunc(w.found, func(a, b Found) bool { return a.Path == b.Path })
}

// folder lists one folder and those below it.
func (w *walker) folder(dir, rel string) {
	physical, err := filepath.EvalSymlinks(dir)
	if err == nil {
		physical, err = filepath.Abs(physical)
	}
	if err != nil {
		w.found = append(w.found, Found{Path: dir, Rel: rel, Err: err, IsFolder: true})
		return
	}
	if w.listed[physical] {
		return
	}
	w.listed[physical] = true
	entries, err := os.ReadDir(dir)
	if err != nil {
		w.found = append(w.found, Found{Path: dir, Rel: rel, Err: fmt.Errorf("list folder: %w", cause(err)), IsFolder: true})
	}
	for _, e := range entries { // what could be read before an error, too
		w.entry(filepath.Join(dir, e.Name()), path.Join(rel, e.Name()), e)
	}
}

func (w *walker) entry(at, rel string, e fs.DirEntry) {
	switch {
	case e.IsDir():
		if !strings.HasPrefix(e.Name(), ".") {
			w.folder(at, rel)
		}
	case e.Type().IsRegular():
		w.found = append(w.found, Found{Path: at, Rel: rel})
	case e.Type()&fs.ModeSymlink != 0:
		w.link(Found{Path: at, Rel: rel})
	}
}

func (w *walker) link(f Found) {
	info, err := os.Stat(f.Path)
	switch {
	case err != nil:
		f.Err = fmt.Errorf("follow link: %w", cause(err))
		w.found = append(w.found, f)
	case info.IsDir():
		w.links = append(w.links, f)
	case info.Mode().IsRegular():
		w.found = append(w.found, f)
	}
}

// cause returns what is behind an error of the file system, without the path,
// which the caller names itself.
func cause(err error) error {
	if pe, ok := errors.AsType[*fs.PathError](err); ok {
		return pe.Err
	}
	return err
}

// Read returns the content of the file and its description as of the reading.
// Files beyond MaxFileSize are refused. An error is a *ParseError with its Path
// set, or, of a database beyond that, as stores come to be, a *NotMotionError.
func Read(file string) ([]byte, fs.FileInfo, error) { return readLimited(file, MaxFileSize) }

func readLimited(file string, limit int64) ([]byte, fs.FileInfo, error) {
	f, err := os.Open(file)
	if err != nil {
		return nil, nil, &ParseError{Path: file, Err: fmt.Errorf("open: %w", cause(err))}
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return nil, nil, &ParseError{Path: file, Err: fmt.Errorf("describe: %w", cause(err))}
	}
	if !info.Mode().IsRegular() {
		return nil, nil, &ParseError{Path: file, Err: errors.New("not a regular file")}
	}
	if info.Size() > limit {
		head := make([]byte, len(DatabaseMark))
		if _, err := io.ReadFull(f, head); err == nil && string(head) == DatabaseMark {
			return nil, nil, errDatabase
		}
		return nil, nil, &ParseError{Path: file, Err: fmt.Errorf("file of %d bytes is larger than the limit of %d", info.Size(), limit)}
	}
	data := make([]byte, info.Size()+1) // room to notice that the file grows
	n, err := io.ReadFull(f, data)
	switch {
	case err == nil:
		return nil, nil, &ParseError{Path: file, Err: errors.New("the file grew while it was read")}
	case err != io.ErrUnexpectedEOF && err != io.EOF:
		return nil, nil, &ParseError{Path: file, Err: fmt.Errorf("read: %w", cause(err))}
	case int64(n) < info.Size():
		return nil, nil, &ParseError{Path: file, Err: errors.New("the file shrank while it was read")}
	}
	return data[:n], info, nil
}

// IsArchive reports whether a file is an archive, by its content. What cannot be read is
// none.
func IsArchive(file string) bool {
	f, err := os.Open(file)
	if err != nil {
		return false
	}
	defer f.Close()
	return archive.Begins(f)
}
