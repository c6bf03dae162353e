package db

import (
	"errors"
	"testing"
)

func TestNoEditionNamesThoseThatAre(t *testing.T) {
	for _, c := range []struct {
		kept []int64
		want string
	}{
		{nil, "there is no run 9"},
		{[]int64{4}, "there is no run 9; editions are kept of: 4"},
		{[]int64{1, 2, 4, 5, 6, 8}, "there is no run 9; editions are kept of: 1, 2, 4 to 6, 8"},
	} {
		err := &NoEditionError{Run: 9, Kept: c.kept}
		if err.Error() != c.want || !errors.Is(err, ErrNoEdition) {
			t.Errorf("%v: %q, want %q", c.kept, err, c.want)
		}
	}
}
