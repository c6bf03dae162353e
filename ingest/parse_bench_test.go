package ingest

import (
	"bytes"
	"fmt"
	"math"
	"strings"
	"testing"

	"swaybook/ingest/archive"
	"swaybook/ingest/archive/archivetest"
)

// benchSamples is how many samples a channel of the benchmarks' files has.
const benchSamples = 20000

// benchFiles are long files of every format, by the format's name.
func benchFiles() map[string][]byte {
	const n = benchSamples
	v2, cosmos, at2, counts, smc := v2Bridge, cosmosBase, at2North, knetNS, smcNorth
	v2.n, v2.x = n, ring(n, 25, 1.99, 0.999)
	cosmos.x = ring(n, -213.4, 1.99, 0.999)
	at2.x, at2.pair = ring(n, 0.3, 1.99, 0.999), "NPTS=  20000, DT=   .0050 SEC"
	counts.seconds = n / counts.rate
	smc.x = ring(n, -187, 1.99, 0.999)
	v1, nz := v1East, nzRaw[0]
	v1.n, v1.x = n, ring(n, 0.312, 1.99, 0.999)
	nz.x = ring(n, 2080.5, 1.99, 0.999)
	files := map[string][]byte{"miniseed": benchMiniSEED()}
	for name, lines := range map[string][]string{
		"california-v2": v2.lines(), "cosmos": cosmos.lines(), "at2": at2.lines(), "knet": counts.lines(),
		"esm":           newESM("HNE", 0.005, ring(n, 150, 1.99, 0.999)).lines(),
		"jma-csv":       jmaLong(n),
		"plain":         head([]string{"# unit: g"}, timed(even(n, 0.005), "%.3f", " ")),
		"california-v1": v1.lines(), "smc": smc.lines(), "new-zealand": nzFile([]nzSample{nz, nz, nz}),
		"quay-logger": quayLogger(n), "tower-table": towerTable(n),
	} {
		files[name] = []byte(strings.Join(lines, "\r\n"))
	}
	return files
}

// benchMiniSEED is three channels in Steim-2.
func benchMiniSEED() []byte {
	var data []byte
	for _, channel := range []string{"HNE", "HNN", "HNZ"} {
		r := mseedRecord(channel, 100, 310_000)
		x := ring(benchSamples, 310_000, 1.99, 0.999)
		for i := range x {
			x[i] = math.Round(x[i])
		}
		r.Samples, r.Length = x, 4096
		data = append(data, r.Series(2)...)
	}
	return data
}

// BenchmarkParse reads whole files of every format, from bytes to checked
// channels. Bytes are those of the file; decoded are those of the samples as
// float64.
func BenchmarkParse(b *testing.B) {
	hints := mseedHints(b)
	hints.Layouts = exampleLayouts(b)
	files := benchFiles()
	for _, info := range Formats(hints.Layouts) {
		data := files[info.Name]
		b.Run(info.Name, func(b *testing.B) {
			if data == nil {
				b.Fatal("no file of the format")
			}
			b.SetBytes(int64(len(data)))
			b.ReportAllocs()
			samples := 0
			for b.Loop() {
				format, channels, err := Parse(b.Context(), "f", data, hints)
				if err != nil || format != info.Name {
					b.Fatal(format, err)
				}
				for i := range channels {
					samples += len(channels[i].Acceleration)
				}
			}
			b.ReportMetric(float64(8*samples)/1e6/b.Elapsed().Seconds(), "decoded-MB/s")
		})
	}
}

// BenchmarkParseArchive reads text files out of the kinds of archive. Bytes are
// those of the files in it.
func BenchmarkParseArchive(b *testing.B) {
	const n = 8
	data := benchFiles()["at2"]
	tarred := archivetest.Tar(timesOver(n, data)...)
	for _, c := range []struct {
		name    string
		content []byte
		members int
	}{
		{"zip", archivetest.Zip(timesOver(n, data)...), n}, {"tar", tarred, n}, {"tar.gz", archivetest.Gzip(tarred), n}, {"gz", archivetest.Gzip(data), 1},
		{"tar.gz in a zip", archivetest.Zip(timesOver(1, archivetest.Gzip(tarred))...), n},
	} {
		b.Run(c.name, func(b *testing.B) {
			b.SetBytes(int64(c.members * len(data)))
			b.ReportAllocs()
			options := archive.Options{Limits: archive.DefaultLimits(MaxFileSize)}
			for b.Loop() {
				members := 0
				for m, err := range archive.Members(b.Context(), bytes.NewReader(c.content), int64(len(c.content)), c.name, options) {
					if err == nil {
						_, _, err = Parse(b.Context(), m.Name, m.Data, Hints{})
					}
					if err != nil {
						b.Fatal(err)
					}
					members++
				}
				if members != c.members {
					b.Fatal(members)
				}
			}
		})
	}
}

// timesOver are so many members of one content.
func timesOver(n int, data []byte) []archivetest.Member {
	var members []archivetest.Member
	for i := range n {
		members = append(members, archivetest.File(fmt.Sprint(i), string(data)))
	}
	return members
}
