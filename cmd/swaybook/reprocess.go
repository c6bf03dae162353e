package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"

	"github.com/urfave/cli/v2"

	"swaybook/pipeline/study"
)

func reprocessCommand() *cli.Command {
	return &cli.Command{
		Name:      "reprocess",
		Usage:     "check what a study would do",
		ArgsUsage: "STUDY.toml",
		Description: "A study names a store, the sources that fill it, how it is computed, and the questions whose answers are written\n" +
			"after each run; README.md has its keys. It needs --check: the study is read with all that it names, every mistake is\n" +
			"reported, and the plan is printed. Nothing is written.\n\n" +
			"Exit codes: 0 the study is right; 1 something that it names cannot be read, or a source holds nothing; 2 it is wrong.",
		Flags: []cli.Flag{
			&cli.BoolFlag{Name: "check", DisableDefaultText: true, Usage: "check the study and show the plan without doing it"},
			&cli.BoolFlag{Name: "json", DisableDefaultText: true, Usage: "print the plan as JSON"},
		},
		Action: func(c *cli.Context) error {
			if c.NArg() != 1 {
				return usagef("reprocess needs one STUDY.toml, found %d arguments", c.NArg())
			}
			if c.IsSet("store") {
				return usagef("--store does not go with reprocess: the study names its store")
			}
			plan, err := readStudyPlan(c, c.Args().First())
			if err != nil {
				return err
			}
			if c.Bool("check") {
				return plan.print(c.App.Writer, c.Bool("json"))
			}
			return runReprocess(c.Context, plan, c.App.Writer)
		},
	}
}

// runReprocess carries out a plan that was checked.
func runReprocess(_ context.Context, plan *studyPlan, _ io.Writer) error {
	return usagef("%s is right; reprocess needs --check, since it only shows the plan", plan.study.File)
}

// maxStudy bounds the file of a study in bytes, above what its reader takes.
const maxStudy = 2 << 20

// readStudy reads the file of a study. The study comes beside the mistakes in it, nil
// where nothing could be made of it.
func readStudy(file string) (*study.Study, error) {
	text, err := readWhole(file, maxStudy)
	if err != nil {
		return nil, fmt.Errorf("read study: %w", err)
	}
	path, err := filepath.Abs(file)
	if err != nil {
		return nil, fmt.Errorf("read study: %w", err)
	}
	return study.Parse(file, filepath.Dir(path), text, studyVocabulary())
}

// readWhole returns what is in a file, the first so many bytes at most.
func readWhole(file string, most int64) ([]byte, error) {
	info, err := os.Stat(file) // before opening: a named pipe would wait for a writer
	if err != nil {
		return nil, err
	}
	if !info.Mode().IsRegular() {
		return nil, usagef("%s is no file", file)
	}
	f, err := os.Open(file)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	return io.ReadAll(io.LimitReader(f, most))
}

// studyError ranks mistakes: what is wrong with the study comes before what cannot be
// read of what it names.
func studyError(mistakes study.Mistakes) error {
	if len(mistakes) == 0 {
		return nil
	}
	mistakes = mistakes.Sorted()
	for _, m := range mistakes {
		if !isUnreadable(m.Err) {
			return &usageError{mistakes}
		}
	}
	return &unreadableError{mistakes}
}

// unreadableError says that a study may be right, but not what it names. It hides what
// the errors below it would be ranked as.
type unreadableError struct{ mistakes study.Mistakes }

func (e *unreadableError) Error() string { return e.mistakes.Error() }

// isUnreadable reports whether an error is of the world, not of the study.
func isUnreadable(err error) bool {
	_, ofPath := errors.AsType[*os.PathError](err)
	return ofPath || errors.Is(err, os.ErrNotExist) || errors.Is(err, os.ErrPermission) || !isUsage(err)
}
