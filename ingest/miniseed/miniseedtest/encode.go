// Package miniseedtest writes miniSEED records for tests, as the specification
// describes them and without a look at the decoder. It is not meant for data that
// anybody keeps.
package miniseedtest

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"hash/crc32"
	"math"
	"math/bits"
	"time"
)

// Record is one record, or the first of a series of records, and its samples.
type Record struct {
	Network, Station, Location, Channel string
	Start                               time.Time
	Rate                                float64 // samples per s; a whole number in version 2.4 unless Factor is set
	Samples                             []float64
	Encoding                            uint8

	// Of version 2.4 alone.
	Length             int // bytes, default 512
	Little             bool
	LittleWords        bool // of the samples
	Factor, Multiplier int16
	Rate100            float32 // blockette 100, 0 for none
	Microseconds       int8    // blockette 1001, 0 for none
	Correction         int32   // in 0.0001 s
	Activity, Quality  byte
	NoBlockette1000    bool

	// Of version 3 alone.
	Flags byte
	Extra string // JSON headers
}

// Series writes all samples in as many records of version 2.4 or 3 as that
// takes.
func (r Record) Series(version int) []byte {
	var out []byte
	for left := r; len(left.Samples) > 0; {
		b, n := left.encode(version)
		out = append(out, b...)
		left.Start = left.Start.Add(time.Duration(math.Round(float64(n) / r.Rate * 1e9)))
		left.Samples = left.Samples[n:]
	}
	return out
}

// One writes one record, whose samples must have room in it.
func (r Record) One(version int) []byte {
	b, n := r.encode(version)
	if n != len(r.Samples) {
		panic(fmt.Sprintf("%d of %d samples have room in the record", n, len(r.Samples)))
	}
	return b
}

func (r Record) encode(version int) ([]byte, int) {
	if version == 3 {
		return r.v3()
	}
	return r.v2()
}

// order is one of the two of package binary.
type order interface {
	binary.ByteOrder
	binary.AppendByteOrder
}

func (r Record) v2() ([]byte, int) {
	if r.Length == 0 {
		r.Length = 512
	}
	var header order = binary.BigEndian
	if r.Little {
		header = binary.LittleEndian
	}
	var words order = binary.BigEndian
	if r.LittleWords {
		words = binary.LittleEndian
	}
	b := make([]byte, r.Length)
	chain := r.blockettes(header)
	from := (48 + len(chain) + 63) / 64 * 64
	payload, n := encodePayload(r.Samples, r.Encoding, words, r.Length-from)
	copy(b[48:], chain)
	copy(b[from:], payload)

	copy(b, "000001D ")
	for i := 8; i < 20; i++ {
		b[i] = ' '
	}
	copy(b[8:13], r.Station)
	copy(b[13:15], r.Location)
	copy(b[15:18], r.Channel)
	copy(b[18:20], r.Network)
	at := r.Start.UTC().Add(-time.Duration(r.Microseconds) * time.Microsecond)
	header.PutUint16(b[20:], uint16(at.Year()))
	header.PutUint16(b[22:], uint16(at.YearDay()))
	b[24], b[25], b[26] = byte(at.Hour()), byte(at.Minute()), byte(at.Second())
	header.PutUint16(b[28:], uint16(at.Nanosecond()/100_000))
	header.PutUint16(b[30:], uint16(n))
	if r.Factor == 0 {
		r.Factor, r.Multiplier = int16(r.Rate), 1
	}
	header.PutUint16(b[32:], uint16(r.Factor))
	header.PutUint16(b[34:], uint16(r.Multiplier))
	b[36], b[38] = r.Activity, r.Quality
	header.PutUint32(b[40:], uint32(r.Correction))
	header.PutUint16(b[44:], uint16(from))
	if len(chain) > 0 {
		header.PutUint16(b[46:], 48)
	}
	for at := 46; header.Uint16(b[at:]) != 0; at = int(header.Uint16(b[at:])) + 2 {
		b[39]++
	}
	return b, n
}

// blockettes writes the chain that begins at byte 48.
func (r Record) blockettes(order binary.ByteOrder) []byte {
	var parts [][]byte
	add := func(kind uint16, rest ...byte) {
		b := make([]byte, 4, 4+len(rest))
		order.PutUint16(b, kind)
		parts = append(parts, append(b, rest...))
	}
	if !r.NoBlockette1000 {
		word, exponent := byte(1), byte(math.Ilogb(float64(r.Length)))
		if r.LittleWords {
			word = 0
		}
		add(1000, r.Encoding, word, exponent, 0)
	}
	if r.Microseconds != 0 {
		add(1001, 100, byte(r.Microseconds), 0, 0)
	}
	if r.Rate100 != 0 {
		rate := make([]byte, 8)
		order.PutUint32(rate, math.Float32bits(r.Rate100))
		add(100, rate...)
	}
	var out []byte
	for i, p := range parts {
		if i < len(parts)-1 {
			order.PutUint16(p[2:], uint16(48+len(out)+len(p)))
		}
		out = append(out, p...)
	}
	return out
}

// v3Payload is the most bytes of samples of a record of version 3.
const v3Payload = 448

func (r Record) v3() ([]byte, int) {
	var words order = binary.LittleEndian
	if r.Encoding == 10 || r.Encoding == 11 {
		words = binary.BigEndian
	}
	payload, n := encodePayload(r.Samples, r.Encoding, words, v3Payload)
	id := fmt.Sprintf("FDSN:%s_%s_%s_%c_%c_%c", r.Network, r.Station, r.Location, r.Channel[0], r.Channel[1], r.Channel[2])
	at := r.Start.UTC()
	var b bytes.Buffer
	put := func(v any) { binary.Write(&b, binary.LittleEndian, v) } // into a buffer, which takes everything
	put([4]byte{'M', 'S', 3, r.Flags})
	put(uint32(at.Nanosecond()))
	put([2]uint16{uint16(at.Year()), uint16(at.YearDay())})
	put([4]byte{byte(at.Hour()), byte(at.Minute()), byte(at.Second()), r.Encoding})
	put(r.Rate)
	put([2]uint32{uint32(n), 0})
	put([2]byte{1, byte(len(id))})
	put(uint16(len(r.Extra)))
	put(uint32(len(payload)))
	b.WriteString(id + r.Extra)
	b.Write(payload)
	out := b.Bytes()
	Seal(out)
	return out, n
}

// Seal writes the checksum of a record of version 3.
func Seal(b []byte) {
	copy(b[28:32], []byte{0, 0, 0, 0})
	binary.LittleEndian.PutUint32(b[28:], crc32.Checksum(b, crc32.MakeTable(crc32.Castagnoli)))
}

// encodePayload writes as many samples as have room and returns their number.
func encodePayload(x []float64, encoding uint8, order order, room int) ([]byte, int) {
	var b []byte
	width := map[uint8]int{1: 2, 3: 4, 4: 4, 5: 8}[encoding]
	switch {
	case encoding == 10 || encoding == 11:
		return encodeSteim(x, encoding == 11, order, room/64)
	case width == 0:
		return nil, len(x)
	}
	n := min(len(x), room/width)
	for _, v := range x[:n] {
		switch encoding {
		case 1:
			b = order.AppendUint16(b, uint16(int16(v)))
		case 3:
			b = order.AppendUint32(b, uint32(int32(v)))
		case 4:
			b = order.AppendUint32(b, math.Float32bits(float32(v)))
		case 5:
			b = order.AppendUint64(b, math.Float64bits(v))
		}
	}
	return b, n
}

// packing is one way to divide a word.
type packing struct {
	count, bits int
	code, top   uint32 // in the frame's first word, and at the top of its own
	topBits     int
}

var steim1 = []packing{{4, 8, 1, 0, 0}, {2, 16, 2, 0, 0}, {1, 32, 3, 0, 0}}

var steim2 = []packing{
	{7, 4, 3, 2, 2}, {6, 5, 3, 1, 2}, {5, 6, 3, 0, 2}, {4, 8, 1, 0, 0}, {3, 10, 2, 3, 2}, {2, 15, 2, 2, 2}, {1, 30, 2, 1, 2},
}

// encodeSteim packs each word as densely as the next differences allow.
func encodeSteim(x []float64, two bool, order order, frames int) ([]byte, int) {
	packings := steim1
	if two {
		packings = steim2
	}
	words := make([]uint32, 0, frames*16)
	k := 0
	for f := 0; f < frames && k < len(x); f++ {
		head := len(words)
		words = append(words, 0)
		first := 1
		if f == 0 {
			words = append(words, uint32(int32(x[0])), 0)
			first = 3
		}
		for w := first; w < 16; w++ {
			word, code, n := uint32(0), uint32(0), 0
			if k < len(x) {
				word, code, n = pack(x, k, packings)
			}
			if order == binary.LittleEndian {
				word = inPieces(word, code, two)
			}
			words = append(words, word)
			words[head] |= code << (30 - 2*w)
			k += n
		}
	}
	words[2] = uint32(int32(x[k-1]))
	var b []byte
	for _, w := range words {
		b = order.AppendUint32(b, w)
	}
	return b, k
}

// inPieces turns a word so that its differences of whole bytes keep their order
// when the word is written in little-endian order.
func inPieces(word, code uint32, two bool) uint32 {
	switch {
	case code == 1:
		return bits.ReverseBytes32(word)
	case code == 2 && !two:
		return bits.RotateLeft32(word, 16)
	}
	return word
}

func pack(x []float64, k int, packings []packing) (word, code uint32, n int) {
	difference := func(i int) int64 {
		if i == 0 {
			return 17 // refers to a record before, which is nobody's business
		}
		return int64(int32(x[i]) - int32(x[i-1]))
	}
	for _, p := range packings {
		fits := k+p.count <= len(x)
		for i := 0; fits && i < p.count; i++ {
			d := difference(k + i)
			fits = d >= -1<<(p.bits-1) && d < 1<<(p.bits-1)
		}
		if !fits {
			continue
		}
		word = p.top << (32 - max(1, p.topBits))
		if p.topBits == 0 {
			word = 0
		}
		for i := range p.count {
			word |= uint32(difference(k+i)&(1<<p.bits-1)) << (p.bits * (p.count - 1 - i))
		}
		return word, p.code, p.count
	}
	panic(fmt.Sprintf("difference %d has no room in a word", difference(k)))
}
