package query

import (
	"cmp"
	"fmt"
	"slices"
	"strings"

	"swaybook/query/chart"
)

// leastDrawnKM is where nearer records are drawn: a logarithmic axis has no zero, which the
// distance to a rupture's projection can be.
const leastDrawnKM = 0.1

// Chart is the list as a chart of magnitude against distance, a point a record, in a shape by
// ground type.
func (a *RecordsAnswer) Chart() *chart.Scatter {
	var s scatter
	for rows := range runs(a.Rows, func(r *RecordRow) string { return r.Record }) {
		s.add(&rows[0])
	}
	c := &chart.Scatter{
		Title: fmt.Sprintf("Magnitude and distance of %s", countOf(s.drawn, "record", "records")),
		Foot:  Caution, X: s.xLabel(), Y: s.yLabel(), Groups: s.groups,
	}
	if len(a.Rows) > 0 {
		c.Notes = append(c.Notes, a.Selection.heading())
	}
	c.Notes = append(c.Notes, s.notes()...)
	return c
}

// tally counts words.
type tally map[string]int

// words are the counted words, the most frequent first.
func (t tally) words(of func(word string, n int) string) string {
	var list []string
	for w := range t {
		list = append(list, w)
	}
	slices.SortFunc(list, func(a, b string) int { return cmp.Or(cmp.Compare(t[b], t[a]), strings.Compare(a, b)) })
	for i, w := range list {
		list[i] = of(w, t[w])
	}
	return strings.Join(list, ", ")
}

// scatter gathers points.
type scatter struct {
	groups                                     []chart.PointGroup
	drawn, near, noMagnitude, noDistance, none int
	kinds, types                               tally
}

// groundTypes are the groups of points, by what EN 1998-1 calls them.
var groundTypes = []string{"A", "B", "C", "D", "E", "S1", "S2"}

// add takes a record in.
func (s *scatter) add(r *RecordRow) {
	if s.groups == nil {
		s.kinds, s.types = tally{}, tally{}
		for _, name := range groundTypes {
			s.groups = append(s.groups, chart.PointGroup{Name: "ground " + name})
		}
		s.groups = append(s.groups, chart.PointGroup{Name: "unknown"})
	}
	switch {
	case r.Magnitude == nil && r.DistanceKM == nil:
		s.none++
		return
	case r.Magnitude == nil:
		s.noMagnitude++
		return
	case r.DistanceKM == nil:
		s.noDistance++
		return
	}
	s.drawn++
	s.kinds[cmp.Or(r.distanceKind(), "as stated")]++
	s.types[cmp.Or(orEmpty(r.MagnitudeType), "of unknown type")]++
	x := *r.DistanceKM
	if x < leastDrawnKM {
		x = leastDrawnKM
		s.near++
	}
	at := slices.Index(groundTypes, orEmpty(r.SiteClassEN1998))
	if at < 0 {
		at = len(groundTypes)
	}
	g := &s.groups[at]
	g.X, g.Y = append(g.X, x), append(g.Y, *r.Magnitude)
}

// xLabel names the kind of the distances, or those that there are.
func (s *scatter) xLabel() string {
	if len(s.kinds) == 1 {
		return s.kinds.words(func(kind string, _ int) string {
			if kind == "as stated" {
				return "distance as stated (km)"
			}
			return kind + " distance (km)"
		})
	}
	return "distance (km): " + s.kinds.words(func(kind string, n int) string { return fmt.Sprintf("%s %d", kind, n) })
}

func (s *scatter) yLabel() string {
	return "magnitude " + s.types.words(func(name string, _ int) string { return name })
}

// notes count what is not drawn, or not where it is.
func (s *scatter) notes() (out []string) {
	var lacking []string
	for _, l := range []struct {
		n    int
		what string
	}{{s.noMagnitude, "magnitude"}, {s.noDistance, "distance"}, {s.none, "both"}} {
		if l.n > 0 {
			lacking = append(lacking, fmt.Sprintf("%d lack %s", l.n, l.what))
		}
	}
	if lacking != nil {
		out = append(out, "not drawn: "+countOf(s.noMagnitude+s.noDistance+s.none, "record", "records")+" ("+strings.Join(lacking, ", ")+")")
	}
	if s.near > 0 {
		out = append(out, fmt.Sprintf("%s nearer than %v km, drawn there", countOf(s.near, "record", "records"), leastDrawnKM))
	}
	return out
}
