package archive

import (
	"archive/tar"
	"bytes"
	"context"
	"path"
	"runtime"
	"strings"
	"testing"
	"unicode"
	"unicode/utf8"

	"swaybook/ingest/archive/archivetest"
)

// FuzzArchive holds Members to what it owes on any bytes: no panic, the input
// untouched, labels that are clean and, where there is content, unlike each other,
// no more content than the limits allow, memory bounded by the input, and nothing
// behind the error of the archive itself.
func FuzzArchive(f *testing.F) {
	a, b := file("a.V2", "invented"), file("sub/../b.V2", strings.Repeat("0.25 ", 100))
	tarred := archivetest.Tar(a, b)
	for _, data := range [][]byte{
		archivetest.Zip(a, b), tarred, archivetest.Gzip(tarred), archivetest.Gzip([]byte(b.Content)), archivetest.Zip(a, a), archivetest.Zip(), tarred[:700],
		archivetest.Zip(file("i.tar.gz", string(archivetest.Gzip(tarred)))), archivetest.Tar(file("i.zip", string(archivetest.Zip(a, b)))),
		archivetest.Gzip(archivetest.Gzip(archivetest.Gzip(nil))), archivetest.Zip(file("z", strings.Repeat("\x00", 1<<18))),
		archivetest.TarWith(func(h *tar.Header) { h.Typeflag, h.Linkname, h.Size = tar.TypeLink, "../a", 0 }, file("l", "")),
		decoded(f, madeZip64), decoded(f, madeEncrypted), decoded(f, madeBzip2), decoded(f, madeTarBzip2), decoded(f, madeOldTar),
		decoded(f, madeSparse), decoded(f, madeSparsePAX),
	} {
		f.Add(data)
	}
	limits := DefaultLimits(1 << 18)
	limits.Free = 1 << 16
	f.Fuzz(func(t *testing.T, data []byte) {
		before := bytes.Clone(data)
		var start, end runtime.MemStats
		runtime.ReadMemStats(&start)
		members := checkMembers(t, data, limits)
		runtime.ReadMemStats(&end)
		// A member read by doubling takes three times its size, its decompressor and
		// buffers up to 4 MB, that of bzip2; a directory's entry some hundred
		// bytes for each of its 46.
		if used := end.TotalAlloc - start.TotalAlloc; used > 1<<23+uint64(members)<<22+3*uint64(limits.allowed(int64(len(data))))+16*uint64(len(data)) {
			t.Errorf("%d bytes allocated for %d members in %d bytes", used, members, len(data))
		}
		if !bytes.Equal(data, before) {
			t.Error("the input was changed")
		}
	})
}

func checkMembers(t *testing.T, data []byte, limits Limits) (members int) {
	content, over := int64(0), false
	labels := map[string]bool{}
	for m, err := range Members(context.Background(), bytes.NewReader(data), int64(len(data)), "a.gz", Options{Limits: limits}) {
		if over {
			t.Fatalf("%q, %v behind the end", m.Name, err)
		}
		members++
		content += int64(len(m.Data))
		over = err != nil && m.Name == ""
		for _, part := range Split(m.Name) {
			checkLabel(t, part, m.Name == "")
		}
		if err != nil {
			if err.Error() == "" || m.Data != nil {
				t.Fatalf("%q: error %q with %d bytes", m.Name, err, len(m.Data))
			}
			continue
		}
		if int64(len(m.Data)) > limits.Member {
			t.Fatalf("%q has %d bytes", m.Name, len(m.Data))
		}
		if m.Data != nil && labels[m.Name] {
			t.Fatalf("%q comes twice", m.Name)
		}
		labels[m.Name] = m.Data != nil
	}
	// What is in a tar archive that is not compressed is not expanded.
	if content > limits.allowed(int64(len(data)))+int64(len(data)) || members > limits.Count+1 {
		t.Fatalf("%d members of %d bytes in %d", members, content, len(data))
	}
	return members
}

func checkLabel(t *testing.T, name string, mayBeEmpty bool) {
	t.Helper()
	bad := !utf8.ValidString(name) || strings.ContainsFunc(name, unicode.IsControl) || strings.ContainsAny(name, `\`+Separator)
	if bad || name == "" && !mayBeEmpty || name != "" && path.Clean("/"+name) != "/"+name {
		t.Fatalf("label %q", name)
	}
}
