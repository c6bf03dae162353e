//go:build unix

package main

import (
	"bytes"
	"context"
	"errors"
	"flag"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"
)

var (
	stressFor     = flag.Duration("stress", 3*time.Second, "how long TestRunsAndReadersAtOnce lasts")
	stressReaders = flag.Int("readers", 10, "processes that ask in TestRunsAndReadersAtOnce")
)

// stressQuestions are asked of a store that runs turn over all the time.
var stressQuestions = [][]string{
	{"query", "spectrum", "--screen", "none", "--component", "each", "--format", "json"},
	{"query", "spectrum", "--screen", "none", "--component", "rotd50", "--periods", "0.33,0.9", "--format", "csv"}, // off the grid
	{"query", "demand", "--screen", "none", "--period", "0.5s", "--weight", "100kN", "--format", "json"},
	{"query", "records", "--format", "csv"},
	{"export", "ordinates"},
}

func (s *faultStudy) question(ctx context.Context, i int) *exec.Cmd {
	return exec.CommandContext(ctx, "swaybook", append([]string{"--store", s.store}, stressQuestions[i]...)...)
}

// states are the answers to all questions in each state of the study, which are by the
// recipe and the files.
func (s *faultStudy) states() (answers [][]string) {
	s.t.Helper()
	answers = make([][]string, len(stressQuestions))
	for n := range 2 {
		for _, recipe := range []string{"standard", "as-delivered"} {
			s.be(recipe, false)
			s.check(s.exchange(n))
			mustRun(s.t, s.reprocess())
			for i := range answers {
				out, err := s.question(s.t.Context(), i).Output()
				s.check(err)
				if len(out) == 0 {
					s.t.Fatalf("no answer to %v", stressQuestions[i])
				}
				answers[i] = append(answers[i], string(out))
			}
		}
	}
	for i, a := range answers {
		slices.Sort(a)
		if len(slices.Compact(slices.Clone(a))) < 2 {
			s.t.Errorf("%v is answered alike in all states", stressQuestions[i])
		}
	}
	return answers
}

// exchange puts a file in the place of one of the records at once: one with even numbers,
// another with odd ones, each with a time of its own.
func (s *faultStudy) exchange(n int) error {
	const name = "NWT_CDH000.AT2"
	text, err := os.ReadFile(filepath.Join("..", "..", "testdata", "records", "at2", name))
	if err != nil {
		return err
	}
	if n%2 == 1 {
		text = bytes.Replace(text, []byte("E-01"), []byte("E-02"), 1)
	}
	at, old := s.at("exchanged"), time.Date(2026, 3, 1, 0, 0, n, 0, time.UTC)
	return errors.Join(os.WriteFile(at, text, 0o666), os.Chtimes(at, old, old), os.Rename(at, s.at("records/"+name)))
}

// stressTally counts from several goroutines, and collects what should not be.
type stressTally struct {
	sync.Mutex
	counts map[string]int
	wrong  []string
}

func (y *stressTally) count(what string) { y.Lock(); y.counts[what]++; y.Unlock() }
func (y *stressTally) blame(format string, args ...any) {
	y.Lock()
	defer y.Unlock()
	y.wrong = append(y.wrong, fmt.Sprintf(format, args...))
}

// Two that reprocess a store, by turns by one recipe and another, while a
// file is exchanged all the time, and readers: a run ends
// well or finds the other at work, and every answer is that of one state, whole.
func TestRunsAndReadersAtOnce(t *testing.T) {
	if testing.Short() {
		t.Skip("lasts some seconds")
	}
	s := newFaultStudy(t, t.TempDir())
	answers := s.states()
	files := s.twoStudies()
	y := &stressTally{counts: map[string]int{}}
	ctx, cancel := context.WithTimeout(t.Context(), *stressFor)
	defer cancel()
	var group sync.WaitGroup
	for _, file := range files {
		group.Go(func() { turnOver(ctx, y, file) })
	}
	group.Go(func() {
		tick := time.NewTicker(200 * time.Millisecond)
		defer tick.Stop()
		for n := 2; ; n++ {
			select {
			case <-ctx.Done():
				return
			case <-tick.C:
			}
			if err := s.exchange(n); err != nil {
				y.blame("exchange a file: %v", err)
			}
		}
	})
	for i := range *stressReaders {
		group.Go(func() {
			for n := i; ctx.Err() == nil; n++ {
				s.askOnce(y, n%len(stressQuestions), answers)
			}
		})
	}
	group.Wait()
	for _, wrong := range y.wrong[:min(len(y.wrong), 10)] {
		t.Error(wrong)
	}
	t.Logf("%d readers, %v: %v, wrong %d", *stressReaders, *stressFor, y.counts, len(y.wrong))
	if y.counts["answers"] == 0 || y.counts["runs"] == 0 {
		t.Error("nothing was done")
	}
	s.be("standard", false)
	mustRun(t, s.reprocess())
	if got := s.left(); got.digest == "" {
		t.Error("nothing is published")
	}
	s.finished("after all", s.left())
}

// twoStudies are the study by one recipe and by the other, with products of their own.
func (s *faultStudy) twoStudies() (files []string) {
	s.t.Helper()
	for _, recipe := range []string{"standard", "as-delivered"} {
		text := strings.NewReplacer("RECIPE", recipe, `"out/`, `"out-`+recipe+`/`, `"lists/`, `"out-`+recipe+`/`, "state.json", recipe+".json", "wharves.prom", recipe+".prom").Replace(faultStudyText)
		file := filepath.Join(s.dir, recipe+".toml")
		s.check(os.WriteFile(file, []byte(text), 0o666))
		files = append(files, file)
	}
	return files
}

// turnOver runs a study again and again.
func turnOver(ctx context.Context, y *stressTally, file string) {
	for ctx.Err() == nil {
		var stderr bytes.Buffer
		cmd := exec.Command("swaybook", "--quiet", "reprocess", file)
		cmd.Stderr = &stderr
		err := cmd.Run()
		exit, failed := errors.AsType[*exec.ExitError](err)
		switch {
		case err == nil:
			y.count("runs")
		case failed && exit.ExitCode() == exitLocked && strings.Contains(stderr.String(), "another run holds the store"):
			y.count("turned away")
		default:
			y.blame("run of %s: %v, %s", filepath.Base(file), err, stderr.String())
		}
	}
}

// askOnce asks one question, whose answer must be that of one of the states.
func (s *faultStudy) askOnce(y *stressTally, i int, answers [][]string) {
	var stderr bytes.Buffer
	cmd := s.question(context.Background(), i)
	cmd.Stderr = &stderr
	out, err := cmd.Output()
	switch {
	case err != nil:
		y.blame("%v: %v, %s", stressQuestions[i], err, stderr.String())
	case !slices.Contains(answers[i], string(out)):
		y.blame("%v: an answer of no state, of %d bytes: %.200s", stressQuestions[i], len(out), out)
	default:
		y.count("answers")
		if i == len(stressQuestions)-1 {
			y.count(fmt.Sprint("exports of state ", slices.Index(answers[i], string(out))))
		}
	}
}
