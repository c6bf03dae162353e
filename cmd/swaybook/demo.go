package main

import (
	"context"
	"errors"
	"io"
	"path/filepath"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/pipeline"
	"swaybook/pipeline/cluster"
	"swaybook/pipeline/demo"
	"swaybook/query"
)

func demoCommand() *cli.Command {
	return &cli.Command{
		Name:  "demo",
		Usage: "invent a region's records and run the whole job on them",
		Description: "Writes record files in several formats, with a catalogue, for a region that does not exist; then ingests them and\n" +
			"shows a spectrum and the demands of invented structures, and writes a report of them. The store is DIR/demo.db unless --store names another.",
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "dir", Value: "swaybook-demo", Usage: "folder for the files, `DIR`"},
			&cli.IntFlag{Name: "events", DefaultText: "the region's twelve", Usage: "earthquakes"},
			&cli.IntFlag{Name: "stations", DefaultText: "the region's twenty", Usage: "stations"},
			&cli.IntFlag{Name: "seed", Value: 1, Usage: "seed of the random numbers"},
			rotationFlag(),
			&cli.BoolFlag{Name: "files-only", DisableDefaultText: true, Usage: "write the files and stop"},
		},
		Action: func(c *cli.Context) error {
			o, err := newDemoOptions(c)
			if err != nil {
				return err
			}
			if err := runDemo(c.Context, o, c.App.Writer); err != nil || o.filesOnly {
				return err
			}
			return demoReport(c, o, c.App.Writer)
		},
	}
}

type demoOptions struct {
	dir       string
	store     string
	region    demo.Options
	rotation  bool
	filesOnly bool
	monitor   *monitor
}

func newDemoOptions(c *cli.Context) (o demoOptions, err error) {
	if err := noArguments(c); err != nil {
		return o, err
	}
	for _, flag := range []string{"events", "stations"} {
		if c.IsSet(flag) && c.Int(flag) < 1 {
			return o, usagef("--%s %d: want a positive number", flag, c.Int(flag))
		}
	}
	logger, err := newLogger(c)
	if err != nil {
		return o, err
	}
	o = demoOptions{
		dir: c.String("dir"), store: c.String("store"), rotation: c.Bool("rotation"), filesOnly: c.Bool("files-only"),
		region:  demo.Options{Events: c.Int("events"), Stations: c.Int("stations"), Seed: c.Int("seed"), Damaged: true},
		monitor: newMonitor(logger, c.App.ErrWriter, c.Bool("quiet")),
	}
	// The environment names the user's own store, which is no place for invented
	// records; only the flag itself can ask for that.
	if !c.IsSet("store") {
		o.store = filepath.Join(o.dir, "demo.db")
	}
	return o, nil
}

// runDemo writes the files and does with them what a user would, printing each
// command before its result.
func runDemo(ctx context.Context, o demoOptions, w io.Writer) error {
	written, err := demo.Write(o.dir, o.region)
	if err != nil {
		return err
	}
	p := &printer{w: w}
	p.printf("An invented region: no place, event, station or structure here is real, and no motion was recorded.\n\n")
	p.printf("%s: %d earthquakes, %d stations, %d records in %d files (%.0f MB), %d of them damaged on purpose; %s\n",
		o.dir, written.Events, written.Stations, written.Records, written.Files+written.Damaged, float64(written.Bytes)/1e6, written.Damaged, "see README.txt there")
	if o.filesOnly || p.err != nil {
		return p.err
	}
	rotation := ""
	if !o.rotation {
		rotation = " --rotation=false"
	}
	p.printf("\n$ swaybook --store %s ingest %s --catalogue %s%s\n", cluster.Quote(o.store), cluster.Quote(o.dir), cluster.Quote(written.Catalogue), rotation)
	if p.err != nil {
		return p.err
	}
	if err := demoIngest(ctx, o, written.Catalogue, w); err != nil {
		return err
	}
	store, err := db.Open(ctx, o.store, pipeline.SolverVersion)
	if err != nil {
		return err
	}
	defer store.Close()
	return demoQueries(ctx, store, cluster.Quote(o.store), w)
}

// demoIngest runs the ingest. That the damaged files are rejected is the point
// of them, and no failure of the demo.
func demoIngest(ctx context.Context, o demoOptions, catalogue string, w io.Writer) error {
	in := ingestOptions{store: o.store, monitor: o.monitor, pipeline: pipelineOptions(o.store, o.monitor)}
	in.pipeline.Paths, in.pipeline.SkipRotation = []string{o.dir}, !o.rotation
	if err := in.readCatalogue(catalogue); err != nil {
		return err
	}
	if err := runIngest(ctx, in, w); err != nil && !errors.Is(err, errRejected) {
		return err
	}
	return nil
}

// demoPeriods are a few round periods that fit a screen, and longPeriods those at which
// records begin to be no longer usable.
const (
	demoPeriods = "0.05,0.1,0.2,0.3,0.5,0.7,1,1.5,2,3,5"
	longPeriods = "3,4,5,6,8"
)

// demoSpectrum shows a spectrum over the usable bands, or over all periods.
func demoSpectrum(ctx context.Context, store *db.Store, where, periods string, ignoreBand bool, w io.Writer) error {
	list, err := query.ParsePeriods(periods)
	if err != nil {
		return err
	}
	return runSpectrum(ctx, store, spectrumOptions{
		question: query.SpectrumQuestion{Selection: query.Selection{Where: where, IgnoreUsableBand: ignoreBand}, Damping: 0.05, PeriodsS: list},
		format:   query.FormatTable, units: query.UnitsSI,
	}, w, w)
}

func demoQueries(ctx context.Context, store *db.Store, name string, w io.Writer) error {
	const near = demo.Near
	p := &printer{w: w}
	p.printf("\n$ swaybook --store %s query spectrum --where '%s' --periods %s\n", name, near, demoPeriods)
	if err := demoSpectrum(ctx, store, near, demoPeriods, false, w); err != nil {
		return err
	}
	for _, ignore := range []string{"", " --ignore-usable-band"} {
		p.printf("\n$ swaybook --store %s query spectrum --where 'magnitude >= 5' --periods %s%s\n", name, longPeriods, ignore)
		if err := demoSpectrum(ctx, store, "magnitude >= 5", longPeriods, ignore != "", w); err != nil {
			return err
		}
	}
	for _, s := range demo.Structures() {
		p.printf("\n%s (invented)\n$ swaybook --store %s query demand%s --where '%s'\n", s.Name, name, demandWords(s), near)
		if p.err != nil {
			return p.err
		}
		if err := demoDemand(ctx, store, s, near, w); err != nil {
			return err
		}
	}
	return p.err
}

// demoReport writes the report of a study of the region, and says where all of it is.
func demoReport(c *cli.Context, o demoOptions, w io.Writer) error {
	store := o.store
	if rel, err := filepath.Rel(o.dir, store); err == nil && filepath.IsLocal(rel) {
		store = rel
	} else if store, err = filepath.Abs(store); err != nil {
		return err
	}
	study, err := demo.WriteStudy(o.dir, store)
	if err != nil {
		return err
	}
	p := &printer{w: w}
	p.printf("\n$ swaybook report %s\n", cluster.Quote(study))
	if p.err != nil {
		return p.err
	}
	plan, err := readReportPlan(c, study)
	if err != nil {
		return err
	}
	if err := makeReport(c, plan, plan.study.Report.Value); err != nil {
		return err
	}
	p.printf("\nThe store is %s. Ask it something else: swaybook --store %s query --help\n", cluster.Quote(o.store), cluster.Quote(o.store))
	p.printf("The report is %s\n", cluster.Quote(filepath.Join(o.dir, "report.html")))
	return p.err
}

func demandWords(s demo.Structure) string {
	var out string
	for _, f := range [][2]string{{"period", s.Period}, {"stiffness", s.Stiffness}, {"weight", s.Weight}, {"damping", s.Damping}, {"height", s.Height}} {
		if f[1] != "" {
			out += " --" + f[0] + " " + f[1]
		}
	}
	return out
}

func demoDemand(ctx context.Context, store *db.Store, s demo.Structure, where string, w io.Writer) error {
	structure, err := query.ParseStructure(query.StructureText{
		Period: s.Period, Stiffness: s.Stiffness, Weight: s.Weight, Damping: s.Damping, Height: s.Height,
	})
	if err != nil {
		return err
	}
	return runDemand(ctx, store, demandOptions{
		question: query.DemandQuestion{Selection: query.Selection{Where: where}, Structure: structure},
		format:   query.FormatTable, units: query.UnitsSI,
	}, w, io.Discard)
}
