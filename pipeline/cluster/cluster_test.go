package cluster

import (
	"flag"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"sigs.k8s.io/yaml"
)

var update = flag.Bool("update", false, "rewrite the job files in testdata")

// hostile is a name with all that shells, YAML and Kubernetes read otherwise than as it is.
const hostile = "/srv/a b/it's \"100%\" #1: $(HOME) `id` \\ *?[x]{y}~!&|;<>\t\n- é $$ .toml"

func jobs(study string) Jobs {
	return Jobs{Name: "quays", Shards: 4, AtOnce: 4, Workers: 2, MemoryMiB: 500, Program: "/opt/swaybook", Study: study}
}

var pods = Pods{Image: "swaybook:1", Claims: []Claim{{Name: "region", Path: "/srv"}, {Name: "records", Path: "/data/y", IsReadOnly: true}}}

// TestGolden compares job files with those in testdata, which are also read by the types of
// Kubernetes (testdata/cluster/kubernetes) and by the checker of scripts in .ci/run.
func TestGolden(t *testing.T) {
	for folder, study := range map[string]string{"plain": "/srv/quays/quays.toml", "hostile": hostile} {
		j, options := jobs(study), []string{"--partition=long", "--time=12:00:00"}
		if study == hostile {
			j.AtOnce = 2
			options = []string{"-p long", `--comment=it's "10 %" \ # $HOME`}
		}
		scripts, err := Slurm(j, options)
		if err != nil {
			t.Fatal(err)
		}
		manifests, err := Kubernetes(j, pods)
		if err != nil {
			t.Fatal(err)
		}
		for _, f := range slices.Concat(scripts, manifests) {
			path := filepath.Join("..", "..", "testdata", "cluster", folder, f.Name)
			if *update {
				if err := os.MkdirAll(filepath.Dir(path), 0o777); err != nil {
					t.Fatal(err)
				}
				if err := os.WriteFile(path, []byte(f.Text), 0o666); err != nil {
					t.Fatal(err)
				}
			}
			want, err := os.ReadFile(path)
			if err != nil {
				t.Fatal(err)
			}
			if f.Text != string(want) {
				t.Errorf("%s: differs from\n%s", path, f.Text)
			}
		}
	}
}

// TestManifestsSayWhatTheyWereGiven reads manifests back, and replaces what Kubernetes
// replaces in commands: $$ is $, and a $(NAME) that is left would be a variable.
func TestManifestsSayWhatTheyWereGiven(t *testing.T) {
	p := Pods{Image: "no", Claims: []Claim{{Name: "1e3", Path: "/srv/a b"}}}
	files, err := Kubernetes(jobs(hostile), p)
	if err != nil {
		t.Fatal(err)
	}
	for i, want := range [][]string{{"--shard", "auto/4"}, {"--combine", "4"}} {
		var j job
		if err := yaml.UnmarshalStrict([]byte(files[i].Text), &j); err != nil {
			t.Fatalf("%s: %v", files[i].Name, err)
		}
		c := j.Spec.Template.Spec.Containers[0]
		var got []string
		for _, word := range c.Command {
			if strings.Contains(strings.ReplaceAll(word, "$$", ""), "$") {
				t.Errorf("%s: %q has a variable", files[i].Name, word)
			}
			got = append(got, strings.ReplaceAll(word, "$$", "$"))
		}
		want = slices.Concat([]string{"/opt/swaybook", "reprocess"}, want, []string{"--workers", "2", "--allow-rejected", hostile})
		if !slices.Equal(got, want) {
			t.Errorf("%s: command %q, want %q", files[i].Name, got, want)
		}
		v := j.Spec.Template.Spec.Volumes[0]
		if c.Image != "no" || v.PersistentVolumeClaim.ClaimName != "1e3" || c.VolumeMounts[0].MountPath != "/srv/a b" || c.VolumeMounts[0].Name != v.Name {
			t.Errorf("%s: image %q, volume %+v at %+v", files[i].Name, c.Image, v, c.VolumeMounts[0])
		}
	}
}

func TestNames(t *testing.T) {
	for study, want := range map[string]string{
		"/srv/region.toml": "region", "/srv/Quays of 2041.toml": "quays-of-2041", "/srv/-é-.toml": "study", "/srv/.toml": "study",
		"/srv/" + strings.Repeat("a", 39) + "-b.toml": strings.Repeat("a", 39),
		"/srv/a.b_c.toml": "a-b-c",
	} {
		got := NameOf(study)
		if got != want || !IsName(got) {
			t.Errorf("NameOf(%q) = %q, want %q", study, got, want)
		}
	}
	for _, wrong := range []string{"", "-a", "a-", "A", "a b", "a.b", "a\n", strings.Repeat("a", 41)} {
		if IsName(wrong) {
			t.Errorf("IsName(%q)", wrong)
		}
	}
}

func TestMistakes(t *testing.T) {
	change := func(f func(*Jobs)) Jobs {
		j := jobs("/a.toml")
		f(&j)
		return j
	}
	for want, j := range map[string]Jobs{
		"name":    change(func(j *Jobs) { j.Name = "A" }),
		"shards":  change(func(j *Jobs) { j.Shards = MaxShards + 1 }),
		"at-once": change(func(j *Jobs) { j.AtOnce = 0 }),
		"workers": change(func(j *Jobs) { j.Workers = 0 }),
		"memory":  change(func(j *Jobs) { j.MemoryMiB = -1 }),
		"program": change(func(j *Jobs) { j.Program = "" }),
		"study":   change(func(j *Jobs) { j.Study = "a.toml" }),
	} {
		if _, err := Slurm(j, nil); err == nil || !strings.HasPrefix(err.Error(), want) {
			t.Errorf("Slurm of a wrong %s: %v", want, err)
		}
		if _, err := Kubernetes(j, pods); err == nil || !strings.HasPrefix(err.Error(), want) {
			t.Errorf("Kubernetes of a wrong %s: %v", want, err)
		}
	}
	for option, want := range map[string]string{
		"": "want one of sbatch", "-": "want one", "--": "want one", "long": "want one", `--com"ment=a`: "want one",
		"--comment=a\nrm -rf x": "want one", "--comment=\x00": "want one",
		"--array=1-20%4": "--at-once", "--array": "--at-once", "--arr 3": "--at-once", "-a3": "--at-once", "-a 3": "--at-once",
		"--dependency=singleton": "both jobs", "--dep=singleton": "both jobs", "-dsingleton": "both jobs",
	} {
		if _, err := Slurm(jobs("/a.toml"), []string{"--partition=long", option}); err == nil || !strings.Contains(err.Error(), want) || !strings.Contains(err.Error(), fmt.Sprintf("option %q", option)) {
			t.Errorf("option %q: %v, want an error with %q", option, err, want)
		}
	}
	for want, p := range map[string]Pods{
		"image": {Claims: pods.Claims},
		"claim": {Image: "x"},
		"two":   {Image: "x", Claims: []Claim{{Name: "a", Path: "/a"}, {Name: "b", Path: "/a"}}},
	} {
		if _, err := Kubernetes(jobs("/a.toml"), p); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("pods %+v: %v, want an error with %q", p, err, want)
		}
	}
}

func TestClaims(t *testing.T) {
	for text, want := range map[string]Claim{
		"a":         {Name: "a", Path: "/srv"},
		"a:/b c/":   {Name: "a", Path: "/b c"},
		"a:/b:ro":   {Name: "a", Path: "/b", IsReadOnly: true},
		"":          {},
		":/b":       {},
		"a:":        {},
		"a:/":       {},
		"a:b":       {},
		"a:ro":      {},
		"a:/b:rw":   {},
		"a:/b:c:ro": {},
		"a:/b\nc":   {},
	} {
		got, err := ParseClaim(text, "/srv")
		if (err == nil) != (want.Name != "") || err == nil && got != want {
			t.Errorf("ParseClaim(%q) = %+v, %v, want %+v", text, got, err, want)
		}
	}
	p := Pods{Claims: []Claim{{Name: "in", Path: "/srv/in"}, {Name: "out", Path: "/srv"}}}
	for path, want := range map[string]string{"/srv": "out", "/srv/a": "out", "/srv/in": "in", "/srv/in/a": "in", "/srv/inner": "out", "/srv2": "", "/": ""} {
		if got, ok := p.At(path); got.Name != want || ok != (want != "") {
			t.Errorf("At(%q) = %q, %v, want %q", path, got.Name, ok, want)
		}
	}
}
