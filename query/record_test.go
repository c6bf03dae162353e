package query

import (
	"bytes"
	"encoding/json"
	"errors"
	"math"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/pipeline"
	"swaybook/pipeline/spectrum"
	"swaybook/query/chart"
)

// ingested is a store of the fixtures of some formats.
func ingested(t *testing.T, formats ...string) *db.Store {
	t.Helper()
	store, err := db.Create(t.Context(), filepath.Join(t.TempDir(), "ingested.db"), spectrum.Version)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := store.Close(); err != nil {
			t.Error(err)
		}
	})
	opts := pipeline.Options{Started: time.Date(2026, 1, 2, 3, 4, 5, 0, time.UTC), Clock: time.Now}
	opts.Grid = db.Grid{PeriodsS: []float64{0.1, 0.2, 0.5, 1, 2}, Dampings: []float64{0.02, 0.05}}
	for _, f := range formats {
		opts.Paths = append(opts.Paths, filepath.Join("..", "testdata", "records", f))
	}
	if _, err := pipeline.Run(t.Context(), store, opts); err != nil {
		t.Fatal(err)
	}
	return store
}

func askRecord(t *testing.T, store *db.Store, q RecordQuestion) *RecordAnswer {
	t.Helper()
	a, err := q.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	return a
}

// The traces of a figure, conditioned ones among them, have the peaks, the Arias intensity
// and the durations that ingest has stored, to the bit, and begin where their stored lead
// says.
func TestFiguresHaveTheStoredMeasures(t *testing.T) {
	store := ingested(t, "californiav2", "knet")
	rows, err := RecordsQuestion{}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	compared, conditioned := 0, 0
	for i := range rows.Rows {
		r := &rows.Rows[i]
		a := askRecord(t, store, RecordQuestion{Code: r.Record, Component: Component(r.Component), Figure: true})
		trace := &a.Figure.Traces[0]
		g := &trace.Ground
		for name, c := range map[string][2]float64{
			"PGA": {math.Abs(g.PGA.Value) / StandardGravity, r.PGA}, "PGV": {math.Abs(g.PGV.Value), r.PGV}, "PGD": {math.Abs(g.PGD.Value), r.PGD},
			"5-75": {trace.Marks[1].AtS - trace.Marks[0].AtS, *r.Significant575}, "5-95": {trace.Marks[2].AtS - trace.Marks[0].AtS, *r.Significant595},
			"step": {trace.StepS, a.Conditioned[0].StepS}, "samples": {float64(len(trace.Acceleration)), float64(a.Conditioned[0].Samples)},
			"begin": {trace.FromS, -a.Conditioned[0].LeadS}, "energy": {trace.Shares[len(trace.Shares)-1], 1},
		} {
			if c[0] != c[1] {
				t.Errorf("%s %s: %s is %v, stored %v", r.Record, r.Component, name, c[0], c[1])
			}
		}
		compared++
		if a.Conditioned[0].IsConditioned {
			conditioned++
		}
	}
	if compared < 6 || conditioned == 0 || conditioned == compared {
		t.Errorf("%d components compared, %d of them conditioned", compared, conditioned)
	}
}

// The spectra of a figure are those that statistics count, NaN there where they are not
// usable here.
func TestFiguresHaveTheStoredSpectra(t *testing.T) {
	store := ingested(t, "knet")
	rows, err := RecordsQuestion{}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	code := rows.Rows[0].Record
	a := askRecord(t, store, RecordQuestion{Code: code, Component: ComponentH1, Figure: true})
	if len(a.Figure.Spectra) != 2 {
		t.Fatalf("%d spectra of one component", len(a.Figure.Spectra))
	}
	for _, s := range a.Figure.Spectra {
		want := askSpectrum(t, store, SpectrumQuestion{
			Selection: Selection{Where: `record == "` + code + `"`, Component: ComponentH1, Siting: SitingAll, Screen: ScreenNone}, Damping: s.Damping, Measure: MeasureSD, Each: true,
		})
		for p, x := range want.Each[0] {
			if s.IsUsable[p] != !math.IsNaN(x) || s.IsUsable[p] && s.SD[p] != x {
				t.Errorf("damping %v, %v s: %v m, usable %v, want %v", s.Damping, a.Figure.PeriodsS[p], s.SD[p], s.IsUsable[p], x)
			}
		}
	}
	whole := askRecord(t, store, RecordQuestion{Code: code, Figure: true})
	for _, s := range whole.Figure.Spectra {
		if s.Damping != 0.05 {
			t.Errorf("a whole record has a spectrum at %v", s.Damping)
		}
	}
	if n := len(whole.Rows); n != len(whole.Figure.Spectra) || n < 4 {
		t.Errorf("%d rows, %d spectra", n, len(whole.Figure.Spectra))
	}
}

// A page says what is known, with the values of the peaks where they are.
func TestRecordChart(t *testing.T) {
	store := ingested(t, "knet")
	rows, err := RecordsQuestion{}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	a := askRecord(t, store, RecordQuestion{Code: rows.Rows[0].Record, Figure: true})
	page := a.Chart(UnitsUS, nil)
	if len(page.Panels) != 3 || len(page.BuildUps) != len(a.Figure.Traces) || len(page.Panels[0].Traces) != len(a.Figure.Traces) {
		t.Fatalf("%d panels, %d build-ups", len(page.Panels), len(page.BuildUps))
	}
	for i, trace := range page.Panels[1].Traces {
		if want := a.Figure.Traces[i].Ground.PGV.Value / 0.0254; !near(trace.Peak, want) || page.Panels[1].Unit != "in/s" {
			t.Errorf("velocity peaks at %v %s, want %v in/s", trace.Peak, page.Panels[1].Unit, want)
		}
	}
	for i, b := range page.BuildUps {
		arias := *a.row(a.Figure.Traces[i].Component).Arias
		if want := figure(arias/0.0254) + " in/s"; b.Words[0] != want {
			t.Errorf("Arias intensity is %q, want %q", b.Words[0], want)
		}
	}
	var table bytes.Buffer
	if err := a.Write(&table, FormatTable, UnitsUS); err != nil {
		t.Fatal(err)
	}
	first := &a.Rows[0]
	row := regexp.MustCompile(`(?m)^` + first.Component + ` +0\..*$`).FindString(table.String())
	for i, want := range []float64{first.PGA, first.PGV / 0.0254, first.PGD / 0.0254, *first.Arias / 0.0254, *first.CAV / 0.0254} {
		if words := strings.Fields(row); len(words) != 13 || words[i+1] != figure(want) {
			t.Errorf("column %d of %q is not %s", i+1, row, figure(want))
		}
	}
	if !regexp.MustCompile(`(?m)^ +g +in/s +in +in/s +in/s +in/s +s +s +s +in/s2 +s +in$`).MatchString(table.String()) {
		t.Errorf("other units in\n%s", table.String())
	}
	var out bytes.Buffer
	if err := chart.Write(&out, chart.SVG, chart.Page, page); err != nil {
		t.Fatal(err)
	}
}

// Four-way spectra are those of all dampings, read at 5 %.
func TestRecordFourWay(t *testing.T) {
	store := ingested(t, "knet")
	rows, err := RecordsQuestion{}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	a := askRecord(t, store, RecordQuestion{Code: rows.Rows[0].Record, Component: ComponentH1, Figure: true})
	four := a.FourWay(UnitsSI, []chart.Mark{{Name: "T = 0.2 s", FromS: 0.2, ToS: 0.2}})
	s := a.Figure.Spectra[1]
	if want := s.SD[1] * 2 * math.Pi / 0.2; len(four.Readings) != 1 || !near(four.Readings[0].PSV, want) || four.Readings[0].Name != "T = 0.2 s, 5% damped" {
		t.Errorf("read %+v, want %v m/s", four.Readings, want)
	}
	if len(four.Curves) != 2 || four.Curves[0].Kind != chart.OtherDamping(0) || four.Curves[1].Kind != chart.UsuallyDamped {
		t.Errorf("%d curves", len(four.Curves))
	}
}

// Each of eight dampings of any grid has a line of its own, that of 5 % the same in all.
func TestDampingsAreToldApart(t *testing.T) {
	f := &RecordFigure{PeriodsS: []float64{1}}
	for _, ratio := range []float64{0.2, 0, 0.02, 0.05, 0.07, 0.1, 0.005, 0.3} {
		f.Spectra = append(f.Spectra, RecordSpectrum{"h1", ratio, []float64{1}, []bool{true}})
	}
	_, curves := (&RecordAnswer{Figure: f}).damped(MeasurePSV, 1)
	of := map[chart.Kind]string{}
	for _, c := range curves {
		if other := of[c.Kind]; other != "" {
			t.Errorf("%s and %s have the same line", c.Name, other)
		}
		of[c.Kind] = c.Name
	}
	if of[chart.UsuallyDamped] != "5% damped" || of[chart.OtherDamping(0)] != "0% damped" || of[chart.OtherDamping(6)] != "30% damped" {
		t.Errorf("%v", of)
	}
}

// Only what no quantity moves in is cut off, and never of what was delivered.
func TestPagesShowTheMotion(t *testing.T) {
	quiet := make([]float64, 1000)
	a := &RecordAnswer{Rows: []RecordRow{{Component: "h1", DurationS: 2}}, Conditioned: []ConditionedRow{{Component: "h1", LeadS: 3}}}
	of := func(at int) (fromS, toS float64, words string) {
		x := slices.Clone(quiet)
		x[at], x[at+1] = 1, -1
		a.Figure = &RecordFigure{Traces: []RecordTrace{{Component: "h1", FromS: -3, StepS: 0.01, Acceleration: x, Ground: spectrum.Integrate(0.01, x)}}}
		return a.clock()
	}
	// The displacement that a pulse leaves goes on to the end, 9.99 s behind the begin.
	if from, to, words := of(400); from != 0 || !near(to, 6.99) || !strings.Contains(words, "below 1%") {
		t.Errorf("from %v to %v, %q", from, to, words)
	}
	if from, _, _ := of(50); !(from > -2.53 && from <= -2.5) {
		t.Errorf("from %v", from)
	}
}

// Answers name what is not there.
func TestRecordQuestionErrors(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	for _, c := range []struct {
		q       RecordQuestion
		want    string
		isUsage bool
	}{
		{RecordQuestion{Code: ""}, "record: no code is given", true},
		{RecordQuestion{Code: "R1", Component: "each"}, `component: unknown component "each"; accepted here: h1, h2, v, rotd50, rotd100`, true},
		{RecordQuestion{Code: "R9"}, `the store holds no record "R9"; did you mean R1?`, false},
		{RecordQuestion{Code: "r"}, `the store holds no record "r"; R1, R2, R3 and 3 more have that in their code`, false},
		{RecordQuestion{Code: "elsewhere"}, `the store holds no record "elsewhere"; query records lists those that there are`, false},
		{RecordQuestion{Code: "R4", Component: ComponentV}, "record R4 has no component v; it has h1", false},
	} {
		_, err := c.q.Ask(t.Context(), store)
		if err == nil || err.Error() != c.want {
			t.Errorf("%+v: %v", c.q, err)
		}
		if _, isUsage := errors.AsType[*UsageError](err); isUsage != c.isUsage {
			t.Errorf("%+v: %T", c.q, err)
		}
	}
}

// Damaged samples cost the trace and nothing else, and the answer says so.
func TestRecordOfDamagedSamples(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	alter(t, store, `UPDATE series SET data = x'00' WHERE id = (SELECT c.series_id FROM component c JOIN record r ON r.id = c.record_id WHERE r.code = 'R1' AND c.role = 'h2')`)
	a := askRecord(t, store, RecordQuestion{Code: "R1", Figure: true})
	if len(a.Rows) != 5 || len(a.Figure.Traces) != 2 || len(a.Figure.Spectra) != 5 || len(a.Lacking) != 1 || a.Lacking[0].Component != "h2" {
		t.Errorf("%d rows, %d traces, %d spectra, lacking %v", len(a.Rows), len(a.Figure.Traces), len(a.Figure.Spectra), a.Lacking)
	}
	if !strings.Contains(a.Remarks(), "lacking: h2: trace: ") {
		t.Errorf("remarks %q", a.Remarks())
	}
}

// The look of the answer, and the keys that programs rely on.
func TestRecordGolden(t *testing.T) {
	store := newStore(t, handGrid, faint(handRecords()))
	a := askRecord(t, store, RecordQuestion{Code: "R1"})
	for _, format := range []Format{FormatTable, FormatCSV, FormatJSON} {
		var out bytes.Buffer
		if err := a.Write(&out, format, UnitsSI); err != nil {
			t.Fatal(err)
		}
		golden(t, "record."+string(format)+".golden", out.Bytes())
		checkReadable(t, "record", format, out.String())
		if format != FormatJSON {
			continue
		}
		var got struct {
			Record, Recipe string
			Components     []RecordRow
			ComputedOf     []struct {
				Component     string
				IsConditioned bool    `json:"is_conditioned"`
				StepS         float64 `json:"dt_s"`
				Samples       int
				LeadS         float64 `json:"lead_s"`
			} `json:"computed_of"`
			Lacking []struct{ Component, Reason string }
		}
		decoder := json.NewDecoder(&out)
		decoder.DisallowUnknownFields()
		if err := decoder.Decode(&got); err != nil || got.Record != "R1" || len(got.Components) != 5 || len(got.ComputedOf) != 3 || got.ComputedOf[0].StepS != 0.01 {
			t.Errorf("%v: %+v", err, got)
		}
	}
}
