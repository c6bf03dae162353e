package cluster

import (
	"errors"
	"fmt"
	"path/filepath"
	"regexp"
	"strings"
)

// Jobs is what job files are filled in with.
type Jobs struct {
	Name    string // of the study, as the jobs bear it; see IsName
	Shards  int    // 1 to MaxShards
	AtOnce  int    // shards that are filled at the same time, at most
	Workers int    // of a task, each of which takes a processor
	// MemoryMiB is what a task may take.
	MemoryMiB int
	Program   string // the path of swaybook, or its name where a job finds it by that
	Study     string // the absolute path of the study
}

// File is a file to be written.
type File struct{ Name, Text string }

// MaxShards is as many tasks as an array of Slurm has where nobody has set MaxArraySize
// (sbatch's manual: 1001, from 0), and far more than an archive needs.
const MaxShards = 1000

// maxName leaves room for what schedulers add to names, which may have 63 characters as
// labels of hosts (RFC 1123): "-combine", or "-shards", a number and, of a pod, five letters.
const maxName = 40

var namePattern = regexp.MustCompile(`^[a-z0-9]([a-z0-9-]*[a-z0-9])?$`)

// IsName reports whether jobs may be called so under every scheduler: a label of RFC 1123 in
// small letters, of at most 40 characters.
func IsName(name string) bool { return len(name) <= maxName && namePattern.MatchString(name) }

// NameOf is the name of the jobs of a study, after its file.
func NameOf(study string) string {
	stem := strings.TrimSuffix(filepath.Base(study), filepath.Ext(study))
	name := strings.Map(func(r rune) rune {
		if r >= 'a' && r <= 'z' || r >= '0' && r <= '9' {
			return r
		}
		return '-'
	}, strings.ToLower(stem))
	name = strings.TrimLeft(name, "-")
	name = strings.TrimRight(name[:min(len(name), maxName)], "-")
	if name == "" {
		return "study"
	}
	return name
}

// Validate returns an error with every mistake.
func (j Jobs) Validate() error {
	var errs []error
	wrong := func(format string, args ...any) { errs = append(errs, fmt.Errorf(format, args...)) }
	if !IsName(j.Name) {
		wrong("name %q: want small letters, digits and dashes between them, %d at most", j.Name, maxName)
	}
	if j.Shards < 1 || j.Shards > MaxShards {
		wrong("shards %d: want 1 to %d", j.Shards, MaxShards)
	}
	if j.AtOnce < 1 {
		wrong("at-once %d: want a positive number", j.AtOnce)
	}
	if j.Workers < 1 {
		wrong("workers %d: want a positive number", j.Workers)
	}
	if j.MemoryMiB < 1 {
		wrong("memory %d: want a positive number of MiB", j.MemoryMiB)
	}
	if j.Program == "" {
		wrong("program: want a path or a name")
	}
	if !strings.HasPrefix(j.Study, "/") {
		wrong("study %s: want a path that begins with /", j.Study)
	}
	return errors.Join(errs...)
}

// fill is the command of a task that fills a shard: the scheduler says which.
func (j Jobs) fill() []string { return j.command("--shard", fmt.Sprintf("auto/%d", j.Shards)) }

// combine is the command that combines the shards.
func (j Jobs) combine() []string { return j.command("--combine", fmt.Sprint(j.Shards)) }

// command lets rejected files pass, since schedulers know success and failure only.
func (j Jobs) command(flag, value string) []string {
	return []string{j.Program, "reprocess", flag, value, "--workers", fmt.Sprint(j.Workers), "--allow-rejected", j.Study}
}
