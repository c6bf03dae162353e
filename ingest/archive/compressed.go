package archive

import (
	"bufio"
	"compress/bzip2"
	"compress/gzip"
	"errors"
	"io"
	"path"
	"strings"
	"time"
)

// compressed reads a tar archive under a compressor, or the single file.
func (w *walk) compressed(label, base string, k kind, file io.Reader, depth int) error {
	r, modified, err := decompressor(k, bufio.NewReader(file))
	if err != nil {
		return err
	}
	content := bufio.NewReaderSize(expand{w, r}, 64*blockSize)
	// Where there is less, or damage, whoever reads on finds it.
	if head, _ := content.Peek(HeadSize); isTar(head) {
		return w.tar(label, content, depth)
	}
	name := withoutSuffix(base)
	err = w.entry(label, entry{name: name, modified: modified, size: -1, open: func() (io.Reader, error) { return content, nil }}, depth)
	if err == nil || w.ended != nil {
		return err
	}
	return w.give(Member{Name: Join(label, clean(name))}, inWords(err))
}

func decompressor(k kind, file *bufio.Reader) (r io.Reader, modified time.Time, err error) {
	if k == bzip2File {
		return &lasting{r: bzip2.NewReader(file)}, modified, nil
	}
	z, err := gzip.NewReader(file)
	if err != nil {
		return nil, modified, err
	}
	z.Multistream(false)
	return &gzipParts{z, file}, z.ModTime, nil
}

// lasting gives its first error again and again: behind some of its own the library reads
// on, and says something else, and a look ahead takes the first.
type lasting struct {
	r   io.Reader
	err error
}

func (l *lasting) Read(p []byte) (n int, err error) {
	if l.err == nil {
		n, l.err = l.r.Read(p)
	}
	return n, l.err
}

var errBehind = errors.New("something follows the end of the compressed data, and is not read")

// gzipParts reads the parts of a gzip file, one behind the other. The library would do so
// too, but takes few bytes of something else behind them for a part that was cut off.
type gzipParts struct {
	part *gzip.Reader
	file *bufio.Reader
}

func (g *gzipParts) Read(p []byte) (int, error) {
	for {
		n, err := g.part.Read(p)
		if err != io.EOF {
			return n, err
		}
		if n > 0 {
			return n, nil
		}
		head, err := g.file.Peek(len(gzipMagic))
		switch {
		case len(head) == 0:
			return 0, err
		case string(head) != gzipMagic:
			return 0, errBehind
		}
		if err := g.part.Reset(g.file); err != nil {
			return 0, err
		}
		g.part.Multistream(false)
	}
}

// withoutSuffix is the name of the one file in a compressed one. A name without
// the compressor's suffix is that of both.
func withoutSuffix(base string) string {
	switch ext := path.Ext(base); strings.ToLower(ext) {
	case ".gz", ".bz2":
		if stem := strings.TrimSuffix(base, ext); stem != "" {
			return stem
		}
	}
	return base
}
