package fdsnxml

import (
	"bytes"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"

	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/unicode"
	"golang.org/x/text/transform"
)

// The names by which declarations call the encodings that are read beside UTF-8,
// in lower case. ISO-8859-1 is read as its superset, since what is declared so
// often is that, and its own other characters are control characters that no
// document has.
//
// Source: WHATWG Encoding Standard, names and labels.
var (
	latinNames = []string{"iso-8859-1", "iso8859-1", "iso_8859-1", "iso88591", "latin1", "l1", "windows-1252", "cp1252", "us-ascii", "ascii"}
	utf16Names = []string{"utf-16", "utf-16le", "utf-16be"}
)

// marks are the byte order marks and the encodings that they stand for.
var marks = []struct{ mark, encoding string }{{"\xef\xbb\xbf", "UTF-8"}, {"\xff\xfe", "UTF-16"}, {"\xfe\xff", "UTF-16"}}

// cutMark returns what follows the byte order mark and the encoding that it stands
// for, "" where there is none.
func cutMark(data []byte) (text []byte, encoding string) {
	for _, m := range marks {
		if text, ok := bytes.CutPrefix(data, []byte(m.mark)); ok {
			return text, m.encoding
		}
	}
	return data, ""
}

// startsMarkup reports whether the first character that is no blank opens a tag,
// one byte a character or two.
func startsMarkup(data []byte) bool {
	text, _ := cutMark(data)
	return bytes.HasPrefix(bytes.TrimLeft(text, "\x00\t\n\r "), []byte("<"))
}

// errEncoding is the refusal of what a document declares of its encoding.
type errEncoding struct{ error }

// newDecoder returns what reads a document in UTF-8, in Windows-1252 or
// ISO-8859-1, or in UTF-16 with a byte order mark, piece by piece. Another
// encoding is an errEncoding. Where anyOther is set it is read like Windows-1252,
// in which the names of elements are the same.
func newDecoder(data []byte, anyOther bool) *xml.Decoder {
	_, mark := cutMark(data)
	var text io.Reader = bytes.NewReader(data)
	if mark == "UTF-16" {
		text = transform.NewReader(text, unicode.UTF16(unicode.LittleEndian, unicode.ExpectBOM).NewDecoder())
	}
	d := xml.NewDecoder(text)
	declared := false // each declaration would wrap the reader once more
	d.CharsetReader = func(name string, r io.Reader) (io.Reader, error) {
		if declared {
			return nil, errEncoding{errors.New("the encoding is declared twice")}
		}
		declared = true
		if mark == "UTF-16" && (anyOther || isOneOf(utf16Names, name)) {
			return r, nil
		}
		if err := refuseEncoding(mark, name); err != nil && !anyOther {
			return nil, err
		}
		return charmap.Windows1252.NewDecoder().Reader(r), nil
	}
	return d
}

func isOneOf(names []string, name string) bool { return slices.Contains(names, strings.ToLower(name)) }

// refuseEncoding returns an error unless the declared encoding is an extension of
// ASCII that is read and no mark says otherwise.
func refuseEncoding(mark, name string) error {
	switch {
	case mark != "":
		return errEncoding{fmt.Errorf("declares the encoding %.40q and begins with the byte order mark of %s", name, mark)}
	case isOneOf(latinNames, name):
		return nil
	case isOneOf(utf16Names, name):
		return errEncoding{fmt.Errorf("declares the encoding %.40q and has no byte order mark: save it as UTF-8", name)}
	}
	return errEncoding{fmt.Errorf("encoding %.40q is not read (UTF-8, ISO-8859-1, Windows-1252 and, with a byte order mark, UTF-16 are): save it as UTF-8", name)}
}
