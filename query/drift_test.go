package query

import (
	"math"
	"testing"
)

// What changed comes in the order of how much, by hand: 0.2 to 0.25 is a quarter, 8 motions
// to 6 a loss of a quarter, 6 to 8 a third more and no loss, a lost percentile is infinite.
func TestDrifts(t *testing.T) {
	nan, none := math.NaN(), quantityUnit{}
	before := []Figure{{"1 s", "p50", 0.2, none}, {"1 s", "count", 8, none}, {"2 s", "p50", 0.1, none}, {"2 s", "count", 6, none}, {"3 s", "p84", 0.4, none}, {"4 s", "p84", nan, none}, {"5 s", "p50", 0, none}}
	after := []Figure{{"1 s", "p50", 0.25, none}, {"1 s", "count", 6, none}, {"2 s", "p50", 0.1, none}, {"2 s", "count", 8, none}, {"3 s", "p84", nan, none}, {"4 s", "p84", 0.3, none}, {"5 s", "p50", 0, none}, {"6 s", "p50", 1, none}}
	got := Drifts(before, after)
	want := []struct {
		of, name    string
		ratio, loss float64
	}{
		{"3 s", "p84", math.Inf(1), math.Inf(1)}, {"2 s", "count", 1. / 3, 0}, {"1 s", "p50", 0.25, 0.25}, {"1 s", "count", -0.25, 0.25},
	}
	if len(got) != len(want) {
		t.Fatalf("%d changes, want %d: %+v", len(got), len(want), got)
	}
	for i, w := range want {
		if d := got[i]; d.Of != w.of || d.Name != w.name || math.Abs(d.Ratio()-w.ratio) > 1e-15 || math.Abs(d.Loss()-w.loss) > 1e-15 {
			t.Errorf("%d: %+v changes by %v, loss %v, want %+v", i, d, d.Ratio(), d.Loss(), w)
		}
	}
	if gone := Drifts(before[:2], nil); len(gone) != 2 || !math.IsInf(gone[0].Loss(), 1) || !math.IsInf(gone[1].Loss(), 1) {
		t.Errorf("a figure that is gone: %+v", gone)
	}
}

// What changed is told as tables have it: in the units of the question, a count without one.
// 0.0254 m are an inch, 44482.216152605 N ten kip (NIST SP 811, appendix B).
func TestDriftsInWords(t *testing.T) {
	reduction := func(n int, x float64) *Reduction { return &Reduction{Count: n, Percentiles: []float64{x}} }
	percentiles := []float64{50}
	spectrum := func(n int, x float64) []Figure {
		a := &SpectrumAnswer{Measure: MeasureSD, Damping: 0.05, Percentiles: percentiles, PeriodsS: []float64{1}, Reductions: []Reduction{*reduction(n, x)}}
		return a.Figures()
	}
	portfolio := func(n int, x float64) []Figure {
		a := &PortfolioAnswer{Percentiles: percentiles, Rows: []PortfolioRow{{Structure: &PortfolioStructure{ID: "B7", Name: "Quay"}, Quantities: []Quantity{{"base_shear_n", reduction(n, x)}}}}}
		return a.Figures()
	}
	for _, c := range []struct {
		before, after []Figure
		units         Units
		want          DriftWords
	}{
		{spectrum(8, 0.0254), spectrum(8, 0.0508), UnitsUS, DriftWords{"SD at 1.000 s, damping 5%", "p50", "1.000", "2.000", "in", "+100 %"}},
		{spectrum(8, 0.02), spectrum(8, 0.02000001), UnitsSI, DriftWords{"SD at 1.000 s, damping 5%", "p50", "0.02", "0.02000001", "m", "+5e-05 %"}},
		{spectrum(8, 0.02), spectrum(6, 0.02), UnitsUS, DriftWords{"SD at 1.000 s, damping 5%", "count", "8", "6", "", "-25 %"}},
		{spectrum(8, 0.02), spectrum(8, math.NaN()), UnitsSI, DriftWords{"SD at 1.000 s, damping 5%", "p50", "0.02000", "none", "m", "lost, or from 0"}},
		{portfolio(8, 44482.216152605), portfolio(8, 40033.9945373445), UnitsUS, DriftWords{"B7, Quay: base shear", "p50", "10.00", "9.000", "kip", "-10 %"}},
		{portfolio(8, 44482), portfolio(8, 88964), UnitsSI, DriftWords{"B7, Quay: base shear", "p50", "44.48", "88.96", "kN", "+100 %"}},
		{(&RecordsAnswer{Rows: make([]RecordRow, 4)}).Figures(), (&RecordsAnswer{Rows: make([]RecordRow, 5)}).Figures(), UnitsUS, DriftWords{"components", "count", "4", "5", "", "+25 %"}},
	} {
		drifts := Drifts(c.before, c.after)
		if len(drifts) != 1 {
			t.Errorf("%v to %v: %d changes", c.before, c.after, len(drifts))
			continue
		}
		if got := drifts[0].Words(c.units); got != c.want {
			t.Errorf("it says %+v, want %+v", got, c.want)
		}
	}
}
