package archive

import (
	"archive/zip"
	"cmp"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"slices"
	"strings"
)

// zip reads the members in the order of their names. Each can be reached by
// itself, so damage in one costs no other.
func (w *walk) zip(label string, file *io.SectionReader, depth int) error {
	directory := &metered{at: file, left: w.limits.Directory}
	archive, err := zip.NewReader(directory, file.Size())
	if errors.Is(err, zip.ErrFormat) {
		return errors.New("no directory at the end of the zip archive: truncated?")
	}
	if err != nil {
		return err
	}
	directory.open = true
	files := archive.File
	if slices.ContainsFunc(files, func(f *zip.File) bool { return f.Name == officeMark }) {
		return w.give(Member{Name: label, Skipped: "an office document, not a record"}, nil)
	}
	names := make(map[*zip.File]string, len(files))
	for _, f := range files {
		names[f] = clean(f.Name)
	}
	slices.SortStableFunc(files, func(a, b *zip.File) int { return cmp.Compare(names[a], names[b]) })
	for _, f := range files {
		if isFolder(f) || isDevice(f) {
			continue
		}
		if err := w.entry(label, w.zipEntry(f), depth); err != nil {
			if w.ended != nil {
				return w.ended
			}
			if err := w.give(Member{Name: Join(label, names[f])}, inWords(err)); err != nil {
				return err
			}
		}
	}
	return nil
}

// officeMark is in every document of today's office programs, which are zip
// archives of XML.
//
// Source: ECMA-376, part 2, Open Packaging Conventions.
const officeMark = "[Content_Types].xml"

// isFolder takes the slash at the end for a sign too, which some writers put
// backwards.
func isFolder(f *zip.File) bool {
	return f.Mode().IsDir() || strings.HasSuffix(f.Name, "/") || strings.HasSuffix(f.Name, `\`) && f.UncompressedSize64 == 0
}

// isDevice leaves what has content: what was packed out of a pipe is called one.
func isDevice(f *zip.File) bool {
	return f.Mode()&(fs.ModeDevice|fs.ModeNamedPipe|fs.ModeSocket) != 0 && f.UncompressedSize64 == 0
}

// The general purpose bit of an encrypted member.
//
// Source: PKWARE, APPNOTE.TXT, 4.4.4.
const zipEncrypted = 1

func (w *walk) zipEntry(f *zip.File) entry {
	e := entry{name: f.Name, size: int64(min(f.UncompressedSize64, 1<<62)), open: func() (io.Reader, error) {
		r, err := f.Open()
		return expand{w, r}, err
	}}
	if f.Modified.Year() >= 1980 { // the earliest that a zip archive can say
		e.modified = f.Modified
	}
	switch {
	case f.Mode()&fs.ModeSymlink != 0:
		e.skip = "a link"
	case f.Flags&zipEncrypted != 0:
		e.refused = "encrypted: unpack it with its password"
	case f.Method != zip.Store && f.Method != zip.Deflate:
		e.refused = fmt.Sprintf("compressed by method %d, which is not read: unpack it", f.Method)
	}
	return e
}

// metered bounds what is read before it is open: the directory.
type metered struct {
	at   io.ReaderAt
	left int64
	open bool
}

func (m *metered) ReadAt(p []byte, off int64) (int, error) {
	n, err := m.at.ReadAt(p, off)
	if m.open {
		return n, err
	}
	if m.left -= int64(n); m.left < 0 {
		return 0, errors.New("the directory of the zip archive is too long: unpack it")
	}
	return n, err
}
