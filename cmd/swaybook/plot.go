package main

import (
	"cmp"
	"context"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/pipeline/beside"
	"swaybook/query"
	"swaybook/query/chart"
)

func plotFlag() cli.Flag {
	return &cli.StringFlag{Name: "plot", Usage: "draw the answer in a `FILE` too, .svg or .png; one that is there is replaced"}
}

func axesFlag(usage string) cli.Flag {
	return &cli.StringFlag{Name: "axes", DefaultText: axesLog, Usage: usage}
}

func markFlag() cli.Flag {
	return &cli.StringFlag{Name: "mark", Usage: "periods of structures to mark in the figure, a `LIST` of 0.8s, or bands 0.7:0.9"}
}

// The axes of figures.
const (
	axesLog     = "log"
	axesLinear  = "linear"
	axesFourWay = "four-way"
)

var allAxes = []string{axesLog, axesLinear, axesFourWay}

// plotOptions say what figure is drawn.
type plotOptions struct {
	file   string // "" for none
	format chart.Format
	axes   string // axesLog where not said
	marks  []chart.Mark
}

// newPlotOptions reads the flags of a figure that can have these axes.
func newPlotOptions(o *plotOptions, c *cli.Context, axes []string) error {
	if !c.IsSet("plot") {
		return exclude(c, []string{"axes", "mark"}, "--%s goes with --plot")
	}
	o.file = c.String("plot")
	switch strings.ToLower(filepath.Ext(o.file)) {
	case ".svg":
		o.format = chart.SVG
	case ".png":
		o.format = chart.PNG
	default:
		return ofFlag("plot", usagef("--plot %q: want a file that ends in .svg or .png", o.file))
	}
	if o.axes = cmp.Or(c.String("axes"), axesLog); !slices.Contains(axes, o.axes) {
		return ofFlag("axes", usagef("--axes %q: want %s", o.axes, strings.Join(axes, ", ")))
	}
	if o.axes == axesFourWay && c.IsSet("measure") && c.String("measure") != string(query.MeasurePSV) {
		return ofFlag("axes", usagef("--axes four-way is of PSV, which tells SD and PSA too; leave out --measure"))
	}
	return parseInto(&o.marks, c, "mark", query.ParseMarks)
}

// figure is a chart in the size that suits it.
type figure struct {
	chart.Chart
	size chart.Size
}

// of is the figure of an answer.
func (o *plotOptions) of(a *query.SpectrumAnswer, units query.Units) figure {
	if o.axes == axesFourWay {
		return figure{a.FourWay(units, o.marks), chart.Square}
	}
	return figure{a.Chart(units, o.marks, o.axes == axesLinear), chart.Half}
}

// check looks whether a file may take the place, where there is to be one.
func (o *plotOptions) check() error {
	if o.file == "" {
		return nil
	}
	folder := filepath.Dir(o.file)
	if info, err := os.Stat(folder); err != nil || !info.IsDir() {
		return ofFlag("plot", usagef("--plot %s: there is no folder %s", o.file, folder))
	}
	if info, err := os.Stat(o.file); err == nil && !info.Mode().IsRegular() {
		return ofFlag("plot", usagef("--plot %s: what is there is no file", o.file))
	}
	return nil
}

// question is one whose answer can be drawn.
type question[A any] interface {
	Ask(context.Context, *db.Store) (A, error)
}

// askAndDraw asks a question and draws its answer, where there is to be a figure.
func askAndDraw[A any](ctx context.Context, store *db.Store, o *plotOptions, q question[A], draw func(A) (figure, error)) (answer A, err error) {
	if err = o.check(); err != nil {
		return answer, err
	}
	if answer, err = q.Ask(ctx, store); err != nil || o.file == "" {
		return answer, err
	}
	drawn, err := draw(answer)
	if err == nil {
		err = o.write(drawn)
	}
	return answer, err
}

// write draws a figure; the file is there whole, or as it was.
func (o *plotOptions) write(drawn figure) error {
	return beside.WriteFile(o.file, func(w io.Writer) error { return chart.Write(w, o.format, drawn.size, drawn.Chart) })
}
