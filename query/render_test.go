package query

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"errors"
	"io"
	"math"
	"reflect"
	"strings"
	"testing"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// TestGolden keeps the look of every answer. The figures in the files are those
// of tests by hand; the files are evidence for layout, not for numbers. They
// are rewritten with -update.
func TestGolden(t *testing.T) {
	records := append(handRecords(), inventedRecord{code: "=R7", siting: "unknown", event: quakeB, components: pair(0.03, 0.03)})
	store := newStore(t, handGrid, faint(records))
	where := Selection{Where: `magnitude > 6 and record != "<&>"`}
	s := askSpectrum(t, store, SpectrumQuestion{Damping: 0.05})
	us := askSpectrum(t, store, SpectrumQuestion{Selection: where, Damping: 0.02, Measure: MeasurePSV, Percentiles: []float64{97.5, 5}, Band: Band{ToS: 4}})
	each := askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Component: ComponentEach, Siting: SitingAll}, Damping: 0.02, Measure: MeasureSD, Band: Band{ToS: 2}})
	one := askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Where: `record == "=R7"`}, Damping: 0.02, PeriodsS: []float64{math.Pi}})
	newmark := askSpectrum(t, store, SpectrumQuestion{Damping: 0.05, PeriodsS: []float64{1}, Method: spectrum.NewmarkAverage})
	structure := Structure{PeriodS: math.Pi, Damping: 0.02, MassKG: ptr(1000.0), HeightM: ptr(3.0)}
	ask := func(q DemandQuestion) *DemandAnswer {
		t.Helper()
		a, err := q.Ask(t.Context(), store)
		if err != nil {
			t.Fatal(err)
		}
		return a
	}
	full := ask(DemandQuestion{Structure: structure, BandWidth: 0.6})
	limited := ask(DemandQuestion{Structure: structure, BandWidth: 0.6, Capacities: Limits{DisplacementM: ptr(0.16), BaseShearN: ptr(640.0)}})
	bare := ask(DemandQuestion{Selection: Selection{Component: ComponentEach}, Structure: Structure{PeriodS: math.Pi, Damping: 0.02}})
	type answer interface {
		Write(io.Writer, Format, Units) error
	}
	cases := []struct {
		name   string
		answer answer
		format Format
		units  Units
	}{
		{"spectrum.table", s, FormatTable, UnitsSI},
		{"spectrum.csv", s, FormatCSV, UnitsSI},
		{"spectrum.json", s, FormatJSON, UnitsSI},
		{"spectrum-us.table", us, FormatTable, UnitsUS},
		{"spectrum-us.csv", us, FormatCSV, UnitsUS},
		{"spectrum-us.json", us, FormatJSON, UnitsUS},
		{"spectrum-each.table", each, FormatTable, UnitsSI},
		{"spectrum-each.csv", each, FormatCSV, UnitsSI},
		{"spectrum-each.json", each, FormatJSON, UnitsSI},
		{"spectrum-one.table", one, FormatTable, UnitsSI},
		{"spectrum-one.csv", one, FormatCSV, UnitsSI},
		{"spectrum-one.json", one, FormatJSON, UnitsSI},
		{"spectrum-newmark.table", newmark, FormatTable, UnitsSI},
		{"demand.table", full, FormatTable, UnitsSI},
		{"demand-us.table", full, FormatTable, UnitsUS},
		{"demand.json", full, FormatJSON, UnitsUS},
		{"demand.csv", limited, FormatCSV, UnitsUS},
		{"demand-bare.table", bare, FormatTable, UnitsSI},
		{"demand-bare.json", bare, FormatJSON, UnitsSI},
	}
	for _, c := range cases {
		text := written(t, c.answer, c.format, c.units)
		golden(t, c.name+".golden", []byte(text))
		checkReadable(t, c.name, c.format, text)
	}
	golden(t, "spectrum.remarks.golden", []byte(s.Remarks()))
	if text := written(t, newmark, FormatJSON, UnitsSI); !strings.Contains(text, `"method": "newmark-average"`) {
		t.Errorf("JSON does not name the method:\n%s", text)
	}
	if text := written(t, s, FormatJSON, UnitsSI); strings.Contains(text, `"method"`) {
		t.Errorf("JSON names the default method:\n%s", text)
	}
}

// checkReadable reads CSV and JSON back.
func checkReadable(t *testing.T, name string, format Format, text string) {
	t.Helper()
	switch format {
	case FormatJSON:
		if !json.Valid([]byte(text)) {
			t.Errorf("%s is no JSON", name)
		}
		if strings.Contains(text, "NaN") {
			t.Errorf("%s holds NaN", name)
		}
	case FormatCSV:
		if _, err := csv.NewReader(strings.NewReader(text)).ReadAll(); err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
}

// TestSpectrumJSONKeys: the names and shapes that programs rely on.
func TestSpectrumJSONKeys(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	a := askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Where: "true"}, Damping: 0.05, Percentiles: []float64{50, 62.5}})
	var got struct {
		Selection struct {
			Where, Component, Siting, Recipe, Screen string
			Records, Spectra, Events                 int
			LeftOut                                  []struct {
				Reason  string
				Records int
			} `json:"left_out"`
			Notes []string
		}
		Damping       float64
		Measure, Unit string
		PeriodsS      []float64 `json:"periods_s"`
		Count         []int
		Mean          []float64
		LogMean       []float64 `json:"log_mean"`
		LogStd        []float64 `json:"log_std"`
		Percentiles   map[string][]float64
		Min, Max      []float64
		Governing     []string
		Caution       string
	}
	decoder := json.NewDecoder(strings.NewReader(written(t, a, FormatJSON, UnitsSI)))
	decoder.DisallowUnknownFields()
	if err := decoder.Decode(&got); err != nil {
		t.Fatal(err)
	}
	if got.Selection.Component != "rotd50" || got.Selection.Siting != "ground" || got.Selection.Recipe != "as-delivered" || got.Selection.Screen != "normal" || got.Selection.Where != "true" ||
		got.Selection.Records != 3 || got.Selection.Spectra != 3 || got.Selection.Events != 2 || len(got.Selection.LeftOut) != 3 {
		t.Errorf("selection %+v", got.Selection)
	}
	if got.Damping != 0.05 || got.Measure != "psa" || got.Unit != "g" || got.Caution != Caution {
		t.Errorf("damping %v, measure %q, unit %q", got.Damping, got.Measure, got.Unit)
	}
	// Every bit survives the text.
	for p, r := range a.Reductions {
		if got.PeriodsS[p] != a.PeriodsS[p] || got.Count[p] != r.Count || got.Mean[p] != r.Mean || got.LogMean[p] != r.LogMean ||
			got.LogStd[p] != r.LogStd || got.Percentiles["50"][p] != r.Percentiles[0] || got.Percentiles["62.5"][p] != r.Percentiles[1] ||
			got.Min[p] != r.Min || got.Max[p] != r.Max || got.Governing[p] != r.Governing {
			t.Errorf("period %d: JSON differs from %+v", p, r)
		}
	}
}

// TestUnitsUS: 1 in = 0.0254 m, so an SD of 0.0254 m is 1 in.
func TestUnitsUS(t *testing.T) {
	store := newStore(t, handGrid, []inventedRecord{{code: "A", siting: "ground", components: pair(0.0254, 0.0254)}})
	for measure, want := range map[Measure]string{MeasureSD: "1", MeasurePSV: "4", MeasurePSA: shortest(0.0254 * 4 * 4 / 9.80665)} {
		a := askSpectrum(t, store, SpectrumQuestion{Damping: 0.02, Measure: measure, Band: Band{ToS: 2}})
		rows, err := csv.NewReader(strings.NewReader(written(t, a, FormatCSV, UnitsUS))).ReadAll()
		if err != nil {
			t.Fatal(err)
		}
		if rows[1][2] != want {
			t.Errorf("mean %s = %s, want %s", measure, rows[1][2], want)
		}
	}
}

func TestRecords(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	a, err := RecordsQuestion{}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	var order []string
	for _, r := range a.Rows {
		order = append(order, r.Record+r.Component)
	}
	if got := strings.Join(order, " "); got != "R1h1 R1h2 R1v R2h1 R2h2 R3h1 R3h2 R4h1 R5h1 R5h2 R6v" {
		t.Errorf("rows %s", got)
	}
	for _, f := range []Format{FormatTable, FormatCSV, FormatJSON} {
		var b bytes.Buffer
		if err := a.Write(&b, f); err != nil {
			t.Fatal(err)
		}
		golden(t, "records."+string(f)+".golden", b.Bytes())
		checkReadable(t, "records", f, b.String())
	}
	a, err = RecordsQuestion{Selection{Where: "magnitude > 6", Component: ComponentV}}.Ask(t.Context(), store)
	if err != nil || len(a.Rows) != 1 || a.Rows[0].PGA != 0.3 || a.Rows[0].Record != "R1" {
		t.Errorf("filtered %+v, %v", a.Rows, err)
	}
}

// TestRecordsEmpty: nothing found is an error that says why, and still a list.
func TestRecordsEmpty(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	a, err := RecordsQuestion{Selection{Where: "magnitude > 9"}}.Ask(t.Context(), store)
	var empty *EmptyError
	if !errors.As(err, &empty) || a == nil {
		t.Fatalf("answer %v, error %v", a, err)
	}
	var b strings.Builder
	if err := a.Write(&b, FormatJSON); err != nil || b.String() != "[]\n" {
		t.Errorf("JSON %q, %v, want an empty array", b.String(), err)
	}
	_, err = RecordsQuestion{Selection{Where: "magnitude"}}.Ask(t.Context(), store)
	var mistake *UsageError
	if !errors.As(err, &mistake) {
		t.Errorf("error %v is no UsageError", err)
	}
}

// TestRecordsHeader: CSV and JSON name the same fields in one order.
func TestRecordsHeader(t *testing.T) {
	row := RecordRow{}
	var text bytes.Buffer
	if err := (&RecordsAnswer{Rows: []RecordRow{row}}).Write(&text, FormatJSON); err != nil {
		t.Fatal(err)
	}
	var fields []map[string]any
	if err := json.Unmarshal(text.Bytes(), &fields); err != nil {
		t.Fatal(err)
	}
	if len(fields[0]) != len(recordsHeader) {
		t.Errorf("%d fields in JSON, %d columns in CSV", len(fields[0]), len(recordsHeader))
	}
	kind := reflect.TypeFor[RecordRow]()
	for i, name := range recordsHeader {
		if tag := kind.Field(i).Tag.Get("json"); tag != name {
			t.Errorf("column %d is %s, the field is %s", i, name, tag)
		}
	}
	var l csvLine
	row.csv(&l)
	if got := strings.Count(string(l.text), ",") + 1; got != len(recordsHeader) {
		t.Errorf("%d cells under %d columns", got, len(recordsHeader))
	}
}

func TestRejections(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	none, err := Rejections(t.Context(), store, 0)
	if err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	if err := none.Write(&b, FormatJSON); err != nil || b.String() != "[]\n" {
		t.Errorf("JSON of none = %q, %v", b.String(), err)
	}
	err = change(t.Context(), store, func(tx *db.Tx) error {
		for _, r := range []db.Rejection{
			{Path: "b/torn.at2", Line: 17, Cause: "announced 4000 values, found 3120", SHA256: "ab"},
			{Path: "a/locked.txt", Cause: "permission denied\x1b[2J"},
		} {
			if err := tx.Reject(t.Context(), r, 1); err != nil {
				return err
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	a, err := Rejections(t.Context(), store, 0)
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range []Format{FormatTable, FormatCSV, FormatJSON} {
		var b bytes.Buffer
		if err := a.Write(&b, f); err != nil {
			t.Fatal(err)
		}
		golden(t, "rejections."+string(f)+".golden", b.Bytes())
		checkReadable(t, "rejections", f, b.String())
	}
}

func TestUnknownFormat(t *testing.T) {
	const want = `format: unknown format "xml"; accepted here: table, csv, json`
	checkUsage(t, "spectrum", (&SpectrumAnswer{}).Write(nil, "xml", UnitsSI), want)
	checkUsage(t, "demand", (&DemandAnswer{}).Write(nil, "xml", UnitsSI), want)
	checkUsage(t, "records", (&RecordsAnswer{}).Write(nil, "xml"), want)
	checkUsage(t, "rejections", (&RejectionsAnswer{}).Write(nil, "xml"), want)
}

func TestFigure(t *testing.T) {
	cases := []struct {
		x    float64
		want string
	}{
		{0, "0"}, {math.NaN(), "-"}, {math.Inf(1), "-"}, {1, "1.000"}, {0.01, "0.01000"}, {9.9996, "10.00"}, {12346, "12350"}, {123.44, "123.4"},
		{0.00012344, "0.0001234"}, {0.000012344, "1.234e-05"}, {1234567, "1235000"}, {12345678, "1.235e+07"}, {-2.5, "-2.500"}, {999.96, "1000"},
	}
	for _, c := range cases {
		if got := figure(c.x); got != c.want {
			t.Errorf("figure(%v) = %q, want %q", c.x, got, c.want)
		}
	}
}

func TestCSVText(t *testing.T) {
	cases := []struct{ text, want string }{
		{"", ""}, {"plain", "plain"}, {"=1+1", "'=1+1"}, {"+1", "'+1"}, {"-1", "'-1"}, {"@x", "'@x"}, {"\t=1", "'\t=1"},
		{"a,b", `"a,b"`}, {`say "hi"`, `"say ""hi"""`}, {"two\nlines", "\"two\nlines\""}, {"=a,b", `"'=a,b"`}, {"a=b", "a=b"},
	}
	for _, c := range cases {
		if got := string(csvText(nil, c.text)); got != c.want {
			t.Errorf("csvText(%q) = %q, want %q", c.text, got, c.want)
		}
	}
}

// TestTableText: cells cannot move a terminal's cursor.
func TestTableText(t *testing.T) {
	table := table{columns: []column{{name: "word", isWord: true}, {name: "n", unit: "m"}}}
	table.add("a\x1b[31m\nµ", "12")
	if got, want := string(table.appendTo(nil)), "word       n\n           m\na?[31m?µ  12\n"; got != want {
		t.Errorf("table\n%q\nwant\n%q", got, want)
	}
}
