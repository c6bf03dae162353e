// Package kubernetes reads the manifests of testdata/cluster by the types of the Kubernetes
// API. It is a module of its own, so that the program does not depend on these.
package kubernetes

import (
	"bytes"
	"encoding/json"
	"os"
	"path/filepath"
	"reflect"
	"testing"

	batch "k8s.io/api/batch/v1"
	core "k8s.io/api/core/v1"
	"k8s.io/apimachinery/pkg/util/validation"
	"sigs.k8s.io/yaml"
)

// TestManifests holds every field of a manifest against batch/v1: one that is unknown, of
// another type or given twice is an error, and so is one that is lost when the typed value is
// written again. Beside these it holds what the API's reference says of fields together.
func TestManifests(t *testing.T) {
	paths, err := filepath.Glob(filepath.Join("..", "*", "*.yaml"))
	if err != nil || len(paths) != 4 {
		t.Fatalf("manifests %q, %v, want four", paths, err)
	}
	for _, path := range paths {
		t.Run(filepath.Base(filepath.Dir(path))+" "+filepath.Base(path), func(t *testing.T) {
			text, err := os.ReadFile(path)
			if err != nil {
				t.Fatal(err)
			}
			var job batch.Job
			if err := yaml.UnmarshalStrict(text, &job, yaml.DisallowUnknownFields); err != nil {
				t.Fatal(err)
			}
			checkNothingLost(t, text, job)
			checkJob(t, job)
		})
	}
}

// TestStrictness: what is to be found is found.
func TestStrictness(t *testing.T) {
	for _, wrong := range []string{
		"spec: {completion: 4}", "spec: {completions: four}", "spec: {completions: 4, completions: 4}",
		"spec: {template: {spec: {container: []}}}",
	} {
		if err := yaml.UnmarshalStrict([]byte(wrong), &batch.Job{}, yaml.DisallowUnknownFields); err == nil {
			t.Errorf("%s is taken", wrong)
		}
	}
}

// checkNothingLost compares all that the manifest has with the same in what the API would
// write of it.
func checkNothingLost(t *testing.T, text []byte, job batch.Job) {
	t.Helper()
	written, err := json.Marshal(job)
	if err != nil {
		t.Fatal(err)
	}
	var want, got any
	if err := yaml.Unmarshal(text, &want); err != nil {
		t.Fatal(err)
	}
	if err := json.NewDecoder(bytes.NewReader(written)).Decode(&got); err != nil {
		t.Fatal(err)
	}
	if !holds(got, want) {
		t.Errorf("read as %s", written)
	}
}

// holds reports whether a value has all that another has.
func holds(got, want any) bool {
	switch want := want.(type) {
	case map[string]any:
		has, ok := got.(map[string]any)
		for key, value := range want {
			if !ok || !holds(has[key], value) {
				return false
			}
		}
		return ok
	case []any:
		has, ok := got.([]any)
		if !ok || len(has) != len(want) {
			return false
		}
		for i, value := range want {
			if !holds(has[i], value) {
				return false
			}
		}
		return true
	}
	return reflect.DeepEqual(got, want)
}

func checkJob(t *testing.T, job batch.Job) {
	t.Helper()
	spec, pod := job.Spec, job.Spec.Template.Spec
	if job.APIVersion != "batch/v1" || job.Kind != "Job" {
		t.Errorf("is a %s of %s", job.Kind, job.APIVersion)
	}
	// An indexed job's pods are hosts named after it and their index.
	if wrong := validation.IsDNS1123Label(job.Name + "-999"); wrong != nil {
		t.Errorf("name %s: %v", job.Name, wrong)
	}
	// podFailurePolicy needs pods that are not restarted; backoffLimitPerIndex, indices.
	if spec.PodFailurePolicy == nil || pod.RestartPolicy != core.RestartPolicyNever {
		t.Errorf("failures by %v, restarted %s", spec.PodFailurePolicy, pod.RestartPolicy)
	}
	isIndexed := spec.CompletionMode != nil && *spec.CompletionMode == batch.IndexedCompletion
	if isIndexed != (spec.BackoffLimitPerIndex != nil) || isIndexed != (spec.Completions != nil) {
		t.Errorf("indexed: %v, with %v tries an index of %v", isIndexed, spec.BackoffLimitPerIndex, spec.Completions)
	}
	for _, rule := range spec.PodFailurePolicy.Rules {
		if (rule.OnExitCodes == nil) != (len(rule.OnPodConditions) > 0) {
			t.Errorf("rule %+v has both kinds of requirement, or none", rule)
		}
	}
	volumes := map[string]bool{}
	for _, v := range pod.Volumes {
		volumes[v.Name] = v.PersistentVolumeClaim != nil && validation.IsDNS1123Subdomain(v.PersistentVolumeClaim.ClaimName) == nil
	}
	for _, m := range pod.Containers[0].VolumeMounts {
		if !volumes[m.Name] {
			t.Errorf("%s is mounted, and no claim", m.Name)
		}
	}
	for name, amount := range pod.Containers[0].Resources.Requests {
		if amount.Sign() <= 0 { // an amount that cannot be read fails above
			t.Errorf("%s %s", name, amount.String())
		}
	}
}
