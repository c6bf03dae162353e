package pipeline

import (
	"context"
	"errors"
	"slices"

	"swaybook/db"
	"swaybook/pipeline/condition"
	"swaybook/pipeline/signal"
)

// Recomputed is one held component of which the generation lacked the spectra done.
type Recomputed struct {
	Done, Total  int
	Record, Role string
	Reason       string // why it could not be solved, "" where it was
}

// complete computes the spectra of held components that the generation lacks, from the
// stored samples: all of them where a recipe is new to the store, and those of a run
// that was stopped, or that served another recipe. A component that cannot be solved is
// reported, and tried again only under another recipe or version of the steps, or where
// the store is damaged.
func (w *writer) complete(ctx context.Context) error {
	lacking, err := lackingOf(ctx, w, w.store.Unsolved)
	if err != nil || len(lacking) == 0 {
		return err
	}
	w.summary.Uncomputed = len(lacking)
	c := &completer{writer: w, total: len(lacking)}
	return stage[db.Unsolved, completed]{
		workers: w.opts.Workers, clock: w.opts.Clock, process: c.process,
		weigh: func(completed) int { return 1 }, store: c.storeBatch,
	}.run(ctx, slices.Values(lacking))
}

// lackingOf lists what the generation lacks that was not computed of equal inputs before.
func lackingOf[T any](ctx context.Context, w *writer, list func(context.Context, int64) ([]T, error)) ([]T, error) {
	lacking, err := list(ctx, w.run.generation.ID)
	if err != nil || len(lacking) == 0 {
		return nil, err
	}
	found := false
	err = w.store.Update(ctx, func(tx *db.Tx) (err error) {
		found, err = tx.Adopt(ctx, w.run.generation.ID)
		return err
	})
	if err != nil || !found {
		return lacking, err
	}
	return list(ctx, w.run.generation.ID)
}

// completed is a held component with what was computed of it.
type completed struct {
	component db.Unsolved
	spectra   db.Spectra
	err       error // why it could not be
}

// completer computes components and stores what it computes.
type completer struct {
	*writer
	done, total int // the writing goroutine's
}

func (c *completer) process(ctx context.Context, u db.Unsolved) (completed, error) {
	stored, err := c.store.ReadUnsolved(ctx, u)
	if err != nil {
		return completed{}, err
	}
	out := completed{component: u}
	motion, err := stored.DecodeMotion()
	if err == nil {
		err = survive(func() error {
			out.spectra, err = c.run.reader.computer.compute(condition.Component(motion), signal.Arrival(motion.Acceleration, motion.StepS))
			return err
		})
	}
	out.err = err
	return out, ctx.Err()
}

// storeBatch stores what was computed in one transaction. A component that another
// process has changed or solved meanwhile is left alone.
func (c *completer) storeBatch(ctx context.Context, batch []completed) error {
	err := c.store.Update(ctx, func(tx *db.Tx) error {
		for _, done := range batch {
			current, err := tx.IsUnsolved(ctx, c.run.generation.ID, done.component)
			if err == nil && current {
				err = c.put(ctx, tx, done)
			}
			if err != nil {
				return err
			}
		}
		return nil
	})
	if err != nil {
		return err
	}
	for _, done := range batch {
		c.done++
		report := Recomputed{Done: c.done, Total: c.total, Record: done.component.Code, Role: done.component.Role}
		if done.err != nil {
			report.Reason = done.err.Error()
		}
		c.summary.addRecomputed(report)
		c.opts.Recomputed(report)
	}
	return nil
}

// put stores the spectra, or why there are none. What is damaged in the store may be
// mended, and so may a fault of this program.
func (c *completer) put(ctx context.Context, tx *db.Tx, done completed) error {
	_, isFault := errors.AsType[*faultError](done.err)
	switch {
	case done.err == nil:
		return tx.AddSolved(ctx, done.component, c.run.generation.ID, done.spectra)
	case isFault || errors.Is(done.err, db.ErrDamaged):
		return nil
	}
	return tx.AddFailure(ctx, done.component, c.run.generation.ID, done.err.Error())
}
