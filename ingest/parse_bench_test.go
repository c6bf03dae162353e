package ingest

import (
	"math"
	"strings"
	"testing"
)

// BenchmarkParse reads whole files, from bytes to checked channels, through
// every reader.
func BenchmarkParse(b *testing.B) {
	const n = 20000
	v2, cosmos, at2, counts, smc := v2Bridge, cosmosBase, at2North, knetNS, smcNorth
	v2.n, v2.x = n, ring(n, 25, 1.99, 0.999)
	cosmos.x = ring(n, -213.4, 1.99, 0.999)
	at2.x, at2.pair = ring(n, 0.3, 1.99, 0.999), "NPTS=  20000, DT=   .0050 SEC"
	counts.seconds = n / counts.rate
	smc.x = ring(n, -187, 1.99, 0.999)
	v1, nz := v1East, nzRaw[0]
	v1.n, v1.x = n, ring(n, 0.312, 1.99, 0.999)
	nz.x = ring(n, 2080.5, 1.99, 0.999)
	for name, lines := range map[string][]string{
		"california-v2": v2.lines(), "cosmos": cosmos.lines(), "at2": at2.lines(), "knet": counts.lines(),
		"esm":           newESM("HNE", 0.005, ring(n, 150, 1.99, 0.999)).lines(),
		"jma-csv":       jmaLong(n),
		"plain":         timed(even(n, 0.005), "%.3f", " "),
		"california-v1": v1.lines(), "smc": smc.lines(), "new-zealand": nzFile([]nzSample{nz, nz, nz}),
	} {
		hints := Hints{}
		if name == "plain" {
			hints.Unit = "g"
		}
		data := []byte(strings.Join(lines, "\r\n"))
		b.Run(name, func(b *testing.B) {
			b.SetBytes(int64(len(data)))
			b.ReportAllocs()
			for b.Loop() {
				if format, _, err := Parse("f", data, hints); err != nil || format != name {
					b.Fatal(format, err)
				}
			}
		})
	}
}

// BenchmarkParseMiniSEED reads a file of three channels in Steim-2; bytes are
// those of the file.
func BenchmarkParseMiniSEED(b *testing.B) {
	var data []byte
	for _, channel := range []string{"HNE", "HNN", "HNZ"} {
		r := mseedRecord(channel, 100, 310_000)
		x := ring(20000, 310_000, 1.99, 0.999)
		for i := range x {
			x[i] = math.Round(x[i])
		}
		r.Samples, r.Length = x, 4096
		data = append(data, r.Series(2)...)
	}
	hints := mseedHints(b)
	b.SetBytes(int64(len(data)))
	b.ReportAllocs()
	for b.Loop() {
		if _, channels, err := Parse("f", data, hints); err != nil || len(channels) != 3 {
			b.Fatal(len(channels), err)
		}
	}
}
