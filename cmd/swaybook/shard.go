package main

import (
	"errors"
	"fmt"
	"os"
	"strconv"
	"strings"

	"github.com/urfave/cli/v2"

	"swaybook/db"
)

func shardFlag() cli.Flag {
	return &cli.StringFlag{Name: "shard", Usage: "take the records of part `I/N` only, I from 1 to N, into a store of its own; " +
		"auto, or auto/N, takes I from the task of a Slurm array or of an indexed Kubernetes job"}
}

// maxShards is more than any archive needs, and than Slurm's arrays have.
const maxShards = 1_000_000

// The variables by which schedulers tell a task which it is. That of the count is ours, since
// Kubernetes tells none.
const (
	slurmTask     = "SLURM_ARRAY_TASK_ID"
	slurmCount    = "SLURM_ARRAY_TASK_COUNT"
	slurmFirst    = "SLURM_ARRAY_TASK_MIN"
	slurmLast     = "SLURM_ARRAY_TASK_MAX"
	jobIndex      = "JOB_COMPLETION_INDEX"
	countVariable = "SWAYBOOK_SHARDS"
)

// askedShard is the part that the command line asks for, the zero value for all.
func askedShard(c *cli.Context) (db.Shard, error) {
	if !c.IsSet("shard") {
		return db.Shard{}, nil
	}
	s, err := parseShard(c.String("shard"), os.Getenv)
	if err != nil {
		return s, usagef("--shard %w", err)
	}
	return s, nil
}

// parseShard reads a part of an archive; getenv gives what the environment says.
func parseShard(text string, getenv func(string) string) (db.Shard, error) {
	number, count, hasCount := strings.Cut(text, "/")
	s := db.Shard{}
	var err error
	if hasCount {
		if s.Count, err = wholeNumber(count); err != nil {
			return s, fmt.Errorf("%s: count: %w", text, err)
		}
	}
	switch {
	case number == "auto":
		s, err = taskShard(s.Count, getenv)
	case !hasCount:
		err = errors.New("want I/N, auto or auto/N")
	default:
		s.Number, err = wholeNumber(number)
	}
	switch {
	case err != nil:
		return s, fmt.Errorf("%s: %w", text, err)
	case s.Count < 1 || s.Count > maxShards:
		return s, fmt.Errorf("%s: want a count of 1 to %d", text, maxShards)
	case s.Number < 1 || s.Number > s.Count:
		return s, fmt.Errorf("%s: parts are numbered from 1 to their count, found %d of %d", text, s.Number, s.Count)
	}
	return s, nil
}

func wholeNumber(text string) (int, error) {
	n, err := strconv.Atoi(text)
	if err != nil {
		return 0, fmt.Errorf("%q is no whole number", text)
	}
	return n, nil
}

// taskShard is the part that a scheduler gives this task, of so many, or 0 where the
// scheduler has to say.
func taskShard(count int, getenv func(string) string) (db.Shard, error) {
	switch {
	case getenv(slurmTask) != "":
		return slurmShard(count, getenv)
	case getenv(jobIndex) != "":
		index, err := wholeNumber(getenv(jobIndex))
		switch {
		case err != nil:
			err = fmt.Errorf("%s: %w", jobIndex, err)
		case count == 0 && getenv(countVariable) == "":
			err = fmt.Errorf("of how many %s is one no variable says: say auto/N, or set %s", jobIndex, countVariable)
		case count == 0:
			if count, err = wholeNumber(getenv(countVariable)); err != nil {
				err = fmt.Errorf("%s, of how many %s is one: %w", countVariable, jobIndex, err)
			}
		}
		return db.Shard{Number: index + 1, Count: count}, err
	}
	return db.Shard{}, fmt.Errorf("neither %s nor %s is set: this is no task of an array", slurmTask, jobIndex)
}

// slurmShard is the part of a task of an array 1-N, or 0-(N-1), where the whole array is at
// work. Where some tasks of one are submitted again, Slurm counts these only, so the count
// has to be said. Of an array with steps it says the numbers of the first and the last task.
func slurmShard(count int, getenv func(string) string) (s db.Shard, err error) {
	var task, first, last int
	for _, v := range []struct {
		name  string
		value *int
	}{{slurmTask, &task}, {slurmCount, &s.Count}, {slurmFirst, &first}, {slurmLast, &last}} {
		if *v.value, err = wholeNumber(getenv(v.name)); err != nil {
			return s, fmt.Errorf("%s: %w", v.name, err)
		}
		if count != 0 {
			return db.Shard{Number: task, Count: count}, nil
		}
	}
	if first < 0 || first > 1 || last-first+1 != s.Count {
		return s, fmt.Errorf("tasks %d to %d, %d of them, are no array 1-N or 0-(N-1), or a few that were submitted again: say auto/N", first, last, s.Count)
	}
	s.Number = task - first + 1
	return s, nil
}
