package miniseed

import (
	"encoding/binary"
	"fmt"
	"math/bits"
)

// A Steim frame is 16 words of 32 bits. The first holds sixteen codes of two
// bits, most significant first, that say how each word is divided. In the first
// frame, words 1 and 2 are the first and the last sample.
const (
	frameWords = 16
	frameBytes = 4 * frameWords
	firstWord  = 3 // that holds differences, in the first frame
)

// steimCapacity is the most samples that the whole frames of a payload can hold.
func steimCapacity(payload []byte, e Encoding) int {
	frames := len(payload) / frameBytes
	if frames == 0 {
		return 0
	}
	perWord := 7
	if e == Steim1 {
		perWord = 4
	}
	return (frames*(frameWords-1) - 2) * perWord
}

// decodeSteim decodes in the stated order of bytes, and where that does not
// lead to the stated last sample, once more in the other.
func (r *record) decodeSteim(dst []float64) (Flags, error) {
	err := steim(dst, r.payload, r.encoding, r.little)
	if err == nil {
		return 0, nil
	}
	if steim(dst, r.payload, r.encoding, !r.little) == nil {
		return WordsSwapped, nil
	}
	return 0, err
}

// steim writes len(dst) samples. The first is the frame's own, every other the
// one before it plus a difference, in 32 bits that wrap around; the first
// difference refers to the record before and is not used. The last sample must
// be the one stated.
func steim(dst []float64, b []byte, e Encoding, little bool) error {
	swap := func(w uint32) uint32 { return w }
	if little {
		swap = bits.ReverseBytes32
	}
	x, last := int32(swap(binary.BigEndian.Uint32(b[4:]))), int32(swap(binary.BigEndian.Uint32(b[8:])))
	var d [8]int32
	k, word := 0, firstWord
	for frame := 0; len(b)-frame >= frameBytes && k < len(dst); frame += frameBytes {
		f := (*[frameBytes]byte)(b[frame:])
		codes := binary.BigEndian.Uint32(f[:])
		if little {
			codes = bits.ReverseBytes32(codes)
		}
		for codes <<= 2 * word; word < frameWords && k < len(dst); word, codes = word+1, codes<<2 {
			code := codes >> 30
			if code == 0 {
				continue
			}
			w := binary.BigEndian.Uint32(f[4*word:])
			switch {
			case !little || code == 1:
			case e == Steim1 && code == 2:
				w = bits.RotateLeft32(bits.ReverseBytes32(w), 16)
			default:
				w = bits.ReverseBytes32(w)
			}
			n := differences(&d, code, w, e)
			if n == 0 {
				return fmt.Errorf("damaged frame: word %d of frame %d has code %d and begins with bits %02b", word, frame/frameBytes, code, w>>30)
			}
			if k == 0 {
				x -= d[0]
			}
			for _, v := range d[:min(n, len(dst)-k)] {
				x += v
				dst[k] = float64(x)
				k++
			}
		}
		word = 1
	}
	switch {
	case k < len(dst):
		return fmt.Errorf("announced %d samples, the frames hold %d", len(dst), k)
	case x != last:
		return fmt.Errorf("damaged frames: they lead to the last sample %d, which is said to be %d", x, last)
	}
	return nil
}

// differences unpacks the differences of one word into d and returns how many
// there are, 0 where Steim-2 has no such division.
func differences(d *[8]int32, code, w uint32, e Encoding) int {
	v := int32(w)
	switch {
	case code == 1:
		d[0], d[1], d[2], d[3] = v>>24, v<<8>>24, v<<16>>24, v<<24>>24
		return 4
	case e == Steim1 && code == 2:
		d[0], d[1] = v>>16, v<<16>>16
		return 2
	case e == Steim1:
		d[0] = v
		return 1
	}
	switch code<<2 | w>>30 {
	case 2<<2 | 1:
		d[0] = v << 2 >> 2
		return 1
	case 2<<2 | 2:
		d[0], d[1] = v<<2>>17, v<<17>>17
		return 2
	case 2<<2 | 3:
		d[0], d[1], d[2] = v<<2>>22, v<<12>>22, v<<22>>22
		return 3
	case 3 << 2:
		d[0], d[1], d[2], d[3], d[4] = v<<2>>26, v<<8>>26, v<<14>>26, v<<20>>26, v<<26>>26
		return 5
	case 3<<2 | 1:
		d[0], d[1], d[2], d[3], d[4], d[5] = v<<2>>27, v<<7>>27, v<<12>>27, v<<17>>27, v<<22>>27, v<<27>>27
		return 6
	case 3<<2 | 2:
		d[0], d[1], d[2], d[3], d[4], d[5], d[6] = v<<4>>28, v<<8>>28, v<<12>>28, v<<16>>28, v<<20>>28, v<<24>>28, v<<28>>28
		return 7
	}
	return 0
}
