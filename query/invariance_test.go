package query

import (
	"fmt"
	"math/rand/v2"
	"testing"

	"swaybook/db"
)

// scattered are thirty records of six events, one of them unknown, at three stations.
func scattered() []inventedRecord {
	rng := rand.New(rand.NewPCG(9, 9))
	events := []*db.Event{quakeA, quakeB, quakeC, {Code: "QD", Magnitude: ptr(5.0)}, {Code: "QE", Magnitude: ptr(7.0)}, nil}
	var out []inventedRecord
	for i := range 30 {
		level := rng.ExpFloat64() / 50
		out = append(out, inventedRecord{
			code: fmt.Sprintf("X%02d", i), siting: "free-field", event: events[rng.IntN(len(events))], station: []*db.Station{stationA, stationB}[rng.IntN(2)],
			components: pair(level, level*(0.5+rng.Float64())),
		})
	}
	return out
}

// Every statistic has the same digits whatever the order in which records were stored.
func TestOrderOfRecordsDoesNotShow(t *testing.T) {
	records := scattered()
	first := newStore(t, handGrid, records)
	rand.New(rand.NewPCG(1, 2)).Shuffle(len(records), func(i, j int) { records[i], records[j] = records[j], records[i] })
	second := newStore(t, handGrid, records)
	extras := Extras{Spread: true, Intervals: true, Lognormal: true, Design: readDesign(t, flat)}
	structures := readPortfolio(t, "p.csv", "id,period_s,damping,mass_kg,height_m,max_drift_ratio\na,3.141592653589793,2%,1000,3,1%\nb,2,5%,10,1,\n")
	for _, balance := range []Balance{BalanceNone, BalanceEvent, BalanceStation} {
		for _, component := range []Component{ComponentRotD50, ComponentEach} {
			selection := Selection{Component: component, Balance: balance}
			ask := func(store *db.Store) (text string) {
				text = written(t, askSpectrum(t, store, SpectrumQuestion{Selection: selection, Damping: 0.02, Extras: extras, By: grouping(t, "magnitude:5,6")}), FormatJSON, UnitsSI)
				text += written(t, askPortfolio(t, store, PortfolioQuestion{Selection: selection, Structures: structures, Extras: extras}), FormatJSON, UnitsSI)
				resampled := extras
				resampled.Bootstrap = Bootstrap{Resamples: 100, Seed: 4}
				d, err := DemandQuestion{Selection: selection, Structure: structures[0].Structure, BandWidth: 0.2, Extras: resampled}.Ask(t.Context(), store)
				if err != nil {
					t.Fatal(err)
				}
				return text + written(t, d, FormatJSON, UnitsSI)
			}
			if one, other := ask(first), ask(second); one != other {
				t.Errorf("balance %s, component %s: answers differ", balance, component)
			}
		}
	}
}
