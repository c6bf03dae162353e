package miniseed

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"runtime"
	"testing"

	"swaybook/ingest/miniseed/miniseedtest"
)

// TestDamage compares the whole messages. An error of the file has no channel's
// samples beside it; one of a channel leaves the others.
func TestDamage(t *testing.T) {
	x := walk(40, 100, 1)
	good, steim := invented(Int32, x).One(2), invented(Steim2, x).One(2)
	v3 := invented(Int32, x).One(3)
	// with returns a copy in which bytes from at on are replaced.
	with := func(b []byte, at int, by ...byte) []byte {
		out := bytes.Clone(b)
		copy(out[at:], by)
		return out
	}
	sealed := func(b []byte) []byte {
		miniseedtest.Seal(b)
		return b
	}
	none := invented(Int32, x)
	none.NoBlockette1000 = true
	three := invented(Int32, x)
	three.Microseconds, three.Rate100 = 5, 100
	chained := three.One(2)
	still := invented(Int32, x)
	still.Rate = 0
	ends := binary.BigEndian.AppendUint16(nil, math.MaxUint16)
	later := invented(Float32, x)
	later.Start = at.Add(400e6)
	cases := []struct {
		name, file, channel string
		data                []byte
	}{
		{name: "empty of headers", data: []byte("no record"), file: "record at byte 0: no header of miniSEED"},
		{name: "junk behind", data: append(bytes.Clone(good), bytes.Repeat([]byte("junk"), 20)...), file: "record at byte 512: no header of miniSEED"},
		{name: "truncated", data: good[:500], file: "record at byte 0: truncated: its length is 512 bytes, 500 are there"},
		{name: "truncated, second", data: append(bytes.Clone(good), good[:300]...), file: "record at byte 512: truncated: its length is 512 bytes, 300 are there"},
		{name: "truncated in a header", data: append(bytes.Clone(good), good[:29]...), file: "record at byte 512: truncated: 29 bytes of its header are there"},
		{name: "truncated, version 3", data: v3[:200], file: "record at byte 0: truncated: its length is 221 bytes, 200 are there"},
		{name: "no blockette 1000", data: none.One(2), file: "record at byte 0: no blockette 1000: length and encoding are unknown"},
		{name: "loop", data: with(chained, 58, 0, 48), file: "record at byte 0: blockettes make a loop: byte 48 follows byte 56"},
		{name: "loop of one", data: with(chained, 50, 0, 48), file: "record at byte 0: blockettes make a loop: byte 48 follows byte 48"},
		{name: "blockette in the header", data: with(good, 46, 0, 40), file: "record at byte 0: blockette at byte 40, inside the header"},
		{name: "blockette behind the record", data: with(chained, 58, 2, 0), file: "record at byte 0: blockette at byte 512, behind the end of the record"},
		{name: "cut blockette", data: with(append(bytes.Clone(good[:52]), 0, 0), 46, 0, 48), file: "record at byte 0: blockette at byte 48: type 1000 is cut"},
		{name: "length", data: with(good, 54, 21), file: "record at byte 0: blockette at byte 48: a record length of 2^21 bytes is outside 2^7 to 2^20"},
		{name: "word order", data: with(good, 53, 2), file: "record at byte 0: blockette at byte 48: word order 2 is neither 0 nor 1"},
		{name: "data offset", data: with(good, 44, 0, 8), file: "record at byte 0: samples are said to begin at byte 8 of 512"},
		{name: "data offset behind", data: with(good, 44, 2, 0), file: "record at byte 0: samples are said to begin at byte 512 of 512"},
		{name: "hour", data: with(good, 24, 24), file: "record at byte 0: year 2041 day 63 24:12:16 and 1234/10000 s are no time"},
		{name: "code", data: with(good, 8, 7), file: `record at byte 0: station code "\aULM " is no text`},
		{name: "full SEED", data: append([]byte("000001V 010"), good...), file: "record at byte 0: full SEED: extract miniSEED and StationXML from it"},
		{name: "control header", data: append(bytes.Clone(good), with(good, 6, 'S')...), file: "record at byte 512: full SEED: extract miniSEED and StationXML from it"},
		{name: "checksum", data: with(v3, 70, 1), file: "record at byte 0: checksum is fda1d0db, the header says 9355a26e"},
		{name: "identifier", data: sealed(with(v3, 40, 'f')), file: `record at byte 0: source identifier "fDSN:XX_CULM_00_H_N_E" is not FDSN:NET_STA_LOC_B_S_SS`},
		{name: "second", data: sealed(with(v3, 14, 61)), file: "record at byte 0: year 2041 day 63 08:12:61 and 123400000 ns are no time"},
		{name: "year", data: sealed(with(v3, 8, 0, 0)), file: "record at byte 0: year 0 day 63 08:12:16 and 123400000 ns are no time"},

		{name: "retired encoding", data: with(good, 52, 16), channel: "record at byte 0: encoding 16 (CDSN 16-bit) is not read"},
		{name: "24 bits", data: with(good, 52, 2), channel: "record at byte 0: encoding 2 (24-bit integers) is not read"},
		{name: "unknown encoding", data: with(good, 52, 77), channel: "record at byte 0: encoding 77 is not read"},
		{name: "count", data: with(good, 30, ends...), channel: "record at byte 0: announced 65535 samples, found room for 112 in 448 bytes of encoding 3 (int32)"},
		{name: "count, Steim", data: with(steim, 30, 0, 200), channel: "record at byte 0: announced 200 samples, the frames hold 40"},
		{name: "count, no frame", data: sealed(with(invented(Int32, x[:10]).One(3), 15, 11)), channel: "record at byte 0: announced 10 samples, found room for 0 in 40 bytes of encoding 11 (Steim-2)"},
		{name: "last sample", data: with(steim, 64+8, 0, 0, 1, 0), channel: fmt.Sprintf("record at byte 0: damaged frames: they lead to the last sample %g, which is said to be 256", x[39])},
		{name: "one difference", data: with(steim, 64+14, 99), channel: ""},
		{name: "division", data: with(steim, 64, 0x03, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0xff), channel: "record at byte 0: damaged frame: word 3 of frame 0 has code 3 and begins with bits 11"},
		{name: "no rate", data: still.One(2), channel: "record at byte 0: 40 samples at a rate of 0 Hz"},
		{name: "mixed", data: append(bytes.Clone(good), later.One(2)...), channel: "record at byte 512: samples change between integers and floating-point numbers"},
	}
	for _, k := range cases {
		t.Run(k.name, func(t *testing.T) {
			f, err := Decode(t.Context(), k.data)
			if k.file != "" {
				if e := new(Error); err == nil || err.Error() != k.file || !errors.As(err, &e) {
					t.Fatalf("error %v, want %q", err, k.file)
				}
				return
			}
			if err != nil {
				t.Fatal(err)
			}
			c := f.Channels[0]
			if c.Err == nil || len(c.Traces) > 0 || k.channel != "" && c.Err.Error() != k.channel {
				t.Fatalf("channel's error %v, want %q", c.Err, k.channel)
			}
			other := invented(Steim1, x)
			other.Channel = "HNZ"
			f, err = Decode(t.Context(), append(bytes.Clone(k.data), other.One(3)...))
			if err != nil || len(f.Channels) != 2 || f.Channels[0].Err == nil || f.Channels[1].Err != nil || !equal(f.Channels[1].Traces[0].Samples, x) {
				t.Errorf("with another channel behind: %v, %v", f, err)
			}
		})
	}
}

func TestSniff(t *testing.T) {
	x := walk(40, 100, 1)
	text := "000001D ABC  00HNEXX a text that begins like a header, and is none of them"
	for want, data := range map[string][]byte{
		"a header of miniSEED 2.4": invented(Int32, x).One(2),
		"a header of miniSEED 3":   invented(Int32, x).One(3),
		"a volume header of SEED":  []byte("000001V 010009402.3121970,001"),
		"":                         []byte(text),
	} {
		if got := Sniff(data); got != want {
			t.Errorf("Sniff = %q, want %q", got, want)
		}
		if want != "" && Sniff(data[:8]) != "" {
			t.Errorf("Sniff of eight bytes = %q", Sniff(data[:8]))
		}
	}
}

// memoryFactor bounds what is allocated in all for each byte of input, beside a
// fixed part. A Steim-2 word of four bytes gives seven samples of eight.
const memoryFactor = 64

func FuzzDecode(f *testing.F) {
	x := walk(300, 3000, 1)
	for _, e := range []Encoding{Int16, Int32, Float32, Float64, Steim1, Steim2} {
		for _, version := range []int{2, 3} {
			r := invented(e, x)
			r.Little, r.LittleWords = e == Steim1, e == Int16
			f.Add(r.Series(version))
		}
	}
	three := invented(Steim2, x)
	three.Microseconds, three.Rate100, three.Correction = 5, 100, 7
	f.Add(three.Series(2))
	f.Add(append(append(piece(x, 0, 100, 0), piece(x, 90, 200, 0)...), piece(x, 220, 230, 0)...))
	f.Fuzz(func(t *testing.T, data []byte) {
		before := bytes.Clone(data)
		// Mutations break the checksum, behind which nothing would be tested.
		for at := 0; at < len(data) && isV3(data[at:]); {
			b := data[at:]
			size := int64(v3Header) + int64(b[33]) + int64(binary.LittleEndian.Uint16(b[34:])) + int64(binary.LittleEndian.Uint32(b[36:]))
			if size > int64(len(b)) {
				break
			}
			miniseedtest.Seal(b[:size])
			at += int(size)
		}
		sealed := bytes.Clone(data)
		decodeBounded(t, data)
		if !bytes.Equal(data, sealed) {
			t.Error("Decode changed its input")
		}
		copy(data, before)
		decodeBounded(t, data)
	})
}

// decodeBounded decodes data and looks at what Decode promises.
func decodeBounded(t *testing.T, data []byte) {
	var start, end runtime.MemStats
	runtime.ReadMemStats(&start)
	f, err := Decode(t.Context(), data)
	runtime.ReadMemStats(&end)
	if used := end.TotalAlloc - start.TotalAlloc; used > 1<<16+memoryFactor*uint64(len(data)) {
		t.Errorf("%d bytes allocated for %d bytes", used, len(data))
	}
	if e := new(Error); err != nil && (!errors.As(err, &e) || e.Offset < 0 || e.Offset >= max(1, len(data))) {
		t.Fatalf("error %v of %d bytes", err, len(data))
	}
	if err != nil {
		return
	}
	for _, c := range f.Channels {
		if e := new(Error); c.Err != nil && !errors.As(c.Err, &e) {
			t.Fatalf("channel's error is a %T", c.Err)
		}
		if (c.Err != nil) == (len(c.Traces) > 0) && f.Skipped == 0 {
			t.Fatalf("%d traces and error %v", len(c.Traces), c.Err)
		}
		for i, tr := range c.Traces {
			if !(tr.Rate > 0) || len(tr.Samples) == 0 || tr.Start.Year() < firstYear || i > 0 && tr.Start.Before(c.Traces[i-1].Start) {
				t.Fatalf("trace %d of %d samples at %g Hz from %v", i, len(tr.Samples), tr.Rate, tr.Start)
			}
		}
		for _, g := range c.Gaps() {
			if g.Missing < 0 {
				t.Fatalf("gap %+v", g)
			}
		}
	}
}
