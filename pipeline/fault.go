package pipeline

import "fmt"

// faultError is a panic of this program.
type faultError struct{ cause any }

func (e *faultError) Error() string {
	return fmt.Sprintf("internal error: %v; this is a fault of swaybook and not of the file, please report it", e.cause)
}

// survive does what do does and makes an error of a panic: one file, or one component,
// never stops a batch, even where it finds a fault of this program.
func survive(do func() error) (err error) {
	defer func() {
		if cause := recover(); cause != nil {
			err = &faultError{cause}
		}
	}()
	return do()
}
