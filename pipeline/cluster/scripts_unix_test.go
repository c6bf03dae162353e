//go:build unix

package cluster

import (
	"bufio"
	"bytes"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"syscall"
	"testing"
	"time"
)

// shells are those of the machine that sbatch may run scripts by: sh, which is dash or bash on
// most, and both of these.
func shells(t *testing.T) []string {
	t.Helper()
	var found []string
	for _, name := range []string{"sh", "dash", "bash"} {
		if path, err := exec.LookPath(name); err == nil {
			found = append(found, path)
		}
	}
	if len(found) == 0 {
		t.Skip("no shell here")
	}
	return found
}

// TestQuoteIsReadByShells has shells say what they read.
func TestQuoteIsReadByShells(t *testing.T) {
	words := []string{"", "a", "a b", "'", "''", "it's", "~", "-n", "a=b", "#a", "é", hostile, "\\", "!x", "a\n\n", "$HOME", "\x01\xff"}
	for _, sh := range shells(t) {
		out, err := exec.Command(sh, "-c", `for word in `+line(words)+`; do printf '%s\0' "$word"; done`).Output()
		if err != nil {
			t.Fatal(err)
		}
		if got := strings.Split(strings.TrimSuffix(string(out), "\x00"), "\x00"); !slices.Equal(got, words) {
			t.Errorf("%s reads %q, want %q", sh, got, words)
		}
	}
}

// TestOptionsAreReadBySlurm has sbatch say what it reads off job files. It needs no Slurm at
// work: it says so before it looks for one.
func TestOptionsAreReadBySlurm(t *testing.T) {
	sbatch, err := exec.LookPath("sbatch")
	if err != nil {
		t.Skip("no sbatch here")
	}
	dir := t.TempDir()
	const conf = "ClusterName=none\nSlurmctldHost=localhost(127.0.0.1)\nAuthType=auth/none\nNodeName=localhost\nPartitionName=all Nodes=localhost\n"
	j := jobs("/a.toml")
	j.AtOnce = 3
	for option, want := range map[string]string{
		"--comment=plain":                   "--comment=plain",
		"--comment=a b":                     "--comment=a b",
		"--comment a b":                     "--comment=a b",
		"--comment=":                        "--comment=",
		"--exclusive":                       "--exclusive",
		"-p long":                           "-plong",
		"-plong":                            "-plong",
		"--constraint=a&(b|c)":              "--constraint=a&(b|c)",
		`--comment=it's "100%" \ # $HOME é`: `--comment=it's "100%" \ # $HOME é`,
		`--comment="a b"`:                   `--comment="a b"`,
	} {
		files, err := Slurm(j, []string{option})
		if err != nil {
			t.Fatal(err)
		}
		script := filepath.Join(dir, "shards.sh")
		if err := errors.Join(os.WriteFile(script, []byte(files[0].Text), 0o666), os.WriteFile(filepath.Join(dir, "slurm.conf"), []byte(conf), 0o666)); err != nil {
			t.Fatal(err)
		}
		read := readBySlurm(t, exec.Command(sbatch, "-vvv", "--test-only", script), filepath.Join(dir, "slurm.conf"))
		if len(read) < 2 || read[len(read)-1] != want || read[1] != "--array=1-4%3" {
			t.Errorf("option %q: sbatch reads %q, want %q at the end", option, read, want)
		}
	}
}

// readBySlurm are the options that sbatch says it finds in its script, until it looks for a
// controller, which there is not.
func readBySlurm(t *testing.T, sbatch *exec.Cmd, conf string) (read []string) {
	t.Helper()
	sbatch.Env = append(os.Environ(), "SLURM_CONF="+conf)
	said, err := sbatch.StderrPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := sbatch.Start(); err != nil {
		t.Fatal(err)
	}
	for lines := bufio.NewScanner(said); lines.Scan(); {
		if _, text, ok := strings.Cut(lines.Text(), `Found in script, argument "`); ok {
			read = append(read, strings.TrimSuffix(text, `"`))
		} else if strings.Contains(lines.Text(), "defined options") {
			break
		}
	}
	sbatch.Process.Kill()
	sbatch.Wait() // with an error: it was killed
	return read
}

// stage is a folder of a name with everything in it, with a program that does as the test says
// and notes its arguments, and commands of Slurm that note theirs.
type stage struct {
	t     *testing.T
	dir   string
	files map[string]string
}

func newStage(t *testing.T, program string, change ...func(*Jobs)) *stage {
	t.Helper()
	s := &stage{t: t, dir: filepath.Join(t.TempDir(), "it's \"here\" $HOME"), files: map[string]string{}}
	s.script("program", `printf '%s\n' "$@" >>"$0.said"`+"\n"+program)
	s.script("bin/scontrol", `printf '%s ' "$@" >>"$0.said"`)
	s.script("bin/sbatch", `printf '%s ' "$@" >>"$0.said"; for last in "$@"; do :; done; test -f "$last" && echo "$(wc -l <"$last");here"`)
	j := jobs(filepath.ToSlash(filepath.Join(s.dir, "the study.toml")))
	j.Program = filepath.ToSlash(filepath.Join(s.dir, "program"))
	for _, f := range change {
		f(&j)
	}
	files, err := Slurm(j, nil)
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range files {
		s.write(f.Name, f.Text, 0o666)
	}
	return s
}

func (s *stage) script(name, text string) { s.write(name, "#!/bin/sh\n"+text+"\n", 0o777) }

func (s *stage) write(name, text string, mode os.FileMode) {
	s.t.Helper()
	path := filepath.Join(s.dir, name)
	if err := errors.Join(os.MkdirAll(filepath.Dir(path), 0o777), os.WriteFile(path, []byte(text), mode)); err != nil {
		s.t.Fatal(err)
	}
}

func (s *stage) said(name string) string {
	text, err := os.ReadFile(filepath.Join(s.dir, name+".said"))
	if err != nil && !errors.Is(err, os.ErrNotExist) {
		s.t.Fatal(err)
	}
	return string(text)
}

// start runs a script as Slurm would, from a folder of its own.
func (s *stage) start(sh, script string, out *bytes.Buffer, args ...string) *exec.Cmd {
	s.t.Helper()
	c := exec.Command(sh, append([]string{filepath.Join(s.dir, script)}, args...)...)
	c.Env = append(os.Environ(), "PATH="+filepath.Join(s.dir, "bin")+":"+os.Getenv("PATH"), "SLURM_JOB_ID=17")
	c.Dir, c.Stdout, c.Stderr = s.t.TempDir(), out, out
	return c
}

func code(err error) int {
	if exit, ok := errors.AsType[*exec.ExitError](err); ok {
		return exit.ExitCode()
	}
	if err != nil {
		return -1
	}
	return 0
}

// TestScriptsPassOnCodes: what swaybook ends with is what Slurm is told, and only a job that
// was told of its limit is queued again.
func TestScriptsPassOnCodes(t *testing.T) {
	for _, sh := range shells(t) {
		for _, want := range []int{0, 1, 3, 4, 127, 130, 137} {
			s := newStage(t, fmt.Sprintf("exit %d", want))
			var out bytes.Buffer
			if got := code(s.start(sh, "shards.sh", &out).Run()); got != want {
				t.Errorf("%s shards.sh: ends with %d, want %d: %s", sh, got, want, &out)
			}
			arguments := "reprocess\n--shard\nauto/4\n--workers\n2\n--allow-rejected\n" + filepath.Join(s.dir, "the study.toml") + "\n"
			if got := s.said("program"); got != arguments {
				t.Errorf("%s shards.sh: arguments %q, want %q", sh, got, arguments)
			}
			if said := s.said("bin/scontrol"); said != "" {
				t.Errorf("%s shards.sh: scontrol %s", sh, said)
			}
		}
	}
}

// TestScriptsQueueAgain signals scripts whose program stops in order, or does not.
func TestScriptsQueueAgain(t *testing.T) {
	const obeys = `trap 'echo stopped; exit 130' TERM; echo ready; while :; do sleep 0.01; done`
	for _, c := range []struct {
		name, program string
		signal        syscall.Signal
		both          bool // the program gets the signal too, as from Slurm itself
		restarts      string
		want          int
		queued        bool
	}{
		{"told of the limit", obeys, syscall.SIGUSR1, false, "", 0, true},
		{"told for the tenth time", obeys, syscall.SIGUSR1, false, "9", 0, true},
		{"told for the eleventh time", obeys, syscall.SIGUSR1, false, "10", 130, false},
		{"cancelled", obeys, syscall.SIGTERM, true, "", 130, false},
		{"done all the same", `trap '' TERM; echo ready; sleep 0.2; exit 0`, syscall.SIGUSR1, false, "", 0, false},
		{"failed all the same", `trap '' TERM; echo ready; sleep 0.2; exit 4`, syscall.SIGUSR1, false, "", 4, false},
	} {
		for _, sh := range shells(t) {
			t.Run(c.name+" "+filepath.Base(sh), func(t *testing.T) {
				s := newStage(t, `echo $$ >"$0.pid"; `+c.program)
				var out bytes.Buffer
				cmd := s.start(sh, "combine.sh", &out)
				cmd.Env = append(cmd.Env, "SLURM_RESTART_COUNT="+c.restarts)
				stdout, err := os.Create(filepath.Join(s.dir, "out"))
				if err != nil {
					t.Fatal(err)
				}
				defer stdout.Close()
				cmd.Stdout = stdout
				if err := cmd.Start(); err != nil {
					t.Fatal(err)
				}
				waitFor(t, filepath.Join(s.dir, "out"), "ready")
				if c.both {
					text, err := os.ReadFile(filepath.Join(s.dir, "program.pid"))
					var pid int
					if _, scan := fmt.Sscan(string(text), &pid); err != nil || scan != nil {
						t.Fatal(err, scan)
					}
					if err := syscall.Kill(pid, c.signal); err != nil {
						t.Fatal(err)
					}
				}
				if err := cmd.Process.Signal(c.signal); err != nil {
					t.Fatal(err)
				}
				if got := code(cmd.Wait()); got != c.want {
					t.Errorf("ends with %d, want %d: %s", got, c.want, &out)
				}
				want := ""
				if c.queued {
					want = "requeue 17 "
				}
				if got := s.said("bin/scontrol"); got != want {
					t.Errorf("scontrol %q, want %q", got, want)
				}
			})
		}
	}
}

// waitFor waits until a file has a word.
func waitFor(t *testing.T, path, word string) {
	t.Helper()
	for end := time.Now().Add(time.Minute); time.Now().Before(end); time.Sleep(5 * time.Millisecond) {
		if text, err := os.ReadFile(path); err == nil && bytes.Contains(text, []byte(word)) {
			return
		}
	}
	t.Fatalf("%s never has %q", path, word)
}

// TestSubmit: the second job follows the first, of which one may name tasks.
func TestSubmit(t *testing.T) {
	for _, sh := range shells(t) {
		for _, c := range []struct {
			args   []string
			atOnce int
			want   string
		}{
			{nil, 4, "--parsable --array=1-4 shards.sh --parsable --dependency=afterok:38 combine.sh "},
			{[]string{"3,1-2"}, 4, "--parsable --array=3,1-2 shards.sh --parsable --dependency=afterok:38 combine.sh "},
			{nil, 2, "--parsable --array=1-4%2 shards.sh --parsable --dependency=afterok:38 combine.sh "},
			{[]string{"3,1-2"}, 2, "--parsable --array=3,1-2%2 shards.sh --parsable --dependency=afterok:38 combine.sh "},
			{[]string{"1-3%1"}, 2, "--parsable --array=1-3%1 shards.sh --parsable --dependency=afterok:38 combine.sh "},
		} {
			s := newStage(t, "", func(j *Jobs) { j.AtOnce = c.atOnce })
			s.write("shards.sh", strings.Repeat("\n", 38), 0o666)
			var out bytes.Buffer
			if got := code(s.start(sh, "submit.sh", &out, c.args...).Run()); got != 0 {
				t.Fatalf("%s submit.sh ends with %d: %s", sh, got, &out)
			}
			if got := s.said("bin/sbatch"); got != c.want {
				t.Errorf("%s submit.sh: sbatch %q, want %q", sh, got, c.want)
			}
		}
	}
	s := newStage(t, "")
	s.script("bin/sbatch", "exit 1")
	var out bytes.Buffer
	if got := code(s.start("sh", "submit.sh", &out).Run()); got == 0 {
		t.Error("submit.sh ends with 0 where sbatch fails")
	}
}
