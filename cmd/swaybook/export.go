package main

import (
	"context"
	"errors"
	"fmt"
	"io"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/query"
)

func exportCommand() *cli.Command {
	return &cli.Command{
		Name:        "export",
		Usage:       "write what the store holds for other programs",
		Subcommands: []*cli.Command{exportOrdinatesCommand(), exportMeasuresCommand(), exportParquetCommand()},
	}
}

func exportOrdinatesCommand() *cli.Command {
	return &cli.Command{
		Name:  "ordinates",
		Usage: "CSV of single spectral ordinates: record,component,damping,period_s,sd_m,psv_m_s,psa_g",
		Description: "Everything held is written, structure and borehole channels and rotd50 and rotd100 too, unless filtered. Damping is a ratio,\n" +
			"g is 9.80665 m/s². Rows are ordered by record, component, damping and period.",
		Flags: exportFlags(),
		Action: func(c *cli.Context) error {
			q, err := newExportQuestion(c)
			if err := errors.Join(err, noArguments(c)); err != nil {
				return err
			}
			return withStore(c, func(ctx context.Context, store *db.Store) error {
				return runExport(ctx, store, q, c.App.Writer, c.App.ErrWriter)
			})
		},
	}
}

func exportMeasuresCommand() *cli.Command {
	return &cli.Command{
		Name:  "measures",
		Usage: "CSV of the scalar measures: peaks, Arias intensity, cumulative absolute velocity, durations and the like",
		Description: "A row a component, of the motion as conditioned; everything held is written unless filtered. The names of the columns\n" +
			"have the units; README.md has the definitions.",
		Flags: append(exportSelectionFlags(), asOfFlag()),
		Action: func(c *cli.Context) error {
			selection, err := newSelection(c, query.ParseStoredComponent, query.ParseStoredSiting)
			if err := errors.Join(err, noArguments(c)); err != nil {
				return err
			}
			return withStore(c, func(ctx context.Context, store *db.Store) error {
				summary, err := query.MeasuresQuestion{Selection: selection}.Write(ctx, store, c.App.Writer)
				if err == nil {
					fmt.Fprint(c.App.ErrWriter, summary.Selection.Remarks())
				}
				return err
			})
		},
	}
}

// exportSelectionFlags say what of the store is written.
func exportSelectionFlags() []cli.Flag {
	return selectionFlags("all, recorded (without pairs over all directions), each, h1, h2, v, rotd50 or rotd100 (default: all)", "as for query spectrum (default: all)")
}

// exportFlags say which ordinates are.
func exportFlags() []cli.Flag {
	return append(exportSelectionFlags(),
		&cli.StringFlag{Name: "damping", Usage: "damping ratios, a `LIST` such as 5% or 2%,0.05 (default: the grid's)"},
		&cli.StringFlag{Name: "band", Usage: "periods of the grid to write, `FROM:TO` in s"},
		asOfFlag(),
	)
}

func newExportQuestion(c *cli.Context) (q query.ExportQuestion, err error) {
	q.Selection, err = newSelection(c, query.ParseStoredComponent, query.ParseStoredSiting)
	return q, errors.Join(err,
		parseInto(&q.Dampings, c, "damping", query.ParseDampings),
		parseInto(&q.Band, c, "band", query.ParseBand))
}

func runExport(ctx context.Context, store *db.Store, q query.ExportQuestion, w, stderr io.Writer) error {
	summary, err := q.Write(ctx, store, w)
	if err != nil {
		return err
	}
	fmt.Fprint(stderr, summary.Selection.Remarks())
	return nil
}
