package query

import (
	"math"

	"swaybook/db"
)

// Balance says whose motions weigh as much as one motion together, so that an earthquake
// with many records, or a station with many earthquakes, does not swamp the rest.
type Balance string

// Every motion counts once, or every event or station does: a motion weighs one over the
// number of motions that its event or station has at the period.
const (
	BalanceNone    Balance = "none"
	BalanceEvent   Balance = "event"
	BalanceStation Balance = "station"
)

// ParseBalance reads "none", "event" or "station". The empty text gives BalanceNone.
func ParseBalance(text string) (Balance, error) {
	switch b := Balance(text); b {
	case "":
		return BalanceNone, nil
	case BalanceNone, BalanceEvent, BalanceStation:
		return b, nil
	}
	return "", usage("balance", "unknown balance %q; accepted: none, event, station", text)
}

func (b Balance) isNone() bool { return b == BalanceNone || b == "" }

// details are what balancing needs of components.
func (b Balance) details() db.Details {
	if b == BalanceStation {
		return db.DetailRecord
	}
	return 0
}

// lacking says what a record lacks that has to be balanced by, "" for nothing.
func (b Balance) lacking(r *db.Record) string {
	switch {
	case b == BalanceEvent && r.Event == nil, b == BalanceStation && r.Station == nil:
		return string(b) + " unknown"
	}
	return ""
}

// clusters number the events or stations of motions, by position, from 0 in the order of
// motions; nil where nothing is balanced.
func (b Balance) clusters(motions []motion) []int {
	if b.isNone() {
		return nil
	}
	return numbered(motions, b.key)
}

func (b Balance) key(m *motion) string {
	r := m.members[0].Record
	if b == BalanceStation {
		return r.Station.Network + "\x00" + r.Station.Code
	}
	return r.Event.Code
}

// numbered numbers the motions' keys from 0 in the order in which they come.
func numbered(motions []motion, key func(*motion) string) []int {
	out, numbers := make([]int, len(motions)), map[string]int{}
	for i := range motions {
		k := key(&motions[i])
		n, ok := numbers[k]
		if !ok {
			n = len(numbers)
			numbers[k] = n
		}
		out[i] = n
	}
	return out
}

// weigh sets weights to those of the sample's motions that have a value, 0 of others.
func (s *sample) weigh(weights, values []float64) {
	sizes := map[int]int{}
	for k, i := range s.at {
		if !math.IsNaN(values[k]) {
			sizes[s.clusters[i]]++
		}
	}
	for k, i := range s.at {
		weights[k] = 0
		if !math.IsNaN(values[k]) {
			weights[k] = 1 / float64(sizes[s.clusters[i]])
		}
	}
}
