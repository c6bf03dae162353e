package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"time"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/pipeline"
)

func ingestCommand() *cli.Command {
	return &cli.Command{
		Name:      "ingest",
		Usage:     "read record files, compute their spectra, store both",
		ArgsUsage: "PATH...",
		Description: "Reads files and folders (with all that is below them). Files are recognised by their content.\n" +
			"Archives (zip, tar, tar.gz, gz and the like) are read where they lie.\n" +
			"Raw components are conditioned by a recipe before their spectra are computed. Then the horizontals of\n" +
			"every record that has two are rotated, unless that was done before.\n" +
			"Running it again is harmless: content that the store holds is not read twice, and a run that was\n" +
			"stopped is finished by the next one.",
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "catalogue", Usage: "CSV `FILE` that joins or overrides metadata"},
			&cli.StringSliceFlag{Name: "metadata", Usage: "StationXML or QuakeML `FILE`, or a folder of *.xml; may be given again"},
			layoutFlag(),
			&cli.StringFlag{Name: "unit", Usage: "`UNIT` of samples in files that state none: g, mg, gal, m/s2, cm/s2, mm/s2, in/s2, ft/s2; counts for floats of miniSEED"},
			&cli.Float64Flag{Name: "dt", DefaultText: "none", Usage: "time step in `S` of files that state none"},
			&cli.StringFlag{Name: "periods", Usage: "periods of a new store's grid in s: a `LIST` such as 0.1,0.2,1 or @FILE"},
			&cli.StringFlag{Name: "dampings", Usage: "damping ratios of a new store's grid, a `LIST` such as 2%,5%,0.1"},
			&cli.StringFlag{Name: "recipe", Usage: "what is done to components before their spectra: standard, as-delivered, or a TOML `FILE`; without PATH of what is held only (default: the store's, of a new one standard)"},
			&cli.IntFlag{Name: "workers", DefaultText: "one a processor", Usage: "files in work at the same time"},
			rotationFlag(),
			shardFlag(),
			&cli.BoolFlag{Name: "json", DisableDefaultText: true, Usage: "print the summary as JSON"},
		},
		Action: func(c *cli.Context) error {
			o, err := newIngestOptions(c)
			if err != nil {
				return err
			}
			return runIngest(c.Context, o, c.App.Writer)
		},
	}
}

func rotationFlag() cli.Flag {
	return &cli.BoolFlag{Name: "rotation", Value: true, Usage: "compute RotD50 and RotD100 of the horizontal pairs that lack them; --rotation=false leaves that to a later run"}
}

// maxWorkers is more than any machine can feed.
const maxWorkers = 1024

type ingestOptions struct {
	store    string
	pipeline pipeline.Options
	json     bool
	monitor  *monitor
}

func newIngestOptions(c *cli.Context) (o ingestOptions, err error) {
	if !c.Args().Present() && !c.IsSet("recipe") {
		return o, usagef("ingest needs at least one PATH")
	}
	logger, err := newLogger(c)
	if err != nil {
		return o, err
	}
	o.store, o.json = storePath(c), c.Bool("json")
	o.monitor = newMonitor(logger, c.App.ErrWriter, c.Bool("quiet"))
	o.pipeline = pipelineOptions(o.store, o.monitor)
	o.pipeline.Paths = c.Args().Slice()
	o.pipeline.Workers = c.Int("workers")
	o.pipeline.SkipRotation = !c.Bool("rotation")
	if o.pipeline.Shard, err = askedShard(c); err != nil {
		return o, err
	}
	if err := checkWorkers(c); err != nil {
		return o, err
	}
	if _, err := os.Stat(o.store); err != nil && len(o.pipeline.Paths) == 0 {
		return o, fmt.Errorf("find store: %w", err) // nothing is held that could be conditioned
	}
	for _, path := range o.pipeline.Paths {
		if _, err := os.Stat(path); err != nil {
			return o, fmt.Errorf("find records: %w", err) // before a store is made
		}
	}
	return o, o.describe(c)
}

func checkWorkers(c *cli.Context) error {
	if n := c.Int("workers"); c.IsSet("workers") && (n < 1 || n > maxWorkers) {
		return usagef("--workers %d: want 1 to %d", n, maxWorkers)
	}
	return nil
}

// describe reads what the flags say of files and spectra, and the files that they name,
// before anything is stored. The error has every mistake.
func (o *ingestOptions) describe(c *cli.Context) error {
	p, wrong := &o.pipeline, make([]error, 6)
	p.Hints, wrong[0] = ingestHints(c)
	p.Hints.Metadata, wrong[1] = ingest.ReadMetadata(c.Context, c.StringSlice("metadata"))
	p.Hints.Layouts, wrong[2] = readLayouts(c.StringSlice("layout"))
	for _, name := range c.StringSlice("layout") {
		p.Own[name] = "a layout itself"
	}
	p.Grid, wrong[3] = ingestGrid(c)
	wrong[4] = o.readRecipe(c.String("recipe"))
	wrong[5] = o.readCatalogue(c.String("catalogue"))
	if p.Shard.Count > 0 {
		p.Decided = decidedByFlags(c)
	}
	return errors.Join(wrong[0], ofFlag("metadata", wrong[1]), ofFlag("layout", wrong[2]), wrong[3],
		ofFlag("recipe", wrong[4]), ofFlag("catalogue", wrong[5]))
}

func (o *ingestOptions) readRecipe(name string) error {
	if name == "" {
		return nil
	}
	recipe, err := readRecipe(name)
	o.pipeline.Recipe, o.pipeline.Own[name] = &recipe, "a recipe itself"
	return err
}

// program names the program and its version in a store.
func program() string { return "swaybook " + version }

func pipelineOptions(store string, m *monitor) pipeline.Options {
	return pipeline.Options{
		Program: program(), Started: time.Now(), Clock: time.Now, Progress: m.file, Recomputed: m.component, Rotated: m.record, Doubted: m.doubt,
		Own: db.Files(store),
	}
}

func ingestHints(c *cli.Context) (ingest.Hints, error) {
	h := ingest.Hints{
		Unit: c.String("unit"), UnitFrom: "--unit", UnitForAll: true,
		StepS: c.Float64("dt"), StepFrom: "--dt", StepForAll: true,
	}
	// Counts are a unit for miniSEED, whose metadata give the scale; readers of other
	// formats refuse them where a file states no unit.
	var wrong []error
	if h.Unit != "" && !ingest.IsCounts(h.Unit) {
		if _, err := ingest.ParseUnit(h.Unit); err != nil {
			wrong = append(wrong, ofFlag("unit", usagef("--unit: %w", err)))
		}
	}
	if c.IsSet("dt") && !(h.StepS > 0) {
		wrong = append(wrong, ofFlag("dt", usagef("--dt %g: want a positive time step in s", h.StepS)))
	}
	return h, errors.Join(wrong...)
}

func ingestGrid(c *cli.Context) (g db.Grid, err error) {
	if c.IsSet("periods") {
		err = parseInto(&g.PeriodsS, c, "periods", periodList)
	}
	if c.IsSet("dampings") {
		err = errors.Join(err, parseInto(&g.Dampings, c, "dampings", dampingList))
	}
	return g, err
}

// readCatalogue loads the catalogue; a mistake in it leaves no half-described records
// behind.
func (o *ingestOptions) readCatalogue(name string) error {
	if name == "" {
		return nil
	}
	f, err := os.Open(name)
	if err != nil {
		return fmt.Errorf("read catalogue: %w", err)
	}
	defer f.Close()
	o.pipeline.Own[name] = "the catalogue itself"
	o.pipeline.Catalogue, err = ingest.ReadCatalogue(name, f)
	return err
}

// runIngest fills the store and prints the summary. No other run may do so meanwhile.
func runIngest(ctx context.Context, o ingestOptions, w io.Writer) error {
	return lockedAt(ctx, o.store, o.pipeline.Started, db.AnySolver, func(store *db.Store) error { return fill(ctx, store, o, w) })
}

// fill is runIngest on an open store.
func fill(ctx context.Context, store *db.Store, o ingestOptions, w io.Writer) error {
	summary, err := pipeline.Run(ctx, store, o.pipeline)
	o.monitor.end()
	if err != nil && !summary.HasBegun() {
		return err
	}
	report := newIngestReport(o, summary, err == nil)
	if errPrint := report.print(w, o.json); errPrint != nil && err == nil {
		err = errPrint
	}
	switch {
	case err != nil && ctx.Err() != nil:
		return interruption(summary, db.Gathered{})
	case err != nil:
		return err
	case summary.Damaged > 0:
		return fmt.Errorf("%s is damaged (records: %d); ingest the files into a new store with --store", o.store, summary.Damaged)
	case !summary.Complete():
		return errRejected
	}
	return nil
}

// interruption says how far a run came that somebody stopped, with what it had taken over of
// shards.
func interruption(s pipeline.Summary, g db.Gathered) error {
	how := fmt.Sprintf("after %d files", s.Files)
	if s.Files == 0 && g.Files+g.Computations > 0 {
		how = fmt.Sprintf("after %d files and %d results were taken over", g.Files, g.Computations)
	}
	if s.Uncomputed > 0 {
		done := s.Recomputed + s.NotRecomputed
		how = fmt.Sprintf("while computing, %d of %d held components", done, done+s.Uncomputed)
	}
	if s.Unrotated > 0 {
		done := s.Rotated + s.NotRotated + s.Damaged
		how = fmt.Sprintf("while rotating, %d of %d records", done, done+s.Unrotated)
	}
	return fmt.Errorf("%w %s; run the same command again to finish the rest", errInterrupted, how)
}
