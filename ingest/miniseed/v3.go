package miniseed

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"hash/crc32"
	"math"
	"strings"
)

// v3Header is the length of the fixed header of version 3.
const v3Header = 40

// crcOffset is where the checksum stands, which is taken with itself as zeros.
const crcOffset = 28

func isV3(b []byte) bool {
	return len(b) >= v3Header && b[0] == 'M' && b[1] == 'S' && b[2] == 3
}

// v3 reads the record of version 3 at byte at and returns its length.
func (s *scanner) v3(at int) (int, error) {
	b := s.data[at:]
	order := binary.LittleEndian
	idEnd := v3Header + int(b[33])
	dataStart := idEnd + int(order.Uint16(b[34:]))
	size := int64(dataStart) + int64(order.Uint32(b[36:]))
	if size > int64(len(b)) {
		return 0, fmt.Errorf("truncated: its length is %d bytes, %d are there", size, len(b))
	}
	b = b[:size]
	if stated, sum := order.Uint32(b[crcOffset:]), checksum(b); stated != sum {
		return 0, fmt.Errorf("checksum is %08x, the header says %08x", sum, stated)
	}
	count := order.Uint32(b[24:])
	year, day := int(order.Uint16(b[8:])), int(order.Uint16(b[10:]))
	start, ok := nanoseconds(year, day, int(b[12]), int(b[13]), int(b[14]), int64(order.Uint32(b[4:])))
	if !ok {
		return 0, fmt.Errorf("year %d day %d %02d:%02d:%02d and %d ns are no time", year, day, b[12], b[13], b[14], order.Uint32(b[4:]))
	}
	channel, err := s.sourceChannel(b[v3Header:idEnd])
	if err != nil {
		return 0, err
	}
	r := record{
		offset: at, start: start, count: int(count), encoding: Encoding(b[15]), channel: channel,
		rate: v3Rate(math.Float64frombits(order.Uint64(b[16:]))), payload: b[dataStart:], flags: v3Flags(b[3]),
	}
	r.little = !r.encoding.isSteim()
	s.add(r)
	return int(size), nil
}

var (
	castagnoli = crc32.MakeTable(crc32.Castagnoli)
	noChecksum = make([]byte, 4)
)

func checksum(b []byte) uint32 {
	sum := crc32.Update(0, castagnoli, b[:crcOffset])
	sum = crc32.Update(sum, castagnoli, noChecksum)
	return crc32.Update(sum, castagnoli, b[crcOffset+4:])
}

// v3Rate is the rate in Hz; a negative number is a period in s.
func v3Rate(v float64) float64 {
	if v < 0 {
		return -1 / v
	}
	return v
}

func v3Flags(b byte) Flags {
	var f Flags
	if b&1 != 0 {
		f |= Calibration
	}
	if b&2 != 0 {
		f |= TimeDoubtful
	}
	return f
}

// sourceChannel finds the channel of a source identifier,
// FDSN:NET_STA_LOC_BAND_SOURCE_SUBSOURCE.
func (s *scanner) sourceChannel(b []byte) (int32, error) {
	b = bytes.TrimRight(b, "\x00")
	if i, ok := s.source[string(b)]; ok {
		return i, nil
	}
	name, ok := code(b)
	if !ok {
		return 0, errors.New("source identifier is no text")
	}
	rest, ok := strings.CutPrefix(name, "FDSN:")
	parts := strings.Split(rest, "_")
	if !ok || len(parts) != 6 {
		return 0, fmt.Errorf("source identifier %.60q is not FDSN:NET_STA_LOC_B_S_SS", name)
	}
	channel := parts[3] + parts[4] + parts[5]
	if len(channel) != 3 {
		channel = strings.Join(parts[3:], "_")
	}
	i := s.named(ID{Network: parts[0], Station: parts[1], Location: location(parts[2]), Channel: channel})
	s.source[name] = i
	return i, nil
}
