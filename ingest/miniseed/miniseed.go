package miniseed

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"slices"
	"time"
)

// ID names a channel by the FDSN's codes, without padding. A location that is
// blank or "--" is "".
type ID struct{ Network, Station, Location, Channel string }

// String returns the codes as XX.ABC.00.HNE.
func (id ID) String() string {
	return id.Network + "." + id.Station + "." + id.Location + "." + id.Channel
}

func (id ID) compare(other ID) int {
	return cmp.Or(cmp.Compare(id.Network, other.Network), cmp.Compare(id.Station, other.Station),
		cmp.Compare(id.Location, other.Location), cmp.Compare(id.Channel, other.Channel))
}

// Flags are remarks that records carry, and those that reading them adds.
type Flags uint16

// The flags. The first ones are the recorder's or the network's.
const (
	Calibration  Flags = 1 << iota // a calibration signal is present
	Saturated                      // the amplifier was saturated
	Clipped                        // the digitiser clipped
	Spikes                         // spikes were found
	Glitches                       // glitches were found
	Padded                         // samples are missing or were padded
	TimeDoubtful                   // the time tag is questionable
	// WordsSwapped says that Steim frames were in the other order than their
	// record states, as the last sample showed.
	WordsSwapped
	// BlocketteCount says that a header announces another number of blockettes
	// than its chain has.
	BlocketteCount
)

// Trace is a run of samples without a gap, of one channel and one rate.
type Trace struct {
	Start    time.Time // of the first sample, UTC
	Rate     float64   // samples per s, > 0
	Samples  []float64
	Encoding Encoding // of the first record
	Flags    Flags    // of all its records
	Offset   int      // byte at which the first record begins
	Repeated int      // samples that another record held too, with the same values
	// DriftS is the greatest distance in s between the time of a record and the
	// one that start, rate and the samples before it give.
	DriftS float64
}

// At returns the time of sample i.
func (t *Trace) At(i int) time.Time {
	return t.Start.Add(time.Duration(math.Round(float64(i) / t.Rate * 1e9)))
}

// Gap is a place where samples are missing.
type Gap struct {
	Start   time.Time // of the first missing sample
	Missing int       // samples
}

// Channel is all that a file holds of one channel.
type Channel struct {
	ID     ID
	Traces []Trace // in the order of time; none where Err is set
	// Err says why the channel could not be decoded; it is an *Error. The other
	// channels of the file are not touched by it.
	Err error
}

// Gaps lists where samples are missing between traces of one rate.
func (c *Channel) Gaps() []Gap {
	var gaps []Gap
	for i := 1; i < len(c.Traces); i++ {
		before := &c.Traces[i-1]
		if !SameRate(before.Rate, c.Traces[i].Rate) {
			continue
		}
		end := before.At(len(before.Samples))
		missing := math.Round(c.Traces[i].Start.Sub(end).Seconds() * before.Rate)
		gaps = append(gaps, Gap{Start: end, Missing: int(missing)})
	}
	return gaps
}

// File is what was decoded.
type File struct {
	Channels []Channel // in the order of their codes
	Skipped  int       // records without samples, or of text
	Trailing int       // bytes behind the last record, too few for another header
}

// Error says what is wrong with a record.
type Error struct {
	Offset int // byte at which the record begins
	Err    error
}

// Error returns "record at byte N: cause".
func (e *Error) Error() string { return fmt.Sprintf("record at byte %d: %v", e.Offset, e.Err) }

// Unwrap returns the cause.
func (e *Error) Unwrap() error { return e.Err }

// Decode reads the records of data, joins those of a channel that follow each
// other within half a sample, and drops samples that two records hold alike.
//
// Whatever keeps the next record from being found, a header that is none, a cut
// record, a loop of blockettes, a wrong checksum, is an *Error about the whole.
// What is wrong with samples or times of one channel is that channel's Err. An error
// may be the context's, too.
func Decode(ctx context.Context, data []byte) (*File, error) {
	s := scanner{ctx: ctx, data: data, plain: map[[12]byte]int32{}, source: map[string]int32{}, ids: map[ID]int32{}}
	if err := s.scan(); err != nil {
		return nil, err
	}
	slices.SortFunc(s.records, func(a, b record) int {
		return cmp.Or(cmp.Compare(a.channel, b.channel), cmp.Compare(a.start, b.start), cmp.Compare(a.offset, b.offset))
	})
	f := &File{Channels: s.channels, Skipped: s.skipped, Trailing: s.trailing}
	for first := 0; first < len(s.records); {
		next := first + 1
		for next < len(s.records) && s.records[next].channel == s.records[first].channel {
			next++
		}
		c := &f.Channels[s.records[first].channel]
		if c.Err == nil {
			c.Traces, c.Err = traces(ctx, s.records[first:next])
		}
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		first = next
	}
	slices.SortFunc(f.Channels, func(a, b Channel) int { return a.ID.compare(b.ID) })
	return f, nil
}
