package archive

import (
	"bytes"
	"encoding/binary"
	"io"
	"slices"
	"strconv"
	"strings"
)

// Opened names the kinds of archive that are read, for messages.
const Opened = ".zip, .tar, .tar.gz, .tar.bz2, .gz and .bz2"

// HeadSize is how many of a file's first bytes tell whether it is an archive: a
// block of tar.
const HeadSize = blockSize

type kind int

const (
	noArchive kind = iota
	zipArchive
	tarArchive
	gzipFile
	bzip2File
)

// magics are the first bytes of the kinds that have them: of zip those of a
// member, of the directory of an empty archive, and of the first of several
// volumes.
var magics = []struct {
	text string
	kind kind
}{
	{"PK\x03\x04", zipArchive}, {zipEndMagic, zipArchive}, {"PK\x07\x08", zipArchive},
	{gzipMagic, gzipFile}, {"BZh", bzip2File},
}

// gzipMagic is the identification and the only method of RFC 1952.
const gzipMagic = "\x1f\x8b\x08"

// bzip2Block is the mark of a first block, and of the end where there is none,
// behind the digit that follows BZh: a text may begin with the letters alone.
var bzip2Block = []string{"\x31\x41\x59\x26\x53\x59", "\x17\x72\x45\x38\x50\x90"}

// Is reports whether a file that begins with head, up to HeadSize bytes, is one
// that Members opens.
func Is(head []byte) bool { return kindOf(head) != noArchive }

// Begins reports whether what r reads begins as such a file does. It reads HeadSize bytes
// at most; what cannot be read begins as none.
func Begins(r io.Reader) bool {
	head := make([]byte, HeadSize)
	n, err := io.ReadFull(r, head)
	return (err == nil || err == io.EOF || err == io.ErrUnexpectedEOF) && Is(head[:n])
}

func kindOf(head []byte) kind {
	for _, m := range magics {
		if !bytes.HasPrefix(head, []byte(m.text)) {
			continue
		}
		if m.kind == bzip2File && !isBzip2(head) {
			return noArchive
		}
		return m.kind
	}
	if isTar(head) {
		return tarArchive
	}
	return noArchive
}

// Where a zip archive's end record keeps the length of the comment that ends it.
//
// Source: PKWARE, APPNOTE.TXT, 4.3.16.
const (
	zipEndMagic   = "PK\x05\x06"
	zipEndSize    = 22
	zipCommentAt  = 20
	zipCommentMax = 1<<16 - 1
)

// EndsInZip reports whether the content of a file ends as a zip archive does, whatever it
// begins with: a program that unpacks what is behind it.
func EndsInZip(data []byte) bool {
	// Forwards, since package bytes searches backwards one byte at a time, which a file of
	// miniSEED would feel.
	rest := data[max(0, len(data)-zipEndSize-zipCommentMax):]
	for {
		at := bytes.Index(rest, []byte(zipEndMagic))
		if at < 0 || len(rest)-at < zipEndSize {
			return false
		}
		rest = rest[at:]
		if zipEndSize+int(binary.LittleEndian.Uint16(rest[zipCommentAt:])) == len(rest) {
			return true
		}
		rest = rest[len(zipEndMagic):]
	}
}

// IsEmptyTar reports whether the content of a file is that of a tar archive with nothing in
// it: the end mark, two blocks of zeros at least, and whole ones. A file that was lost may
// look alike.
//
// Source: POSIX.1-2017, pax, "ustar Interchange Format".
func IsEmptyTar(data []byte) bool {
	return len(data) >= 2*blockSize && len(data)%blockSize == 0 && len(bytes.Trim(data, "\x00")) == 0
}

func isBzip2(head []byte) bool {
	return len(head) >= 10 && '1' <= head[3] && head[3] <= '9' && slices.Contains(bzip2Block, string(head[4:10]))
}

// Where the header of a tar member keeps its checksum and, except in the oldest
// form, its magic.
const (
	blockSize       = 512
	checksumAt      = 148
	checksumLength  = 8
	tarMagicAt      = 257
	tarMagic        = "ustar"
	blankedChecksum = checksumLength * ' '
)

// isTar looks for the magic of POSIX and GNU headers, or for a checksum that is
// right, which the oldest ones have too.
//
// Source: POSIX.1-2017, pax, "ustar Interchange Format".
func isTar(head []byte) bool {
	if len(head) < blockSize {
		return false
	}
	if bytes.HasPrefix(head[tarMagicAt:], []byte(tarMagic)) {
		return true
	}
	field := head[checksumAt : checksumAt+checksumLength]
	want, err := strconv.ParseInt(strings.Trim(string(field), " \x00"), 8, 64)
	if err != nil {
		return false
	}
	sum := int64(blankedChecksum)
	for i, b := range head[:blockSize] {
		if i < checksumAt || i >= checksumAt+checksumLength {
			sum += int64(b)
		}
	}
	return sum == want
}
