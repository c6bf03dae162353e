package main

import (
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"

	"github.com/urfave/cli/v2"

	"swaybook/pipeline/beside"
	"swaybook/pipeline/cluster"
	"swaybook/pipeline/study"
)

func clusterCommand() *cli.Command {
	return &cli.Command{
		Name:  "cluster",
		Usage: "write the job files by which a scheduler reprocesses a study in shards",
		Subcommands: []*cli.Command{
			{
				Name:      "slurm",
				Usage:     "scripts for sbatch: an array that fills the shards, and a job that follows and combines them",
				ArgsUsage: "STUDY.toml",
				Description: "Writes shards.sh, combine.sh and submit.sh. sh FOLDER/submit.sh submits both jobs, sh FOLDER/submit.sh 3,5 those of\n" +
					"shards 3 and 5 again, and the combination after them. Jobs end with 0 where files were rejected; the combination fails\n" +
					"with 4 where results are held back.",
				Flags: append(jobFlags(),
					&cli.StringSliceFlag{Name: "option", Usage: "`OPTION` of sbatch for both jobs, such as --option=--partition=long; may be given several times"}),
				Action: func(c *cli.Context) error {
					return runCluster(c, func(j cluster.Jobs, _ *study.Study) ([]cluster.File, error) {
						return cluster.Slurm(j, c.StringSlice("option"))
					})
				},
			},
			{
				Name:      "kubernetes",
				Usage:     "manifests: an indexed job that fills the shards, and a job that combines them",
				ArgsUsage: "STUDY.toml",
				Description: "Writes shards.yaml, and combine.yaml, to be applied when the job of the shards is complete. The study, its store and\n" +
					"its sources must lie on the claims, which a container has at the same paths as here.",
				Flags: append(jobFlags(),
					&cli.StringFlag{Name: "image", Usage: "the `IMAGE` of containers, which has the program"},
					&cli.StringSliceFlag{Name: "claim", Usage: "persistent volume claim `NAME`, NAME:PATH or NAME:PATH:ro, mounted at PATH (default: the study's folder); may be given several times"}),
				Action: func(c *cli.Context) error {
					return runCluster(c, func(j cluster.Jobs, s *study.Study) ([]cluster.File, error) {
						return kubernetesFiles(c, j, s)
					})
				},
			},
		},
	}
}

// jobFlags are those that every scheduler's files are filled in with.
func jobFlags() []cli.Flag {
	return []cli.Flag{
		&cli.IntFlag{Name: "shards", Value: 16, Usage: "how many parts, of a task each"},
		&cli.IntFlag{Name: "at-once", DefaultText: "all", Usage: "fill `K` shards at the same time, at most"},
		&cli.IntFlag{Name: "workers", Value: 4, Usage: "files that a task has in work at the same time, and its processors"},
		&cli.IntFlag{Name: "memory", Value: 1024, Usage: "what a task may take, in MiB"},
		&cli.StringFlag{Name: "name", DefaultText: "the study's file", Usage: "what the jobs are called"},
		&cli.StringFlag{Name: "program", DefaultText: "this one; of Kubernetes, swaybook", Usage: "`PATH` of swaybook where jobs run"},
		&cli.StringFlag{Name: "out", DefaultText: "STUDY-slurm or STUDY-kubernetes, here", Usage: "write to `FOLDER`"},
		&cli.BoolFlag{Name: "force", DisableDefaultText: true, Usage: "replace files that are there and differ"},
	}
}

// runCluster writes the files that fill gives for a study.
func runCluster(c *cli.Context, fill func(cluster.Jobs, *study.Study) ([]cluster.File, error)) error {
	if c.NArg() != 1 {
		return usagef("cluster %s needs one STUDY.toml, found %d arguments", c.Command.Name, c.NArg())
	}
	if c.IsSet("store") {
		return usagef("--store does not go with cluster: the study names its store")
	}
	p, err := newPlanner(c, c.Args().First())
	if err == nil {
		err = studyError(p.mistakes)
	}
	if err != nil {
		return err
	}
	jobs, err := newJobs(c, p.plan.study)
	if err != nil {
		return err
	}
	out := c.String("out")
	if out == "" {
		out = jobs.Name + "-" + c.Command.Name
	}
	files, err := fill(jobs, p.plan.study)
	if err != nil {
		return usagef("%w", err)
	}
	if err := checkJobFolder(p.plan.study, out, files); err != nil {
		return err
	}
	return writeJobFiles(c.App.Writer, out, files, c.Bool("force"))
}

func newJobs(c *cli.Context, s *study.Study) (cluster.Jobs, error) {
	j := cluster.Jobs{
		Name: c.String("name"), Shards: c.Int("shards"), Workers: c.Int("workers"), MemoryMiB: c.Int("memory"),
		Program: c.String("program"), Study: filepath.ToSlash(s.Path()),
	}
	if j.Name == "" {
		j.Name = cluster.NameOf(j.Study)
	}
	if j.AtOnce = j.Shards; c.IsSet("at-once") {
		j.AtOnce = c.Int("at-once")
	}
	var err error
	switch isHere := c.Command.Name == "slurm"; {
	case !isHere && j.Program == "":
		j.Program = "swaybook"
	case isHere && strings.Contains(j.Program, "/"):
		j.Program, err = filepath.Abs(j.Program)
	case isHere && j.Program == "":
		j.Program, err = os.Executable()
		if err == nil && strings.Contains(filepath.ToSlash(j.Program), "/go-build") {
			err = usagef("this program is one of go run, which is gone when it ends: install it, or name another by --program")
		}
	}
	return j, err
}

// kubernetesFiles looks whether all that the study reads and writes is where containers
// have it.
func kubernetesFiles(c *cli.Context, j cluster.Jobs, s *study.Study) ([]cluster.File, error) {
	pods := cluster.Pods{Image: c.String("image")}
	var errs []error
	for _, text := range c.StringSlice("claim") {
		claim, err := cluster.ParseClaim(text, filepath.ToSlash(s.Dir))
		if err != nil {
			errs = append(errs, fmt.Errorf("--claim %w", err))
		}
		pods.Claims = append(pods.Claims, claim)
	}
	if err := errors.Join(errs...); err != nil {
		return nil, err
	}
	files, err := cluster.Kubernetes(j, pods)
	if err != nil {
		return nil, err
	}
	need := func(key, path string, isWritten bool) {
		switch claim, ok := pods.At(filepath.ToSlash(path)); {
		case !ok:
			errs = append(errs, fmt.Errorf("%s: %s is on no --claim", key, path))
		case isWritten && claim.IsReadOnly:
			errs = append(errs, fmt.Errorf("%s: %s is written, and on a --claim to read from", key, path))
		}
	}
	need("study", s.Path(), false)
	for _, u := range s.Reads {
		need(u.Key, u.Value, false)
	}
	for _, u := range s.Writes {
		need(u.Key, u.Value, true)
	}
	return files, errors.Join(errs...)
}

// checkJobFolder refuses a folder in which job files, and the messages of jobs beside them,
// would be read as records.
func checkJobFolder(s *study.Study, out string, files []cluster.File) error {
	dir, err := filepath.Abs(out)
	if err != nil {
		return err
	}
	for _, source := range s.Sources {
		below, err := filepath.Rel(source.Value, filepath.Join(dir, files[0].Name))
		if err == nil && filepath.IsLocal(below) && s.Takes(filepath.ToSlash(below), false) {
			return usagef("--out %s: lies in %s, whose files are read as records: name a folder elsewhere, or exclude it", out, s.Short(source.Value))
		}
	}
	return nil
}

// writeJobFiles writes the files and says so. What is there and differs may have been
// changed by hand.
func writeJobFiles(w io.Writer, dir string, files []cluster.File, force bool) (err error) {
	var set beside.Set
	defer func() { err = errors.Join(err, set.Close()) }()
	p := &printer{w: w}
	for _, f := range files {
		path := filepath.Join(dir, f.Name)
		if text, err := os.ReadFile(path); err == nil && string(text) != f.Text && !force {
			return fmt.Errorf("%s is there and differs; --force replaces it", path)
		}
		if err := set.Write(path, func(w io.Writer) error { _, err := io.WriteString(w, f.Text); return err }); err != nil {
			return err
		}
	}
	if err := set.Swap(); err != nil {
		return err
	}
	for _, f := range files {
		p.printf("written %s\n", filepath.Join(dir, f.Name))
	}
	return p.err
}
