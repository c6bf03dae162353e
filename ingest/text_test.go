package ingest

import (
	"bytes"
	"math/rand/v2"
	"strings"
	"testing"

	"swaybook/ingest/archive/archivetest"
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
		got := string(bytes.Join(splitLines(data, func() {}), []byte("\n")))
		if n := len(splitLines(data, func() {})); n != len(want) || got != strings.Join(want, "\n") {
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

// A zip archive that unpacks itself begins as a script or a program does.
func TestNewTextRefusesSelfExtractingArchives(t *testing.T) {
	packed := archivetest.Zip(archivetest.File("a", "0.125"))
	commented := bytes.Clone(packed)
	commented[len(commented)-2] = 9
	const want = ": file is a zip archive behind a program or script that unpacks it: unpack it first (read in place are .zip, .tar, .tar.gz, .tar.bz2, .gz and .bz2)"
	for name, data := range map[string]string{
		"script":         "#!/bin/sh\nunzip \"$0\"\nexit\n" + string(packed),
		"program":        "MZ\x90\x00\x03\x00\x00\x00" + strings.Repeat("\x00", 5000) + string(packed),
		"with a comment": "#!/bin/sh\n" + string(commented) + "invented\n",
	} {
		if _, err := NewText([]byte(data)); err == nil || err.Error() != want {
			t.Errorf("%s: %v, want %s", name, err, want)
		}
	}
	if _, err := NewText([]byte("#!/bin/sh\n" + string(commented) + "of another length\n")); err == nil || err.Error() == want {
		t.Errorf("bytes behind the archive: %v", err)
	}
}

// A text with NUL bytes is damaged at a line; what has control characters or many NUL
// bytes is no text.
func TestNewTextRefusesNULs(t *testing.T) {
	const damaged, binary = "NUL byte in the text: the file is damaged", "file is binary, not a text record"
	lines := strings.Repeat("0.125\n", 50)
	for name, tt := range map[string]struct{ data, want string }{
		"one":                {lines + "0.1\x0025\n" + lines, ":51: " + damaged},
		"behind a line end":  {lines + "\x00\n", ":51: " + damaged},
		"with CR alone":      {strings.ReplaceAll(lines, "\n", "\r") + "0.1\x0025\r", ":51: " + damaged},
		"a sector of zeros":  {strings.Repeat(lines, 3) + strings.Repeat("\x00", 512) + lines, ":151: " + damaged},
		"far behind":         {strings.Repeat(lines, 100) + "\x001", ":5001: " + damaged},
		"more NUL than text": {lines + strings.Repeat("\x00", 512) + lines[:100], ": " + binary},
		"with controls":      {strings.Repeat("\x01\x02\x00abc", 50), ": " + binary},
	} {
		if _, err := NewText([]byte(tt.data)); err == nil || err.Error() != tt.want {
			t.Errorf("%s: %v, want %s", name, err, tt.want)
		}
	}
}
