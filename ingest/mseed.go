package ingest

import (
	"errors"
	"fmt"
	"math"
	"strings"
	"time"

	"swaybook/ingest/miniseed"
)

// miniSEED reads miniSEED 2.4 and 3: records of counts, whose sensitivities come
// from StationXML in the hints, or of floating-point numbers in a unit that the
// hints state, counts among them. Counts are divided by the sensitivity; the response of the
// instrument is not removed, which is adequate where it is flat. A channel with
// gaps is refused.
//
// Source: FDSN, miniSEED 3 specification (2023); FDSN source identifiers (2023)
// for the codes of accelerometers. The codes L and G, older ones, are from
// memory.
type miniSEED struct{}

// Info describes the format.
func (miniSEED) Info() Info {
	return Info{
		Name: "miniseed", Title: "miniSEED 2.4 and 3 (FDSN) with StationXML", Channels: "one or more",
		Unit:    "counts with the sensitivity of a StationXML file; floats as --unit says, which may be counts",
		NotRead: "full SEED volumes, channels with gaps, records without blockette 1000, encodings other than integers, floats, Steim-1 and Steim-2",
	}
}

// Sniff looks at the first header.
func (miniSEED) Sniff(c *Content) string { return miniseed.Sniff(c.Data) }

// Parse reads the channels of acceleration. Those of one instrument are cut to
// the time that they have in common.
func (miniSEED) Parse(content *Content, hints Hints) ([]Channel, error) {
	file, err := miniseed.Decode(content.ctx, content.Data)
	if err != nil {
		return nil, refuse(0, "", "%w", err)
	}
	r := mseedReader{hints: hints}
	for i := range file.Channels {
		r.add(&file.Channels[i])
	}
	alignInstruments(r.channels)
	return r.result(file)
}

// mseedReader collects the channels of a file.
type mseedReader struct {
	hints    Hints
	channels []*mseedChannel
	refused  ChannelErrors
	passed   []string // channels that are no acceleration, and why
}

// mseedChannel is a channel before its samples are turned into m/s².
type mseedChannel struct {
	Channel
	id     miniseed.ID
	counts bool
	turned bool // the positive direction
}

func (r *mseedReader) add(from *miniseed.Channel) {
	c, err := r.channel(from)
	if not, ok := errors.AsType[*NotMotionError](err); ok {
		r.passed = append(r.passed, from.ID.String()+": "+not.Reason)
		return
	}
	if err != nil {
		r.refused = append(r.refused, parseErrors(err)...)
		return
	}
	r.channels = append(r.channels, c)
}

// channel describes one channel. Its errors begin with its name.
func (r *mseedReader) channel(from *miniseed.Channel) (*mseedChannel, error) {
	if code := instrumentCode(from.ID.Channel); !strings.ContainsAny(code, "NLG") || code == "" {
		return nil, &NotMotionError{fmt.Sprintf("instrument code %q is not that of an accelerometer", code)}
	}
	if from.Err != nil {
		return nil, refuse(0, from.ID.String(), "%w", from.Err)
	}
	if len(from.Traces) == 0 {
		return nil, &NotMotionError{"no samples"}
	}
	if err := refuseGaps(from); err != nil {
		return nil, err
	}
	trace := &from.Traces[0]
	c := &mseedChannel{id: from.ID, Channel: Channel{
		Station: Station{Network: from.ID.Network, Code: from.ID.Station}, ChannelCode: from.ID.Channel, Instrument: instrumentName(from.ID),
		Siting: SitingUnknown, Start: trace.Start, StepS: 1 / trace.Rate, Acceleration: trace.Samples,
	}}
	if i := firstNotFinite(trace.Samples); i >= 0 {
		return nil, refuse(0, c.id.String(), "value %d is not finite", i+1)
	}
	if err := c.warnFlags(trace); err != nil {
		return nil, err
	}
	if err := checkStep(c.StepS, 0, r.hints); err != nil {
		return nil, err
	}
	return c, c.describe(trace, r.hints)
}

// instrumentCode is the letter of a channel code that names the instrument: the
// second of three, or what stands between the low lines of a longer code.
func instrumentCode(channel string) string {
	if parts := strings.Split(channel, "_"); len(parts) == 3 {
		return parts[1]
	}
	if len(channel) != 3 {
		return ""
	}
	return channel[1:2]
}

// instrumentName tells the instruments of a station apart, and the streams of
// one instrument at different rates: location, band and instrument code.
func instrumentName(id miniseed.ID) string {
	return strings.TrimSpace(id.Location + " " + id.Channel[:len(id.Channel)-1])
}

// refuseGaps refuses a channel of more than one trace: what is missing is not
// filled in, and which piece is wanted is not guessed.
func refuseGaps(c *miniseed.Channel) error {
	if len(c.Traces) == 1 {
		return nil
	}
	for i := 1; i < len(c.Traces); i++ {
		if a, b := &c.Traces[i-1], &c.Traces[i]; !miniseed.SameRate(a.Rate, b.Rate) {
			return refuse(0, c.ID.String(), "the rate changes from %g to %g Hz at %s", a.Rate, b.Rate, instantText(b.Start))
		}
	}
	gaps := c.Gaps()
	more := ""
	if len(gaps) > 1 {
		more = fmt.Sprintf(", the first of %d gaps", len(gaps))
	}
	return refuse(0, c.ID.String(), "%d samples are missing from %s on%s", gaps[0].Missing, instantText(gaps[0].Start), more)
}

// warnFlags turns what the records say of themselves into warnings; a
// calibration signal is no ground motion.
func (c *mseedChannel) warnFlags(t *miniseed.Trace) error {
	if t.Flags&miniseed.Calibration != 0 {
		return refuse(0, c.id.String(), "records hold a calibration signal")
	}
	for _, f := range []struct {
		flag miniseed.Flags
		text string
	}{
		{miniseed.Saturated, "records say that the amplifier was saturated"},
		{miniseed.Clipped, "records say that the digitiser clipped"},
		{miniseed.Spikes, "records say that there are spikes"},
		{miniseed.Glitches, "records say that there are glitches"},
		{miniseed.Padded, "records say that samples are missing or padded"},
		{miniseed.TimeDoubtful, "records say that their time is questionable"},
		{miniseed.WordsSwapped, "Steim frames are in the other byte order than records say"},
		{miniseed.BlocketteCount, "records have another number of blockettes than they say"},
	} {
		if t.Flags&f.flag != 0 {
			c.warn("%s", f.text)
		}
	}
	if t.Repeated > 0 {
		c.warn("%d samples are in two records, with the same values", t.Repeated)
	}
	if t.DriftS > c.StepS/2 {
		c.find(FlagIrregular, t.DriftS, 0.5*c.StepS, "times of records are up to %.3g s off those that the rate gives", t.DriftS)
	}
	return nil
}

// result turns the samples into m/s² and returns the channels, or why there are
// none.
func (r *mseedReader) result(file *miniseed.File) ([]Channel, error) {
	passed := listSome(r.passed)
	if len(r.channels)+len(r.refused) == 0 {
		return nil, &NotMotionError{orElse(passed, "records without samples")}
	}
	var channels []Channel
	for _, c := range r.channels {
		if file.Trailing > 0 {
			c.warn("%d bytes behind the last record were not read", file.Trailing)
		}
		if passed != "" {
			c.warn("other channels of the file were passed over: %s", passed)
		}
		c.convert()
		channels = append(channels, c.Channel)
	}
	return channels, r.refused.err(len(channels))
}

// listSome joins the first of several texts.
func listSome(texts []string) string {
	const limit = 3
	if len(texts) > limit {
		return strings.Join(texts[:limit], "; ") + fmt.Sprintf("; and %d more", len(texts)-limit)
	}
	return strings.Join(texts, "; ")
}

// convert turns samples into m/s²: counts about their mean, other numbers as
// they are.
func (c *mseedChannel) convert() {
	if c.turned {
		for i, v := range c.Acceleration {
			c.Acceleration[i] = -v
		}
	}
	if c.counts {
		removeMean(&c.Channel)
		return
	}
	for i, v := range c.Acceleration {
		c.Acceleration[i] = v * c.UnitMPS2
	}
}

// firstNotFinite returns the index of the first NaN or infinity, -1 for none.
func firstNotFinite(x []float64) int {
	for i, v := range x {
		if !(math.Abs(v) <= math.MaxFloat64) {
			return i
		}
	}
	return -1
}

func instantText(t time.Time) string { return t.UTC().Format(time.RFC3339Nano) }
