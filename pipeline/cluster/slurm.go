package cluster

import (
	"embed"
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
//
// Options and their meaning: the manual of sbatch of Slurm 22.05.
func Slurm(j Jobs, options []string) ([]File, error) {
	if err := j.Validate(); err != nil {
		return nil, err
	}
	for _, o := range options {
		if !strings.HasPrefix(o, "-") || strings.ContainsFunc(o, unicode.IsControl) {
			return nil, fmt.Errorf("option %q: want one of sbatch, such as --partition=long", o)
		}
	}
	array := fmt.Sprintf("1-%d", j.Shards)
	type job struct {
		Purpose, Command string
		Options          []string
	}
	shards := job{
		Purpose: fmt.Sprintf("Fills one of %d shards of the store of a study.", j.Shards),
		Command: line(j.fill()),
		Options: append(j.slurmOptions("shards", "%A_%a", "--array="+array), options...),
	}
	combine := job{
		Purpose: fmt.Sprintf("Combines %d shards into the store of a study, and asks the study's questions.", j.Shards),
		Command: line(j.combine()),
		Options: append(j.slurmOptions("combine", "%j", "--kill-on-invalid-dep=yes"), options...),
	}
	var files []File
	for _, f := range []struct {
		name, template string
		data           any
	}{
		{"shards.sh", "job.sh", shards},
		{"combine.sh", "job.sh", combine},
		{"submit.sh", "submit.sh", struct{ Array string }{array}},
	} {
		var text strings.Builder
		if err := templates.ExecuteTemplate(&text, f.template, f.data); err != nil {
			return nil, err
		}
		files = append(files, File{f.name, text.String()})
	}
	return files, nil
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
