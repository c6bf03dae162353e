package pipeline

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"slices"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// Combined is a store into which shards are combined; *db.Store is one.
type Combined interface {
	Store
	Gather(ctx context.Context, part *db.Part, generationID int64, tell func(done, total int)) (db.Gathered, error)
	IntakeAfter(ctx context.Context, key db.IntakeKey, files int) ([]db.Intake, error)
	CountIntake(ctx context.Context, key db.IntakeKey) (upTo, all int, err error)
	GatheredShards(ctx context.Context) ([]db.GatheredShard, error)
}

// Combination is what became of shards that were combined.
type Combination struct {
	Reprocessed
	db.Gathered
	// Missing are the numbers of the shards of which the store has nothing.
	Missing []int
}

// Combine makes the store that of all files of the shards, as one run would have made it that
// had read them: what reading made of each file is taken over with the samples, and everything
// is decided again in the order of the paths, by what all shards hold; what was computed is
// found, and the rest is computed. So neither the order of the parts matters, nor whether they
// come at once, nor what each held. Shards that came before and are not among the parts stay
// as they were. A run that was stopped is gone on with; nothing is published before the end.
func Combine(ctx context.Context, store Combined, parts []*db.Part, opts Options, study Study) (Combination, error) {
	opts = withDefaults(opts)
	c := newCombining(parts, study)
	c.store = store
	if err := c.fit(ctx, opts); err != nil {
		return Combination{}, err
	}
	run, err := c.begin(ctx, opts)
	if err != nil {
		return Combination{}, err
	}
	c.writer = newWriter(store, run, opts, newSource(nil, opts))
	c.isWhole = true
	c.settled, c.reached = c.whole, c.noteReached
	for _, step := range []func(context.Context) error{c.gather, c.replay, c.complete, c.rotate, c.show} {
		if err == nil {
			err = step(ctx)
		}
	}
	out := Combination{Gathered: c.gathered}
	c.done.Run = run.id
	c.done.Summary, err = c.finish(ctx, err)
	out.Reprocessed = c.done
	present, errPresent := store.GatheredShards(context.WithoutCancel(ctx))
	for n := 1; n <= c.count(); n++ {
		if !slices.ContainsFunc(present, func(g db.GatheredShard) bool { return g.Number == n }) {
			out.Missing = append(out.Missing, n)
		}
	}
	return out, errors.Join(err, errPresent)
}

func sorted(parts []*db.Part) []*db.Part {
	return slices.SortedFunc(slices.Values(parts), func(a, b *db.Part) int { return cmp.Compare(a.Number, b.Number) })
}

// combining is a run that combines shards.
type combining struct {
	reprocessing
	store    Combined
	parts    []*db.Part
	gathered db.Gathered
}

func newCombining(parts []*db.Part, study Study) *combining {
	c := &combining{parts: sorted(parts)}
	c.study = study
	return c
}

func (c *combining) count() int { return c.parts[0].Count }

// fit looks whether the parts can be combined, into whatever store.
func (c *combining) fit(ctx context.Context, opts Options) error {
	if err := errors.Join(c.check(), c.checkStudy(opts)); err != nil {
		return err
	}
	return c.compare(ctx)
}

// check looks whether the parts go together.
func (c *combining) check() error {
	if len(c.parts) == 0 {
		return errors.New("no shard to combine")
	}
	first := c.parts[0]
	var wrong []error
	for i, p := range c.parts {
		if i > 0 && p.Shard == c.parts[i-1].Shard {
			wrong = append(wrong, fmt.Errorf("%s and %s are both %s", c.parts[i-1].Path(), p.Path(), p.Shard))
		}
		if p.Count != first.Count {
			wrong = append(wrong, fmt.Errorf("%s is %s, %s %s: shards of one split only can be combined", first.Path(), first.Shard, p.Path(), p.Shard))
		}
		if err := p.Generation.CheckSolver(spectrum.Version); err != nil {
			wrong = append(wrong, fmt.Errorf("%s: %w", p.Path(), err))
		}
		if what := otherwise(first.Generation, p.Generation); what != "" {
			wrong = append(wrong, fmt.Errorf("%s and %s were computed otherwise: %s", first.Path(), p.Path(), what))
		}
	}
	return errors.Join(wrong...)
}

// compare looks whether the parts saw the same files.
func (c *combining) compare(ctx context.Context) (err error) {
	if slices.ContainsFunc(c.parts, func(p *db.Part) bool { return !p.SawAlike(c.parts[0]) }) {
		c.done.Unseen, err = db.CompareSightings(ctx, c.parts)
	}
	return err
}

// checkStudy looks whether the parts are what the study, if there is one, says today.
func (c *combining) checkStudy(opts Options) error {
	if c.study.Name == "" || len(c.parts) == 0 {
		return nil
	}
	var wrong []error
	for _, p := range c.parts {
		want := p.Generation
		want.Grid = filled(opts.Grid, want.Grid)
		if opts.Recipe != nil {
			want.Recipe = storedRecipe(opts.Recipe)
		}
		if what := otherwise(want, p.Generation); what != "" {
			wrong = append(wrong, fmt.Errorf("the study and %s say otherwise how to compute: %s; run %s again", p.Path(), what, p.Shard))
		} else if p.Followed.Decided != c.study.Decided {
			wrong = append(wrong, fmt.Errorf("%s was read with another catalogue, or other layouts, patterns or sources, than the study names: run %s again", p.Path(), p.Shard))
		}
	}
	return errors.Join(wrong...)
}

// otherwise says in what two generations differ, "" for nothing.
func otherwise(a, b db.Generation) string {
	switch {
	case a.Recipe.Hash() != b.Recipe.Hash():
		return fmt.Sprintf("recipe %s (%.12s) and recipe %s (%.12s)", a.Recipe.Name, a.Recipe.Hash(), b.Recipe.Name, b.Recipe.Hash())
	case !a.Grid.Equal(b.Grid):
		return fmt.Sprintf("%s, and %s", describe(a.Grid), describe(b.Grid))
	case a.Solver != b.Solver:
		return fmt.Sprintf("solver %s and solver %s", a.Solver, b.Solver)
	}
	return ""
}

// begin opens the run's entry in a store that is for shards, and settles the generation.
func (c *combining) begin(ctx context.Context, opts Options) (s state, err error) {
	err = c.store.Update(ctx, func(tx *db.Tx) error {
		if err := c.claim(ctx, tx); err != nil {
			return err
		}
		of := c.parts[0].Generation
		current, ok, err := tx.Current(ctx)
		if err != nil {
			return err
		}
		if what := otherwise(current, of); ok && what != "" && len(c.parts) < c.count() {
			return fmt.Errorf("the store and %s were computed otherwise: %s; give all %d shards", c.parts[0].Path(), what, c.count())
		}
		if s.generation, err = tx.PutGeneration(ctx, of.Recipe, of.Grid, of.Solver); err != nil {
			return err
		}
		if s.id, err = tx.StartRun(ctx, "combine", opts.Program, opts.Started); err != nil {
			return err
		}
		return c.noteEditions(ctx, tx)
	})
	if err != nil {
		return s, err
	}
	computer, err := newComputer(s.generation)
	if err != nil {
		return s, err
	}
	s.reader = newReader(c.store, opts, computer)
	return s, nil
}

// claim makes the store one that shards of this split are combined into, of this study or of
// none, and notes that the parts are being taken over. A shard of which a run before took over
// some must be among them: what the store has of it is neither old nor new.
func (c *combining) claim(ctx context.Context, tx *db.Tx) error {
	if c.study.Name == "" {
		if err := refuseFollowed(ctx, tx, "its shards are combined by reprocess --combine N; name another to combine into"); err != nil {
			return err
		}
	}
	held, _, err := tx.Shard(ctx)
	if err != nil {
		return err
	}
	if of := (db.Shard{Count: c.count()}); held != of {
		err := c.checkStore(ctx, tx, held)
		if err == nil {
			err = tx.SetShard(ctx, of)
		}
		if err != nil {
			return err
		}
	}
	gathered, err := tx.Gathered(ctx)
	if err != nil {
		return err
	}
	for _, g := range gathered {
		isGiven := slices.ContainsFunc(c.parts, func(p *db.Part) bool { return p.Number == g.Number })
		switch {
		case isGiven:
		case !g.IsWhole:
			return fmt.Errorf("shard %d of %d was being taken over when a run before was stopped: give it again", g.Number, c.count())
		case c.done.Unseen.Files > 0 || !g.SawAlike(c.parts[0]):
			return fmt.Errorf("shard %d of %d, which was combined before, saw other files than %s, or read them otherwise: give it again, too", g.Number, c.count(), c.parts[0].Path())
		}
	}
	for _, p := range c.parts {
		if err := tx.BeginGathering(ctx, p.Number); err != nil {
			return err
		}
	}
	return nil
}

// checkStore refuses to combine into a store that is another shard, or of what others read:
// only a study's own may come to be combined. What is combined of another split needs all
// parts, as everything of before goes.
func (c *combining) checkStore(ctx context.Context, tx *db.Tx, held db.Shard) error {
	isUsed, err := tx.IsUsed(ctx)
	switch {
	case err != nil:
		return err
	case held.Count > 0 && !held.IsCombined():
		return fmt.Errorf("the store is %s: name another to combine into", held)
	case !isUsed:
		return nil
	case held.Count == 0 && c.study.Name == "":
		return errors.New("the store holds records that were not combined: name a new one")
	case len(c.parts) < c.count():
		return fmt.Errorf("the store is %s: give all %d shards", held, c.count())
	}
	return nil
}

// gather takes over the shards, one after the other.
func (c *combining) gather(ctx context.Context) error {
	for i, p := range c.parts {
		got, err := c.store.Gather(ctx, p, c.run.generation.ID, func(done, total int) {
			c.opts.Gathered(GatherProgress{Part: i + 1, Parts: len(c.parts), Done: done, Total: total})
		})
		c.gathered.Add(got)
		if err != nil {
			return err
		}
	}
	return c.checkTaken(ctx)
}

// GatherProgress is how far a shard is taken over, by files and computations.
type GatherProgress struct{ Part, Parts, Done, Total int }

// replayFiles is how many files are read of the intake at once: no reader stays on the store
// while it is written to, so that its log can be carried over.
const replayFiles = 256

// replay makes the working state of the intake, unless it is that.
func (c *combining) replay(ctx context.Context) error {
	var r db.Rebuild
	err := c.store.Update(ctx, func(tx *db.Tx) (err error) {
		if r, err = tx.Rebuild(ctx); err != nil || r.State == db.RebuildWhole {
			return err
		}
		c.done.IsRead = true
		if r.State == db.RebuildChanged {
			r = db.Rebuild{State: db.RebuildBegun, Reached: db.BeforeIntake}
			if err := errors.Join(tx.ClearWorking(ctx), tx.SetRebuild(ctx, r)); err != nil {
				return err
			}
		}
		if c.opts.Hints.Metadata, err = eventsOf(ctx, tx); err != nil {
			return err
		}
		return shareWithdrawn(ctx, tx, c.opts.Hints.Metadata)
	})
	if err != nil || !c.done.IsRead {
		return err
	}
	upTo, all, err := c.store.CountIntake(ctx, r.Reached)
	if err != nil {
		return err
	}
	c.writer.done = upTo
	c.source.total.Store(int64(all))
	return c.replayFrom(ctx, r.Reached)
}

// replayFrom stores what was read of the files behind key.
func (c *combining) replayFrom(ctx context.Context, key db.IntakeKey) error {
	for {
		found, err := c.store.IntakeAfter(ctx, key, replayFiles)
		if err == nil && len(found) > 0 {
			key = found[len(found)-1].IntakeKey
			err = stage[[]db.Intake, result]{
				workers: c.opts.Workers, clock: c.opts.Clock, process: replayed,
				weigh: weightOf, store: c.storeBatch,
			}.run(ctx, slices.Values(byFile(found)))
		}
		if damaged, ok := errors.AsType[*db.DamagedIntakeError](err); ok {
			return c.forget(ctx, damaged)
		}
		if err != nil || len(found) == 0 {
			return err
		}
	}
}

// byFile are the parts of what was read of each file.
func byFile(found []db.Intake) (out [][]db.Intake) {
	for i, begun := 0, 0; i < len(found); i++ {
		if i+1 == len(found) || found[i+1].IntakeKey != found[i].IntakeKey {
			out = append(out, found[begun:i+1])
			begun = i + 1
		}
	}
	return out
}

// replayed is the result of reading a file, of the parts of it that shards have.
func replayed(ctx context.Context, parts []db.Intake) (result, error) {
	var whole result
	for i, part := range parts {
		res, err := resultOf(part.Said)
		if err != nil {
			return whole, fmt.Errorf("%s: %w", part.Path, err)
		}
		if err := checkSeries(&res, part.Series); err != nil {
			return whole, part.Damaged(err)
		}
		if i > 0 && res.source.SHA256 != whole.source.SHA256 {
			return whole, fmt.Errorf("%s: shards have different contents of it: run them again", part.Path)
		}
		channels, refused := append(whole.channels, res.channels...), append(whole.refused, res.refused...)
		if i == 0 || whole.outcome != Stored {
			whole = res
		}
		whole.channels, whole.refused = channels, refused
	}
	slices.SortStableFunc(whole.channels, func(a, b solved) int { return cmp.Compare(a.index, b.index) })
	whole.key = parts[0].IntakeKey
	return whole, ctx.Err()
}

// noteReached keeps how far the working state is made of the intake.
func (c *combining) noteReached(ctx context.Context, tx *db.Tx, batch []result) error {
	return tx.SetRebuild(ctx, db.Rebuild{State: db.RebuildBegun, Reached: batch[len(batch)-1].key})
}

// whole notes that the working state is that of the intake.
func (c *combining) whole(ctx context.Context, tx *db.Tx) error {
	if c.study.Name != "" {
		if err := tx.Follow(ctx, c.followed(true)); err != nil {
			return err
		}
	}
	return tx.SetRebuild(ctx, db.Rebuild{State: db.RebuildWhole, Reached: db.BeforeIntake})
}
