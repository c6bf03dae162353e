package archive

import (
	"bufio"
	"compress/bzip2"
	"compress/gzip"
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

func decompressor(k kind, file io.Reader) (r io.Reader, modified time.Time, err error) {
	if k == bzip2File {
		return bzip2.NewReader(file), modified, nil
	}
	z, err := gzip.NewReader(file)
	if err != nil {
		return nil, modified, err
	}
	return z, z.ModTime, nil
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
