package db

import (
	"encoding/binary"
	"errors"
	"math"
	"math/bits"
	"slices"
)

// The numbers of a text file, made whole numbers again and packed in blocks
// (series_pack.go). A byte and the unit in m/s² stand before them.

const (
	// maxDecimals is the finest decimal tried for a series of fixed decimals.
	maxDecimals = 12
	// maxDigits is the longest mantissa tried: 10^15 < 2^53.
	maxDigits = 15
	// maxPower is the highest power of ten that is an exact double.
	maxPower = 22
	// maxInteger is 2^53: every integer up to it is a double.
	maxInteger = 1 << 53
	// textHeadSize is the length of what stands before the numbers.
	textHeadSize = 1 + 8
)

var powers = func() (p [maxPower + 1]float64) {
	for i := range p {
		p[i] = math.Pow10(i)
	}
	return p
}()

// written is the sample that a file writes as k/scale, in the same two roundings
// that reading the text makes: strconv rounds once, the unit conversion once
// more.
func written(k, scale, unit float64) float64 {
	return k / scale * unit
}

func isWritten(x, k, scale, unit float64) bool {
	return math.Float64bits(written(k, scale, unit)) == math.Float64bits(x)
}

// encodeDecimal lays out the differences of the integers k, their signs lowest.
// It returns nil where the samples are no decimals, or none of a fixed number.
func (r *room) encodeDecimal(samples []float64, unit float64) []byte {
	if !looksFixed(samples, unit) {
		return nil
	}
	ks := r.words
	decimals, ok := decimalIntegers(ks, samples, unit)
	if !ok {
		return nil
	}
	last := int64(0)
	for i, k := range ks {
		delta := int64(k) - last
		last = int64(k)
		ks[i] = uint64(delta)<<1 ^ uint64(delta>>63)
	}
	return appendPacked(r.textHead(layoutDecimal, decimals, unit), ks)
}

// textHead begins a result, with room for numbers of four bytes.
func (r *room) textHead(layout, digits int, unit float64) []byte {
	head := append(make([]byte, 0, 64+4*len(r.words)), byte(layout), byte(digits))
	return binary.LittleEndian.AppendUint64(head, math.Float64bits(unit))
}

// decimalIntegers finds the fewest decimals d for which every sample is
// exactly (k/10^d)·unit with integer k, and puts the k into ks, as int64.
func decimalIntegers(ks []uint64, samples []float64, unit float64) (decimals int, ok bool) {
	d, scale, guess := 0, 1.0, 1/unit
	for i := 0; i < len(samples); {
		k := math.RoundToEven(samples[i]*guess) + 0 // no negative zero
		if math.Abs(k) < maxInteger && isWritten(samples[i], k, scale, unit) {
			ks[i] = uint64(int64(k))
			i++
			continue
		}
		if d++; d > maxDecimals {
			return 0, false
		}
		scale, guess = powers[d], powers[d]/unit
		for j, k := range ks[:i] {
			if k := int64(k) * 10; k > maxInteger || k < -maxInteger {
				return 0, false
			}
			ks[j] = k * 10
		}
	}
	return d, true
}

// looksFixed tells by a few samples whether all may have the same number of
// decimals. With the fewest for all, one integer in ten ends in a zero where the
// file has fixed decimals, and nearly all do where it has exponents, since then
// the least number sets the decimals.
func looksFixed(samples []float64, unit float64) bool {
	const few = 64
	var some [few]float64
	var ks [few]uint64
	for i := 0; i < few && len(samples) > 0; i++ {
		some[i] = samples[i*len(samples)/few]
	}
	if _, ok := decimalIntegers(ks[:], some[:], unit); !ok {
		return false
	}
	zeros, all := 0, 0
	for _, k := range ks {
		if k != 0 {
			all++
			if int64(k)%10 == 0 {
				zeros++
			}
		}
	}
	return 2*zeros <= all
}

func (r *room) decodeDecimal(data []byte, n int) ([]float64, error) {
	if len(data) < textHeadSize || data[0] > maxDecimals {
		return nil, errors.New("damaged head")
	}
	scale, unit := powers[data[0]], math.Float64frombits(binary.LittleEndian.Uint64(data[1:]))
	if err := r.unpack(data[textHeadSize:], n); err != nil {
		return nil, err
	}
	samples := make([]float64, n)
	k := int64(0)
	for i, z := range r.words {
		k += int64(z>>1) ^ -int64(z&1)
		samples[i] = written(float64(k), scale, unit)
	}
	return samples, nil
}

// encodeScientific lays out, lowest first, m, the sign, and j less the least j
// of the block; the least ones stand before the numbers, a byte each. It returns
// nil where the samples are no such numbers.
func (r *room) encodeScientific(samples []float64, unit float64) []byte {
	ms, js := r.words, r.bytes[:len(samples)]
	digits, ok := findMantissas(ms, js, samples, unit)
	if !ok {
		return nil
	}
	head, width := r.textHead(layoutScientific, digits, unit), mantissaBits(digits)
	for at := 0; at < len(ms); at += blockSize {
		block := js[at:min(at+blockSize, len(js))]
		least := slices.Min(block)
		head = append(head, least)
		for i, j := range block {
			sign := math.Float64bits(samples[at+i]) >> 63
			ms[at+i] |= (uint64(j-least)<<1 | sign) << width
		}
	}
	return appendPacked(head, ms)
}

// mantissaBits is the width of a mantissa of so many digits.
func mantissaBits(digits int) int { return bits.Len64(uint64(powers[digits])) & 63 }

// findMantissas finds the fewest digits with which every sample is exactly
// ±(m/10^j)·unit, m of so many digits at most.
func findMantissas(ms []uint64, js []byte, samples []float64, unit float64) (digits int, ok bool) {
	digits = 1
	limit, perUnit, last := powers[digits], 1/unit, byte(0)
	for i := 0; i < len(samples); {
		x := math.Abs(samples[i])
		if x == 0 {
			ms[i], js[i] = 0, last // zero has any exponent
			i++
			continue
		}
		v := x * perUnit
		// The exponent of two times log10(2), here as 315653/2^20, is the decimal
		// one, or one less, so that j is right, or one more. One that is 0 waits for
		// another digit.
		exponent := int(math.Float64bits(v)>>52) - 1023
		j := digits - 1 - exponent*315653>>20
		if j > maxPower {
			return 0, false
		}
		if j > 0 {
			over := 0 // added, not branched on: it follows no pattern
			if v*powers[j] > limit-0.5 {
				over = 1
			}
			j -= over
			m := math.RoundToEven(v * powers[j])
			if m < limit && isWritten(x, m, powers[j], unit) {
				last = byte(j)
				ms[i], js[i] = uint64(m), last
				i++
				continue
			}
		}
		if digits++; digits > maxDigits {
			return 0, false
		}
		limit = powers[digits]
	}
	return digits, true
}

func (r *room) decodeScientific(data []byte, n int) ([]float64, error) {
	blocks := n/blockSize + min(1, n%blockSize)
	if len(data) < textHeadSize || data[0] < 1 || data[0] > maxDigits || blocks > len(data)-textHeadSize {
		return nil, errors.New("damaged head")
	}
	width, unit := mantissaBits(int(data[0])), math.Float64frombits(binary.LittleEndian.Uint64(data[1:]))
	least := data[textHeadSize:][:blocks]
	if err := r.unpack(data[textHeadSize+blocks:], n); err != nil {
		return nil, err
	}
	samples := make([]float64, n)
	for i, word := range r.words {
		j := word>>(width+1) + uint64(least[i/blockSize])
		if j > maxPower {
			return nil, errors.New("damaged exponent")
		}
		x := written(float64(word&(1<<width-1)), powers[j], unit)
		samples[i] = math.Float64frombits(math.Float64bits(x) | word>>width<<63)
	}
	return samples, nil
}
