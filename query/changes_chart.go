package query

import (
	"fmt"
	"slices"
	"strings"

	"swaybook/query/chart"
)

// Changes is the answer as a chart of how its median, mean and percentiles differ from those of
// another one, which was given to the same question before. The names say when that was.
func (a *SpectrumAnswer) Changes(before *SpectrumAnswer, was, is string, units Units) *chart.Changes {
	now, then := a.Chart(units, nil, false), before.Chart(units, nil, false)
	c := &chart.Changes{
		Title: "Changes of " + strings.ToLower(a.Measure.title()[:1]) + a.Measure.title()[1:] + fmt.Sprintf(", damping %s", percentText(a.Damping)),
		Notes: []string{is + ": " + a.Selection.heading(), was + ": " + before.Selection.heading()}, Foot: Caution,
		Quantity: now.Quantity, Before: was, After: is, PeriodsS: a.PeriodsS, CountsBefore: then.Counts, CountsAfter: now.Counts,
	}
	if !slices.Equal(a.PeriodsS, before.PeriodsS) {
		return c // nothing can be compared
	}
	for _, curve := range now.Curves {
		if curve.Kind == chart.Envelope || curve.Kind == chart.Design {
			continue
		}
		for _, other := range then.Curves {
			if other.Name == curve.Name {
				c.Pairs = append(c.Pairs, chart.Pair{Name: curve.Name, Kind: curve.Kind, Before: other.Values, After: curve.Values})
			}
		}
	}
	return c
}
