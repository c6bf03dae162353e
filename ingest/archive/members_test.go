package archive

import (
	"archive/tar"
	"archive/zip"
	"bytes"
	"encoding/binary"
	"fmt"
	"hash/crc32"
	"io/fs"
	"runtime"
	"strings"
	"testing"

	"swaybook/ingest/archive/archivetest"
)

// Archives that other tools made of one invented file of eight bytes.
const (
	// Info-ZIP Zip 3.0: printf invented | zip -fz, sizes and offsets in 64 bits.
	madeZip64 = "UEsDBC0AAAAAANZggV2/P/In//////////8BABQALQEAEAAIAAAAAAAAAAgAAAAAAAAAaW52ZW50ZWRQSwECHgMtAAAAAADWYIFdvz/yJwgAAAD/////AQAMAAAAAAABAAAAgBEAAAAALQEACAAIAAAAAAAAAFBLBgYsAAAAAAAAAB4DLQAAAAAAAAAAAAEAAAAAAAAAAQAAAAAAAAA7AAAAAAAAADsAAAAAAAAAUEsGBwAAAAB2AAAAAAAAAAEAAABQSwUGAAAAAAEAAQA7AAAA/////wAA"
	// Info-ZIP Zip 3.0: zip -e, a password.
	madeEncrypted = "UEsDBAoACQAAANZggV2/P/InFAAAAAgAAAAFABwAYS50eHRVVAkAA1S4DmtUuA5rdXgLAAEEAAAAAAQAAAAA1MeiUz8Aq56YgOMfPEFFBZKjDc9QSwcIvz/yJxQAAAAIAAAAUEsBAh4DCgAJAAAA1mCBXb8/8icUAAAACAAAAAUAGAAAAAAAAQAAAKSBAAAAAGEudHh0VVQFAANUuA5rdXgLAAEEAAAAAAQAAAAAUEsFBgAAAAABAAEASwAAAGMAAAAAAA=="
	// bzip2 1.0: the file itself, and GNU tar's archive of it.
	madeBzip2    = "QlpoOTFBWSZTWVSR3BkAAAGBgAYhBQAgACGADAFdJcOLuSKcKEgqSO4MgA=="
	madeTarBzip2 = "QlpoOTFBWSZTWWKZFCQAAHN7hMoAAFBAAX8AAAhmIZ9AAACACCAAdRFPU21TT1ANpGQbUEkSADQaDQE/mtZ0IJUAJESoaogXMkgdMPN9oRpBSBFJNQoYGSMDjNMIRuaXR/PDti9Ka1sjm72e/dUkH4u5IpwoSDFMihIA"
	// GNU tar, under gzip: --format=v7, which has no magic.
	madeOldTar = "H4sIAFS4DmsCA+3PMQ7CMBBE0T0KJ0BrbIfzIJGCJpUVcXwCZXoKS+81v5lmHtfxHvFfeVha+/VwbmbJKL1m7bWV23e33EuPS8zkfG4Sr21ft7E+AwAAAAAAAAAAgKl8AKwsuQsAKAAA"
	// GNU tar, under gzip: a file of a hole, in GNU's form and in that of POSIX.
	madeSparse    = "H4sIAFe4DmsCA+3QOwqFQAyF4SxllpA4j424AgvB4sKAD3D5DjaKghZyBeH/mkBOIHC6/Gvlz7RIIayzOM7CxKJXH32wKolaTKbiannBNIxN75z0OY9Xd3f5o3ZKA6dGtr3t9vrkgZ3DWQAAAAAAAAAAAAAAAAAAX7QAyJ6M3AAoAAA="
	madeSparsePAX = "H4sIAFe4DmsCA+3UzWqEMBQF4KzzFD5BvIn50YXbdlalUPoAoQ3UouOQOCB9+mZclKnQzkYGhjkfQuDeCOrNUZTPft4F/x5iKj/GPrDtUWa1XtZsvZJyiklTUWUqLZVlJKU0ihUzu4JjmnzMj8Luk1LF49OrSAcfUxCD/xxjK/mq2u1zlbjS59W9H0J7OjFc1ef1GHyfuq/Qamocr6gYpi7vlK6xebg1WdE4Y7Q2qj51/e+uE5TPwU/37e97GWxAlHl0L8vkHro+CGUcbf0fuJB/ma9V/g1ZYgVdM/9xHKf/9l3qr1/uVvLPc0wtl3xJKyFVd2bGJwAAAAAAAAAAAAAAAAAAALh530QWi7UAKAAA"
)

func TestMembers(t *testing.T) {
	abc := []archivetest.Member{file("c/3.V2", "three"), file("1.V2", "one"), file("a.V2", "two")}
	const sorted = "1.V2=one\na.V2=two\nc/3.V2=three"
	const asTheyLie = "c/3.V2=three\n1.V2=one\na.V2=two"
	inner := archivetest.Gzip(archivetest.Tar(abc...))
	for _, tt := range []struct {
		name, base string
		data       []byte
		want       string
	}{
		{"zip, unsorted", "a.zip", archivetest.Zip(abc...), sorted},
		{"zip, stored", "a.zip", archivetest.ZipWith(func(h *zip.FileHeader) { h.Method = zip.Store }, abc...), sorted},
		{"zip, 64-bit sizes", "a.zip", decoded(t, madeZip64), "-=invented"},
		{"tar", "a.tar", archivetest.Tar(abc...), asTheyLie},
		{"tar of the oldest form, gzip", "a.tar.gz", decoded(t, madeOldTar), "a.txt=invented"},
		{"tar.gz", "a.tgz", archivetest.Gzip(archivetest.Tar(abc...)), asTheyLie},
		{"tar.bz2", "a.tbz", decoded(t, madeTarBzip2), "a.txt=invented"},
		{"gz", "x.V2.gz", archivetest.Gzip([]byte("one")), "x.V2=one"},
		{"gz in two parts", "x.V2.gz", append(archivetest.Gzip([]byte("one")), archivetest.Gzip([]byte("two"))...), "x.V2=onetwo"},
		{"gz in many parts of nothing", "x.V2.gz", append(bytes.Repeat(archivetest.Gzip(nil), 300), archivetest.Gzip([]byte("one"))...), "x.V2=one"},
		{"gz of nothing", "x.V2.GZ", archivetest.Gzip(nil), "x.V2="},
		{"gz without the suffix", "x.V2", archivetest.Gzip([]byte("one")), "x.V2=one"},
		{"gz with nothing but the suffix", ".gz", archivetest.Gzip([]byte("one")), ".gz=one"},
		{"bz2", "x.V2.bz2", decoded(t, madeBzip2), "x.V2=invented"},
		{"zip of tar.gz", "a.zip", archivetest.Zip(file("b/i.tgz", string(inner)), file("a", "x")), "a=x\nb/i.tgz!c/3.V2=three\nb/i.tgz!1.V2=one\nb/i.tgz!a.V2=two"},
		{"tar.gz of zip", "a.tgz", archivetest.Gzip(archivetest.Tar(file("i.zip", string(archivetest.Zip(abc...))))), "i.zip!1.V2=one\ni.zip!a.V2=two\ni.zip!c/3.V2=three"},
		{"zip of gz", "a.zip", archivetest.Zip(file("d/x.V2.gz", string(archivetest.Gzip([]byte("one"))))), "d/x.V2.gz!x.V2=one"},
		{"zip under gz", "a.zip.gz", archivetest.Gzip(archivetest.Zip(abc[0])), "a.zip!c/3.V2=three"},
		{"folders are passed over", "a.zip", archivetest.Zip(file("d/", ""), file(`e\`, ""), file("d/x", "1")), "d/x=1"},
		{"an office document", "a.xlsx", archivetest.Zip(file("[Content_Types].xml", "<?xml"), file("xl/a.xml", "<?xml")), "~an office document, not a record"},
		{"an office document in an archive", "a.zip", archivetest.Zip(file("b.docx", string(archivetest.Zip(file("[Content_Types].xml", "<?xml"))))), "b.docx~an office document, not a record"},
		{"no archive", "a.zip", []byte("PK invented"), "!no archive: read in place are " + Opened},
	} {
		t.Run(tt.name, func(t *testing.T) {
			if got := list(t, tt.data, tt.base, testLimits()); got != tt.want {
				t.Errorf("got\n%s\nwant\n%s", got, tt.want)
			}
		})
	}
}

// A member says when it was last changed, in every kind of archive.
func TestMembersSayTheirTime(t *testing.T) {
	for name, data := range map[string][]byte{"zip": archivetest.Zip(file("a", "x")), "tar": archivetest.Tar(file("a", "x"))} {
		for m, err := range Members(t.Context(), bytes.NewReader(data), int64(len(data)), "a", Options{Limits: testLimits()}) {
			if err != nil || !m.Modified.Equal(archivetest.PackedAt) {
				t.Errorf("%s: time %v, %v", name, m.Modified, err)
			}
		}
	}
}

// What cannot be read is refused by its name, and the rest is read.
func TestRefusedMembers(t *testing.T) {
	limits := testLimits()
	limits.Member = 5
	linked := func(h *tar.Header) {
		switch h.Name {
		case "link":
			h.Typeflag, h.Linkname, h.Size = tar.TypeSymlink, "../x", 0
		case "hard":
			h.Typeflag, h.Linkname, h.Size = tar.TypeLink, "a", 0
		case "device":
			h.Typeflag, h.Size = tar.TypeChar, 0
		case "folder/":
			h.Typeflag = tar.TypeDir
		}
	}
	zipLinked := func(h *zip.FileHeader) {
		switch h.Name {
		case "b":
			h.SetMode(fs.ModeSymlink | 0o777)
		case "c":
			h.SetMode(fs.ModeDevice)
		}
	}
	otherMethod := bytes.ReplaceAll(archivetest.ZipWith(func(h *zip.FileHeader) { h.Method = zip.Store }, file("a", "x")), []byte("PK\x01\x02\x14\x00\x14\x00\x08\x00\x00\x00"), []byte("PK\x01\x02\x14\x00\x14\x00\x08\x00\x09\x00"))
	for _, tt := range []struct {
		name string
		data []byte
		want string
	}{
		{"encrypted", decoded(t, madeEncrypted), "a.txt!encrypted: unpack it with its password"},
		{"unknown method", otherMethod, "a!compressed by method 9, which is not read: unpack it"},
		{"too large in zip", archivetest.Zip(file("a", "123456"), file("b", "12345")), "a!larger than the limit of 5 bytes\nb=12345"},
		{"too large in tar", archivetest.Tar(file("a", "123456"), file("b", "12345")), "a!larger than the limit of 5 bytes\nb=12345"},
		{"too large under gzip", archivetest.Gzip([]byte("123456")), "a!larger than the limit of 5 bytes"},
		{"links and devices in tar", archivetest.TarWith(linked, file("a", "x"), file("link", ""), file("hard", ""), file("device", ""), file("folder/", ""), file("z", "y")),
			"a=x\nlink~a link to x\nhard~a link to a\nz=y"},
		{"links and devices in zip", archivetest.ZipWith(zipLinked, file("a", "x"), file("b", "../x"), file("c", "")), "a=x\nb~a link"},
		{"sparse, GNU", decoded(t, madeSparse), "hole!stored as a sparse file, which is not read: unpack it"},
		{"sparse, POSIX", decoded(t, madeSparsePAX), "hole!stored as a sparse file, which is not read: unpack it"},
		{"twice in tar", archivetest.Tar(file("a", "x"), file("./a", "y"), file("b", "z")), "a=x\na#2!a second file of this name in the archive: the first is read; unpack it to choose\nb=z"},
		{"twice in zip", archivetest.Zip(file("a", "x"), file("a", "y")), "a=x\na#2!a second file of this name in the archive: the first is read; unpack it to choose"},
		{"a long name", archivetest.Tar(file(strings.Repeat("n", 5000), "x"), file("b", "z")), strings.Repeat("n", 4096) + "!name of 5000 bytes is longer than the limit of 4096\nb=z"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			if got := list(t, tt.data, "a.gz", limits); got != tt.want {
				t.Errorf("got\n%s\nwant\n%s", got, tt.want)
			}
		})
	}
}

// badBlock is a gzip file that holds content, up to 64 KiB, and behind it a block of the
// kind that RFC 1951 reserves.
func badBlock(content []byte) []byte {
	out := bytes.Clone(archivetest.Gzip(nil)[:10])
	out = append(out, 0) // a block as it is, not the last one
	out = binary.LittleEndian.AppendUint16(out, uint16(len(content)))
	out = binary.LittleEndian.AppendUint16(out, ^uint16(len(content)))
	return append(append(out, content...), 0b111)
}

// Damage is told once, with the member at which it was; what lies before it is
// kept, and of a zip archive what lies behind it.
func TestDamage(t *testing.T) {
	noise := func(seed int) string { // hardly compressible
		var b strings.Builder
		for i := range 3000 {
			fmt.Fprintf(&b, "%d", (10_000*seed+i)*2654435761%1000003)
		}
		return b.String()
	}
	a, b, c := file("a", noise(1)), file("b", noise(2)), file("c", noise(3))
	whole := archivetest.Tar(a, b, c)
	second := bytes.Index(whole, []byte("b\x00\x00"))
	packed := archivetest.Gzip(whole)
	badSum := bytes.Clone(packed)
	badSum[len(badSum)-8] ^= 1
	stored := archivetest.ZipWith(func(h *zip.FileHeader) { h.Method = zip.Store }, a, b, c)
	changed := bytes.Replace(stored, []byte(b.Content), []byte("x"+b.Content[1:]), 1)
	gone := bytes.Clone(stored)
	before := gone[:bytes.Index(gone, []byte(b.Content))]
	copy(before[bytes.LastIndex(before, []byte("PK\x03\x04")):], "XX")
	one := archivetest.Gzip([]byte("1234567"))
	oneBadSum := bytes.Clone(one)
	oneBadSum[len(one)-8] ^= 1
	bzip2 := decoded(t, madeBzip2)
	badBzip2 := bytes.Clone(bzip2)
	badBzip2[12] ^= 1
	A, B, C := "a="+a.Content, "b="+b.Content, "c="+c.Content
	const cut, sum = "the data end in the middle: truncated?", "the checksum differs: damaged"
	const bad, behind = "the compressed data are damaged", "something follows the end of the compressed data, and is not read"
	for _, tt := range []struct {
		name string
		data []byte
		want string
	}{
		{"tar truncated in a member", whole[:second+2000], A + "\n!b: " + cut},
		{"tar truncated in a header", whole[:second+100], A + "\n!a: behind it: " + cut},
		{"tar truncated between members", whole[:second], A + "\n!ends without an end mark: truncated?"},
		{"tar truncated in the first header", whole[:600], "!a: " + cut},
		{"tar with a damaged header", bytes.Replace(whole, []byte("b\x00\x00"), []byte("B\x00\x00"), 1), A + "\n!a: behind it: damaged header"},
		{"tar with another behind", append(bytes.Clone(whole), whole...), A + "\n" + B + "\n" + C + "\n!bytes behind the end mark: archives that were joined? What follows is not read"},
		{"tar with zeros behind", append(bytes.Clone(whole), make([]byte, 4096)...), A + "\n" + B + "\n" + C},
		{"tar.gz truncated", packed[:len(packed)/2], A + "\n!b: " + cut},
		{"tar.gz without its last byte", packed[:len(packed)-1], A + "\n" + B + "\n" + C + "\n!" + cut},
		{"tar.gz with a wrong checksum", badSum, A + "\n" + B + "\n" + C + "\n!" + sum},
		{"tar.gz with junk appended", append(bytes.Clone(packed), "junk and more junk"...), A + "\n" + B + "\n" + C + "\n!" + behind},
		{"tar.gz with few bytes appended", append(bytes.Clone(packed), '\n'), A + "\n" + B + "\n" + C + "\n!" + behind},
		{"tar.gz with another part cut off", append(bytes.Clone(packed), packed[:5]...), A + "\n" + B + "\n" + C + "\n!" + cut},
		{"tar.gz damaged in a member", badBlock(whole[:second+2000]), A + "\n!b: " + bad},
		{"zip with a wrong checksum", changed, A + "\nb!" + sum + "\n" + C},
		{"zip with a member overwritten", gone, A + "\nb!not what the directory of the zip archive says: damaged\n" + C},
		{"zip truncated", stored[:len(stored)-30], "!no directory at the end of the zip archive: truncated?"},
		{"gz with a wrong checksum", oneBadSum, "x!" + sum},
		{"gz truncated", one[:len(one)-9], "x!" + cut},
		{"gz truncated in its header", one[:5], "!" + cut},
		{"gz with junk appended", append(bytes.Clone(one), "junk and more junk"...), "x!" + behind},
		{"gz with few bytes appended", append(bytes.Clone(one), "junk"...), "x!" + behind},
		{"gz damaged", badBlock([]byte("123")), "x!" + bad},
		{"bz2 with junk appended", append(bytes.Clone(bzip2), "junk"...), "x!" + behind},
		{"bz2 truncated", bzip2[:len(bzip2)-9], "x!" + cut},
		{"bz2 damaged", badBzip2, "x!" + bad},
		{"damage in an archive inside", archivetest.Zip(file("i.tar", string(whole[:second+2000])), file("z", "1")), "i.tar!" + A + "\ni.tar!b: " + cut + "\nz=1"},
		{"empty zip", archivetest.Zip(), "!the archive holds no files"},
		{"zip of a folder", archivetest.Zip(file("d/", "")), "!the archive holds no files"},
		{"gz of an empty tar is zeros", archivetest.Gzip(archivetest.Tar()), "x=" + strings.Repeat("\x00", 1024)},
		{"tar of a folder", archivetest.TarWith(func(h *tar.Header) { h.Typeflag = tar.TypeDir }, file("d/", "")), "!the archive holds no files"},
		{"an empty archive inside", archivetest.Zip(file("i.zip", string(archivetest.Zip())), file("z", "1")), "i.zip!the archive holds no files\nz=1"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			if got := list(t, tt.data, "x.gz", testLimits()); got != tt.want {
				t.Errorf("got\n%.2000q\nwant\n%.2000q", got, tt.want)
			}
		})
	}
}

// Whatever expands beyond its bounds ends there, what was read before it is kept.
func TestBombs(t *testing.T) {
	zeros := strings.Repeat("\x00", 1_000_000)
	many := make([]archivetest.Member, 12)
	for i := range many {
		many[i] = file(fmt.Sprintf("%02d", i), "x")
	}
	quine := archivetest.Gzip(archivetest.Gzip(archivetest.Gzip([]byte("x"))))
	ratio := func(l *Limits) { l.Free = 100_000 }
	total := func(l *Limits) { l.Total = 1_500_000 }
	const twice = "\n!expands to more than 64 times its size"
	for _, tt := range []struct {
		name   string
		data   []byte
		change func(*Limits)
		want   string // the end of the list
	}{
		{"ratio, zip", archivetest.Zip(file("a", "x"), file("b", zeros)), ratio, "a=x" + twice},
		{"ratio, tar.gz", archivetest.Gzip(archivetest.Tar(file("a", "x"), file("b", zeros))), ratio, "a=x" + twice},
		{"ratio, gz", archivetest.Gzip([]byte(zeros)), ratio, "!expands to more than 64 times its size"},
		{"ratio, zip of gz", archivetest.Zip(file("a", "x"), file("b", string(archivetest.Gzip([]byte(zeros))))), ratio, "a=x" + twice},
		{"ratio, skipped over in tar.gz", archivetest.Gzip(archivetest.Tar(file("b", zeros))), func(l *Limits) { l.Free, l.Member = 100_000, 10 },
			"b!larger than the limit of 10 bytes" + twice},
		{"small files compress as they like", archivetest.Gzip([]byte(zeros)), func(*Limits) {}, "a=" + zeros},
		{"total", archivetest.ZipWith(func(h *zip.FileHeader) { h.Method = zip.Store }, file("a", zeros), file("b", zeros)), total,
			"a=" + zeros + "\n!expands to more than 1500000 bytes: unpack it and name what is in it"},
		{"count, zip", archivetest.Zip(many...), func(l *Limits) { l.Count = 11 }, "\n10=x\n!holds more than 11 files: unpack it"},
		{"count, tar", archivetest.Tar(many...), func(l *Limits) { l.Count = 11 }, "\n10=x\n!holds more than 11 files: unpack it"},
		{"count, over all archives", archivetest.Zip(file("a", string(archivetest.Zip(many...))), file("b", string(archivetest.Zip(many...)))), func(l *Limits) { l.Count = 20 },
			"\nb!05=x\n!holds more than 20 files: unpack it"},
		{"directory", archivetest.Zip(many...), func(l *Limits) { l.Directory = 300 }, "!the directory of the zip archive is too long: unpack it"},
		{"nesting", quine, func(*Limits) {}, "a!a!an archive too deep inside others: unpack the outermost"},
		{"nesting ends that one only", archivetest.Zip(file("a", string(quine)), file("b", "x")), func(*Limits) {}, "a!a!an archive too deep inside others: unpack the outermost\nb=x"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			limits := testLimits()
			tt.change(&limits)
			if got := list(t, tt.data, "a", limits); !strings.HasSuffix(got, tt.want) {
				t.Errorf("got\n%.2000q\nwant at the end\n%.2000q", got, tt.want)
			}
		})
	}
}

// A zip archive whose directory names one member's bytes again and again is
// bounded like any other.
func TestOverlappingMembers(t *testing.T) {
	content := strings.Repeat("\x00", 10_000)
	data := archivetest.Zip(file("a", content))
	from := bytes.Index(data, []byte("PK\x01\x02"))
	to := bytes.Index(data, []byte("PK\x05\x06"))
	entry, end := data[from:to], bytes.Clone(data[to:])
	const n = 500
	bomb := bytes.Clone(data[:from])
	for i := range n {
		e := bytes.Clone(entry)
		e[46] = byte('a' + i%26) // the name
		bomb = append(bomb, e...)
	}
	binary.LittleEndian.PutUint16(end[8:], n)
	binary.LittleEndian.PutUint16(end[10:], n)
	binary.LittleEndian.PutUint32(end[12:], uint32(n*len(entry)))
	limits := testLimits()
	limits.Free, limits.Ratio = 1000, 1
	got := list(t, append(bomb, end...), "a.zip", limits)
	if !strings.HasPrefix(got, "a="+content) || !strings.HasSuffix(got, "\n!expands to more than 1 times its size") {
		t.Errorf("got %.300q … %.300q", got, got[max(0, len(got)-300):])
	}
}

// A size that a header only claims takes no memory.
func TestClaimedSizes(t *testing.T) {
	data := archivetest.ZipWith(func(h *zip.FileHeader) {
		h.Method, h.CRC32, h.CompressedSize64, h.UncompressedSize64 = zip.Store, crc32.ChecksumIEEE([]byte("x")), 1, 1
	}, file("a", "x"))
	at := bytes.Index(data, []byte("PK\x01\x02"))
	binary.LittleEndian.PutUint32(data[at+24:], 1<<28-1)
	limits := DefaultLimits(1 << 28)
	var start, end runtime.MemStats
	runtime.ReadMemStats(&start)
	got := list(t, data, "a.zip", limits)
	runtime.ReadMemStats(&end)
	if used := end.TotalAlloc - start.TotalAlloc; used > 4*firstRead {
		t.Errorf("%d bytes allocated", used)
	}
	if !strings.HasPrefix(got, "a!") {
		t.Errorf("got %q", got)
	}
}

func TestSkip(t *testing.T) {
	skip := func(name string) string {
		if strings.HasPrefix(name, "r") {
			return "a readme"
		}
		return ""
	}
	data := archivetest.Zip(file("a", "x"), file("i.tar", string(archivetest.Tar(file("r", "x"), file("b", "x")))), file("./readme.zip", "PK\x03\x04"))
	got := listed(t.Context(), data, "a.zip", Options{Limits: testLimits(), Skip: skip})
	if want := "a=x\ni.tar!r~a readme\ni.tar!b=x\nreadme.zip~a readme"; got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
}

// Passing over the members of a tar finds its damage as reading them does.
func TestDamageBehindSkippedMembers(t *testing.T) {
	whole := archivetest.Tar(file("a", strings.Repeat("x", 3000)), file("b", strings.Repeat("x", 3000)))
	second := blockSize + 6*blockSize // a header and 3000 bytes
	for _, tt := range []struct {
		name string
		data []byte
		want string
	}{
		{"whole", whole, "a~no\nb~no"},
		{"truncated in a member", whole[:second+blockSize+1500], "a~no\nb~no\n!b: behind it: the data end in the middle: truncated?"},
		{"truncated behind a member", whole[:len(whole)-2*blockSize], "a~no\nb~no\n!ends without an end mark: truncated?"},
	} {
		for kind, data := range map[string][]byte{"tar": tt.data, "tar.gz": archivetest.Gzip(tt.data)} {
			got := listed(t.Context(), data, "a", Options{Limits: testLimits(), Skip: func(string) string { return "no" }})
			if got != tt.want {
				t.Errorf("%s, %s: got\n%s\nwant\n%s", kind, tt.name, got, tt.want)
			}
		}
	}
}
