package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"slices"
	"syscall"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/query"
)

// version is the program's own; the solver's version, on which comparability
// depends, is kept with every store.
const version = "0.1.0"

// The exit codes. They are an interface: scripts branch on them.
const (
	exitDone        = 0
	exitFailed      = 1
	exitUsage       = 2
	exitRejected    = 3 // done, but some files were rejected, or shards are missing
	exitHeld        = 4 // done, but the results are held back
	exitLocked      = 5 // another run holds the store
	exitInterrupted = 130
)

// errRejected ends a command that did its work although files were rejected, or shards
// were missing. What was rejected, or is missing, has been reported by then.
var errRejected = errors.New("some files were rejected")

// errInterrupted ends a command that somebody stopped.
var errInterrupted = errors.New("interrupted")

// usageError is a mistake in the command line.
type usageError struct{ err error }

func (e *usageError) Error() string { return e.err.Error() }
func (e *usageError) Unwrap() error { return e.err }

func usagef(format string, args ...any) error {
	return &usageError{fmt.Errorf(format, args...)}
}

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	// The first signal ends the work in order, the second at once.
	context.AfterFunc(ctx, stop)
	os.Exit(run(ctx, os.Args, os.Stdout, os.Stderr))
}

// run is the program without the process: it returns the exit code.
func run(ctx context.Context, args []string, stdout, stderr io.Writer) int {
	app := newApp(stdout, stderr)
	args, err := arrange(app, args)
	if err == nil {
		err = app.RunContext(ctx, args)
	}
	return exitCode(err, stderr)
}

// exitCode prints the error, if there is one to print, and ranks it.
func exitCode(err error, stderr io.Writer) int {
	if err == nil {
		return exitDone
	}
	code := rank(err)
	if code == exitInterrupted && !errors.Is(err, errInterrupted) {
		err = errInterrupted
	}
	if code != exitRejected {
		fmt.Fprintln(stderr, "swaybook: "+err.Error())
	}
	return code
}

// rank is the exit code of an error, nil for none.
func rank(err error) int {
	switch {
	case err == nil:
		return exitDone
	case isRejectedOnly(err):
		return exitRejected
	case errors.Is(err, errInterrupted), errors.Is(err, context.Canceled):
		return exitInterrupted
	case isUsage(err):
		return exitUsage
	case errors.Is(err, errHeld):
		return exitHeld
	}
	if _, ok := errors.AsType[*db.LockedError](err); ok {
		return exitLocked
	}
	return exitFailed
}

// isRejectedOnly reports whether nothing went wrong but that files were rejected.
func isRejectedOnly(err error) bool {
	switch e := err.(type) {
	case interface{ Unwrap() []error }:
		return !slices.ContainsFunc(e.Unwrap(), func(one error) bool { return !isRejectedOnly(one) })
	case interface{ Unwrap() error }:
		return isRejectedOnly(e.Unwrap())
	}
	return err == errRejected
}

// isUsage reports whether an error is a mistake of the user's.
func isUsage(err error) bool {
	_, inCommand := errors.AsType[*usageError](err)
	_, inQuestion := errors.AsType[*query.UsageError](err)
	return inCommand || inQuestion
}

func newApp(stdout, stderr io.Writer) *cli.App {
	app := &cli.App{
		Name:    "swaybook",
		Usage:   "response spectra of recorded ground motions, and what they demand of structures",
		Version: version,
		Description: "Reads record files into a store, computes their response spectra, and answers for a structure\n" +
			"what displacement, base shear and base moment the recorded motions produced.\n\n" +
			"Exit codes: 0 done; 1 failed; 2 wrong usage; 3 done, but some files were rejected,\n" +
			"or shards are missing; 4 done, but the results are held back; 5 another run holds the store; 130 interrupted.\n\n" + caution,
		Flags:  globalFlags(),
		Before: checkGlobalFlags,
		// The name of a file may hold commas; lists are for their own flags to read.
		DisableSliceFlagSeparator: true,
		Commands: []*cli.Command{
			ingestCommand(),
			combineCommand(),
			queryCommand(),
			exportCommand(),
			reportCommand(),
			reprocessCommand(),
			clusterCommand(),
			runsCommand(),
			pruneCommand(),
			backupCommand(),
			verifyCommand(),
			formatsCommand(),
			recipesCommand(),
			demoCommand(),
		},
		Writer:         stdout,
		ErrWriter:      stderr,
		ExitErrHandler: func(*cli.Context, error) {}, // run decides the exit code
		Action:         missingCommand,
	}
	app.OnUsageError = onUsageError
	for _, c := range app.Commands {
		setUsageHandling(c)
	}
	return app
}

// caution goes with everything that somebody might design by.
const caution = query.Caution

// setUsageHandling keeps the library from printing help on stdout and from
// ending the process on a mistake.
func setUsageHandling(c *cli.Command) {
	c.OnUsageError = onUsageError
	if len(c.Subcommands) == 0 {
		c.HideHelpCommand = true // its arguments may be named "help" and "h"
	} else if c.Action == nil {
		c.Action = missingCommand
	}
	for _, sub := range c.Subcommands {
		setUsageHandling(sub)
	}
}

func onUsageError(_ *cli.Context, err error, _ bool) error { return &usageError{err} }

// missingCommand answers where a command was expected.
func missingCommand(c *cli.Context) error {
	if name := c.Args().First(); name != "" {
		return usagef("unknown command %q; see %s --help", name, c.App.Name)
	}
	return usagef("no command given; see %s --help", c.App.Name)
}
