package main

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"

	"github.com/apache/arrow-go/v18/arrow"
	"github.com/apache/arrow-go/v18/arrow/array"
	"github.com/apache/arrow-go/v18/arrow/memory"
	"github.com/apache/arrow-go/v18/parquet/file"
	"github.com/apache/arrow-go/v18/parquet/metadata"
	"github.com/apache/arrow-go/v18/parquet/pqarrow"
)

// parts are the files of a table.
func parts(dir, name string) (files []string, err error) {
	err = filepath.WalkDir(filepath.Join(dir, name), func(path string, e fs.DirEntry, err error) error {
		if err == nil && !e.IsDir() {
			files = append(files, path)
		}
		return err
	})
	return files, err
}

// damping is what the folder of a file of ordinates is named for.
func damping(path string) string {
	_, of, _ := strings.Cut(filepath.Base(filepath.Dir(path)), "damping=")
	return of
}

func readArrow(dir, name string, columns []string) (*table, error) {
	files, err := parts(dir, name)
	if err != nil {
		return nil, err
	}
	out := &table{columns: columns}
	for _, path := range files {
		rows, err := readFile(path, columns)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", path, err)
		}
		out.rows = append(out.rows, rows...)
	}
	return out, nil
}

func readFile(path string, columns []string) (rows [][]string, err error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	t, err := pqarrow.ReadTable(context.Background(), f, nil, pqarrow.ArrowReadProperties{}, memory.DefaultAllocator)
	if err != nil {
		return nil, err
	}
	defer t.Release()
	rows = make([][]string, t.NumRows())
	for i := range rows {
		rows[i] = make([]string, len(columns))
	}
	for j, name := range columns {
		if name == "damping" && damping(path) != "" {
			for i := range rows {
				rows[i][j] = damping(path)
			}
			continue
		}
		at := t.Schema().FieldIndices(name)
		if len(at) != 1 {
			return nil, fmt.Errorf("%d columns %s", len(at), name)
		}
		i := 0
		for _, chunk := range t.Column(at[0]).Data().Chunks() {
			for k := range chunk.Len() {
				if rows[i][j], err = arrowCell(chunk, k); err != nil {
					return nil, fmt.Errorf("%s: %w", name, err)
				}
				i++
			}
		}
	}
	return rows, nil
}

func arrowCell(a arrow.Array, i int) (string, error) {
	if a.IsNull(i) {
		return "", nil
	}
	switch a := a.(type) {
	case *array.String:
		return word(a.Value(i)), nil
	case *array.Dictionary:
		return arrowCell(a.Dictionary(), a.GetValueIndex(i))
	case *array.Float64:
		return number(a.Value(i)), nil
	case *array.Int64:
		return fmt.Sprint(a.Value(i)), nil
	case *array.Timestamp:
		return moment(a.Value(i).ToTime(arrow.Microsecond)), nil
	case *array.Struct:
		of := map[string]string{}
		for k, f := range a.DataType().(*arrow.StructType).Fields() {
			cell, err := arrowCell(a.Field(k), i)
			if err != nil {
				return "", err
			}
			of[f.Name] = cell
		}
		return finding(of), nil
	case *array.List:
		var words []string
		from, to := a.ValueOffsets(i)
		for k := from; k < to; k++ {
			word, err := arrowCell(a.ListValues(), int(k))
			if err != nil {
				return "", err
			}
			words = append(words, word)
		}
		return list(words), nil
	}
	return "", fmt.Errorf("an array of type %s", a.DataType())
}

// units are those that fields must have, by the ends of their names; the longest counts.
var units = map[string]string{"_s": "s", "_m": "m", "_m_s": "m/s", "_m_s2": "m/s²", "_g": "g", "_km": "km", "_deg": "deg", "_hz": "Hz", "latitude": "deg", "longitude": "deg"}

// checkMetadata checks that every number with a unit has it in the field of the Arrow schema and
// beside the schema, and that files say where they come from.
func checkMetadata(dir string) error {
	files, err := parts(dir, ".")
	if err != nil {
		return err
	}
	for _, path := range files {
		if err := checkFile(path); err != nil {
			return fmt.Errorf("%s: %w", path, err)
		}
	}
	fmt.Printf("units and provenance: %d files have them\n", len(files))
	return nil
}

func checkFile(path string) error {
	r, err := file.OpenParquetFile(path, false)
	if err != nil {
		return err
	}
	defer r.Close()
	own := r.MetaData().KeyValueMetadata()
	var errs []error
	for _, key := range []string{"run", "recipe", "recipe_sha256", "grid_sha256", "solver", "selection", "caution"} {
		if own.FindValue(key) == nil {
			errs = append(errs, fmt.Errorf("no %s in its metadata", key))
		}
	}
	a, err := pqarrow.NewFileReader(r, pqarrow.ArrowReadProperties{}, memory.DefaultAllocator)
	if err != nil {
		return err
	}
	schema, err := a.Schema()
	if err != nil {
		return err
	}
	for _, f := range schema.Fields() {
		unit, end := "", ""
		for e, u := range units {
			if strings.HasSuffix(f.Name, e) && len(e) > len(end) {
				unit, end = u, e
			}
		}
		if hasDictionaryInside(f.Type) {
			errs = append(errs, fmt.Errorf("%s is a %s: not all readers take dictionaries inside other types", f.Name, f.Type))
		}
		got, _ := f.Metadata.GetValue("unit")
		beside := own.FindValue("unit." + f.Name)
		if got != unit || unit != "" && (beside == nil || *beside != unit) {
			errs = append(errs, fmt.Errorf("%s is in %q, want %q", f.Name, got, unit))
		}
	}
	return errors.Join(errs...)
}

// hasDictionaryInside reports whether a type is made of others, of which one is a dictionary.
func hasDictionaryInside(of arrow.DataType) bool {
	nested, ok := of.(arrow.NestedType)
	return ok && slices.ContainsFunc(nested.Fields(), func(f arrow.Field) bool {
		return f.Type.ID() == arrow.DICTIONARY || hasDictionaryInside(f.Type)
	})
}

// checkSkipping checks that who asks for one period may skip groups of rows by what the file
// says of them, so there must be several at a damping, of 65,536 rows each.
func checkSkipping(dir string, all *table) error {
	files, err := parts(dir, "ordinates")
	if err != nil {
		return err
	}
	shortest, err := strconv.ParseFloat(all.rows[0][3], 64)
	if err != nil {
		return err
	}
	groups, wanted := 0, 0
	for _, path := range files {
		if damping(path) != all.rows[0][2] {
			continue
		}
		r, err := file.OpenParquetFile(path, false)
		if err != nil {
			return err
		}
		column := slices.Index(all.columns, "period_s") - 1 // without damping
		for i := range r.NumRowGroups() {
			chunk, err := r.MetaData().RowGroup(i).ColumnChunk(column)
			if err != nil {
				return errors.Join(err, r.Close())
			}
			s, err := chunk.Statistics()
			if err != nil {
				return errors.Join(err, r.Close())
			}
			of := s.(*metadata.Float64Statistics)
			groups++
			if of.Min() <= shortest && shortest <= of.Max() {
				wanted++
			}
		}
		if err := r.Close(); err != nil {
			return err
		}
	}
	switch {
	case groups < 2:
		return errors.New("the export is too small to tell whether readers can skip rows: it has one group at a damping")
	case wanted < 1 || wanted == groups:
		return fmt.Errorf("of %d groups of rows %d may hold one period", groups, wanted)
	}
	fmt.Printf("groups of rows: %d of %d may hold the shortest period\n", wanted, groups)
	return nil
}
