package db

import (
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
	"errors"
	"fmt"
	"math"
	"slices"
	"sync"

	"github.com/klauspost/compress/zstd"
)

// The layouts of samples. The first byte of a series names its own. 1 and 2 were
// other layouts once: a number is not used again, so that no series is taken for
// a damaged one of another layout.
const (
	// layoutDecimal: samples (k/10^d)·u in a unit of u m/s², d the same for all, as
	// files of fixed decimals hold them.
	layoutDecimal = 4
	// layoutScientific: samples ±(m/10^j)·u, m of so many digits at most and a j for
	// each, as files with exponents hold them.
	layoutScientific = 5
	// layoutPlanes: the bytes of the doubles, lowest first, each place of all
	// samples together and compressed by itself.
	layoutPlanes = 3
)

// EncodeSamples compresses samples without loss and returns them with their
// digest. unitMPS2 is the value in m/s² of the unit in which the file wrote
// them; a right one makes the result two to three times smaller, a wrong one
// changes nothing else. The samples must be finite.
func EncodeSamples(samples []float64, unitMPS2 float64) (data []byte, digest string) {
	r := rooms.Get().(*room)
	defer rooms.Put(r)
	r.grow(len(samples))
	if unitMPS2 > 0 {
		data = r.encodeDecimal(samples, unitMPS2)
		if data == nil {
			data = r.encodeScientific(samples, unitMPS2)
		}
	}
	if data == nil {
		data = r.encodePlanes(samples)
	}
	return data, digestOf(samples)
}

// room is what encoding or decoding one series needs besides its result.
type room struct {
	words []uint64 // one a sample
	bytes []byte   // eight a sample
}

var rooms = sync.Pool{New: func() any { return new(room) }}

func (r *room) grow(n int) {
	if cap(r.words) < n {
		r.words, r.bytes = make([]uint64, n), make([]byte, 8*n)
	}
	r.words, r.bytes = r.words[:n], r.bytes[:8*n]
}

// DecodeSamples restores n samples and compares them with the digest.
func DecodeSamples(data []byte, n int, digest string) ([]float64, error) {
	samples, err := decodeSamples(data, n)
	if err != nil {
		return nil, fmt.Errorf("decode series: %w", err)
	}
	if got := digestOf(samples); got != digest {
		return nil, fmt.Errorf("decode series: samples have digest %s, the store says %s", got, digest)
	}
	return samples, nil
}

var (
	// The digest guards the samples; a checksum of each frame would be a second.
	encoder = must(zstd.NewWriter(nil, zstd.WithEncoderLevel(zstd.SpeedFastest), zstd.WithEncoderCRC(false)))
	decoder = must(zstd.NewReader(nil, zstd.WithDecoderMaxMemory(1<<30)))
)

// must is for constructors that can fail on wrong options only.
func must[T any](v T, err error) T {
	if err != nil {
		panic("db: " + err.Error())
	}
	return v
}

func (r *room) encodePlanes(samples []float64) []byte {
	n := len(samples)
	for i, x := range samples {
		bits := math.Float64bits(x)
		for at := i; at < len(r.bytes); at += n {
			r.bytes[at] = byte(bits)
			bits >>= 8
		}
	}
	out := append(make([]byte, 0, 8*n), layoutPlanes)
	for rest := r.bytes; len(rest) > 0; rest = rest[n:] {
		out = encoder.EncodeAll(rest[:n], out)
	}
	return out
}

func decodeSamples(data []byte, n int) ([]float64, error) {
	if len(data) == 0 {
		return nil, errors.New("no data")
	}
	r := rooms.Get().(*room)
	defer rooms.Put(r)
	switch data[0] {
	case layoutDecimal:
		return r.decodeDecimal(data[1:], n)
	case layoutScientific:
		return r.decodeScientific(data[1:], n)
	case layoutPlanes:
		return decodePlanes(data[1:], n)
	}
	return nil, fmt.Errorf("unknown layout %d", data[0])
}

func decodePlanes(data []byte, n int) ([]float64, error) {
	raw, err := decoder.DecodeAll(data, make([]byte, 0, 8*min(n, 8*len(data))))
	if err != nil {
		return nil, err
	}
	if len(raw) != 8*n {
		return nil, fmt.Errorf("series of %d bytes, want %d samples", len(raw), n)
	}
	samples := make([]float64, n)
	for i := range samples {
		var bits uint64
		for plane := range 8 {
			bits |= uint64(raw[plane*n+i]) << (8 * plane)
		}
		samples[i] = math.Float64frombits(bits)
	}
	return samples, nil
}

// digestOf returns the SHA-256 of the samples as little-endian doubles, in
// hexadecimal.
func digestOf(samples []float64) string {
	var buf [8 * 512]byte
	h := sha256.New()
	for chunk := range slices.Chunk(samples, 512) {
		for i, x := range chunk {
			binary.LittleEndian.PutUint64(buf[8*i:], math.Float64bits(x))
		}
		h.Write(buf[:8*len(chunk)])
	}
	return hex.EncodeToString(h.Sum(nil))
}
