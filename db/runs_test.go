package db

import (
	"context"
	"errors"
	"fmt"
	"slices"
	"strings"
	"testing"
	"time"
)

// Runs say what they left, and which of them are at work.
func TestRuns(t *testing.T) {
	s, _ := pairStore(t)
	editionOf(t, s, true)
	changed(t, s, inventedChanges[0])
	editionOf(t, s, false)
	editionOf(t, s, true) // which changes nothing
	start := func(at time.Time) (id int64) {
		changed(t, s, func(ctx context.Context, tx *Tx) (err error) {
			id, err = tx.StartRun(ctx, "ingest", "test", at)
			return err
		})
		return id
	}
	start(startsAt)
	last := start(firstHolder.Since.Add(time.Second))
	want := func(when string, outcomes ...string) {
		t.Helper()
		runs, err := s.Runs(t.Context())
		if err != nil {
			t.Fatal(err)
		}
		var got []string
		for _, r := range runs {
			got = append(got, r.Outcome+" "+r.EditionState)
		}
		if !slices.Equal(got[len(got)-len(outcomes):], outcomes) {
			t.Errorf("%s: %q, want %q at the end", when, got, outcomes)
		}
	}
	want("nobody has the lock", "done published", "done held", "done published", "died ", "died ")
	lock := takeLockOf(t, s.Path(), firstHolder)
	want("a run is at work", "died ", "running ")
	if err := lock.Release(); err != nil {
		t.Fatal(err)
	}
	lock = takeLockOf(t, s.Path(), secondHolder)
	want("somebody else has taken the lock since", "died ", "died ")
	if err := lock.Release(); err != nil {
		t.Fatal(err)
	}
	// A run that died right after it had made its edition left that.
	changed(t, s, inventedChanges[1])
	changed(t, s, func(ctx context.Context, tx *Tx) error {
		isNew, err := tx.PutEdition(ctx, last, 1)
		if !isNew {
			t.Error("no new edition")
		}
		return errors.Join(err, tx.Publish(ctx, last))
	})
	want("it made an edition", "died ", "died published")
	if now := shownNow(t, s); now != shownAsOf(t, s, last) {
		t.Errorf("as of a run that died:\n%s\nwant\n%s", shownAsOf(t, s, last), now)
	}
}

// Only what was once there is gone.
func TestGoneIsWhatWas(t *testing.T) {
	ended := startsAt
	runs := []Run{
		{Outcome: "failed", Ended: ended}, {Outcome: OutcomeRunning}, {Outcome: "interrupted", Kind: "reprocess", Ended: ended}, {Outcome: "done", Ended: ended}, {Outcome: "failed", Ended: ended},
		{Outcome: "done", Ended: ended, Edition: 5, EditionState: EditionHeld}, {Outcome: OutcomeRunning},
	}
	markGone(runs)
	for i, want := range []string{"", "", "", EditionGone, EditionGone, EditionHeld, ""} {
		if runs[i].EditionState != want {
			t.Errorf("run %d: %q, want %q", i+1, runs[i].EditionState, want)
		}
	}
}

// What a run changed is named, and nothing else.
func TestRunDetailsSayWhatChanged(t *testing.T) {
	s, _ := pairStore(t)
	d, err := s.RunDetails(t.Context(), int64(count(t, s, `SELECT max(id) FROM edition`)))
	want := []string{"R1 h1", "R1 h2", "R1 v", "single h1"}
	if err != nil || d.Before == 0 || !slices.Equal(d.Changes.Records.Added, []string{"R1", "single"}) || !slices.Equal(d.Changes.Components.Added, want) || len(d.Changes.Recomputed) > 0 {
		t.Errorf("what was added: %+v, %+v, %v", d, d.Changes, err)
	}
	last := d.Run.ID
	for i, want := range []Changes{
		{Components: Change{Changed: []string{"R1 h1", "R1 h2"}}, Recomputed: []string{"R1 h1", "R1 h2"}},
		{Components: Change{Changed: []string{"R1 h2"}}},
	} {
		changed(t, s, inventedChanges[i])
		run, _ := editionOf(t, s, true)
		d, err := s.RunDetails(t.Context(), run)
		if err != nil || d.Before != last {
			t.Fatalf("run %d: %+v, %v", run, d, err)
		}
		last = run
		if got := d.Changes; !slices.Equal(got.Components.Changed, want.Components.Changed) || !slices.Equal(got.Recomputed, want.Recomputed) {
			t.Errorf("change %d: %+v, want %+v", i, got, want)
		}
	}
	// What is found of a component is of it.
	changed(t, s, func(ctx context.Context, tx *Tx) error {
		return tx.exec(ctx, `INSERT INTO finding (component_id, flag, value, bound, words) VALUES (3, 'spike', 2, 1, 'invented')`)
	})
	run, _ := editionOf(t, s, true)
	d, err = s.RunDetails(t.Context(), run)
	if err != nil || len(d.Changes.Components.Changed) != 1 || len(d.Changes.Components.Added)+len(d.Changes.Recomputed)+len(d.Changes.Records.Changed) > 0 {
		t.Errorf("a finding: %+v, %v", d, err)
	}
	again, _ := editionOf(t, s, true)
	d, err = s.RunDetails(t.Context(), again)
	if err != nil || d.Edition != run || d.Changes == nil || len(d.Changes.Components.Changed) > 0 {
		t.Errorf("a run that changes nothing: %+v, %v", d, err)
	}
	if _, err := s.RunDetails(t.Context(), 99); err == nil || !strings.Contains(err.Error(), "there is no run 99") {
		t.Errorf("no run: %v", err)
	}
}

// A run that reads all files anew gives the same things other ids; that is no change.
func TestOtherIDsAreNoChange(t *testing.T) {
	s, _ := pairStore(t)
	changed(t, s, inventedChanges[3]) // with versions
	editionOf(t, s, true)
	changed(t, s, func(ctx context.Context, tx *Tx) error {
		err := tx.exec(ctx, `PRAGMA defer_foreign_keys = 1`)
		for table, ids := range map[string][]string{
			"record": {"id", "event_id", "station_id"}, "component": {"id", "record_id", "source_id", "motion_id"}, "computed": {"record_id"}, "event": {"id", "primary_id"},
			"station": {"id"}, "source_file": {"id"}, "statement": {"subject_id"}, "likeness": {"first_id", "second_id"}, "finding": {"component_id"},
		} {
			for _, id := range ids {
				err = errors.Join(err, tx.exec(ctx, `UPDATE `+table+` SET `+id+` = `+id+` + 100`))
			}
		}
		return err
	})
	before := shownNow(t, s)
	run, isNew := editionOf(t, s, true)
	d, err := s.RunDetails(t.Context(), run)
	if err != nil || !isNew || before == shownNow(t, s) {
		t.Fatalf("nothing is another: %v, %v", isNew, err)
	}
	if got := fmt.Sprintf("%+v", *d.Changes); got != fmt.Sprintf("%+v", Changes{}) {
		t.Errorf("changes: %s", got)
	}
}
