package archive

import (
	"bytes"
	"context"
	"encoding/base64"
	"fmt"
	"strings"
	"testing"

	"swaybook/ingest/archive/archivetest"
)

func file(name, content string) archivetest.Member { return archivetest.File(name, content) }

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
