package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/pipeline/beside"
	"swaybook/query"
)

func exportParquetCommand() *cli.Command {
	return &cli.Command{
		Name:      "parquet",
		Usage:     "a folder of Parquet files: ordinates by damping and period, measures, records, events",
		ArgsUsage: "DIR",
		Description: "DIR has a folder a table, ordinates a folder a damping below it, sorted by period, record and component. Units stand in\n" +
			"the metadata of the fields, SI but for g (9.80665 m/s²). A DIR that is there and empty is\n" +
			"filled, another is a new folder; either has all tables in the end, or is as it was.",
		Flags: append(exportFlags(),
			&cli.BoolFlag{Name: "force", DisableDefaultText: true, Usage: "replace DIR if it holds such an export"},
		),
		Action: func(c *cli.Context) error {
			o, err := newParquetOptions(c)
			if err != nil {
				return err
			}
			return withStore(c, func(ctx context.Context, store *db.Store) error {
				return runExportParquet(ctx, store, o, c.App.Writer, c.App.ErrWriter)
			})
		},
	}
}

type parquetOptions struct {
	question query.DatasetQuestion
	dir      string
	force    bool
}

func newParquetOptions(c *cli.Context) (o parquetOptions, err error) {
	o.dir, o.force = c.Args().First(), c.Bool("force")
	if c.NArg() != 1 || o.dir == "" {
		return o, usagef("export parquet needs one DIR")
	}
	o.question = query.DatasetQuestion{Program: c.App.Name, Version: version}
	o.question.ExportQuestion, err = newExportQuestion(c)
	return o, err
}

// runExportParquet writes the folder and says what is in it.
func runExportParquet(ctx context.Context, store *db.Store, o parquetOptions, w, stderr io.Writer) error {
	var mayReplace func(string, fs.DirEntry) error
	if o.force {
		mayReplace = query.IsOfDataset
	}
	var summary *query.DatasetSummary
	err := beside.WriteFolder(ctx, o.dir, mayReplace, func(folder string) (err error) {
		summary, err = o.question.Write(ctx, store, folder)
		return err
	})
	if errors.Is(err, beside.ErrNotEmpty) && !o.force {
		return fmt.Errorf("%w; --force replaces what an export left", err)
	}
	if left, ok := errors.AsType[*beside.LeftError](err); ok {
		fmt.Fprintf(stderr, "note: %v\n", left)
	} else if err != nil {
		return err
	}
	fmt.Fprint(stderr, summary.Selection.Remarks())
	_, err = fmt.Fprintf(w, "%s: %d ordinates of %d spectra, %d records, %d events; %d files, %.1f MB\n",
		o.dir, summary.Ordinates, summary.Selection.Spectra, summary.Selection.Records, summary.Events, summary.Files, float64(summary.Bytes)/1e6)
	return err
}
