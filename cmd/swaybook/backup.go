package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"

	"github.com/urfave/cli/v2"

	"swaybook/db"
)

func backupCommand() *cli.Command {
	return &cli.Command{
		Name:      "backup",
		Usage:     "copy the store, also while a run is at work on it",
		ArgsUsage: "FILE",
		Description: "Writes a copy of the whole store as it is between two batches. FILE is there when the copy is whole and on the\n" +
			"disk, or not at all; runs and questions go on meanwhile. A backup is a store like the one it was made of.",
		Flags: []cli.Flag{
			&cli.BoolFlag{Name: "force", DisableDefaultText: true, Usage: "replace FILE if it exists"},
		},
		Action: func(c *cli.Context) error {
			if c.NArg() != 1 || c.Args().First() == "" {
				return usagef("backup needs one FILE")
			}
			return runBackup(c.Context, backupOptions{store: storePath(c), file: c.Args().First(), force: c.Bool("force")}, c.App.Writer)
		},
	}
}

type backupOptions struct {
	store, file string
	force       bool
}

// runBackup copies the store and says how large the copy is.
func runBackup(ctx context.Context, o backupOptions, w io.Writer) error {
	size, err := db.Backup(ctx, o.store, o.file, o.force)
	if errors.Is(err, fs.ErrExist) {
		return fmt.Errorf("%w; --force replaces it", err)
	}
	if err != nil {
		return err
	}
	_, err = fmt.Fprintf(w, "%s: %.1f MB\n", o.file, float64(size)/1e6)
	return err
}
