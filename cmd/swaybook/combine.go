package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"strings"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/pipeline"
)

func combineCommand() *cli.Command {
	return &cli.Command{
		Name:      "combine",
		Usage:     "make one store of the stores of shards",
		ArgsUsage: "OUT.db IN.db...",
		Description: "The shards are those that ingest --shard made of one archive, all in the same way. OUT becomes what one ingest of\n" +
			"all their files would have made, in whatever order they are named and however often; what was computed is taken\n" +
			"over. A run that was stopped is finished by the next one. Shards that were combined before stay, so that only those\n" +
			"that have changed need be named again.\n\n" +
			"Exit codes: 0 done; 1 failed: shards cannot be read or do not go together; 2 wrong usage; 3 done, but some files were\n" +
			"rejected, or shards are missing; 5 another run holds the store; 130 interrupted.",
		Flags: []cli.Flag{
			&cli.IntFlag{Name: "workers", DefaultText: "one a processor", Usage: "files, or results, in work at the same time"},
			rotationFlag(),
			asJSONFlag("report"),
		},
		Action: func(c *cli.Context) error {
			o, err := newCombineOptions(c)
			if err != nil {
				return err
			}
			return runCombine(c.Context, o, c.App.Writer)
		},
	}
}

type combineOptions struct {
	ingest ingestOptions
	shards []string
}

func newCombineOptions(c *cli.Context) (o combineOptions, err error) {
	if c.NArg() < 2 {
		return o, usagef("combine needs OUT.db and at least one IN.db")
	}
	if c.IsSet("store") {
		return o, usagef("--store does not go with combine: its first argument is the store")
	}
	if err := checkWorkers(c); err != nil {
		return o, err
	}
	logger, err := newLogger(c)
	if err != nil {
		return o, err
	}
	out := c.Args().First()
	o.shards = c.Args().Tail()
	for _, in := range o.shards {
		if db.IsSameFile(in, out) {
			return o, usagef("%s is named as a shard and as what they are combined into", out)
		}
	}
	o.ingest = ingestOptions{store: out, json: c.Bool("json"), monitor: newMonitor(logger, c.App.ErrWriter, c.Bool("quiet"))}
	o.ingest.pipeline = combineWith(pipelineOptions(out, o.ingest.monitor), o.ingest.monitor)
	o.ingest.pipeline.Workers, o.ingest.pipeline.SkipRotation = c.Int("workers"), !c.Bool("rotation")
	return o, nil
}

// combineWith has the monitor show the stages of a combination.
func combineWith(o pipeline.Options, m *monitor) pipeline.Options {
	o.Gathered, o.Progress = m.gathered, m.placed
	return o
}

// combineReport is what the command prints beside what it made of the files.
type combineReport struct {
	ingestReport
	Shards    []combinedShard `json:"shards"`
	Count     int             `json:"shard_count"`
	Missing   []int           `json:"missing_shards"`
	Unseen    *unseenReport   `json:"unseen"`
	Taken     gatheredReport  `json:"taken_over"`
	IsRebuilt bool            `json:"is_rebuilt"` // files were given their places anew
	IsNew     bool            `json:"is_new_edition"`
	Refused   int             `json:"rejected_in_store"`
	Edition   int64           `json:"edition"` // that is published

	newest, before int64 // editions
}

type combinedShard struct {
	Number int    `json:"shard"`
	Path   string `json:"path"`
}

// unseenReport tells of files that some shards saw, and others did not.
type unseenReport struct {
	Files int    `json:"files"`
	First string `json:"first"`
}

// newUnseenReport is nil where all saw the same files.
func newUnseenReport(u db.Unseen) *unseenReport {
	if u.Files == 0 {
		return nil
	}
	return &unseenReport{u.Files, u.First}
}

func (u *unseenReport) print(p *printer) {
	if u != nil {
		p.printf("Files that some shards saw and others did not, whose records may lack: %d, the first %s; fill all shards again\n", u.Files, u.First)
	}
}

type gatheredReport struct {
	Files        int `json:"files"`
	Gone         int `json:"gone"`
	Computations int `json:"computations"`
	Damaged      int `json:"damaged_computations"`
}

// runCombine combines shards and prints what became of them. No other run may write to the
// store meanwhile.
func runCombine(ctx context.Context, o combineOptions, w io.Writer) (err error) {
	parts, err := openParts(ctx, o.shards)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, closeParts(parts)) }()
	if err := pipeline.CheckParts(ctx, parts, o.ingest.pipeline, pipeline.Study{}); err != nil { // before there is a store
		return notCombined(o.ingest.store, err)
	}
	return lockedAt(ctx, o.ingest.store, o.ingest.pipeline.Started, db.AnySolver, func(store *db.Store) error { return combine(ctx, store, parts, o, w) })
}

// combine is runCombine on open stores.
func combine(ctx context.Context, store *db.Store, parts []*db.Part, o combineOptions, w io.Writer) error {
	done, err := pipeline.Combine(ctx, store, parts, o.ingest.pipeline, pipeline.Study{Approve: approveAll})
	o.ingest.monitor.end()
	switch {
	case err != nil && ctx.Err() != nil:
		return interruption(done.Summary, done.Gathered)
	case err != nil:
		return notCombined(o.ingest.store, err)
	}
	report := newCombineReport(o, parts, done)
	if report.Refused, err = rejectedFiles(ctx, store); err != nil {
		return err
	}
	if err := report.print(w, o.ingest.json); err != nil {
		return err
	}
	switch {
	case done.Summary.Damaged > 0:
		return fmt.Errorf("%s is damaged (records: %d); combine the shards into a new store", o.ingest.store, done.Summary.Damaged)
	case report.Refused > 0 || len(report.Missing) > 0 || !done.Complete():
		return errRejected
	}
	return nil
}

// notCombined says into what shards could not be combined, and what to do about it.
func notCombined(store string, err error) error {
	if errors.Is(err, db.ErrFull) {
		return fmt.Errorf("combine into %s: %w; the same command goes on once there is room", store, err)
	}
	return fmt.Errorf("combine into %s: %w", store, err)
}

func approveAll(context.Context, int64, int64) (bool, error) { return true, nil }

// openParts opens the shards. The error has every mistake.
func openParts(ctx context.Context, paths []string) (parts []*db.Part, err error) {
	var wrong []error
	for _, path := range paths {
		part, err := db.OpenPart(ctx, path)
		if err != nil {
			wrong = append(wrong, err)
			continue
		}
		parts = append(parts, part)
	}
	if err = errors.Join(wrong...); err != nil {
		return nil, errors.Join(err, closeParts(parts))
	}
	return parts, nil
}

func closeParts(parts []*db.Part) error {
	var errs []error
	for _, p := range parts {
		errs = append(errs, p.Close())
	}
	return errors.Join(errs...)
}

func newCombineReport(o combineOptions, parts []*db.Part, done pipeline.Combination) combineReport {
	r := combineReport{
		ingestReport: newIngestReport(o.ingest, done.Summary, true), Shards: []combinedShard{}, Count: parts[0].Count, Missing: append([]int{}, done.Missing...), Unseen: newUnseenReport(done.Unseen),
		Taken:     gatheredReport{done.Gathered.Files, done.Gathered.Gone, done.Gathered.Computations, done.Gathered.Damaged},
		IsRebuilt: done.IsRead, IsNew: done.IsNew, Edition: done.Published, newest: done.Edition, before: done.Before,
	}
	for _, p := range parts {
		r.Shards = append(r.Shards, combinedShard{p.Number, p.Path()})
	}
	return r
}

func (r combineReport) print(w io.Writer, asJSON bool) error {
	if asJSON {
		return writeJSON(w, r)
	}
	p := &printer{w: w}
	p.printf("%d of %d shards into %s\n", len(r.Shards), r.Count, r.Store)
	p.printf("  files taken over                        %7d\n", r.Taken.Files)
	if r.Taken.Gone > 0 {
		p.printf("  files that shards have no more          %7d\n", r.Taken.Gone)
	}
	p.printf("  results taken over                      %7d\n", r.Taken.Computations)
	if r.Taken.Damaged > 0 {
		p.printf("  results damaged in shards, not taken    %7d\n", r.Taken.Damaged)
	}
	if len(r.Missing) > 0 {
		p.printf("Shards that are missing, whose records lack until they are combined too: %s\n", numbers(r.Missing))
	}
	r.Unseen.print(p)
	switch {
	case p.err != nil:
		return p.err
	case r.IsRebuilt:
		p.err = r.ingestReport.print(w, false)
	case r.IsNew: // which other results have made of the same files
		r.printComputed(p)
		r.printRotation(p)
	}
	if !r.IsRebuilt {
		p.rejected(r.Store, r.Refused)
	}
	r.printEdition(p)
	return p.err
}

// printEdition says what questions read now.
func (r combineReport) printEdition(p *printer) {
	switch {
	case r.Edition != r.newest:
		p.printf("Edition %d stays published, as somebody wished; the newest is %d.\n", r.Edition, r.newest)
	case r.Edition != r.before && r.before != 0:
		p.printf("Edition %d is published, before it was %d.\n", r.Edition, r.before)
	case r.Edition != r.before:
		p.printf("Edition %d is published.\n", r.Edition)
	default:
		p.printf("Nothing is new: edition %d is that of the shards.\n", r.Edition)
	}
}

// numbers lists numbers, and no more than people read.
func numbers(list []int) string {
	var words []string
	for i, n := range list {
		if i == maxLines && len(list) > maxLines+1 {
			return strings.Join(words, ", ") + fmt.Sprintf(" and %d more", len(list)-i)
		}
		words = append(words, fmt.Sprint(n))
	}
	return strings.Join(words, ", ")
}
