package query

import (
	"bytes"
	"cmp"
	"context"
	"errors"
	"fmt"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"runtime"
	"slices"
	"strconv"
	"strings"
	"testing"

	pq "github.com/parquet-go/parquet-go"

	"swaybook/db"
)

// writeDataset writes a dataset into a new folder.
func writeDataset(t *testing.T, store *db.Store, q DatasetQuestion) (string, *DatasetSummary) {
	t.Helper()
	folder := t.TempDir()
	summary, err := q.Write(t.Context(), store, folder)
	if err != nil {
		t.Fatal(err)
	}
	return folder, summary
}

// partsOf are the paths of the files in a folder, in it.
func partsOf(t *testing.T, folder string) (paths []string) {
	t.Helper()
	err := eachPart(folder, func(path string, _ fs.DirEntry) error {
		paths = append(paths, filepath.ToSlash(path))
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	return paths
}

func readPart[T any](t *testing.T, folder, path string) []T {
	t.Helper()
	rows, err := pq.ReadFile[T](filepath.Join(folder, path))
	if err != nil {
		t.Fatalf("%s: %v", path, err)
	}
	return rows
}

// dampedRow is a row of ordinates with what the name of its folder says.
type dampedRow struct {
	damping string
	ordinateRow
}

// ordinatesIn are the ordinates of a dataset, in the order of its files. Those of each damping
// must be sorted.
func ordinatesIn(t *testing.T, folder string) (rows []dampedRow) {
	t.Helper()
	for _, path := range partsOf(t, folder) {
		if !strings.HasPrefix(path, "ordinates/") {
			continue
		}
		damping := strings.TrimPrefix(strings.Split(path, "/")[1], "damping=")
		for _, row := range readPart[ordinateRow](t, folder, path) {
			rows = append(rows, dampedRow{damping, row})
		}
	}
	for i := 1; i < len(rows); i++ {
		a, b := rows[i-1], rows[i]
		if a.damping == b.damping && cmp.Or(cmp.Compare(a.PeriodS, b.PeriodS), cmp.Compare(a.Record, b.Record), cmp.Compare(a.Component, b.Component)) >= 0 {
			t.Fatalf("row %+v stands before %+v", a, b)
		}
	}
	return rows
}

// asCSV writes ordinates as an export of CSV has them.
func asCSV(rows []dampedRow) string {
	slices.SortFunc(rows, func(a, b dampedRow) int {
		return cmp.Or(cmp.Compare(a.Record, b.Record), cmp.Compare(a.Component, b.Component), cmp.Compare(number(a.damping), number(b.damping)), cmp.Compare(a.PeriodS, b.PeriodS))
	})
	text := []byte(exportHeader)
	for _, r := range rows {
		text = csvText(append(csvText(text, r.Record), ','), r.Component)
		for _, x := range []float64{number(r.damping), r.PeriodS, r.SD, r.PSV, r.PSA} {
			text = strconv.AppendFloat(append(text, ','), x, 'g', -1, 64)
		}
		text = append(text, '\n')
	}
	return string(text)
}

func number(text string) float64 {
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		panic(err)
	}
	return x
}

// TestDatasetEqualsCSV: both exports hold the same ordinates, whatever is asked for.
func TestDatasetEqualsCSV(t *testing.T) {
	store := newStore(t, handGrid, append(handRecords(), hostileRecords()...))
	for name, q := range map[string]ExportQuestion{
		"all":            {},
		"siting":         {Selection: Selection{Siting: "structure"}},
		"expression":     {Selection: Selection{Where: `magnitude > 6`}},
		"rotated":        {Selection: Selection{Component: ComponentRotD100}},
		"one damping":    {Dampings: []float64{0.05}},
		"off the grid":   {Dampings: []float64{0.0325, 0.05, 1e-7}},
		"damping twice":  {Dampings: []float64{0.05, 0.05}},
		"band":           {Band: Band{ToS: 2}},
		"some of a role": {Selection: Selection{Where: `record in ["R2", "R5"]`}},
	} {
		t.Run(name, func(t *testing.T) {
			want, summary := export(t, store, q)
			folder, got := writeDataset(t, store, DatasetQuestion{ExportQuestion: q})
			rows := ordinatesIn(t, folder)
			if text := asCSV(rows); text != want {
				t.Errorf("ordinates\n%s\nwant\n%s", text, want)
			}
			if got.Ordinates != len(rows) || got.Selection.Spectra != summary.Selection.Spectra || got.Files != len(partsOf(t, folder)) {
				t.Errorf("%d ordinates of %d spectra in %d files, want %d of %d in %d", got.Ordinates, got.Selection.Spectra, got.Files,
					len(rows), summary.Selection.Spectra, len(partsOf(t, folder)))
			}
			if err := eachPart(folder, IsOfDataset); err != nil {
				t.Error(err)
			}
		})
	}
}

// hostileRecords have names that are none, and one event that lacks all else.
func hostileRecords() []inventedRecord {
	return []inventedRecord{
		{code: "quote\"'`,;\nline\ttab", siting: "ground", event: &db.Event{Code: "Q\r\n\"'"}, components: pair(1, 1)},
		{code: "=1+1", siting: "ground", event: quakeA, components: pair(2, 3)},
		{code: "é\U0001F30B 東/..\\%41", siting: "free-field", station: &db.Station{Network: "ZX", Code: "\u202e", Name: "<b>&"}, components: pair(3, 3)},
	}
}

// TestDatasetLayout: what is where, and that nothing else is.
func TestDatasetLayout(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	folder, _ := writeDataset(t, store, DatasetQuestion{})
	want := []string{
		"events/part-0001.parquet", "measures/part-0001.parquet", "ordinates/damping=0.02/part-0001.parquet", "ordinates/damping=0.05/part-0001.parquet",
		"records/part-0001.parquet",
	}
	if got := partsOf(t, folder); !slices.Equal(got, want) {
		t.Errorf("files %v, want %v", got, want)
	}
	text, err := os.ReadFile(filepath.Join(folder, want[3]))
	if err != nil {
		t.Fatal(err)
	}
	f, err := pq.OpenFile(bytes.NewReader(text), int64(len(text)))
	if err != nil {
		t.Fatal(err)
	}
	recipe := db.Recipe{Steps: "x"}
	if err := store.View(t.Context(), func(s *db.Snapshot) error { recipe = s.Generation.Recipe; return nil }); err != nil {
		t.Fatal(err)
	}
	for key, want := range map[string]string{
		"table": "ordinates", "damping": "0.05", "run": "2", "recipe": "as-delivered", "recipe_sha256": recipe.Hash(), "grid_sha256": handGrid.Hash(),
		"selection": "6 records, 19 spectra, 3 events; component all; siting all", "caution": Caution, "unit.psa_g": "g",
	} {
		if got, ok := f.Lookup(key); !ok || got != want {
			t.Errorf("%s is %q, want %q", key, got, want)
		}
	}
}

// TestDatasetParts: tiles, files and groups leave no seam, and readers find the borders of
// periods where they look for them.
func TestDatasetParts(t *testing.T) {
	var records []inventedRecord
	for i := range 60 { // codes in another order than ids
		records = append(records, inventedRecord{code: fmt.Sprintf("P%02d", (i*17)%60), siting: "ground", components: pair(float64(i+1), 0.5)})
	}
	store := newStore(t, handGrid, records)
	whole, _ := export(t, store, ExportQuestion{})
	for _, sizes := range []datasetSizes{
		{tileBytes: 8 * 4 * 7, columnBytes: 1, groupRows: 1, mostGroupRows: 50, fileRows: 1},
		{tileBytes: 1, columnBytes: 8 * 240 * 3, groupRows: 500, mostGroupRows: 1000, fileRows: 600},
		{tileBytes: 1 << 20, columnBytes: 1 << 20, groupRows: 480, mostGroupRows: 480, fileRows: 1 << 20},
	} {
		folder := t.TempDir()
		err := store.View(t.Context(), func(s *db.Snapshot) error {
			q, err := (ExportQuestion{}).withDefaults()
			if err != nil {
				return err
			}
			d := dataset{question: DatasetQuestion{ExportQuestion: q}, snapshot: s, folder: folder, sizes: sizes}
			return d.write(t.Context())
		})
		if err != nil {
			t.Fatal(err)
		}
		if text := asCSV(ordinatesIn(t, folder)); text != whole {
			t.Errorf("%+v: other ordinates than as one", sizes)
		}
		for _, path := range partsOf(t, folder) {
			if strings.HasPrefix(path, "ordinates/") {
				checkGroups(t, folder, path, sizes)
			}
		}
	}
}

// checkGroups checks that groups of a file are of whole periods, or of one.
func checkGroups(t *testing.T, folder, path string, sizes datasetSizes) {
	t.Helper()
	text, err := os.ReadFile(filepath.Join(folder, path))
	if err != nil {
		t.Fatal(err)
	}
	f, err := pq.OpenFile(bytes.NewReader(text), int64(len(text)))
	if err != nil {
		t.Fatal(err)
	}
	for i, g := range f.Metadata().RowGroups {
		s := g.Columns[2].MetaData.Statistics
		least, greatest := math.Float64frombits(leUint64(s.MinValue)), math.Float64frombits(leUint64(s.MaxValue))
		periods := 0
		for _, p := range handGrid.PeriodsS {
			if least <= p && p <= greatest {
				periods++
			}
		}
		switch {
		case periods == 0 || g.NumRows > int64(sizes.mostGroupRows):
			t.Errorf("%s: group %d has %d rows of %d periods", path, i, g.NumRows, periods)
		case periods > 1 && (g.NumRows%240 != 0 || g.NumRows > int64(sizes.groupRows)):
			t.Errorf("%s: group %d has %d rows of %d periods with 240 each", path, i, g.NumRows, periods)
		}
	}
}

func leUint64(b []byte) (x uint64) {
	for i := len(b) - 1; i >= 0; i-- {
		x = x<<8 | uint64(b[i])
	}
	return x
}

// TestDatasetsAreEqual: the same question of the same store gives the same bytes, whatever works
// on it.
func TestDatasetsAreEqual(t *testing.T) {
	store := newStore(t, handGrid, append(handRecords(), hostileRecords()...))
	first, _ := writeDataset(t, store, DatasetQuestion{Program: "program", Version: "1"})
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
	second, _ := writeDataset(t, store, DatasetQuestion{Program: "program", Version: "1"})
	if a, b := partsOf(t, first), partsOf(t, second); !slices.Equal(a, b) {
		t.Errorf("files %v and %v", a, b)
	}
	for _, path := range partsOf(t, first) {
		a, errA := os.ReadFile(filepath.Join(first, path))
		b, errB := os.ReadFile(filepath.Join(second, path))
		if errA != nil || errB != nil || !bytes.Equal(a, b) {
			t.Errorf("%s differs (%v, %v)", path, errA, errB)
		}
	}
}

// TestDatasetLeavesDamageOut: a spectrum that is damaged at one damping leaves its component out
// at all, as in CSV, and out of all tables.
func TestDatasetLeavesDamageOut(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	alter(t, store, loseOrdinate, 1, db.RoleH1, "R2")
	want, _ := export(t, store, ExportQuestion{})
	folder, summary := writeDataset(t, store, DatasetQuestion{})
	if text := asCSV(ordinatesIn(t, folder)); text != want || strings.Contains(text, "R2,h1") || !strings.Contains(text, "R2,h2") {
		t.Errorf("ordinates\n%s\nwant\n%s", text, want)
	}
	if !slices.Equal(summary.Selection.LeftOut, []LeftOut{{"damaged in the store", 1}}) || summary.Records != 18 || summary.Measures != 18 {
		t.Errorf("%+v", summary)
	}
}

// TestDatasetOfNothing: nothing is written of an empty selection or a wrong question, and little
// of one that is stopped.
func TestDatasetOfNothing(t *testing.T) {
	store := newStore(t, handGrid, handRecords())
	folder := t.TempDir()
	var empty *EmptyError
	if _, err := (DatasetQuestion{ExportQuestion: ExportQuestion{Selection: Selection{Where: "magnitude > 9"}}}).Write(t.Context(), store, folder); !errors.As(err, &empty) {
		t.Errorf("error %v, want that nothing is selected", err)
	}
	var mistake *UsageError
	for _, q := range []ExportQuestion{{Band: Band{FromS: 100, ToS: 200}}, {Dampings: []float64{-1}}, {Selection: Selection{Where: "("}}} {
		if _, err := (DatasetQuestion{ExportQuestion: q}).Write(t.Context(), store, folder); !errors.As(err, &mistake) {
			t.Errorf("%+v: error %v is no UsageError", q, err)
		}
	}
	stopped, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := (DatasetQuestion{}).Write(stopped, store, folder); !errors.Is(err, context.Canceled) {
		t.Errorf("error %v of a question that was stopped", err)
	}
	if got := partsOf(t, folder); len(got) != 0 {
		t.Errorf("written: %v", got)
	}
}
