package fdsnxml

import (
	"cmp"
	"errors"
	"fmt"
	"slices"
	"strings"
	"time"
)

// ErrUnknown is the cause where no epoch of a channel is known at all.
var ErrUnknown = errors.New("no such channel in the station metadata")

// maxEpochs is how many epochs an error lists.
const maxEpochs = 6

// Lookup returns the epoch of a channel that covers the times from one to the
// other, or what several that do say together. Where they contradict each other,
// the error is a *ContradictionError; where none covers the times it lists the
// epochs that there are; ErrUnknown where there are none.
func (v *Inventory) Lookup(network, station, location_, code string, from, to time.Time) (*Channel, error) {
	var epochs, fit []*Channel
	wanted := Channel{Network: network, Station: station, Location: location(location_), Code: code}
	for _, i := range v.channels.named[wanted.name()] {
		c := &v.Channels[i]
		epochs = append(epochs, c)
		if covers(c.Start, c.End, from, to) {
			fit = append(fit, c)
		}
	}
	switch {
	case len(fit) == 1:
		return fit[0], nil
	case len(epochs) == 0:
		return nil, ErrUnknown
	case len(fit) > 1:
		return agree(fit)
	}
	for _, c := range epochs {
		if covers(c.Start, c.End, from, from) {
			return nil, fmt.Errorf("the epoch changes between %s and %s: %s", stamp(from), stamp(to), list(epochs))
		}
	}
	return nil, fmt.Errorf("no epoch covers %s: %s", stamp(from), list(epochs))
}

// Site returns the epoch of a station that covers the time, or any where the
// time is zero. Of several at one place the one that begins last is taken, without its
// elevation where others have another one; where they are at different places, there is
// none.
func (v *Inventory) Site(network, code string, at time.Time) (s Station, ok bool) {
	wanted := Station{Network: network, Code: code}
	var fit []Station
	for _, i := range v.stations.named[wanted.name()] {
		if other := v.Stations[i]; at.IsZero() || covers(other.Start, other.End, at, at) {
			fit = append(fit, other)
		}
	}
	if len(fit) == 0 {
		return Station{}, false
	}
	slices.SortFunc(fit, compareStations)
	s = fit[0]
	for _, other := range fit[1:] {
		if s.Latitude.Known && other.Latitude.Known && !samePlace(s.Latitude, s.Longitude, other.Latitude, other.Longitude) {
			return Station{}, false
		}
		if s.ElevationM.Known && other.ElevationM.Known && apart(s.ElevationM.Value, other.ElevationM.Value, elevationAgreement) {
			s.ElevationM = Number{}
		}
		s.Name = cmp.Or(s.Name, other.Name)
	}
	return s, true
}

// elevationAgreement is how far elevations in m of one station may differ, as statements
// on it are told apart elsewhere. Common practice.
const elevationAgreement = 10

// compareStations puts those with a position first, of these the one that begins later,
// then orders by what is said.
func compareStations(a, b Station) int {
	if a.Latitude.Known != b.Latitude.Known {
		return compareNumbers(a.Latitude, b.Latitude)
	}
	return cmp.Or(
		b.Start.Compare(a.Start), a.End.Compare(b.End),
		compareNumbers(a.Latitude, b.Latitude), compareNumbers(a.Longitude, b.Longitude), compareNumbers(a.ElevationM, b.ElevationM),
		cmp.Compare(a.Name, b.Name),
	)
}

// Merge adds what the document at path says. What is said already is kept once, as
// that of the first.
func (v *Inventory) Merge(other *Inventory, path string) {
	for _, s := range other.Stations {
		v.addStation(s)
	}
	for _, c := range other.Channels {
		c.Path = path
		v.addChannel(c)
	}
}

func (v *Inventory) addStation(s Station) {
	if v.stations.add(s, s.name(), len(v.Stations)) {
		v.Stations = append(v.Stations, s)
	}
}

func (v *Inventory) addChannel(c Channel) {
	said := c
	said.Path, said.Line = "", 0
	if v.channels.add(said, c.name(), len(v.Channels)) {
		v.Channels = append(v.Channels, c)
	}
}

// name names a station, or a channel of one.
type name struct{ network, station, location, channel string }

func (s *Station) name() name { return name{network: s.Network, station: s.Code} }
func (c *Channel) name() name { return name{c.Network, c.Station, c.Location, c.Code} }

// String is XX.ABC, or XX.ABC.00.HNE.
func (n name) String() string {
	if n.location == "" && n.channel == "" {
		return n.network + "." + n.station
	}
	return strings.Join([]string{n.network, n.station, n.location, n.channel}, ".")
}

// index finds epochs by name, and tells which are there.
type index[T comparable] struct {
	named map[name][]int
	held  map[T]struct{}
}

// add notes an item that is not there yet as the one at a place.
func (x *index[T]) add(item T, n name, at int) bool {
	if _, ok := x.held[item]; ok {
		return false
	}
	if x.held == nil {
		x.named, x.held = map[name][]int{}, map[T]struct{}{}
	}
	x.held[item] = struct{}{}
	x.named[n] = append(x.named[n], at)
	return true
}

func covers(start, end, from, to time.Time) bool {
	return !from.Before(start) && (end.IsZero() || !to.After(end))
}

// list names epochs as "2010-01-01 to 2015-06-30 12:00, from 2015-07-01 on".
func list(epochs []*Channel) string {
	var parts []string
	for i, c := range epochs {
		if i == maxEpochs {
			parts = append(parts, fmt.Sprintf("and %d more", len(epochs)-i))
			break
		}
		from, to := "from "+stamp(c.Start), " to "+stamp(c.End)
		if c.Start.IsZero() {
			from = "from ever"
		}
		if c.End.IsZero() {
			to = " on"
		}
		parts = append(parts, from+to)
	}
	return strings.Join(parts, ", ")
}

func stamp(t time.Time) string { return t.UTC().Format("2006-01-02T15:04:05Z") }
