package main

import (
	"context"
	"io"

	"github.com/urfave/cli/v2"

	"swaybook/db"
)

func runsShowCommand() *cli.Command {
	return &cli.Command{
		Name:        "show",
		Usage:       "show a run, and what it changed",
		ArgsUsage:   "RUN",
		Description: "What a run changed is the difference of its edition from the one before, the last that is kept.",
		Flags:       []cli.Flag{asJSONFlag("run")},
		Action: func(c *cli.Context) error {
			run, err := runNumber(c)
			if err != nil {
				return err
			}
			return withStore(c, func(ctx context.Context, store *db.Store) error {
				return showRun(ctx, store, run, c.Bool("json"), c.App.Writer)
			})
		},
	}
}

// runReport is a run in JSON, with what it changed.
type runReport struct {
	runRow
	Recipe       *string       `json:"recipe"` // null where no edition is kept
	Solver       *string       `json:"solver"`
	Before       *int64        `json:"edition_before"` // null where there is none
	RecipeBefore *string       `json:"recipe_before"`
	Changes      *changeReport `json:"changes"` // null where they are not known
}

// changeReport are what differs between two editions.
type changeReport struct {
	Records    changeRow  `json:"records"`
	Components changeRow  `json:"components"`
	Recomputed codeReport `json:"computed_anew"`
	Events     changeRow  `json:"events"`
	Stations   changeRow  `json:"stations"`
	Files      changeRow  `json:"files"`
	Rejections changeRow  `json:"rejections"`
}

type changeRow struct {
	Added   codeReport `json:"added"`
	Removed codeReport `json:"removed"`
	Changed codeReport `json:"changed"`
}

// codeReport counts codes and lists the first.
type codeReport struct {
	Count int      `json:"count"`
	Codes []string `json:"codes"`
}

func newCodeReport(codes []string) codeReport {
	return codeReport{len(codes), append([]string{}, codes[:min(len(codes), maxNotes)]...)}
}

func newChangeRow(c db.Change) changeRow {
	return changeRow{newCodeReport(c.Added), newCodeReport(c.Removed), newCodeReport(c.Changed)}
}

func newRunReport(d *db.RunDetails) (r runReport, err error) {
	if r.runRow, err = newRunRow(&d.Run); err != nil || d.Edition == 0 {
		return r, err
	}
	r.Recipe, r.Solver = &d.Generation.Recipe.Name, &d.Generation.Solver
	if d.Before != 0 {
		r.Before, r.RecipeBefore = &d.Before, &d.BeforeGeneration.Recipe.Name
	}
	if d.Changes != nil {
		r.Changes = newChangeReport(d.Changes)
	}
	return r, nil
}

func newChangeReport(c *db.Changes) *changeReport {
	return &changeReport{
		Records: newChangeRow(c.Records), Components: newChangeRow(c.Components), Recomputed: newCodeReport(c.Recomputed), Events: newChangeRow(c.Events),
		Stations: newChangeRow(c.Stations), Files: newChangeRow(c.Files), Rejections: newChangeRow(c.Rejections),
	}
}

func showRun(ctx context.Context, store *db.Store, run int64, asJSON bool, w io.Writer) error {
	d, err := store.RunDetails(ctx, run)
	if err != nil {
		return err
	}
	r, err := newRunReport(d)
	if err != nil {
		return err
	}
	if asJSON {
		return writeJSON(w, r)
	}
	p := &printer{w: w}
	r.print(p)
	return p.err
}

func (r *runReport) print(p *printer) {
	number, state := r.edition()
	p.printf("run %d, %s by %s\n", r.Run, r.Kind, r.Program)
	p.printf("started %s, took %s, %s\n", r.Started, r.duration(), r.Outcome)
	c := &r.counted
	p.printf("files %d, components stored %d in %d new records, computed anew %d, records rotated %d, files held %d, skipped %d, rejected %d\n",
		c.Files, c.Stored, c.Records, c.Recomputed, c.Rotated, c.Held, c.Skipped, c.Rejected)
	if r.Edition == nil {
		p.printf("edition %s\n", map[bool]string{true: "no longer kept", false: "none"}[state == db.EditionGone])
		return
	}
	p.printf("edition %s, %s, recipe %s, solver %s\n", number, state, *r.Recipe, *r.Solver)
	r.printChanges(p)
}

func (r *runReport) printChanges(p *printer) {
	switch {
	case *r.Edition != r.Run:
		p.printf("It changed nothing that questions read.\n")
		return
	case r.Changes == nil:
		p.printf("What it changed is not known: no edition before it is kept.\n")
		return
	case r.Before == nil:
		p.printf("It made the first edition:\n")
	case *r.RecipeBefore != *r.Recipe:
		p.printf("Changed since edition %d, of recipe %s:\n", *r.Before, *r.RecipeBefore)
	default:
		p.printf("Changed since edition %d:\n", *r.Before)
	}
	r.Changes.print(p, maxLines)
}

// print writes the counts, and so many codes of each.
func (c *changeReport) print(p *printer, codes int) {
	for _, kind := range []struct {
		name string
		row  changeRow
	}{
		{"records", c.Records}, {"components", c.Components}, {"events", c.Events}, {"stations", c.Stations},
		{"files", c.Files}, {"rejections", c.Rejections},
	} {
		p.codes(kind.name+" added", kind.row.Added, codes)
		p.codes(kind.name+" removed", kind.row.Removed, codes)
		p.codes(kind.name+" changed", kind.row.Changed, codes)
	}
	p.codes("computed anew", c.Recomputed, codes)
}

// codes prints a count and the first codes, a line each, nothing where there is none.
func (p *printer) codes(what string, c codeReport, most int) {
	if c.Count == 0 {
		return
	}
	p.printf("  %-20s %7d\n", what, c.Count)
	for i, code := range c.Codes {
		if i == most {
			p.printf("    … and %d more; --json lists them\n", c.Count-most)
			return
		}
		p.printf("    %s\n", code)
	}
}
