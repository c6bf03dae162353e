package main

import (
	"context"
	"errors"
	"fmt"
	"io"

	"swaybook/db"
	"swaybook/pipeline"
	"swaybook/query"
)

// reprocessOptions are what the command line says beside the study.
type reprocessOptions struct {
	rehash, json bool
	maxDrift     *float64 // instead of the study's
	shard        db.Shard // the part to fill, the zero value for the store itself
	combine      int      // how many shards to combine instead of reading files, 0 for none
}

// studyRun carries out a plan.
type studyRun struct {
	plan    *studyPlan
	options reprocessOptions
	store   *db.Store
	parts   []*db.Part // the shards to combine, none where files are read
	// gathered is what came from shards, and isNew says that the run made an edition.
	gathered db.Gathered
	isNew    bool
	outputs  *outputs
	state    studyState
}

// errHeld ends a run whose results are held back.
var errHeld = errors.New("results are held back")

// runReprocess carries out a plan, unless another run holds the store, and says what became
// of it: in print, and in the files that the study wants it in.
func runReprocess(ctx context.Context, plan *studyPlan, o reprocessOptions, w io.Writer) error {
	r := &studyRun{plan: plan, options: o, state: *newStudyState(plan, db.Shard{})}
	err := r.state.account(ctx, plan, func() error { return r.run(ctx) })
	if r.state.Ended == "" {
		return err
	}
	if errPrint := r.write(w); errPrint != nil && err == nil {
		err = errPrint
	}
	return err
}

func (r *studyRun) write(w io.Writer) error {
	if r.options.json {
		return writeJSON(w, &r.state)
	}
	p := &printer{w: w}
	r.print(p)
	return p.err
}

// run makes the store that of the study's files, and writes what it asks for.
func (r *studyRun) run(ctx context.Context) (err error) {
	if r.options.combine > 0 {
		if r.parts, err = r.plan.openShards(ctx, r.options); err != nil { // before there is a store
			return err
		}
		defer func() { err = errors.Join(err, closeParts(r.parts)) }()
	}
	return r.state.inStore(ctx, func(store *db.Store) error { return r.runIn(ctx, store) })
}

// runIn is run on the open store.
func (r *studyRun) runIn(ctx context.Context, store *db.Store) (err error) {
	r.store = store
	opts := r.plan.ingest.pipeline
	opts.Takes = r.plan.study.Takes
	var before map[string]db.Written
	if r.outputs, before, err = newOutputs(ctx, r.store); err != nil {
		return err
	}
	done, err := r.make(ctx, opts)
	r.isNew = done.IsNew
	r.state.note(done, r.plan.ingest, err == nil)
	if err == nil {
		if err := r.outputs.set.Close(); err != nil { // nothing is to be undone any more
			return err
		}
		return r.follow(ctx, done, before)
	}
	if ctx.Err() != nil {
		err = interruption(done.Summary, r.gathered)
	}
	if done.Published == done.Before {
		err = errors.Join(err, r.outputs.set.Undo())
	}
	return errors.Join(err, r.outputs.set.Close())
}

// follow does what comes after the state of the store is settled.
func (r *studyRun) follow(ctx context.Context, done pipeline.Reprocessed, before map[string]db.Written) error {
	if done.Damaged > 0 {
		return fmt.Errorf("%s is damaged (records: %d)", r.plan.study.Store.Value, done.Damaged)
	}
	held := int64(0)
	if done.IsHeld {
		held = done.Edition
	}
	written := r.plan.written(r.outputs, r.state.Drift, held)
	if err := r.outputs.refresh(ctx, written, done.Published); err != nil {
		return err
	}
	if err := r.outputs.keep(ctx, written, before); err != nil {
		return err
	}
	r.state.Outputs = r.outputs.reports
	if keep := r.plan.study.Keep; keep > 0 {
		pruned, err := prune(ctx, r.store, pruneOptions{keep: keep})
		if err != nil {
			return err
		}
		r.state.Pruned = pruned
	}
	rejected, err := rejectedFiles(ctx, r.store)
	if err != nil {
		return err
	}
	r.state.Rejected = &rejected
	if done.IsHeld {
		return fmt.Errorf("%w: figures beyond %s: %d; edition %d stays published", errHeld, percentWords(*r.bound()), r.state.Drift.Beyond, done.Published)
	}
	if rejected > 0 {
		return errRejected
	}
	return nil
}

// rejectedFiles counts what is rejected of the files that questions know of, whether this
// run read them or one before.
func rejectedFiles(ctx context.Context, store *db.Store) (int, error) {
	rejected, err := query.Rejections(ctx, store, 0)
	if err != nil {
		return 0, err
	}
	paths := map[string]bool{}
	for _, one := range rejected.Rows {
		paths[one.Source] = true
	}
	return len(paths), nil
}

// bound is how far results may differ from those published, nil for any distance.
func (r *studyRun) bound() *float64 {
	if r.options.maxDrift != nil {
		return r.options.maxDrift
	}
	return r.plan.study.MaxDrift
}

// approve asks all questions as of the edition, compares the answers with those as of what is
// published, and, where they may be published, has them written. So what cannot be asked or
// written is never published.
func (r *studyRun) approve(ctx context.Context, edition, published int64) (bool, error) {
	asked := r.plan.asked()
	for i := range asked {
		r.plan.ingest.monitor.asked(i, len(asked))
		var err error
		if r.outputs.answers[asked[i].path], err = r.outputs.ask(ctx, &asked[i], moment{run: edition}); err != nil {
			return false, err
		}
	}
	if published != 0 {
		if err := r.compare(ctx, edition, published); err != nil {
			return false, err
		}
		if r.state.Drift.Beyond > 0 {
			clear(r.outputs.answers) // they are not those of what stays published
			return false, nil
		}
	}
	written := r.plan.written(r.outputs, r.state.Drift, 0)
	for i := range written {
		p := &written[i]
		answer, ok := r.outputs.answers[p.path]
		if !ok { // the report, which is made of the others
			var err error
			if answer, err = r.outputs.ask(ctx, p, moment{run: edition}); err != nil {
				return false, err
			}
			r.outputs.answers[p.path] = answer
		}
		if err := r.outputs.prepare(p, answer); err != nil {
			return false, err
		}
	}
	if err := ctx.Err(); err != nil {
		return false, err
	}
	return true, r.outputs.swap(written, edition)
}
