package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"slices"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/query"
	"swaybook/query/chart"
)

func queryCommand() *cli.Command {
	return &cli.Command{
		Name:        "query",
		Usage:       "ask the store: spectra, demands, records",
		Subcommands: []*cli.Command{querySpectrumCommand(), queryDemandCommand(), queryRecordsCommand(), queryRecordCommand()},
	}
}

// selectionFlags say which motions a question is about. The texts name the
// defaults, which differ between questions.
func selectionFlags(component, siting string) []cli.Flag {
	return []cli.Flag{
		&cli.StringFlag{Name: "where", Usage: "boolean `EXPR` over attributes, such as 'magnitude >= 6 and distance_km < 30'"},
		&cli.StringFlag{Name: "near", Usage: "stations within a distance: `LAT,LON,KM`, degrees positive north and east"},
		&cli.StringFlag{Name: "since", Usage: "events from `DATE` on: 2019, 2019-07, 2019-07-06 or 2019-07-06T03:19:53Z (UTC)"},
		&cli.StringFlag{Name: "until", Usage: "events up to `DATE`, the whole of that year, month or day"},
		&cli.StringFlag{Name: "event", Usage: "records of one event by its `CODE`, or latest: the last of what is selected otherwise"},
		&cli.StringFlag{Name: "component", Usage: component},
		&cli.StringFlag{Name: "siting", Usage: siting},
	}
}

func statisticsFlags() []cli.Flag {
	flags := selectionFlags(
		"of a horizontal pair rotd50 or rotd100 (median or maximum over all directions), geomean or larger; single: each (horizontal), h1, h2 or v (default: rotd50)",
		"what instruments stand on: ground (free-field, ground, and where unknown), free-field, structure, borehole, unknown, all, or a list (default: ground)")
	return append(flags,
		&cli.BoolFlag{Name: "include-duplicates", DisableDefaultText: true, Usage: "take every held version of a motion, not the best one alone"},
		&cli.BoolFlag{Name: "include-unknown-directions", DisableDefaultText: true, Usage: "take components too of which nothing says whether they are horizontal"},
		&cli.BoolFlag{Name: "ignore-usable-band", DisableDefaultText: true, Usage: "count ordinates too at periods at which filters and sampling leave nothing to believe"},
		&cli.StringFlag{Name: "screen", Value: "normal", Usage: "leave out for what was found of quality: strict, normal or none"},
		&cli.StringFlag{Name: "by", Usage: "the same statistics group by group too: an `ATTRIBUTE` such as event, station or site_class_en1998, or a number with edges of bins, magnitude:5,6,7"},
		&cli.StringFlag{Name: "design", Usage: "set the design spectrum that a TOML `FILE` describes beside the motions"},
		&cli.StringFlag{Name: "show", Usage: "further figures, a `LIST` of spread (between and within events), intervals (of confidence, of each percentile), lognormal (the fitted distribution) and, of one structure, bootstrap"},
		&cli.StringFlag{Name: "confidence", Value: "90%", Usage: "level of confidence of intervals"},
		&cli.StringFlag{Name: "balance", Value: "none", Usage: "weigh motions so that every event, or every station, counts once: none, event or station"},
		&cli.StringFlag{Name: "damping", Value: "5%", Usage: "damping ratio, such as 5% or 0.05"},
		&cli.StringFlag{Name: "percentiles", Value: "16,50,84", Usage: "percentiles, a `LIST`"},
		&cli.StringFlag{Name: "units", Value: "si", Usage: "units for people: si or us"},
		&cli.StringFlag{Name: "method", Value: "nigam-jennings", Usage: "nigam-jennings (exact), newmark-average or newmark-linear (for comparison, computed from the samples; the last for periods above 1.814 time steps only)"},
	)
}

// asOfFlag says which edition a question reads. It is no flag of a selection, since the
// answers of a study are of the run that gives them.
func asOfFlag() cli.Flag {
	return &cli.Int64Flag{Name: asOf, DefaultText: "what is published", Usage: "answer as when `RUN` had ended, a number of swaybook runs"}
}

const asOf = "as-of"

// against is the flag of the run that the figure of spectra compares with.
const against = "against"

func formatFlag(choices string) cli.Flag {
	return &cli.StringFlag{Name: "format", Value: "table", Usage: choices}
}

// newSelection reads the selection flags.
func newSelection(c *cli.Context, component func(string) (query.Component, error), siting func(string) (query.Siting, error)) (s query.Selection, err error) {
	s.Where, s.Scope.Event = c.String("where"), c.String("event")
	s.IncludeDuplicates, s.IncludeUnknownDirections = c.Bool("include-duplicates"), c.Bool("include-unknown-directions")
	s.IgnoreUsableBand = c.Bool("ignore-usable-band")
	err = errors.Join(
		parseInto(&s.Scope.Near, c, "near", query.ParseNear),
		parseInto(&s.Scope.Since, c, "since", query.ParseSince),
		parseInto(&s.Scope.Until, c, "until", query.ParseUntil),
		parseInto(&s.Component, c, "component", component),
		parseInto(&s.Siting, c, "siting", siting))
	if c.IsSet("balance") {
		err = errors.Join(err, parseInto(&s.Balance, c, "balance", query.ParseBalance))
	}
	if c.IsSet("screen") {
		err = errors.Join(err, parseInto(&s.Screen, c, "screen", query.ParseScreen))
	}
	var wrong error
	s.AsOf, wrong = asOfRun(c)
	return s, errors.Join(err, wrong)
}

// asOfRun is the run that a question reads, 0 for what is published.
func asOfRun(c *cli.Context) (int64, error) {
	run := c.Int64(asOf)
	if c.IsSet(asOf) && run < 1 {
		return run, ofFlag(asOf, usagef("--as-of %d: want the number of a run", run))
	}
	return run, nil
}

func querySpectrumCommand() *cli.Command {
	return &cli.Command{
		Name:  "spectrum",
		Usage: "statistics of the response spectra of recorded motions, period by period",
		Flags: append(statisticsFlags(),
			&cli.StringFlag{Name: "measure", Usage: "sd, psv, psa, vh (the vertical spectrum over the horizontal one) or eta (the spectrum over that of 5% damping) (default: psa)"},
			&cli.StringFlag{Name: "band", Usage: "periods of the grid to show, `FROM:TO` in s"},
			&cli.StringFlag{Name: "periods", Usage: "periods to show instead of the grid's, a `LIST` in s; computed from the samples where off the grid"},
			asOfFlag(),
			formatFlag("table, csv or json"),
			plotFlag(),
			axesFlag("of the figure: log, linear, or four-way (PSV, with diagonals of SD and PSA)"),
			markFlag(),
			&cli.Int64Flag{Name: against, DefaultText: "none", Usage: "draw what changed against what `RUN` had left, a number of swaybook runs"},
		),
		Action: func(c *cli.Context) error {
			o, err := newSpectrumOptions(c)
			if err != nil {
				return err
			}
			return withStore(c, func(ctx context.Context, store *db.Store) error {
				return runSpectrum(ctx, store, o, c.App.Writer, c.App.ErrWriter)
			})
		},
	}
}

type spectrumOptions struct {
	question query.SpectrumQuestion
	format   query.Format
	units    query.Units
	plot     plotOptions
	against  int64 // the run whose answer the figure compares with, 0 for none
}

func newSpectrumOptions(c *cli.Context) (o spectrumOptions, err error) {
	q := &o.question
	q.Selection, err = newSelection(c, query.ParseComponent, query.ParseSiting)
	err = errors.Join(err, noArguments(c),
		parseInto(&q.Damping, c, "damping", query.ParseDamping),
		parseInto(&q.Percentiles, c, "percentiles", query.ParsePercentiles),
		parseInto(&q.By, c, "by", query.ParseGrouping),
		newExtras(&q.Extras, c),
		parseInto(&q.Method, c, "method", query.ParseMethod),
		parseInto(&q.Measure, c, "measure", query.ParseMeasure),
		parseInto(&q.Band, c, "band", query.ParseBand),
		parseInto(&q.PeriodsS, c, "periods", query.ParsePeriods),
		parseInto(&o.units, c, "units", query.ParseUnits),
		parseInto(&o.format, c, "format", func(s string) (query.Format, error) { return query.ParseFormat(s) }),
		newPlotOptions(&o.plot, c, allAxes),
	)
	q.Each = o.plot.file != ""
	if o.plot.axes == axesFourWay {
		q.Measure = query.MeasurePSV
	}
	if c.IsSet(against) {
		o.against = c.Int64(against)
		switch {
		case o.against < 1:
			err = errors.Join(err, ofFlag(against, usagef("--against %d: want the number of a run", o.against)))
		case o.plot.file == "":
			err = errors.Join(err, ofFlag(against, usagef("--against goes with --plot")))
		default:
			err = errors.Join(err, exclude(c, []string{"axes", "mark"}, "--against has a figure of its own, without --%s"))
		}
	}
	return o, err
}

// newExtras reads the flags of further figures.
func newExtras(e *query.Extras, c *cli.Context) error {
	err := errors.Join(
		parseInto(e, c, "show", query.ParseExtras),
		parseInto(&e.Level, c, "confidence", query.ParseLevel),
		parseInto(&e.Design, c, "design", query.ReadDesign))
	if c.IsSet("confidence") && !e.Intervals && e.Bootstrap.Resamples == 0 {
		err = errors.Join(err, ofFlag("confidence", usagef("--confidence goes with --show intervals or bootstrap")))
	}
	return err
}

// setBootstrap reads the flags of a bootstrap that is asked for.
func setBootstrap(b *query.Bootstrap, c *cli.Context) error {
	if b.Resamples == 0 {
		return exclude(c, []string{"resamples", "seed"}, "--%s goes with --show bootstrap")
	}
	*b = query.Bootstrap{Resamples: c.Int("resamples"), Seed: c.Uint64("seed")}
	if b.Resamples == 0 {
		return ofFlag("resamples", usagef("--resamples 0: --show bootstrap needs some"))
	}
	return nil
}

// parseInto reads a flag's text into dst.
func parseInto[T any](dst *T, c *cli.Context, flag string, parse func(string) (T, error)) (err error) {
	*dst, err = parse(c.String(flag))
	return ofFlag(flag, err)
}

// statistics is an answer that can be written in units, and compared.
type statistics interface {
	query.Compared
	Governing() query.Governing
	Write(w io.Writer, format query.Format, units query.Units) error
	Remarks() string
}

// writeAnswer writes an answer, and its remarks to people where rows have no room for them.
func writeAnswer(answer statistics, format query.Format, units query.Units, w, stderr io.Writer) error {
	if format == query.FormatCSV {
		fmt.Fprint(stderr, answer.Remarks())
	}
	return answer.Write(w, format, units)
}

func runSpectrum(ctx context.Context, store *db.Store, o spectrumOptions, w, stderr io.Writer) error {
	answer, err := askAndDraw(ctx, store, &o.plot, o.question, func(a *query.SpectrumAnswer) (figure, error) {
		if o.against != 0 {
			return o.changes(ctx, store, a)
		}
		return o.plot.of(a, o.units), nil
	})
	if err != nil {
		return err
	}
	return writeAnswer(answer, o.format, o.units, w, stderr)
}

// changes is the figure of how an answer differs from that as of an earlier run.
func (o *spectrumOptions) changes(ctx context.Context, store *db.Store, answer *query.SpectrumAnswer) (figure, error) {
	q := o.question
	q.AsOf, q.AnySolver = o.against, true
	before, err := q.Ask(ctx, store)
	if err != nil {
		return figure{}, fmt.Errorf("run %d: %w", o.against, err)
	}
	is := "now"
	if o.question.AsOf != 0 {
		is = fmt.Sprintf("run %d", o.question.AsOf)
	}
	return figure{answer.Changes(before, fmt.Sprintf("run %d", o.against), is, o.units), chart.Half}, nil
}

func queryRecordsCommand() *cli.Command {
	return &cli.Command{
		Name:  "records",
		Usage: "what is held, what was rejected and why, or what sources disagree about",
		Flags: append(selectionFlags("recorded, all (pairs stored over all directions too), each, h1, h2, v, rotd50 or rotd100 (default: recorded)", "as for query spectrum (default: all)"),
			&cli.BoolFlag{Name: "rejected", DisableDefaultText: true, Usage: "list what could not be stored or conditioned, and why"},
			&cli.BoolFlag{Name: "conflicts", DisableDefaultText: true, Usage: "list what catalogue, metadata and headers state otherwise than what is taken"},
			asOfFlag(),
			formatFlag("table, csv or json"),
			&cli.StringFlag{Name: "plot", Usage: "draw magnitude against distance, a point a record, in a `FILE` too, .svg or .png; one that is there is replaced"},
		),
		Action: func(c *cli.Context) error {
			o, err := newRecordsOptions(c)
			if err != nil {
				return err
			}
			return withStore(c, func(ctx context.Context, store *db.Store) error {
				return runRecords(ctx, store, o, c.App.Writer, c.App.ErrWriter)
			})
		},
	}
}

type recordsOptions struct {
	question query.RecordsQuestion
	list     func(context.Context, *db.Store, int64) (writer, error) // instead of the records, as of a run
	format   query.Format
	plot     plotOptions
}

func (o *recordsOptions) figure(a *query.RecordsAnswer) figure { return figure{a.Chart(), chart.Half} }

func newRecordsOptions(c *cli.Context) (o recordsOptions, err error) {
	for _, flag := range []string{"rejected", "conflicts"} {
		switch {
		case !c.Bool(flag):
			continue
		case slices.ContainsFunc(selectionFlags("", ""), func(f cli.Flag) bool { return c.IsSet(f.Names()[0]) }):
			return o, ofFlag(flag, usagef("--%s lists no components, and nothing that has attributes to select by", flag))
		case c.IsSet("plot"):
			return o, ofFlag("plot", usagef("--plot is of records, not of --%s", flag))
		case o.list != nil:
			return o, ofFlag(flag, usagef("--rejected and --conflicts are two lists: ask for one"))
		}
		o.list = otherLists[flag]
	}
	o.question.Selection, err = newSelection(c, query.ParseStoredComponent, query.ParseStoredSiting)
	err = errors.Join(err, noArguments(c),
		parseInto(&o.format, c, "format", func(s string) (query.Format, error) { return query.ParseFormat(s) }),
		newPlotOptions(&o.plot, c, []string{axesLog}))
	return o, err
}

// writer is an answer that can be written.
type writer interface {
	Write(io.Writer, query.Format) error
	Sheet() *query.Sheet
}

// otherLists are what query records lists instead of records, by flag.
var otherLists = map[string]func(ctx context.Context, store *db.Store, asOf int64) (writer, error){
	"rejected": func(ctx context.Context, s *db.Store, asOf int64) (writer, error) {
		return query.Rejections(ctx, s, asOf)
	},
	"conflicts": func(ctx context.Context, s *db.Store, asOf int64) (writer, error) {
		return query.Conflicts(ctx, s, asOf)
	},
}

func runRecords(ctx context.Context, store *db.Store, o recordsOptions, w, stderr io.Writer) error {
	if o.list != nil {
		answer, err := o.list(ctx, store, o.question.AsOf)
		if err != nil {
			return err
		}
		return answer.Write(w, o.format)
	}
	if err := o.plot.check(); err != nil {
		return err
	}
	answer, err := o.question.Ask(ctx, store)
	// A list may be empty: that is an answer, whose reason goes to people.
	if empty, ok := errors.AsType[*query.EmptyError](err); ok {
		fmt.Fprintln(stderr, empty)
	} else if err != nil {
		return err
	} else if o.format != query.FormatTable {
		fmt.Fprint(stderr, answer.Selection.Remarks())
	}
	if o.plot.file != "" {
		if err := o.plot.write(o.figure(answer)); err != nil {
			return err
		}
	}
	return answer.Write(w, o.format)
}
