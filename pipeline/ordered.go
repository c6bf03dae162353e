package pipeline

import (
	"context"
	"iter"
	"time"

	"golang.org/x/sync/errgroup"

	"swaybook/db"
)

// A batch is one transaction: large enough that its fixed cost disappears,
// small enough that a crash loses about a second's work. Its spectra fill a tile.
const (
	batchWeight = db.TileMotions // components, or records that were rotated
	batchTime   = time.Second
)

// queueLength is how many items may be processed ahead of the writer: as many as
// a batch, so that the workers go on while one is written. A component waits there
// with its compressed samples and its spectra, some 60 kB.
const queueLength = batchWeight

// stage processes items concurrently and stores the results in the items' order.
type stage[T, R any] struct {
	workers int
	clock   func() time.Time
	process func(context.Context, T) (R, error)
	weigh   func(R) int // of a result in a batch
	// store stores one batch whole.
	store func(context.Context, []R) error
}

// job is one item on its way; the worker answers on result, which holds one
// value so that it never waits for the writer. The writer gets the result alone, so
// that what waits for it keeps no item alive.
type job[T, R any] struct {
	item   T
	result chan R
}

// run returns when all items are stored, at the first error, or when the context
// ends; the results in the writer's hand are stored even then, since their work
// is done.
func (s stage[T, R]) run(ctx context.Context, items iter.Seq[T]) error {
	group, ctx := errgroup.WithContext(ctx)
	jobs := make(chan job[T, R])
	queue := make(chan (<-chan R), queueLength)
	group.Go(func() error { return s.dispatch(ctx, items, queue, jobs) })
	for range s.workers {
		group.Go(func() error { return s.work(ctx, jobs) })
	}
	group.Go(func() error { return s.write(ctx, queue) })
	return group.Wait()
}

// dispatch offers the items to the workers, and in the same order to the writer.
// The bounded queue holds it back where the writer is behind.
func (s stage[T, R]) dispatch(ctx context.Context, items iter.Seq[T], queue chan<- (<-chan R), jobs chan<- job[T, R]) error {
	defer close(queue)
	defer close(jobs)
	for item := range items {
		j := job[T, R]{item: item, result: make(chan R, 1)}
		select {
		case queue <- j.result:
		case <-ctx.Done():
			return ctx.Err()
		}
		select {
		case jobs <- j:
		case <-ctx.Done():
			return ctx.Err()
		}
	}
	return ctx.Err()
}

func (s stage[T, R]) work(ctx context.Context, jobs <-chan job[T, R]) error {
	for j := range jobs {
		res, err := s.process(ctx, j.item)
		if err != nil {
			return err
		}
		j.result <- res
	}
	return ctx.Err()
}

// write takes results until the queue ends or the context does.
func (s stage[T, R]) write(ctx context.Context, queue <-chan (<-chan R)) error {
	for {
		batch, last, err := s.collect(ctx, queue)
		if len(batch) > 0 {
			if errStore := s.store(context.WithoutCancel(ctx), batch); errStore != nil {
				return errStore
			}
		}
		if err != nil || last {
			return err
		}
	}
}

// collect waits for the results of one batch.
func (s stage[T, R]) collect(ctx context.Context, queue <-chan (<-chan R)) (batch []R, last bool, err error) {
	began := s.clock()
	for weight := 0; weight < batchWeight && s.clock().Sub(began) < batchTime; {
		var result <-chan R
		select {
		case next, ok := <-queue:
			if !ok {
				return batch, true, nil
			}
			result = next
		case <-ctx.Done():
			return batch, false, ctx.Err()
		}
		select {
		case res := <-result:
			batch = append(batch, res)
			weight += s.weigh(res)
		case <-ctx.Done():
			return batch, false, ctx.Err()
		}
	}
	return batch, false, nil
}
