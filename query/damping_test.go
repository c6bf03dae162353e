package query

import (
	"math"
	"strings"
	"testing"
)

// The stored SD at 2 % are twice those at 5 %; η of EN 1998-1 is √(10/7) there. At 7 % they
// are computed from the samples, as those at 2 % are off the grid.
func TestRatioToUsualDamping(t *testing.T) {
	store := newStore(t, handGrid, sevenRecords())
	a := askSpectrum(t, store, SpectrumQuestion{Damping: 0.02, Measure: MeasureEta})
	for _, r := range a.Reductions {
		if r.Count != 7 || !near(r.Mean, 2) || !near(r.Percentiles[1], 2) {
			t.Errorf("%+v, want 2", r)
		}
	}
	if text := written(t, a, FormatJSON, UnitsSI); !strings.Contains(text, `"unit": "1"`) || !strings.Contains(text, `"eta_en1998": [1.19522860933`) {
		t.Errorf("JSON %s", text)
	}
	if text := written(t, a, FormatCSV, UnitsSI); !strings.Contains(text, "p50_eta_ratio") || !strings.Contains(text, "eta_en1998") {
		t.Errorf("CSV %s", text)
	}
	b := askSpectrum(t, store, SpectrumQuestion{Damping: 0.07, Measure: MeasureEta, PeriodsS: []float64{0.3}})
	seven := askSpectrum(t, store, SpectrumQuestion{Damping: 0.07, Measure: MeasureSD, PeriodsS: []float64{0.3}})
	five := askSpectrum(t, store, SpectrumQuestion{Damping: 0.05, Measure: MeasureSD, PeriodsS: []float64{0.3}})
	if want := seven.Reductions[0].Max / five.Reductions[0].Max; !near(b.Reductions[0].Mean, want) || !(want < 1) {
		t.Errorf("at 7 %%: %v, want %v", b.Reductions[0].Mean, want)
	}
	if got := askSpectrum(t, store, SpectrumQuestion{Damping: 0.05, Measure: MeasureEta}).Reductions[0]; got.Mean != 1 || math.Abs(got.Max-1) > 0 {
		t.Errorf("of 5 %%: %+v", got)
	}
	if _, err := (SpectrumQuestion{Damping: 0.02, Measure: MeasureEta, Extras: Extras{Design: readDesign(t, flat)}}).Ask(t.Context(), store); !isUsage(err) {
		t.Errorf("beside a design spectrum: %v", err)
	}
}

// Of a store without 5 % both spectra are computed, also of pairs over all directions.
func TestRatioWhereUsualDampingIsNotStored(t *testing.T) {
	grid := handGrid
	grid.Dampings = []float64{0.02, 0.1}
	a := askSpectrum(t, newStore(t, grid, sevenRecords()), SpectrumQuestion{Damping: 0.07, Measure: MeasureEta, PeriodsS: []float64{0.3}})
	b := askSpectrum(t, newStore(t, handGrid, sevenRecords()), SpectrumQuestion{Damping: 0.07, Measure: MeasureEta, PeriodsS: []float64{0.3}})
	if !near(a.Reductions[0].Mean, b.Reductions[0].Mean) || a.Reductions[0].Count != 7 {
		t.Errorf("%+v and %+v", a.Reductions[0], b.Reductions[0])
	}
}
