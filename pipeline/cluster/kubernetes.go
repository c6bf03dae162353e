package cluster

import (
	"errors"
	"fmt"
	"slices"
	"strings"
	"unicode"

	"sigs.k8s.io/yaml"
)

// Pods is what Kubernetes runs tasks in.
type Pods struct {
	Image  string
	Claims []Claim
}

// Claim is a persistent volume claim and where a container has it: at the path that its files
// have in the study.
type Claim struct {
	Name, Path string
	IsReadOnly bool
}

// ParseClaim reads NAME, which is mounted at the folder, NAME:PATH or NAME:PATH:ro.
func ParseClaim(text, folder string) (Claim, error) {
	name, path, hasPath := strings.Cut(text, ":")
	path, isReadOnly := strings.CutSuffix(path, ":ro")
	c := Claim{Name: name, Path: strings.TrimRight(path, "/"), IsReadOnly: isReadOnly}
	if !hasPath {
		c.Path = folder
	}
	if name == "" || !strings.HasPrefix(c.Path, "/") || strings.Contains(c.Path, ":") || strings.ContainsFunc(c.Path, unicode.IsControl) {
		return c, fmt.Errorf("%q: want NAME, NAME:PATH or NAME:PATH:ro, PATH from / and without colons", text)
	}
	return c, nil
}

// At is the claim that a path lies on in a container: of nested ones the inner.
func (p Pods) At(path string) (at Claim, ok bool) {
	for _, c := range p.Claims {
		if (path == c.Path || strings.HasPrefix(path, c.Path+"/")) && len(c.Path) >= len(at.Path) {
			at, ok = c, true
		}
	}
	return at, ok
}

// Kubernetes makes two jobs of batch/v1: shards.yaml, an indexed job of a pod a shard, and
// combine.yaml, to be applied when that is complete, since jobs cannot wait for each other.
//
// Fields and their meaning: the reference of the API, batch/v1 Job. That Kubernetes 1.31 and
// later have all of them, without a gate to be opened, is from memory.
func Kubernetes(j Jobs, p Pods) ([]File, error) {
	if err := errors.Join(j.Validate(), p.validate()); err != nil {
		return nil, err
	}
	shards := newJob(j.Name+"-shards", j.pod(p, j.fill()))
	shards.Spec.CompletionMode = "Indexed"
	shards.Spec.Completions, shards.Spec.Parallelism = j.Shards, min(j.Shards, j.AtOnce)
	shards.Spec.BackoffLimitPerIndex = tries
	shards.Spec.PodFailurePolicy = failing(2)
	combine := newJob(j.Name+"-combine", j.pod(p, j.combine()))
	combine.Spec.BackoffLimit = tries
	combine.Spec.PodFailurePolicy = failing(2, 4)
	var files []File
	for _, f := range []struct {
		name, comment string
		job           job
	}{
		{"shards.yaml", fmt.Sprintf("Fills the %d shards of the store of a study.", j.Shards), shards},
		{"combine.yaml", fmt.Sprintf("Combines %d shards into the store of a study, and asks the study's questions:\n# to be applied when the job of the shards is complete.", j.Shards), combine},
	} {
		text, err := yaml.Marshal(f.job)
		if err != nil {
			return nil, err
		}
		files = append(files, File{f.name, "# " + f.comment + "\n" + string(text)})
	}
	return files, nil
}

func (p Pods) validate() error {
	var errs []error
	if p.Image == "" {
		errs = append(errs, errors.New("image: want the name of one"))
	}
	if len(p.Claims) == 0 {
		errs = append(errs, errors.New("claim: want at least one, for the study's folder"))
	}
	for i, c := range p.Claims {
		if slices.ContainsFunc(p.Claims[:i], func(before Claim) bool { return before.Path == c.Path }) {
			errs = append(errs, fmt.Errorf("claim: two are at %s", c.Path))
		}
	}
	return errors.Join(errs...)
}

// tries is how often more a task is tried that failed by itself, such as on a full disk.
const tries = 3

// graceS is how long a pod that is to go may take to stop in order, in s; README says what
// it takes.
const graceS = 60

// pod is that of a task. Kubernetes replaces $(NAME) in commands, and takes $$ for $.
func (j Jobs) pod(p Pods, command []string) podSpec {
	c := container{Name: "swaybook", Image: p.Image}
	for _, word := range command {
		c.Command = append(c.Command, strings.ReplaceAll(word, "$", "$$"))
	}
	memory := fmt.Sprintf("%dMi", j.MemoryMiB)
	c.Resources.Requests = map[string]string{"cpu": fmt.Sprint(j.Workers), "memory": memory}
	c.Resources.Limits = map[string]string{"memory": memory}
	spec := podSpec{RestartPolicy: "Never", TerminationGracePeriodSeconds: graceS}
	for i, claim := range p.Claims {
		v := volume{Name: fmt.Sprintf("claim-%d", i+1)}
		v.PersistentVolumeClaim.ClaimName, v.PersistentVolumeClaim.ReadOnly = claim.Name, claim.IsReadOnly
		spec.Volumes = append(spec.Volumes, v)
		c.VolumeMounts = append(c.VolumeMounts, mount{Name: v.Name, MountPath: claim.Path, ReadOnly: claim.IsReadOnly})
	}
	spec.Containers = []container{c}
	return spec
}

func newJob(name string, pod podSpec) job {
	j := job{APIVersion: "batch/v1", Kind: "Job"}
	j.Metadata.Name = name
	j.Spec.Template.Spec = pod
	return j
}

// failing is a policy by which a pod that has to leave its node is none that failed, and
// one that ends with one of the codes is not tried again, nor is any other of its job.
func failing(codes ...int) *podFailurePolicy {
	return &podFailurePolicy{Rules: []podFailureRule{
		{Action: "Ignore", OnPodConditions: []podCondition{{Type: "DisruptionTarget", Status: "True"}}},
		{Action: "FailJob", OnExitCodes: &exitCodes{Operator: "In", Values: codes}},
	}}
}
