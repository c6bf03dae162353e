package query

import (
	"bytes"
	"context"
	"database/sql"
	"encoding/csv"
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"
	"testing"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

func export(t *testing.T, store *db.Store, q ExportQuestion) (string, *ExportSummary) {
	t.Helper()
	var b bytes.Buffer
	summary, err := q.Write(t.Context(), store, &b)
	if err != nil {
		t.Fatal(err)
	}
	return b.String(), summary
}

func csvRows(t *testing.T, text string) [][]string {
	t.Helper()
	rows, err := csv.NewReader(strings.NewReader(text)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return rows
}

// TestExportEqualsView: the export is the store's view in another coat: the
// same rows in the same order. The numbers agree to the last digit but one:
// where the compiler fuses multiplication and addition (arm64, GOAMD64=v3), the
// SQLite in pure Go reads decimals with an error of the last bit.
func TestExportEqualsView(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	text, summary := export(t, store, ExportQuestion{})
	raw, err := sql.Open("sqlite", "file:"+store.Path()+"?mode=ro")
	if err != nil {
		t.Fatal(err)
	}
	defer raw.Close()
	rows, err := raw.QueryContext(t.Context(), `SELECT record, component, damping, period_s, sd_m, psv_m_s, psa_g FROM ordinate ORDER BY record, component, damping, period_s`)
	if err != nil {
		t.Fatal(err)
	}
	defer rows.Close()
	got := strings.Split(strings.TrimSpace(text), "\n")
	if got[0] != "record,component,damping,period_s,sd_m,psv_m_s,psa_g" {
		t.Errorf("header %s", got[0])
	}
	n := 0
	for rows.Next() {
		var record, component string
		var x [5]float64
		if err := rows.Scan(&record, &component, &x[0], &x[1], &x[2], &x[3], &x[4]); err != nil {
			t.Fatal(err)
		}
		n++
		fields := strings.Split(got[min(n, len(got)-1)], ",")
		same := len(fields) == 7 && fields[0] == record && fields[1] == component
		for i := 0; same && i < len(x); i++ {
			v, err := strconv.ParseFloat(fields[2+i], 64)
			same = err == nil && math.Abs(v-x[i]) <= 4e-16*math.Abs(x[i])
		}
		if !same {
			t.Errorf("row %d: exported %q, view %s %s %v", n, fields, record, component, x)
		}
	}
	if err := rows.Err(); err != nil {
		t.Fatal(err)
	}
	// Eleven components and two rotated spectra of four pairs, two dampings, four
	// periods.
	if n != (11+2*4)*2*4 || summary.Rows != n || len(got) != n+1 {
		t.Errorf("%d rows in the view, %d exported, want 152", n, summary.Rows)
	}
}

// TestExportParts: parts and groups leave no seam.
func TestExportParts(t *testing.T) {
	var records []inventedRecord
	for i := range 60 {
		records = append(records, inventedRecord{code: fmt.Sprintf("P%02d", (i*17)%60), siting: "ground", components: pair(float64(i+1), 0.5)})
	}
	store := newStore(t, handGrid, records)
	whole, _ := export(t, store, ExportQuestion{})
	var parts bytes.Buffer
	err := store.View(t.Context(), func(s *db.Snapshot) error {
		picked, err := pick(t.Context(), s, Selection{Component: ComponentAll, Siting: SitingAll}, db.DetailMotion)
		if err != nil {
			return err
		}
		e := newExporter(s, handGrid.Dampings, handGrid.PeriodsS)
		e.memory = 8 * len(e.keys) * 25
		if e.partSize() != 25 {
			t.Errorf("part of %d components, want 25", e.partSize())
		}
		_, err = e.writeAll(t.Context(), &parts, picked.motions)
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	if parts.String() != whole {
		t.Error("an export in parts of 25 components differs from one in a single part")
	}
}

func TestExportFilters(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	cases := []struct {
		name     string
		question ExportQuestion
		rows     int
		all      string // in every row
	}{
		{"siting", ExportQuestion{Selection: Selection{Siting: "structure"}}, 4 * 2 * 4, "R5,"},
		{"vertical", ExportQuestion{Selection: Selection{Component: ComponentV}}, 2 * 2 * 4, ",v,"},
		{"each", ExportQuestion{Selection: Selection{Component: ComponentEach}}, 9 * 2 * 4, ",h"},
		{"where", ExportQuestion{Selection: Selection{Where: `record == "R1"`}}, 5 * 2 * 4, "R1,"},
		{"recorded", ExportQuestion{Selection: Selection{Component: ComponentRecorded, Where: `record == "R1"`}}, 3 * 2 * 4, "R1,"},
		{"rotated", ExportQuestion{Selection: Selection{Component: ComponentRotD100}}, 4 * 2 * 4, ",rotd100,"},
		{"damping", ExportQuestion{Dampings: []float64{0.05}}, 19 * 4, ",0.05,"},
		{"band", ExportQuestion{Band: Band{ToS: 2}}, 19 * 2, ",1.5707963267948966,"},
	}
	for _, c := range cases {
		text, summary := export(t, store, c.question)
		lines := strings.Split(strings.TrimSuffix(text, "\n"), "\n")[1:]
		if len(lines) != c.rows || summary.Rows != c.rows {
			t.Errorf("%s: %d rows, summary %d, want %d", c.name, len(lines), summary.Rows, c.rows)
		}
		for _, line := range lines {
			if !strings.Contains(line, c.all) {
				t.Errorf("%s: row %q lacks %q", c.name, line, c.all)
			}
		}
	}
}

// TestExportOffGrid: a damping off the grid is computed from the samples.
func TestExportOffGrid(t *testing.T) {
	record := inventedRecord{code: "A", siting: "structure", components: pair(1, 2)[:1]}
	store := newStore(t, handGrid, []inventedRecord{record})
	text, _ := export(t, store, ExportQuestion{Dampings: []float64{0.05, 0.03}})
	rows := csvRows(t, text)
	c := record.components[0]
	for p, period := range handGrid.PeriodsS {
		solver, err := spectrum.NewSolver(spectrum.NigamJennings, c.step(), []spectrum.Oscillator{{PeriodS: period, Damping: 0.03}})
		if err != nil {
			t.Fatal(err)
		}
		sd := solver.SD(nil, c.samples())[0]
		w := 2 * math.Pi / period
		for column, want := range map[int]float64{2: 0.03, 3: period, 4: sd, 5: sd * w, 6: sd * w * w / 9.80665} {
			if got, err := strconv.ParseFloat(rows[1+p][column], 64); err != nil || got != want {
				t.Errorf("row %d column %d = %v, %v, want %v", p, column, got, err, want)
			}
		}
		if got := rows[1+len(handGrid.PeriodsS)+p][4]; got != shortest(float64(p+1)/2) {
			t.Errorf("stored row %d = %s", p, got)
		}
	}
}

// TestExportCells: a record's code cannot become a formula or break the row.
func TestExportCells(t *testing.T) {
	store := newStore(t, handGrid, []inventedRecord{
		{code: `=1+2`, siting: "ground", components: pair(1, 2)[:1]}, {code: "a,\"b\"\nc", siting: "ground", components: pair(1, 2)[:1]},
	})
	text, _ := export(t, store, ExportQuestion{Band: Band{ToS: 2}, Dampings: []float64{0.02}})
	rows := csvRows(t, text)
	if rows[1][0] != "'=1+2" || rows[2][0] != "a,\"b\"\nc" {
		t.Errorf("cells %q, %q", rows[1][0], rows[2][0])
	}
}

// failing refuses to be written to.
type failing struct{ written int }

var errFull = errors.New("no space")

func (f *failing) Write(p []byte) (int, error) {
	f.written += len(p)
	return 0, errFull
}

func TestExportMistakes(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	var b bytes.Buffer
	_, err := ExportQuestion{Selection: Selection{Component: ComponentGeomean}}.Write(t.Context(), store, &b)
	checkUsage(t, "component", err, `component: unknown component "geomean"; accepted here: all, recorded, each, h1, h2, v, rotd50, rotd100`)
	_, err = ExportQuestion{Dampings: []float64{1}}.Write(t.Context(), store, &b)
	checkUsage(t, "damping", err, "damping: 1 is 100% of critical; it must be at least 0 and less than 1, written 5% or 0.05")
	_, err = ExportQuestion{Selection: Selection{Where: "magnitude > 9"}}.Write(t.Context(), store, &b)
	var empty *EmptyError
	if !errors.As(err, &empty) {
		t.Errorf("nothing selected gives %v", err)
	}
	if b.Len() > 0 {
		t.Errorf("a question with a mistake wrote %q", b.String())
	}
	if _, err := (ExportQuestion{}).Write(t.Context(), store, &failing{}); !errors.Is(err, errFull) {
		t.Errorf("a full disk gives %v", err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := (ExportQuestion{}).Write(ctx, store, &b); !errors.Is(err, context.Canceled) {
		t.Errorf("a cancelled export gives %v", err)
	}
}
