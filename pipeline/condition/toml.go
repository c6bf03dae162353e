package condition

import (
	"bytes"
	"errors"
	"fmt"
	"reflect"
	"slices"
	"strings"

	"github.com/pelletier/go-toml/v2"
)

// maxText bounds a recipe's file in bytes.
const maxText = 1 << 20

// FileError is a mistake in a recipe's file; Line counts from 1, 0 where it is of no one
// line.
type FileError struct {
	Line int
	Err  error
}

// Error returns "line 12: cause".
func (e *FileError) Error() string {
	if e.Line == 0 {
		return e.Err.Error()
	}
	return fmt.Sprintf("line %d: %v", e.Line, e.Err)
}

// Unwrap returns the cause.
func (e *FileError) Unwrap() error { return e.Err }

// Parse reads a recipe that somebody wrote: TOML with the keys name, explain, states and
// step, which repeats. Unknown keys are mistakes. Without states the steps apply to what
// is raw, as those of Standard do. The error is a FileError.
func Parse(text []byte) (Recipe, error) {
	if len(text) > maxText {
		return Recipe{}, &FileError{0, fmt.Errorf("a recipe of more than %d bytes", maxText)}
	}
	r := Recipe{States: []string{}, Steps: []Step{}}
	decoder := toml.NewDecoder(bytes.NewReader(text)).DisallowUnknownFields()
	if err := decoder.Decode(&r); err != nil {
		return Recipe{}, tomlError(err)
	}
	if err := checkBrackets(text); err != nil {
		return Recipe{}, err
	}
	if len(r.States) == 0 && len(r.Steps) > 0 {
		r.States = Standard().States
	}
	if err := r.Validate(); err != nil {
		line := 0
		if step, ok := errors.AsType[*StepError](err); ok {
			line = lineOfField(text, step)
		}
		return Recipe{}, &FileError{line, err}
	}
	for _, known := range BuiltIn() {
		if r.Name == known.Name {
			return Recipe{}, &FileError{0, fmt.Errorf("name: %q is a recipe that is built in", r.Name)}
		}
	}
	return r, nil
}

func tomlError(err error) error {
	if unknown, ok := errors.AsType[*toml.StrictMissingError](err); ok {
		first := unknown.Errors[0]
		line, _ := first.Position()
		return &FileError{line, fmt.Errorf("unknown key %q", strings.Join(first.Key(), "."))}
	}
	if wrong, ok := errors.AsType[*toml.DecodeError](err); ok {
		line, _ := wrong.Position()
		if want := wanted(wrong.Key()); want != "" && isOfType(wrong) {
			return &FileError{line, fmt.Errorf("%s: want %s", strings.Join(wrong.Key(), "."), want)}
		}
		return &FileError{line, errors.New(strings.TrimPrefix(wrong.Error(), "toml: "))}
	}
	return &FileError{0, err}
}

// isOfType reports whether a value is of another type than its key takes: the decoder's
// words for that name types of this program. A second table of steps is one, too.
func isOfType(err *toml.DecodeError) bool {
	text := err.Error()
	return strings.Contains(text, "cannot decode") || strings.Contains(text, "cannot store") || slices.Equal(err.Key(), []string{"step"})
}

const wantedSteps = "each step under a heading of its own, [[step]] in double brackets"

// wanted says for people which values a key takes, "" for an unknown key.
func wanted(key []string) string {
	at := reflect.TypeFor[Recipe]()
	for _, name := range key {
		for at.Kind() != reflect.Struct {
			if at.Kind() != reflect.Pointer && at.Kind() != reflect.Slice {
				return ""
			}
			at = at.Elem()
		}
		field, ok := fieldOf(at, name)
		if !ok {
			return ""
		}
		at = field
	}
	switch at.Kind() {
	case reflect.String:
		return `a text in quotes`
	case reflect.Int:
		return "a whole number, without a decimal point"
	case reflect.Float64:
		return "a number"
	case reflect.Pointer:
		return "a table of numbers, such as { ratio = 3, least_hz = 0.05, most_hz = 1, else_hz = 0.1 }"
	case reflect.Slice:
		if at.Elem().Kind() == reflect.Struct {
			return wantedSteps
		}
		return `a list of texts, such as ["raw"]`
	}
	return ""
}

// fieldOf is the type of the field that has this key.
func fieldOf(of reflect.Type, key string) (reflect.Type, bool) {
	for i := range of.NumField() {
		if f := of.Field(i); f.Tag.Get("toml") == key {
			return f.Type, true
		}
	}
	return nil, false
}

// checkBrackets refuses [step]: the decoder takes one such table for a list of one, and
// the next for a mistake of another kind.
func checkBrackets(text []byte) error {
	var shape struct {
		Step any `toml:"step"`
	}
	if err := toml.Unmarshal(text, &shape); err != nil {
		return tomlError(err)
	}
	if _, isTable := shape.Step.(map[string]any); !isTable {
		return nil
	}
	return &FileError{lineOf(text, 1, "[step]", "step="), errors.New("step: want " + wantedSteps)}
}

// lineOfField is the line of the field that a step's mistake begins with, or that of the
// step where the field is not there.
func lineOfField(text []byte, err *StepError) int {
	heading := lineOf(text, err.Step, "[[step]]")
	if heading == 0 {
		return 0
	}
	lines := bytes.Split(text, []byte("\n"))
	rest := bytes.Join(lines[heading:], []byte("\n"))
	if next := lineOf(rest, 1, "[[step]]"); next > 0 {
		rest = bytes.Join(lines[heading:heading+next-1], []byte("\n"))
	}
	field, _, _ := strings.Cut(err.Err.Error(), ":")
	table, key, inTable := strings.Cut(field, ".")
	beginnings := []string{table + "="}
	if inTable {
		beginnings = append(beginnings, key+"=", field+"=")
	}
	if line := lineOf(rest, 1, beginnings...); line > 0 {
		return heading + line
	}
	return heading
}

// lineOf is the n-th line that begins in one of these ways, blanks left out; 0 for none.
func lineOf(text []byte, n int, beginnings ...string) int {
	for i, line := range bytes.Split(text, []byte("\n")) {
		bare := strings.Join(strings.Fields(string(line)), "")
		if slices.ContainsFunc(beginnings, func(b string) bool { return strings.HasPrefix(bare, b) }) {
			if n--; n == 0 {
				return i + 1
			}
		}
	}
	return 0
}
