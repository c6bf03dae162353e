package main

import (
	"context"
	"io"

	"github.com/urfave/cli/v2"

	"swaybook/db"
)

func pruneCommand() *cli.Command {
	return &cli.Command{
		Name:  "prune",
		Usage: "remove what earlier runs left, but for the last",
		Description: "Keeps the editions of the last runs that made one, and the published one, and removes the others with all that was\n" +
			"computed and stored for them only. What is freed in the store serves later runs; --shrink gives it back.\n" +
			"A prune that was stopped is finished by the next one.",
		Flags: []cli.Flag{
			&cli.IntFlag{Name: "keep", DefaultText: "none, it must be given", Usage: "editions to keep, the last `K`"},
			&cli.BoolFlag{Name: "shrink", DisableDefaultText: true, Usage: "give what is free back to the file system: needs room for twice what stays, and runs wait"},
			asJSONFlag("result"),
		},
		Action: func(c *cli.Context) error {
			if err := noArguments(c); err != nil {
				return err
			}
			o := pruneOptions{keep: c.Int("keep"), shrink: c.Bool("shrink"), json: c.Bool("json")}
			if !c.IsSet("keep") {
				return usagef("prune needs --keep K, the number of editions to keep")
			}
			if o.keep < 1 {
				return usagef("--keep %d: want at least 1", o.keep)
			}
			return withLockedStore(c, func(ctx context.Context, store *db.Store) error {
				return runPrune(ctx, store, o, c.App.Writer)
			})
		},
	}
}

type pruneOptions struct {
	keep         int
	shrink, json bool
}

// pruneReport is what the command prints, as text and as JSON.
type pruneReport struct {
	Store        string  `json:"store"`
	Editions     []int64 `json:"editions"` // removed
	Rows         int     `json:"edition_rows"`
	Computations int     `json:"computations"`
	Spectra      int     `json:"spectra"`
	Series       int     `json:"series"`
	OffGrid      int     `json:"off_grid_rows"`
	Generations  int     `json:"generations"`
	Before       int64   `json:"used_bytes_before"`
	Used         int64   `json:"used_bytes"`
	File         int64   `json:"file_bytes"`
}

func runPrune(ctx context.Context, store *db.Store, o pruneOptions, w io.Writer) error {
	r, err := prune(ctx, store, o)
	if err != nil {
		return err
	}
	if o.json {
		return writeJSON(w, r)
	}
	return r.print(w)
}

// prune removes editions and says what that freed.
func prune(ctx context.Context, store *db.Store, o pruneOptions) (*pruneReport, error) {
	before, err := store.Size(ctx)
	if err != nil {
		return nil, err
	}
	p, err := store.Prune(ctx, o.keep)
	if err == nil && o.shrink {
		err = store.Shrink(ctx)
	}
	if err != nil {
		return nil, err
	}
	after, err := store.Size(ctx)
	if err != nil {
		return nil, err
	}
	return &pruneReport{
		Store: store.Path(), Editions: append([]int64{}, p.Editions...), Rows: p.Rows, Computations: p.Computations, Spectra: p.Spectra, Series: p.Series,
		OffGrid: p.OffGridRows, Generations: p.Generations, Before: before.Used, Used: after.Used, File: after.File,
	}, nil
}

func (r *pruneReport) print(w io.Writer) error {
	p := &printer{w: w}
	p.printf("%s\n", r.Store)
	p.printf("  editions removed      %9d\n", len(r.Editions))
	p.printf("  rows of theirs        %9d\n", r.Rows)
	p.printf("  computations          %9d  with %d spectra\n", r.Computations, r.Spectra)
	p.printf("  series of samples     %9d\n", r.Series)
	p.printf("  rows off the grid     %9d\n", r.OffGrid)
	p.printf("  generations           %9d\n", r.Generations)
	p.printf("freed %.1f MB; %.1f MB in use, the file has %.1f MB\n", megabytes(r.Before-r.Used), megabytes(r.Used), megabytes(r.File))
	return p.err
}

func megabytes(n int64) float64 { return float64(n) / 1e6 }
