package archive

import (
	"archive/tar"
	"archive/zip"
	"bytes"
	"compress/gzip"
	"context"
	"encoding/base64"
	"fmt"
	"io"
	"strings"
	"testing"
	"time"
)

// file is a member to pack: its name and content.
type file struct{ name, content string }

var packedAt = time.Date(2026, 3, 12, 8, 30, 0, 0, time.UTC)

func zipOf(t testing.TB, files ...file) []byte {
	t.Helper()
	return zipWith(t, func(*zip.FileHeader) {}, files...)
}

// zipWith lets change look at each header before it is written.
func zipWith(t testing.TB, change func(*zip.FileHeader), files ...file) []byte {
	t.Helper()
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	for _, f := range files {
		h := &zip.FileHeader{Name: f.name, Method: zip.Deflate, Modified: packedAt}
		change(h)
		w, err := z.CreateHeader(h)
		if err == nil {
			_, err = io.WriteString(w, f.content)
		}
		if err != nil {
			t.Fatal(err)
		}
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func tarOf(t testing.TB, files ...file) []byte {
	t.Helper()
	return tarWith(t, func(*tar.Header) {}, files...)
}

func tarWith(t testing.TB, change func(*tar.Header), files ...file) []byte {
	t.Helper()
	var b bytes.Buffer
	w := tar.NewWriter(&b)
	for _, f := range files {
		h := &tar.Header{Name: f.name, Typeflag: tar.TypeReg, Size: int64(len(f.content)), Mode: 0o644, ModTime: packedAt}
		change(h)
		err := w.WriteHeader(h)
		if err == nil {
			_, err = io.WriteString(w, f.content)
		}
		if err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func gzipOf(t testing.TB, data []byte) []byte {
	t.Helper()
	var b bytes.Buffer
	w := gzip.NewWriter(&b)
	_, err := w.Write(data)
	if err == nil {
		err = w.Close()
	}
	if err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func decoded(t testing.TB, text string) []byte {
	t.Helper()
	data, err := base64.StdEncoding.DecodeString(text)
	if err != nil {
		t.Fatal(err)
	}
	return data
}

// testLimits are those of a run, with small members.
func testLimits() Limits { return DefaultLimits(1 << 20) }

// list reads the archive and writes what it gives, a line each: name=content,
// name~why skipped, name!error.
func list(t testing.TB, data []byte, base string, limits Limits) string {
	t.Helper()
	return listed(t.Context(), data, base, Options{Limits: limits})
}

func listed(ctx context.Context, data []byte, base string, o Options) string {
	var lines []string
	for m, err := range Members(ctx, bytes.NewReader(data), int64(len(data)), base, o) {
		switch {
		case err != nil:
			lines = append(lines, fmt.Sprintf("%s!%v", m.Name, err))
		case m.Skipped != "":
			lines = append(lines, m.Name+"~"+m.Skipped)
		default:
			lines = append(lines, m.Name+"="+string(m.Data))
		}
	}
	return strings.Join(lines, "\n")
}
