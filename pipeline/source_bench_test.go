package pipeline

import (
	"fmt"
	"path/filepath"
	"testing"

	"swaybook/ingest"
	"swaybook/ingest/archive/archivetest"
)

// BenchmarkSource goes through files that are no archives, and through the same in
// one: what the dispatcher adds to the reading of a file, and all of the reading
// of a member; and what it costs to look for documents among them before.
func BenchmarkSource(b *testing.B) {
	const n = 300
	dir := b.TempDir()
	var files []archivetest.Member
	var found []ingest.Found
	for i := range n {
		f := packed(fmt.Sprintf("%03d.AT2", i), at2Of("Invented", "Site", "000", 0.005, 8000, uint64(i)))
		put(b, dir, f.Name, f.Content)
		files = append(files, f)
		found = append(found, ingest.Found{Path: filepath.Join(dir, f.Name), Rel: f.Name})
	}
	cases := map[string][]ingest.Found{"files": found}
	for name, content := range map[string]string{"zip": zipOf(files...), "tar": tarOf(files...), "tar.gz": gzipOf(tarOf(files...))} {
		put(b, dir, "all."+name, content)
		cases[name] = []ingest.Found{{Path: filepath.Join(dir, "all."+name), Rel: "all." + name}}
	}
	for name, found := range cases {
		b.Run(name, func(b *testing.B) {
			b.ReportAllocs()
			bytes := 0
			for b.Loop() {
				for it := range newSource(found, withDefaults(Options{})).items(b.Context()) {
					bytes += len(it.data)
				}
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*n), "ns/file")
			b.ReportMetric(float64(bytes)/1e6/b.Elapsed().Seconds(), "MB/s")
		})
		b.Run(name+", documents", func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				newSource(found, withDefaults(Options{})).readMetadata(b.Context(), &ingest.Metadata{})
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*n), "ns/file")
		})
	}
}
