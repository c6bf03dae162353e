package db

import (
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
	"errors"
	"fmt"
	"math"
	"slices"

	"github.com/klauspost/compress/zstd"
)

// The ways in which samples are laid out before compression. The first byte of
// a series names its layout.
const (
	// layoutDecimal: decimals d (1 byte), unit u in m/s² (8 bytes), then the
	// compressed differences of the integers k with sample = (k/10^d)·u, as
	// signed varints. Text files hold such numbers.
	layoutDecimal = 1
	// layoutPlanes: the compressed bytes of the doubles, plane by plane, so that
	// signs and exponents stand together.
	layoutPlanes = 2
)

// maxDecimals is the finest decimal tried. Powers of ten up to 10^22 are exact
// doubles, and k stays below 2^53 for any plausible acceleration.
const maxDecimals = 12

// EncodeSamples compresses samples without loss and returns them with their
// digest. unitMPS2 is the value in m/s² of the unit in which the file wrote
// them; a right one makes the result two to three times smaller, a wrong one
// changes nothing else. The samples must be finite.
func EncodeSamples(samples []float64, unitMPS2 float64) (data []byte, digest string) {
	if ks, d, ok := decimalIntegers(samples, unitMPS2); ok {
		data = append(data, layoutDecimal, byte(d))
		data = binary.LittleEndian.AppendUint64(data, math.Float64bits(unitMPS2))
		return encoder.EncodeAll(differences(ks), data), digestOf(samples)
	}
	return encoder.EncodeAll(planes(samples), []byte{layoutPlanes}), digestOf(samples)
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
	encoder = must(zstd.NewWriter(nil, zstd.WithEncoderLevel(zstd.SpeedFastest)))
	decoder = must(zstd.NewReader(nil, zstd.WithDecoderMaxMemory(1<<30)))
)

// must is for constructors that can fail on wrong options only.
func must[T any](v T, err error) T {
	if err != nil {
		panic("db: " + err.Error())
	}
	return v
}

// decimalIntegers finds the fewest decimals d for which every sample is
// exactly (k/10^d)·unit with integer k, in the same two roundings that reading
// the text makes: strconv rounds k/10^d once, the unit conversion once more.
func decimalIntegers(samples []float64, unit float64) (ks []int64, decimals int, ok bool) {
	if !(unit > 0) {
		return nil, 0, false
	}
	ks = make([]int64, len(samples))
	d, scale := 0, 1.0
	for i := 0; i < len(samples); {
		k := math.RoundToEven(samples[i] / unit * scale)
		if math.Abs(k) < 1<<53 && math.Float64bits(decimal(int64(k), scale, unit)) == math.Float64bits(samples[i]) {
			ks[i] = int64(k)
			i++
			continue
		}
		if d++; d > maxDecimals {
			return nil, 0, false
		}
		for j := range i {
			ks[j] *= 10
			if ks[j] > 1<<53 || ks[j] < -1<<53 {
				return nil, 0, false
			}
		}
		scale *= 10
	}
	return ks, d, true
}

// decimal is the sample that the integer k stands for.
func decimal(k int64, scale, unit float64) float64 {
	return float64(k) / scale * unit
}

func differences(ks []int64) []byte {
	out := make([]byte, 0, 3*len(ks))
	last := int64(0)
	for _, k := range ks {
		out = binary.AppendVarint(out, k-last)
		last = k
	}
	return out
}

func planes(samples []float64) []byte {
	n := len(samples)
	out := make([]byte, 8*n)
	for i, x := range samples {
		bits := math.Float64bits(x)
		for plane := range 8 {
			out[plane*n+i] = byte(bits >> (8 * plane))
		}
	}
	return out
}

func decodeSamples(data []byte, n int) ([]float64, error) {
	if len(data) == 0 {
		return nil, errors.New("no data")
	}
	switch data[0] {
	case layoutDecimal:
		return decodeDecimal(data[1:], n)
	case layoutPlanes:
		return decodePlanes(data[1:], n)
	}
	return nil, fmt.Errorf("unknown layout %d", data[0])
}

func decodeDecimal(data []byte, n int) ([]float64, error) {
	if len(data) < 9 || int(data[0]) > maxDecimals {
		return nil, errors.New("damaged head")
	}
	scale := math.Pow10(int(data[0]))
	unit := math.Float64frombits(binary.LittleEndian.Uint64(data[1:9]))
	raw, err := decoder.DecodeAll(data[9:], nil)
	if err != nil {
		return nil, err
	}
	if n > len(raw) {
		return nil, fmt.Errorf("%d bytes cannot hold %d samples", len(raw), n)
	}
	samples := make([]float64, n)
	k := int64(0)
	for i := range samples {
		delta, size := binary.Varint(raw)
		if size <= 0 {
			return nil, fmt.Errorf("series ends after %d of %d samples", i, n)
		}
		raw = raw[size:]
		k += delta
		samples[i] = decimal(k, scale, unit)
	}
	if len(raw) > 0 {
		return nil, fmt.Errorf("series is longer than %d samples", n)
	}
	return samples, nil
}

func decodePlanes(data []byte, n int) ([]float64, error) {
	raw, err := decoder.DecodeAll(data, nil)
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

func digestOf(samples []float64) string {
	buf := make([]byte, 0, 8*1024)
	h := sha256.New()
	for chunk := range slices.Chunk(samples, 1024) {
		buf = buf[:0]
		for _, x := range chunk {
			buf = binary.LittleEndian.AppendUint64(buf, math.Float64bits(x))
		}
		h.Write(buf)
	}
	return hex.EncodeToString(h.Sum(nil))
}
