package main

import (
	"context"
	"errors"
	"fmt"
	"io"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/query"
	"swaybook/query/chart"
)

func queryRecordCommand() *cli.Command {
	return &cli.Command{
		Name:      "record",
		Usage:     "what is known of one record, and its traces and spectra as a figure",
		ArgsUsage: "CODE",
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "component", DefaultText: "all that are stored", Usage: "one of it: h1, h2, v, rotd50 or rotd100"},
			asOfFlag(),
			formatFlag("table, csv or json"),
			&cli.StringFlag{Name: "plot", Usage: "draw a page of traces and spectra in a `FILE` too, .svg or .png; one that is there is replaced"},
			axesFlag("of the figure: log (of the page's spectra), or four-way (of --component, damping by damping, instead of the page)"),
			markFlag(),
			&cli.StringFlag{Name: "units", Value: "si", Usage: "units for people: si or us"},
		},
		Action: func(c *cli.Context) error {
			o, err := newRecordOptions(c)
			if err != nil {
				return err
			}
			return withStore(c, func(ctx context.Context, store *db.Store) error {
				return runRecord(ctx, store, o, c.App.Writer, c.App.ErrWriter)
			})
		},
	}
}

type recordOptions struct {
	question query.RecordQuestion
	format   query.Format
	units    query.Units
	plot     plotOptions
}

func newRecordOptions(c *cli.Context) (o recordOptions, err error) {
	if c.NArg() != 1 || c.Args().First() == "" {
		return o, usagef("query record needs one CODE; query records lists them")
	}
	o.question.Code = c.Args().First()
	o.question.AsOf, err = asOfRun(c)
	err = errors.Join(err,
		parseInto(&o.question.Component, c, "component", query.ParseRecordComponent),
		parseInto(&o.units, c, "units", query.ParseUnits),
		parseInto(&o.format, c, "format", func(s string) (query.Format, error) { return query.ParseFormat(s) }),
		newPlotOptions(&o.plot, c, []string{axesLog, axesFourWay}))
	if err == nil && o.plot.axes == axesFourWay && o.question.Component == "" {
		err = ofFlag("axes", usagef("--axes four-way is of one --component"))
	}
	if err == nil && o.plot.axes == axesLog && o.question.Component.IsRotated() {
		err = ofFlag("plot", usagef("%s is of all directions and has no traces: --axes four-way draws its spectra", o.question.Component))
	}
	o.question.Figure = o.plot.file != ""
	return o, err
}

func runRecord(ctx context.Context, store *db.Store, o recordOptions, w, stderr io.Writer) error {
	answer, err := askAndDraw(ctx, store, &o.plot, o.question, func(a *query.RecordAnswer) (figure, error) { return o.figure(a), nil })
	if err != nil {
		return err
	}
	if o.format == query.FormatCSV {
		fmt.Fprint(stderr, answer.Remarks())
	}
	return answer.Write(w, o.format, o.units)
}

func (o *recordOptions) figure(a *query.RecordAnswer) figure {
	if o.plot.axes == axesFourWay {
		return figure{a.FourWay(o.units, o.plot.marks), chart.Square}
	}
	return figure{a.Chart(o.units, o.plot.marks), chart.Page}
}
