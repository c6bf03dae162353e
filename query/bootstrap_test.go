package query

import (
	"math"
	"reflect"
	"slices"
	"strings"
	"testing"

	"swaybook/db"
)

func bootstrapped(t *testing.T, records []inventedRecord, q DemandQuestion) *resampled {
	t.Helper()
	q.Structure = Structure{PeriodS: math.Pi / 2, Damping: 0.02}
	a, err := q.Ask(t.Context(), newStore(t, handGrid, records))
	if err != nil {
		t.Fatal(err)
	}
	return quantity(t, a.Quantities, "sd_m").extra.resampled
}

// twoEvents have three records of 0.01 m and three of 0.03 m.
func twoEvents() []inventedRecord {
	var out []inventedRecord
	for i, level := range []float64{0.01, 0.01, 0.01, 0.03, 0.03, 0.03} {
		out = append(out, inventedRecord{
			code: string(rune('A' + i)), siting: "free-field", event: []*db.Event{quakeA, quakeB}[i/3], station: stationA, components: pair(level, level),
		})
	}
	return out
}

// Of two events drawn with replacement a quarter of the resamples have the first twice, a
// quarter the second: the 90 % interval of everything is from one to the other. Drawn one
// by one, six motions would have a mean near 0.02 m.
func TestBootstrapDrawsWholeEvents(t *testing.T) {
	q := DemandQuestion{Extras: Extras{Bootstrap: Bootstrap{Resamples: 1000, Seed: 1}}}
	got := bootstrapped(t, twoEvents(), q)
	want := interval{0.01, 0.03}
	for i, v := range append([]interval{got.mean, got.logMean}, got.percentiles...) {
		if !near(v.low, want.low) || !near(v.high, want.high) {
			t.Errorf("figure %d: %+v, want %+v", i, v, want)
		}
	}
	// One event says nothing about others; motions of no known event are each their own.
	if got := bootstrapped(t, twoEvents()[:3], q); !math.IsNaN(got.mean.low) {
		t.Errorf("one event: %+v", got.mean)
	}
	alone := twoEvents()
	for i := range alone {
		alone[i].event = nil
	}
	if got := bootstrapped(t, alone, q); !(got.mean.low > 0.011 && got.mean.low < 0.019 && got.mean.high > 0.021 && got.mean.high < 0.029) {
		t.Errorf("six events: %+v", got.mean)
	}
}

// A seed gives the same digits whatever was ingested first, another seed others.
func TestBootstrapIsReproducible(t *testing.T) {
	q := DemandQuestion{Selection: Selection{Balance: BalanceEvent}, Extras: Extras{Bootstrap: Bootstrap{Resamples: 200, Seed: 7}}}
	records := balanceRecords()
	first := bootstrapped(t, records, q)
	slices.Reverse(records)
	if again := bootstrapped(t, records, q); !reflect.DeepEqual(first.mean, again.mean) || !reflect.DeepEqual(first.logMean, again.logMean) {
		t.Errorf("%+v, then %+v", first, again)
	}
	q.Bootstrap.Seed = 8
	q.Bootstrap.Resamples = 201
	if other := bootstrapped(t, records, q); other.logMean == first.logMean {
		t.Errorf("another seed gives %+v too", other.logMean)
	}
}

func TestBootstrapIsOfOneStructure(t *testing.T) {
	store := newStore(t, handGrid, twoEvents())
	b := Extras{Bootstrap: Bootstrap{Resamples: 100}}
	if _, err := (SpectrumQuestion{Extras: b}).Ask(t.Context(), store); !isUsage(err) {
		t.Errorf("of a spectrum: %v", err)
	}
	if _, err := (PortfolioQuestion{Extras: b, Structures: []PortfolioStructure{{ID: "a", Structure: Structure{PeriodS: 1}}}}).Ask(t.Context(), store); !isUsage(err) {
		t.Errorf("of a portfolio: %v", err)
	}
	if _, err := (DemandQuestion{Structure: Structure{PeriodS: 1}, Extras: Extras{Bootstrap: Bootstrap{Resamples: 3}}}).Ask(t.Context(), store); !isUsage(err) {
		t.Errorf("of three resamples: %v", err)
	}
	a, err := DemandQuestion{Structure: Structure{PeriodS: math.Pi / 2, Damping: 0.02}, Extras: Extras{Bootstrap: Bootstrap{Resamples: 100, Seed: 3}}}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	if text := written(t, a, FormatJSON, UnitsSI); !strings.Contains(text, `"bootstrap": {`) || !strings.Contains(text, "seed 3") {
		t.Errorf("JSON %s", text)
	}
	if text := written(t, a, FormatCSV, UnitsSI); !strings.Contains(text, "bootstrap_p84_low,bootstrap_p84_high") {
		t.Errorf("CSV %s", text)
	}
}
