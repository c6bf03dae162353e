package archive

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"strings"
	"testing"

	"swaybook/ingest/archive/archivetest"
)

// A receiver that wants no more gets no more, and nothing is read on.
func TestMembersStop(t *testing.T) {
	inner := file("i", string(archivetest.Tar(file("a", "x"), file("b", "x"))))
	for name, data := range map[string][]byte{"zip": archivetest.Zip(inner, inner), "tar": archivetest.Tar(inner, inner), "gz": archivetest.Gzip(archivetest.Tar(inner))} {
		for stop := 1; stop <= 2; stop++ {
			n := 0
			for range Members(t.Context(), bytes.NewReader(data), int64(len(data)), "a", Options{Limits: testLimits()}) {
				if n++; n == stop {
					break
				}
			}
			if n != stop {
				t.Errorf("%s: %d members, want %d", name, n, stop)
			}
		}
	}
}

// counting counts the bytes that are read from a file.
type counting struct {
	*bytes.Reader
	n int
}

func (c *counting) ReadAt(p []byte, off int64) (int, error) {
	n, err := c.Reader.ReadAt(p, off)
	c.n += n
	return n, err
}

// A context that ends is the last that an archive says, wherever it is, and soon:
// between members, and within one that expands.
func TestMembersEndWithTheContext(t *testing.T) {
	files := make([]archivetest.Member, 20)
	for i := range files {
		files[i] = file(fmt.Sprintf("%02d", i), strings.Repeat(fmt.Sprint(i), 20_000))
	}
	tarred := archivetest.Tar(files...)
	for name, data := range map[string][]byte{
		"zip": archivetest.Zip(files...), "tar": tarred, "tar.gz": archivetest.Gzip(tarred), "zip of tar": archivetest.Zip(file("i", string(tarred))),
	} {
		ctx, cancel := context.WithCancel(t.Context())
		defer cancel()
		source := &counting{Reader: bytes.NewReader(data)}
		var last error
		n, read := 0, 0
		for _, err := range Members(ctx, source, int64(len(data)), "a", Options{Limits: testLimits()}) {
			n, last = n+1, err
			if n == 1 {
				cancel()
				read = source.n
			}
		}
		if !errors.Is(last, context.Canceled) || n != 2 || source.n != read {
			t.Errorf("%s: %d members, %d bytes read after the end, error %v", name, n, source.n-read, last)
		}
	}
	// Within one member, when the file has come to its end long ago.
	ctx, cancel := context.WithCancel(t.Context())
	w := &walk{ctx: ctx, limits: testLimits(), left: 1 << 40}
	r := expand{w, bytes.NewReader(make([]byte, 1<<16))}
	if _, err := r.Read(make([]byte, 10)); err != nil {
		t.Error(err)
	}
	cancel()
	if _, err := r.Read(make([]byte, 10)); !errors.Is(err, context.Canceled) || w.ended == nil {
		t.Errorf("expand after the end: %v, %v", err, w.ended)
	}
}
