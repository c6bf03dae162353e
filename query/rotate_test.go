package query

import (
	"errors"
	"math"
	"slices"
	"testing"

	"swaybook/pipeline/spectrum"
)

// pulses is a pair of one pulse in both directions: it moves along one line, so
// that over all directions its D is that of the pulse times |p·cos θ|.
func pulses(code string, first, second inventedComponent) inventedRecord {
	first.role, second.role = "h1", "h2"
	return inventedRecord{code: code, siting: "ground", unrotated: true, components: []inventedComponent{first, second}}
}

// lineFactors are the median and the maximum over 180 directions of
// |first·cos θ + second·sin θ|.
func lineFactors(first, second float64) (median, maximum float64) {
	d := make([]float64, 180)
	for k := range d {
		sin, cos := math.Sincos(float64(k) * math.Pi / 180)
		d[k] = math.Abs(first*cos + second*sin)
	}
	slices.Sort(d)
	return (d[89] + d[90]) / 2, d[179]
}

// TestRotatedIsComputed: what is not stored, or off the grid, is computed from
// the samples, whatever the angle and the lengths of the pair. The expected
// figures need no rotation: see pulses.
func TestRotatedIsComputed(t *testing.T) {
	unknown := math.NaN()
	sin60, cos60 := math.Sincos(math.Pi / 3)
	records := map[string]struct {
		record        inventedRecord
		first, second float64 // at a right angle
		assumed       bool
	}{
		"right":    {pulses("right", inventedComponent{peak: 2}, inventedComponent{peak: 5}), 2, 5, false},
		"reversed": {pulses("reversed", inventedComponent{peak: 2, azimuthDeg: 350}, inventedComponent{peak: 5, azimuthDeg: 260}), 2, 5, false},
		"oblique":  {pulses("oblique", inventedComponent{peak: 3, azimuthDeg: 10}, inventedComponent{peak: 3*cos60 + 4*sin60, azimuthDeg: 70}), 3, 4, false},
		"unknown":  {pulses("unknown", inventedComponent{peak: 1, azimuthDeg: unknown}, inventedComponent{peak: 3, azimuthDeg: 17}), 1, 3, true},
		"shorter":  {pulses("shorter", inventedComponent{peak: 4}, inventedComponent{peak: 1, isShort: true}), 4, 1, false},
		"later":    {pulses("later", inventedComponent{peak: 4, isTimed: true, ahead: 37}, inventedComponent{peak: 1, isTimed: true}), 4, 1, false},
		"earlier":  {pulses("earlier", inventedComponent{peak: 3, isTimed: true, ahead: 2, azimuthDeg: 10}, inventedComponent{peak: 3*cos60 + 4*sin60, isTimed: true, ahead: 9, azimuthDeg: 70}), 3, 4, false},
	}
	questions := map[string]SpectrumQuestion{
		"not stored": {Damping: 0.02, PeriodsS: []float64{math.Pi}},
		"period":     {Damping: 0.02, PeriodsS: []float64{0.7, math.Pi}},
		"damping":    {Damping: 0.03, PeriodsS: []float64{math.Pi}},
		"method":     {Damping: 0.02, PeriodsS: []float64{math.Pi}, Method: spectrum.NewmarkAverage},
	}
	for name, r := range records {
		store := newStore(t, handGrid, []inventedRecord{r.record})
		for kind, q := range questions {
			solver, err := spectrum.NewSolver(q.Method, 0.01, []spectrum.Oscillator{{PeriodS: q.PeriodsS[0], Damping: q.Damping}})
			if err != nil {
				t.Fatal(err)
			}
			unit := solver.SD(nil, inventedComponent{}.samples())[0]
			median, maximum := lineFactors(r.first, r.second)
			for component, factor := range map[Component]float64{ComponentRotD50: median, ComponentRotD100: maximum} {
				q.Component, q.Measure = component, MeasureSD
				a := askSpectrum(t, store, q)
				if got, want := a.Reductions[0].Mean, factor*unit; math.Abs(got-want) > 1e-9*want {
					t.Errorf("%s of %s, %s: SD %v, want %v", component, name, kind, got, want)
				}
				isAssumed := slices.Contains(a.Selection.Notes, "1 record of unknown azimuth among them, the horizontals taken at a right angle")
				if isAssumed != r.assumed {
					t.Errorf("%s of %s, %s: notes %v", component, name, kind, a.Selection.Notes)
				}
			}
		}
	}
}

// TestRotatedIsReadWhereStored: of two records the one is read and the other
// computed, at periods of the grid; off it both are computed.
func TestRotatedIsReadWhereStored(t *testing.T) {
	stored := inventedRecord{code: "A", siting: "ground", components: pair(100, 100)}
	computed := pulses("B", inventedComponent{}, inventedComponent{})
	store := newStore(t, handGrid, []inventedRecord{stored, computed})
	q := SpectrumQuestion{Damping: 0.02, Measure: MeasureSD, PeriodsS: []float64{0.7, math.Pi}}
	a := askSpectrum(t, store, q)
	if off, on := a.Reductions[0], a.Reductions[1]; off.Min != off.Max || on.Max != 200 || on.Min >= 1 || on.Min == 0 {
		t.Errorf("off the grid %v to %v, on it %v to %v; want equal values, and the stored 200 beside a computed one", off.Min, off.Max, on.Min, on.Max)
	}
}

// TestNotRotatable: pairs that cannot be rotated are left out with the reason; those of
// different steps can be combined all the same, and those of one direction are no pair.
func TestNotRotatable(t *testing.T) {
	store := newStore(t, handGrid, []inventedRecord{
		pulses("near", inventedComponent{azimuthDeg: 10}, inventedComponent{azimuthDeg: 30}),
		pulses("opposite", inventedComponent{azimuthDeg: 10}, inventedComponent{azimuthDeg: 190}),
		pulses("steps", inventedComponent{}, inventedComponent{stepS: 0.02}),
		pulses("good", inventedComponent{}, inventedComponent{}),
		{code: "single", siting: "ground", components: pair(1, 1)[:1]},
	})
	want := []LeftOut{{"horizontal components of different time steps", 1}, {"horizontal components too near in direction", 2}, {"one horizontal component only", 1}}
	for component, records := range map[Component]int{ComponentRotD50: 1, ComponentRotD100: 1, ComponentGeomean: 2, ComponentLarger: 2} {
		r := askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Component: component}, Damping: 0.02}).Selection
		left := want
		if !component.IsRotated() {
			left = want[1:]
		}
		if r.Records != records || !slices.Equal(r.LeftOut, left) {
			t.Errorf("%s: %d records, left out %v, want %d, %v", component, r.Records, r.LeftOut, records, left)
		}
	}
	_, err := SpectrumQuestion{Selection: Selection{Where: `record == "steps" and pga_g > 0`}, Damping: 0.02}.Ask(t.Context(), store)
	var empty *EmptyError
	if !errors.As(err, &empty) || !slices.Equal(empty.LeftOut, want[:1]) || empty.Unmet != 4 {
		t.Errorf("pairs that cannot be rotated, whose peaks are unknown, give %v, want 4 unmet and %v", err, want[:1])
	}
}

// TestRotatedPeaks: an expression sees the peaks of the rotated pair, stored or
// computed.
func TestRotatedPeaks(t *testing.T) {
	store := newStore(t, handGrid, []inventedRecord{
		{code: "stored", siting: "ground", components: pair(0.02, 0.08)}, // 0.04 g and 0.1 g
		pulses("computed", inventedComponent{peak: 3}, inventedComponent{peak: 4}),
	})
	median, _ := lineFactors(3, 4)
	for text, want := range map[string][]string{
		"pga_g > 0.039 and pga_g < 0.041": {"stored rotd50"},
		"pga_g > 0.099 and pga_g < 0.101": {"stored rotd100"},
		// The maximum over whole degrees is within 4e-5 of 5 m/s².
		"pga_g * 9.80665 > 4.999 and pga_g * 9.80665 <= 5.0000001": {"computed rotd100"},
		"abs(pga_g * 9.80665 - " + shortest(median) + ") < 1e-6":   {"computed rotd50"},
		"pgv_m_s > 0.11": {"computed rotd100", "computed rotd50"},
		"pgd_m > 0.11":   {"computed rotd100", "computed rotd50"},
	} {
		var got []string
		for _, component := range []Component{ComponentRotD100, ComponentRotD50} {
			a, err := RecordsQuestion{Selection{Where: text, Component: component}}.Ask(t.Context(), store)
			var empty *EmptyError
			if err != nil && !errors.As(err, &empty) {
				t.Fatal(err)
			}
			for _, r := range a.Rows {
				got = append(got, r.Record+" "+r.Component)
			}
		}
		if !slices.Equal(got, want) {
			t.Errorf("%s takes %q, want %q", text, got, want)
		}
	}
}

// TestRotatedRows: lists are of what was recorded unless asked otherwise; all
// adds what is stored of pairs, in the order of the export.
func TestRotatedRows(t *testing.T) {
	store := newStore(t, handGrid, append(handRecords()[:1], pulses("R2", inventedComponent{}, inventedComponent{})))
	for component, want := range map[Component][]string{
		"":                {"R1h1", "R1h2", "R1v", "R2h1", "R2h2"},
		ComponentAll:      {"R1h1", "R1h2", "R1rotd100", "R1rotd50", "R1v", "R2h1", "R2h2"},
		ComponentRotD100:  {"R1rotd100", "R2rotd100"},
		ComponentRecorded: {"R1h1", "R1h2", "R1v", "R2h1", "R2h2"},
	} {
		a, err := RecordsQuestion{Selection{Component: component}}.Ask(t.Context(), store)
		if err != nil {
			t.Fatal(err)
		}
		var got []string
		for _, r := range a.Rows {
			got = append(got, r.Record+r.Component)
		}
		if !slices.Equal(got, want) {
			t.Errorf("%q lists %q, want %q", component, got, want)
		}
	}
	a, err := RecordsQuestion{Selection{Component: ComponentRotD50, Where: `record == "R1"`}}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	r := a.Rows[0]
	if r.AzimuthDeg != nil || r.Line != nil || r.Source != "invented/R1.h1 + invented/R1.h2" || !near(r.PGA, 0.04) || !near(r.PGD, 0.04) || *r.LowCutHz != 0.05 || r.HighCutHz != nil {
		t.Errorf("row %+v", r)
	}
}

// TestExportRotated: all exports what is stored of pairs, and a rotated component
// computes what is not.
func TestExportRotated(t *testing.T) {
	store := newStore(t, handGrid, []inventedRecord{
		{code: "A", siting: "ground", components: pair(1, 4)}, pulses("B", inventedComponent{level: 1}, inventedComponent{level: 1}),
	})
	band := Band{ToS: 2}
	text, _ := export(t, store, ExportQuestion{Dampings: []float64{0.02}, Band: band})
	var heads []string
	for _, line := range csvRows(t, text)[1:] {
		heads = append(heads, line[0]+" "+line[1]+" "+line[4])
	}
	if want := []string{"A h1 1", "A h2 4", "A rotd100 5", "A rotd50 2", "B h1 1", "B h2 1"}; !slices.Equal(heads, want) {
		t.Errorf("exported %q, want %q", heads, want)
	}
	text, _ = export(t, store, ExportQuestion{Selection: Selection{Component: ComponentRotD50}, Dampings: []float64{0.02}, Band: band})
	rows := csvRows(t, text)
	if len(rows) != 3 || rows[1][4] != "2" || rows[2][0] != "B" || rows[2][4] == "1" {
		t.Errorf("exported %q, want the stored A and a computed B", rows)
	}
}
