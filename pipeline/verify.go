package pipeline

import (
	"cmp"
	"context"
	"fmt"
	"iter"
	"math"
	"math/rand/v2"
	"runtime"
	"slices"
	"time"

	"swaybook/db"
	"swaybook/pipeline/condition"
	"swaybook/pipeline/signal"
	"swaybook/pipeline/spectrum"
)

// VerifyOptions say how a store shall be verified.
type VerifyOptions struct {
	// Sample is how many results are computed anew, of each generation: components, and
	// pairs over all directions. A negative number asks for all.
	Sample  int
	Seed    uint64 // of the sample
	Workers int    // results in work at the same time; default GOMAXPROCS
	Clock   func() time.Time
	// Progress is called after each series, and after each result that was computed anew, by
	// one goroutine at a time; may be nil.
	Progress func(Verified)
}

// The stages of a verification that take time: of series, and of results.
const (
	VerifyReading   = "reading"
	VerifyComputing = "computing"
)

// Verified is how far a stage is.
type Verified struct {
	Stage       string
	Done, Total int
}

// Verification is what was found in a store.
type Verification struct {
	Faults     []db.Fault
	Remarks    []string // on what could not be looked at
	Series     int      // compared with their digests
	Results    int      // components and pairs of which something is stored
	Recomputed int      // of these
	OffGrid    int      // rows compared with their checksums
	Ordinates  int      // of the view, compared with what questions read
}

// viewRecords is of how many records the view is compared, in a sample and in all.
const (
	viewRecords    = 10
	viewRecordsAll = 100
)

// Verify looks for faults in one state of the store at path, without changing it: see
// db.Inspection for what stands in the tables. Samples are compared with their digests, and
// spectra, measures and what is kept off the grid with what the samples give when they are
// conditioned and solved anew, bit for bit. An error is none of the store's faults.
func Verify(ctx context.Context, path string, opts VerifyOptions) (v Verification, err error) {
	if opts.Workers <= 0 {
		opts.Workers = runtime.GOMAXPROCS(0)
	}
	if opts.Progress == nil {
		opts.Progress = func(Verified) {}
	}
	found := func(f db.Fault) { v.Faults = append(v.Faults, f) }
	err = db.Inspect(ctx, path, found, func(i *db.Inspection) error {
		w := &verifier{Inspection: i, opts: opts, out: &v}
		return w.all(ctx)
	})
	slices.SortFunc(v.Faults, func(a, b db.Fault) int {
		return cmp.Or(cmp.Compare(a.Table, b.Table), cmp.Compare(a.Record, b.Record), cmp.Compare(a.Role, b.Role), cmp.Compare(a.Text, b.Text))
	})
	v.Faults = slices.Compact(v.Faults)
	return v, err
}

type verifier struct {
	*db.Inspection
	opts VerifyOptions
	out  *Verification
}

func (w *verifier) all(ctx context.Context) error {
	records := viewRecords
	if w.opts.Sample < 0 {
		records = viewRecordsAll
	}
	for _, check := range []func(context.Context) error{
		w.Structure, w.Orphans, w.editions, w.Spectra, w.Seals,
		func(ctx context.Context) error { return w.Intake(ctx, checkIntake) }, w.series,
		func(ctx context.Context) (err error) { w.out.OffGrid, err = w.OffGrid(ctx); return err },
		w.results,
		func(ctx context.Context) (err error) { w.out.Ordinates, err = w.Ordinates(ctx, records); return err },
	} {
		if err := check(ctx); err != nil {
			return err
		}
	}
	return nil
}

func (w *verifier) editions(ctx context.Context) error {
	remark, err := w.Editions(ctx)
	if remark != "" {
		w.out.Remarks = append(w.out.Remarks, remark)
	}
	return err
}

// series compares all samples with their digests.
func (w *verifier) series(ctx context.Context) error {
	all, err := w.Series(ctx)
	if err != nil {
		return err
	}
	check := func(ctx context.Context, s db.InspectedSeries) ([]db.Fault, error) {
		decode, err := w.ReadSeries(ctx, s)
		if err == nil {
			err = survive(decode)
		}
		if err != nil && ctx.Err() == nil {
			return []db.Fault{w.OfSeries(ctx, s, err.Error())}, nil
		}
		return nil, ctx.Err()
	}
	return verifyEach(ctx, w, VerifyReading, slices.Values(all), len(all), &w.out.Series, check)
}

// verifyEach checks items side by side and reports what is found, in the items' order.
func verifyEach[T any](ctx context.Context, w *verifier, name string, items iter.Seq[T], total int, count *int, check func(context.Context, T) ([]db.Fault, error)) error {
	done := 0
	return stage[T, []db.Fault]{
		workers: w.opts.Workers, clock: w.opts.Clock, process: check, weigh: func([]db.Fault) int { return 1 },
		store: func(_ context.Context, batch [][]db.Fault) error {
			for _, faults := range batch {
				for _, f := range faults {
					w.Report(f)
				}
			}
			done, *count = done+len(batch), *count+len(batch)
			w.opts.Progress(Verified{Stage: name, Done: done, Total: total})
			return nil
		},
	}.run(ctx, items)
}

// results computes anew what this program's solver computed, or a sample of it.
func (w *verifier) results(ctx context.Context) error {
	generations, err := w.Generations(ctx)
	if err != nil {
		return err
	}
	for _, g := range generations {
		if err := g.CheckSolver(spectrum.Version); err != nil {
			w.out.Remarks = append(w.out.Remarks, fmt.Sprintf("recipe %s: not computed anew: %v", g.Recipe.Name, err))
			continue
		}
		all, err := w.Computations(ctx, g.ID)
		if err != nil {
			return err
		}
		w.out.Results += len(all)
		c, err := newComputer(g)
		if err != nil {
			w.Report(db.Fault{Table: "recipe", Text: err.Error()})
			continue
		}
		r := &recomputer{verifier: w, computer: &c, generation: g}
		sample := sampled(all, w.opts.Sample, w.opts.Seed)
		if err := verifyEach(ctx, w, VerifyComputing, slices.Values(sample), len(sample), &w.out.Recomputed, r.check); err != nil {
			return err
		}
	}
	return nil
}

// sampled returns n of all, in their order, or all where n is negative or not less.
func sampled[T any](all []T, n int, seed uint64) []T {
	if n < 0 || n >= len(all) {
		return all
	}
	places := rand.New(rand.NewPCG(seed, uint64(len(all)))).Perm(len(all))[:n]
	slices.Sort(places)
	out := make([]T, n)
	for k, place := range places {
		out[k] = all[place]
	}
	return out
}

// recomputer computes results of one generation anew.
type recomputer struct {
	*verifier
	computer   *computer
	generation db.Generation
}

func (r *recomputer) check(ctx context.Context, c db.InspectedComputation) (faults []db.Fault, err error) {
	var found []db.Difference
	err = survive(func() error {
		if c.IsPair() {
			found, err = r.pair(ctx, c)
		} else {
			found, err = r.component(ctx, c)
		}
		return err
	})
	if ctx.Err() != nil {
		return nil, ctx.Err()
	}
	if err != nil {
		found = append(found, db.Difference{Table: "computation", Text: "cannot be computed anew: " + err.Error()})
	}
	for _, d := range found {
		faults = append(faults, r.Of(ctx, c, d.Table, d.Text))
	}
	return faults, nil
}

func (r *recomputer) component(ctx context.Context, c db.InspectedComputation) ([]db.Difference, error) {
	stored, ok, err := r.Motion(ctx, r.generation, c)
	if err != nil || !ok {
		return nil, err // without a component nobody sees it
	}
	delivered, err := stored.DecodeMotion()
	if err != nil {
		return nil, err
	}
	computed, err := r.computer.compute(condition.Component(delivered), signal.Arrival(delivered.Acceleration, delivered.StepS))
	if reason := textOf(err); reason != c.Failure {
		return []db.Difference{{Table: "computation", Text: fmt.Sprintf("the reason why it fails is stored as %q, and is %q", c.Failure, reason)}}, nil
	}
	if err != nil {
		return nil, nil
	}
	has, _, err := r.Stored(ctx, c)
	if err != nil {
		return nil, err
	}
	found := has.Differences(computed)
	kept, _, err := r.OffGridOf(ctx, c)
	if err != nil || len(kept.SD) == 0 {
		return found, err
	}
	motion, err := r.computer.recipe.Apply(condition.Component(delivered))
	if err != nil {
		return found, err
	}
	solver, err := solverOf(kept.Oscillators, motion.StepS)
	if err != nil {
		return found, err
	}
	return append(found, offGridDifferences(kept.SD, solver.SD(nil, motion.Acceleration))...), nil
}

func textOf(err error) string {
	if err == nil {
		return ""
	}
	return err.Error()
}

func (r *recomputer) pair(ctx context.Context, c db.InspectedComputation) ([]db.Difference, error) {
	p, ok, err := r.Pair(ctx, r.generation, c)
	if err != nil || !ok {
		return nil, err
	}
	relation, err := spectrum.Between(horizontalOf(p.First), horizontalOf(p.Second))
	if err != nil {
		return nil, err
	}
	median, maximum, err := r.computer.rotate(relation, p.Motions[0], p.Motions[1])
	if err != nil {
		return nil, err
	}
	has, hasMaximum, err := r.Stored(ctx, c)
	if err != nil {
		return nil, err
	}
	found := has.Differences(median)
	for _, d := range hasMaximum.Differences(maximum) {
		found = append(found, db.Difference{Table: d.Table, Text: db.RoleRotD100 + ": " + d.Text})
	}
	kept, keptMaximum, err := r.OffGridOf(ctx, c)
	if err != nil || len(kept.SD)+len(keptMaximum.SD) == 0 {
		return found, err
	}
	for k, these := range []db.KeptOffGrid{kept, keptMaximum} {
		if len(these.SD) == 0 {
			continue
		}
		rotated, err := r.computer.rotateOffGrid(relation, p.Motions, these.Oscillators)
		if err != nil {
			return found, err
		}
		found = append(found, offGridDifferences(these.SD, rotated[k])...)
	}
	return found, nil
}

// solverOf solves for oscillators off the grid.
func solverOf(oscillators []db.Oscillator, stepS float64) (*spectrum.Solver, error) {
	list := make([]spectrum.Oscillator, len(oscillators))
	for k, o := range oscillators {
		list[k] = spectrum.Oscillator(o)
	}
	return spectrum.NewSolvers(spectrum.NigamJennings, list).Get(stepS)
}

func offGridDifferences(stored, computed []float64) []db.Difference {
	n := 0
	for k := range stored {
		if math.Float64bits(stored[k]) != math.Float64bits(computed[k]) {
			n++
		}
	}
	if n == 0 {
		return nil
	}
	return []db.Difference{{Table: "off_grid", Text: fmt.Sprintf("%d of %d ordinates are not those computed from the samples", n, len(stored))}}
}
