package ingest

import (
	"errors"
	"strings"
)

// Format reads one kind of record file. A new format is one type that
// implements it and one line in Formats.
type Format interface {
	// Name is the short name kept with every channel that was read.
	Name() string
	// Sniff looks at the text and says in a few words what it saw that makes the
	// file one of this format, or "" where it is not one. It must not depend on
	// the file's name, and it must be cheap: it may look at the first lines only.
	Sniff(t *Text) string
	// Parse reads the channels. A refusal is a *ParseError, whose Path may be
	// left empty; a recognised file without ground acceleration is a
	// *NotMotionError. The channels of a nil error are not empty and meet the
	// invariants that Channel states.
	Parse(t *Text, hints Hints) ([]Channel, error)
}

// Formats are the formats that are read, the specific ones. Plain columns are
// the last resort and no member: Parse tries them when none of these fits.
func Formats() []Format {
	return []Format{
		californiaV2{},
		cosmos{},
		knet{},
		at2{},
	}
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
	text, err := NewText(data)
	if err != nil {
		return "", nil, err
	}
	reader, err := recognise(text)
	if err != nil {
		return "", nil, err
	}
	channels, err := reader.Parse(text, hints)
	if err != nil {
		return reader.Name(), nil, err
	}
	for i := range channels {
		if err := check(&channels[i]); err != nil {
			return reader.Name(), nil, err
		}
	}
	return reader.Name(), channels, nil
}

// recognise returns the one format whose Sniff accepts the text. Two that do
// are an error, since a guess would decide what the numbers mean.
func recognise(text *Text) (Format, error) {
	var match []Format
	var saw []string
	for _, f := range Formats() {
		if s := f.Sniff(text); s != "" {
			match = append(match, f)
			saw = append(saw, f.Name()+" ("+s+")")
		}
	}
	switch {
	case len(match) == 1:
		return match[0], nil
	case len(match) > 1:
		return nil, refuse(0, "", "file looks like more than one format: %s", strings.Join(saw, ", "))
	}
	if err := notMotion(text); err != nil {
		return nil, err
	}
	if f := (plain{}); f.Sniff(text) != "" {
		return f, nil
	}
	return nil, refuse(1, "", "unknown format: found %s; no reader recognises this content", found(text.Line(1)))
}
