package condition

import (
	"bytes"
	"errors"
	"fmt"
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
	if len(r.States) == 0 && len(r.Steps) > 0 {
		r.States = Standard().States
	}
	if err := r.Validate(); err != nil {
		line := 0
		if step, ok := errors.AsType[*StepError](err); ok {
			line = lineOfStep(text, step.Step)
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
		return &FileError{line, errors.New(strings.TrimPrefix(wrong.Error(), "toml: "))}
	}
	return &FileError{0, err}
}

// lineOfStep is the line of the n-th step's heading.
func lineOfStep(text []byte, n int) int {
	for i, line := range bytes.Split(text, []byte("\n")) {
		if heading := strings.ReplaceAll(strings.TrimSpace(string(line)), " ", ""); strings.HasPrefix(heading, "[[step]]") {
			if n--; n == 0 {
				return i + 1
			}
		}
	}
	return 0
}
