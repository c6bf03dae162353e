package miniseed

import (
	"encoding/hex"
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"testing"
	"time"
)

// referenceRecord is what a library read in one record.
type referenceRecord struct {
	File     string
	Offset   int
	ID       string
	StartUS  int64 `json:"start_us"`
	Rate     float64
	Encoding Encoding // of version 3
	Samples  []float64
}

// libmseedSeries is a series that libmseed packed.
type libmseedSeries struct {
	Encoding  Encoding
	BigEndian bool `json:"big_endian"`
	Samples   []float64
	Records   []string
}

// readReference reads testdata/reference/miniseed.json; the head of miniseed.c
// beside it says how it was made.
func readReference(t *testing.T, name string, into any) {
	t.Helper()
	data, err := os.ReadFile(filepath.Join("..", "..", "testdata", "reference", name))
	if err == nil {
		err = json.Unmarshal(data, into)
	}
	if err != nil {
		t.Fatal(err)
	}
}

// TestAgainstLibmseed reads the fixtures of package ingest record by record, and
// finds what libmseed finds: codes, start, rate and every sample.
func TestAgainstLibmseed(t *testing.T) {
	var reference struct {
		Read   []referenceRecord
		Packed []libmseedSeries
	}
	readReference(t, "miniseed.json", &reference)
	if len(reference.Read) < 20 || len(reference.Packed) != 12 {
		t.Fatalf("the reference has %d records and %d series", len(reference.Read), len(reference.Packed))
	}
	for _, want := range reference.Read {
		data, err := os.ReadFile(filepath.Join("..", "..", "testdata", "records", "miniseed", want.File))
		if err != nil {
			t.Fatal(err)
		}
		c := one(t, data[want.Offset:want.Offset+512])
		got := trace(t, data[want.Offset:want.Offset+512])
		if c.ID.String() != want.ID || got.Start.UnixMicro() != want.StartUS || got.Rate != want.Rate || !equal(got.Samples, want.Samples) {
			t.Errorf("%s, byte %d: %s from %v at %g Hz, %d samples, want %s from %v at %g Hz, %d samples", want.File, want.Offset, c.ID, got.Start,
				got.Rate, len(got.Samples), want.ID, time.UnixMicro(want.StartUS).UTC(), want.Rate, len(want.Samples))
		}
	}
	for _, want := range reference.Packed {
		var data []byte
		for _, r := range want.Records {
			b, err := hex.DecodeString(r)
			if err != nil {
				t.Fatal(err)
			}
			data = append(data, b...)
		}
		got := trace(t, data)
		start := time.Date(2041, 3, 4, 8, 12, 9, 500_037_000, time.UTC)
		// Without blockette 1001 a start is rounded to 0.1 ms.
		if off := got.Start.Sub(start).Abs(); off > 100*time.Microsecond || got.Rate != 200 || got.Encoding != want.Encoding || got.Flags != 0 {
			t.Errorf("%v, big-endian %v: from %v at %g Hz, %v, flags %b", want.Encoding, want.BigEndian, got.Start, got.Rate, got.Encoding, got.Flags)
		}
		if !equal(got.Samples, want.Samples) {
			t.Errorf("%v, big-endian %v: other samples than libmseed packed", want.Encoding, want.BigEndian)
		}
	}
}

// TestAgainstSeisplotjs reads the records of version 3 among the fixtures, and
// finds what another library finds; the head of miniseed3.mjs beside the
// reference says how it was made. The checksum is that of the header, which Decode
// compares with its own.
func TestAgainstSeisplotjs(t *testing.T) {
	var reference struct{ Read []referenceRecord }
	readReference(t, "miniseed3.json", &reference)
	if len(reference.Read) != 18 {
		t.Fatalf("the reference has %d records", len(reference.Read))
	}
	for i, want := range reference.Read {
		data, err := os.ReadFile(filepath.Join("..", "..", "testdata", "records", "miniseed", want.File))
		if err != nil {
			t.Fatal(err)
		}
		end := len(data)
		if i+1 < len(reference.Read) {
			end = reference.Read[i+1].Offset
		}
		c, got := one(t, data[want.Offset:end]), trace(t, data[want.Offset:end])
		id := fmt.Sprintf("FDSN:%s_%s_%s_%c_%c_%c", c.ID.Network, c.ID.Station, c.ID.Location, c.ID.Channel[0], c.ID.Channel[1], c.ID.Channel[2])
		if id != want.ID || got.Start.UnixMicro() != want.StartUS || got.Rate != want.Rate || got.Encoding != want.Encoding || !equal(got.Samples, want.Samples) {
			t.Errorf("byte %d: %s from %v at %g Hz, %d samples, want %s from %v at %g Hz, %d samples", want.Offset, id, got.Start, got.Rate, len(got.Samples),
				want.ID, time.UnixMicro(want.StartUS).UTC(), want.Rate, len(want.Samples))
		}
	}
}
