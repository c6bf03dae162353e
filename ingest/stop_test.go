package ingest

import (
	"bytes"
	"context"
	"path/filepath"
	"testing"
)

// endsAfter is a context that somebody ends when it has been asked so often.
type endsAfter struct {
	context.Context
	asks int
}

func (e *endsAfter) Err() error {
	if e.asks--; e.asks < 0 {
		return context.Canceled
	}
	return nil
}

// A run that is stopped waits for no reader: each asks every 32 lines, or at every
// record, and ends wherever that is, with the context's error and nothing else.
func TestReadersStop(t *testing.T) {
	hints := mseedHints(t)
	hints.Layouts = exampleLayouts(t)
	files := benchFiles()
	for _, info := range Formats(hints.Layouts) {
		data := files[info.Name]
		const plenty = 1 << 30
		counting := &endsAfter{t.Context(), plenty}
		if format, _, err := Parse(counting, "f", data, hints); err != nil || format != info.Name {
			t.Fatal(format, err)
		}
		asked := plenty - counting.asks
		pieces := bytes.Count(data, []byte("\n")) / linesBetweenLooks
		if info.Name == "miniseed" {
			pieces = len(data) / 4096
		}
		if asked < pieces {
			t.Errorf("%s: asked %d times over %d pieces", info.Name, asked, pieces)
		}
		for _, after := range []int{0, 1, 2, 3, 5, 8, asked / 3, asked / 2, asked - 2, asked - 1} {
			format, channels, err := Parse(&endsAfter{t.Context(), after}, "f", data, hints)
			if err != context.Canceled || format != "" || channels != nil {
				t.Errorf("%s, ended at look %d of %d: %q, %d channels, %v", info.Name, after, asked, format, len(channels), err)
			}
		}
	}
}

// Whatever is wrong with a file, an end of the context is told and no fault of the file's:
// of every fixture, good or damaged, at whichever look it comes, or from the beginning.
func TestReadersStopOnDamage(t *testing.T) {
	hints := mseedHints(t)
	hints.Layouts = exampleLayouts(t)
	stopped, stop := context.WithCancel(t.Context())
	stop()
	files := benchFiles()
	for _, path := range fixturePaths(t) {
		files[path] = readFile(t, path)
	}
	damaged := 0
	for name, data := range files {
		if format, channels, err := Parse(stopped, name, data, hints); err != context.Canceled || format != "" || channels != nil {
			t.Errorf("%s, ended before: %q, %d channels, %v", name, format, len(channels), err)
		}
		if len(data) > 100_000 {
			continue // long ones are for TestReadersStop
		}
		const plenty = 1 << 30
		counting := &endsAfter{t.Context(), plenty}
		if _, _, err := Parse(counting, name, data, hints); err != nil {
			damaged++
		}
		for after := range plenty - counting.asks {
			format, channels, err := Parse(&endsAfter{t.Context(), after}, name, data, hints)
			if err != context.Canceled || format != "" || channels != nil {
				t.Errorf("%s, ended at look %d of %d: %q, %d channels, %v", name, after, plenty-counting.asks, format, len(channels), err)
			}
		}
	}
	if damaged < 50 {
		t.Errorf("%d damaged files among %d, want 50 and more", damaged, len(files))
	}
}

// fixturePaths are the committed files of all formats.
func fixturePaths(t *testing.T) []string {
	t.Helper()
	paths, err := filepath.Glob(filepath.Join(recordsDir("*"), "*"))
	if err != nil || len(paths) == 0 {
		t.Fatal(paths, err)
	}
	return paths
}
