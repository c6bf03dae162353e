package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"path/filepath"
	"strings"

	"swaybook/db"
	"swaybook/pipeline"
	"swaybook/pipeline/cluster"
)

// shardStore is where a study's shard has its store: beside the study's own.
func shardStore(store string, s db.Shard) string {
	ext := filepath.Ext(store)
	return fmt.Sprintf("%s.shard-%d-of-%d%s", strings.TrimSuffix(store, ext), s.Number, s.Count, ext)
}

// shardState is where the state of the last run of a shard is left: beside its store.
func shardState(store string) string {
	return strings.TrimSuffix(store, filepath.Ext(store)) + ".state.json"
}

// places are where a run has its store, and leaves state and metrics, "" for nowhere. That of a
// shard leaves no metrics: these are of the study, of which it changes no answer.
func (p *studyPlan) places(shard db.Shard) (store, state, metrics string) {
	s := p.study
	if shard.Count == 0 {
		return s.Store.Value, s.State.Value, s.Metrics.Value
	}
	if store = shardStore(s.Store.Value, shard); s.State.Value != "" {
		state = shardState(store)
	}
	return store, state, ""
}

// ownShards are the stores of a study's shards, and their states, which are no records.
func (p *studyPlan) ownShards(count int) {
	for _, path := range p.shardStores(count) {
		p.ingest.pipeline.Own[shardState(path)] = "the state of a shard"
		for name, what := range db.Files(path) {
			p.ingest.pipeline.Own[name] = what
		}
	}
}

// runStudyShard makes a shard's store that of its part of the study's files as they are. The
// study's questions are left to the run that combines the shards.
func runStudyShard(ctx context.Context, plan *studyPlan, o reprocessOptions, w io.Writer) error {
	plan.ownShards(o.shard.Count)
	r := &shardRun{plan: plan, options: o, state: newStudyState(plan, o.shard)}
	err := r.state.account(ctx, plan, func() error {
		return r.state.inStore(ctx, func(store *db.Store) error { return r.fill(ctx, store) })
	})
	if r.report != nil {
		err = errors.Join(err, r.report.print(w, o.json))
	}
	return err
}

// shardRun fills a study's shard.
type shardRun struct {
	plan    *studyPlan
	options reprocessOptions
	state   *studyState
	report  *studyShardReport // nil until it is full
}

// fill fills the open store.
func (r *shardRun) fill(ctx context.Context, store *db.Store) error {
	ingest := r.plan.ingest
	ingest.store = r.state.Store
	ingest.pipeline.Shard, ingest.pipeline.Takes, ingest.pipeline.Decided = r.options.shard, r.plan.study.Takes, r.plan.decided
	done, err := pipeline.Reprocess(ctx, store, ingest.pipeline, r.plan.followed(r.options, approveAll))
	r.state.note(done, ingest, err == nil)
	switch {
	case err != nil && ctx.Err() != nil:
		return interruption(done.Summary, db.Gathered{})
	case err != nil:
		return fmt.Errorf("fill %s: %w", ingest.store, err)
	}
	report := studyShardReport{ingestReport: newIngestReport(ingest, done.Summary, true), IsRead: done.IsRead}
	if report.Refused, err = rejectedFiles(ctx, store); err != nil {
		return err
	}
	r.report, r.state.Rejected = &report, &report.Refused
	switch {
	case done.Damaged > 0:
		return fmt.Errorf("%s is damaged (records: %d)", ingest.store, done.Damaged)
	case report.Refused > 0 || !done.Complete():
		return errRejected
	}
	return nil
}

// followed is what the pipeline is told of the study.
func (p *studyPlan) followed(o reprocessOptions, approve func(context.Context, int64, int64) (bool, error)) pipeline.Study {
	return pipeline.Study{Name: p.study.Name.Value, File: p.study.Path(), Decided: p.decided, Rehash: o.rehash, Approve: approve}
}

// studyShardReport is what is printed of a shard that was filled.
type studyShardReport struct {
	ingestReport
	IsRead  bool `json:"is_read"`
	Refused int  `json:"rejected_in_store"`
}

func (r *studyShardReport) print(w io.Writer, asJSON bool) error {
	p := &printer{w: w}
	switch {
	case asJSON:
		return writeJSON(w, r)
	case r.IsRead:
		return r.ingestReport.print(w, false)
	}
	p.printf("%s: no file has changed since the last run.\n", r.Store)
	p.rejected(r.Store, r.Refused)
	return p.err
}

// make makes the study's store that of its files, or of its shards.
func (r *studyRun) make(ctx context.Context, opts pipeline.Options) (done pipeline.Reprocessed, err error) {
	study := r.plan.followed(r.options, r.approve)
	if len(r.parts) == 0 {
		return pipeline.Reprocess(ctx, r.store, opts, study)
	}
	combined, err := pipeline.Combine(ctx, r.store, r.parts, combineWith(opts, r.plan.ingest.monitor), study)
	if r.gathered = combined.Gathered; err != nil {
		err = notCombined(r.store.Path(), err)
	}
	return combined.Reprocessed, err
}

// shardStores are where the stores of so many shards lie.
func (p *studyPlan) shardStores(count int) (paths []string) {
	for i := range count {
		paths = append(paths, shardStore(p.study.Store.Value, db.Shard{Number: i + 1, Count: count}))
	}
	return paths
}

// missingShards are the numbers of those of so many shards of which there is no store.
func (p *studyPlan) missingShards(count int) (missing []int) {
	for i, path := range p.shardStores(count) {
		if db.MustExist(path) != nil {
			missing = append(missing, i+1)
		}
	}
	return missing
}

// openShards opens the shards that are to be combined, all of which must be there, and go
// together.
func (p *studyPlan) openShards(ctx context.Context, o reprocessOptions) ([]*db.Part, error) {
	count, store := o.combine, p.study.Store.Value
	if missing := p.missingShards(count); len(missing) > 0 {
		return nil, fmt.Errorf("shards that are missing of %d beside %s: %s; fill them: swaybook reprocess %s --shard I/%d",
			count, store, numbers(missing), cluster.Quote(p.study.File), count)
	}
	parts, err := openParts(ctx, p.shardStores(count))
	if err != nil {
		return nil, err
	}
	if err := pipeline.CheckParts(ctx, parts, p.ingest.pipeline, p.followed(o, approveAll)); err != nil {
		return nil, errors.Join(notCombined(store, err), closeParts(parts))
	}
	return parts, nil
}
