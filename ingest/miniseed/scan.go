package miniseed

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"math"
	"time"
)

// record is one record as its header describes it.
type record struct {
	offset   int
	start    int64 // ns since 1970
	rate     float64
	count    int
	payload  []byte
	channel  int32 // index into the scanner's channels
	encoding Encoding
	little   bool // word order of the payload
	flags    Flags
}

// The years that a record can be of. What reads neither so nor with its bytes
// turned round is no record.
const firstYear, lastYear = 1900, 2100

// maxDurationS is longer than any record lasts; it keeps times within int64.
const maxDurationS = 1e9

// lastNS is the end of the seconds 60 of the last year.
var firstNS, lastNS = time.Date(firstYear, 1, 1, 0, 0, 0, 0, time.UTC).UnixNano(), time.Date(lastYear+1, 1, 2, 0, 0, 0, 0, time.UTC).UnixNano()

// scanner lists the records of a file.
type scanner struct {
	ctx      context.Context // that of Decode, which makes the scanner for one call
	data     []byte
	records  []record
	channels []Channel
	// Channels by the codes as records of version 2.4 and 3 write them, so that a
	// record of a known channel allocates nothing, and by name.
	plain  map[[12]byte]int32
	source map[string]int32
	ids    map[ID]int32

	skipped, trailing int
}

// Sniff says in a few words what makes data begin like miniSEED or a full SEED
// volume, "" where it does not.
func Sniff(data []byte) string {
	switch {
	case isV3(data):
		return "a header of miniSEED 3"
	case isV2(data):
		return "a header of miniSEED 2.4"
	case isVolume(data):
		return "a volume header of SEED"
	}
	return ""
}

// isVolume looks for the first record of a full SEED volume: sequence number,
// type V, blockette 10.
func isVolume(b []byte) bool {
	return bytes.HasPrefix(b, []byte("000001V 010"))
}

var errVolume = errors.New("full SEED: extract miniSEED and StationXML from it")

// scan walks from record to record.
func (s *scanner) scan() error {
	for at := 0; at < len(s.data); {
		if err := s.ctx.Err(); err != nil {
			return err
		}
		rest := s.data[at:]
		var n int
		var err error
		switch {
		case isV3(rest):
			n, err = s.v3(at)
		case isV2(rest):
			n, err = s.v2(at)
		case isControl(rest):
			err = errVolume
		case at > 0 && beginsRecord(rest):
			err = fmt.Errorf("truncated: %d bytes of its header are there", len(rest))
		case at > 0 && len(rest) < v2Header:
			s.trailing = len(rest)
			return nil
		default:
			err = errors.New("no header of miniSEED")
		}
		if err != nil {
			return &Error{at, err}
		}
		at += n
	}
	return nil
}

// beginsRecord recognises the first bytes of a record whose header is not all there:
// version 3's mark, or the number of a record of version 2 or blanks in its place.
func beginsRecord(b []byte) bool {
	if len(b) >= v2Header || len(b) < 3 {
		return false
	}
	if b[0] == 'M' && b[1] == 'S' && b[2] == 3 {
		return true
	}
	for _, c := range b[:min(6, len(b))] {
		if c < '0' || c > '9' {
			return false
		}
	}
	return len(b) < 7 || bytes.IndexByte([]byte("DRQM"), b[6]) >= 0
}

// isControl recognises a control header of SEED.
func isControl(b []byte) bool {
	return len(b) >= 8 && isSequence(b) && bytes.IndexByte([]byte("VAST"), b[6]) >= 0 && (b[7] == ' ' || b[7] == '*' || b[7] == 0)
}

// isSequence looks at the six characters that number a record.
func isSequence(b []byte) bool {
	for _, c := range b[:6] {
		if (c < '0' || c > '9') && c != ' ' && c != 0 {
			return false
		}
	}
	return true
}

// add takes a record into the list. What is wrong with it alone stands against
// its channel, unless it holds nothing that anybody wants.
func (s *scanner) add(r record) {
	if r.count == 0 || r.encoding == Text {
		s.skipped++
		return
	}
	c := &s.channels[r.channel]
	if c.Err != nil {
		return
	}
	if err := r.validate(); err != nil {
		c.Err = &Error{r.offset, err}
		return
	}
	s.records = append(s.records, r)
}

// validate holds the record to what can be known without decoding it.
func (r *record) validate() error {
	switch {
	case !(r.rate > 0) || math.IsInf(r.rate, 0):
		return fmt.Errorf("%d samples at a rate of %g Hz", r.count, r.rate)
	case float64(r.count)/r.rate > maxDurationS:
		return fmt.Errorf("%d samples at %g Hz last longer than any record", r.count, r.rate)
	case r.start < firstNS || r.start > lastNS:
		return errors.New("its time, corrected, is outside the years 1900 to 2100")
	}
	return r.fits()
}

// duration is the time from the first sample to the one after the last, in ns.
func (r *record) duration() int64 { return int64(math.Round(float64(r.count) / r.rate * 1e9)) }

// named returns the index of the channel of that name.
func (s *scanner) named(id ID) int32 {
	if i, ok := s.ids[id]; ok {
		return i
	}
	i := int32(len(s.channels))
	s.channels = append(s.channels, Channel{ID: id})
	s.ids[id] = i
	return i
}

// code reads a code free of padding; ok is false where it holds anything but
// visible ASCII.
func code(b []byte) (s string, ok bool) {
	b = bytes.Trim(b, " \x00")
	for _, c := range b {
		if c <= ' ' || c > '~' {
			return "", false
		}
	}
	return string(b), true
}

// location is a location code; "--" is how blank is written where blanks are
// not.
func location(s string) string {
	if s == "--" {
		return ""
	}
	return s
}

// nanoseconds returns the time of a day of a year. A second 60 is the first of
// the next minute. ok is false where a part is outside its range.
func nanoseconds(year, day, hour, minute, second int, ns int64) (t int64, ok bool) {
	if !isDate(year, day) || hour > 23 || minute > 59 || second > 60 || ns < 0 || ns >= 1e9 {
		return 0, false
	}
	return time.Date(year, 1, day, hour, minute, second, 0, time.UTC).UnixNano() + ns, true
}

func isDate(year, day int) bool {
	return year >= firstYear && year <= lastYear && day >= 1 && day <= 366
}
