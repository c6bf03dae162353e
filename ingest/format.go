package ingest

import (
	"errors"
	"strings"
)

// Content is what a file holds.
type Content struct {
	Data []byte
	// Text is Data as lines. It has none where Data is no text, so that a reader
	// of text need not ask.
	Text *Text
}

// newContent splits data into lines. textErr says why data is no text.
func newContent(data []byte) (c *Content, textErr error) {
	c = &Content{Data: data}
	if c.Text, textErr = NewText(data); textErr != nil {
		c.Text = &Text{}
	}
	return c, textErr
}

// Info describes a format for those who ask what is read.
type Info struct {
	Name     string // the short name kept with every channel that was read
	Title    string // whose format it is, or what it looks like
	Channels string // how many a file holds
	Unit     string // the unit of a file's numbers, and where it is stated
	NotRead  string // kinds of the format that are refused, "" for none
}

// Format reads one kind of record file. A new format is one type that
// implements it and one line in Formats.
type Format interface {
	// Info describes the format.
	Info() Info
	// Sniff looks at the content and says in a few words what it saw that makes
	// the file one of this format, or "" where it is not one. It must not depend on
	// the file's name, and it must be cheap: it may look at the beginning only.
	Sniff(c *Content) string
	// Parse reads the channels. A refusal is a *ParseError, whose Path may be
	// left empty; a recognised file without ground acceleration is a
	// *NotMotionError. The channels of a nil error are not empty and meet the
	// invariants that Channel states.
	Parse(c *Content, hints Hints) ([]Channel, error)
}

// formats are the formats that are read, the specific ones. Plain columns are
// the last resort and no member: Parse tries them when none of these fits.
var formats = []Format{
	californiaV2{},
	cosmos{},
	esm{},
	knet{},
	at2{},
}

// Formats describes all formats that are read, plain columns last.
func Formats() []Info {
	infos := make([]Info, 0, len(formats)+1)
	for _, f := range formats {
		infos = append(infos, f.Info())
	}
	return append(infos, plain{}.Info())
}

// Hints are what the user states about a file that the file may not state
// itself. The zero value states nothing.
type Hints struct {
	// Unit is the unit of the samples, in any spelling that ParseUnit knows.
	Unit string
	// UnitFrom says where Unit was stated ("--unit", "catalogue line 7"), for
	// messages.
	UnitFrom string
	// StepS is the time step in s, 0 where not stated, and StepFrom its origin.
	StepS    float64
	StepFrom string
	// UnitForAll and StepForAll say that the unit, or the step, was stated once
	// for many files, not for this one. It serves files that are silent; one that
	// says otherwise is right; plain columns, whose headers are free text, warn.
	UnitForAll, StepForAll bool
}

// Parse recognises the file by its content and reads its channels. It returns
// the name of the format beside them, "" where none was recognised. An error is
// a *ParseError with its Path set, or a *NotMotionError.
func Parse(path string, data []byte, hints Hints) (format string, channels []Channel, err error) {
	format, channels, err = parse(data, hints)
	if pe, ok := errors.AsType[*ParseError](err); ok {
		pe.Path = path
	}
	return format, channels, err
}

func parse(data []byte, hints Hints) (string, []Channel, error) {
	content, textErr := newContent(data)
	reader, err := recognise(content, textErr)
	if err != nil {
		return "", nil, err
	}
	name := reader.Info().Name
	channels, err := reader.Parse(content, hints)
	if err != nil {
		return name, nil, err
	}
	for i := range channels {
		if err := check(&channels[i]); err != nil {
			return name, nil, err
		}
	}
	return name, channels, nil
}

// recognise returns the one format whose Sniff accepts the content. Two that do
// are an error, since a guess would decide what the numbers mean. textErr says
// why the content is no text, if it is none.
func recognise(c *Content, textErr error) (Format, error) {
	var match []Format
	var saw []string
	for _, f := range formats {
		if s := f.Sniff(c); s != "" {
			match = append(match, f)
			saw = append(saw, f.Info().Name+" ("+s+")")
		}
	}
	switch {
	case len(match) == 1:
		return match[0], nil
	case len(match) > 1:
		return nil, refuse(0, "", "file looks like more than one format: %s", strings.Join(saw, ", "))
	case textErr != nil:
		return nil, textErr
	}
	if err := notMotion(c.Text); err != nil {
		return nil, err
	}
	if f := (plain{}); f.Sniff(c) != "" {
		return f, nil
	}
	return nil, refuse(1, "", "unknown format: found %s; no reader recognises this content", found(c.Text.Line(1)))
}
