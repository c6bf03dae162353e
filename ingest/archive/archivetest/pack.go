// Package archivetest packs archives for tests, whole ones and, by a look at each
// header before it is written, odd ones.
package archivetest

import (
	"archive/tar"
	"archive/zip"
	"bytes"
	"compress/gzip"
	"fmt"
	"io"
	"time"
)

// Member is a file to pack.
type Member struct{ Name, Content string }

// File returns a member.
func File(name, content string) Member { return Member{name, content} }

// PackedAt is when members were last changed.
var PackedAt = time.Date(2026, 3, 12, 8, 30, 0, 0, time.UTC)

// Zip packs members, compressed, in a zip archive.
func Zip(members ...Member) []byte { return ZipWith(func(*zip.FileHeader) {}, members...) }

// ZipWith is Zip, with headers as change leaves them. It panics where they cannot
// be written.
func ZipWith(change func(*zip.FileHeader), members ...Member) []byte {
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	for _, m := range members {
		h := &zip.FileHeader{Name: m.Name, Method: zip.Deflate, Modified: PackedAt}
		change(h)
		w, err := z.CreateHeader(h)
		write(w, m, err)
	}
	end(z)
	return b.Bytes()
}

// Tar packs members in a tar archive.
func Tar(members ...Member) []byte { return TarWith(func(*tar.Header) {}, members...) }

// TarWith is Tar, with headers as change leaves them. It panics where they cannot
// be written.
func TarWith(change func(*tar.Header), members ...Member) []byte {
	var b bytes.Buffer
	w := tar.NewWriter(&b)
	for _, m := range members {
		h := &tar.Header{Name: m.Name, Typeflag: tar.TypeReg, Size: int64(len(m.Content)), Mode: 0o644, ModTime: PackedAt}
		change(h)
		write(w, m, w.WriteHeader(h))
	}
	end(w)
	return b.Bytes()
}

// Gzip compresses content.
func Gzip(content []byte) []byte {
	var b bytes.Buffer
	w := gzip.NewWriter(&b)
	write(w, Member{Content: string(content)}, nil)
	end(w)
	return b.Bytes()
}

// write writes the content of a member whose header was written, or not.
func write(w io.Writer, m Member, err error) {
	if err == nil {
		_, err = io.WriteString(w, m.Content)
	}
	if err != nil {
		panic(fmt.Sprintf("archivetest: %.40q: %v", m.Name, err))
	}
}

func end(w io.Closer) {
	if err := w.Close(); err != nil {
		panic("archivetest: " + err.Error())
	}
}
