package parquet

import (
	"io"
	"reflect"
	"strings"

	pq "github.com/parquet-go/parquet-go"
	"github.com/parquet-go/parquet-go/compress/zstd"
)

// Property is something that a file says of itself, as key-value metadata.
type Property struct{ Key, Value string }

// Head is what a file says of all of its rows.
type Head struct {
	Program, Version string // that wrote it
	Table            string // of which it has rows, the name of its schema
	SortedBy         []string
	Properties       []Property // each key once
}

// UnitKey is the key of a unit in the metadata of a field of the Arrow schema; before a
// column's name and a point, UnitPrefix, it is one in the file's.
const (
	UnitKey    = "unit"
	UnitPrefix = UnitKey + "."
)

// arrowKey is where readers of Arrow look for the schema that a file was made of.
const arrowKey = "ARROW:schema"

// mostRows is the number of rows after which a writer begins a new group by itself.
const mostRows = 1 << 18

// codec is shared by all writers, since each encoder that it keeps takes some 10 MB.
var codec = &zstd.Codec{Level: zstd.SpeedFastest, Concurrency: 1}

// Writer writes the rows of one file.
type Writer[T any] struct{ rows *pq.GenericWriter[T] }

// NewWriter begins a file of the columns that the fields of T are.
func NewWriter[T any](w io.Writer, head Head) *Writer[T] {
	schema, units := pq.NewSchema(head.Table, pq.SchemaOf(*new(T))), unitsOf(reflect.TypeFor[T](), "")
	options := []pq.WriterOption{
		schema,
		pq.CreatedBy(head.Program, head.Version, "release"),
		pq.DataPageVersion(1),
		pq.DataPageStatistics(false), // a column index has them
		pq.Compression(codec),
		pq.MaxRowsPerRowGroup(mostRows),
		pq.KeyValueMetadata(arrowKey, arrowSchema(schema, units)),
	}
	for _, p := range head.Properties {
		options = append(options, pq.KeyValueMetadata(p.Key, p.Value))
	}
	for column, unit := range units {
		options = append(options, pq.KeyValueMetadata(UnitPrefix+column, unit))
	}
	var sorted []pq.SortingColumn
	for _, column := range head.SortedBy {
		sorted = append(sorted, pq.Ascending(column))
	}
	options = append(options, pq.SortingWriterConfig(pq.SortingColumns(sorted...)))
	return &Writer[T]{pq.NewGenericWriter[T](w, options...)}
}

// Write writes rows, which must come in the order of the head's SortedBy.
func (w *Writer[T]) Write(rows []T) error {
	_, err := w.rows.Write(rows)
	return err
}

// EndGroup ends a group of rows: a reader that wants none of them skips it by the least and
// greatest values of its columns.
func (w *Writer[T]) EndGroup() error { return w.rows.Flush() }

// Close ends the file.
func (w *Writer[T]) Close() error { return w.rows.Close() }

// unitsOf are the units of columns by their names, of those that are inside others joined by
// points.
func unitsOf(t reflect.Type, prefix string) map[string]string {
	units := map[string]string{}
	for _, f := range reflect.VisibleFields(t) {
		name, _, _ := strings.Cut(f.Tag.Get("parquet"), ",")
		if unit, ok := f.Tag.Lookup("unit"); ok {
			units[prefix+name] = unit
		}
		if f.Type.Kind() == reflect.Slice && f.Type.Elem().Kind() == reflect.Struct {
			for inside, unit := range unitsOf(f.Type.Elem(), name+".") {
				units[prefix+inside] = unit
			}
		}
	}
	return units
}

// Clean makes all texts of rows UTF-8, which readers insist on, and which a path need not be:
// bytes that are none become U+FFFD.
func Clean[T any](rows []T) {
	for i := range rows {
		cleanValue(reflect.ValueOf(&rows[i]).Elem())
	}
}

func cleanValue(v reflect.Value) {
	switch v.Kind() {
	case reflect.String:
		if text := strings.ToValidUTF8(v.String(), "\uFFFD"); text != v.String() {
			v.SetString(text)
		}
	case reflect.Pointer:
		if !v.IsNil() && v.Elem().Kind() == reflect.String {
			cleanValue(v.Elem())
		}
	case reflect.Slice:
		for i := range v.Len() {
			cleanValue(v.Index(i))
		}
	case reflect.Struct:
		for i := range v.NumField() {
			if v.Type().Field(i).IsExported() {
				cleanValue(v.Field(i))
			}
		}
	}
}
