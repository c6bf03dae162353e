package archive

import (
	"archive/tar"
	"archive/zip"
	"compress/bzip2"
	"compress/flate"
	"compress/gzip"
	"errors"
	"fmt"
	"io"
	"io/fs"
)

// words are what the libraries' errors mean for an archive.
var words = []struct {
	err   error
	words string
}{
	{io.ErrUnexpectedEOF, "the data end in the middle: truncated?"},
	{zip.ErrChecksum, "the checksum differs: damaged"},
	{gzip.ErrChecksum, "the checksum differs: damaged"},
	{zip.ErrFormat, "not what the directory of the zip archive says: damaged"},
	{tar.ErrHeader, "damaged header"},
	{gzip.ErrHeader, "damaged header"},
	{errBzip2Behind, errBehind.Error()},
}

// errBzip2Behind is the library's error where no further part begins behind one.
const errBzip2Behind = bzip2.StructuralError("bad magic value in continuation file")

// inWords says what the libraries' errors mean for an archive.
func inWords(err error) error {
	for _, known := range words {
		if errors.Is(err, known.err) {
			return errors.New(known.words)
		}
	}
	if isDamage[flate.CorruptInputError](err) || isDamage[flate.InternalError](err) || isDamage[bzip2.StructuralError](err) {
		return errors.New("the compressed data are damaged")
	}
	if pe, ok := errors.AsType[*fs.PathError](err); ok {
		return pe.Err // whoever reports it names the file
	}
	return err
}

// isDamage reports whether the error is of a kind by which a decompressor speaks of its
// input alone.
func isDamage[E error](err error) bool {
	_, ok := errors.AsType[E](err)
	return ok
}

// at is an error met at a member.
func at(name string, err error) error { return fmt.Errorf("%s: %w", clean(name), inWords(err)) }
