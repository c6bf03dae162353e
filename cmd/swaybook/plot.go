package main

import (
	"io"
	"os"
	"path/filepath"
	"strings"

	"github.com/urfave/cli/v2"

	"swaybook/pipeline/beside"
	"swaybook/query"
	"swaybook/query/chart"
)

func plotFlag() cli.Flag {
	return &cli.StringFlag{Name: "plot", Usage: "draw the answer in a `FILE` too, .svg or .png; one that is there is replaced"}
}

func axesFlag() cli.Flag {
	return &cli.StringFlag{Name: "axes", DefaultText: "log", Usage: "of the figure: log or linear"}
}

// plotOptions say what figure is drawn.
type plotOptions struct {
	file     string // "" for none
	format   chart.Format
	isLinear bool
	marks    []chart.Mark
}

// newPlotOptions reads the flags of a figure.
func newPlotOptions(o *plotOptions, c *cli.Context) error {
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
	if info, err := os.Stat(o.file); err == nil && !info.Mode().IsRegular() {
		return ofFlag("plot", usagef("--plot %s: what is there is no file", o.file))
	}
	switch axes := c.String("axes"); axes {
	case "", "log":
	case "linear":
		o.isLinear = true
	default:
		return ofFlag("axes", usagef("--axes %q: want log or linear", axes))
	}
	return parseInto(&o.marks, c, "mark", query.ParseMarks)
}

// write draws a chart; the file is there whole, or as it was.
func (o *plotOptions) write(drawn chart.Chart) error {
	return beside.WriteFile(o.file, func(w io.Writer) error { return chart.Write(w, o.format, chart.Half, drawn) })
}
