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
