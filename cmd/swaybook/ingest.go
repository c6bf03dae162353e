package main

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"maps"
	"os"
	"slices"
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
	if n := c.Int("workers"); c.IsSet("workers") && (n < 1 || n > maxWorkers) {
		return o, usagef("--workers %d: want 1 to %d", n, maxWorkers)
	}
	if _, err := os.Stat(o.store); err != nil && len(o.pipeline.Paths) == 0 {
		return o, fmt.Errorf("find store: %w", err) // nothing is held that could be conditioned
	}
	for _, path := range o.pipeline.Paths {
		if _, err := os.Stat(path); err != nil {
			return o, fmt.Errorf("find records: %w", err) // before a store is made
		}
	}
	if o.pipeline.Hints, err = ingestHints(c); err != nil {
		return o, err
	}
	if o.pipeline.Hints.Metadata, err = ingest.ReadMetadata(c.Context, c.StringSlice("metadata")); err != nil {
		return o, err
	}
	if o.pipeline.Hints.Layouts, err = readLayouts(c.StringSlice("layout")); err != nil {
		return o, err
	}
	for _, name := range c.StringSlice("layout") {
		o.pipeline.Own[name] = "a layout itself"
	}
	if o.pipeline.Grid, err = ingestGrid(c); err != nil {
		return o, err
	}
	if name := c.String("recipe"); name != "" {
		recipe, err := readRecipe(name)
		if err != nil {
			return o, err
		}
		o.pipeline.Recipe = &recipe
		o.pipeline.Own[name] = "a recipe itself"
	}
	return o, o.readCatalogue(c.String("catalogue"))
}

func pipelineOptions(store string, m *monitor) pipeline.Options {
	return pipeline.Options{
		Program: "swaybook " + version, Started: time.Now(), Clock: time.Now, Progress: m.file, Recomputed: m.component, Rotated: m.record, Doubted: m.doubt,
		Own: map[string]string{store: "the store itself", store + "-wal": "the store's log", store + "-shm": "the store's log"},
	}
}

func ingestHints(c *cli.Context) (ingest.Hints, error) {
	h := ingest.Hints{
		Unit: c.String("unit"), UnitFrom: "--unit", UnitForAll: true,
		StepS: c.Float64("dt"), StepFrom: "--dt", StepForAll: true,
	}
	// Counts are a unit for miniSEED, whose metadata give the scale; readers of other
	// formats refuse them where a file states no unit.
	if h.Unit != "" && !ingest.IsCounts(h.Unit) {
		if _, err := ingest.ParseUnit(h.Unit); err != nil {
			return h, usagef("--unit: %w", err)
		}
	}
	if c.IsSet("dt") && !(h.StepS > 0) {
		return h, usagef("--dt %g: want a positive time step in s", h.StepS)
	}
	return h, nil
}

func ingestGrid(c *cli.Context) (g db.Grid, err error) {
	if c.IsSet("periods") {
		if g.PeriodsS, err = periodList(c.String("periods")); err != nil {
			return g, err
		}
	}
	if c.IsSet("dampings") {
		g.Dampings, err = dampingList(c.String("dampings"))
	}
	return g, err
}

// readCatalogue loads the catalogue before anything is stored, so that a
// mistake in it leaves no half-described records behind.
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

// runIngest fills the store and prints the summary.
func runIngest(ctx context.Context, o ingestOptions, w io.Writer) (err error) {
	store, err := db.Create(ctx, o.store, pipeline.SolverVersion)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, store.Close()) }()
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
		return interruption(summary)
	case err != nil:
		return err
	case summary.Damaged > 0:
		return fmt.Errorf("%s is damaged (records: %d); ingest the files into a new store with --store", o.store, summary.Damaged)
	case !summary.Complete():
		return errRejected
	}
	return nil
}

// interruption says how far a run came that somebody stopped.
func interruption(s pipeline.Summary) error {
	how := fmt.Sprintf("after %d files", s.Files)
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

// ingestReport is what the command prints, as text and as JSON.
type ingestReport struct {
	Store string `json:"store"`
	pipeline.Summary
	ByCause       []causeCount `json:"rejected_by_cause"`
	SkippedFiles  []fileNote   `json:"skipped_files"`
	RejectedFiles []fileNote   `json:"rejected_files"`
	// Beyond the limit of the lists, files are only counted.
	SkippedOmitted  int            `json:"skipped_files_omitted"`
	RejectedOmitted int            `json:"rejected_files_omitted"`
	Warnings        []warningCount `json:"warnings"`
	// Unfit lists why horizontal pairs were not rotated.
	Unfit []reasonCount `json:"not_rotated_by_reason"`
	// Unsolved lists why held components were not computed anew.
	Unsolved []reasonCount `json:"not_recomputed_by_reason"`
	// Catalogue lists what in the catalogue had no effect.
	Catalogue []string `json:"catalogue_notes"`
	// Metadata lists what of StationXML and QuakeML was not taken, or is doubtful, and
	// the files that were recorded while waves of several QuakeML events came.
	Metadata        []fileNote `json:"metadata_notes"`
	MetadataOmitted int        `json:"metadata_notes_omitted"`

	skipped bool // rotation, since that was asked for
}

// causeCount counts the rejections of one cause, its particulars left out.
type causeCount struct {
	Cause string `json:"cause"`
	Count int    `json:"count"`
}

// warningCount is one warning with how often it was given and where first.
type warningCount struct {
	Text  string `json:"warning"`
	Count int    `json:"count"`
	First string `json:"first"`
}

// reasonCount is one reason why pairs were not rotated, how many, and the record
// and the particulars of the first.
type reasonCount struct {
	Reason string `json:"reason"`
	Count  int    `json:"count"`
	First  string `json:"first"`
	Detail string `json:"detail"`
}

// fileNote is one file that was not stored and why.
type fileNote struct {
	Source string `json:"source"`
	Line   int    `json:"line,omitempty"`
	Cause  string `json:"cause"`
}

func reasonCounts(remarks tally) []reasonCount {
	out := make([]reasonCount, len(remarks))
	for i, r := range remarks {
		out[i] = reasonCount{r.text, r.count, r.first, r.detail}
	}
	return out
}

func newIngestReport(o ingestOptions, summary pipeline.Summary, complete bool) ingestReport {
	m := o.monitor
	r := ingestReport{
		Store: o.store, Summary: summary, skipped: o.pipeline.SkipRotation, ByCause: []causeCount{}, Warnings: []warningCount{}, Unfit: reasonCounts(m.unfit), Unsolved: reasonCounts(m.unsolved), Catalogue: []string{},
		SkippedFiles: m.skipped.files, SkippedOmitted: m.skipped.omitted, RejectedFiles: m.rejected.files, RejectedOmitted: m.rejected.omitted,
	}
	for _, w := range m.warnings {
		r.Warnings = append(r.Warnings, warningCount{w.text, w.count, w.first})
	}
	for _, cause := range slices.Sorted(maps.Keys(m.causes)) {
		r.ByCause = append(r.ByCause, causeCount{cause, m.causes[cause]})
	}
	metadata := notes{files: []fileNote{}}
	for _, n := range o.pipeline.Hints.Metadata.Notes() {
		metadata.add(fileNote{n.Path, n.Line, n.Text})
	}
	for _, f := range m.doubts.files {
		metadata.add(f)
	}
	metadata.omitted += m.doubts.omitted
	r.Metadata, r.MetadataOmitted = metadata.files, metadata.omitted
	slices.SortStableFunc(r.ByCause, func(a, b causeCount) int { return b.Count - a.Count })
	if c := o.pipeline.Catalogue; c != nil {
		for _, column := range c.UnknownColumns {
			r.Catalogue = append(r.Catalogue, "unknown column "+column.String())
		}
		// After a run that was stopped, rows of the files not reached are no news.
		if complete {
			for _, line := range c.Unmatched() {
				r.Catalogue = append(r.Catalogue, fmt.Sprintf("line %d matches no file", line))
			}
		}
	}
	return r
}

func (r ingestReport) print(w io.Writer, asJSON bool) error {
	if asJSON {
		e := json.NewEncoder(w)
		e.SetEscapeHTML(false)
		e.SetIndent("", "  ")
		return e.Encode(r)
	}
	p := &printer{w: w}
	p.printf("%s, %.1f s\n", r.Store, r.Seconds)
	p.printf("  files seen                              %7d\n", r.Files)
	p.printf("  components stored                       %7d  from %d files, in %d new records\n", r.Stored, r.StoredFiles, r.Records)
	p.printf("  files already held                      %7d\n", r.Held)
	p.printf("  files skipped: no ground acceleration   %7d\n", r.Skipped)
	p.printf("  files rejected                          %7d\n", r.Rejected)
	if r.Channels > 0 {
		p.printf("  channels rejected from files stored     %7d\n", r.Channels)
	}
	if r.Recomputed > 0 {
		p.printf("  held components computed anew           %7d\n", r.Recomputed)
	}
	if r.NotRecomputed > 0 {
		p.printf("  held components that could not be       %7d\n", r.NotRecomputed)
		p.reasons(r.Unsolved)
	} else if r.Unconditioned > 0 {
		p.printf("  held components the recipe fails on     %7d  as before; see query records --rejected\n", r.Unconditioned)
	}
	r.printRotation(p)
	if r.Stored == 0 && r.Rotated == 0 && r.Recomputed == 0 {
		p.printf("Nothing new was stored.\n")
	}
	p.notes("Skipped:", r.SkippedFiles, r.SkippedOmitted, "--json lists them")
	if len(r.RejectedFiles) > maxLines {
		p.printf("Rejected by cause:\n")
		for _, c := range r.ByCause {
			p.printf("  %7d  %s\n", c.Count, c.Cause)
		}
	}
	p.notes("Rejected:", r.RejectedFiles, r.RejectedOmitted, "see: swaybook --store "+r.Store+" query records --rejected")
	for i, w := range r.Warnings {
		if i == 0 {
			p.printf("Doubtful, and kept with the components:\n")
		}
		p.printf("  %s (%d times, first in %s)\n", w.Text, w.Count, w.First)
	}
	p.notes("Metadata that were not taken, or are doubtful:", r.Metadata, r.MetadataOmitted, "--json lists them")
	for _, note := range r.Catalogue {
		p.printf("Catalogue: %s\n", note)
	}
	return p.err
}

func (r ingestReport) printRotation(p *printer) {
	assumed := ""
	if r.Assumed > 0 {
		assumed = fmt.Sprintf("  of %d an azimuth is unknown, a right angle was assumed", r.Assumed)
	}
	if r.skipped {
		p.printf("  records left to rotate in a later run   %7d\n", r.Unrotated)
		return
	}
	p.printf("  records rotated                         %7d%s\n", r.Rotated, assumed)
	if r.Unrotated > 0 {
		p.printf("  records left to rotate                  %7d\n", r.Unrotated)
	}
	if r.NotRotated > 0 {
		p.printf("  records whose horizontals do not pair   %7d\n", r.NotRotated)
	}
	if r.EventsJoined > 0 {
		p.printf("  event codes that mean another's event   %7d  see query records --conflicts\n", r.EventsJoined)
	}
	if r.Duplicates > 0 {
		p.printf("  components held in a better version too %7d  left out of statistics\n", r.Duplicates)
	}
	if r.Damaged > 0 {
		p.printf("  records damaged in the store            %7d\n", r.Damaged)
	}
	p.reasons(r.Unfit)
}

// reasons prints why something was not done, with how often and of what first.
func (p *printer) reasons(list []reasonCount) {
	for _, u := range list {
		detail := ""
		if u.Detail != "" {
			detail = " (" + u.Detail + ")"
		}
		p.printf("    %s: %d, first %s%s\n", u.Reason, u.Count, u.First, detail)
	}
}

// maxLines is how many single files the text names of a kind.
const maxLines = 30

// notes prints the first files of a list and where the rest can be seen.
func (p *printer) notes(title string, notes []fileNote, omitted int, rest string) {
	if len(notes) > 0 {
		p.printf("%s\n", title)
	}
	for i, n := range notes {
		if i == maxLines {
			p.printf("  … and %d more; %s\n", len(notes)-maxLines+omitted, rest)
			return
		}
		if n.Line > 0 {
			p.printf("  %s:%d: %s\n", n.Source, n.Line, n.Cause)
		} else {
			p.printf("  %s: %s\n", n.Source, n.Cause)
		}
	}
}
