package ingest

import (
	"bytes"
	"math/rand/v2"
	"strings"
	"testing"
)

// TestSplitLines compares with the plain way: CRLF and CR made LF, then split.
func TestSplitLines(t *testing.T) {
	const seed = 9
	r := rand.New(rand.NewPCG(seed, 1))
	for range 5000 {
		data := make([]byte, r.IntN(12))
		for i := range data {
			data[i] = "a \r\n"[r.IntN(4)]
		}
		plain := strings.NewReplacer("\r\n", "\n", "\r", "\n").Replace(string(data))
		want := strings.Split(plain, "\n")
		if want[len(want)-1] == "" {
			want = want[:len(want)-1]
		}
		got := string(bytes.Join(splitLines(data), []byte("\n")))
		if n := len(splitLines(data)); n != len(want) || got != strings.Join(want, "\n") {
			t.Fatalf("seed %d: splitLines(%q) = %d lines %q, want %d lines %q", seed, data, n, got, len(want), want)
		}
	}
}

// Archives that are not read in place are refused by name, with those that are.
func TestNewTextRefusesArchives(t *testing.T) {
	const rest = ": unpack it first (read in place are .zip, .tar, .tar.gz, .tar.bz2, .gz and .bz2)"
	for head, want := range map[string]string{
		"\xfd7zXZ\x00": "an xz file", "7z\xbc\xaf\x27\x1c": "a 7z archive", "Rar!\x1a\x07\x00": "a rar archive", "\x28\xb5\x2f\xfd": "a zstd file",
		"\x1f\x9d\x90": "a file of compress (.Z)",
	} {
		if _, err := NewText([]byte(head + "invented")); err == nil || strings.TrimPrefix(err.Error(), ": ") != "file is "+want+rest {
			t.Errorf("%q: %v, want %s", head, err, want)
		}
	}
}
