package main

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"time"

	"swaybook/db"
	"swaybook/pipeline"
	"swaybook/pipeline/beside"
	"swaybook/pipeline/cluster"
)

// studyState is the last run of a study, as it is printed as JSON and left for monitoring.
type studyState struct {
	Study string `json:"study"` // the name
	File  string `json:"file"`
	Store string `json:"store"`
	// Shard is the part of the study's records that the run was to fill Store with, null
	// where that is the study's own.
	Shard   *shardNumber `json:"shard"`
	Program string       `json:"program"`
	Run     *int64       `json:"run"` // null where it came to none
	Started string       `json:"started"`
	Ended   string       `json:"ended"`
	Seconds float64      `json:"seconds"`
	// Outcome is published, unchanged, held, failed or interrupted.
	Outcome  string  `json:"outcome"`
	ExitCode int     `json:"exit_code"`
	Error    *string `json:"error"`
	// LastSuccess is when the last run ended that left what is published current.
	LastSuccess *string `json:"last_success"`
	// Edition is the newest, Published that which questions read, Before that which they
	// read when the run began; null where there is none.
	Edition   *int64 `json:"edition"`
	Published *int64 `json:"published"`
	Before    *int64 `json:"published_before"`
	IsRead    bool   `json:"is_read"` // files were read, since something had changed
	// Rejected counts what is rejected of the files as they are, by path; null where nobody
	// came to look.
	Rejected *int          `json:"rejected_files"`
	Ingest   *ingestReport `json:"ingest"`
	// Unseen are files that not all shards saw; null where all did, or none were combined.
	Unseen  *unseenReport  `json:"unseen"`
	Changes *changeReport  `json:"changes"`
	Drift   *driftReport   `json:"drift"`
	Outputs []outputReport `json:"outputs"`
	Pruned  *pruneReport   `json:"pruned"`

	file, metrics string // where it is left for monitoring, "" for nowhere
}

type shardNumber struct {
	Number int `json:"shard"`
	Count  int `json:"count"`
}

// The outcomes of a study's run.
const (
	outcomePublished   = "published"
	outcomeUnchanged   = "unchanged"
	outcomeHeld        = "held"
	outcomeFailed      = "failed"
	outcomeInterrupted = "interrupted"
)

// newStudyState begins the account of a run that fills the study's store, or that of a shard.
func newStudyState(p *studyPlan, shard db.Shard) *studyState {
	o := &p.ingest.pipeline
	s := &studyState{
		Study: p.study.Name.Value, File: p.study.Path(), Program: o.Program,
		Started: o.Started.UTC().Format(time.RFC3339Nano), Outputs: []outputReport{},
	}
	if shard.Count > 0 {
		s.Shard = &shardNumber{shard.Number, shard.Count}
	}
	s.Store, s.file, s.metrics = p.places(shard)
	s.LastSuccess = lastSuccess(s.file)
	return s
}

// lastSuccess is what the state of the run before says, nil where there is none that says it.
func lastSuccess(file string) *string {
	if file == "" {
		return nil
	}
	text, err := readWhole(file, maxState)
	if err != nil {
		return nil
	}
	var before studyState
	if json.Unmarshal(text, &before) != nil || before.LastSuccess == nil {
		return nil
	}
	if _, err := time.Parse(time.RFC3339Nano, *before.LastSuccess); err != nil {
		return nil
	}
	return before.LastSuccess
}

// maxState bounds a file of state in bytes: lists of files and codes are bounded.
const maxState = 64 << 20

// account does the work of a run, unless another one holds the store, and leaves the state of
// what became of it. Whoever holds the store leaves its own: then Ended is empty.
func (s *studyState) account(ctx context.Context, p *studyPlan, work func() error) error {
	pipelined := &p.ingest.pipeline
	lock, err := db.TakeLock(ctx, s.Store, holder(pipelined.Started))
	if _, isHeld := errors.AsType[*db.LockedError](err); isHeld {
		return err
	}
	if err == nil {
		err = work()
	}
	p.ingest.monitor.end()
	s.end(err, pipelined.Clock(), pipelined.Started)
	err = errors.Join(err, s.leave())
	if lock != nil {
		err = errors.Join(err, lock.Release())
	}
	return err
}

// inStore opens the store for the work of a run, which is forgotten where the store does not stay.
func (s *studyState) inStore(ctx context.Context, work func(*db.Store) error) error {
	isGone, err := createdAt(ctx, s.Store, db.AnySolver, work)
	if isGone {
		s.Run = nil // nobody can ask for it any more
	}
	return err
}

// note takes over what a run did by these options; isWhole is false where it was cut short.
func (s *studyState) note(done pipeline.Reprocessed, o ingestOptions, isWhole bool) {
	s.Run, s.Edition, s.Published, s.Before = numbered(done.Run), numbered(done.Edition), numbered(done.Published), numbered(done.Before)
	s.Unseen = newUnseenReport(done.Unseen)
	if s.IsRead = done.IsRead; done.IsRead {
		report := newIngestReport(o, done.Summary, isWhole)
		s.Ingest = &report
	}
}

// numbered is a number of a run, nil for none.
func numbered(id int64) *int64 {
	if id == 0 {
		return nil
	}
	return &id
}

// end closes the account with what became of the run.
func (s *studyState) end(err error, ended, started time.Time) {
	s.Ended, s.Seconds, s.ExitCode = ended.UTC().Format(time.RFC3339Nano), ended.Sub(started).Seconds(), rank(err)
	switch s.ExitCode {
	case exitDone, exitRejected:
		s.LastSuccess = &s.Ended
		s.Outcome = outcomeUnchanged
		if isOther(s.Published, s.Before) {
			s.Outcome = outcomePublished
		}
	case exitHeld:
		s.Outcome = outcomeHeld
	case exitInterrupted:
		s.Outcome = outcomeInterrupted
	default:
		s.Outcome = outcomeFailed
	}
	if err != nil && s.ExitCode != exitRejected {
		text := err.Error()
		s.Error = &text
	}
}

func isOther(a, b *int64) bool { return a != nil && (b == nil || *a != *b) }

// leave writes the state and the metrics where the study wants them. Where the state cannot
// be written, the metrics say that the run failed.
func (s *studyState) leave() error {
	err := leaveFile("state", s.file, func(w io.Writer) error { return writeJSON(w, s) })
	if err != nil {
		s.ExitCode, s.Outcome = exitFailed, outcomeFailed
	}
	return errors.Join(err, leaveFile("metrics", s.metrics, s.writeMetrics))
}

// leaveFile writes a file whole.
func leaveFile(what, path string, fill func(io.Writer) error) error {
	if path == "" {
		return nil
	}
	if err := beside.WriteFile(path, fill); err != nil {
		return fmt.Errorf("%s: %w", what, err)
	}
	return nil
}

// leaveFailure leaves the state of a run that came to nothing, since what its study names is
// not there; unless another run is at work, which leaves its own.
func (p *studyPlan) leaveFailure(ctx context.Context, shard db.Shard, cause error) (err error) {
	s := newStudyState(p, shard)
	lock, err := db.TakeLock(ctx, s.Store, holder(p.ingest.pipeline.Started))
	if _, isHeld := errors.AsType[*db.LockedError](err); isHeld {
		return nil
	}
	if err == nil {
		defer func() { err = errors.Join(err, lock.Release()) }()
	}
	s.end(cause, p.ingest.pipeline.Clock(), p.ingest.pipeline.Started)
	return s.leave()
}

// print writes the account for people.
func (r *studyRun) print(p *printer) {
	s := &r.state
	run := ""
	if s.Run != nil {
		run = fmt.Sprintf(", run %d", *s.Run)
	}
	p.printf("%s%s, %.1f s\n", s.Study, run, s.Seconds)
	switch {
	case s.Ingest != nil:
		s.Ingest.print(p.w, false)
	case s.Run == nil, s.Outcome == outcomeFailed, s.Outcome == outcomeInterrupted:
	case r.options.combine == 0:
		p.printf("No file has changed since the last run.\n")
	case r.isNew:
		p.printf("Of the same files the shards have other results than in the last run.\n")
	default:
		p.printf("No shard has changed since the last run.\n")
	}
	s.Unseen.print(p)
	if s.Changes != nil {
		p.printf("Changed since edition %d, which was published:\n", *s.Before)
		s.Changes.print(p, shownCodes)
	}
	if s.Drift != nil {
		s.Drift.print(p)
	}
	r.printOutputs(p)
	if s.Rejected != nil && s.Ingest == nil {
		p.rejected(s.Store, *s.Rejected)
	}
	r.printEnd(p)
}

// rejected says how many of its files a store holds as rejected, where no file was read to say
// which.
func (p *printer) rejected(store string, files int) {
	if files > 0 {
		p.printf("Files rejected: %d; see: swaybook --store %s query records --rejected\n", files, cluster.Quote(store))
	}
}

// shownCodes is how many codes of a kind the text of a run lists.
const shownCodes = 5

func (r *studyRun) printOutputs(p *printer) {
	for _, o := range r.state.Outputs {
		switch {
		case o.Empty != "":
			p.printf("no answer, so no file %s: %s\n", r.plan.study.Short(o.Path), o.Empty)
		case o.IsNew:
			p.printf("written %s\n", r.plan.study.Short(o.Path))
		}
	}
}

// printEnd says what questions read now.
func (r *studyRun) printEnd(p *printer) {
	s := &r.state
	switch {
	case s.Run == nil: // nobody looked
	case s.Published == nil:
		p.printf("Nothing is published.\n")
	case isOther(s.Published, s.Before) && s.Before == nil:
		p.printf("Edition %d is published.\n", *s.Published)
	case isOther(s.Published, s.Before):
		p.printf("Edition %d is published, before it was %d.\n", *s.Published, *s.Before)
	case s.Outcome == outcomeHeld:
		p.printf("Edition %d stays published; %d is held back. To look at it: query … --as-of %d; to publish it: swaybook --store %s runs publish %d\n",
			*s.Published, *s.Edition, *s.Edition, cluster.Quote(s.Store), *s.Edition)
	case s.Outcome == outcomeUnchanged && isOther(s.Edition, s.Published):
		p.printf("Edition %d stays published, as somebody wished; the newest is %d.\n", *s.Published, *s.Edition)
	default:
		p.printf("Edition %d stays published.\n", *s.Published)
	}
}
