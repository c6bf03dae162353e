//go:build unix

package main

import (
	"flag"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"testing"
	"time"
)

var kills = flag.Int("kills", 3, "moments at which TestKills kills runs")

// killCase is a way from one state to another on which a run is killed.
type killCase struct {
	name   string
	before func(*faultStudy) // sets the files, runs what comes before; nil for an empty folder
	change func(*faultStudy)
	run    func(*faultStudy) *exec.Cmd
	isLate func(*faultStudy) bool // it is about to change what others see; nil where nothing tells
}

func toTheEnd(s *faultStudy) { s.t.Helper(); mustRun(s.t, s.reprocess()) }

func reprocessAll(s *faultStudy) *exec.Cmd { return s.reprocess() }

// fillShards has all shards hold what a run would read, and combineShards combines them.
func fillShards(s *faultStudy) {
	s.t.Helper()
	for _, shard := range []string{"1/3", "2/3", "3/3"} {
		mustRun(s.t, s.reprocess("--shard", shard))
	}
}

func combineShards(s *faultStudy) *exec.Cmd { return s.reprocess("--combine", "3") }

// aboutToWrite reports whether files of the products stand beside those that are there.
func aboutToWrite(s *faultStudy) bool {
	for _, folder := range faultFolders[1:] {
		if left, _ := filepath.Glob(filepath.Join(s.at(folder), ".*.part")); len(left) > 0 {
			return true
		}
	}
	return false
}

// The first ones are those of a short test.
var killCases = []killCase{
	{"reprocess what changed", func(s *faultStudy) {
		s.be("as-delivered", false)
		toTheEnd(s)
		s.be("standard", false)
		toTheEnd(s) // so that keep = 2 leaves something to prune
	}, func(s *faultStudy) { s.be("standard", true) }, reprocessAll, aboutToWrite},
	{"ingest first", nil, func(s *faultStudy) { s.be("standard", false) }, (*faultStudy).ingestStandard, nil},
	{"reprocess by another recipe", func(s *faultStudy) { s.be("standard", false); toTheEnd(s) },
		func(s *faultStudy) { s.be("as-delivered", false) }, reprocessAll, aboutToWrite},
	{"combine what changed", func(s *faultStudy) {
		s.be("standard", false)
		fillShards(s)
		mustRun(s.t, combineShards(s))
		s.be("standard", true)
		fillShards(s)
	}, func(*faultStudy) {}, combineShards, aboutToWrite},
	{"ingest more", func(s *faultStudy) { s.be("standard", false); mustRun(s.t, s.ingestStandard()) },
		func(s *faultStudy) { s.add("NWT_CDH-UP.AT2") }, (*faultStudy).ingestStandard, nil},
	{"ingest by another recipe", func(s *faultStudy) { s.be("standard", false); mustRun(s.t, s.ingestStandard()) },
		func(*faultStudy) {}, func(s *faultStudy) *exec.Cmd { return s.ingest("as-delivered") }, nil},
	{"reprocess first", nil, func(s *faultStudy) { s.be("standard", false) }, reprocessAll, aboutToWrite},
	{"combine by another recipe", func(s *faultStudy) {
		s.be("standard", false)
		toTheEnd(s)
		s.be("as-delivered", true)
		fillShards(s)
	}, func(*faultStudy) {}, combineShards, aboutToWrite},
	{"ingest a shard", nil, func(s *faultStudy) { s.be("standard", false) },
		func(s *faultStudy) *exec.Cmd { return s.ingest("standard", "--shard", "1/2") }, nil},
	{"reprocess nothing but a lost file", func(s *faultStudy) { s.be("standard", false); toTheEnd(s) },
		func(s *faultStudy) { s.check(os.Remove(s.at("out/each.csv"))) }, reprocessAll, aboutToWrite},
}

// Whenever a run is killed, what others see is that of before or of after, each file whole;
// the next run leaves what an undisturbed one leaves, and nothing else.
func TestKills(t *testing.T) {
	if testing.Short() {
		t.Skip("kills runs one after the other")
	}
	rng := rand.New(rand.NewPCG(29, 11))
	s := newFaultStudy(t, t.TempDir())
	for i, c := range killCases {
		t.Run(c.name, func(t *testing.T) {
			s.t = t
			share := *kills / len(killCases)
			if i < *kills%len(killCases) {
				share++
			}
			if share > 0 {
				c.kill(s, share, rng)
			}
		})
	}
}

// kill kills the run so many times.
func (c *killCase) kill(s *faultStudy, times int, rng *rand.Rand) {
	s.t.Helper()
	s.restore("")
	if c.before != nil {
		c.before(s)
	}
	saved := s.t.TempDir()
	s.save(saved)
	again := func() { s.restore(saved); c.change(s) }
	again()
	before := s.left()
	lasts, lastsLate := c.lasts(s, again, min(times, 3))
	after := s.left()
	s.finished("undisturbed", after)
	seen := map[string]int{}
	for killed := 0; killed < times && seen["ended"] < 5*times+20; {
		again()
		isLate := c.isLate != nil && rng.IntN(3) == 0
		begun, within := isHeld, lasts
		if isLate {
			begun, within = c.isLate, lastsLate
		}
		when := time.Duration(rng.Int64N(int64(within)))
		if !killAfter(s, c.run(s), begun, when) {
			seen["ended"]++
			continue
		}
		killed++
		seen[s.between(before, after)]++
		if isLate {
			seen["late"]++
		}
		mustRun(s.t, c.run(s))
		s.finished("after a kill", after)
		if s.t.Failed() {
			s.t.Fatalf("kill %d, late %v, after %v of %v", killed, isLate, when, within)
		}
	}
	s.t.Logf("a run holds the store for %v, at last writes for %v; killed, and what was seen then: %v", lasts, lastsLate, seen)
}

// isHeld reports whether a run has begun: it has the lock.
func isHeld(s *faultStudy) bool {
	_, err := os.Stat(s.store + ".lock")
	return err == nil
}

// lasts measures the undisturbed run, of several the longest, as the next may be as slow.
func (c *killCase) lasts(s *faultStudy, again func(), times int) (all, late time.Duration) {
	s.t.Helper()
	measure := func(begun func(*faultStudy) bool) (longest time.Duration) {
		for range times {
			again()
			p, ok := watch(s.t, c.run(s), func() bool { return begun(s) })
			start := time.Now()
			if err := <-p.ended; err != nil {
				s.t.Fatal(err, p.stderr.String())
			}
			if ok {
				longest = max(longest, time.Since(start))
			}
		}
		return max(longest, time.Millisecond)
	}
	if all = measure(isHeld); c.isLate != nil {
		late = measure(c.isLate)
	}
	return all, late
}

// killAfter starts the command and kills it so long after it has begun; false where it had
// ended by then.
func killAfter(s *faultStudy, cmd *exec.Cmd, begun func(*faultStudy) bool, after time.Duration) bool {
	s.t.Helper()
	p, ok := watch(s.t, cmd, func() bool { return begun(s) })
	if !ok {
		s.check(<-p.ended)
		return false
	}
	select {
	case err := <-p.ended:
		s.check(err)
		return false
	case <-time.After(after):
	}
	if err := p.Process.Kill(); err != nil {
		s.check(<-p.ended)
		return false
	}
	return <-p.ended != nil
}

// between fails the test unless what a killed run left is of before or of after, the files
// for themselves, since they take their names one by one; but none is of before once it is
// published. It says which of both is seen.
func (s *faultStudy) between(before, after outcome) string {
	s.t.Helper()
	got := s.left()
	if got.digest != before.digest && got.digest != after.digest {
		s.t.Errorf("digest %s is neither that of before, %s, nor that of after, %s", got.digest, before.digest, after.digest)
	}
	isPublished := got.digest == after.digest && after.digest != before.digest
	for _, name := range append(differing(got.files, before.files), differing(got.files, after.files)...) {
		text, there := got.files[name]
		old, wasThere := before.files[name]
		next, willBe := after.files[name]
		isOld, isNew := there == wasThere && text == old, there == willBe && text == next
		if !isOld && !isNew || isPublished && !isNew {
			s.t.Errorf("%s is neither of before nor of after, or of before though that is published no more", name)
		}
	}
	switch {
	case before.digest == after.digest:
		return "same"
	case isPublished:
		return "after"
	case len(differing(got.files, before.files)) > 0:
		return "before, with files of after"
	}
	return "before"
}
