package fdsnxml

import (
	"context"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
	"time"
)

// MaxSize is the largest document that is read, in bytes.
const MaxSize = 128 << 20

// maxDepth is deeper than either schema nests its elements.
const maxDepth = 40

// maxAttributes is more than any element of either schema has.
const maxAttributes = 64

// The kinds of documents.
const (
	Stations = "StationXML"
	Events   = "QuakeML"
)

// The local names of the root elements and the beginnings of the namespaces of
// what is in them. QuakeML exists as bed and bed-rt.
const (
	stationRoot      = "FDSNStationXML"
	stationNamespace = "http://www.fdsn.org/xml/station/1"
	eventRoot        = "quakeml"
	eventNamespace   = "http://quakeml.org/xmlns/"
)

// Kind says which document data begins like: Stations, Events, or "" for all
// else. It looks at the root element only.
func Kind(data []byte) string {
	if !startsMarkup(data) {
		return ""
	}
	d := newDecoder(data, true)
	for {
		token, err := d.Token()
		if err != nil {
			return ""
		}
		root, ok := token.(xml.StartElement)
		switch {
		case !ok:
			continue
		case root.Name.Local == stationRoot:
			return Stations
		case root.Name.Local == eventRoot:
			return Events
		}
		return ""
	}
}

// Error says what is wrong with a document and in which line.
type Error struct {
	Line int
	Err  error
}

// Error returns "line N: cause".
func (e *Error) Error() string { return fmt.Sprintf("line %d: %v", e.Line, e.Err) }

// Unwrap returns the cause.
func (e *Error) Unwrap() error { return e.Err }

// Note is a remark on an element: that it was left out, or what of it was not
// taken, and why. Line is that of its start tag.
type Note struct {
	Line int
	Text string
}

// leftOut is the remark on an element that is not used.
func leftOut(line int, name string, err error) Note {
	return Note{line, fmt.Sprintf("%.80s: %v: left out", name, err)}
}

// source hands on the tokens of a document: without comments and instructions,
// without elements of other namespaces, and names without their own.
type source struct {
	decoder    *xml.Decoder
	namespaces []string // beginnings of those that are read
	depth      int
	tokens     int
	stopped    func() error
}

// tokensBetweenLooks is after how many tokens, some 100 µs, the source looks
// whether somebody stopped the run.
const tokensBetweenLooks = 256

var errDocumentType = errors.New("the document declares a type or entities, which is refused")

// Token implements xml.TokenReader.
func (s *source) Token() (xml.Token, error) {
	for {
		if s.tokens++; s.tokens%tokensBetweenLooks == 0 {
			if err := s.stopped(); err != nil {
				return nil, err
			}
		}
		token, err := s.decoder.Token()
		if err != nil {
			return nil, err
		}
		switch t := token.(type) {
		case xml.Directive:
			return nil, errDocumentType
		case xml.StartElement:
			if !s.reads(t.Name.Space) {
				if err := s.decoder.Skip(); err != nil {
					return nil, err
				}
				continue
			}
			return s.start(t)
		case xml.EndElement:
			s.depth--
			return xml.EndElement{Name: xml.Name{Local: t.Name.Local}}, nil
		case xml.CharData:
			return t, nil
		}
	}
}

func (s *source) reads(space string) bool {
	for _, n := range s.namespaces {
		if strings.HasPrefix(space, n) {
			return true
		}
	}
	return space == ""
}

func (s *source) start(t xml.StartElement) (xml.Token, error) {
	s.depth++
	if s.depth > maxDepth {
		return nil, fmt.Errorf("elements are nested deeper than %d", maxDepth)
	}
	if len(t.Attr) > maxAttributes {
		return nil, fmt.Errorf("element %s has %d attributes", t.Name.Local, len(t.Attr))
	}
	out := xml.StartElement{Name: xml.Name{Local: t.Name.Local}}
	for _, a := range t.Attr {
		if a.Name.Space != "xmlns" && a.Name.Local != "xmlns" {
			out.Attr = append(out.Attr, xml.Attr{Name: xml.Name{Local: a.Name.Local}, Value: a.Value})
		}
	}
	return out, nil
}

// document is a source and what reads elements from it.
type document struct {
	source *source
	reader *xml.Decoder
}

// open reads up to the root element, which must have the name.
func open(ctx context.Context, data []byte, root string, namespaces ...string) (*document, error) {
	if len(data) > MaxSize {
		return nil, fmt.Errorf("document of %d bytes is larger than the limit of %d", len(data), MaxSize)
	}
	s := &source{decoder: newDecoder(data, false), namespaces: namespaces, stopped: ctx.Err}
	d := &document{source: s, reader: xml.NewTokenDecoder(s)}
	for {
		token, err := d.reader.Token()
		if err == io.EOF {
			err = fmt.Errorf("no root element %s of the namespace %s", root, namespaces[0])
		}
		if err != nil {
			return nil, d.fault(err)
		}
		if start, ok := token.(xml.StartElement); ok {
			if start.Name.Local != root {
				return nil, d.fault(fmt.Errorf("root element is %q, want %s", start.Name.Local, root))
			}
			return d, nil
		}
	}
}

// fault adds the line that has been reached.
func (d *document) fault(err error) error {
	if e, ok := errors.AsType[*Error](err); ok {
		return e
	}
	line := d.line()
	if e, ok := errors.AsType[errEncoding](err); ok {
		return &Error{Line: line, Err: e.error}
	}
	if e, ok := errors.AsType[*xml.SyntaxError](err); ok {
		return &Error{Line: line, Err: errors.New(e.Msg)}
	}
	return &Error{Line: line, Err: err}
}

// children calls do for every child element until the end of the one that was
// opened last. do must read the whole child.
func (d *document) children(do func(xml.StartElement) error) error {
	for {
		token, err := d.reader.Token()
		if err == io.EOF {
			err = io.ErrUnexpectedEOF
		}
		if err != nil {
			return d.fault(err)
		}
		switch t := token.(type) {
		case xml.StartElement:
			if err := do(t); err != nil {
				return d.fault(err)
			}
		case xml.EndElement:
			return nil
		}
	}
}

// line is the line that has been reached.
func (d *document) line() int {
	line, _ := d.source.decoder.InputPos()
	return line
}

// close reads what follows the root element.
func (d *document) close() error {
	for {
		switch _, err := d.reader.Token(); {
		case err == io.EOF:
			return nil
		case err != nil:
			return d.fault(err)
		}
	}
}

// Number is a quantity that a document may or may not state.
type Number struct {
	Value float64
	Known bool
}

// number is a decimal in an element. It is unknown where the element is missing
// or empty; bad says why its text is none, so that the element around it is read
// to its end.
type number struct {
	Number
	bad error
}

// UnmarshalXML reads the element's text.
func (n *number) UnmarshalXML(d *xml.Decoder, start xml.StartElement) error {
	var text string
	if err := d.DecodeElement(&text, &start); err != nil {
		return err
	}
	*n = number{}
	text = strings.TrimSpace(text)
	if text == "" {
		return nil
	}
	v, err := strconv.ParseFloat(text, 64)
	if err != nil || math.IsNaN(v) || math.IsInf(v, 0) {
		n.bad = fmt.Errorf("%s: expected a number, found %.40q", start.Name.Local, text)
		return nil
	}
	n.Number = Number{v, true}
	return nil
}

// firstBad returns the first error of numbers, nil for none.
func firstBad(numbers ...number) error {
	for _, n := range numbers {
		if n.bad != nil {
			return n.bad
		}
	}
	return nil
}

// within refuses a number outside a range.
func (n Number) within(name string, low, high float64) error {
	if n.Known && (n.Value < low || n.Value > high) {
		return fmt.Errorf("%s %g is outside %g to %g", name, n.Value, low, high)
	}
	return nil
}

// position returns a latitude and a longitude that can be: two zeros are how
// software leaves them out, and longitudes may be counted all the way round. Else
// both are unknown, and the error says why.
func position(latitude, longitude Number) (lat, lon Number, err error) {
	if longitude.Value > 180 && longitude.Value <= 360 {
		longitude.Value -= 360
	}
	if latitude.Value == 0 && longitude.Value == 0 {
		return lat, lon, errors.New("latitude and longitude are 0")
	}
	if err := latitude.within("latitude", -90, 90); err != nil {
		return lat, lon, err
	}
	if err := longitude.within("longitude", -180, 180); err != nil {
		return lat, lon, err
	}
	return latitude, longitude, nil
}

var errNoPosition = errors.New("no latitude or no longitude")

// timeLayouts are the forms of ISO 8601 that documents use. Fractions of seconds
// are read with any of them.
var timeLayouts = []string{"2006-01-02T15:04:05Z07:00", "2006-01-02T15:04:05", "2006-01-02T15:04", "2006-01-02Z07:00", "2006-01-02"}

// instant reads a time; one without a zone is UTC, and none is the zero time.
func instant(text string) (time.Time, error) {
	text = strings.TrimSpace(text)
	if text == "" {
		return time.Time{}, nil
	}
	for _, layout := range timeLayouts {
		if t, err := time.Parse(layout, text); err == nil {
			return t.UTC(), nil
		}
	}
	return time.Time{}, fmt.Errorf("expected a time, found %.40q", text)
}
