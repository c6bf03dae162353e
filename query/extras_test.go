package query

import (
	"encoding/csv"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"swaybook/db"
	"swaybook/query/design"
	"swaybook/query/mixed"
)

// readDesign writes a description and reads it.
func readDesign(t *testing.T, text string) *design.Spectrum {
	t.Helper()
	path := filepath.Join(t.TempDir(), "design.toml")
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	s, err := ReadDesign(path)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// flat is a plateau of 0.05 g from 1 to 5 s, of 5 % damping.
const flat = "name = \"flat\"\nkind = \"asce7\"\nsds_g = 0.05\nsd1_g = 0.25\ntl_s = 100\n"

// seven records have SD of 0.01 to 0.07 m at ω = 4 rad/s and 2 %, hence PSA of 0.0163 to
// 0.1142 g, and half of that at 5 %.
func sevenRecords() []inventedRecord {
	var out []inventedRecord
	for i := range 7 {
		level := 0.01 * float64(i+1)
		out = append(out, inventedRecord{
			code: fmt.Sprintf("D%d", i), siting: "free-field", event: []*db.Event{quakeA, quakeB}[i%2], station: stationA, components: pair(level, level),
		})
	}
	return out
}

// At ω = 4 rad/s and 5 % PSA is 0.00816·(1 … 7) g: the median is the fourth, percentile 84
// lies at 1 + 6·0.84 = 6.04, and 0.05 g, between the sixth and the seventh, has one of
// seven above it.
func TestDesignByHand(t *testing.T) {
	store := newStore(t, handGrid, sevenRecords())
	q := SpectrumQuestion{Damping: 0.05, Extras: Extras{Design: readDesign(t, flat)}}
	unit := 0.005 * 16 / 9.80665
	a := askSpectrum(t, store, q).Reductions[0].extra.against
	if !near(a.value, 0.05) || !near(a.median, 4*unit/0.05) || !near(a.p84, 6.04*unit/0.05) || !near(a.above, 1.0/7) {
		t.Errorf("%+v, want ratios %v and %v", *a, 4*unit/0.05, 6.04*unit/0.05)
	}
	// In SD the design spectrum is 0.05 g / ω², and all ratios are the same.
	q.Measure = MeasureSD
	if b := askSpectrum(t, store, q).Reductions[0].extra.against; !near(b.value, 0.05*9.80665/16) || !near(b.median, a.median) || b.above != a.above {
		t.Errorf("SD: %+v", *b)
	}
	// Balanced, the four motions of one event weigh as much as the three of the other; the
	// last is of the first.
	q.Balance = BalanceEvent
	if b := askSpectrum(t, store, q).Reductions[0].extra.against; !near(b.above, 1.0/8) {
		t.Errorf("balanced: %+v", *b)
	}
}

// A demand's design value is that of each quantity: base shear m·PSA, and over a band the
// largest of the band.
func TestDesignOfDemand(t *testing.T) {
	store := newStore(t, handGrid, sevenRecords())
	structure := Structure{PeriodS: math.Pi, Damping: 0.05, MassKG: ptr(1000.0), HeightM: ptr(3.0)}
	falling := "kind = \"asce7\"\nsds_g = 1\nsd1_g = 0.1\ntl_s = 4\n"
	d, err := DemandQuestion{Structure: structure, BandWidth: 0.5, Extras: Extras{Design: readDesign(t, falling)}}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	psa := 0.1 / math.Pi * 9.80665
	if a := quantity(t, d.Quantities, "base_moment_nm").extra.against; !near(a.value, 3000*psa) {
		t.Errorf("moment %+v, want %v", *a, 3000*psa)
	}
	if a := quantity(t, d.Band.Quantities, "base_shear_n").extra.against; !near(a.value, 2*1000*psa) {
		t.Errorf("shear over the band %+v, want %v at its shorter end", *a, 2000*psa)
	}
}

// A spectrum of one damping stands beside motions of another with a note; a ratio of
// spectra has none.
func TestDesignNotes(t *testing.T) {
	store := newStore(t, handGrid, sevenRecords())
	q := SpectrumQuestion{Damping: 0.02, Extras: Extras{Design: readDesign(t, flat)}}
	a := askSpectrum(t, store, q)
	if text := written(t, a, FormatTable, UnitsSI); !strings.Contains(text, "note: design spectrum flat: ") || !strings.Contains(text, "that of 5% damping, set beside motions at 2%") {
		t.Errorf("table\n%s", text)
	}
	q.Measure = MeasureVH
	if _, err := q.Ask(t.Context(), store); !isUsage(err) {
		t.Errorf("a design spectrum of V/H: %v", err)
	}
	if _, err := ReadDesign(filepath.Join(t.TempDir(), "none.toml")); !isUsage(err) {
		t.Errorf("no file: %v", err)
	}
}

// The interval of the median of seven has the least and the greatest as ends, coverage
// 1 − 2/2⁷ = 98.4 %, and at 85 % the second and the sixth, 1 − 2·8/2⁷ = 87.5 %.
func TestIntervalsByHand(t *testing.T) {
	store := newStore(t, handGrid, sevenRecords())
	for _, c := range []struct{ level, low, high float64 }{{0.95, 0.005, 0.035}, {0.85, 0.01, 0.03}, {0.99, math.NaN(), math.NaN()}} {
		a := askSpectrum(t, store, SpectrumQuestion{Damping: 0.05, Measure: MeasureSD, Extras: Extras{Intervals: true, Level: c.level}})
		got := a.Reductions[0].extra.intervals[1]
		if !sameNumber(got.low, c.low) || !sameNumber(got.high, c.high) {
			t.Errorf("at %v: %+v, want %v to %v", c.level, got, c.low, c.high)
		}
	}
	a := askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Balance: BalanceEvent}, Damping: 0.05, Extras: Extras{Intervals: true}})
	if got := a.Reductions[0].extra.intervals[1]; !math.IsNaN(got.low) {
		t.Errorf("balanced: %+v", got)
	}
}

// Percentile 84.134474606854 of the fitted distribution is exp(μ + σ); Φ(1) to 14 digits is
// from tables of the normal distribution (from memory).
func TestLognormalByHand(t *testing.T) {
	store := newStore(t, handGrid, append(sevenRecords(), inventedRecord{code: "D8", siting: "free-field", components: pair(0.2, 0.2)}))
	a := askSpectrum(t, store, SpectrumQuestion{Damping: 0.05, Percentiles: []float64{50, 84.134474606854}, Extras: Extras{Lognormal: true}})
	r := a.Reductions[0]
	l := r.extra.lognormal
	if !near(l.percentiles[0], r.LogMean) || math.Abs(l.percentiles[1]/(r.LogMean*math.Exp(r.LogStd))-1) > 1e-12 {
		t.Errorf("%+v of %+v", *l, r)
	}
	// scipy.stats.anderson (SciPy 1.10.1) of the eight logarithms, times 1 + 0.75/8 + 2.25/64.
	const statistic, p = 0.19656314604945, 0.88918300874652
	if math.Abs(l.statistic-statistic) > 1e-12 || math.Abs(l.p-p) > 1e-11 {
		t.Errorf("A²* %v, p %v", l.statistic, l.p)
	}
}

// The spread is that of mixed.Fit on ln of the ordinates, motions of unknown events left
// out, and in every measure the same.
func TestSpreadIsTheFit(t *testing.T) {
	records := append(sevenRecords(), inventedRecord{code: "D8", siting: "free-field", components: pair(9, 9)})
	store := newStore(t, handGrid, records)
	var logs []float64
	var events []int
	for i := range 7 {
		logs, events = append(logs, math.Log(0.005*float64(i+1))), append(events, i%2)
	}
	want := mixed.Fit(logs, events, mixed.REML)
	for _, measure := range []Measure{MeasureSD, MeasurePSA} {
		got := askSpectrum(t, store, SpectrumQuestion{Damping: 0.05, Measure: measure, Extras: Extras{Spread: true}}).Reductions[0].extra.spread
		if !near(got.phi, want.Phi) || math.Abs(got.tau-want.Tau) > 1e-12 || got.events != 2 || !near(got.sigma, math.Hypot(got.tau, got.phi)) {
			t.Errorf("%s: %+v, want %+v", measure, *got, want)
		}
	}
}

// Every figure stands in every format.
func TestExtrasAreWritten(t *testing.T) {
	store := newStore(t, handGrid, sevenRecords())
	extras := Extras{Design: readDesign(t, flat), Spread: true, Intervals: true, Lognormal: true}
	a := askSpectrum(t, store, SpectrumQuestion{Damping: 0.05, Extras: extras, By: Grouping{Attribute: "event"}})
	rows, err := csv.NewReader(strings.NewReader(written(t, a, FormatCSV, UnitsUS))).ReadAll()
	if err != nil || len(rows) != 1+3*4 {
		t.Fatalf("%d rows, %v", len(rows), err)
	}
	header := strings.Join(rows[0], ",")
	const want = "p16_low_psa_g,p16_high_psa_g,p50_low_psa_g,p50_high_psa_g,p84_low_psa_g,p84_high_psa_g," +
		"lognormal_p16_psa_g,lognormal_p50_psa_g,lognormal_p84_psa_g,anderson_darling,anderson_darling_p," +
		"spread_events,spread_log_mean_psa_g,tau_ln,phi_ln,sigma_ln,design_psa_g,p50_over_design,p84_over_design,share_above_design,governing"
	if !strings.HasSuffix(header, want) {
		t.Errorf("header %s", header)
	}
	type figures struct {
		Intervals map[string]struct{ Low, High []*float64 }
		Lognormal struct {
			Percentiles  map[string][]*float64
			AndersonDarl []*float64 `json:"anderson_darling"`
			PValue       []*float64 `json:"p_value"`
		}
		Spread struct {
			Events, Tau, Phi, Sigma []*float64
			LogMean                 []*float64 `json:"log_mean"`
		}
		Design struct {
			Value       []*float64
			MedianRatio []*float64 `json:"median_ratio"`
			P84Ratio    []*float64 `json:"p84_ratio"`
			ShareAbove  []*float64 `json:"share_above"`
		}
	}
	var got struct {
		figures
		Groups []figures
	}
	if err := json.Unmarshal([]byte(written(t, a, FormatJSON, UnitsSI)), &got); err != nil {
		t.Fatal(err)
	}
	for i, f := range append(got.Groups, got.figures) {
		if len(f.Intervals["84"].High) != 4 || len(f.Lognormal.Percentiles["16"]) != 4 || len(f.Lognormal.PValue) != 4 || len(f.Spread.Tau) != 4 ||
			len(f.Spread.LogMean) != 4 || len(f.Design.Value) != 4 || *f.Design.Value[0] != 0.05 || len(f.Design.P84Ratio) != 4 || f.Design.ShareAbove[0] == nil {
			t.Errorf("group %d lacks figures: %+v", i, f)
		}
	}
	// One event has no spread between events.
	if got.Groups[0].Spread.Tau[0] != nil || got.Spread.Tau[0] == nil {
		t.Errorf("tau %v of one event, %v of two", got.Groups[0].Spread.Tau[0], got.Spread.Tau[0])
	}
}

func TestParseExtras(t *testing.T) {
	if e, err := ParseExtras(" spread, lognormal "); err != nil || !e.Spread || !e.Lognormal || e.Intervals {
		t.Errorf("%+v, %v", e, err)
	}
	if _, err := ParseExtras("spread,tau"); !isUsage(err) {
		t.Error(err)
	}
	for text, want := range map[string]float64{"": 0.9, "95%": 0.95, "0.5": 0.5} {
		if level, err := ParseLevel(text); err != nil || level != want {
			t.Errorf("%q: %v, %v", text, level, err)
		}
	}
	for _, bad := range []string{"100%", "0", "90", "x"} {
		if level, err := ParseLevel(bad); !isUsage(err) {
			t.Errorf("%q: %v, %v", bad, level, err)
		}
	}
}
