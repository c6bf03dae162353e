package query

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"swaybook/db"
)

// with gives a pair's components a corner of the high-pass filter.
func withCorner(lowHz float64, components []inventedComponent) []inventedComponent {
	for i := range components {
		components[i].lowHz = lowHz
	}
	return components
}

// usableStore has pairs that can be believed up to 0.8/corner: 16, 8, 4, 2 and 1.33 s.
func usableStore(t *testing.T) *db.Store {
	var records []inventedRecord
	for i, corner := range []float64{0.05, 0.1, 0.2, 0.4, 0.6} {
		level := float64(i + 1)
		records = append(records, inventedRecord{code: fmt.Sprint("U", i+1), siting: "free-field", components: withCorner(corner, pair(level, level))})
	}
	return newStore(t, handGrid, records)
}

// The count falls with the period, and figures are those of what is left; percentiles
// end where fewer than three spectra do.
func TestOrdinatesOutsideTheUsableBandDoNotCount(t *testing.T) {
	store := usableStore(t)
	question := SpectrumQuestion{Selection: Selection{Component: ComponentGeomean}, Damping: 0.02, Measure: MeasureSD}
	answer, err := question.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	// Periods are π/2, π, 2π and 4π s; SD is the level times the period's number.
	for i, want := range []struct {
		count     int
		mean, max float64
		median    float64
		governing string
	}{{4, 2.5, 4, 2.5, "U4"}, {3, 2 * 2, 2 * 3, 2 * 2, "U3"}, {2, 3 * 1.5, 3 * 2, math.NaN(), "U2"}, {1, 4, 4, math.NaN(), "U1"}} {
		got := answer.Reductions[i]
		if got.Count != want.count || !near(got.Mean, want.mean) || !near(got.Max, want.max) || got.Governing != want.governing || !sameNumber(got.Percentiles[1], want.median) {
			t.Errorf("period %d: %+v, want %+v", i+1, got, want)
		}
	}
	if got := fmt.Sprint(answer.Selection.LeftOut, answer.Selection.Notes); got != "[1 record left out: outside the usable band of periods] [3 spectra count at a part of the periods only: the usable band]" {
		t.Error(got)
	}
	question.IgnoreUsableBand = true
	if answer, err = question.Ask(t.Context(), store); err != nil {
		t.Fatal(err)
	}
	for i, got := range answer.Reductions {
		if got.Count != 5 || !near(got.Mean, 3*float64(i+1)) {
			t.Errorf("ignored, period %d: %+v", i+1, got)
		}
	}
	if got := strings.Join(answer.Selection.Notes, "; "); !strings.Contains(got, "usable bands ignored") {
		t.Errorf("notes %q", got)
	}
}

func sameNumber(a, b float64) bool { return near(a, b) || math.IsNaN(a) && math.IsNaN(b) }

// A structure's period outside the band leaves a record out; one whose band ends within
// the structure's range of periods has no envelope.
func TestDemandKeepsToTheUsableBand(t *testing.T) {
	store := usableStore(t)
	question := DemandQuestion{
		Selection: Selection{Component: ComponentGeomean}, Structure: Structure{PeriodS: math.Pi, Damping: 0.02}, BandWidth: 0.5, Percentiles: []float64{50},
	}
	answer, err := question.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	at, band := answer.Quantities[0].Reduction, answer.Band.Quantities[0].Reduction
	// 0.5·π to 1.5·π s: U3 ends at 4 s.
	if at.Count != 3 || !near(at.Max, 6) || band.Count != 2 || band.Governing != "U2" {
		t.Errorf("at the period %+v, band %+v", at, band)
	}
	question.Structure.PeriodS, question.BandWidth = 40, 0
	if _, err := question.Ask(t.Context(), store); err == nil || !strings.Contains(err.Error(), "5 records left out: outside the usable band of periods") {
		t.Errorf("beyond all bands: %v", err)
	}
}

func TestUsableBandAsAttribute(t *testing.T) {
	store := usableStore(t)
	list, err := RecordsQuestion{Selection: Selection{Where: "usable_to_s >= 4 and usable_from_s < 0.03", Component: ComponentH1}}.Ask(t.Context(), store)
	if err != nil || len(list.Rows) != 3 || !near(*list.Rows[0].UsableToS, 16) || !near(*list.Rows[0].UsableFromS, 0.025) {
		t.Errorf("%+v, %v", list, err)
	}
}
