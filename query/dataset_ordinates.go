package query

import (
	"context"
	"io"
	"path/filepath"
	"strconv"
	"unique"

	"swaybook/query/parquet"
)

// ordinateRow is a row of the table of ordinates. Its damping is in the name of its folder,
// and nowhere else: some readers refuse a column that is in both.
type ordinateRow struct {
	Record    string  `parquet:"record,dict"`
	Component string  `parquet:"component,dict"`
	PeriodS   float64 `parquet:"period_s,dict" unit:"s"`
	SD        float64 `parquet:"sd_m" unit:"m"`
	PSV       float64 `parquet:"psv_m_s" unit:"m/s"`
	PSA       float64 `parquet:"psa_g" unit:"g"`
}

// datasetSizes bound what is held at a time, in bytes, and what a reader takes or skips as one,
// in rows. A group has as many whole periods as there is room for, one at least, so that who
// asks for a period reads little else; a period with too many rows is several. A file has
// whole periods too; several let several readers, and writers, work.
type datasetSizes struct {
	tileBytes   int // large against the cost of reading or writing a tile, small against a process
	columnBytes int // of ordinates that each writer of a file holds

	groupRows, mostGroupRows, fileRows int
}

var defaultSizes = datasetSizes{tileBytes: 2 << 20, columnBytes: 4 << 20, groupRows: 1 << 16, mostGroupRows: 1 << 18, fileRows: 1 << 23}

// ordinateFile is the periods of one damping that a file has.
type ordinateFile struct {
	damping, from, to int // positions
	number            int // among those of the damping
}

// writeOrdinates writes all dampings, of motions in the order of record and component, as
// many files at a time as there are processors.
func (d *dataset) writeOrdinates(ctx context.Context, t *tiles, place []int, motions []motion) error {
	names := namesOf(motions)
	files := d.sizes.files(len(t.dampings), len(t.periods), len(motions))
	err := inParallel(ctx, len(files), func(ctx context.Context, i int) error {
		f := files[i]
		zeta := strconv.FormatFloat(t.dampings[f.damping], 'f', -1, 64)
		head := d.head(tableOrdinates, parquet.Property{Key: "damping", Value: zeta})
		head.SortedBy = []string{"period_s", "record", "component"}
		return d.writeFile(filepath.Join(tableOrdinates, "damping="+zeta, partName(f.number)), func(w io.Writer) error {
			o := ordinateWriter{Writer: parquet.NewWriter[ordinateRow](w, head), sizes: d.sizes, tiles: t, place: place, names: names}
			return o.write(ctx, f)
		})
	})
	d.summary.Ordinates = len(t.dampings) * len(t.periods) * len(motions)
	return err
}

// namesOf are rows without numbers. They are read once for each ordinate, where texts that lie
// scattered in memory would cost a fifth of all time: each is there once, in the order of motions.
func namesOf(motions []motion) []ordinateRow {
	names := make([]ordinateRow, len(motions))
	for i := range motions {
		names[i] = ordinateRow{Record: motions[i].record(), Component: motions[i].role}
	}
	parquet.Clean(names)
	for i := range names {
		n := &names[i]
		n.Record, n.Component = unique.Make(n.Record).Value(), unique.Make(n.Component).Value()
	}
	return names
}

// files divides the periods of every damping among files.
func (s datasetSizes) files(dampings, periods, motions int) []ordinateFile {
	each := max(1, s.fileRows/motions)
	var files []ordinateFile
	for damping := range dampings {
		for from := 0; from < periods; from += each {
			files = append(files, ordinateFile{damping: damping, from: from, to: min(from+each, periods), number: from / each})
		}
	}
	return files
}

// ordinateWriter writes one file.
type ordinateWriter struct {
	*parquet.Writer[ordinateRow]
	sizes datasetSizes
	tiles *tiles
	place []int
	names []ordinateRow // of each motion, without numbers
	rows  []ordinateRow
	group int // rows
}

func (o *ordinateWriter) write(ctx context.Context, f ordinateFile) error {
	n := len(o.names)
	o.rows = make([]ordinateRow, 0, min(512, o.sizes.mostGroupRows))
	columns := make([][]float64, min(f.to-f.from, max(1, o.sizes.columnBytes/(8*n))))
	for p := range columns {
		columns[p] = make([]float64, n)
	}
	for from := f.from; from < f.to; from += len(columns) {
		some := columns[:min(len(columns), f.to-from)]
		if err := o.tiles.columns(some, o.place, f.damping, from); err != nil {
			return err
		}
		for p, sd := range some {
			if err := ctx.Err(); err != nil {
				return err
			}
			if err := o.period(o.tiles.periods[from+p], sd); err != nil {
				return err
			}
		}
	}
	return o.Close()
}

// period writes the rows of a period.
func (o *ordinateWriter) period(periodS float64, sd []float64) error {
	w := omega(periodS)
	if o.group > 0 && o.group+len(sd) > o.sizes.groupRows {
		if err := o.endGroup(); err != nil {
			return err
		}
	}
	for from := 0; from < len(sd); from += cap(o.rows) {
		if o.group >= o.sizes.mostGroupRows {
			if err := o.endGroup(); err != nil {
				return err
			}
		}
		o.rows = o.rows[:0]
		for i := from; i < min(from+cap(o.rows), len(sd)); i++ {
			row := o.names[i]
			row.PeriodS, row.SD, row.PSV, row.PSA = periodS, sd[i], MeasurePSV.of(sd[i], w), MeasurePSA.of(sd[i], w)
			o.rows = append(o.rows, row)
		}
		if err := o.Write(o.rows); err != nil {
			return err
		}
		o.group += len(o.rows)
	}
	return nil
}

func (o *ordinateWriter) endGroup() error {
	o.group = 0
	return o.EndGroup()
}
