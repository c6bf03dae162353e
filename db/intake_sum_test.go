package db

import (
	"context"
	"errors"
	"fmt"
	"testing"
	"time"
)

// A shard notes at the end of each run of how many files its intake is, also of none any more.
func TestShardsNoteTheirIntake(t *testing.T) {
	s := newStore(t)
	run := func(outcome string, paths ...string) {
		t.Helper()
		changed(t, s, func(ctx context.Context, tx *Tx) error {
			id, err := tx.StartRun(ctx, "ingest", "test", time.Now())
			for _, path := range paths {
				err = errors.Join(err, tx.PutIntake(ctx, Intake{IntakeKey: IntakeKey{Path: path}, Shard: 2, Said: []byte("{}")}))
			}
			return errors.Join(err, tx.FinishRun(ctx, id, outcome, nil, time.Now()))
		})
	}
	noted := func(want string) {
		t.Helper()
		sums, err := notedSums(t.Context(), s.read)
		if got := fmt.Sprint(sums[2].files, len(sums)); err != nil || got != want {
			t.Errorf("noted %s, %v, want %s", got, err, want)
		}
		is, err := intakeSums(t.Context(), s.read)
		if err != nil || len(sums) > 0 && is[2] != sums[2] {
			t.Errorf("noted %v, %v, there are %v", sums[2], err, is[2])
		}
	}
	changed(t, s, func(ctx context.Context, tx *Tx) error { return tx.SetShard(ctx, Shard{2, 3}) })
	run(outcomeDone, "a", "b")
	noted("2 1")
	run(outcomeInterrupted, "c")
	noted("0 0")
	run(outcomeDone)
	noted("3 1")
	changed(t, s, func(ctx context.Context, tx *Tx) error { return tx.ClearIntake(ctx) })
	run(outcomeDone)
	noted("0 1")
}
