package query

import (
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"swaybook/db"
	"swaybook/query/parquet"
)

// DatasetQuestion asks for what ExportQuestion does as a folder of Parquet files, with what
// is known of the motions beside it.
type DatasetQuestion struct {
	ExportQuestion
	Program, Version string // what writes the files
}

// DatasetSummary says what was written.
type DatasetSummary struct {
	Selection                            SelectionReport
	Ordinates, Measures, Records, Events int // rows
	Files                                int
	Bytes                                int64
}

// The tables of a dataset, each a folder in it.
const (
	tableOrdinates = "ordinates"
	tableMeasures  = "measures"
	tableRecords   = "records"
	tableEvents    = "events"
)

// Write writes four tables into an empty folder, each as files of a folder of its own:
// ordinates, in a folder a damping ("damping=0.05"), in the order of period, record and
// component; measures and records, a row a component, and events. What is in each is what
// ExportQuestion, MeasuresQuestion and RecordsQuestion give, to the bit, and the same question
// of the same store gives the same bytes.
//
// The memory for ordinates does not grow with the store. They go through a file in the
// folder, of eight bytes an ordinate, that is gone in the end. See ExportQuestion.Write for
// the errors; what was written until then stays.
func (q DatasetQuestion) Write(ctx context.Context, store *db.Store, folder string) (*DatasetSummary, error) {
	var err error
	if q.ExportQuestion, err = q.withDefaults(); err != nil {
		return nil, err
	}
	var summary *DatasetSummary
	err = view(ctx, store, &q.Selection, func(snapshot *db.Snapshot) error {
		d := dataset{question: q, snapshot: snapshot, folder: folder, sizes: defaultSizes}
		err := d.write(ctx)
		summary = &d.summary
		return err
	})
	return summary, err
}

// dataset is one on its way to the disk.
type dataset struct {
	question DatasetQuestion
	snapshot *db.Snapshot
	folder   string
	sizes    datasetSizes
	summary  DatasetSummary
}

func (d *dataset) write(ctx context.Context) error {
	periods, err := gridPeriods(d.snapshot, d.question.Band)
	if err != nil {
		return err
	}
	picked, err := pick(ctx, d.snapshot, d.question.Selection, db.AllDetails)
	if err != nil {
		return err
	}
	tiles, err := newTiles(d.folder, d.sizes.tileBytes, picked.motions, d.question.dampings(d.snapshot), periods)
	if err != nil {
		return err
	}
	err = d.ordinates(ctx, tiles, picked)
	if err := errors.Join(err, tiles.remove()); err != nil {
		return err
	}
	if err := d.writeTables(ctx, picked.motions); err != nil {
		return err
	}
	return d.count()
}

// ordinates fills the tiles and writes what is in them.
func (d *dataset) ordinates(ctx context.Context, t *tiles, p *picked) error {
	unfit, err := t.fill(ctx, d.snapshot)
	if err == nil {
		err = p.leaveOut(unfit)
	}
	if err != nil {
		return err
	}
	d.summary.Selection = p.report
	return d.writeOrdinates(ctx, t, places(len(t.motions), unfit), p.motions)
}

// count counts the files.
func (d *dataset) count() error {
	return eachPart(d.folder, func(_ string, e fs.DirEntry) error {
		info, err := e.Info()
		if err == nil {
			d.summary.Files, d.summary.Bytes = d.summary.Files+1, d.summary.Bytes+info.Size()
		}
		return err
	})
}

// head is what the files of a table say of themselves.
func (d *dataset) head(table string, more ...parquet.Property) parquet.Head {
	g, selection := &d.snapshot.Generation, &d.summary.Selection
	properties := []parquet.Property{
		{Key: "table", Value: table},
		{Key: "run", Value: strconv.FormatInt(d.snapshot.Edition.ID, 10)},
		{Key: "recipe", Value: g.Recipe.Name},
		{Key: "recipe_sha256", Value: g.Recipe.Hash()},
		{Key: "grid_sha256", Value: g.Grid.Hash()},
		{Key: "solver", Value: g.Solver},
		{Key: "selection", Value: selection.heading()},
		{Key: "remarks", Value: selection.Remarks()},
		{Key: "g", Value: shortest(StandardGravity) + " m/s²"},
		{Key: "caution", Value: Caution},
	}
	return parquet.Head{Program: d.question.Program, Version: d.question.Version, Table: table, Properties: append(properties, more...)}
}

// writeTable writes the only file of a table, of rows that are made of the items in turn.
func writeTable[T, I any](ctx context.Context, d *dataset, table string, sortedBy []string, items []I, row func(*I) T) (rows int, err error) {
	const atATime = 256
	head := d.head(table)
	head.SortedBy = sortedBy
	err = d.writeFile(filepath.Join(table, partName(0)), func(w io.Writer) error {
		out := parquet.NewWriter[T](w, head)
		buffer := make([]T, 0, atATime)
		for from := 0; from < len(items) && ctx.Err() == nil; from += atATime {
			buffer = buffer[:0]
			for i := from; i < min(from+atATime, len(items)); i++ {
				buffer = append(buffer, row(&items[i]))
			}
			parquet.Clean(buffer)
			if err := out.Write(buffer); err != nil {
				return err
			}
		}
		if err := ctx.Err(); err != nil {
			return err
		}
		return out.Close()
	})
	return len(items), err
}

// writeFile writes a file in the dataset's folder. It is safe for concurrent use.
func (d *dataset) writeFile(name string, fill func(io.Writer) error) error {
	path := filepath.Join(d.folder, name)
	err := os.MkdirAll(filepath.Dir(path), 0o777)
	if err == nil {
		err = createFile(path, fill)
	}
	var onDisk *fs.PathError
	switch {
	case errors.As(err, &onDisk): // names the file itself; the library's words before it do not help
		return onDisk
	case err != nil:
		return fmt.Errorf("write %s: %w", name, err)
	}
	return nil
}

func createFile(path string, fill func(io.Writer) error) error {
	f, err := os.OpenFile(path, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if err != nil {
		return err
	}
	err = fill(f)
	if errClose := f.Close(); err == nil {
		err = errClose
	}
	return err
}

// IsOfDataset returns nil of a file that DatasetQuestion.Write leaves at this path in a folder,
// and otherwise that it is none.
func IsOfDataset(path string, e fs.DirEntry) error {
	first, rest, isInside := strings.Cut(filepath.ToSlash(path), "/")
	if isInside && slices.Contains([]string{tableOrdinates, tableMeasures, tableRecords, tableEvents}, first) &&
		isPart.MatchString(rest) && e.Type().IsRegular() {
		return nil
	}
	return fmt.Errorf("it holds %s, which no export has", path)
}

// isPart is of paths of files inside the folder of a table.
var isPart = regexp.MustCompile(`^(damping=[0-9.]+/)?part-[0-9]{4,}\.parquet$`)

// eachPart calls f for what is in the folder, but for folders, with its path in it.
func eachPart(folder string, f func(path string, e fs.DirEntry) error) error {
	return filepath.WalkDir(folder, func(path string, e fs.DirEntry, err error) error {
		if err != nil || e.IsDir() {
			return err
		}
		if path, err = filepath.Rel(folder, path); err != nil {
			return err
		}
		return f(path, e)
	})
}

// partName is the name of a file of a table.
func partName(i int) string { return fmt.Sprintf("part-%04d.parquet", i+1) }
