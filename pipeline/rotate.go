package pipeline

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"swaybook/db"
	"swaybook/pipeline/condition"
	"swaybook/pipeline/spectrum"
)

// Rotated is one record with two horizontals done.
type Rotated struct {
	Done, Total int
	Record      string // its code
	// Reason says why the pair could not be rotated, in words by which such pairs
	// can be counted; it is "" where it was. Detail has the particulars.
	Reason, Detail string
	// Damaged says that it could not because of damage in the store.
	Damaged bool
	// Assumed says that a right angle was assumed between the components, since an
	// azimuth is unknown.
	Assumed bool
}

// rotate completes the generation: it computes what is taken over all directions
// for every record that has two horizontals and lacks that, from the stored
// samples and spectra. So it does not matter whether both came in this run, in two
// runs, or before a run that was stopped. A pair that cannot be rotated is
// reported and left alone. With SkipRotation those that can be are counted.
func (w *writer) rotate(ctx context.Context) error {
	pairs, err := lackingOf(ctx, w, w.store.Unrotated)
	if err != nil {
		return err
	}
	if w.opts.SkipRotation {
		w.summary.Unrotated = countRotatable(pairs)
		return nil
	}
	w.summary.Unrotated = len(pairs)
	r := &rotator{writer: w, total: len(pairs)}
	return stage[db.Pair, rotation]{
		workers: w.opts.Workers, clock: w.opts.Clock, process: r.process,
		weigh: func(rotation) int { return 1 }, store: r.storeBatch,
	}.run(ctx, slices.Values(pairs))
}

func countRotatable(pairs []db.Pair) (n int) {
	for _, p := range pairs {
		if _, err := spectrum.Between(horizontalOf(p.First), horizontalOf(p.Second)); err == nil {
			n++
		}
	}
	return n
}

// rotation is a pair with what was computed of it over all directions.
type rotation struct {
	pair            db.Pair
	assumed         bool   // a right angle between the components
	damaged         bool   // in the store
	reason, detail  string // why it could not be rotated
	median, maximum db.Spectra
}

// rotator turns pairs into rotations and stores these.
type rotator struct {
	*writer
	total int
	count int // of pairs done, the writing goroutine's
}

// process reads and rotates one pair. What is wrong with the pair is part of the
// rotation, and found before it is read where that can be; an error is the store's
// or the context's.
func (r *rotator) process(ctx context.Context, p db.Pair) (rotation, error) {
	rot := rotation{pair: p}
	relation, err := spectrum.Between(horizontalOf(p.First), horizontalOf(p.Second))
	if err != nil {
		return rot.failed(err), ctx.Err()
	}
	rot.assumed = relation.Assumed
	first, second, err := r.store.ReadPair(ctx, r.run.generation, p)
	if err != nil {
		return rot, err
	}
	err = survive(func() error {
		rot.median, rot.maximum, err = r.run.reader.computer.rotate(relation, first, second)
		return err
	})
	if err != nil {
		return rot.failed(err), ctx.Err()
	}
	return rot, ctx.Err()
}

func horizontalOf(c db.PairComponent) spectrum.Horizontal {
	return spectrum.Horizontal{StepS: c.StepS, Samples: c.Samples, AzimuthDeg: c.AzimuthDeg, AzimuthKnown: c.AzimuthKnown, Start: c.Start}
}

// failed is the rotation with the reason why there is none.
func (rot rotation) failed(err error) rotation {
	rot.reason = err.Error()
	if e, ok := errors.AsType[*spectrum.PairError](err); ok {
		rot.reason, rot.detail = e.Reason, e.Detail
	}
	if errors.Is(err, db.ErrUnsolved) {
		rot.reason, rot.detail = "horizontal components that the recipe cannot condition", err.Error()
	}
	if errors.Is(err, db.ErrDamaged) {
		rot.damaged, rot.reason = true, db.ErrDamaged.Error()
		rot.detail = strings.TrimPrefix(err.Error(), rot.reason+": ")
	}
	return rot
}

// rotate computes the rotated spectra and measures of a pair of equal steps, each
// component conditioned as for its own.
func (c *computer) rotate(relation spectrum.Relation, first, second db.StoredMotion) (median, maximum db.Spectra, err error) {
	a, sdA, err := c.solved(first)
	if err != nil {
		return median, maximum, err
	}
	b, sdB, err := c.solved(second)
	if err != nil {
		return median, maximum, err
	}
	stepS := a.StepS
	solver, err := c.solvers.Get(stepS)
	if err != nil {
		return median, maximum, fmt.Errorf("no solver for the time step: %w", err)
	}
	pair := pairOf(relation, a, b)
	if pair.ChangedA {
		sdA = solver.SD(nil, pair.A)
	}
	if pair.ChangedB {
		sdB = solver.SD(nil, pair.B)
	}
	sd50, sd100 := solver.RotD(pair.A, pair.B, sdA, sdB)
	peaks50, peaks100 := pair.Peaks(stepS)
	if !areFinite(append(slices.Clone(sd100), peaks100.PGA, peaks100.PGV, peaks100.PGD)) {
		return median, maximum, errors.New("the motion is beyond the range of numbers")
	}
	return c.solvers.spectra(sd50, peakMeasures(peaks50), nil), c.solvers.spectra(sd100, peakMeasures(peaks100), nil), nil
}

// pairOf makes two conditioned motions fit for rotation.
func pairOf(relation spectrum.Relation, a, b condition.Conditioned) spectrum.Pair {
	return spectrum.NewPair(a.Acceleration, b.Acceleration, a.SamplesBefore(b)+relation.Later(a.StepS), relation.Deg)
}

// rotateOffGrid computes the median and the maximum of a pair over all directions for
// oscillators off the grid.
func (c *computer) rotateOffGrid(relation spectrum.Relation, stored [2]db.StoredMotion, oscillators []db.Oscillator) (rotated [2][]float64, err error) {
	var motions [2]condition.Conditioned
	for k := range stored {
		if motions[k], _, err = c.solved(stored[k]); err != nil {
			return rotated, err
		}
	}
	solver, err := solverOf(oscillators, motions[0].StepS)
	if err != nil {
		return rotated, err
	}
	p := pairOf(relation, motions[0], motions[1])
	rotated[0], rotated[1] = solver.RotD(p.A, p.B, solver.SD(nil, p.A), solver.SD(nil, p.B))
	return rotated, nil
}

// solved is a stored component, conditioned, with its stored SD.
func (c *computer) solved(stored db.StoredMotion) (motion condition.Conditioned, sd []float64, err error) {
	delivered, err := stored.DecodeMotion()
	if err == nil {
		sd, err = stored.DecodeSD()
	}
	if err == nil {
		motion, err = c.recipe.Apply(condition.Component(delivered))
	}
	return motion, sd, err
}

// areFinite reports whether all are numbers. Where the maxima over all directions
// are, the medians are too.
func areFinite(values []float64) bool {
	return !slices.ContainsFunc(values, func(x float64) bool { return math.IsNaN(x) || math.IsInf(x, 0) })
}

// storeBatch stores the rotations in one transaction and reports them once it is
// committed. A pair that another process has changed or rotated meanwhile is left
// to a later run.
func (r *rotator) storeBatch(ctx context.Context, batch []rotation) error {
	settled := make([]rotation, 0, len(batch))
	err := r.store.Update(ctx, func(tx *db.Tx) error {
		for _, rot := range batch {
			current, err := tx.IsUnrotated(ctx, r.run.generation.ID, rot.pair)
			if err != nil {
				return err
			}
			if !current {
				continue
			}
			if err := r.put(ctx, tx, rot); err != nil {
				return err
			}
			settled = append(settled, rot)
		}
		return nil
	})
	if err != nil {
		return err
	}
	r.summary.Unrotated -= len(settled)
	r.count += len(batch) - len(settled)
	for _, rot := range settled {
		r.count++
		report := Rotated{Done: r.count, Total: r.total, Record: rot.pair.Code, Assumed: rot.assumed, Reason: rot.reason, Detail: rot.detail, Damaged: rot.damaged}
		r.summary.addRotated(report)
		r.opts.Rotated(report)
	}
	return nil
}

func (r *rotator) put(ctx context.Context, tx *db.Tx, rot rotation) error {
	if rot.reason != "" {
		return nil
	}
	return tx.AddRotated(ctx, rot.pair.RecordID, r.run.generation.ID, rot.median, rot.maximum)
}
