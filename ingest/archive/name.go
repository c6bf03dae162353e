package archive

import (
	"fmt"
	"path"
	"strings"
	"unicode"
	"unicode/utf8"
)

// Separator stands between an archive and the member in it, wherever a path
// shows: archive.zip!folder/file, and of an archive inside another
// outer.zip!inner.tar!file.
const Separator = "!"

// maxName is the longest name of a member, in bytes; no file system has longer
// paths.
const maxName = 4096

// Join is the path of a member of the archive at file.
func Join(file, member string) string {
	if file == "" {
		return member
	}
	return file + Separator + member
}

// Split divides a path at its archives: outer.zip!inner.tar!file has three parts,
// and the path of a file in no archive is its own only part. A separator beside a
// slash, or at an end, belongs to a name.
func Split(p string) []string {
	var parts []string
	from := 0
	for i := range len(p) {
		if p[i] == Separator[0] && i > from && i+1 < len(p) && !isSlash(p[i-1]) && !isSlash(p[i+1]) {
			parts = append(parts, p[from:i])
			from = i + 1
		}
	}
	return append(parts, p[from:])
}

func isSlash(b byte) bool { return b == '/' || b == '\\' }

// InPlace is the path that a member would have if its archives were unpacked
// where they lie, with slashes: that of a/b.zip!c/d.V2 is a/c/d.V2. The path of a
// file in no archive stays.
func InPlace(p string) string {
	parts := Split(p)
	last := len(parts) - 1
	for i, archive := range parts[:last] {
		parts[i] = path.Dir(strings.ReplaceAll(archive, `\`, "/"))
	}
	if last == 0 {
		return p
	}
	return path.Join(parts...)
}

// Folder is where a file lies, with slashes: its folder, and of a member of an archive
// the archive and the folder inside, since two archives may have folders of one name. The
// one file under a compressor lies where that one does.
func Folder(p string) string {
	parts := Split(strings.ReplaceAll(p, `\`, "/"))
	last := len(parts) - 1
	for last > 0 && parts[last] == clean(withoutSuffix(path.Base(parts[last-1]))) {
		last--
	}
	parts[last] = path.Dir(parts[last])
	return strings.Join(parts[:last+1], Separator)
}

// clean makes a label of a member's name: relative, with slashes, without "..",
// drive or control characters, valid UTF-8, never empty, and free of the
// separator. Bytes that may not stand are written as %XX, and what goes beyond
// maxName is cut.
func clean(name string) string {
	name = name[:min(len(name), maxName)]
	name = strings.ReplaceAll(name, `\`, "/")
	if len(name) >= 2 && name[1] == ':' && unicode.IsLetter(rune(name[0])) {
		name = name[2:]
	}
	name = strings.TrimPrefix(path.Clean("/"+name), "/")
	var b strings.Builder
	for i, r := range name {
		size := utf8.RuneLen(r)
		if r == utf8.RuneError && !strings.HasPrefix(name[i:], string(utf8.RuneError)) {
			size = 1 // a byte that is no UTF-8
		} else if !unicode.IsControl(r) && !strings.ContainsRune(Separator, r) {
			b.WriteRune(r)
			continue
		}
		for _, c := range []byte(name[i : i+size]) {
			fmt.Fprintf(&b, "%%%02X", c)
		}
	}
	if b.Len() == 0 {
		return "unnamed"
	}
	return b.String()
}
