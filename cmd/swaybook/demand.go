package main

import (
	"context"
	"errors"
	"io"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/query"
	"swaybook/query/chart"
)

func queryDemandCommand() *cli.Command {
	return &cli.Command{
		Name:  "demand",
		Usage: "what recorded motions demand of a structure: displacement, base shear, base moment, energy",
		Description: "The structure is a single mass: give its period, or its stiffness and mass (or weight). Base shear and energy\n" +
			"need the mass, the base moment the height too.",
		Flags: append(statisticsFlags(),
			&cli.StringFlag{Name: "period", Usage: "undamped natural period, such as 0.8s"},
			&cli.StringFlag{Name: "stiffness", Usage: "lateral stiffness, such as 4MN/m or 20kip/in"},
			&cli.StringFlag{Name: "weight", Usage: "weight, such as 500kN or 120kip"},
			&cli.StringFlag{Name: "mass", Usage: "mass, such as 52000kg or 52t"},
			&cli.StringFlag{Name: "height", Usage: "height of the mass above the base, such as 6m or 20ft"},
			&cli.StringFlag{Name: "band", Usage: "show the envelope over T·(1±BAND) too, such as 10%"},
			&cli.IntFlag{Name: "resamples", Value: query.DefaultResamples, Usage: "of the bootstrap"},
			&cli.Uint64Flag{Name: "seed", Value: 1, Usage: "of the bootstrap's random numbers"},
			&cli.StringFlag{Name: "structures", Usage: "instead of one structure those of a CSV or TOML `FILE`, a row each"},
			&cli.IntFlag{Name: "nearest", DefaultText: "none", Usage: "with --structures and --event: estimates from the `N` nearest stations, the worst structure first"},
			&cli.StringFlag{Name: "ordinates", Value: "exact", Usage: "with --structures: exact, or grid, interpolated between stored ones"},
			&cli.StringFlag{Name: "capacity", Usage: "what the structure can bear, to count the motions that exceed it: a `LIST` of a displacement, a base shear and a drift ratio by their units, such as 0.05m,800kN,1%"},
			asOfFlag(),
			formatFlag("table, csv or json"),
			plotFlag(),
			axesFlag("of the figure: log or linear"),
		),
		Action: func(c *cli.Context) error {
			if c.IsSet("structures") {
				return queryPortfolio(c)
			}
			o, err := newDemandOptions(c)
			if err != nil {
				return err
			}
			return withStore(c, func(ctx context.Context, store *db.Store) error {
				return runDemand(ctx, store, o, c.App.Writer, c.App.ErrWriter)
			})
		},
	}
}

type demandOptions struct {
	question query.DemandQuestion
	format   query.Format
	units    query.Units
	plot     plotOptions
}

func newDemandOptions(c *cli.Context) (o demandOptions, err error) {
	q := &o.question
	var errSelection error
	q.Selection, errSelection = newSelection(c, query.ParseComponent, query.ParseSiting)
	q.Structure, err = query.ParseStructure(query.StructureText{
		Period: c.String("period"), Stiffness: c.String("stiffness"), Mass: c.String("mass"), Weight: c.String("weight"),
		Damping: c.String("damping"), Height: c.String("height"),
	})
	err = errors.Join(errSelection, err, noArguments(c),
		exclude(c, []string{"ordinates", "nearest"}, "--%s goes with --structures"),
		parseInto(&q.Percentiles, c, "percentiles", query.ParsePercentiles),
		parseInto(&q.By, c, "by", query.ParseGrouping),
		newExtras(&q.Extras, c),
		setBootstrap(&q.Bootstrap, c),
		parseInto(&q.Method, c, "method", query.ParseMethod),
		parseInto(&q.BandWidth, c, "band", query.ParseBandWidth),
		parseInto(&q.Capacities, c, "capacity", query.ParseCapacities),
		parseInto(&o.units, c, "units", query.ParseUnits),
		parseInto(&o.format, c, "format", func(s string) (query.Format, error) { return query.ParseFormat(s) }),
		newPlotOptions(&o.plot, c, []string{axesLog, axesLinear}),
	)
	q.Each = o.plot.file != ""
	return o, err
}

// figure is a figure of one panel, or of two in more height.
func (o *demandOptions) figure(a *query.DemandAnswer, units query.Units) figure {
	drawn := figure{a.Chart(units, o.plot.axes == axesLinear), chart.Half}
	if a.Structure.MassKG != nil {
		drawn.size = chart.Square
	}
	return drawn
}

func runDemand(ctx context.Context, store *db.Store, o demandOptions, w, stderr io.Writer) error {
	answer, err := askAndDraw(ctx, store, &o.plot, o.question, func(a *query.DemandAnswer) (figure, error) { return o.figure(a, o.units), nil })
	if err != nil {
		return err
	}
	return writeAnswer(answer, o.format, o.units, w, stderr)
}
