package ingest

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"slices"
	"strings"

	"swaybook/ingest/archive"
	"swaybook/ingest/fdsnxml"
)

// Content is what a file holds.
type Content struct {
	Data []byte
	ctx  context.Context // that of Parse, which makes the content for one call
	// Text is Data as lines. It has none where Data is no text, so that a reader
	// of text need not ask.
	Text *Text
}

// newContent splits data into lines, reading which ends with the context. textErr says why
// data is no text.
func newContent(ctx context.Context, data []byte) (c *Content, textErr error) {
	c = &Content{Data: data, ctx: ctx}
	if c.Text, textErr = newText(data, ctx.Err); textErr != nil {
		c.Text = &Text{}
	}
	if textErr != nil && archive.IsEmptyTar(data) {
		textErr = refuse(0, "", "file holds only zeros: a tar archive without files, or content that was lost")
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
// implements it and one line in formats.
type Format interface {
	// Info describes the format.
	Info() Info
	// Sniff looks at the content and says in a few words what it saw that makes
	// the file one of this format, or "" where it is not one. It must not depend on
	// the file's name, and it must be cheap: it may look at the beginning only.
	Sniff(c *Content) string
	// Parse reads the channels. A refusal is a *ParseError, whose Path may be
	// left empty; a recognised file without ground acceleration is a
	// *NotMotionError. Where single channels are refused, the error is
	// ChannelErrors and the others are beside it. The channels of a nil error are
	// not empty. All channels meet the invariants that Channel states.
	Parse(c *Content, hints Hints) ([]Channel, error)
}

// formats are the formats that are read, the specific ones. Plain columns are
// the last resort and no member: Parse tries them when none of these fits.
var formats = []Format{
	californiaV2{},
	californiaV1{},
	cosmos{},
	esm{},
	jma{},
	knet{},
	at2{},
	smc{},
	newZealand{},
	miniSEED{},
}

// IsOfOneArchive reports whether files of the format come from one archive or network,
// which gives events their codes; others, text columns of any kind, come from anybody.
func IsOfOneArchive(format string) bool {
	return slices.ContainsFunc(formats, func(f Format) bool { return f.Info().Name == format && f != Format(at2{}) })
}

// Formats describes all formats that are read, those of the layouts after the
// built-in ones, plain columns last.
func Formats(layouts Layouts) []Info {
	var infos []Info
	for _, f := range formats {
		infos = append(infos, f.Info())
	}
	for _, l := range layouts {
		infos = append(infos, l.Info())
	}
	return append(infos, plain{}.Info())
}

// Hints are what the user states about a file that the file may not state
// itself. The zero value states nothing.
type Hints struct {
	// Unit is the unit of the samples, in any spelling that ParseUnit knows. Counts
	// are one for miniSEED alone, whose metadata give the scale.
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
	// Metadata is what documents say of channels and stations; nil for none.
	Metadata *Metadata
	// Layouts are the formats that the user has described. A file may be one of
	// them as it may be one of the built-in formats.
	Layouts Layouts
}

// Parse recognises the file by its content and reads its channels. It returns
// the name of the format beside them, "" where none was recognised. An error is
// a *ParseError with its Path set, a *NotMotionError, or ChannelErrors about
// channels that are not among those returned; or the context's, with nothing beside it,
// within a fraction of a second after that ended.
func Parse(ctx context.Context, path string, data []byte, hints Hints) (format string, channels []Channel, err error) {
	defer func() {
		switch stop := recover().(type) {
		case nil:
		case interrupted:
			format, channels, err = "", nil, stop.err
		default:
			panic(stop)
		}
	}()
	format, channels, err = parse(ctx, data, hints)
	if stopped := ctx.Err(); stopped != nil {
		return "", nil, stopped
	}
	for _, pe := range parseErrors(err) {
		pe.Path = path
	}
	return format, channels, err
}

func parse(ctx context.Context, data []byte, hints Hints) (string, []Channel, error) {
	content, textErr := newContent(ctx, data)
	reader, err := recognise(content, textErr, hints.Layouts)
	if err != nil {
		return "", nil, err
	}
	name := reader.Info().Name
	channels, err := reader.Parse(content, hints)
	refused, single := errors.AsType[ChannelErrors](err)
	if err != nil && !single {
		return name, nil, err
	}
	if textErr == nil {
		if err := refuseCut(content.Text); err != nil {
			return name, nil, err
		}
	}
	channels, refused = checkAll(channels, refused, content.Text)
	return name, channels, refused.err(len(channels))
}

// checkAll holds each channel to check and moves those that fail to the
// refusals. The text is that of the file.
func checkAll(channels []Channel, refused ChannelErrors, t *Text) ([]Channel, ChannelErrors) {
	var good []Channel
	for i := range channels {
		c := &channels[i]
		err := check(c)
		if err == nil {
			good = append(good, *c)
			continue
		}
		pe := parseErrors(err)[0]
		placeMark(pe, t)
		if name := channelName(c); len(channels)+len(refused) > 1 && name != "" {
			pe.Err = fmt.Errorf("channel %s: %w", name, pe.Err)
		}
		refused = append(refused, pe)
	}
	return good, refused
}

// recognise returns the one format, built in or described, whose Sniff accepts
// the content. Two that do are an error, since a guess would decide what the
// numbers mean. textErr says why the content is no text, if it is none.
func recognise(c *Content, textErr error, layouts Layouts) (Format, error) {
	var match []Format
	var saw []string
	try := func(f Format) {
		if s := f.Sniff(c); s != "" {
			match = append(match, f)
			saw = append(saw, f.Info().Name+" ("+s+")")
		}
	}
	for _, f := range formats {
		try(f)
	}
	for _, l := range layouts {
		try(l)
	}
	switch {
	case len(match) == 1:
		return match[0], nil
	case len(match) > 1:
		return nil, refuse(0, "", "file looks like more than one format: %s", strings.Join(saw, ", "))
	case bytes.HasPrefix(c.Data, []byte(DatabaseMark)):
		return nil, errDatabase
	case textErr != nil:
		return nil, textErr
	}
	if kind := fdsnxml.Kind(c.Data); kind != "" {
		return nil, &NotMotionError{kind + ", not used: only files named *.xml are, alone or in archives named as such, and those of --metadata"}
	}
	if err := notMotion(c.Text); err != nil {
		return nil, err
	}
	if f := (plain{}); f.Sniff(c) != "" {
		return f, nil
	}
	return nil, refuse(1, "", "unknown format: found %s; no reader recognises this content", found(c.Text.Line(1)))
}
