package pipeline

import (
	"fmt"
	"path/filepath"
	"testing"

	"swaybook/ingest"
)

// BenchmarkSource goes through files that are no archives, and through the same in
// one: what the dispatcher adds to the reading of a file, and all of the reading
// of a member; and what it costs to look for documents among them before.
func BenchmarkSource(b *testing.B) {
	const n = 300
	dir := b.TempDir()
	var files []packed
	var found []ingest.Found
	for i := range n {
		f := packed{fmt.Sprintf("%03d.AT2", i), at2Of("Invented", "Site", "000", 0.005, 8000, uint64(i))}
		put(b, dir, f.name, f.content)
		files = append(files, f)
		found = append(found, ingest.Found{Path: filepath.Join(dir, f.name), Rel: f.name})
	}
	cases := map[string][]ingest.Found{"files": found}
	for name, content := range map[string]string{"zip": zipOf(b, files...), "tar": tarOf(b, files...), "tar.gz": gzipOf(b, tarOf(b, files...))} {
		put(b, dir, "all."+name, content)
		cases[name] = []ingest.Found{{Path: filepath.Join(dir, "all."+name), Rel: "all." + name}}
	}
	for name, found := range cases {
		b.Run(name, func(b *testing.B) {
			b.ReportAllocs()
			bytes := 0
			for b.Loop() {
				for it := range newSource(found, nil).items(b.Context()) {
					bytes += len(it.data)
				}
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*n), "ns/file")
			b.ReportMetric(float64(bytes)/1e6/b.Elapsed().Seconds(), "MB/s")
		})
		b.Run(name+", documents", func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				newSource(found, nil).readMetadata(b.Context(), &ingest.Metadata{})
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*n), "ns/file")
		})
	}
}
