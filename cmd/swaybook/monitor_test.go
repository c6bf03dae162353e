package main

import (
	"bytes"
	"io"
	"log/slog"
	"testing"
)

// The bar goes on where an archive brings more files to light, even after a
// moment in which all that were known were done.
func TestTheBarGrows(t *testing.T) {
	m := newMonitor(slog.New(slog.NewTextHandler(io.Discard, nil)), &bytes.Buffer{}, false)
	m.terminal = true
	for _, p := range []struct{ done, total int }{{1, 2}, {2, 3}, {3, 3}, {4, 9}, {5, 10}} {
		m.show("ingesting", "files", p.done, p.total)
		if got := m.bar.State(); m.bar.GetMax() != p.total || int(got.CurrentNum) != p.done || m.bar.IsFinished() != (p.done == p.total) {
			t.Errorf("%d of %d: %+v", p.done, p.total, got)
		}
	}
}
