package ingest

import (
	"cmp"
	"math"
	"slices"
	"time"
)

// alignInstruments cuts the channels of each instrument to the time that all of
// them have: records are cut where they are full, so the channels of a file begin
// and end apart.
func alignInstruments(channels []*mseedChannel) {
	type instrument struct{ network, station, name string }
	groups := map[instrument][]*mseedChannel{}
	for _, c := range channels {
		key := instrument{c.id.Network, c.id.Station, c.Instrument}
		groups[key] = append(groups[key], c)
	}
	for _, group := range groups {
		align(group)
	}
}

// align cuts channels so that they begin at the same sample and are equally
// long. Instants that differ by less than half a step are taken for the same. It
// leaves channels alone whose rates differ, or that would lose half of their
// samples or the greatest of them.
func align(group []*mseedChannel) {
	last := slices.MaxFunc(group, func(a, b *mseedChannel) int { return a.Start.Compare(b.Start) })
	drops := make([]int, len(group))
	length := math.MaxInt
	for i, c := range group {
		if math.Abs(c.StepS-last.StepS) > stepAgreement*last.StepS {
			return
		}
		drops[i] = int(math.Round(last.Start.Sub(c.Start).Seconds() / c.StepS))
		length = min(length, len(c.Acceleration)-drops[i])
	}
	for i, c := range group {
		peak := greatest(c.Acceleration)
		if length < len(c.Acceleration)/2 || peak < drops[i] || peak >= drops[i]+length {
			for _, other := range group {
				other.warn("channels of the instrument cover different times, and were left so")
			}
			return
		}
	}
	for i, c := range group {
		c.cut(drops[i], length, last)
	}
}

// cut keeps length samples from the one at index from on, whose instant is taken
// for that of the other channel's first.
func (c *mseedChannel) cut(from, length int, other *mseedChannel) {
	behind := len(c.Acceleration) - from - length
	if from > 0 || behind > 0 {
		c.warn("cut to the time that all channels of the instrument have: %d samples before and %d behind it", from, behind)
	}
	c.Acceleration = c.Acceleration[from : from+length]
	first := c.Start.Add(time.Duration(math.Round(float64(from) * c.StepS * 1e9)))
	if shift := other.Start.Sub(first); shift.Abs() > time.Microsecond {
		c.warn("samples %.6f s from those of %s taken for simultaneous", math.Abs(shift.Seconds()), other.ChannelCode)
	}
	c.Start = other.Start
}

// greatest returns the index of the sample that is farthest from the mean.
func greatest(x []float64) int {
	mean := meanOf(x)
	at := 0
	for i, v := range x {
		if cmp.Compare(math.Abs(v-mean), math.Abs(x[at]-mean)) > 0 {
			at = i
		}
	}
	return at
}
