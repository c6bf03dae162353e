package pipeline

import (
	"cmp"
	"context"
	"slices"
	"strings"
	"time"

	"swaybook/db"
)

// like says that two components, by position, may hold the same motion, whose samples
// are not equal.
type like struct {
	i, j     int
	strength float64 // by which to choose among several
	exact    bool    // the samples are the same but for a factor and an offset
}

// isStronger reports whether l goes before another.
func (l like) isStronger(than like) bool {
	if l.exact != than.exact {
		return l.exact
	}
	return l.strength > than.strength
}

// groups are components of which those of one motion are united. All that depends on
// pairs of components is asked of each pair once at most.
type groups struct {
	all     []*db.Version
	of      []int   // the group of each component: its first
	members [][]int // of each group, by its first
	apart   []map[int]bool
	// The components that speak for others of which the same is said and whose samples
	// are equal; record is the one of which all of those are, 0 where they are of several.
	alone  []int
	record []int64
	series []int           // the first component of the same samples
	exact  map[[2]int]bool // by series, the lower one first
}

func newGroups(all []*db.Version) *groups {
	n := len(all)
	g := &groups{all: all, of: make([]int, n), members: make([][]int, n), apart: make([]map[int]bool, n), record: make([]int64, n),
		series: make([]int, n), exact: map[[2]int]bool{}}
	first := map[series]int{}
	for i, v := range all {
		g.of[i], g.members[i], g.record[i] = i, []int{i}, v.RecordID
		if _, ok := first[seriesOf(v)]; !ok {
			first[seriesOf(v)] = i
		}
		g.series[i] = first[seriesOf(v)]
	}
	return g
}

// series tells samples apart.
type series struct {
	digest string
	stepS  float64
}

func seriesOf(v *db.Version) series { return series{v.Digest, v.StepS} }

// said is all that canBeOne, areTwoSensors and isOneSensorProcessed ask of a
// component, but for its file.
type said struct {
	series
	event                                                                          int64
	network, station, instrument, siting, axis, label, channel, processing, format string
	azimuthDeg                                                                     float64
	hasAzimuth                                                                     bool
	start                                                                          time.Time
}

func saidOf(v *db.Version) said {
	s := said{series: seriesOf(v), event: v.EventID, network: v.Network, station: v.StationCode, instrument: v.Instrument, siting: v.Siting,
		axis: v.Axis, label: strings.ToLower(v.Label), channel: v.Channel, processing: v.Processing, format: v.SourceFormat, start: v.Start}
	if v.AzimuthDeg != nil {
		s.azimuthDeg, s.hasAzimuth = *v.AzimuthDeg, true
	}
	return s
}

// uniteEqual unites what has equal samples: those of which the same is said at once,
// the others where canBeOne says so. Components of one record are never two versions.
func (g *groups) uniteEqual(ctx context.Context) error {
	type ofRecord struct {
		said
		record int64
	}
	type nth struct {
		said
		before int // of the same record
	}
	before, first, byDigest := map[ofRecord]int{}, map[nth]int{}, map[string][]int{}
	for i, v := range g.all {
		s := saidOf(v)
		key := nth{s, before[ofRecord{s, v.RecordID}]}
		before[ofRecord{s, v.RecordID}]++
		if k, ok := first[key]; ok {
			g.unite(k, i)
			g.record[k] = 0
			continue
		}
		first[key] = i
		g.alone = append(g.alone, i)
		byDigest[v.Digest] = append(byDigest[v.Digest], i)
	}
	for _, i := range g.alone {
		if err := ctx.Err(); err != nil {
			return err
		}
		for _, j := range byDigest[g.all[i].Digest] {
			if j < i && g.of[i] != g.of[j] && g.areOfTwoRecords(i, j) && canBeOne(g.all[i], g.all[j]) {
				g.unite(i, j)
			}
		}
	}
	return nil
}

// areOfTwoRecords reports whether among those for which i and j speak there are two of
// different records.
func (g *groups) areOfTwoRecords(i, j int) bool {
	return g.record[i] != g.record[j] || g.record[i] == 0
}

// uniteLike unites by these likes, the strongest first, but for those that have a rival
// and those that would bring two sensors together. Of equally strong ones the samples
// decide, then the ids.
func (g *groups) uniteLike(ctx context.Context, likes []like) error {
	slices.SortFunc(likes, func(a, b like) int {
		switch {
		case a.isStronger(b):
			return -1
		case b.isStronger(a):
			return 1
		}
		return cmp.Or(slices.Compare(g.digests(a), g.digests(b)), cmp.Compare(min(a.i, a.j), min(b.i, b.j)), cmp.Compare(max(a.i, a.j), max(b.i, b.j)))
	})
	at := make([][]like, len(g.all)) // of each component, in the same order
	for _, l := range likes {
		at[l.i], at[l.j] = append(at[l.i], l), append(at[l.j], l)
		if l.exact {
			g.exact[g.seriesPair(l.i, l.j)] = true
		}
	}
	for _, l := range likes {
		if err := ctx.Err(); err != nil {
			return err
		}
		if !g.hasRival(at, l) && !g.areApart(l.i, l.j) {
			g.unite(l.i, l.j)
		}
	}
	return nil
}

func (g *groups) digests(l like) []string {
	a, b := g.all[l.i].Digest, g.all[l.j].Digest
	return []string{min(a, b), max(a, b)}
}

func (g *groups) seriesPair(i, j int) [2]int {
	i, j = g.series[i], g.series[j]
	return [2]int{min(i, j), max(i, j)}
}

// hasRival reports whether one of the two components is more like a sensor beside the
// other: what one sensor gave is like what those beside it gave, and most like its own.
// at has the likes of each component, the strongest first.
func (g *groups) hasRival(at [][]like, l like) bool {
	for _, ends := range [][2]int{{l.i, l.j}, {l.j, l.i}} {
		shared, other := ends[0], ends[1]
		for _, r := range at[shared] {
			if !r.isStronger(l) {
				break
			}
			if areTwoSensors(g.all[r.i+r.j-shared], g.all[other]) {
				return true
			}
		}
	}
	return false
}

// areApart reports whether to unite the groups of i and j would bring two sensors
// together whose samples are not the same but for a factor and an offset. What is apart
// stays so, since groups only grow.
func (g *groups) areApart(i, j int) bool {
	first, second := g.of[i], g.of[j]
	if first == second || g.apart[first][second] {
		return first != second
	}
	for _, p := range g.members[first] {
		for _, q := range g.members[second] {
			a, b := g.all[p], g.all[q]
			if areTwoSensors(a, b) && a.Digest != b.Digest && !g.exact[g.seriesPair(p, q)] {
				g.keepApart(first, second)
				return true
			}
		}
	}
	return false
}

func (g *groups) keepApart(first, second int) {
	for _, pair := range [][2]int{{first, second}, {second, first}} {
		if g.apart[pair[0]] == nil {
			g.apart[pair[0]] = map[int]bool{}
		}
		g.apart[pair[0]][pair[1]] = true
	}
}

// unite makes the groups of i and j one.
func (g *groups) unite(i, j int) {
	from, to := max(g.of[i], g.of[j]), min(g.of[i], g.of[j])
	if from == to {
		return
	}
	for _, k := range g.members[from] {
		g.of[k] = to
	}
	g.members[to] = append(g.members[to], g.members[from]...)
	g.members[from] = nil
	for other := range g.apart[from] {
		delete(g.apart[other], from)
		g.keepApart(to, other)
	}
	g.apart[from] = nil
}
