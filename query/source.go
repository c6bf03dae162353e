package query

import (
	"context"
	"fmt"
	"maps"
	"runtime"
	"slices"
	"sync"

	"golang.org/x/sync/errgroup"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// view runs f on a snapshot that this program's solver computed: of the published edition,
// or of that of a run where one is given; or on one that any solver computed where that is
// wanted.
func view(ctx context.Context, store *db.Store, of *Selection, f func(*db.Snapshot) error) error {
	return viewAny(ctx, store, of.AsOf, func(snapshot *db.Snapshot) error {
		if of.AnySolver {
			return f(snapshot)
		}
		err := snapshot.Generation.CheckSolver(spectrum.Version)
		if err != nil && of.AsOf != 0 { // there is nothing to be done about it
			err = fmt.Errorf("%w: what run %d left comes from solver %q, this program has %q", db.ErrOtherGeneration, of.AsOf, snapshot.Generation.Solver, spectrum.Version)
		}
		if err != nil {
			return err
		}
		return f(snapshot)
	})
}

// viewAny is view of what any solver computed.
func viewAny(ctx context.Context, store *db.Store, asOf int64, f func(*db.Snapshot) error) error {
	if asOf == 0 {
		return store.View(ctx, f)
	}
	return store.ViewAsOf(ctx, asOf, f)
}

// source is where ordinates come from: one snapshot of a store.
type source struct {
	snapshot *db.Snapshot
	method   Method
}

// whereabouts say which oscillators the store has spectra of, and where.
type whereabouts struct {
	columns  []int   // of each oscillator in the grid's periods, -1 for one off it
	byColumn [][]int // positions of those that are stored, by that of their damping in the grid
	missing  []int   // positions of the others
}

// find looks for oscillators on the grid, of which nothing is stored by another method
// than the store's.
func (s *source) find(oscillators []spectrum.Oscillator) whereabouts {
	grid := &s.snapshot.Generation.Grid
	w := whereabouts{columns: columnsOf(grid.PeriodsS, oscillators), byColumn: make([][]int, len(grid.Dampings))}
	for i, o := range oscillators {
		damping := slices.Index(grid.Dampings, o.Damping)
		if damping < 0 || w.columns[i] < 0 || s.method != defaultMethod {
			w.missing = append(w.missing, i)
		} else {
			w.byColumn[damping] = append(w.byColumn[damping], i)
		}
	}
	return w
}

// details are what load needs of components: what computing needs, where there is
// something to compute.
func (s *source) details(oscillators []spectrum.Oscillator) db.Details {
	if w := s.find(oscillators); len(w.missing) > 0 {
		return db.DetailMotion
	}
	return 0
}

// load returns the SD of the motions of the oscillators: read from the store where
// damping and period are on its grid, computed from the stored samples
// otherwise, and where the store lacks the spectrum of a rotated pair. What it
// cannot give is left out of the selection, and so is what lies outside the usable band
// at every period, or at that of position must where this is not negative, and what counts
// in a better version there; single ordinates outside, or of which a better version has
// one, are NaN. The error is an EmptyError where nothing is left.
func (s *source) load(ctx context.Context, p *picked, oscillators []spectrum.Oscillator, must int) (*ordinates, error) {
	o, unfit, err := s.loadMotions(ctx, p.motions, oscillators)
	if err != nil {
		return nil, err
	}
	partly, coarse := 0, 0
	if !p.ignoresBand {
		var without map[int]string
		without, partly, coarse = o.keepUsable(p.motions, must)
		for i, reason := range without {
			if _, isOut := unfit[i]; !isOut {
				unfit[i] = reason
			}
		}
	}
	repeated, standIns := o.keepBest(p.versions.rivals(p.motions), must, unfit)
	maps.Copy(unfit, repeated)
	o = o.without(unfit)
	err = p.leaveOut(unfit)
	p.noteBand(partly, coarse)
	p.noteStandIns(standIns)
	return o, err
}

// loadMotions returns beside the SD of the motions the positions of those whose SD
// cannot be had, and why; theirs has no meaning.
func (s *source) loadMotions(ctx context.Context, motions []motion, oscillators []spectrum.Oscillator) (*ordinates, map[int]string, error) {
	o := newOrdinates(oscillators, len(motions))
	out := &unfit{reasons: map[int]string{}}
	w := s.find(oscillators)
	for damping, stored := range w.byColumn {
		if len(stored) == 0 {
			continue
		}
		r := newReader(o, motions, out, stored, w.columns)
		lacking, err := r.readAll(ctx, s.snapshot, damping)
		if err != nil {
			return nil, nil, err
		}
		if err := s.compute(ctx, o, motions, out, lacking, newTask(o, stored)); err != nil {
			return nil, nil, err
		}
	}
	return o, out.reasons, s.offGrid(ctx, o, motions, out, w.missing)
}

// unfit notes motions, by position, that cannot be answered for, and why. It is
// safe for concurrent use.
type unfit struct {
	mutex   sync.Mutex
	reasons map[int]string
}

// reasonDamaged leaves out what is not in the store as it was stored.
var reasonDamaged = db.ErrDamaged.Error()

func (u *unfit) add(motion int, reason string) {
	u.mutex.Lock()
	defer u.mutex.Unlock()
	u.reasons[motion] = reason
}

func (u *unfit) has(motion int) bool {
	u.mutex.Lock()
	defer u.mutex.Unlock()
	_, ok := u.reasons[motion]
	return ok
}

// upTo returns 0 … n-1.
func upTo(n int) []int {
	out := make([]int, n)
	for i := range out {
		out[i] = i
	}
	return out
}

// columnsOf returns the position in grid of each oscillator's period, -1 for one off it.
func columnsOf(grid []float64, oscillators []spectrum.Oscillator) []int {
	at := make(map[float64]int, len(grid))
	for i, p := range grid {
		at[p] = i
	}
	out := make([]int, len(oscillators))
	for i, o := range oscillators {
		column, ok := at[o.PeriodS]
		if !ok {
			column = -1
		}
		out[i] = column
	}
	return out
}

// maxWorkers is the number of processors that may be used.
func maxWorkers() int { return runtime.GOMAXPROCS(0) }

// inParallel calls f for 0 … n-1 from as many goroutines as there are
// processors and returns the first error, after all have ended.
func inParallel(ctx context.Context, n int, f func(ctx context.Context, i int) error) error {
	group, inner := errgroup.WithContext(ctx)
	group.SetLimit(maxWorkers())
	for i := range n {
		if inner.Err() != nil {
			break
		}
		group.Go(func() error { return f(inner, i) })
	}
	if err := group.Wait(); err != nil {
		return err
	}
	return ctx.Err()
}
