package query

import (
	"math"
	"reflect"
	"testing"

	"swaybook/query/chart"
)

// TestCapacitiesAreToldAlike: beside one structure's demand and beside that of one of many
// stands the same table. A kip is 4448.2216152605 N, NIST SP 811 (2008), appendix B.
func TestCapacitiesAreToldAlike(t *testing.T) {
	limits := []LimitRatio{
		{Name: "displacement", Limit: 0.0508, Percentiles: []float64{0.5}, Max: 1.25, Above: 0.25, CountAbove: 1, Count: 4, Governing: "R1"},
		{Name: "drift", Limit: 0.01, Percentiles: []float64{0.2}, Max: 0.5, Count: 4, Governing: "R1"},
		{Name: "base_shear", Limit: 2 * 4448.2216152605, Percentiles: []float64{2}, Max: 4, Above: 1, CountAbove: 4, Count: 4, Governing: "R2"},
	}
	want := [][]string{
		{"displacement", "2.000 in", "1", "4", "25.0%", "0.5000", "1.250", "R1"},
		{"drift", "1%", "0", "4", "0.0%", "0.2000", "0.5000", "R1"},
		{"base shear", "2.000 kip", "4", "4", "100.0%", "2.000", "4.000", "R2"},
	}
	band := &DemandBand{FromS: 0.9, ToS: 1.1}
	one := (&DemandAnswer{Percentiles: []float64{50}, Limits: limits, Band: band}).Sheet(UnitsUS)
	row := &PortfolioRow{Structure: &PortfolioStructure{ID: "B7"}, Limits: limits, Band: band}
	many := row.Sheet(&PortfolioAnswer{Percentiles: []float64{50}}, UnitsUS)
	for _, s := range []*Sheet{one, many} {
		got := s.Tables[len(s.Tables)-1]
		if got.Caption != "Beside the capacities, over the band" || got.Columns[5].Name != "p50/limit" || !reflect.DeepEqual(got.Rows, want) {
			t.Errorf("%s: %v, %q", got.Caption, got.Columns, got.Rows)
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

// TestFourWayAt: at 2π s ω is 1 rad/s, so that 0.254 m are 0.254 m/s and 0.254 m/s², which is
// 0.02590 g; 0.0254 m are an inch. Where the median is not supported the mean has all three.
func TestFourWayAt(t *testing.T) {
	x := 0.254 / StandardGravity
	reduction := Reduction{Count: 2, Percentiles: []float64{x}, Mean: 2 * x, Max: math.NaN(), Min: math.NaN()}
	a := &SpectrumAnswer{Measure: MeasurePSA, Percentiles: []float64{50}, PeriodsS: []float64{2 * math.Pi}, Reductions: []Reduction{reduction}}
	if got, want := a.FourWayAt(0, UnitsUS), "T = 6.283 s · median PSV 10.00 in/s · mean PSV 20.00 in/s · median SD 10.00 in · median PSA 0.02590 g · 2 motions"; got != want {
		t.Errorf("it says %q, want %q", got, want)
	}
	a.Reductions[0].Percentiles[0] = math.NaN()
	if got, want := a.FourWayAt(0, UnitsSI), "T = 6.283 s · mean PSV 0.5080 m/s · mean SD 0.5080 m · mean PSA 0.05180 g · 2 motions"; got != want {
		t.Errorf("it says %q, want %q", got, want)
	}
}
