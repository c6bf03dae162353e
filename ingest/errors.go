package ingest

import (
	"errors"
	"fmt"
	"strconv"
	"strings"

	"swaybook/ingest/tomlfile"
)

// ParseError says why a file, or one channel of it, was refused. It prints as
// path:line: field: cause, without the parts that are empty.
type ParseError struct {
	Path  string
	Line  int    // 1-based; 0 where the cause is not in one line
	Field string // the header field or column at fault, "" for the file as a whole
	Err   error  // the cause
}

// Error returns path:line: field: cause.
func (e *ParseError) Error() string {
	s := e.Path
	if e.Line > 0 {
		s += ":" + strconv.Itoa(e.Line)
	}
	return s + ": " + e.Cause()
}

// Cause returns the message without path and line: field: cause.
func (e *ParseError) Cause() string {
	if e.Field == "" {
		return e.Err.Error()
	}
	return e.Field + ": " + e.Err.Error()
}

// Unwrap returns the cause.
func (e *ParseError) Unwrap() error { return e.Err }

// ChannelErrors are the refusals of single channels of a file, in their order.
// The other channels of the file are read.
type ChannelErrors []*ParseError

// Error joins the refusals.
func (e ChannelErrors) Error() string {
	texts := make([]string, len(e))
	for i, pe := range e {
		texts[i] = pe.Error()
	}
	return strings.Join(texts, "\n")
}

// Unwrap returns the refusals.
func (e ChannelErrors) Unwrap() []error {
	errs := make([]error, len(e))
	for i, pe := range e {
		errs[i] = pe
	}
	return errs
}

// err is the error to return beside read channels: none, or where one refusal
// is all there is of the file, that one.
func (e ChannelErrors) err(read int) error {
	switch {
	case len(e) == 0:
		return nil
	case len(e) == 1 && read == 0:
		return e[0]
	}
	return e
}

// parseErrors lists the refusals in an error: one of a file, several of
// channels.
func parseErrors(err error) []*ParseError {
	if several, ok := errors.AsType[ChannelErrors](err); ok {
		return several
	}
	if pe, ok := errors.AsType[*ParseError](err); ok {
		return []*ParseError{pe}
	}
	return nil
}

// NotMotionError says that a file was recognised and holds no ground
// acceleration: response spectra, a catalogue, a text to read. Such a file is
// skipped, not rejected.
type NotMotionError struct {
	Reason string
}

// Error returns the reason.
func (e *NotMotionError) Error() string { return e.Reason }

// refuse builds the ParseError of a reader; the path is filled in by Parse.
func refuse(line int, field, format string, args ...any) *ParseError {
	return &ParseError{Line: line, Field: field, Err: fmt.Errorf(format, args...)}
}

// Found shortens text from a file to 40 characters for use in a message.
func found(s string) string { return tomlfile.Quote(s) }
