package ingest

import (
	"bytes"
	"encoding/binary"
	"unicode/utf16"
	"unicode/utf8"

	"swaybook/ingest/archive"
)

// MaxLine is the longest line that is read, in bytes. Anything longer is not a
// text that a person or an instrument wrote line by line.
const MaxLine = 1 << 20

// Text is a file's content split into lines, free of byte order mark, carriage
// returns, and the NUL or Ctrl-Z padding that old systems leave at the end.
type Text struct {
	lines    [][]byte
	endsLine bool // a line end follows the last line
	stopped  func() error
}

// linesBetweenLooks is after how many lines a text looks whether somebody stopped the
// run: few, since lines may be long, and enough that it costs nothing.
const linesBetweenLooks = 32

// interrupted is the panic that ends a reader at whatever line it is, so that none has to
// ask. Parse recovers it.
type interrupted struct{ err error }

func (t *Text) look() {
	if t.stopped == nil {
		return
	}
	if err := t.stopped(); err != nil {
		panic(interrupted{err})
	}
}

// NewText splits data into lines at LF, CRLF or a lone CR. UTF-16 with a byte
// order mark is converted. It refuses an empty file, binary content and lines
// longer than MaxLine, each with its own cause. The lines alias data.
func NewText(data []byte) (*Text, error) { return newText(data, nil) }

// newText is NewText, and what reads the lines, it too, ends where stopped gives an error.
func newText(data []byte, stopped func() error) (*Text, error) {
	if len(data) == 0 {
		return nil, refuse(0, "", "file is empty")
	}
	for _, p := range packed {
		if bytes.HasPrefix(data, []byte(p.magic)) {
			return nil, refuse(0, "", "file is %s: unpack it first (read in place are %s)", p.name, archive.Opened)
		}
	}
	whole := data
	data, err := decode(data)
	if err != nil {
		return nil, err
	}
	data = withoutPadding(data)
	if err := refuseBinary(data); err != nil {
		if archive.EndsInZip(whole) {
			return nil, refuse(0, "", "file is a zip archive behind a program or script that unpacks it: unpack it first (read in place are %s)", archive.Opened)
		}
		return nil, err
	}
	t := &Text{stopped: stopped, endsLine: len(data) > 0 && (data[len(data)-1] == '\n' || data[len(data)-1] == '\r')}
	t.lines = splitLines(data, t.look)
	for i, l := range t.lines {
		if len(l) > MaxLine {
			return nil, refuse(i+1, "", "line of %d bytes is longer than the limit of %d", len(l), MaxLine)
		}
	}
	if len(bytes.TrimSpace(data)) == 0 {
		return nil, refuse(0, "", "file holds only blanks")
	}
	return t, nil
}

// withoutPadding cuts off what old systems leave at the end of a text: NUL, and
// Ctrl-Z with or without line ends after it.
func withoutPadding(data []byte) []byte {
	n := len(bytes.TrimRight(data, "\x00\x1a\r\n"))
	if end := bytes.IndexByte(data[n:], '\x1a'); end >= 0 {
		data = data[:n+end]
	}
	return bytes.TrimRight(data, "\x00")
}

// Len returns the number of lines.
func (t *Text) Len() int { return len(t.lines) }

// Line returns line n, counted from 1, as text; "" past the end.
func (t *Text) Line(n int) string { return string(t.Bytes(n)) }

// Bytes returns line n, counted from 1; nil past the end. The caller must not
// change it.
func (t *Text) Bytes(n int) []byte {
	if n%linesBetweenLooks == 0 {
		t.look()
	}
	if n < 1 || n > len(t.lines) {
		return nil
	}
	return t.lines[n-1]
}

// packed are the first bytes of archives that are not read in place.
var packed = []struct{ magic, name string }{
	{"\xfd7zXZ\x00", "an xz file"}, {"7z\xbc\xaf\x27\x1c", "a 7z archive"}, {"Rar!\x1a\x07", "a rar archive"},
	{"\x28\xb5\x2f\xfd", "a zstd file"}, {"\x1f\x9d", "a file of compress (.Z)"},
}

func decode(data []byte) ([]byte, error) {
	switch {
	case bytes.HasPrefix(data, []byte("\xef\xbb\xbf")):
		return data[3:], nil
	case bytes.HasPrefix(data, []byte("\xff\xfe")):
		return fromUTF16(data[2:], binary.LittleEndian), nil
	case bytes.HasPrefix(data, []byte("\xfe\xff")):
		return fromUTF16(data[2:], binary.BigEndian), nil
	case looksUTF16(data):
		return nil, refuse(0, "", "file looks like UTF-16 without a byte order mark; save it as UTF-8")
	}
	return data, nil
}

func fromUTF16(data []byte, order binary.ByteOrder) []byte {
	units := make([]uint16, len(data)/2)
	for i := range units {
		units[i] = order.Uint16(data[2*i:])
	}
	var out []byte
	for _, r := range utf16.Decode(units) {
		out = utf8.AppendRune(out, r)
	}
	return out
}

// looksUTF16 reports whether every second byte of the head is NUL, as in ASCII
// text stored two bytes a character.
func looksUTF16(data []byte) bool {
	head := data[:min(len(data), 512)]
	if len(head) < 16 {
		return false
	}
	var nul [2]int
	for i, b := range head {
		if b == 0 {
			nul[i%2]++
		}
	}
	half := len(head) / 2
	return max(nul[0], nul[1]) > half*9/10 && min(nul[0], nul[1]) < half/10
}

// refuseBinary looks at the first 4 KiB and refuses more than 5 % of control characters
// among what is not NUL, or more NUL bytes than others. Any NUL in what is else a text, or
// further on, is damage, and its line is told.
func refuseBinary(data []byte) error {
	head := data[:min(len(data), 4096)]
	nul, control := 0, 0
	for _, b := range head {
		switch {
		case b == 0:
			nul++
		case b < 0x20 && b != '\t' && b != '\n' && b != '\r' && b != '\f':
			control++
		}
	}
	if nul > len(head)/2 || control*20 > len(head)-nul {
		return refuse(0, "", "file is binary, not a text record")
	}
	if i := bytes.IndexByte(data, 0); i >= 0 {
		return refuse(len(splitLines(data[:i+1], func() {})), "", "NUL byte in the text: the file is damaged")
	}
	return nil
}

// linesBetweenSplits is after how many lines splitLines calls look, some 0.5 ms.
const linesBetweenSplits = 1 << 14

// splitLines ends a line at LF, CRLF or a lone CR. The text's last line may do
// without. It calls look now and then.
func splitLines(data []byte, look func()) [][]byte {
	lines := make([][]byte, 0, bytes.Count(data, []byte("\n"))+1)
	returns := bytes.Count(data, []byte("\r"))
	for rest := data; len(rest) > 0; {
		line := rest
		if end := bytes.IndexByte(rest, '\n'); end >= 0 {
			line, rest = rest[:end], rest[end+1:]
		} else {
			rest = nil
		}
		if end := len(line) - 1; end >= 0 && line[end] == '\r' {
			line = line[:end]
			returns--
		}
		if lines = append(lines, line); len(lines)%linesBetweenSplits == 0 {
			look()
		}
	}
	if returns > 0 {
		return splitAtReturns(lines, returns)
	}
	return lines
}

// splitAtReturns splits lines at the lone CR in them, of which there are so many.
func splitAtReturns(lines [][]byte, returns int) [][]byte {
	out := make([][]byte, 0, len(lines)+returns)
	for _, line := range lines {
		for at := bytes.IndexByte(line, '\r'); at >= 0; at = bytes.IndexByte(line, '\r') {
			out, line = append(out, line[:at]), line[at+1:]
		}
		out = append(out, line)
	}
	return out
}

// isASCII reports whether no byte of b is part of a character beyond ASCII.
func isASCII(b []byte) bool {
	const high = 0x8080808080808080
	for ; len(b) >= 8; b = b[8:] {
		if binary.LittleEndian.Uint64(b)&high != 0 {
			return false
		}
	}
	for _, c := range b {
		if c >= utf8.RuneSelf {
			return false
		}
	}
	return true
}
