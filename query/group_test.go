package query

import (
	"encoding/csv"
	"encoding/json"
	"fmt"
	"math"
	"reflect"
	"strings"
	"testing"
)

func grouping(t *testing.T, text string) Grouping {
	t.Helper()
	g, err := ParseGrouping(text)
	if err != nil {
		t.Fatal(err)
	}
	return g
}

// Each group has the statistics that a question for its motions alone has.
func TestGroupsAreSelections(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	for _, c := range []struct {
		by     string
		groups map[string]string // expressions by label
	}{
		{"event", map[string]string{"QA": `event == "QA"`, "QB": `event == "QB"`, "QC": `event == "QC"`}},
		{"station", map[string]string{"ZX.AAA": `station == "AAA"`, "ZX.BBB": `station == "BBB"`}},
		{"magnitude:5.25,6", map[string]string{"magnitude < 5.25": "", "5.25 <= magnitude < 6": "magnitude < 6", "magnitude >= 6": "magnitude >= 6", "unknown": `event == "QC"`}},
		{"distance:12.5, 41", map[string]string{"distance_km < 12.5": "", "12.5 <= distance_km < 41": "distance_km < 41", "distance_km >= 41": "", "unknown": `record not in ["R1", "R2"]`}},
		{"siting", map[string]string{"free-field": `siting == "free-field"`, "ground": `siting == "ground"`, "structure": `siting == "structure"`}},
		{"pga_g:0.05,50", map[string]string{"pga_g < 0.05": "pga_g < 0.05", "0.05 <= pga_g < 50": "pga_g >= 0.05", "pga_g >= 50": ""}},
	} {
		selection := Selection{Component: ComponentEach, Siting: SitingAll}
		grouped := askSpectrum(t, store, SpectrumQuestion{Selection: selection, Damping: 0.05, By: grouping(t, c.by)})
		if len(grouped.Groups) != len(c.groups) {
			t.Errorf("by %s: %d groups, want %d", c.by, len(grouped.Groups), len(c.groups))
		}
		for _, g := range grouped.Groups {
			where, ok := c.groups[g.Label]
			if !ok {
				t.Errorf("by %s: unexpected group %q", c.by, g.Label)
			}
			if where == "" {
				if g.Spectra != 0 || g.Reductions[0].Count != 0 {
					t.Errorf("by %s: %q is not empty", c.by, g.Label)
				}
				continue
			}
			selection.Where = where
			alone := askSpectrum(t, store, SpectrumQuestion{Selection: selection, Damping: 0.05})
			if fmt.Sprint(g.Reductions) != fmt.Sprint(alone.Reductions) { // NaN is unlike itself
				t.Errorf("by %s: %q has %+v, alone %+v", c.by, g.Label, g.Reductions, alone.Reductions)
			}
			if g.Records != alone.Selection.Records || g.Spectra != alone.Selection.Spectra || g.Events != alone.Selection.Events {
				t.Errorf("by %s: %q counts %+v, alone %+v", c.by, g.Label, g.Group, alone.Selection)
			}
		}
	}
}

func TestDemandsOfGroups(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	structure := Structure{PeriodS: math.Pi, Damping: 0.02, MassKG: ptr(1000.0)}
	grouped, err := DemandQuestion{Structure: structure, BandWidth: 0.6, By: grouping(t, "event")}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	for _, g := range grouped.Groups {
		alone, err := DemandQuestion{Selection: Selection{Where: `event == "` + g.Label + `"`}, Structure: structure, BandWidth: 0.6}.Ask(t.Context(), store)
		if err != nil {
			t.Fatal(err)
		}
		g := DemandAnswer{Percentiles: alone.Percentiles, Quantities: g.Quantities, Band: g.Band}
		if string(mustJSON(t, g.demandFields(g.Quantities, g.Band))) != string(mustJSON(t, alone.demandFields(alone.Quantities, alone.Band))) {
			t.Errorf("the group is not what its motions give alone: %+v", g)
		}
	}
	if len(grouped.Groups) != 2 {
		t.Errorf("%d groups, want QA and QC", len(grouped.Groups))
	}
	rows, err := csv.NewReader(strings.NewReader(written(t, grouped, FormatCSV, UnitsSI))).ReadAll()
	// Five quantities without a height, at the period and over the band, of all and two groups.
	if err != nil || len(rows) != 1+5*2*3 {
		t.Errorf("CSV of %d rows, %v", len(rows), err)
	}
}

func mustJSON(t *testing.T, o object) []byte {
	t.Helper()
	text, err := jsonText(o)
	if err != nil {
		t.Fatal(err)
	}
	return text
}

// The groups stand in every format, in the order of labels or bins, the unknown last.
func TestGroupsAreWritten(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	a := askSpectrum(t, store, SpectrumQuestion{Damping: 0.05, By: grouping(t, "magnitude:6"), Band: Band{ToS: 4}})
	want := []string{"all", "magnitude < 6", "magnitude >= 6", "unknown"}
	rows, err := csv.NewReader(strings.NewReader(written(t, a, FormatCSV, UnitsSI))).ReadAll()
	if err != nil || len(rows) != 1+2*len(want) {
		t.Fatalf("CSV of %d rows, %v", len(rows), err)
	}
	for i, row := range rows[1:] {
		if row[1] != want[i%len(want)] {
			t.Errorf("row %d is of %q", i, row[1])
		}
	}
	var got struct {
		By     string
		Count  []int
		Groups []struct {
			Group                    string
			Records, Spectra, Events int
			Count                    []int
			Percentiles              map[string][]*float64
		}
	}
	if err := json.Unmarshal([]byte(written(t, a, FormatJSON, UnitsSI)), &got); err != nil {
		t.Fatal(err)
	}
	if got.By != "magnitude" || len(got.Groups) != 3 || got.Groups[1].Group != "magnitude >= 6" || got.Groups[1].Spectra != 2 ||
		!reflect.DeepEqual(got.Groups[1].Count, []int{2, 2}) || !reflect.DeepEqual(got.Count, []int{3, 3}) || got.Groups[1].Percentiles["50"][0] != nil {
		t.Errorf("JSON has %+v", got)
	}
	table := written(t, a, FormatTable, UnitsSI)
	if strings.Count(table, "magnitude >= 6") != 2 || !strings.Contains(table, "group") {
		t.Errorf("table without groups:\n%s", table)
	}
}

func TestParseGrouping(t *testing.T) {
	if g := grouping(t, " distance : 10, 30,1e2 "); g.Attribute != "distance_km" || !reflect.DeepEqual(g.Edges, []float64{10, 30, 100}) {
		t.Errorf("distance: %+v", g)
	}
	if g := grouping(t, "site_class"); g.Attribute != "site_class_en1998" {
		t.Errorf("site class: %+v", g)
	}
	for _, bad := range []string{"magnitude", "magnitude:", "magnitude:6,5", "magnitude:5,5", "magnitude:5,x", "event:1", "colour", "quality.clipped", ":5"} {
		if g, err := ParseGrouping(bad); !isUsage(err) {
			t.Errorf("ParseGrouping(%q) = %+v, %v", bad, g, err)
		}
	}
}
