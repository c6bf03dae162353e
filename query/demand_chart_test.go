package query

import (
	"encoding/json"
	"math"
	"slices"
	"strings"
	"testing"

	"swaybook/query/chart"
)

func askDemand(t *testing.T, q DemandQuestion) *DemandAnswer {
	t.Helper()
	a, err := q.Ask(t.Context(), newStore(t, handGrid, faint(sevenRecords())))
	if err != nil {
		t.Fatal(err)
	}
	return a
}

func capacities(t *testing.T, text string) Limits {
	t.Helper()
	l, err := ParseCapacities(text)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

// SD is 0.02·k m, k = 1 … 7: as in TestLimitsByHand of portfolios, whose capacities mean the
// same.
func TestCapacitiesByHand(t *testing.T) {
	q := DemandQuestion{
		Structure:  Structure{PeriodS: math.Pi, Damping: 0.02, MassKG: ptr(1000.0), HeightM: ptr(3.0)},
		Capacities: capacities(t, "10cm, 200N,4%"), Each: true, Percentiles: []float64{50, 80},
	}
	a := askDemand(t, q)
	want := []LimitRatio{
		{"displacement", 0.1, []float64{0.8, 1.16}, 1.4, 2.0 / 7, 2, 7, "D6"},
		{"drift", 0.04, []float64{0.08 / 0.12, 0.116 / 0.12}, 0.14 / 0.12, 1.0 / 7, 1, 7, "D6"},
		{"base_shear", 200, []float64{1.6, 2.32}, 2.8, 5.0 / 7, 5, 7, "D6"},
	}
	if len(a.Limits) != len(want) {
		t.Fatalf("%d capacities", len(a.Limits))
	}
	for i, got := range a.Limits {
		w := want[i]
		if got.Name != w.Name || !near(got.Limit, w.Limit) || !near(got.Percentiles[1], w.Percentiles[1]) || !near(got.Max, w.Max) || !near(got.Above, w.Above) || got.CountAbove != w.CountAbove || got.Count != w.Count || got.Governing != w.Governing {
			t.Errorf("%+v, want %+v", got, w)
		}
	}
	e := a.Exceedances[0]
	for k := range 7 {
		if !near(e.Values[k], 0.02*float64(k+1)) || !near(e.Above[k], float64(6-k)/7) {
			t.Errorf("above %v m are %v", e.Values[k], e.Above[k])
		}
	}
	for panel, want := range []string{"displacement SD 3.937 in · exceeded by 2 of 7 motions, 28.6%", "base shear 0.08992 kip · exceeded by 2 of 7 motions, 28.6%"} {
		if got := a.ValueAt(panel, 4, UnitsUS); got != want {
			t.Errorf("it says %q, want %q", got, want)
		}
	}
	table := written(t, a, FormatTable, UnitsUS)
	for _, line := range []string{"\nBeside the capacities\n", "\ndisplacement     3.937 in      2   7  28.6%"} {
		if !strings.Contains(table, line) {
			t.Errorf("%q is not in\n%s", line, table)
		}
	}
	var got struct {
		Capacities map[string]struct {
			Limit      float64
			ShareAbove float64 `json:"share_above"`
			CountAbove int     `json:"count_above"`
			Count      int
			Governing  string
		}
	}
	if err := json.Unmarshal([]byte(written(t, a, FormatJSON, UnitsSI)), &got); err != nil {
		t.Fatal(err)
	}
	if c := got.Capacities["base_shear"]; c.Limit != 200 || c.CountAbove != 5 || c.Count != 7 || !near(c.ShareAbove, 5.0/7) || c.Governing != "D6" {
		t.Errorf("%+v", got)
	}
}

// Over a band the largest of each motion counts: SD at 2π s, 0.03·k m, where next to nothing is
// computed of the samples at the structure's own period.
func TestCapacitiesOverTheBand(t *testing.T) {
	a := askDemand(t, DemandQuestion{Structure: Structure{PeriodS: 1.5 * math.Pi, Damping: 0.02}, BandWidth: 0.4, Selection: Selection{IgnoreUsableBand: true}, Capacities: capacities(t, "0.1m"), Each: true})
	x := reductionOf(a.Band.Quantities, "sd_m")
	if e := a.Exceedances[0]; !near(e.Values[6], 0.21) || !near(a.Limits[0].Max, 2.1) || a.Limits[0].CountAbove != 4 || !near(x.Max, 0.21) {
		t.Errorf("greatest %v and %v, over the band %v", e.Values[6], a.Limits[0].Max*0.1, x.Max)
	}
	c := a.Chart(UnitsSI, false)
	if !slices.Contains(c.Notes, a.Band.title()) || len(c.Panels) != 1 {
		t.Errorf("notes %q, %d panels", c.Notes, len(c.Panels))
	}
}

// Balanced motions count by their weight, and by their number beside it: above 0.1 m are one
// of three of the one event and one of four of the other, (1/3 + 1/4)/2.
func TestBalancedExceedance(t *testing.T) {
	a := askDemand(t, DemandQuestion{Structure: Structure{PeriodS: math.Pi, Damping: 0.02}, Selection: Selection{Balance: BalanceEvent}, Capacities: capacities(t, "0.1m"), Each: true})
	e, l := a.Exceedances[0], a.Limits[0]
	at, found := slices.BinarySearchFunc(e.Values, 0.1, func(x, want float64) int {
		switch {
		case near(x, want):
			return 0
		case x < want:
			return -1
		}
		return 1
	})
	if got, want := a.ValueAt(0, at, UnitsSI), "displacement SD 0.1000 m · exceeded by 2 of 7 motions, 29.2% of the weight"; got != want {
		t.Errorf("it says %q, want %q", got, want)
	}
	if !found || !near(e.Above[at], l.Above) || l.CountAbove != 2 || !near(l.Above, 7.0/24) {
		t.Errorf("above 0.1 m are %v, %+v", e.Above, l)
	}
	if c := a.Chart(UnitsSI, false); c.Share != "weight above (%)" {
		t.Errorf("%q", c.Share)
	}
}

// The panels are in the units asked for, with percentiles, mean, design value and capacities.
func TestDemandChart(t *testing.T) {
	q := DemandQuestion{
		Structure:  Structure{PeriodS: math.Pi, Damping: 0.02, MassKG: ptr(1000.0), HeightM: ptr(3.0)},
		Capacities: capacities(t, "0.1m,200N,4%"), Each: true,
		Extras: Extras{Design: readDesign(t, "kind = \"asce7\"\nsds_g = 0.25\nsd1_g = 1\ntl_s = 8\n")},
	}
	a := askDemand(t, q)
	c := a.Chart(UnitsUS, true)
	if len(c.Panels) != 2 || !c.IsLinear {
		t.Fatalf("%d panels", len(c.Panels))
	}
	x := reductionOf(a.Quantities, "sd_m")
	want := map[chart.Kind]float64{chart.Median: 0.08 / 0.0254, chart.Mean: 0.08 / 0.0254, chart.Design: x.extra.against.value / 0.0254}
	names := []string{"capacity 3.937 in, 2 of 7 above", "drift 4% 4.724 in, 1 of 7 above", "median 3.150 in", "p84 4.756 in"}
	for _, l := range c.Panels[0].Levels {
		if w, ok := want[l.Kind]; ok && !near(l.Value, w) {
			t.Errorf("%s is at %v, want %v", l.Name, l.Value, w)
		}
		names = slices.DeleteFunc(names, func(n string) bool { return n == l.Name })
	}
	if len(names) > 0 || c.Panels[0].Quantity != "displacement SD (in)" {
		t.Errorf("%q are not among %+v", names, c.Panels[0].Levels)
	}
	if p := c.Panels[1]; p.Quantity != "base shear (kip)" || !near(p.Values[6], 0.14*4*1000/newtonsPerKip) || !slices.ContainsFunc(p.Levels, func(l chart.Level) bool { return l.Kind == chart.Capacity && near(l.Value, 200/newtonsPerKip) }) {
		t.Errorf("%+v", p)
	}
	for i := range c.Panels {
		if len(c.Panels[i].Values) != 7 {
			t.Errorf("%d values", len(c.Panels[i].Values))
		}
	}
}

func TestParseCapacities(t *testing.T) {
	l := capacities(t, " 2 in , 800kN,1.5%")
	if *l.DisplacementM != 0.0508 || *l.BaseShearN != 800000 || *l.DriftRatio != 0.015 {
		t.Errorf("%v m, %v N, %v", *l.DisplacementM, *l.BaseShearN, *l.DriftRatio)
	}
	if l := capacities(t, ""); !l.isNone() {
		t.Errorf("%+v", l)
	}
	for text, want := range map[string]string{
		"0.05":     `"0.05" has no unit; write one of m, cm, mm, ft, in, N, kN,`,
		"5s":       `unknown unit "s" in "5s"; accepted: m,`,
		"1m,200cm": `"200cm": a capacity of that kind is given already`,
		"0m":       "is not a positive number",
		"1m,,2kN":  "does not start with a number",
	} {
		if _, err := ParseCapacities(text); err == nil || !strings.Contains(err.Error(), want) || !strings.HasPrefix(err.Error(), "capacity: ") {
			t.Errorf("%q: %v, want %q", text, err, want)
		}
	}
	for text, want := range map[string]string{"1kN": "capacity: a base shear needs a mass or a weight", "1%": "capacity: a drift ratio needs the height", "100%": "capacity: a drift ratio 1 is not between 0 and 1"} {
		q := DemandQuestion{Structure: Structure{PeriodS: 1, Damping: 0.05}, Capacities: capacities(t, text)}
		if _, err := q.Ask(t.Context(), newStore(t, handGrid, nil)); err == nil || err.Error() != want {
			t.Errorf("%q: %v, want %q", text, err, want)
		}
	}
}
