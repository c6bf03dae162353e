package main

import (
	"strings"
	"testing"

	"swaybook/db"
)

// TestParseShard reads parts as they are written, and as schedulers tell tasks which they
// are: SLURM_ARRAY_TASK_ID, _COUNT, _MIN and _MAX of Slurm's manual of sbatch, JOB_COMPLETION_INDEX
// from 0 of the Kubernetes documentation on indexed jobs.
func TestParseShard(t *testing.T) {
	slurm := func(id, count, first, last string) map[string]string {
		return map[string]string{slurmTask: id, slurmCount: count, slurmFirst: first, slurmLast: last}
	}
	for _, c := range []struct {
		text  string
		env   map[string]string
		want  db.Shard
		wrong string
	}{
		{text: "1/4", want: db.Shard{Number: 1, Count: 4}},
		{text: "4/4", want: db.Shard{Number: 4, Count: 4}},
		{text: "0/4", wrong: "from 1"},
		{text: "5/4", wrong: "from 1"},
		{text: "1/0", wrong: "count of 1"},
		{text: "1", wrong: "want I/N"},
		{text: "a/4", wrong: "no whole number"},
		{text: "1/b", wrong: "no whole number"},
		{text: "1/4/4", wrong: "no whole number"},
		{text: "auto", wrong: "no task of an array"},
		{text: "auto", env: slurm("1", "4", "1", "4"), want: db.Shard{Number: 1, Count: 4}},
		{text: "auto", env: slurm("4", "4", "1", "4"), want: db.Shard{Number: 4, Count: 4}},
		{text: "auto", env: slurm("0", "4", "0", "3"), want: db.Shard{Number: 1, Count: 4}},
		{text: "auto", env: slurm("3", "1", "3", "3"), wrong: "submitted again"},
		{text: "auto", env: slurm("4", "2", "1", "4"), wrong: "submitted again"},
		{text: "auto", env: slurm("1", "3", "1", "5"), wrong: "tasks 1 to 5, 3 of them, are no array 1-N"},
		{text: "auto", env: slurm("1", "4", "1", ""), wrong: slurmLast},
		{text: "auto/5", env: map[string]string{slurmTask: "3"}, want: db.Shard{Number: 3, Count: 5}},
		{text: "auto/4", env: slurm("3", "1", "3", "3"), want: db.Shard{Number: 3, Count: 4}},
		{text: "auto/4", env: slurm("0", "4", "0", "3"), wrong: "from 1"},
		{text: "auto/4", env: map[string]string{jobIndex: "0"}, want: db.Shard{Number: 1, Count: 4}},
		{text: "auto/4", env: map[string]string{jobIndex: "4"}, wrong: "from 1"},
		{text: "auto", env: map[string]string{jobIndex: "2", countVariable: "3"}, want: db.Shard{Number: 3, Count: 3}},
		{text: "auto", env: map[string]string{jobIndex: "2"}, wrong: "auto/N"},
		{text: "auto", env: map[string]string{jobIndex: "2", countVariable: "x"}, wrong: countVariable + `, of how many ` + jobIndex + ` is one: "x" is no whole number`},
		{text: "auto/3", env: map[string]string{jobIndex: "x"}, wrong: jobIndex + `: "x"`},
	} {
		got, err := parseShard(c.text, func(name string) string { return c.env[name] })
		switch {
		case c.wrong == "" && (err != nil || got != c.want):
			t.Errorf("%s in %v: %v, %v, want %v", c.text, c.env, got, err, c.want)
		case c.wrong != "" && (err == nil || !strings.Contains(err.Error(), c.wrong)):
			t.Errorf("%s in %v: %v, %v, want an error with %q", c.text, c.env, got, err, c.wrong)
		}
	}
}
