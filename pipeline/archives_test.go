package pipeline

import (
	"archive/zip"
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/ingest/archive/archivetest"
)

func packed(name, content string) archivetest.Member { return archivetest.File(name, content) }

func zipOf(members ...archivetest.Member) string { return string(archivetest.Zip(members...)) }
func tarOf(members ...archivetest.Member) string { return string(archivetest.Tar(members...)) }
func gzipOf(content string) string               { return string(archivetest.Gzip([]byte(content))) }

// anonymous is an invented record whose file says nothing of event and station.
func anonymous(seed int) string {
	var b strings.Builder
	b.WriteString("time(s),acc(g)\n")
	for i := range 200 {
		fmt.Fprintf(&b, "%.2f,%.4f\n", float64(i)/100, float64((i*seed)%97-48)/1000)
	}
	return b.String()
}

// unpackedTree is records in folders, with and without identity, some of equal
// names.
func unpackedTree() []archivetest.Member {
	return []archivetest.Member{
		packed("EV1/run1.csv", anonymous(7)), packed("EV1/ST0000.AT2", at2("Invented", "Site 00", "000", 1)), packed("EV1/ST0090.AT2", at2("Invented", "Site 00", "090", 2)),
		packed("EV2/run1.csv", anonymous(11)), packed("EV2/README.txt", "Invented."), packed("EV2/sub/run1.csv", anonymous(13)),
		packed("EV3/deep/run1.csv", anonymous(17)), packed("EV3/deep/run2.csv", anonymous(19)),
		packed("EV4/ST01UP.AT2", at2("Invented", "Site 01", "UP", 3)), packed("EV4/ST01000.AT2", at2("Invented", "Site 01", "000", 4)),
		packed("EV5/run1.csv", anonymous(23)), packed("z_N.csv", anonymous(29)), packed("z_E.csv", anonymous(31)),
	}
}

// mixedTree is the same with archives where files or folders were.
func mixedTree() []archivetest.Member {
	u := unpackedTree()
	return []archivetest.Member{
		packed("EV1/all.tar", tarOf(packed("run1.csv", u[0].Content), packed("ST0000.AT2", u[1].Content), packed("ST0090.AT2", u[2].Content))),
		packed("EV2.tar.gz", gzipOf(tarOf(u[3:6]...))),
		packed("EV3/deep/run1.csv.gz", gzipOf(u[6].Content)), u[7],
		packed("EV4.zip", zipOf(u[9], u[8])), packed("EV5/"+"one.zip", zipOf(packed("run1.csv", u[10].Content))), u[11], u[12],
	}
}

func putAll(t testing.TB, dir string, files []archivetest.Member) {
	t.Helper()
	for _, f := range files {
		put(t, dir, f.Name, f.Content)
	}
}

// However records are packed, what is stored of them is the same, under the same
// codes: unpacked, with archives among the files, and all of that in one zip.
func TestArchivesGiveWhatTheirFilesGive(t *testing.T) {
	unpacked, mixed, zipped, tarred := t.TempDir(), t.TempDir(), t.TempDir(), t.TempDir()
	putAll(t, unpacked, unpackedTree())
	putAll(t, mixed, mixedTree())
	shuffled := mixedTree()
	slices.Reverse(shuffled)
	put(t, zipped, "all.zip", zipOf(shuffled...))
	put(t, tarred, "all.tgz", gzipOf(tarOf(mixedTree()...)))

	store := newStore(t)
	want := Summary{Files: 13, Stored: 12, StoredFiles: 12, Skipped: 1, Records: 9, Rotated: 2}
	if got := run(t, store, options(unpacked)); got != want {
		t.Errorf("unpacked: %+v, want %+v", got, want)
	}
	stored := slices.Sorted(slices.Values(dump(t, store))) // the spectra lie in the order of reading
	for _, dir := range []string{mixed, zipped, tarred} {
		for _, workers := range []int{1, 3} {
			other, opts := newStore(t), options(dir)
			opts.Workers = workers
			if got := run(t, other, opts); got != want {
				t.Errorf("%s: %+v, want %+v", dir, got, want)
			}
			if got := slices.Sorted(slices.Values(dump(t, other))); !slices.Equal(got, stored) {
				t.Errorf("%s: the store differs\n%s\nwant\n%s", dir, strings.Join(got, "\n"), strings.Join(stored, "\n"))
			}
		}
		// A file in an archive and the same unpacked are one.
		if got := run(t, store, options(dir)); got.Held != 12 || got.Stored != 0 || got.Files != 13 {
			t.Errorf("%s, into the store of the unpacked files: %+v", dir, got)
		}
	}
}

// Documents in archives serve records wherever both lie: unpacked, in a zip, in a
// tar with the documents behind the records, in archives inside and beside.
func TestDocumentsInArchives(t *testing.T) {
	fixture := func(name string) string {
		t.Helper()
		data, err := os.ReadFile(filepath.Join("..", "testdata", "records", "miniseed", name))
		if err != nil {
			t.Fatal(err)
		}
		return string(data)
	}
	record, stations, events := fixture("three-channels.mseed"), fixture("station.xml"), fixture("events.xml")
	broken := stations[:len(stations)/2]
	files := []archivetest.Member{packed("a/record.mseed", record), packed("b/broken.xml", broken), packed("b/other.xml", "<?xml version=\"1.0\"?><invented/>"), packed("b/station.xml", stations), packed("events.XML", events)}
	last := []archivetest.Member{files[0], files[4], files[3], files[2], files[1]}
	inside := func(outer func(...archivetest.Member) string, inner string) string {
		return outer(files[0], files[1], files[2], packed(inner, zipOf(packed("b/station.xml", stations))), files[4])
	}
	ways := map[string][]archivetest.Member{
		"zip":                        {packed("all.zip", zipOf(files...))},
		"tar.gz":                     {packed("all.tar.gz", gzipOf(tarOf(last...)))},
		"tar of a zip":               {packed("all.tar", inside(tarOf, "b.zip"))},
		"zip of a zip":               {packed("all.zip", inside(zipOf, "b.zip"))},
		"a document under gz":        {packed("a.zip", zipOf(files[:3]...)), packed("b/station.xml.gz", gzipOf(stations)), files[4]},
		"record and documents apart": {packed("a.zip", zipOf(files[0])), packed("b.tgz", gzipOf(tarOf(files[1:]...)))},
	}
	unpacked := t.TempDir()
	putAll(t, unpacked, files)
	store := newStore(t)
	want := Summary{Files: 5, Stored: 3, StoredFiles: 1, Skipped: 3, Rejected: 1, Records: 1, Rotated: 1}
	if got := run(t, store, options(unpacked)); got != want {
		t.Errorf("unpacked: %+v, want %+v", got, want)
	}
	stored := slices.Sorted(slices.Values(dump(t, store)))
	fault := faultIn(t, store, "broken.xml")
	for name, packed := range ways {
		dir, other := t.TempDir(), newStore(t)
		putAll(t, dir, packed)
		if got := run(t, other, options(dir)); got != want {
			t.Errorf("%s: %+v, want %+v", name, got, want)
		}
		if got := slices.Sorted(slices.Values(dump(t, other))); !slices.Equal(got, stored) {
			t.Errorf("%s: the store differs\n%s\nwant\n%s", name, strings.Join(got, "\n"), strings.Join(stored, "\n"))
		}
		if got := faultIn(t, other, "!b/broken.xml"); got != fault {
			t.Errorf("%s: rejected with %q, want %q", name, got, fault)
		}
	}
	// By its name nothing says that this is an archive: its record is read, and waits
	// for metadata.
	dir := t.TempDir()
	put(t, dir, "download", zipOf(files...))
	if got := run(t, newStore(t), options(dir)); got.Stored != 0 || got.Rejected != 1 || got.Skipped != 4 {
		t.Errorf("in an archive without a suffix: %+v", got)
	}
}

// What documents in archives say is bounded by their bytes, since it is held.
func TestDocumentsInArchivesAreBounded(t *testing.T) {
	dir := t.TempDir()
	put(t, dir, "a.zip", zipOf(packed("1.xml", "<?xml version=\"1.0\"?><a/>"), packed("2.xml", "<b/>"), packed("3.V2", "invented")))
	file := ingest.Found{Path: filepath.Join(dir, "a.zip"), Rel: "a.zip"}
	for left, want := range map[int]string{100: "", 26: "2.xml", 10: "1.xml 2.xml"} {
		src := newSource([]ingest.Found{file}, withDefaults(options()))
		a, _ := openArchive(file)
		src.readMembers(t.Context(), a, &ingest.Metadata{}, &left)
		a.Close()
		var refused []string
		for name, d := range src.decided {
			if d.err != nil {
				refused = append(refused, strings.TrimPrefix(name, file.Path+"!"))
			}
		}
		slices.Sort(refused)
		if got := strings.Join(refused, " "); got != want {
			t.Errorf("refused %q, want %q", got, want)
		}
	}
}

// faultIn is what stands against the only rejected file, whose path ends so.
func faultIn(t *testing.T, store *db.Store, suffix string) string {
	t.Helper()
	all, err := rejectionsOf(t, store)
	if err != nil || len(all) != 1 || !strings.HasSuffix(filepath.ToSlash(all[0].Path), suffix) {
		t.Fatalf("rejections %+v, %v", all, err)
	}
	return fmt.Sprintf("%d: %s", all[0].Line, all[0].Cause)
}

// Sources, rejections and skipped files say in which archive they lie.
func TestPathsInArchives(t *testing.T) {
	dir, store := t.TempDir(), newStore(t)
	cut := tarOf(packed("good.csv", anonymous(5)), packed("cut.csv", anonymous(6)))
	put(t, dir, "a.zip", zipOf(packed("__MACOSX/._x.csv", "\x00"), packed(".git/x.csv", "x"), packed("README", "x"), packed("d/bad.txt", "no record"),
		packed("i.tgz", gzipOf(tarOf(packed("x.csv", anonymous(3))))), packed("deep.zip", zipOf(packed("b.zip", zipOf(packed("x", "x")))))))
	put(t, dir, "b.tar", cut[:2*512+len(anonymous(5))+512])
	put(t, dir, "c.csv.gz", gzipOf(anonymous(4)))
	put(t, dir, "d.zip", zipOf())
	put(t, dir, "e.csv", anonymous(8))
	put(t, dir, "f.xlsx", zipOf(packed("[Content_Types].xml", "<?xml")))
	var got []string
	opts := options(dir)
	opts.Progress = func(p Progress) {
		rel, err := filepath.Rel(dir, p.File.Path)
		if err != nil {
			t.Error(err)
		}
		line := filepath.ToSlash(rel) + " " + string(p.File.Outcome) + " " + p.File.Reason
		for _, c := range p.File.Causes {
			line += fmt.Sprintf("%d: %s", c.Line, c.Text)
		}
		got = append(got, line)
		if p.Done != len(got) || p.Total < p.Done {
			t.Errorf("%s: %d of %d, want %d", rel, p.Done, p.Total, len(got))
		}
		if p.File.Path == filepath.Join(dir, "f.xlsx") && p.Done != p.Total {
			t.Errorf("%d of %d at the end", p.Done, p.Total)
		}
	}
	run(t, store, opts)
	want := []string{
		"a.zip!.git/x.csv skipped in a hidden folder", "a.zip!README skipped a readme", "a.zip!__MACOSX/._x.csv skipped a file of the operating system",
		`a.zip!d/bad.txt rejected 1: unknown format: found "no record"; no reader recognises this content`,
		"a.zip!deep.zip!b.zip rejected 0: an archive too deep inside others: unpack the outermost", "a.zip!i.tgz!x.csv stored ",
		"b.tar!good.csv stored ", "b.tar rejected 0: cut.csv: the data end in the middle: truncated?",
		"c.csv.gz!c.csv stored ", "d.zip rejected 0: the archive holds no files", "e.csv stored ", "f.xlsx skipped an office document, not a record",
	}
	if !slices.Equal(got, want) {
		t.Errorf("got\n%s\nwant\n%s", strings.Join(got, "\n"), strings.Join(want, "\n"))
	}
	for _, c := range componentsOf(t, store) {
		if base := filepath.Base(c.SourcePath); !slices.Contains([]string{"a.zip!i.tgz!x.csv", "b.tar!good.csv", "c.csv.gz!c.csv", "e.csv"}, base) {
			t.Errorf("source %s", c.SourcePath)
		}
	}
}

// An archive that was mended loses what was said against it and in it, and no
// other does.
func TestAMendedArchiveLosesItsRejections(t *testing.T) {
	dir, store := t.TempDir(), newStore(t)
	inner := tarOf(packed("x.csv", anonymous(3)))
	put(t, dir, "a.zip", zipOf(packed("i.tar", inner[:700]), packed("bad.txt", "no record")))
	put(t, dir, "a.zip2.tar", inner[:700])
	causes := func() (out []string) {
		rejections, err := rejectionsOf(t, store)
		if err != nil {
			t.Fatal(err)
		}
		for _, r := range rejections {
			out = append(out, filepath.Base(r.Path))
		}
		return out
	}
	for range 2 {
		if got := run(t, store, options(dir)); got.Rejected != 3 || got.Files != 3 {
			t.Errorf("run = %+v", got)
		}
		if got := causes(); !slices.Equal(got, []string{"a.zip!bad.txt", "a.zip!i.tar", "a.zip2.tar"}) {
			t.Errorf("rejections = %v", got)
		}
	}
	put(t, dir, "a.zip", zipOf(packed("i.tar", inner)))
	if got := run(t, store, options(filepath.Join(dir, "a.zip"))); got.Rejected != 0 || got.Stored != 1 || got.Files != 1 {
		t.Errorf("run = %+v", got)
	}
	if got := causes(); !slices.Equal(got, []string{"a.zip!bad.txt", "a.zip2.tar"}) {
		t.Errorf("rejections = %v", got)
	}
}

// A stop within an archive keeps whole batches; the next run reads the rest.
func TestAStopWithinAnArchive(t *testing.T) {
	var files []archivetest.Member
	for i := range 200 {
		files = append(files, packed(fmt.Sprintf("ST%03d000.AT2", i), at2("Invented", fmt.Sprintf("Site %03d", i), "000", uint64(i))))
	}
	dir, store := t.TempDir(), newStore(t)
	put(t, dir, "a.tar.gz", gzipOf(tarOf(files...)))
	ctx, cancel := context.WithCancel(t.Context())
	defer cancel()
	opts := options(dir)
	opts.Progress = func(Progress) { cancel() }
	summary, err := Run(ctx, store, opts)
	if !errors.Is(err, context.Canceled) || summary.Stored == 0 || summary.Stored >= len(files) || summary.Rejected != 0 {
		t.Fatalf("Run = %+v, %v", summary, err)
	}
	if got := run(t, store, options(dir)); got.Stored+got.Held != len(files) || got.Held < summary.Stored {
		t.Errorf("the next run: %+v", got)
	}
}

// The run's own files are not opened, and what cannot be read is no archive.
func TestSourceOpensWhatItMay(t *testing.T) {
	dir := t.TempDir()
	untimed := string(archivetest.ZipWith(func(h *zip.FileHeader) { h.Modified = time.Time{} }, packed("x", "x")))
	put(t, dir, "own.zip", untimed)
	put(t, dir, "b.zip", untimed)
	own, gone := filepath.Join(dir, "own.zip"), filepath.Join(dir, "gone.zip")
	src := newSource([]ingest.Found{{Path: own, Rel: "own.zip"}, {Path: gone, Rel: "gone.zip"}, {Path: filepath.Join(dir, "b.zip"), Rel: "b.zip"}}, withDefaults(Options{Own: map[string]string{own: "own"}}))
	var got []string
	for it := range src.items(t.Context()) {
		got = append(got, fmt.Sprintf("%s %s %s %s %t", it.Rel, it.stem, it.skip, it.data, it.opened))
		if it.isMember && it.modified.IsZero() {
			t.Error("a member without a time does not have that of its archive")
		}
	}
	want := []string{"own.zip own own  false", "gone.zip gone   false", "b.zip    true", "b.zip!x x  x false"}
	if !slices.Equal(got, want) {
		t.Errorf("items = %q, want %q", got, want)
	}
	if _, err := os.Stat(gone); err == nil {
		t.Fatal("the file is there")
	}
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	for range src.items(ctx) {
		t.Error("an item after the end of the context")
	}
}

// The catalogue describes members as it describes files.
func TestTheCatalogueDescribesMembers(t *testing.T) {
	for _, pattern := range []string{"x.csv", "*.csv", "d/x.csv", "i.tar!d/x.csv", "sub/a.zip!i.tar!d/x.csv", "sub/d/x.csv", "sub/*!*!d/*"} {
		dir, store := t.TempDir(), newStore(t)
		put(t, dir, "sub/a.zip", zipOf(packed("i.tar", tarOf(packed("d/x.csv", anonymous(3))))))
		opts := options(dir)
		opts.Catalogue = catalogue(t, "file,distance_km\n"+pattern+",7.7\n")
		run(t, store, opts)
		if c := componentsOf(t, store); len(c) != 1 || c[0].Record.Distances.BestKM == nil || *c[0].Record.Distances.BestKM != 7.7 {
			t.Errorf("%s: %+v", pattern, c)
		}
	}
}
