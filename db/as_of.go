package db

import (
	"context"
	"errors"
	"fmt"
	"strings"
)

// ErrNoEdition says that no edition of a run is kept.
var ErrNoEdition = errors.New("no such edition")

// ViewAsOf runs f on a snapshot of what was published when a run had ended, or of what that
// run held back. The error is a *NoEditionError where that is not there.
func (s *Store) ViewAsOf(ctx context.Context, runID int64, f func(*Snapshot) error) error {
	missing := func(ctx context.Context, q queryer) error { return noEdition(ctx, q, runID) }
	return s.view(ctx, missing, f, `id = (SELECT `+editionOfRun+` FROM run WHERE id = ? AND `+isWholeRun+`)`, runID)
}

// isWholeRun says of a run that its row is what was written. What is pruned is no longer in
// it, so that the edition which it names is there.
const isWholeRun = `seal = crc32c(id, kind, program, started_at, ended_at, outcome, counts, edition_id)`

// alteredRun is the error of a run whose row is not.
func alteredRun(id int64) error {
	return fmt.Errorf("%w: run %d is not as it was written; swaybook verify lists all", ErrAltered, id)
}

// editionOfRun is the id of the edition that a run left, if it is kept: a run that made one
// and died before it could say so has that.
const editionOfRun = `coalesce(edition_id, id)`

// NoEditionError says that the edition which a run left is not kept, or that there is no
// such run, and which can be asked for. It wraps ErrNoEdition.
type NoEditionError struct {
	Run   int64
	Known bool    // the run
	Kept  []int64 // runs whose edition is kept, ascending
}

func (e *NoEditionError) Error() string {
	what := fmt.Sprintf("there is no run %d", e.Run)
	if e.Known {
		what = fmt.Sprintf("of run %d no edition is kept", e.Run)
	}
	if len(e.Kept) == 0 {
		return what
	}
	return what + "; editions are kept of: " + ranges(e.Kept)
}

// Unwrap returns ErrNoEdition.
func (e *NoEditionError) Unwrap() error { return ErrNoEdition }

// ranges lists ascending numbers, such as "1 to 4, 7".
func ranges(ids []int64) string {
	var words []string
	for i := 0; i < len(ids); {
		last := i
		for last+1 < len(ids) && ids[last+1] == ids[last]+1 {
			last++
		}
		word := fmt.Sprint(ids[i])
		if last > i+1 {
			word += fmt.Sprintf(" to %d", ids[last])
		} else {
			last = i
		}
		words, i = append(words, word), last+1
	}
	return strings.Join(words, ", ")
}

// noEdition is the error of a run that left nothing which is kept.
func noEdition(ctx context.Context, q queryer, run int64) error {
	known, err := idOf(ctx, q, `SELECT id FROM run WHERE id = ?`, run)
	if err != nil {
		return fmt.Errorf("read runs: %w", err)
	}
	whole, err := idOf(ctx, q, `SELECT id FROM run WHERE id = ? AND edition_id IS NULL AND `+isWholeRun, run)
	if err != nil {
		return fmt.Errorf("read runs: %w", err)
	}
	if known != whole {
		return alteredRun(run)
	}
	rows, err := q.QueryContext(ctx, `SELECT id FROM run WHERE `+editionOfRun+` IN (SELECT id FROM edition) ORDER BY id`)
	if err != nil {
		return fmt.Errorf("read runs: %w", err)
	}
	kept, err := collect(rows, func(id *int64) []any { return []any{id} })
	if err != nil {
		return fmt.Errorf("read runs: %w", err)
	}
	return &NoEditionError{Run: run, Known: known != 0, Kept: kept}
}
