package main

import (
	"context"
	"errors"
	"io"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/query"
)

// Flags that have no place beside others.
var (
	described    = []string{"period", "stiffness", "weight", "mass", "height", "damping", "band", "capacity"} // by the file
	oneStructure = []string{"by", "resamples", "seed", "plot", "axes"}
	ofStatistics = []string{"balance", "percentiles", "show", "confidence", "design"}
)

// queryPortfolio answers for the structures of a file.
func queryPortfolio(c *cli.Context) error {
	o, err := newPortfolioOptions(c)
	if err != nil {
		return err
	}
	return withStore(c, func(ctx context.Context, store *db.Store) error {
		return runPortfolio(ctx, store, o, c.App.Writer, c.App.ErrWriter)
	})
}

type portfolioOptions struct {
	question query.PortfolioQuestion
	nearest  int // stations, 0 for statistics of all
	format   query.Format
	units    query.Units
}

func newPortfolioOptions(c *cli.Context) (o portfolioOptions, err error) {
	err = errors.Join(
		exclude(c, described, "--structures and --%s exclude each other: the file says it of every structure"),
		exclude(c, oneStructure, "--%s is of one structure, not of --structures"))
	if c.IsSet("nearest") {
		err = errors.Join(err, exclude(c, ofStatistics, "--%s is of statistics, not of estimates from the --nearest stations"))
	}
	if err != nil {
		return o, err
	}
	if o.nearest = c.Int("nearest"); c.IsSet("nearest") && o.nearest < 1 {
		return o, ofFlag("nearest", usagef("--nearest %d: want at least 1", o.nearest))
	}
	q := &o.question
	q.Selection, err = newSelection(c, query.ParseComponent, query.ParseSiting)
	return o, errors.Join(err, noArguments(c),
		parseInto(&q.Structures, c, "structures", query.ReadPortfolio),
		parseInto(&q.Ordinates, c, "ordinates", query.ParseSource),
		parseInto(&q.Percentiles, c, "percentiles", query.ParsePercentiles),
		newExtras(&q.Extras, c),
		parseInto(&q.Method, c, "method", query.ParseMethod),
		parseInto(&o.units, c, "units", query.ParseUnits),
		parseInto(&o.format, c, "format", func(s string) (query.Format, error) { return query.ParseFormat(s) }))
}

// exclude refuses flags.
func exclude(c *cli.Context, flags []string, why string) error {
	var wrong []error
	for _, flag := range flags {
		if c.IsSet(flag) {
			wrong = append(wrong, ofFlag(flag, usagef(why, flag)))
		}
	}
	return errors.Join(wrong...)
}

func runPortfolio(ctx context.Context, store *db.Store, o portfolioOptions, w, stderr io.Writer) error {
	answer, err := o.ask(ctx, store)
	if err != nil {
		return err
	}
	return writeAnswer(answer, o.format, o.units, w, stderr)
}

func (o *portfolioOptions) ask(ctx context.Context, store *db.Store) (statistics, error) {
	if o.nearest == 0 {
		return o.question.Ask(ctx, store)
	}
	return o.nearestQuestion().Ask(ctx, store)
}

func (o *portfolioOptions) validate() error {
	if o.nearest == 0 {
		return o.question.Validate()
	}
	return o.nearestQuestion().Validate()
}

func (o *portfolioOptions) nearestQuestion() query.NearestQuestion {
	return query.NearestQuestion{PortfolioQuestion: o.question, Stations: o.nearest}
}
