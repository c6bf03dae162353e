package db

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"time"
)

// Run is one execution of ingest, and what it left.
type Run struct {
	ID             int64
	Kind, Program  string
	Started, Ended time.Time // UTC; Ended is zero of a run that has not ended, or died
	Outcome        string
	Counts         json.RawMessage // an object, as the run gave it
	// Edition is what was published when the run had ended, or what it held back; 0 where
	// that is not kept, or never was.
	Edition int64
	// EditionState is the edition's, EditionGone where it is no longer kept, "" where there
	// was none.
	EditionState string
}

// The outcomes of runs beside those that are given to FinishRun.
const (
	OutcomeRunning = "running"
	OutcomeDied    = "died" // its process ended without saying so
)

// EditionGone is the state of an edition that is no longer kept.
const EditionGone = "gone"

// Runs returns all runs, the first first.
func (s *Store) Runs(ctx context.Context) ([]Run, error) {
	lock, err := lookAtLock(s.path)
	if err != nil {
		return nil, err
	}
	rows, err := s.read.QueryContext(ctx, `SELECT r.id, r.kind, r.program, r.started_at, coalesce(r.ended_at, ''), r.outcome, r.counts, coalesce(e.id, 0), coalesce(e.state, ''), r.is_whole AND (r.edition_id IS NULL OR e.id IS NOT NULL)
		FROM (SELECT *, `+editionOfRun+` AS left_id, `+isWholeRun+` AS is_whole FROM run) r LEFT JOIN edition e ON e.id = r.left_id ORDER BY r.id`)
	if err != nil {
		return nil, fmt.Errorf("read runs: %w", explain(err))
	}
	type row struct {
		Run
		started, ended, counts string
		isWhole                bool
	}
	found, err := collect(rows, func(v *row) []any {
		return []any{&v.ID, &v.Kind, &v.Program, &v.started, &v.ended, &v.Outcome, &v.counts, &v.Edition, &v.EditionState, &v.isWhole}
	})
	if err != nil {
		return nil, fmt.Errorf("read runs: %w", err)
	}
	out := make([]Run, len(found))
	for i, v := range found {
		if !v.isWhole {
			return nil, fmt.Errorf("%s: %w", s.path, alteredRun(v.ID))
		}
		v.Counts = json.RawMessage(v.counts)
		var errEnded error
		v.Started, err = parseTime(v.started)
		v.Ended, errEnded = parseTime(v.ended)
		if err := errors.Join(err, errEnded); err != nil {
			return nil, fmt.Errorf("read runs: %w", err)
		}
		out[i] = v.Run
	}
	markGone(out)
	return out, s.markDied(out, lock)
}

// markGone tells what is no longer kept from what never was. A run that came to its end left
// something, as did an ingest that was stopped in order, and so what came after it.
func markGone(runs []Run) {
	published := false
	for i := range runs {
		r := &runs[i]
		published = published || r.Outcome == outcomeDone || r.Outcome == outcomeInterrupted && r.Kind == kindIngest
		if r.Edition == 0 && published && !r.Ended.IsZero() {
			r.EditionState = EditionGone
		}
	}
}

// Outcomes that FinishRun is given, and the kind of run that publishes a part.
const (
	kindIngest         = "ingest"
	outcomeDone        = "done"
	outcomeInterrupted = "interrupted"
)

// markDied looks which of the runs that have not ended is at work: the last one, where
// somebody holds the lock who took it before it began. was is who held it before the runs
// were read.
func (s *Store) markDied(runs []Run, was *heldLock) error {
	now := was
	if !was.isHeld { // it may have begun since
		var err error
		if now, err = lookAtLock(s.path); err != nil {
			return err
		}
	}
	for i := range runs {
		r := &runs[i]
		isAtWork := i == len(runs)-1 && now.isHeld && (now.holder == nil || !now.holder.Since.After(r.Started))
		if r.Outcome == OutcomeRunning && !isAtWork {
			r.Outcome = OutcomeDied
		}
	}
	return nil
}
