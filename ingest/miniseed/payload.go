package miniseed

import (
	"encoding/binary"
	"fmt"
	"math"
)

// Encoding is how a record holds its samples, by the number that SEED gives it.
type Encoding uint8

// The encodings that are read.
const (
	Text    Encoding = 0 // messages, no samples
	Int16   Encoding = 1
	Int32   Encoding = 3
	Float32 Encoding = 4
	Float64 Encoding = 5
	Steim1  Encoding = 10
	Steim2  Encoding = 11
)

// encodingNames are those of the SEED manual and of the FDSN's list, those that
// are not read among them.
var encodingNames = map[Encoding]string{
	Text: "text", Int16: "int16", Int32: "int32", Float32: "float32", Float64: "float64", Steim1: "Steim-1", Steim2: "Steim-2",
	2: "24-bit integers", 12: "GEOSCOPE 24-bit", 13: "GEOSCOPE 16-bit with 3-bit gain", 14: "GEOSCOPE 16-bit with 4-bit gain",
	15: "US National Network", 16: "CDSN 16-bit", 17: "Graefenberg 16-bit", 18: "IPG Strasbourg 16-bit", 19: "Steim-3",
	30: "SRO", 31: "HGLP", 32: "DWWSSN", 33: "RSTN", 100: "opaque data",
}

// String returns the encoding in words with its number.
func (e Encoding) String() string {
	if name, ok := encodingNames[e]; ok {
		return fmt.Sprintf("%d (%s)", uint8(e), name)
	}
	return fmt.Sprint(uint8(e))
}

// IsFloat reports whether samples are floating-point numbers, which may be
// physical values, not counts.
func (e Encoding) IsFloat() bool { return e == Float32 || e == Float64 }

func (e Encoding) isSteim() bool { return e == Steim1 || e == Steim2 }

// width is the bytes of a sample, 0 for encodings without a fixed one.
func (e Encoding) width() int {
	switch e {
	case Int16:
		return 2
	case Int32, Float32:
		return 4
	case Float64:
		return 8
	}
	return 0
}

// fits compares the announced count with the most that the payload can hold, so
// that no count makes anybody allocate more than the file's size allows.
func (r *record) fits() error {
	most := 0
	switch width := r.encoding.width(); {
	case width > 0:
		most = len(r.payload) / width
	case r.encoding.isSteim():
		most = steimCapacity(r.payload, r.encoding)
	default:
		return fmt.Errorf("encoding %v is not read", r.encoding)
	}
	if r.count > most {
		return fmt.Errorf("announced %d samples, found room for %d in %d bytes of encoding %v", r.count, most, len(r.payload), r.encoding)
	}
	return nil
}

// decode writes the samples into dst, whose length is the record's count. It
// returns flags that decoding adds.
func (r *record) decode(dst []float64) (Flags, error) {
	if r.encoding.isSteim() {
		return r.decodeSteim(dst)
	}
	if r.little {
		decodePlain(dst, r.payload, r.encoding, binary.LittleEndian)
	} else {
		decodePlain(dst, r.payload, r.encoding, binary.BigEndian)
	}
	return 0, nil
}

// byteOrder is one of the two of package binary; as a type parameter its methods
// are inlined.
type byteOrder interface {
	Uint16([]byte) uint16
	Uint32([]byte) uint32
	Uint64([]byte) uint64
}

func decodePlain[O byteOrder](dst []float64, b []byte, e Encoding, order O) {
	switch e {
	case Int16:
		for i := range dst {
			dst[i] = float64(int16(order.Uint16(b[2*i:])))
		}
	case Int32:
		for i := range dst {
			dst[i] = float64(int32(order.Uint32(b[4*i:])))
		}
	case Float32:
		for i := range dst {
			dst[i] = float64(math.Float32frombits(order.Uint32(b[4*i:])))
		}
	case Float64:
		for i := range dst {
			dst[i] = math.Float64frombits(order.Uint64(b[8*i:]))
		}
	}
}
