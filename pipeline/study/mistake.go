package study

import (
	"cmp"
	"slices"
	"strconv"
	"strings"
)

// Mistake is one thing that is wrong with a study's file, or with what it names.
type Mistake struct {
	Path string
	Line int    // from 1; 0 where it is of no one line
	Key  string // "" where it is of none
	Err  error
}

// Error returns "path:12: key: cause". The cause may begin with the key as well, or with its
// flag.
func (m *Mistake) Error() string {
	text := m.Path
	if m.Line > 0 {
		text += ":" + strconv.Itoa(m.Line)
	}
	if m.Key != "" {
		text += ": " + m.Key
	}
	key := m.Key[strings.LastIndexByte(m.Key, '.')+1:]
	cause := m.Err.Error()
	if rest, ok := strings.CutPrefix(strings.TrimPrefix(cause, "--"), key+": "); ok && key != "" {
		cause = rest
	}
	return text + ": " + cause
}

// Unwrap returns the cause.
func (m *Mistake) Unwrap() error { return m.Err }

// Mistakes are all that were found.
type Mistakes []*Mistake

// Error returns a line for each.
func (m Mistakes) Error() string {
	lines := make([]string, len(m))
	for i, one := range m {
		lines[i] = one.Error()
	}
	return strings.Join(lines, "\n")
}

// Unwrap returns them one by one.
func (m Mistakes) Unwrap() []error {
	out := make([]error, len(m))
	for i, one := range m {
		out[i] = one
	}
	return out
}

// Sorted returns them by line. What is said of one line in the same words, of a
// selection and of the products that use it, stays once.
func (m Mistakes) Sorted() Mistakes {
	m = slices.Clone(m)
	slices.SortStableFunc(m, func(a, b *Mistake) int { return cmp.Compare(a.Line, b.Line) })
	type saying struct {
		line int
		text string
	}
	said := map[saying]bool{}
	return slices.DeleteFunc(m, func(one *Mistake) bool {
		s := saying{one.Line, one.Err.Error()}
		again := said[s]
		said[s] = true
		return again && one.Line > 0
	})
}
