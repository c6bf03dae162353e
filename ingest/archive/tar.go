package archive

import (
	"archive/tar"
	"errors"
	"io"
	"strings"
)

// tar reads the members as they lie. What is damaged ends the archive, since
// nothing tells where the next member begins.
func (w *walk) tar(label string, r io.Reader, depth int) error {
	blocks := &tarBlocks{r: r}
	archive := tar.NewReader(blocks)
	last := ""
	for {
		blocks.zeros = 0
		h, err := archive.Next()
		switch {
		case err == io.EOF:
			return blocks.end()
		case err != nil && last == "":
			return err
		case err != nil:
			return at(last, errors.New("behind it: "+inWords(err).Error()))
		}
		last = h.Name
		if !isTarFile(h) {
			continue
		}
		if err := w.entry(label, tarEntry(h, archive), depth); err != nil {
			if w.ended != nil {
				return w.ended
			}
			return at(h.Name, err)
		}
	}
}

// isTarFile reports whether the header is that of a file or a link.
func isTarFile(h *tar.Header) bool {
	switch h.Typeflag {
	case tar.TypeReg, tar.TypeCont, tar.TypeGNUSparse, tar.TypeLink, tar.TypeSymlink:
		return true
	}
	return false
}

func tarEntry(h *tar.Header, content io.Reader) entry {
	e := entry{name: h.Name, size: h.Size, open: func() (io.Reader, error) { return content, nil }}
	if h.ModTime.Unix() > 0 {
		e.modified = h.ModTime
	}
	switch {
	case h.Typeflag == tar.TypeLink || h.Typeflag == tar.TypeSymlink:
		e.skip = "a link to " + clean(h.Linkname)
	case isSparse(h):
		// Their holes are bytes that no byte of the file stands for.
		e.refused = "stored as a sparse file, which is not read: unpack it"
	}
	return e
}

func isSparse(h *tar.Header) bool {
	if h.Typeflag == tar.TypeGNUSparse {
		return true
	}
	for key := range h.PAXRecords {
		if strings.HasPrefix(key, "GNU.sparse.") {
			return true
		}
	}
	return false
}

// tarBlocks passes on the bytes of a tar archive and counts the zeros that they
// end in. Two blocks of zeros are the end mark; the library takes the end of the
// file for it as well.
type tarBlocks struct {
	r     io.Reader
	zeros int // up to here, since it was set to 0
}

func (t *tarBlocks) Read(p []byte) (int, error) {
	n, err := t.r.Read(p)
	i := n
	for i > 0 && p[i-1] == 0 {
		i--
	}
	if i > 0 {
		t.zeros = 0
	}
	t.zeros += n - i
	return n, err
}

// Seek lets the library pass over members that nobody reads; where the bytes come
// from a decompressor it reads them after the error.
func (t *tarBlocks) Seek(offset int64, whence int) (int64, error) {
	s, ok := t.r.(io.Seeker)
	if !ok {
		return 0, errors.ErrUnsupported
	}
	t.zeros = 0
	return s.Seek(offset, whence)
}

// end looks whether the archive had its end mark, and reads what follows: nothing
// but zeros may, up to the end of the file, where a compressor has its checksum.
func (t *tarBlocks) end() error {
	if t.zeros < blockSize {
		return errors.New("ends without an end mark: truncated?")
	}
	buffer := make([]byte, 64*blockSize)
	for {
		t.zeros = 0
		n, err := t.Read(buffer)
		switch {
		case t.zeros < n:
			return errors.New("bytes behind the end mark: archives that were joined? What follows is not read")
		case err == io.EOF:
			return nil
		case err != nil:
			return err
		}
	}
}
