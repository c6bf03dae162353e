package ingest

import (
	"bytes"
	"flag"
	"math"
	"os"
	"path/filepath"
	"testing"
	"time"

	"swaybook/ingest/miniseed/miniseedtest"
)

var updateMiniSEED = flag.Bool("update-miniseed", false, "rewrite the fixtures of miniSEED")

// mseedStart is when the invented records begin: 9 s after an invented
// earthquake.
var mseedStart = time.Date(2041, 3, 4, 8, 12, 9, 500_000_000, time.UTC)

// The encodings of the fixtures, by their numbers in SEED.
const (
	encodedInt32   = 3
	encodedFloat32 = 4
	encodedSteim1  = 10
	encodedSteim2  = 11
)

// mseedRecord is the base of the fixtures: 6 s of an accelerometer at 100 Hz,
// counts about an offset, quiet for 0.4 s.
func mseedRecord(channel string, offset, peak float64) miniseedtest.Record {
	x := append(make([]float64, 40), ring(560, peak, 1.7+float64(channel[2]%5)/50, 0.98)...)
	for i, v := range x {
		x[i] = math.Round(offset + v)
	}
	return miniseedtest.Record{
		Network: "XX", Station: "TARN", Location: "00", Channel: channel, Start: mseedStart, Rate: 100, Encoding: encodedSteim2, Samples: x,
	}
}

// later is the record without its first n samples.
func later(r miniseedtest.Record, n int) miniseedtest.Record {
	r.Samples = r.Samples[n:]
	r.Start = r.Start.Add(time.Duration(n) * time.Second / time.Duration(r.Rate))
	return r
}

// earlier is the record without its last n samples.
func earlier(r miniseedtest.Record, n int) miniseedtest.Record {
	r.Samples = r.Samples[:len(r.Samples)-n]
	return r
}

// mseedSamples are the fixtures' channels; of three of them the second begins 7
// samples later and the third ends 4 earlier.
func mseedSamples() (east, north, up miniseedtest.Record) {
	return mseedRecord("HNE", 1020, 310_000), later(mseedRecord("HNN", -511, 260_000), 7), earlier(mseedRecord("HNZ", 77, -140_000), 4)
}

// mseedFixtures are the binary files under testdata/records/miniseed.
func mseedFixtures() map[string][]byte {
	east, north, up := mseedSamples()
	velocity := mseedRecord("HHZ", 0, 90_000)
	three := bytes.Join([][]byte{up.Series(2), north.Series(2), velocity.Series(2), east.Series(2)}, nil)

	deep := func(channel string, peak float64) []byte {
		r := mseedRecord(channel, 12, peak)
		r.Location, r.Encoding, r.Rate = "10", encodedInt32, 200
		return r.Series(3)
	}
	floats := mseedRecord("HNE", 0, 1)
	floats.Station, floats.Encoding, floats.Little, floats.LittleWords = "FELL", encodedFloat32, true, true
	floats.Samples = ring(600, 0.31, 1.72, 0.98)

	unknown := mseedRecord("HNE", 1020, 310_000)
	unknown.Station = "MERE"
	eastData, northData := east.Series(2), north.Series(2)
	steim := bytes.Clone(eastData)
	steim[512+64+11] ^= 1 // the last sample of the second record
	checksum := north.Series(3)
	checksum[100]++
	other := east
	other.Samples = append([]float64(nil), east.Samples...)
	other.Samples[300]++
	count := bytes.Clone(eastData)
	count[30] = 0xff

	return map[string][]byte{
		"three-channels.mseed":          three,
		"borehole-version3.mseed":       bytes.Join([][]byte{deep("HN1", 52_000), deep("HN2", 47_000), deep("HNZ", 30_000)}, nil),
		"floats.mseed":                  floats.Series(2),
		"velocity.mseed":                velocity.Series(2),
		"damaged-truncated.mseed":       three[:len(three)-100],
		"damaged-junk-appended.mseed":   append(bytes.Clone(eastData), "<html><body>The server was busy. Please come again later.</body></html>"...),
		"damaged-gap.mseed":             append(earlier(east, 300).Series(2), later(east, 350).Series(2)...),
		"damaged-overlap.mseed":         append(earlier(east, 200).Series(2), later(other, 250).Series(2)...),
		"damaged-steim-of-one.mseed":    append(steim, northData...),
		"damaged-checksum.mseed":        checksum,
		"damaged-count.mseed":           count,
		"damaged-wrong-unit.mseed":      func() []byte { r := mseedRecord("HNV", 3, 5000); return r.Series(2) }(),
		"damaged-unknown-station.mseed": unknown.Series(2),
		"damaged-empty.mseed":           {},
	}
}

// TestMiniSEEDFixtures compares the committed files with what their generator
// makes; with -update-miniseed it rewrites them.
func TestMiniSEEDFixtures(t *testing.T) {
	for name, want := range mseedFixtures() {
		path := filepath.Join(recordsDir("miniseed"), name)
		if *updateMiniSEED {
			if err := os.WriteFile(path, want, 0o644); err != nil {
				t.Fatal(err)
			}
			continue
		}
		if !bytes.Equal(readFile(t, path), want) {
			t.Errorf("%s is not what its generator makes; run go test ./ingest -run TestMiniSEEDFixtures -update-miniseed and say why", path)
		}
	}
}
