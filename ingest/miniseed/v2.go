package miniseed

import (
	"encoding/binary"
	"errors"
	"fmt"
	"math"
)

// v2Header is the length of the fixed header of version 2.4.
const v2Header = 48

// The lengths of records, as exponents of 2.
const minExponent, maxExponent = 7, 20

// isV2 looks at sequence number, quality and date.
func isV2(b []byte) bool {
	if len(b) < v2Header || !isSequence(b) || b[7] != ' ' && b[7] != 0 {
		return false
	}
	switch b[6] {
	case 'D', 'R', 'Q', 'M':
	default:
		return false
	}
	_, ok := headerOrder(b)
	return ok
}

// headerOrder finds the byte order in which year and day make a date.
func headerOrder(b []byte) (binary.ByteOrder, bool) {
	big, little := binary.BigEndian, binary.LittleEndian
	switch {
	case isDate(int(big.Uint16(b[20:])), int(big.Uint16(b[22:]))):
		return big, true
	case isDate(int(little.Uint16(b[20:])), int(little.Uint16(b[22:]))):
		return little, true
	}
	return nil, false
}

// v2 reads the record of version 2.4 at byte at and returns its length.
func (s *scanner) v2(at int) (int, error) {
	b := s.data[at:]
	order, _ := headerOrder(b)
	chain, err := readBlockettes(b, order)
	if err != nil {
		return 0, err
	}
	n := chain.length
	if n > len(b) {
		return 0, fmt.Errorf("truncated: its length is %d bytes, %d are there", n, len(b))
	}
	r := record{
		offset: at, count: int(order.Uint16(b[30:])), encoding: chain.encoding, little: chain.little,
		flags: v2Flags(b), rate: v2Rate(int16(order.Uint16(b[32:])), int16(order.Uint16(b[34:]))),
	}
	if chain.found != int(b[39]) {
		r.flags |= BlocketteCount
	}
	if chain.rate > 0 {
		r.rate = actualRate(r.rate, float64(chain.rate))
	}
	if r.start, err = v2Start(b, order, chain.microseconds); err != nil {
		return 0, err
	}
	if r.channel, err = s.plainChannel([12]byte(b[8:20])); err != nil {
		return 0, err
	}
	if from := int(order.Uint16(b[44:])); r.count > 0 {
		if from < v2Header || from >= n {
			return 0, fmt.Errorf("samples are said to begin at byte %d of %d", from, n)
		}
		r.payload = b[from:n]
	}
	s.add(r)
	return n, nil
}

// blockettes is what the blockettes of a record say.
type blockettes struct {
	length       int
	encoding     Encoding
	little       bool
	microseconds int8
	rate         float32
	found        int
}

// readBlockettes follows the chain, in which each blockette must lie behind the
// one before it.
func readBlockettes(b []byte, order binary.ByteOrder) (c blockettes, err error) {
	from := 0
	for at := int(order.Uint16(b[46:])); at != 0; at, from = int(order.Uint16(b[at+2:])), at {
		switch {
		case at < v2Header:
			return c, fmt.Errorf("blockette at byte %d, inside the header", at)
		case at <= from:
			return c, fmt.Errorf("blockettes make a loop: byte %d follows byte %d", at, from)
		case at+4 > len(b) || c.length > 0 && at+4 > c.length:
			return c, fmt.Errorf("blockette at byte %d, behind the end of the record", at)
		}
		c.found++
		if err := c.read(b[at:], order); err != nil {
			return c, fmt.Errorf("blockette at byte %d: %w", at, err)
		}
	}
	if c.length == 0 {
		return c, errors.New("no blockette 1000: length and encoding are unknown")
	}
	return c, nil
}

// read reads one blockette; types without a meaning here are passed over.
func (c *blockettes) read(b []byte, order binary.ByteOrder) error {
	kind := order.Uint16(b)
	switch {
	case len(b) < 8 && (kind == 100 || kind == 1000 || kind == 1001):
		return fmt.Errorf("type %d is cut", kind)
	case kind == 100:
		c.rate = math.Float32frombits(order.Uint32(b[4:]))
	case kind == 1000:
		if b[6] < minExponent || b[6] > maxExponent {
			return fmt.Errorf("a record length of 2^%d bytes is outside 2^%d to 2^%d", b[6], minExponent, maxExponent)
		}
		if b[5] > 1 {
			return fmt.Errorf("word order %d is neither 0 nor 1", b[5])
		}
		c.encoding, c.little, c.length = Encoding(b[4]), b[5] == 0, 1<<b[6]
	case kind == 1001:
		c.microseconds = int8(b[5])
	}
	return nil
}

// v2Rate combines factor and multiplier: either is a divisor where it is
// negative. It is 0 for what is no time series.
func v2Rate(factor, multiplier int16) float64 {
	f, m := float64(factor), float64(multiplier)
	switch {
	case f == 0 || m == 0:
		return 0
	case f > 0 && m > 0:
		return f * m
	case f > 0:
		return -f / m
	case m > 0:
		return -m / f
	}
	return 1 / (f * m)
}

// rateRounding is how far single precision may be off a rate, relative.
const rateRounding = 1e-6

// actualRate is the rate of blockette 100, which single precision rounds: the
// header's where both are the same, or the whole number that it stands for.
func actualRate(header, actual float64) float64 {
	for _, exact := range []float64{header, math.Round(actual)} {
		if math.Abs(actual-exact) <= rateRounding*actual {
			return exact
		}
	}
	return actual
}

// v2Start reads the time of the first sample. A time correction is added unless
// the record says that it has been.
func v2Start(b []byte, order binary.ByteOrder, microseconds int8) (int64, error) {
	year, day := int(order.Uint16(b[20:])), int(order.Uint16(b[22:]))
	fraction := int64(order.Uint16(b[28:])) * 100_000
	t, ok := nanoseconds(year, day, int(b[24]), int(b[25]), int(b[26]), fraction)
	if !ok {
		return 0, fmt.Errorf("year %d day %d %02d:%02d:%02d and %d/10000 s are no time", year, day, b[24], b[25], b[26], fraction/100_000)
	}
	t += int64(microseconds) * 1000
	if applied := b[36]&(1<<1) != 0; !applied {
		t += int64(int32(order.Uint32(b[40:]))) * 100_000
	}
	return t, nil
}

// v2Flags reads activity and data quality.
func v2Flags(b []byte) Flags {
	var f Flags
	if b[36]&1 != 0 {
		f |= Calibration
	}
	for bit, flag := range [8]Flags{Saturated, Clipped, Spikes, Glitches, Padded, 0, 0, TimeDoubtful} {
		if b[38]&(1<<bit) != 0 {
			f |= flag
		}
	}
	return f
}

// plainChannel finds the channel of station, location, channel and network codes
// as the fixed header holds them.
func (s *scanner) plainChannel(codes [12]byte) (int32, error) {
	if i, ok := s.plain[codes]; ok {
		return i, nil
	}
	id, err := plainID(codes)
	if err != nil {
		return 0, err
	}
	i := s.named(id)
	s.plain[codes] = i
	return i, nil
}

func plainID(codes [12]byte) (id ID, err error) {
	for _, part := range []struct {
		name     string
		from, to int
		into     *string
	}{{"station", 0, 5, &id.Station}, {"location", 5, 7, &id.Location}, {"channel", 7, 10, &id.Channel}, {"network", 10, 12, &id.Network}} {
		var ok bool
		if *part.into, ok = code(codes[part.from:part.to]); !ok {
			return id, fmt.Errorf("%s code %q is no text", part.name, codes[part.from:part.to])
		}
	}
	id.Location = location(id.Location)
	return id, nil
}
