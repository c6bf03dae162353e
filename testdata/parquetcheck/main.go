// Command parquetcheck reads an export of Parquet by two readers that share nothing with its
// writer, the Parquet reader of github.com/apache/arrow-go and DuckDB, and compares every value
// with the CSV that the same store gives:
//
//	parquetcheck DIR ORDINATES.csv MEASURES.csv RECORDS.csv
//
// A number in the CSV has the fewest digits that restore the double, so texts are equal where
// bits are. Names that begin as a formula does would differ, since CSV has an apostrophe before
// them. It is a module of its own: DuckDB needs a C++ compiler.
package main

import (
	"encoding/csv"
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
	if len(os.Args) != 5 {
		fmt.Fprintln(os.Stderr, "usage: parquetcheck DIR ORDINATES.csv MEASURES.csv RECORDS.csv")
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
		if err != nil {
			return err
		}
		for by, read := range map[string]reader{"arrow-go": readArrow, "DuckDB": readDuckDB} {
			got, err := read(dir, name, want.columns)
			if err == nil {
				err = compare(got, want)
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

// The cells of the CSV.
func number(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }

func moment(at time.Time) string { return at.UTC().Format(time.RFC3339Nano) }

// finding is a finding's cell, of its columns flag, of and words.
func finding(flag, of, words string) string {
	if of == "conditioned" {
		flag += " behind the recipe"
	}
	return flag + ": " + words
}

func list(words []string) string { return strings.Join(words, "; ") }
