package pipeline

import (
	"math"
	"slices"
	"time"

	"swaybook/db"
	"swaybook/ingest"
)

// The velocities between which the strong part of a ground motion travels, in
// km/s: that of P waves in the crust and upper mantle is below the first, surface waves are slower
// than S waves, but not than the second.
//
// No source defines them; they are common practice.
const (
	fastestKMS = 8.0
	slowestKMS = 2.5
)

// metadataAccounts are what StationXML and QuakeML say of a channel of so many
// samples. A channel that
// knows nothing of its earthquake is given the one of QuakeML.
func metadataAccounts(m *ingest.Metadata, c *ingest.Channel, samples int) []account {
	if m.IsEmpty() {
		return nil
	}
	said := account{by: db.ByMetadata, source: "metadata", scheme: "metadata"}
	station, ok := m.Station(c)
	said.channel.Station = station
	if event, found := quakeOf(m.Events(), c, samples, station); found {
		ok = true
		said.channel.Event = event.Event
		if isWithoutEvent(c) {
			c.Event = event.Event
		}
		said.channel.Event.ID = event.PublicID
	}
	if !ok {
		return nil
	}
	return []account{said}
}

// isWithoutEvent reports whether a channel says nothing of its earthquake.
func isWithoutEvent(c *ingest.Channel) bool {
	return c.Event.ID == "" && c.Event.Name == "" && c.Event.Origin.IsZero()
}

// quakeOf returns the event that the channel recorded: the one nearest to what the
// channel says of its earthquake, else the only one whose waves reached the station
// while it recorded.
func quakeOf(events []ingest.CatalogueEvent, c *ingest.Channel, samples int, station ingest.Station) (event ingest.CatalogueEvent, ok bool) {
	if c.Event.Origin.IsZero() {
		return arriving(events, c, samples, station)
	}
	own := statedOf(c.Event)
	nearest := math.Inf(1)
	for _, e := range around(events, c.Event.Origin, minuteTolerance, minuteTolerance) {
		other := statedOf(e.Event)
		if d, same := difference(&own, &other); same && d < nearest {
			event, ok, nearest = e, true, d
		}
	}
	return event, ok
}

// around returns the events from before at to after it.
func around(events []ingest.CatalogueEvent, at time.Time, before, after time.Duration) []ingest.CatalogueEvent {
	from, _ := slices.BinarySearchFunc(events, at.Add(-before), func(e ingest.CatalogueEvent, t time.Time) int { return e.Origin.Compare(t) })
	to := from
	for to < len(events) && !events[to].Origin.After(at.Add(after)) {
		to++
	}
	return events[from:to]
}

func statedOf(e ingest.Event) statedEvent {
	return statedEvent{Event: db.Event{
		Origin: e.Origin, LatitudeDeg: pointer(e.Latitude), LongitudeDeg: pointer(e.Longitude), Magnitude: pointer(e.Magnitude),
	}}
}

// furthestKM is how far an earthquake is looked for: beyond, strong-motion
// instruments record few, and their waves take longer than the windows of records.
const furthestKM = 1000

// arriving returns the only event the waves of which came between the first and the last sample of
// the channel. Several are none: nothing says which.
func arriving(events []ingest.CatalogueEvent, c *ingest.Channel, samples int, station ingest.Station) (event ingest.CatalogueEvent, ok bool) {
	lat, lon := c.Station.Latitude.Or(station.Latitude), c.Station.Longitude.Or(station.Longitude)
	if c.Start.IsZero() || !lat.Known || !lon.Known {
		return event, false
	}
	end := c.Start.Add(seconds(float64(samples-1) * c.StepS))
	found := 0
	for _, e := range around(events, c.Start, seconds(furthestKM/slowestKMS), end.Sub(c.Start)) {
		depth := e.DepthKM.Value
		km := math.Hypot(epicentralKM(lat.Value, lon.Value, e.Latitude.Value, e.Longitude.Value), depth)
		first, last := e.Origin.Add(seconds(km/fastestKMS)), e.Origin.Add(seconds(km/slowestKMS))
		if km <= furthestKM && !last.Before(c.Start) && !first.After(end) {
			event = e
			found++
		}
	}
	if found != 1 {
		return ingest.CatalogueEvent{}, false
	}
	return event, true
}

func seconds(s float64) time.Duration { return time.Duration(s * float64(time.Second)) }
