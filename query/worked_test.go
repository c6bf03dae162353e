package query

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// workedFigures reads the figures of an example that was worked out by hand.
func workedFigures(t *testing.T, name string) map[string]float64 {
	t.Helper()
	text, err := os.ReadFile(filepath.Join("..", "testdata", "worked", name))
	if err != nil {
		t.Fatal(err)
	}
	out := map[string]float64{}
	for line := range strings.Lines(string(text)) {
		fields := strings.Fields(line)
		if len(fields) == 3 && fields[0] == "=" {
			x, err := strconv.ParseFloat(fields[2], 64)
			if err != nil {
				t.Fatal(err)
			}
			out[fields[1]] = x
		}
	}
	return out
}

// The hand's figures have six digits.
func TestFiveRecordsByHand(t *testing.T) {
	var records []inventedRecord
	for i, psa := range []float64{0.08, 0.10, 0.20, 0.40, 0.64} {
		level := psa * 9.80665 / 8 // at ω = 2 rad/s SD is twice the level, and PSA four times that
		event := quakeA
		if i > 2 {
			event = quakeB
		}
		records = append(records, inventedRecord{code: fmt.Sprint("W", i), siting: "free-field", event: event, station: stationA, components: pair(level, level)})
	}
	store := newStore(t, handGrid, records)
	q := SpectrumQuestion{Damping: 0.02, PeriodsS: []float64{math.Pi}, Percentiles: []float64{16, 20, 50, 80, 84}}
	q.Extras = Extras{Intervals: true, Design: readDesign(t, "kind = \"asce7\"\nsds_g = 0.25\nsd1_g = 1\ntl_s = 8\n")}
	plain := askSpectrum(t, store, q).Reductions[0]
	q.Balance = BalanceEvent
	balanced := askSpectrum(t, store, q).Reductions[0]
	row := askPortfolio(t, store, PortfolioQuestion{
		Structures:  readPortfolio(t, "p.csv", "id,period_s,damping,mass_kg,height_m,max_base_shear_n\na,3.141592653589793,2%,1000,3,3000\n"),
		Percentiles: []float64{50},
	}).Rows[0]
	got := map[string]float64{
		"mean": plain.Mean, "log_mean": plain.LogMean, "log_std": plain.LogStd,
		"p20": plain.Percentiles[1], "p50": plain.Percentiles[2], "p80": plain.Percentiles[3],
		"p50_low": plain.extra.intervals[2].low, "p50_high": plain.extra.intervals[2].high,
		"balanced_effective": balanced.Effective, "balanced_mean": balanced.Mean, "balanced_log_mean": balanced.LogMean,
		"balanced_log_std": balanced.LogStd, "balanced_p50": balanced.Percentiles[2],
		"design_median_ratio": plain.extra.against.median, "design_share_above": plain.extra.against.above, "balanced_design_share_above": balanced.extra.against.above,
		"base_shear": reductionOf(row.Quantities, "base_shear_n").Percentiles[0], "base_moment": reductionOf(row.Quantities, "base_moment_nm").Percentiles[0],
		"shear_ratio": row.Limits[0].Percentiles[0], "shear_share_above": row.Limits[0].Above,
	}
	want := workedFigures(t, "five-records.md")
	if len(want) != len(got) {
		t.Errorf("%d figures by hand, %d compared", len(want), len(got))
	}
	for name, x := range want {
		if !(math.Abs(got[name]-x) <= 1e-6*math.Abs(x)+5e-7) {
			t.Errorf("%s = %v, by hand %v", name, got[name], x)
		}
	}
	if !math.IsNaN(plain.Percentiles[0]) || !math.IsNaN(plain.Percentiles[4]) {
		t.Errorf("percentiles 16 and 84 of five are %v and %v", plain.Percentiles[0], plain.Percentiles[4])
	}
}
