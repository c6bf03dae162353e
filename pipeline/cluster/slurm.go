package cluster

import (
	"embed"
	"errors"
	"fmt"
	"strings"
	"text/template"
	"unicode"
)

//go:embed templates
var templateFiles embed.FS

var templates = template.Must(template.ParseFS(templateFiles, "templates/*.sh"))

// Slurm makes three scripts for sh: shards.sh, an array of a task a shard; combine.sh, and
// submit.sh, which submits both, the second to follow the first. Options are those of sbatch,
// such as "--partition=long", for both jobs, and override the others, behind which they stand.
// Those that say which tasks there are, or what waits for what, are refused: they would hold
// for both.
//
// Options and their meaning: the manual of sbatch of Slurm 22.05.
func Slurm(j Jobs, options []string) ([]File, error) {
	if err := j.Validate(); err != nil {
		return nil, err
	}
	both := make([]string, len(options))
	var errs []error
	for i, o := range options {
		var err error
		if both[i], err = bothOption(o); err != nil {
			errs = append(errs, fmt.Errorf("option %q: %w", o, err))
		}
	}
	if err := errors.Join(errs...); err != nil {
		return nil, err
	}
	array, limit := fmt.Sprintf("1-%d", j.Shards), ""
	if j.AtOnce < j.Shards {
		limit = fmt.Sprintf("%%%d", j.AtOnce)
	}
	type job struct {
		Purpose, Command string
		Options          []string
	}
	shards := job{
		Purpose: fmt.Sprintf("Fills one of %d shards of the store of a study.", j.Shards),
		Command: line(j.fill()),
		Options: append(j.slurmOptions("shards", "%A_%a", "--array="+array+limit), both...),
	}
	combine := job{
		Purpose: fmt.Sprintf("Combines %d shards into the store of a study, and asks the study's questions.", j.Shards),
		Command: line(j.combine()),
		Options: append(j.slurmOptions("combine", "%j", "--kill-on-invalid-dep=yes"), both...),
	}
	var files []File
	for _, f := range []struct {
		name, template string
		data           any
	}{
		{"shards.sh", "job.sh", shards},
		{"combine.sh", "job.sh", combine},
		{"submit.sh", "submit.sh", struct{ Array, Limit string }{array, limit}},
	} {
		var text strings.Builder
		if err := templates.ExecuteTemplate(&text, f.template, f.data); err != nil {
			return nil, err
		}
		files = append(files, File{f.name, text.String()})
	}
	return files, nil
}

// bothOption is an option for both jobs as a line of sbatch's has it: of one word, whatever is
// in its value, and whether that stands behind "=" or a blank.
func bothOption(text string) (string, error) {
	name, value := text, ""
	isLong := strings.HasPrefix(text, "--")
	if i := strings.IndexAny(text, "= "); isLong && i >= 0 {
		name, value = text[:i], "="+text[i+1:]
	} else if !isLong && len(text) > 2 {
		name, value = text[:2], strings.TrimLeft(text[2:], " ")
	}
	letters := strings.TrimLeft(name, "-")
	switch {
	case strings.ContainsFunc(text, unicode.IsControl), !strings.HasPrefix(name, "-"), letters == "", strings.Trim(letters, plain) != "":
		return "", errors.New("want one of sbatch, such as --partition=long")
	case strings.HasPrefix("array", letters): // sbatch takes any beginning that is of one option
		return "", errors.New("which tasks there are follows from --shards, and how many are at work at the same time from --at-once")
	case strings.HasPrefix("dependency", letters):
		return "", errors.New("it would hold for both jobs, of which the second waits for the first: write it into shards.sh")
	}
	return slurmWord(name + value), nil
}

// slurmOptions are those of one job. Its messages go where it was submitted, each try's below
// those of the one before.
func (j Jobs) slurmOptions(what, number, own string) []string {
	return []string{
		fmt.Sprintf("--job-name=%s-%s", j.Name, what),
		own,
		"--ntasks=1",
		fmt.Sprintf("--cpus-per-task=%d", j.Workers),
		fmt.Sprintf("--mem=%dM", j.MemoryMiB),
		fmt.Sprintf("--output=%%x-%s.log", number),
		"--open-mode=append",
		"--requeue",
		"--signal=B:USR1@60",
	}
}
