package query

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"

	"swaybook/db"
)

// Grouping parts the motions of a selection by an attribute: by its text, or by bins of
// its number between ascending edges, of which each belongs to the bin above. The zero
// Grouping parts nothing.
type Grouping struct {
	Attribute string
	Edges     []float64 // of a number, in its unit; nil for a text
}

// groupingNames are names that people use for attributes beside the attributes' own.
var groupingNames = map[string]string{"distance": "distance_km", "site_class": "site_class_en1998", "vs30": "vs30_m_s", "depth": "depth_km"}

// ParseGrouping reads the name of an attribute, with edges behind a colon where it is a
// number: "event", "magnitude:5,6,7". The empty text gives the zero Grouping.
func ParseGrouping(text string) (Grouping, error) {
	if strings.TrimSpace(text) == "" {
		return Grouping{}, nil
	}
	name, list, hasEdges := strings.Cut(strings.TrimSpace(text), ":")
	g := Grouping{Attribute: strings.TrimSpace(name)}
	if full, ok := groupingNames[g.Attribute]; ok {
		g.Attribute = full
	}
	if hasEdges {
		edges, err := parseList(list, parsePlain("by"))
		if err != nil {
			return g, err
		}
		g.Edges = edges
	}
	if g.Attribute == "" {
		return g, usage("by", "%q names no attribute", text)
	}
	return g, g.validate()
}

func (g *Grouping) validate() error {
	switch {
	case g.Attribute == "":
		return nil
	case g.text() != nil:
		if g.Edges != nil {
			return usage("by", "%s is a text and has no bins", g.Attribute)
		}
		return nil
	case g.number() == nil:
		return usage("by", "unknown attribute %q; texts: %s; numbers, with edges of bins such as magnitude:5,6,7: %s", g.Attribute, textNames(), numberNames())
	case len(g.Edges) == 0:
		return usage("by", "%s is a number: give edges of bins, such as %s:5,6,7", g.Attribute, g.Attribute)
	}
	for i, edge := range g.Edges {
		if math.IsInf(edge, 0) || math.IsNaN(edge) || i > 0 && !(edge > g.Edges[i-1]) {
			return usage("by", "the edges of bins of %s are not finite and ascending", g.Attribute)
		}
	}
	return nil
}

func (g *Grouping) text() func(*attributes) string {
	for _, t := range texts {
		if t.name == g.Attribute {
			return t.of
		}
	}
	return nil
}

func (g *Grouping) number() func(*attributes) float64 {
	for _, n := range numbers {
		if n.name == g.Attribute {
			return n.of
		}
	}
	return nil
}

// details are what grouping needs of components.
func (g *Grouping) details() db.Details {
	if g.Attribute == "station" {
		return db.DetailRecord // the network too
	}
	return attributeDetails[g.Attribute]
}

// Group is one part of a selection.
type Group struct {
	Label                    string
	From, To                 *float64 // the edges of a bin, nil for none
	Records, Spectra, Events int
	motions                  []int // positions, ascending
}

// unknownGroup is of motions that lack the attribute; it comes last.
const unknownGroup = "unknown"

// part returns the groups of the motions: of texts those that occur, in their order, of
// bins all, from the lowest to the highest; and where there are such, last, the motions of
// which the attribute is unknown. It returns nil for the zero Grouping.
func (g *Grouping) part(motions []motion) []Group {
	if g.Attribute == "" {
		return nil
	}
	groups := g.bins()
	labelled := map[string]int{}
	for i := range groups {
		labelled[groups[i].Label] = i
	}
	for i := range motions {
		label := g.labelOf(&motions[i])
		at, ok := labelled[label]
		if !ok {
			at = len(groups)
			labelled[label] = at
			groups = append(groups, Group{Label: label})
		}
		groups[at].motions = append(groups[at].motions, i)
	}
	if g.Edges == nil {
		slices.SortFunc(groups, func(a, b Group) int {
			return cmp.Or(cmp.Compare(btoi(a.Label == unknownGroup), btoi(b.Label == unknownGroup)), strings.Compare(a.Label, b.Label))
		})
	}
	for i := range groups {
		groups[i].count(motions)
	}
	return groups
}

func btoi(b bool) int {
	if b {
		return 1
	}
	return 0
}

// count counts what the group's motions are of.
func (g *Group) count(motions []motion) {
	records, events := map[int64]bool{}, map[string]bool{}
	for _, i := range g.motions {
		c := motions[i].members[0]
		records[c.RecordID] = true
		if c.Record.Event != nil {
			events[c.Record.Event.Code] = true
		}
	}
	g.Records, g.Spectra, g.Events = len(records), len(g.motions), len(events)
}

// bins are the empty groups between the edges, and below and above them.
func (g *Grouping) bins() []Group {
	if g.Edges == nil {
		return nil
	}
	groups := make([]Group, len(g.Edges)+1)
	for i := range groups {
		groups[i].Label = g.binLabel(i)
		if i > 0 {
			groups[i].From = &g.Edges[i-1]
		}
		if i < len(g.Edges) {
			groups[i].To = &g.Edges[i]
		}
	}
	return groups
}

// binLabel names bin 0 below the first edge, bin i between edges i-1 and i.
func (g *Grouping) binLabel(i int) string {
	last := len(g.Edges) - 1
	switch {
	case i == 0:
		return fmt.Sprintf("%s < %s", g.Attribute, shortest(g.Edges[0]))
	case i > last:
		return fmt.Sprintf("%s >= %s", g.Attribute, shortest(g.Edges[last]))
	}
	return fmt.Sprintf("%s <= %s < %s", shortest(g.Edges[i-1]), g.Attribute, shortest(g.Edges[i]))
}

func (g *Grouping) labelOf(m *motion) string {
	a := m.attributes()
	if of := g.text(); of != nil {
		label := of(&a)
		if g.Attribute == "station" && a.Network != "" && label != "" {
			label = stationCode(&db.Station{Network: a.Network, Code: label})
		}
		return cmp.Or(label, unknownGroup)
	}
	x := g.number()(&a)
	if math.IsNaN(x) {
		return unknownGroup
	}
	above, found := slices.BinarySearch(g.Edges, x)
	if found {
		above++ // an edge belongs to the bin above
	}
	return g.binLabel(above)
}

func textNames() string {
	names := make([]string, len(texts))
	for i, t := range texts {
		names[i] = t.name
	}
	return strings.Join(names, ", ")
}

func numberNames() string {
	names := make([]string, len(numbers))
	for i, n := range numbers {
		names[i] = n.name
	}
	return strings.Join(names, ", ")
}
