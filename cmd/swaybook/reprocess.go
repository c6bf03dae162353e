package main

import (
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
		Usage:     "make a store that of a study's files as they are, and write the answers that the study asks for",
		ArgsUsage: "STUDY.toml",
		Description: "A study names a store, the sources that fill it, how it is computed, and the questions whose answers are written\n" +
			"after each run; README.md has its keys. Nothing is computed that was computed before of the same samples in the same\n" +
			"way. What questions read changes at the end, at once, or not at all: what differs too much from what is published is\n" +
			"held back, for swaybook runs publish to publish it.\n\n" +
			"With --check the study is read with all that it names, every mistake is reported, and the plan is printed. Nothing is\n" +
			"written.\n\n" +
			"Exit codes: 0 done; 1 failed: something that the study names cannot be read, a source holds nothing, or the run could\n" +
			"not be finished; 2 the study is wrong; 3 done, but some files were rejected; 4 done, but the results are held back;\n" +
			"5 another run holds the store; 130 interrupted.",
		Flags: []cli.Flag{
			&cli.BoolFlag{Name: "check", DisableDefaultText: true, Usage: "check the study and show the plan without doing it"},
			&cli.BoolFlag{Name: "rehash", DisableDefaultText: true, Usage: "read all files again, whatever their sizes and times say"},
			&cli.StringFlag{Name: "max-drift", Usage: "hold results back that differ from the published ones by more than this `RATIO`, such as 5% (default: the study's)"},
			&cli.IntFlag{Name: "workers", DefaultText: "one a processor", Usage: "files in work at the same time"},
			shardFlag(),
			&cli.IntFlag{Name: "combine", DefaultText: "none", Usage: "take the files' records from the `N` stores that --shard 1/N to N/N filled"},
			&cli.BoolFlag{Name: "allow-rejected", DisableDefaultText: true, Usage: "exit with 0, not 3, where files were rejected, for schedulers that know success and failure only"},
			asJSONFlag("plan, or what became of the run,"),
		},
		Action: func(c *cli.Context) error {
			if c.NArg() != 1 {
				return usagef("reprocess needs one STUDY.toml, found %d arguments", c.NArg())
			}
			if c.IsSet("store") {
				return usagef("--store does not go with reprocess: the study names its store")
			}
			o, err := newReprocessOptions(c)
			if err != nil {
				return err
			}
			plan, err := readStudyPlan(c, c.Args().First())
			if err != nil {
				if plan != nil && plan.study != nil && !c.Bool("check") && rank(err) == exitFailed {
					err = errors.Join(err, plan.leaveFailure(c.Context, o.shard, err))
				}
				return err
			}
			if c.Bool("check") {
				return plan.print(c.App.Writer, o)
			}
			plan.ingest.pipeline.Workers = c.Int("workers")
			if err = reprocess(c, plan, o); c.Bool("allow-rejected") && isRejectedOnly(err) {
				return nil
			}
			return err
		},
	}
}

// reprocess carries out a plan, or its part in a shard.
func reprocess(c *cli.Context, plan *studyPlan, o reprocessOptions) error {
	if o.shard.Count > 0 {
		return runStudyShard(c.Context, plan, o, c.App.Writer)
	}
	plan.ownShards(o.combine)
	if o.combine > 0 {
		plan.ingest.pipeline.Catalogue = nil // what it says came with the shards
	}
	return runReprocess(c.Context, plan, o, c.App.Writer)
}

func newReprocessOptions(c *cli.Context) (o reprocessOptions, err error) {
	o.rehash, o.json = c.Bool("rehash"), c.Bool("json")
	if c.IsSet("max-drift") {
		bound, errBound := study.ParseRatio(c.String("max-drift"))
		if errBound != nil {
			err = usagef("--max-drift %q: %w", c.String("max-drift"), errBound)
		}
		o.maxDrift = &bound
	}
	var errShard error
	o.shard, errShard = askedShard(c)
	err = errors.Join(err, errShard)
	if o.combine = c.Int("combine"); c.IsSet("combine") && (o.combine < 1 || o.combine > maxShards) {
		err = errors.Join(err, usagef("--combine %d: want 1 to %d", o.combine, maxShards))
	}
	if c.IsSet("combine") && o.rehash {
		err = errors.Join(err, usagef("--rehash reads files again, of which --combine reads none: say it where the shards are filled"))
	}
	if c.IsSet("shard") && c.IsSet("combine") {
		err = errors.Join(err, usagef("--shard fills one of the stores that --combine takes: give one of the two"))
	}
	return o, errors.Join(err, checkWorkers(c))
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
