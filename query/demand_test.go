package query

import (
	"encoding/json"
	"errors"
	"math"
	"slices"
	"strconv"
	"strings"
	"testing"

	"swaybook/pipeline/spectrum"
)

// faint gives components whose samples are too weak to govern anything beside
// the stored spectra.
func faint(records []inventedRecord) []inventedRecord {
	for i := range records {
		for k := range records[i].components {
			records[i].components[k].peak = 1e-9
		}
	}
	return records
}

func quantity(t *testing.T, list []Quantity, name string) *Reduction {
	t.Helper()
	for _, q := range list {
		if q.Name == name {
			return q.Reduction
		}
	}
	t.Fatalf("no quantity %s", name)
	return nil
}

// TestDemandByHand: at T = π s, ω = 2 rad/s, the geometric means of SD are
// 0.02, 0.08 and 0.32 m. With 1000 kg at 3 m: A = 4·SD m/s², base shear
// 4000·SD N, base moment 12000·SD N·m, strain energy ½·1000·(2·SD)² =
// 2000·SD² J.
func TestDemandByHand(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	q := DemandQuestion{Structure: Structure{PeriodS: math.Pi, Damping: 0.02, MassKG: ptr(1000.0), HeightM: ptr(3.0)}}
	a, err := q.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	cases := []struct {
		name                         string
		mean, logMean, low, mid, top float64
		logStd                       float64
	}{
		{"sd_m", 0.14, 0.08, 0.02, 0.08, 0.32, math.Log(4)},
		{"psv_m_s", 0.28, 0.16, 0.04, 0.16, 0.64, math.Log(4)},
		{"psa_g", 0.56 / 9.80665, 0.32 / 9.80665, 0.08 / 9.80665, 0.32 / 9.80665, 1.28 / 9.80665, math.Log(4)},
		{"base_shear_n", 560, 320, 80, 320, 1280, math.Log(4)},
		{"base_moment_nm", 1680, 960, 240, 960, 3840, math.Log(4)},
		{"strain_energy_j", 218.4 / 3, 12.8, 0.8, 12.8, 204.8, math.Log(16)},
	}
	for _, c := range cases {
		r := quantity(t, a.Quantities, c.name)
		if r == nil {
			t.Errorf("%s is unknown", c.name)
			continue
		}
		if !near(r.Mean, c.mean) || !near(r.LogMean, c.logMean) || !near(r.Min, c.low) || !near(r.Percentiles[1], c.mid) || !near(r.Max, c.top) {
			t.Errorf("%s: %+v, want %+v", c.name, *r, c)
		}
		if !near(r.LogStd, c.logStd) || r.Governing != "R3" || r.Count != 3 {
			t.Errorf("%s: deviation %v, governing %s, count %d", c.name, r.LogStd, r.Governing, r.Count)
		}
	}
	if a.Band != nil {
		t.Errorf("band %+v, want none", a.Band)
	}
}

// TestDemandUnknown: without mass there are no forces, without height no
// moment.
func TestDemandUnknown(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	cases := []struct {
		structure Structure
		unknown   map[string]bool
	}{
		{Structure{PeriodS: math.Pi, Damping: 0.02}, map[string]bool{"base_shear_n": true, "base_moment_nm": true, "strain_energy_j": true}},
		{Structure{PeriodS: math.Pi, Damping: 0.02, HeightM: ptr(3.0)}, map[string]bool{"base_shear_n": true, "base_moment_nm": true, "strain_energy_j": true}},
		{Structure{PeriodS: math.Pi, Damping: 0.02, MassKG: ptr(1.0)}, map[string]bool{"base_moment_nm": true}},
	}
	for _, c := range cases {
		a, err := DemandQuestion{Structure: c.structure, BandWidth: 0.1}.Ask(t.Context(), store)
		if err != nil {
			t.Fatal(err)
		}
		for _, list := range [][]Quantity{a.Quantities, a.Band.Quantities} {
			for _, q := range list {
				if (q.Reduction == nil) != c.unknown[q.Name] {
					t.Errorf("%+v: %s unknown is %v", c.structure, q.Name, q.Reduction == nil)
				}
			}
		}
		var parsed struct {
			Quantities map[string]*struct{ Mean *float64 }
			Structure  map[string]*float64
		}
		if err := json.Unmarshal([]byte(written(t, a, FormatJSON, UnitsUS)), &parsed); err != nil {
			t.Fatal(err)
		}
		for name, q := range parsed.Quantities {
			if (q == nil) != c.unknown[name] {
				t.Errorf("%+v: %s in JSON is %v", c.structure, name, q)
			}
		}
		if mass := parsed.Structure["mass_kg"]; (mass == nil) != (c.structure.MassKG == nil) {
			t.Errorf("mass_kg in JSON is %v", mass)
		}
	}
}

// TestDemandBandByHand: T = π s ± 60 % holds the grid's π/2 and π. Of the motion
// that governs, SD is 0.16 m at π/2, ω = 4, and 0.32 m at π, ω = 2: the largest
// SD is at π, the largest A = 16·0.16 = 2.56 m/s² at π/2, and V is 0.64 m/s at
// both. The ends are computed from faint samples and govern nothing.
func TestDemandBandByHand(t *testing.T) {
	store := newStore(t, handGrid, faint(handRecords()))
	q := DemandQuestion{Structure: Structure{PeriodS: math.Pi, Damping: 0.02, MassKG: ptr(1000.0), HeightM: ptr(3.0)}, BandWidth: 0.6}
	a, err := q.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	if !near(a.Band.FromS, 0.4*math.Pi) || !near(a.Band.ToS, 1.6*math.Pi) {
		t.Errorf("band from %v to %v", a.Band.FromS, a.Band.ToS)
	}
	want := map[string]float64{
		"sd_m": 0.32, "psv_m_s": 0.64, "psa_g": 2.56 / 9.80665, "base_shear_n": 2560, "base_moment_nm": 7680, "strain_energy_j": 500 * 0.64 * 0.64,
	}
	for name, top := range want {
		if got := quantity(t, a.Band.Quantities, name).Max; !near(got, top) {
			t.Errorf("%s over the band = %v, want %v", name, got, top)
		}
	}
	if got := quantity(t, a.Quantities, "psa_g").Max; !near(got, 1.28/9.80665) {
		t.Errorf("psa_g at T = %v, want that without a band", got)
	}
}

// TestDemandBandEnds: a band between grid periods is made of T and its ends
// alone, all computed.
func TestDemandBandEnds(t *testing.T) {
	record := inventedRecord{code: "A", siting: "ground", components: pair(0, 0)}
	store := newStore(t, handGrid, []inventedRecord{record})
	c := record.components[0]
	a, err := DemandQuestion{Structure: Structure{PeriodS: 0.6, Damping: 0.05}, BandWidth: 0.1}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	// The decimals of 0.6 s ± 10 %.
	const t0, low, high = 0.6, 0.54, 0.66
	if a.Band.FromS != low || a.Band.ToS != high {
		t.Errorf("band from %v to %v, want %v to %v", a.Band.FromS, a.Band.ToS, low, high)
	}
	solver, err := spectrum.NewSolver(spectrum.NigamJennings, c.step(), []spectrum.Oscillator{
		{PeriodS: low, Damping: 0.05}, {PeriodS: t0, Damping: 0.05}, {PeriodS: high, Damping: 0.05},
	})
	if err != nil {
		t.Fatal(err)
	}
	sd := solver.SD(nil, c.samples())
	if got := quantity(t, a.Quantities, "sd_m").Max; got != sd[1] {
		t.Errorf("SD at T = %v, want %v", got, sd[1])
	}
	if got, want := quantity(t, a.Band.Quantities, "sd_m").Max, max(sd[0], sd[1], sd[2]); got != want || want == sd[1] {
		t.Errorf("SD over the band = %v, want %v of %v", got, want, sd)
	}
}

func TestDemandMistakes(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	cases := []struct {
		question DemandQuestion
		want     string
	}{
		{DemandQuestion{}, "period: 0 s is not positive and finite"},
		{DemandQuestion{Structure: Structure{PeriodS: 1, Damping: 2}}, "damping: 2 is 200% of critical; it must be at least 0 and less than 1, written 5% or 0.05"},
		{DemandQuestion{Structure: Structure{PeriodS: 1, MassKG: ptr(0.0)}}, "mass: 0 kg is not positive and finite"},
		{DemandQuestion{Structure: Structure{PeriodS: 1, HeightM: ptr(math.Inf(1))}}, "height: +Inf m is not positive and finite"},
		{DemandQuestion{Structure: Structure{PeriodS: 1}, BandWidth: 1}, "band: 1 is out of range; the half-width is a ratio of the period below 1, written 10% or 0.1"},
		{DemandQuestion{Structure: Structure{PeriodS: 1}, Percentiles: []float64{200}}, "percentiles: 200 is outside 0 to 100"},
	}
	for _, c := range cases {
		_, err := c.question.Ask(t.Context(), store)
		checkUsage(t, c.want, err, c.want)
	}
	_, err := DemandQuestion{Selection: Selection{Where: "magnitude > 9"}, Structure: Structure{PeriodS: 1}}.Ask(t.Context(), store)
	var empty *EmptyError
	if !errors.As(err, &empty) {
		t.Errorf("nothing selected gives %v", err)
	}
	a, err := DemandQuestion{Structure: Structure{PeriodS: 1}}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	err = a.Write(nil, "xml", UnitsSI)
	checkUsage(t, "xml", err, `format: unknown format "xml"; accepted here: table, csv, json`)
}

// TestDemandAgreesWithSpectrum: on the grid a demand and a spectrum are the
// same figures.
func TestDemandAgreesWithSpectrum(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	d, err := DemandQuestion{Structure: Structure{PeriodS: 2 * math.Pi, Damping: 0.05}}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	for name, measure := range map[string]Measure{"sd_m": MeasureSD, "psv_m_s": MeasurePSV, "psa_g": MeasurePSA} {
		s := askSpectrum(t, store, SpectrumQuestion{Damping: 0.05, Measure: measure, PeriodsS: []float64{2 * math.Pi}})
		a, b := quantity(t, d.Quantities, name), s.Reductions[0]
		if a.Mean != b.Mean || a.LogMean != b.LogMean || a.LogStd != b.LogStd || a.Max != b.Max || a.Percentiles[1] != b.Percentiles[1] {
			t.Errorf("%s: %+v and %+v", name, *a, b)
		}
	}
}

// TestCapacitiesInCSV: of the motions of TestDemandByHand, SD is 0.02, 0.08 and 0.32 m. Over
// 0.16 m, and 0.04·3 m of drift, the median is 1/2 and 2/3, the greatest 2 and 8/3, and one of
// three is above. They stand in the row of SD, of base shear in its own, of all motions alone,
// and where there is a band in its rows.
func TestCapacitiesInCSV(t *testing.T) {
	store := newStore(t, handGrid, faint(handRecords()))
	q := DemandQuestion{
		Structure:  Structure{PeriodS: math.Pi, Damping: 0.02, MassKG: ptr(1000.0), HeightM: ptr(3.0)},
		Capacities: Limits{DisplacementM: ptr(0.16), DriftRatio: ptr(0.04), BaseShearN: ptr(640.0)}, Percentiles: []float64{50}, By: Grouping{Attribute: "event"},
	}
	for _, width := range []float64{0, 1e-6} {
		q.BandWidth = width
		a, err := q.Ask(t.Context(), store)
		if err != nil {
			t.Fatal(err)
		}
		rows := csvRows(t, written(t, a, FormatCSV, UnitsUS))
		at := func(name string) int { return slices.Index(rows[0], name) }
		found := 0
		for _, row := range rows[1:] {
			isBand := row[at("from_s")] != row[at("to_s")]
			for name, of := range map[string]struct {
				quantity   string
				limit, p50 float64
			}{"displacement": {"sd_m", 0.16, 0.5}, "drift": {"sd_m", 0.04, 2. / 3}, "base_shear": {"base_shear_n", 640, 0.5}} {
				cells := []string{row[at(name+"_limit")], row[at(name+"_ratio_p50")], row[at(name+"_ratio_max")], row[at(name+"_share_above")]}
				if row[0] != of.quantity || row[at("group")] != wholeGroup || isBand != (width > 0) {
					if strings.Join(cells, "") != "" {
						t.Errorf("%s in the row %q", name, row)
					}
					continue
				}
				found++
				for i, want := range []float64{of.limit, of.p50, 4 * of.p50, 1. / 3} {
					if x, err := strconv.ParseFloat(cells[i], 64); err != nil || math.Abs(x/want-1) > 1e-5 {
						t.Errorf("%s: cell %d is %s, want %v", name, i, cells[i], want)
					}
				}
			}
		}
		if found != 3 {
			t.Errorf("band %v: %d capacities of 3", width, found)
		}
	}
}
