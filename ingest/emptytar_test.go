package ingest

import (
	"bytes"
	"testing"

	"swaybook/ingest/archive/archivetest"
)

// An empty tar archive has no mark of its own: what it holds is told.
func TestEmptyTar(t *testing.T) {
	empty := archivetest.Tar()
	const zeros, blank = "f: file holds only zeros: a tar archive without files, or content that was lost", "f: file holds only blanks"
	for _, k := range []struct {
		name string
		data []byte
		want string
	}{
		{"as tar writes it", empty, zeros},
		{"filled up to a tape's block", append(empty, make([]byte, 9216)...), zeros},
		{"no whole blocks", append(empty, 0), blank},
		{"one block", make([]byte, 512), blank},
		{"blanks in it", append(bytes.Repeat([]byte{' '}, 512), empty...), blank},
	} {
		if _, _, err := Parse(t.Context(), "f", k.data, Hints{}); err == nil || err.Error() != k.want {
			t.Errorf("%s: %v, want %s", k.name, err, k.want)
		}
	}
}
