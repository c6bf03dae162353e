package pipeline

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"
	"time"

	"swaybook/db"
	"swaybook/ingest"
)

// The velocities between which the strong part of a ground motion travels, in km/s:
// that of P waves in the crust and upper mantle is below the first, surface waves are
// slower than S waves, but not than the second.
//
// No source defines them; they are common practice.
const (
	fastestKMS = 8.0
	slowestKMS = 2.5
)

// Of several earthquakes whose waves came, a record is taken to be of the largest where
// that exceeds each other one by largerBy and is no more than fartherBy times as far: its
// motion is some times stronger then. The limits are ours.
const (
	largerBy  = 1.5
	fartherBy = 2
)

// metadataAccounts are what StationXML and QuakeML say of a channel of so many
// samples; events are those of the documents, and what else may be considered. A channel
// that states no origin time may be of the QuakeML event whose waves came while it
// recorded. Of any other, the QuakeML event is found by what all its files state
// (settler.quake). doubt says why none of several was taken, remark why one was.
func metadataAccounts(m *ingest.Metadata, events []ingest.CatalogueEvent, c *ingest.Channel, samples int) (accounts []account, remark, doubt string) {
	if m.IsEmpty() {
		return nil, "", ""
	}
	said := account{by: db.ByMetadata, source: "metadata"}
	station, ok := m.Station(c)
	said.channel.Station = station
	if c.Event.Origin.IsZero() {
		said.quakes, remark, doubt = reading(arriving(events, c, samples, station))
	}
	if !ok && len(said.quakes) == 0 {
		return nil, remark, doubt
	}
	return []account{said}, remark, doubt
}

// reading returns the accounts of the earthquake of which a record is taken to be while
// which the waves of these events came, the one to take first.
func reading(came []arrival) (quakes []ingest.CatalogueEvent, remark, doubt string) {
	stored := make([]db.Quake, len(came))
	for i, a := range came {
		stored[i] = quakeOf(a.CatalogueEvent)
	}
	all := earthquakes(stored)
	if len(all) == 0 {
		return nil, "", ""
	}
	at := 0
	if len(all) > 1 {
		at = largest(all, func(i int) *float64 { return stored[i].Magnitude })
		if at < 0 || isFarther(came, all, at) {
			return nil, "", fmt.Sprintf("the waves of %d QuakeML events came while it recorded, none of which is taken: %s", len(all), namesOf(came, all))
		}
		remark = fmt.Sprintf("the waves of %d earthquakes came while it recorded, and the largest by %g is taken: %s", len(all), largerBy, namesOf(came, all[at:at+1]))
	}
	for _, i := range all[at] {
		quakes = append(quakes, came[i].CatalogueEvent)
	}
	return quakes, remark, ""
}

// earthquakes are the positions of the accounts of each earthquake, those that associate
// joins. The account to take is the first: one with a magnitude, then the first by
// identifier. Earthquakes go by time.
func earthquakes(quakes []db.Quake) [][]int {
	events := make([]statedEvent, len(quakes))
	for i, q := range quakes {
		events[i] = statedEvent{EventKey: db.EventKey{Code: q.PublicID}, Event: q.Event, identifiers: []string{schemeOfQuakes(q.PublicID) + ":" + q.PublicID}}
	}
	of := map[int][]int{}
	for i, first := range associate(events) {
		of[first] = append(of[first], i)
	}
	var out [][]int
	for _, one := range of {
		slices.SortFunc(one, func(i, j int) int {
			return cmp.Or(compareBool(quakes[i].Magnitude != nil, quakes[j].Magnitude != nil), cmp.Compare(quakes[i].PublicID, quakes[j].PublicID))
		})
		out = append(out, one)
	}
	slices.SortFunc(out, func(a, b []int) int {
		x, y := &quakes[a[0]], &quakes[b[0]]
		return cmp.Or(x.Origin.Compare(y.Origin), cmp.Compare(x.PublicID, y.PublicID))
	})
	return out
}

// largest is the position of the earthquake that exceeds all others, -1 where none does.
func largest(all [][]int, magnitude func(int) *float64) int {
	const rounding = 1e-9
	return slices.IndexFunc(all, func(one []int) bool {
		m := magnitude(one[0])
		return m != nil && !slices.ContainsFunc(all, func(other []int) bool {
			o := magnitude(other[0])
			return other[0] != one[0] && (o == nil || *m < *o+largerBy-rounding)
		})
	})
}

// isFarther reports whether the earthquake is too far away, against the others, to have
// made the stronger motion.
func isFarther(came []arrival, all [][]int, at int) bool {
	return slices.ContainsFunc(all, func(other []int) bool {
		return came[all[at][0]].hypocentralKM > fartherBy*came[other[0]].hypocentralKM
	})
}

// schemeOfQuakes is whose codes the identifiers of QuakeML are: of the authority that they
// name, as in smi:authority/resource. One that names none is told apart from no other.
func schemeOfQuakes(publicID string) string {
	_, resource, ok := strings.Cut(publicID, ":")
	if !ok {
		resource = publicID
	}
	resource = strings.TrimLeft(resource, "/")
	authority, _, ok := strings.Cut(resource, "/")
	if !ok {
		authority = resource
	}
	return "metadata/" + strings.ReplaceAll(authority, ":", ".")
}

// quakeIn returns the QuakeML event whose waves came, nil for none.
func quakeIn(accounts []account) *ingest.CatalogueEvent {
	for _, a := range accounts {
		if len(a.quakes) > 0 {
			return &a.quakes[0]
		}
	}
	return nil
}

// namesOf names the first of several earthquakes.
func namesOf(came []arrival, all [][]int) string {
	const most = 4
	var out []string
	for i, one := range all {
		if i == most {
			out = append(out, "…")
			break
		}
		e := &came[one[0]]
		out = append(out, fmt.Sprintf("%.80s (%s)", e.PublicID, e.Origin.UTC().Format("2006-01-02T15:04:05Z")))
	}
	return strings.Join(out, ", ")
}

// isWithoutEvent reports whether a channel says nothing of its earthquake.
func isWithoutEvent(c *ingest.Channel) bool {
	return c.Event.ID == "" && c.Event.Name == "" && c.Event.Origin.IsZero()
}

// furthestKM is how far an earthquake is looked for: beyond, strong-motion
// instruments record few, and their waves take longer than the windows of records.
const furthestKM = 1000

// arrival is an event of which the waves came, and how far from the station it was.
type arrival struct {
	ingest.CatalogueEvent
	hypocentralKM float64
}

// arriving returns the events the waves of which came between the first and the last
// sample of the channel, by time.
func arriving(events []ingest.CatalogueEvent, c *ingest.Channel, samples int, station ingest.Station) []arrival {
	lat, lon := c.Station.Latitude.Or(station.Latitude), c.Station.Longitude.Or(station.Longitude)
	if c.Start.IsZero() || !lat.Known || !lon.Known {
		return nil
	}
	end := c.Start.Add(seconds(float64(samples-1) * c.StepS))
	var came []arrival
	for _, e := range around(events, c.Start, seconds(furthestKM/slowestKMS), end.Sub(c.Start)) {
		depth := e.DepthKM.Value
		km := math.Hypot(epicentralKM(lat.Value, lon.Value, e.Latitude.Value, e.Longitude.Value), depth)
		first, last := e.Origin.Add(seconds(km/fastestKMS)), e.Origin.Add(seconds(km/slowestKMS))
		if km <= furthestKM && !last.Before(c.Start) && !first.After(end) {
			came = append(came, arrival{e, km})
		}
	}
	return came
}

func seconds(s float64) time.Duration { return time.Duration(s * float64(time.Second)) }
