package fdsnxml

import (
	"errors"
	"fmt"
	"hash/maphash"
	"reflect"
	"slices"
	"strings"
	"time"
)

// ErrUnknown is the cause where no epoch of a channel is known at all.
var ErrUnknown = errors.New("no such channel in the station metadata")

// maxEpochs is how many epochs an error lists.
const maxEpochs = 6

// Lookup returns the one epoch of a channel that covers the times from one to
// the other. Where none or more than one does, the error lists the epochs that
// there are; ErrUnknown where there are none.
func (v *Inventory) Lookup(network, station, location_, code string, from, to time.Time) (*Channel, error) {
	var epochs, fit []*Channel
	wanted := Channel{Network: network, Station: station, Location: location(location_), Code: code}
	for _, i := range v.channels.byName[wanted.name()] {
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
		return nil, fmt.Errorf("more than one epoch covers %s: %s", stamp(from), list(fit))
	}
	for _, c := range epochs {
		if covers(c.Start, c.End, from, from) {
			return nil, fmt.Errorf("the epoch changes between %s and %s: %s", stamp(from), stamp(to), list(epochs))
		}
	}
	return nil, fmt.Errorf("no epoch covers %s: %s", stamp(from), list(epochs))
}

// Site returns the epoch of a station that covers the time, or any where the
// time is zero. Where the epochs that fit are at different places, there is none.
func (v *Inventory) Site(network, code string, at time.Time) (s Station, ok bool) {
	wanted := Station{Network: network, Code: code}
	for _, i := range v.stations.byName[wanted.name()] {
		other := v.Stations[i]
		if !at.IsZero() && !covers(other.Start, other.End, at, at) {
			continue
		}
		if ok && (s.Latitude != other.Latitude || s.Longitude != other.Longitude || s.ElevationM != other.ElevationM) {
			return Station{}, false
		}
		s, ok = other, true
	}
	return s, ok
}

// Merge adds what another document says. What both say alike is kept once.
func (v *Inventory) Merge(other *Inventory) {
	for _, s := range other.Stations {
		v.addStation(s)
	}
	for _, c := range other.Channels {
		v.addChannel(c)
	}
}

func (v *Inventory) addStation(s Station) {
	v.Stations = add(&v.stations, v.Stations, s, s.name(), maphash.Comparable(seed, s))
}

func (v *Inventory) addChannel(c Channel) {
	v.Channels = add(&v.channels, v.Channels, c, c.name(), c.hash())
}

// seed is of this process alone, so that no document can be made whose items have
// one hash.
var seed = maphash.MakeSeed()

// hash is that of all that is stated.
func (c Channel) hash() uint64 {
	key := struct {
		rest         Channel
		azimuth, dip float64
		sensitivity  Sensitivity
	}{rest: c}
	key.rest.AzimuthDeg, key.rest.DipDeg, key.rest.Sensitivity = nil, nil, nil
	if c.AzimuthDeg != nil {
		key.azimuth = *c.AzimuthDeg
	}
	if c.DipDeg != nil {
		key.dip = *c.DipDeg
	}
	if c.Sensitivity != nil {
		key.sensitivity = *c.Sensitivity
	}
	return maphash.Comparable(seed, key)
}

// index finds the items of an inventory.
type index struct {
	byName map[string][]int
	byHash map[uint64][]int
}

// add appends an item that is not there yet and notes it under its name. One name
// may have any number of epochs, so equal ones are looked for by their hash.
func add[T any](x *index, all []T, item T, name string, hash uint64) []T {
	if slices.ContainsFunc(x.byHash[hash], func(i int) bool { return reflect.DeepEqual(all[i], item) }) {
		return all
	}
	if x.byName == nil {
		x.byName, x.byHash = map[string][]int{}, map[uint64][]int{}
	}
	x.byName[name] = append(x.byName[name], len(all))
	x.byHash[hash] = append(x.byHash[hash], len(all))
	return append(all, item)
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
