package query

import (
	"fmt"
	"strings"
)

// UsageError is a mistake in a question: a text that does not parse, a value
// out of its range, two fields that contradict each other.
type UsageError struct {
	What string // the part of the question, for example "period"
	Why  string
	Err  error // the cause below, or nil
}

// Error returns "what: why".
func (e *UsageError) Error() string { return e.What + ": " + e.Why }

// Unwrap returns the cause below, or nil.
func (e *UsageError) Unwrap() error { return e.Err }

func usage(what, format string, args ...any) *UsageError {
	return &UsageError{What: what, Why: fmt.Sprintf(format, args...)}
}

// EmptyError says that a selection holds no motion, and why.
type EmptyError struct {
	Held    int       // records in the store
	Outside int       // records outside the scope
	Unmet   int       // other records that do not meet the expression
	LeftOut []LeftOut // records left out for another reason
	Hint    string    // what to try, or ""
}

// Error gives the counts and reasons in one line.
func (e *EmptyError) Error() string {
	var parts []string
	if e.Outside > 0 {
		parts = append(parts, countOf(e.Outside, "record is", "records are")+" outside the place, time or event that was asked for")
	}
	if e.Unmet > 0 {
		parts = append(parts, countOf(e.Unmet, "record does", "records do")+" not meet the expression")
	}
	for _, l := range e.LeftOut {
		parts = append(parts, l.String())
	}
	if e.Hint != "" {
		parts = append(parts, e.Hint)
	}
	return strings.Join(append([]string{"nothing selected: the store holds " + countOf(e.Held, "record", "records")}, parts...), "; ")
}

// LeftOut counts the records that one reason kept out of a selection.
type LeftOut struct {
	Reason  string
	Records int
}

// String returns "2 records left out: one horizontal only".
func (l LeftOut) String() string {
	return countOf(l.Records, "record", "records") + " left out: " + l.Reason
}

func countOf(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return fmt.Sprintf("%d %s", n, many)
}
