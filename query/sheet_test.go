package query

import (
	"math"
	"testing"

	"swaybook/query/chart"
)

// TestLimitsHaveTheUnitsOfDemands: a kip is 4448.2216152605 N, NIST SP 811 (2008), appendix B.
func TestLimitsHaveTheUnitsOfDemands(t *testing.T) {
	for _, c := range []struct {
		name  string
		units Units
		unit  string
		per   float64
	}{
		{"displacement", UnitsSI, "m", 1}, {"displacement", UnitsUS, "in", 0.0254},
		{"base_shear", UnitsSI, "kN", 1000}, {"base_shear", UnitsUS, "kip", 4448.2216152605}, {"drift", UnitsUS, "1", 1},
	} {
		if _, unit, per := limitIn(c.name, c.units); unit != c.unit || per != c.per {
			t.Errorf("%s in %s: one %s is %g", c.name, c.units, unit, per)
		}
	}
}

// TestBandOfWhatIsSupported: percentiles that few motions do not support leave the band to
// those that they do.
func TestBandOfWhatIsSupported(t *testing.T) {
	nan := math.NaN()
	a := &SpectrumAnswer{Measure: MeasurePSA, Percentiles: []float64{95, 5, 84, 16, 50}, PeriodsS: []float64{1, 2},
		Reductions: []Reduction{{Percentiles: []float64{nan, nan, 8, 2, 4}}, {Percentiles: []float64{nan, nan, 4, 1, 2}}}}
	var c chart.Spectra
	a.addCurves(&c, 1)
	if len(c.Band.Low) != 2 || c.Band.Low[0] != 2 || c.Band.High[0] != 8 {
		t.Errorf("the band is %+v", c.Band)
	}
}

// TestSheetsHaveNames: a sheet of many structures has the names of those that have one beside
// the codes, and no column where none has.
func TestSheetsHaveNames(t *testing.T) {
	for names, want := range map[[2]string]string{{"Quay", ""}: "name", {"", ""}: "period"} {
		a := &PortfolioAnswer{}
		b := &NearestAnswer{}
		for i, name := range names {
			s := &PortfolioStructure{ID: string("AB"[i]), Name: name}
			a.Rows, b.Rows = append(a.Rows, PortfolioRow{Structure: s}), append(b.Rows, NearestRow{Structure: s})
		}
		for _, sheet := range []*Sheet{a.Sheet(UnitsSI), b.Sheet(UnitsSI)} {
			table := sheet.Tables[0]
			if table.Columns[1].Name != want || len(table.Rows[1]) != len(table.Columns) || want == "name" && (table.Rows[0][1] != "Quay" || table.Rows[1][1] != "") {
				t.Errorf("names %q: columns %v, rows %q", names, table.Columns, table.Rows)
			}
		}
	}
}
