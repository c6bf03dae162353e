package query

import (
	"fmt"
	"strconv"
)

// Held counts what is in a list of records.
type Held struct{ Records, Events, Stations, Components int }

// Held counts the answer's records with their known events and stations.
func (a *RecordsAnswer) Held() Held {
	records, events, stations := map[string]bool{}, map[string]bool{}, map[string]bool{}
	for i := range a.Rows {
		r := &a.Rows[i]
		records[r.Record] = true
		if r.Event != nil {
			events[*r.Event] = true
		}
		if r.Station != nil {
			stations[orEmpty(r.Network)+" "+*r.Station] = true
		}
	}
	return Held{len(records), len(events), len(stations), len(a.Rows)}
}

// Quality sums up what was found of the components: how many have which finding, and which
// screen leaves them out for it.
func (a *RecordsAnswer) Quality() *Sheet {
	type key struct{ flag, of string }
	counts, clean := map[key]int{}, 0
	for i := range a.Rows {
		seen := map[key]bool{}
		for _, f := range a.Rows[i].Quality {
			seen[key{f.Flag, f.Of}] = true
		}
		for k := range seen {
			counts[k]++
		}
		if len(seen) == 0 {
			clean++
		}
	}
	t := table{columns: []column{{name: "finding", isWord: true}, {name: "of the motion", isWord: true}, {name: "components"}, {name: "left out by screen", isWord: true}}}
	for _, flag := range flags {
		for _, of := range []string{ofDelivered, ofConditioned} {
			n := counts[key{flag.name, of}]
			if n == 0 {
				continue
			}
			// A finding that counts of the motion behind the recipe is not held against it as delivered.
			by := orDash(orNull(string(flag.screen)))
			if flag.isLeft && of == ofDelivered {
				by += ", where it remains"
			}
			t.add(flag.name, of, strconv.Itoa(n), by)
		}
	}
	s := &Sheet{Title: "Records and their quality", Lines: []string{fmt.Sprintf("Nothing was found in %d of %s.", clean, countOf(len(a.Rows), "component", "components"))}}
	if len(t.rows) > 0 {
		s.Tables = []Table{t.export("")}
	}
	return s
}
