package main

import (
	"context"
	"encoding/json"
	"fmt"
	"io"
	"strconv"
	"text/tabwriter"
	"time"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/pipeline"
)

func runsCommand() *cli.Command {
	return &cli.Command{
		Name:  "runs",
		Usage: "list the runs that filled the store, and what each left",
		Description: "Each run that changed something left an edition, under its own number: what questions read of it. One is published;\n" +
			"questions take --as-of RUN to read that which was published when a run had ended.",
		Flags: []cli.Flag{asJSONFlag("list")},
		Action: func(c *cli.Context) error {
			if c.Args().Present() {
				return missingCommand(c)
			}
			return withStore(c, func(ctx context.Context, store *db.Store) error {
				return listRuns(ctx, store, c.Bool("json"), c.App.Writer)
			})
		},
		Subcommands: []*cli.Command{runsShowCommand(), runsPublishCommand()},
	}
}

func asJSONFlag(what string) cli.Flag {
	return &cli.BoolFlag{Name: "json", DisableDefaultText: true, Usage: "print the " + what + " as JSON"}
}

// runRow is a run in JSON.
type runRow struct {
	Run      int64    `json:"run"`
	Kind     string   `json:"kind"`
	Started  string   `json:"started"`
	Ended    *string  `json:"ended"` // null of a run that is at work, or died
	Duration *float64 `json:"duration_s"`
	Outcome  string   `json:"outcome"`
	// Counts is what the run counted, {} until it ends.
	Counts  json.RawMessage `json:"counts"`
	Edition *int64          `json:"edition"`       // null where none is kept
	State   *string         `json:"edition_state"` // null where there was none
	Program string          `json:"program"`

	counted pipeline.Summary
}

func newRunRow(r *db.Run) (runRow, error) {
	row := runRow{Run: r.ID, Kind: r.Kind, Started: r.Started.Format(time.RFC3339Nano), Outcome: r.Outcome, Counts: r.Counts, Program: r.Program}
	if !r.Ended.IsZero() {
		ended, s := r.Ended.Format(time.RFC3339Nano), r.Ended.Sub(r.Started).Seconds()
		row.Ended, row.Duration = &ended, &s
	}
	if r.Edition != 0 {
		row.Edition = &r.Edition
	}
	if r.EditionState != "" {
		row.State = &r.EditionState
	}
	if err := json.Unmarshal(r.Counts, &row.counted); err != nil {
		return row, fmt.Errorf("read counts of run %d: %w", r.ID, err)
	}
	return row, nil
}

func (r *runRow) duration() string {
	if r.Duration == nil {
		return "-"
	}
	return strconv.FormatFloat(*r.Duration, 'f', 1, 64) + " s"
}

func (r *runRow) edition() (number, state string) {
	if number, state = "-", "-"; r.Edition != nil {
		number = strconv.FormatInt(*r.Edition, 10)
	}
	if r.State != nil {
		state = *r.State
	}
	return number, state
}

// listRuns prints all runs, the first first.
func listRuns(ctx context.Context, store *db.Store, asJSON bool, w io.Writer) error {
	runs, err := store.Runs(ctx)
	if err != nil {
		return err
	}
	rows := make([]runRow, len(runs))
	for i := range runs {
		if rows[i], err = newRunRow(&runs[i]); err != nil {
			return err
		}
	}
	if asJSON {
		return writeList(w, "runs", rows)
	}
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fmt.Fprintln(t, "run\tkind\tstarted (UTC)\ttook\toutcome\tedition\tstate\tfiles\tstored\tcomputed anew\trejected\tprogram")
	for i := range rows {
		r, c := &rows[i], &rows[i].counted
		number, state := r.edition()
		fmt.Fprintf(t, "%d\t%s\t%s\t%s\t%s\t%s\t%s\t%d\t%d\t%d\t%d\t%s\n", r.Run, r.Kind, runs[i].Started.Format(time.DateTime),
			r.duration(), r.Outcome, number, state, c.Files, c.Stored, c.Recomputed, c.Rejected, r.Program)
	}
	return t.Flush()
}

// runNumber reads the one argument of a command about a run.
func runNumber(c *cli.Context) (int64, error) {
	if c.NArg() != 1 {
		return 0, usagef("%s needs the number of one RUN, found %d arguments", c.Command.FullName(), c.NArg())
	}
	n, err := strconv.ParseInt(c.Args().First(), 10, 64)
	if err != nil || n < 1 {
		return 0, usagef("%s: %q is no number of a run", c.Command.FullName(), c.Args().First())
	}
	return n, nil
}

func runsPublishCommand() *cli.Command {
	return &cli.Command{
		Name:      "publish",
		Usage:     "have questions read what a run left",
		ArgsUsage: "RUN",
		Description: "Makes the edition that the run left, held back or superseded, the published one. Nothing is lost: the other one can\n" +
			"be published again. The next run goes on with the recipe of what is published.",
		Action: func(c *cli.Context) error {
			run, err := runNumber(c)
			if err != nil {
				return err
			}
			return withLockedStore(c, func(ctx context.Context, store *db.Store) error {
				return publishRun(ctx, store, run, c.App.Writer)
			})
		},
	}
}

func publishRun(ctx context.Context, store *db.Store, run int64, w io.Writer) error {
	var e, before db.Edition
	var was bool
	err := store.Update(ctx, func(tx *db.Tx) (err error) {
		e, before, was, err = tx.PublishRun(ctx, run, pipeline.SolverVersion)
		return err
	})
	switch {
	case err != nil:
		return err
	case was && before.ID == e.ID:
		_, err = fmt.Fprintf(w, "edition %d is published already\n", e.ID)
	case was:
		_, err = fmt.Fprintf(w, "edition %d is published, before it was %d\n", e.ID, before.ID)
	default:
		_, err = fmt.Fprintf(w, "edition %d is published, before it was none\n", e.ID)
	}
	return err
}
