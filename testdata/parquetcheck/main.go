// Command parquetcheck reads an export of Parquet by two readers that share nothing with its
// writer, the Parquet reader of github.com/apache/arrow-go and DuckDB, and compares every value
// with the CSV that the same store gives:
//
//	parquetcheck DIR ORDINATES.csv MEASURES.csv RECORDS.csv RECORDS.json
//
// A number in the CSV has the fewest digits that restore the double, so texts are equal where
// bits are; findings, of which the CSV has words only, are compared with the JSON. An empty cell
// stands for null and for nothing else. Names that begin as a formula does would differ, since CSV
// has an apostrophe before them. It is a module of its own: DuckDB needs a C++ compiler.
package main

import (
	"cmp"
	"encoding/csv"
	"encoding/json"
	"errors"
	"fmt"
	"os"
	"slices"
	"strconv"
	"strings"
	"time"
)

// table is rows of cells as the CSV has them.
type table struct {
	columns []string
	rows    [][]string
}

// reader reads a table of an export, columns in this order, rows in any.
type reader func(dir, name string, columns []string) (*table, error)

func main() {
	if len(os.Args) != 6 {
		fmt.Fprintln(os.Stderr, "usage: parquetcheck DIR ORDINATES.csv MEASURES.csv RECORDS.csv RECORDS.json")
		os.Exit(2)
	}
	if err := run(os.Args[1], os.Args[2:]); err != nil {
		fmt.Fprintln(os.Stderr, "parquetcheck:", err)
		os.Exit(1)
	}
}

func run(dir string, files []string) error {
	var errs []error
	for i, name := range []string{"ordinates", "measures", "records"} {
		want, err := readCSV(files[i])
		if err == nil && name == "records" {
			err = want.takeFindings(files[3])
		}
		if err != nil {
			return err
		}
		for by, read := range map[string]reader{"arrow-go": readArrow, "DuckDB": readDuckDB} {
			got, err := read(dir, name, want.columns)
			if err == nil {
				err = cmp.Or(inOrder(got), compare(got, want))
			}
			if err != nil {
				errs = append(errs, fmt.Errorf("%s by %s: %w", name, by, err))
				continue
			}
			fmt.Printf("%s by %s: %d rows of %d columns are those of the CSV\n", name, by, len(got.rows), len(got.columns))
		}
		if name == "ordinates" {
			errs = append(errs, checkSkipping(dir, want), checkPeriod(dir, want))
		}
		if name == "records" {
			errs = append(errs, checkEvents(dir, want))
		}
	}
	return errors.Join(append(errs, checkMetadata(dir))...)
}

func readCSV(file string) (*table, error) {
	f, err := os.Open(file)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		return nil, err
	}
	if len(rows) < 2 {
		return nil, fmt.Errorf("%s holds no rows", file)
	}
	return &table{rows[0], rows[1:]}, nil
}

// takeFindings puts findings in the place of their words, by the JSON of the same rows.
func (t *table) takeFindings(file string) error {
	text, err := os.ReadFile(file)
	if err != nil {
		return err
	}
	var rows []struct {
		Record, Component string
		Quality           []struct {
			Flag, Of     string
			Value, Bound float64
			Unit         *string
			Words        string
		}
	}
	if err := json.Unmarshal(text, &rows); err != nil {
		return fmt.Errorf("%s: %w", file, err)
	}
	cells, n := map[[2]string]string{}, 0
	for _, r := range rows {
		var words []string
		for _, f := range r.Quality {
			unit := ""
			if f.Unit != nil {
				unit = word(*f.Unit)
			}
			words = append(words, finding(map[string]string{"flag": f.Flag, "of": f.Of, "value": number(f.Value), "bound": number(f.Bound), "unit": unit, "words": f.Words}))
			n++
		}
		cells[[2]string{r.Record, r.Component}] = list(words)
	}
	if n == 0 || len(cells) != len(t.rows) {
		return fmt.Errorf("%s has %d findings of %d rows, want some of %d", file, n, len(cells), len(t.rows))
	}
	record, component, quality := slices.Index(t.columns, "record"), slices.Index(t.columns, "component"), slices.Index(t.columns, "quality")
	for _, row := range t.rows {
		row[quality] = cells[[2]string{row[record], row[component]}]
	}
	return nil
}

// inOrder checks that rows come sorted by period, record and component, at each damping.
func inOrder(t *table) error {
	var columns []int
	for _, name := range []string{"damping", "period_s", "record", "component"} {
		if at := slices.Index(t.columns, name); at >= 0 {
			columns = append(columns, at)
		}
	}
	dampings := map[string]bool{}
	for i := 1; i < len(t.rows); i++ {
		a, b := t.rows[i-1], t.rows[i]
		if t.columns[columns[0]] == "damping" && a[columns[0]] != b[columns[0]] {
			if dampings[b[columns[0]]] {
				return fmt.Errorf("rows of the damping %s stand in two places", b[columns[0]])
			}
			dampings[a[columns[0]]] = true
			continue
		}
		if compareRows(a, b, t.columns, columns) >= 0 {
			return fmt.Errorf("row %q stands before %q", a[:4], b[:4])
		}
	}
	return nil
}

func compareRows(a, b, names []string, columns []int) int {
	for _, at := range columns {
		c := cmp.Compare(a[at], b[at])
		if names[at] == "period_s" {
			x, _ := strconv.ParseFloat(a[at], 64)
			y, _ := strconv.ParseFloat(b[at], 64)
			c = cmp.Compare(x, y)
		}
		if c != 0 {
			return c
		}
	}
	return 0
}

// compare compares tables, whatever the order of their rows.
func compare(got, want *table) error {
	if len(got.rows) != len(want.rows) {
		return fmt.Errorf("%d rows, want %d", len(got.rows), len(want.rows))
	}
	slices.SortFunc(got.rows, slices.Compare)
	sorted := slices.Clone(want.rows)
	slices.SortFunc(sorted, slices.Compare)
	for i, row := range sorted {
		for j, cell := range row {
			if got.rows[i][j] != cell {
				return fmt.Errorf("row %q: %s is %q, want %q", row[:3], want.columns[j], got.rows[i][j], cell)
			}
		}
	}
	return nil
}

// where returns the rows of which a cell is this.
func (t *table) where(column, cell string) *table {
	at := slices.Index(t.columns, column)
	return &table{t.columns, slices.DeleteFunc(slices.Clone(t.rows), func(row []string) bool { return row[at] != cell })}
}

// checkEvents compares the table of events with what is said of them beside records.
func checkEvents(dir string, records *table) error {
	columns := []string{"event", "event_name", "origin", "magnitude", "magnitude_type", "depth_km", "event_latitude", "event_longitude"}
	want := &table{columns: columns}
	seen := map[string]bool{}
	for _, row := range records.rows {
		var cells []string
		for _, c := range columns {
			cells = append(cells, row[slices.Index(records.columns, c)])
		}
		if key := strings.Join(cells, "\x00"); cells[0] != "" && !seen[key] {
			seen[key] = true
			want.rows = append(want.rows, cells)
		}
	}
	for by, read := range map[string]reader{"arrow-go": readArrow, "DuckDB": readDuckDB} {
		got, err := read(dir, "events", columns)
		if err == nil {
			err = compare(got, want)
		}
		if err != nil {
			return fmt.Errorf("events by %s: %w", by, err)
		}
	}
	fmt.Printf("events: %d are those of the records\n", len(want.rows))
	return nil
}

// The cells of the CSV, but for findings.
func number(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }

func moment(at time.Time) string { return at.UTC().Format(time.RFC3339Nano) }

// word is a text's cell: no text, which stands for what is not known, is another one.
func word(text string) string {
	if text == "" {
		return `""`
	}
	return text
}

// finding is a finding with all of its columns.
func finding(of map[string]string) string {
	return fmt.Sprintf("%s (%s): %s beyond %s [%s], %s", of["flag"], of["of"], of["value"], of["bound"], of["unit"], of["words"])
}

func list(words []string) string { return strings.Join(words, "; ") }
