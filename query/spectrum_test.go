package query

import (
	"errors"
	"fmt"
	"io"
	"math"
	"runtime"
	"slices"
	"strings"
	"testing"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

func askSpectrum(t *testing.T, store *db.Store, q SpectrumQuestion) *SpectrumAnswer {
	t.Helper()
	a, err := q.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	return a
}

// written is an answer's text. JSON restores every bit.
func written(t *testing.T, a interface {
	Write(io.Writer, Format, Units) error
}, format Format, units Units) string {
	t.Helper()
	var b strings.Builder
	if err := a.Write(&b, format, units); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// TestSpectrumByHand: the geometric means at the first period and 2 % are
// 0.01, 0.04 and 0.16 m, so the mean is 0.07, the geometric mean 0.04, the
// deviation of ln is ln 4, and the positions of percentiles 25 and 75 among
// three values are 0.5 and 1.5. Period p multiplies SD by p+1, and ω there is
// 4, 2, 1, ½.
func TestSpectrumByHand(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	percents := []float64{25, 50, 75}
	a := askSpectrum(t, store, SpectrumQuestion{Damping: 0.02, Measure: MeasureSD})
	if !slices.Equal(a.PeriodsS, handGrid.PeriodsS) {
		t.Fatalf("periods %v, want the grid's", a.PeriodsS)
	}
	base := []float64{0.07, 0.04, 0.01 + 0.5*0.03, 0.04, 0.04 + 0.5*0.12, 0.01, 0.16}
	names := []string{"mean", "log-mean", "p25", "p50", "p75", "min", "max"}
	omegas := []float64{4, 2, 1, 0.5}
	factors := map[Measure]func(w float64) float64{
		MeasureSD:  func(float64) float64 { return 1 },
		MeasurePSV: func(w float64) float64 { return w },
		MeasurePSA: func(w float64) float64 { return w * w / 9.80665 },
	}
	for measure, factor := range factors {
		a := askSpectrum(t, store, SpectrumQuestion{Damping: 0.02, Measure: measure, Percentiles: percents})
		for p, r := range a.Reductions {
			got := append([]float64{r.Mean, r.LogMean}, append(slices.Clone(r.Percentiles), r.Min, r.Max)...)
			for i := range got {
				if want := base[i] * float64(p+1) * factor(omegas[p]); !near(got[i], want) {
					t.Errorf("%s %s at period %d = %v, want %v", measure, names[i], p, got[i], want)
				}
			}
			if r.Count != 3 || !near(r.LogStd, math.Log(4)) || r.Governing != "R3" {
				t.Errorf("%s at period %d: count %d, deviation %v, governing %s", measure, p, r.Count, r.LogStd, r.Governing)
			}
		}
	}
}

// TestSpectrumComponents: what each component takes of the free-field and
// ground records, at the second damping, where the stored SD is half.
func TestSpectrumComponents(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	cases := []struct {
		component Component
		count     int
		records   int
		min, max  float64
		governing string
		leftOut   []LeftOut
	}{
		{"", 3, 3, 0.005, 0.08, "R3 rotd50", []LeftOut{{"one horizontal component only", 1}, {"siting borehole", 1}, {"siting structure", 1}}},
		{ComponentRotD100, 3, 3, 0.00625, 0.1, "R3 rotd100", []LeftOut{{"one horizontal component only", 1}, {"siting borehole", 1}, {"siting structure", 1}}},
		{ComponentGeomean, 3, 3, 0.005, 0.08, "R3 geomean", []LeftOut{{"one horizontal component only", 1}, {"siting borehole", 1}, {"siting structure", 1}}},
		{ComponentLarger, 3, 3, 0.005, 0.08, "R3 larger", []LeftOut{{"one horizontal component only", 1}, {"siting borehole", 1}, {"siting structure", 1}}},
		{ComponentEach, 7, 4, 0.005, 0.25, "R4 h1", []LeftOut{{"siting borehole", 1}, {"siting structure", 1}}},
		{ComponentH1, 4, 4, 0.005, 0.25, "R4 h1", []LeftOut{{"siting borehole", 1}, {"siting structure", 1}}},
		{ComponentH2, 3, 3, 0.005, 0.08, "R3 h2", []LeftOut{{"no h2 component", 1}, {"siting borehole", 1}, {"siting structure", 1}}},
		{ComponentV, 1, 1, 0.15, 0.15, "R1 v", []LeftOut{{"no v component", 3}, {"siting borehole", 1}, {"siting structure", 1}}},
	}
	for _, c := range cases {
		a := askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Component: c.component}, Damping: 0.05, Measure: MeasureSD})
		r := a.Reductions[0]
		if r.Count != c.count || !near(r.Min, c.min) || !near(r.Max, c.max) || r.Governing+" "+r.GoverningComponent != c.governing {
			t.Errorf("%s: %+v, want %+v", c.component, r, c)
		}
		if a.Selection.Records != c.records || a.Selection.Spectra != c.count || !slices.Equal(a.Selection.LeftOut, c.leftOut) {
			t.Errorf("%s: selection %+v, want %+v", c.component, a.Selection, c)
		}
	}
}

// TestSpectrumLarger: R1 has 0.02 and 0.08 m.
func TestSpectrumLarger(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	for component, want := range map[Component]float64{ComponentLarger: 0.08, ComponentGeomean: 0.04, ComponentH1: 0.02, ComponentH2: 0.08} {
		q := SpectrumQuestion{Selection: Selection{Component: component, Where: `record == "R1"`}, Damping: 0.02, Measure: MeasureSD}
		r := askSpectrum(t, store, q).Reductions[0]
		if r.Max != want || r.Mean != want || r.LogMean != want || !math.IsNaN(r.LogStd) || r.Count != 1 {
			t.Errorf("%s of R1: %+v, want %v of one motion", component, r, want)
		}
	}
}

// TestSelectionCounts: the expression is asked first, then siting, component
// and what is unknown; each record counts once a reason.
func TestSelectionCounts(t *testing.T) {
	records := append(handRecords(), inventedRecord{code: "R7", siting: "unknown", event: quakeB, components: pair(0.03, 0.03)})
	store := newStore(t, handGrid, records)
	cases := []struct {
		selection                Selection
		records, spectra, events int
		leftOut                  []LeftOut
		notes                    []string
	}{
		{Selection{}, 4, 4, 3, []LeftOut{{"one horizontal component only", 1}, {"siting borehole", 1}, {"siting structure", 1}}, []string{"1 record of unknown siting among them"}},
		{Selection{Where: "magnitude > 6"}, 2, 2, 1, []LeftOut{{"magnitude unknown", 1}}, nil},
		{Selection{Where: "magnitude > 5"}, 3, 3, 2, []LeftOut{{"magnitude unknown", 1}, {"one horizontal component only", 1}, {"siting borehole", 1}, {"siting structure", 1}}, []string{"1 record of unknown siting among them"}},
		{Selection{Siting: "free-field"}, 2, 2, 2, []LeftOut{{"one horizontal component only", 1}, {"siting borehole", 1}, {"siting ground", 1}, {"siting structure", 1}, {"siting unknown", 1}}, nil},
		{Selection{Siting: "unknown"}, 1, 1, 1, []LeftOut{{"siting borehole", 1}, {"siting free-field", 3}, {"siting ground", 1}, {"siting structure", 1}}, nil},
		{Selection{Siting: "all"}, 5, 5, 3, []LeftOut{{"no horizontal component", 1}, {"one horizontal component only", 1}}, []string{"1 record of unknown siting among them"}},
		{Selection{Siting: "structure,borehole", Component: ComponentEach}, 1, 2, 1, []LeftOut{{"no horizontal component", 1}, {"siting free-field", 3}, {"siting ground", 1}, {"siting unknown", 1}}, nil},
		{Selection{Where: "azimuth_deg < 45", Component: ComponentEach}, 5, 5, 3, []LeftOut{{"siting borehole", 1}, {"siting structure", 1}}, []string{"1 record of unknown siting among them"}},
		{Selection{Where: "pga_g > 0.035 and pga_g < 0.05"}, 1, 1, 1, nil, nil},
		{Selection{Where: "year == 2021"}, 1, 1, 1, nil, nil},
		{Selection{Where: `component == "larger" and pga_g == 0.08`, Component: ComponentLarger}, 1, 1, 1, nil, nil},
	}
	for _, c := range cases {
		name := fmt.Sprintf("%+v", c.selection)
		r := askSpectrum(t, store, SpectrumQuestion{Selection: c.selection, Damping: 0.02}).Selection
		if r.Records != c.records || r.Spectra != c.spectra || r.Events != c.events {
			t.Errorf("%s: %d records, %d spectra, %d events, want %d, %d, %d", name, r.Records, r.Spectra, r.Events, c.records, c.spectra, c.events)
		}
		if !slices.Equal(r.LeftOut, c.leftOut) || !slices.Equal(r.Notes, c.notes) {
			t.Errorf("%s: left out %v, notes %v, want %v, %v", name, r.LeftOut, r.Notes, c.leftOut, c.notes)
		}
	}
}

func TestEmptySelection(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	cases := []struct {
		selection Selection
		want      string
	}{
		{Selection{Where: "magnitude > 9"}, "nothing selected: the store holds 6 records; 5 records do not meet the expression; 1 record left out: magnitude unknown"},
		{Selection{Where: "magnitude < 6"}, "nothing selected: the store holds 6 records; 2 records do not meet the expression; 1 record left out: magnitude unknown; 1 record left out: one horizontal component only; 1 record left out: siting borehole; 1 record left out: siting structure"},
		{Selection{Where: "azimuth_deg > 400"}, "nothing selected: the store holds 6 records; 1 record does not meet the expression; 3 records left out: azimuth_deg unknown; 1 record left out: siting borehole; 1 record left out: siting structure; azimuth_deg of a pair is unknown: ask for h1, h2, v or each instead"},
		{Selection{Siting: "unknown"}, "nothing selected: the store holds 6 records; 1 record left out: siting borehole; 3 records left out: siting free-field; 1 record left out: siting ground; 1 record left out: siting structure"},
	}
	for _, c := range cases {
		_, err := SpectrumQuestion{Selection: c.selection, Damping: 0.05}.Ask(t.Context(), store)
		var empty *EmptyError
		if !errors.As(err, &empty) || err.Error() != c.want {
			t.Errorf("%+v: error\n%v\nwant\n%s", c.selection, err, c.want)
		}
	}
}

func TestSpectrumMistakes(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	cases := []struct {
		question SpectrumQuestion
		want     string
	}{
		{SpectrumQuestion{Damping: 1}, "damping: 1 is 100% of critical; it must be at least 0 and less than 1, written 5% or 0.05"},
		{SpectrumQuestion{Damping: math.NaN()}, "damping: NaN is NaN% of critical; it must be at least 0 and less than 1, written 5% or 0.05"},
		{SpectrumQuestion{Measure: "sa"}, `measure: unknown measure "sa"; accepted: sd, psv, psa, vh, eta`},
		{SpectrumQuestion{Selection: Selection{Component: "all"}}, `component: unknown component "all"; accepted here: rotd50, rotd100, geomean, larger, each, h1, h2, v`},
		{SpectrumQuestion{Selection: Selection{Siting: "moon"}}, `siting: unknown siting "moon"; accepted: ground, free-field, structure, borehole, unknown, all`},
		{SpectrumQuestion{Percentiles: []float64{-1}}, "percentiles: -1 is outside 0 to 100"},
		{SpectrumQuestion{PeriodsS: []float64{0}}, "period: 0 s is not positive and finite"},
		{SpectrumQuestion{PeriodsS: []float64{1}, Band: Band{FromS: 1}}, "band: a list of periods and a band exclude each other; give one"},
		{SpectrumQuestion{Band: Band{FromS: 100}}, "band: no period of the grid, which runs from 1.5707963267948966 s to 12.566370614359172 s, is inside"},
	}
	for _, c := range cases {
		_, err := c.question.Ask(t.Context(), store)
		checkUsage(t, c.want, err, c.want)
	}
	empty, err := db.Create(t.Context(), t.TempDir()+"/empty.db", spectrum.Version)
	if err != nil {
		t.Fatal(err)
	}
	defer empty.Close()
	if _, err := (SpectrumQuestion{Damping: 0.05}).Ask(t.Context(), empty); !errors.Is(err, db.ErrEmpty) {
		t.Errorf("an empty store gives %v, want ErrEmpty", err)
	}
}

// TestZeroOrdinate: a motion without displacement leaves the logarithms
// undefined and the rest defined.
func TestZeroOrdinate(t *testing.T) {
	store := newStore(t, handGrid, []inventedRecord{
		{code: "A", siting: "ground", components: pair(0, 0)}, {code: "B", siting: "ground", components: pair(2, 2)},
	})
	r := askSpectrum(t, store, SpectrumQuestion{Damping: 0.02, Measure: MeasureSD}).Reductions[0]
	if r.Mean != 1 || r.Min != 0 || r.Max != 2 || !math.IsNaN(r.LogMean) || !math.IsNaN(r.LogStd) {
		t.Errorf("reduction %+v, want mean 1 and no logarithms", r)
	}
}

// TestTies: the record first in order of code governs.
func TestTies(t *testing.T) {
	store := newStore(t, handGrid, []inventedRecord{
		{code: "Z", siting: "ground", components: pair(1, 1)}, {code: "M", siting: "ground", components: pair(1, 1)},
	})
	q := SpectrumQuestion{Selection: Selection{Component: ComponentEach}, Damping: 0.02}
	if r := askSpectrum(t, store, q).Reductions[0]; r.Governing != "M" || r.GoverningComponent != "h1" {
		t.Errorf("governing %s %s, want M h1", r.Governing, r.GoverningComponent)
	}
}

// TestBandAndPeriods: a band takes periods of the grid, its ends included; a
// list is sorted, and what is on the grid is read.
func TestBandAndPeriods(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	a := askSpectrum(t, store, SpectrumQuestion{Damping: 0.02, Band: Band{FromS: math.Pi, ToS: 2 * math.Pi}})
	if !slices.Equal(a.PeriodsS, handGrid.PeriodsS[1:3]) || len(a.Reductions) != 2 {
		t.Errorf("periods %v, want the middle two", a.PeriodsS)
	}
	a = askSpectrum(t, store, SpectrumQuestion{Damping: 0.02, Measure: MeasureSD, PeriodsS: []float64{2 * math.Pi, 1, math.Pi / 2, 1}})
	if want := []float64{1, math.Pi / 2, 2 * math.Pi}; !slices.Equal(a.PeriodsS, want) {
		t.Fatalf("periods %v, want %v", a.PeriodsS, want)
	}
	if got := a.Reductions[2].Max; !near(got, 0.48) {
		t.Errorf("stored maximum %v, want 0.48", got)
	}
}

// TestOffGridIsComputed: off the grid, in period, damping or method, every
// ordinate is the solver's for the stored samples, which have nothing to do
// with the stored spectra here. Steps differ from record to record.
func TestOffGridIsComputed(t *testing.T) {
	records := []inventedRecord{
		{code: "A", siting: "ground", components: []inventedComponent{{role: "h1", peak: 1}, {role: "h2", peak: 4, stepS: 0.005}}},
		{code: "B", siting: "ground", components: []inventedComponent{{role: "h1", peak: 9, stepS: 0.02}, {role: "h2", peak: 9, stepS: 0.02}}},
	}
	store := newStore(t, handGrid, records)
	sd := func(method spectrum.Method, c inventedComponent, o spectrum.Oscillator) float64 {
		solver, err := spectrum.NewSolver(method, c.step(), []spectrum.Oscillator{o})
		if err != nil {
			t.Fatal(err)
		}
		return solver.SD(nil, c.samples())[0]
	}
	geomean := Selection{Component: ComponentGeomean}
	cases := []struct {
		name     string
		question SpectrumQuestion
	}{
		{"period", SpectrumQuestion{Selection: geomean, Damping: 0.02, PeriodsS: []float64{0.7}}},
		{"damping", SpectrumQuestion{Selection: geomean, Damping: 0.03, PeriodsS: []float64{math.Pi}}},
		{"average method", SpectrumQuestion{Selection: geomean, Damping: 0.02, PeriodsS: []float64{math.Pi}, Method: spectrum.NewmarkAverage}},
		{"linear method", SpectrumQuestion{Selection: geomean, Damping: 0.02, PeriodsS: []float64{math.Pi}, Method: spectrum.NewmarkLinear}},
	}
	for _, c := range cases {
		q := c.question
		q.Measure = MeasureSD
		o := spectrum.Oscillator{PeriodS: q.PeriodsS[0], Damping: q.Damping}
		wantA := math.Sqrt(sd(q.Method, records[0].components[0], o) * sd(q.Method, records[0].components[1], o))
		wantB := sd(q.Method, records[1].components[0], o)
		a := askSpectrum(t, store, q)
		if r := a.Reductions[0]; r.Min != min(wantA, wantB) || r.Max != max(wantA, wantB) || wantA == wantB {
			t.Errorf("%s: %v to %v, want %v and %v", c.name, r.Min, r.Max, wantA, wantB)
		}
		if isNoted := len(a.Selection.Notes) == 1; isNoted != (q.Method != spectrum.NigamJennings) {
			t.Errorf("%s: notes %v", c.name, a.Selection.Notes)
		}
	}
}

// TestNumberOfWorkers: the number of processors does not show in an answer.
func TestNumberOfWorkers(t *testing.T) {
	var records []inventedRecord
	for i := range 40 {
		records = append(records, inventedRecord{code: fmt.Sprintf("W%02d", i), siting: "ground", components: []inventedComponent{
			{role: "h1", level: 0.01 * float64(i+1), peak: float64(i + 1), stepS: []float64{0.005, 0.01, 0.02}[i%3]}, {role: "h2", level: 0.3, peak: 2},
		}})
	}
	store := newStore(t, handGrid, records)
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(0))
	for _, component := range []Component{ComponentRotD50, ComponentGeomean} {
		q := SpectrumQuestion{Selection: Selection{Component: component}, Damping: 0.05, PeriodsS: []float64{0.2, 0.9, math.Pi}}
		runtime.GOMAXPROCS(1)
		one := written(t, askSpectrum(t, store, q), FormatJSON, UnitsSI)
		runtime.GOMAXPROCS(8)
		if eight := written(t, askSpectrum(t, store, q), FormatJSON, UnitsSI); eight != one {
			t.Errorf("%s: eight workers give\n%s\none gives\n%s", component, eight, one)
		}
	}
}

// TestOrderOfStoring: the order in which records and components are stored does
// not show in an answer, to the last bit.
func TestOrderOfStoring(t *testing.T) {
	records := handRecords()
	for i := range 20 {
		level := 0.013 * float64(i+1)
		records = append(records, inventedRecord{code: fmt.Sprintf("S%02d", (i*7)%20), siting: "ground", event: quakeA, components: pair(level, 1/level)})
	}
	backwards := slices.Clone(records)
	slices.Reverse(backwards)
	for i := range backwards {
		backwards[i].components = slices.Clone(backwards[i].components)
		slices.Reverse(backwards[i].components)
	}
	first, second := newStore(t, handGrid, records), newStore(t, handGrid, backwards)
	for _, component := range statisticsComponents {
		for _, periods := range [][]float64{nil, {0.3, math.Pi}} {
			q := SpectrumQuestion{Selection: Selection{Component: component, Siting: SitingAll}, Damping: 0.05, PeriodsS: periods}
			a, b := askSpectrum(t, first, q), askSpectrum(t, second, q)
			if written(t, a, FormatJSON, UnitsSI) != written(t, b, FormatJSON, UnitsSI) {
				t.Errorf("%s at %v: answers differ by the order of storing", component, periods)
			}
		}
	}
}

// TestOtherSolver: a store of another version of the solver is refused as ingest
// refuses it, whatever is asked; it is not taken for a damaged one.
func TestOtherSolver(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	alter(t, store, `UPDATE generation SET solver = 'older'`)
	alter(t, store, `UPDATE series SET data = x'0203'`)
	questions := map[string]func() error{
		"spectrum": func() error {
			_, err := SpectrumQuestion{Damping: 0.07}.Ask(t.Context(), store)
			return err
		},
		"demand": func() error {
			_, err := DemandQuestion{Structure: Structure{PeriodS: 1, Damping: 0.05}}.Ask(t.Context(), store)
			return err
		},
		"records": func() error {
			_, err := RecordsQuestion{}.Ask(t.Context(), store)
			return err
		},
		"export": func() error {
			_, err := ExportQuestion{}.Write(t.Context(), store, io.Discard)
			return err
		},
	}
	for name, ask := range questions {
		if err := ask(); !errors.Is(err, db.ErrOtherGeneration) || !strings.Contains(err.Error(), `solver "older"`) {
			t.Errorf("%s: %v, want ErrOtherGeneration with the solver", name, err)
		}
	}
}
