package main

import "swaybook/query"

// flagError is what is wrong with the value of one flag.
type flagError struct {
	flag string
	err  error
}

func (e *flagError) Error() string { return e.err.Error() }
func (e *flagError) Unwrap() error { return e.err }

// ofFlag says of which flag an error is.
func ofFlag(name string, err error) error {
	if err == nil {
		return nil
	}
	return &flagError{name, err}
}

// flagErrors takes joined errors apart, each with its flag, "" where that is not known.
func flagErrors(err error) []flagError { return appendFlagErrors(nil, "", err) }

func appendFlagErrors(out []flagError, name string, err error) []flagError {
	switch e := err.(type) {
	case nil:
		return out
	case *flagError:
		return appendFlagErrors(out, e.flag, e.err)
	case interface{ Unwrap() []error }:
		for _, one := range e.Unwrap() {
			out = appendFlagErrors(out, name, one)
		}
		return out
	case *query.UsageError:
		if name == "" {
			name = e.What
		}
	}
	return append(out, flagError{name, err})
}
