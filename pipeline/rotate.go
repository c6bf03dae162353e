package pipeline

import (
	"context"
	"errors"
	"fmt"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// Rotated is one record with two horizontals done.
type Rotated struct {
	Done, Total int
	Record      string // its code
	// Reason says why the pair could not be rotated, "reason: particulars"; it is
	// "" where it was.
	Reason string
	// Assumed says that a right angle was assumed between the components, since an
	// azimuth is unknown.
	Assumed bool
}

// rotate completes the generation: it computes what is taken over all directions
// for every record that has two horizontals and lacks that, from the stored
// samples and spectra. So it does not matter whether both came in this run, in two
// runs, or before a run that was stopped. A pair that cannot be rotated is
// reported and left alone.
func (w *writer) rotate(ctx context.Context) error {
	var pairs []db.Pair
	err := w.store.View(ctx, func(v *db.Snapshot) (err error) {
		pairs, err = v.Unrotated(ctx)
		return err
	})
	if err != nil {
		return err
	}
	r := &rotator{writer: w, total: len(pairs)}
	return stage[db.Pair, rotation]{
		workers: w.opts.Workers, clock: w.opts.Clock, process: r.process,
		weigh: func(rotation) int { return 1 }, store: r.storeBatch,
	}.run(ctx, pairs)
}

// rotation is a pair with what was computed of it over all directions.
type rotation struct {
	pair            db.Pair
	err             error // why it could not be rotated
	median, maximum db.Spectra
}

// rotator turns pairs into rotations and stores these.
type rotator struct {
	*writer
	total int
	count int // of pairs done, the writing goroutine's
}

// process reads and rotates one pair. What is wrong with the pair is part of the
// rotation; an error is the store's or the context's.
func (r *rotator) process(ctx context.Context, p db.Pair) (rotation, error) {
	rot := rotation{pair: p}
	if p.FirstStepS != p.SecondStepS {
		rot.err = fmt.Errorf("different time steps: %g s and %g s", p.FirstStepS, p.SecondStepS)
		return rot, ctx.Err()
	}
	first, second, err := r.store.ReadPair(ctx, r.run.generation, p)
	if err != nil {
		return rot, err
	}
	rot.median, rot.maximum, rot.err = rotatePair(r.run.reader.solvers, p, first, second)
	return rot, ctx.Err()
}

// rotatePair computes the rotated spectra and measures of a pair of equal steps.
func rotatePair(solvers *solvers, p db.Pair, first, second db.StoredMotion) (median, maximum db.Spectra, err error) {
	a, sdA, err := first.Decode()
	if err != nil {
		return median, maximum, fmt.Errorf("damaged in the store: %s: %w", db.RoleH1, err)
	}
	b, sdB, err := second.Decode()
	if err != nil {
		return median, maximum, fmt.Errorf("damaged in the store: %s: %w", db.RoleH2, err)
	}
	solver, err := solvers.get(p.FirstStepS)
	if err != nil {
		return median, maximum, fmt.Errorf("no solver for the time step: %w", err)
	}
	a, b, changedA, changedB, err := spectrum.Pair(a, b, betweenDeg(p))
	if err != nil {
		return median, maximum, err
	}
	if changedA {
		sdA = solver.SD(nil, a)
	}
	if changedB {
		sdB = solver.SD(nil, b)
	}
	sd50, sd100 := solver.RotD(a, b, sdA, sdB)
	peaks50, peaks100 := spectrum.RotDPeaks(p.FirstStepS, a, b)
	if !finite(sd100, peaks100) {
		return median, maximum, errors.New("the motion is beyond the range of numbers")
	}
	return solvers.spectra(sd50, peaks50), solvers.spectra(sd100, peaks100), nil
}

// finite reports whether the maxima of all directions are numbers, and with them
// all else that was computed.
func finite(sd []float64, peaks spectrum.GroundPeaks) bool {
	sum := peaks.PGA - peaks.PGA + (peaks.PGV - peaks.PGV) + (peaks.PGD - peaks.PGD)
	for _, d := range sd {
		sum += d - d
	}
	return sum == 0
}

// betweenDeg is the angle from the first component to the second, in degrees, a
// right angle where it is unknown.
func betweenDeg(p db.Pair) float64 {
	if !p.BetweenKnown {
		return 90
	}
	return p.BetweenDeg
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
	r.count += len(batch) - len(settled)
	for _, rot := range settled {
		r.count++
		report := Rotated{Done: r.count, Total: r.total, Record: rot.pair.Code, Assumed: !rot.pair.BetweenKnown}
		if rot.err != nil {
			report.Reason = rot.err.Error()
		}
		r.summary.addRotated(report)
		r.opts.Rotated(report)
	}
	return nil
}

func (r *rotator) put(ctx context.Context, tx *db.Tx, rot rotation) error {
	if rot.err != nil {
		return nil
	}
	if err := tx.PutRotated(ctx, rot.pair.RecordID, r.run.generation.ID, db.RoleRotD50, rot.median); err != nil {
		return err
	}
	return tx.PutRotated(ctx, rot.pair.RecordID, r.run.generation.ID, db.RoleRotD100, rot.maximum)
}
