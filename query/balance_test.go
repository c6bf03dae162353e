package query

import (
	"encoding/csv"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"swaybook/db"
)

// balanceRecords are six records of one event and one each of two others.
func balanceRecords() []inventedRecord {
	levels := []float64{0.01, 0.02, 0.03, 0.04, 0.05, 0.06, 0.3, 0.7}
	var out []inventedRecord
	for i, level := range levels {
		event := quakeA
		if i >= 6 {
			event = []*db.Event{quakeB, quakeC}[i-6]
		}
		station := []*db.Station{stationA, stationB}[i%2]
		out = append(out, inventedRecord{code: fmt.Sprintf("B%d", i), siting: "free-field", event: event, station: station, components: pair(level, level)})
	}
	return out
}

// Each of three events weighs a third: the mean is (0.035 + 0.3 + 0.7)/3, the effective
// number (1+1+1)²/(6/36+1+1) = 54/13, and the variance of ln has the divisor 3 − 13/18.
// Percentile 50 is the mean of the step function over the shares (n* − 1)/(2·n*) to
// (n* + 1)/(2·n*) of the weight, worked out below.
func TestBalanceByHand(t *testing.T) {
	store := newStore(t, handGrid, balanceRecords())
	a := askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Balance: BalanceEvent}, Damping: 0.02, Measure: MeasureSD})
	r := a.Reductions[0]
	const effective = 54.0 / 13
	logs := 0.0
	for _, x := range []float64{0.01, 0.02, 0.03, 0.04, 0.05, 0.06} {
		logs += math.Log(x) / 6
	}
	mean := (logs + math.Log(0.3) + math.Log(0.7)) / 3
	square := math.Pow(math.Log(0.3)-mean, 2) + math.Pow(math.Log(0.7)-mean, 2)
	for _, x := range []float64{0.01, 0.02, 0.03, 0.04, 0.05, 0.06} {
		square += math.Pow(math.Log(x)-mean, 2) / 6
	}
	// The part from 41/108 to 67/108 of the weight lies in 0.3's share, from 1/3 to 2/3.
	const median = 0.3
	if r.Count != 8 || !near(r.Effective, effective) || !near(r.Mean, (0.035+0.3+0.7)/3) || !near(r.LogMean, math.Exp(mean)) ||
		!near(r.LogStd, math.Sqrt(square/(3-13.0/18))) || !near(r.Percentiles[1], median) || r.Min != 0.01 || r.Max != 0.7 || r.Governing != "B7" {
		t.Errorf("%+v, want a log-mean of %v and a deviation of %v", r, math.Exp(mean), math.Sqrt(square/(3-13.0/18)))
	}
	// Percentile 84 of 4.15 effective spectra is beyond what they support.
	if !math.IsNaN(r.Percentiles[2]) {
		t.Errorf("percentile 84 is %v", r.Percentiles[2])
	}
}

// A station weighs as much as another however many records it has, and groups are balanced
// within themselves.
func TestBalanceOfStationsAndGroups(t *testing.T) {
	store := newStore(t, handGrid, balanceRecords())
	a := askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Balance: BalanceStation}, Damping: 0.02, Measure: MeasureSD, By: Grouping{Attribute: "event"}})
	if r := a.Reductions[0]; !near(r.Mean, ((0.01+0.03+0.05+0.3)/4+(0.02+0.04+0.06+0.7)/4)/2) || !near(r.Effective, 8) {
		t.Errorf("all: %+v", r)
	}
	if r := a.Groups[0].Reductions[0]; !near(r.Mean, 0.035) || !near(r.Effective, 6) {
		t.Errorf("%s: %+v", a.Groups[0].Label, r)
	}
	d, err := DemandQuestion{Selection: Selection{Balance: BalanceEvent}, Structure: Structure{PeriodS: math.Pi / 2, Damping: 0.02}}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	if r := quantity(t, d.Quantities, "sd_m"); !near(r.Mean, 1.035/3) || !near(r.Effective, 54.0/13) {
		t.Errorf("demand: %+v", r)
	}
}

// What cannot be balanced is left out, and named.
func TestBalanceNeedsTheEvent(t *testing.T) {
	records := append(balanceRecords(), inventedRecord{code: "B9", siting: "free-field", station: stationA, components: pair(9, 9)})
	store := newStore(t, handGrid, records)
	a := askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Balance: BalanceEvent}, Damping: 0.02})
	want := []LeftOut{{"event unknown", 1}}
	if a.Selection.Spectra != 8 || !slices.Equal(a.Selection.LeftOut, want) {
		t.Errorf("%d spectra, %v", a.Selection.Spectra, a.Selection.LeftOut)
	}
	if a := askSpectrum(t, store, SpectrumQuestion{Damping: 0.02}); a.Selection.Spectra != 9 || a.Reductions[0].Effective != 9 {
		t.Errorf("%d spectra without balance", a.Selection.Spectra)
	}
}

func TestBalanceIsWritten(t *testing.T) {
	store := newStore(t, handGrid, balanceRecords())
	a := askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Balance: BalanceEvent}, Damping: 0.02, Band: Band{ToS: 2}})
	rows, err := csv.NewReader(strings.NewReader(written(t, a, FormatCSV, UnitsSI))).ReadAll()
	if err != nil || len(rows) != 2 || rows[0][2] != "effective" || !strings.HasPrefix(rows[1][2], "4.153846153846") {
		t.Errorf("CSV %v, %v", rows, err)
	}
	if table := written(t, a, FormatTable, UnitsSI); !strings.Contains(table, "; balance event\n") || !strings.Contains(table, "effective") || !strings.Contains(table, "too few") {
		t.Errorf("table:\n%s", table)
	}
	if text := written(t, a, FormatJSON, UnitsSI); !strings.Contains(text, `"balance": "event"`) || !strings.Contains(text, `"effective": [4.153846153846`) || !strings.Contains(text, `"84": [null]`) {
		t.Errorf("JSON:\n%s", text)
	}
	if _, err := ParseBalance("magnitude"); !isUsage(err) {
		t.Errorf("a balance that is none: %v", err)
	}
}

// A percentile needs so many spectra that it lies between the extremes on average: (n+1)·p
// of them from 1 to n. Of four spectra that are percentiles 20 to 80.
func TestPercentilesNeedSupport(t *testing.T) {
	store := newStore(t, handGrid, balanceRecords()[:4])
	a := askSpectrum(t, store, SpectrumQuestion{Damping: 0.02, Percentiles: []float64{16, 20, 50, 80, 84, 100}})
	var supported []bool
	for _, p := range a.Reductions[0].Percentiles {
		supported = append(supported, !math.IsNaN(p))
	}
	if want := []bool{false, true, true, true, false, true}; !slices.Equal(supported, want) {
		t.Errorf("of four spectra %v are supported, want %v", supported, want)
	}
}
