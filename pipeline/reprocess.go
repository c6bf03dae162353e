package pipeline

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"os"
	"slices"
	"strings"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/ingest/archive"
)

// Study is what a run of a study needs beside the options.
type Study struct {
	Name, File string
	// Decided is a digest of what decides, beside the files, how these are read: the
	// catalogue, layouts, patterns and the like.
	Decided string
	// Rehash reads all files again, even if none looks changed.
	Rehash bool
	// Approve says whether an edition may be published in place of another, 0 for none.
	Approve func(ctx context.Context, edition, published int64) (bool, error)
}

// Reprocessed is what became of a study.
type Reprocessed struct {
	Summary
	Run    int64
	IsRead bool // files were read: something had changed
	IsNew  bool // the run made an edition
	// Edition is the newest one, Before what was published when the run began, and
	// Published what is since; 0 where there is none.
	Edition, Before, Published int64
	IsHeld                     bool // the newest edition was not approved
	// Unseen are the files that some of the shards that were combined saw, and others did not:
	// what they hold may lack.
	Unseen db.Unseen
}

// Reprocess makes the store that of the study's files as they are now. Where a file is new,
// changed, moved or gone, or what decides how they are read is another, all are read as
// into a new store, so that it does not matter what runs there were before; nothing that
// was computed of the same samples in the same way is computed again. The working state is
// nobody's but the run's: questions see what was published, until the run publishes.
// Errors and the end of the context are as for Run; a run that does not come to its end
// publishes nothing, and the next one begins anew with what was computed.
func Reprocess(ctx context.Context, store Store, opts Options, study Study) (Reprocessed, error) {
	opts = withDefaults(opts)
	files, err := ingest.Discover(opts.Paths)
	if err != nil {
		return Reprocessed{}, err
	}
	if err := checkListed(files, opts); err != nil {
		return Reprocessed{}, err
	}
	p := &reprocessing{study: study, seen: scan(files, opts)}
	p.settled = p.followFiles
	run, err := p.begin(ctx, store, opts)
	if err != nil {
		return Reprocessed{}, err
	}
	run.reader.isLater = true
	p.writer = newWriter(store, run, opts, newSource(files, opts))
	p.isWhole = true
	if err = p.read(ctx); err == nil {
		err = p.complete(ctx)
	}
	if err == nil {
		err = p.rotate(ctx)
	}
	if err == nil {
		err = p.show(ctx)
	}
	p.done.Run = run.id
	p.done.Summary, err = p.finish(ctx, err)
	return p.done, err
}

// reprocessing is a run of a study.
type reprocessing struct {
	*writer
	study Study
	seen  []db.Seen
	done  Reprocessed
	// settled notes, with the edition, of what the working state is.
	settled func(context.Context, *db.Tx) error
}

// racyNS is how shortly before a run a file may have changed that can change again without
// a new time: two seconds, the coarsest clock of file systems.
const racyNS = 2e9

// checkListed refuses to go on where a folder could not be listed, unless the study leaves it
// out: what it holds would be taken for gone.
func checkListed(files []ingest.Found, opts Options) error {
	var errs []error
	for _, f := range files {
		if f.IsFolder && (f.Rel == "" || opts.Takes(f.Rel, true)) {
			errs = append(errs, fmt.Errorf("%s: %w; exclude it if it is none of the study's", f.Path, f.Err))
		}
	}
	return errors.Join(errs...)
}

// scan looks at the files before any is read: what changes while it is read is seen as
// changed by the next run.
func scan(files []ingest.Found, opts Options) (out []db.Seen) {
	for _, f := range files {
		s := db.Seen{Path: f.Path, Size: -1, ModifiedNS: -1}
		if info, err := os.Stat(f.Path); err == nil {
			s.Size, s.ModifiedNS = info.Size(), info.ModTime().UnixNano()
			if s.ModifiedNS > opts.Started.UnixNano()-racyNS {
				s.ModifiedNS = -1
			}
		}
		if opts.Takes(f.Rel, false) || opts.Takes(f.Rel, true) {
			out = append(out, s)
		}
	}
	slices.SortFunc(out, func(a, b db.Seen) int { return cmp.Compare(a.Path, b.Path) })
	return out
}

// begin opens the run's entry, settles the generation, and turns the working state over
// where the files have to be read.
func (p *reprocessing) begin(ctx context.Context, store Store, opts Options) (s state, err error) {
	err = store.Update(ctx, func(tx *db.Tx) (err error) {
		isOther, err := claimForStudy(ctx, tx, opts.Shard)
		if err != nil {
			return err
		}
		if s.generation, err = regenerate(ctx, tx, opts.Grid, opts.Recipe); err != nil {
			return err
		}
		if s.id, err = tx.StartRun(ctx, "reprocess", opts.Program, opts.Started); err != nil {
			return err
		}
		if err := p.noteEditions(ctx, tx); err != nil {
			return err
		}
		unchanged, err := p.isUnchanged(ctx, tx)
		if err != nil || unchanged && !isOther {
			return err
		}
		p.done.IsRead = true
		if opts.Shard.Count > 0 {
			err = tx.ClearIntake(ctx)
		}
		return errors.Join(err, tx.ClearWorking(ctx), tx.Follow(ctx, p.followed(false)))
	})
	if err != nil {
		return s, err
	}
	computer, err := newComputer(s.generation)
	if err != nil {
		return s, err
	}
	s.reader = newReader(store, opts, computer)
	return s, nil
}

// noteEditions notes what there is as the run begins.
func (p *reprocessing) noteEditions(ctx context.Context, tx *db.Tx) error {
	newest, _, errNewest := tx.NewestEdition(ctx)
	published, _, errPublished := tx.PublishedEdition(ctx)
	p.done.Edition, p.done.Before, p.done.Published = newest.ID, published.ID, published.ID
	return errors.Join(errNewest, errPublished)
}

func (p *reprocessing) followed(whole bool) db.Followed {
	return db.Followed{Name: p.study.Name, File: p.study.File, Decided: p.study.Decided, Whole: whole}
}

// isUnchanged reports whether the working state is that of the files as they are.
func (p *reprocessing) isUnchanged(ctx context.Context, tx *db.Tx) (bool, error) {
	f, ok, err := tx.Followed(ctx)
	if err != nil || !ok || !f.Whole || f.Decided != p.study.Decided || p.study.Rehash {
		return false, err
	}
	seen, err := tx.Seen(ctx)
	if err != nil {
		return false, err
	}
	sure := !slices.ContainsFunc(p.seen, func(s db.Seen) bool { return s.ModifiedNS < 0 })
	return sure && slices.Equal(seen, p.seen), nil
}

// read brings the files to the store where they have to be.
func (p *reprocessing) read(ctx context.Context) error {
	if !p.done.IsRead {
		return nil
	}
	p.source.readMetadata(ctx, p.opts.Hints.Metadata)
	if err := p.store.Update(ctx, func(tx *db.Tx) error { return keepEvents(ctx, tx, p.opts) }); err != nil {
		return err
	}
	return p.files(ctx)
}

// show makes the edition, and publishes it where that is approved; also one that an earlier
// run held back. One in whose place somebody has published an earlier one stays where it is.
func (p *reprocessing) show(ctx context.Context) error {
	newest, err := p.put(ctx)
	if err != nil || newest.State != db.EditionHeld {
		return err
	}
	approved, err := p.study.Approve(ctx, newest.ID, p.done.Before)
	if err != nil || !approved {
		p.done.IsHeld = err == nil
		return err
	}
	err = p.store.Update(ctx, func(tx *db.Tx) error { return tx.Publish(ctx, newest.ID) })
	if err == nil {
		p.done.Published = newest.ID
	}
	return err
}

// put makes the edition where anything has changed, and returns the newest.
func (p *reprocessing) put(ctx context.Context) (newest db.Edition, err error) {
	err = p.store.Update(ctx, func(tx *db.Tx) (err error) {
		if barren, err := tx.IsBarren(ctx, p.run.generation.ID); err != nil {
			return err
		} else if barren {
			return errBarren
		}
		if p.done.IsNew, err = tx.PutEdition(ctx, p.run.id, p.run.generation.ID); err != nil {
			return err
		}
		if p.done.IsRead {
			err = p.settled(ctx, tx)
		}
		var errNewest error
		newest, _, errNewest = tx.NewestEdition(ctx)
		return errors.Join(err, errNewest)
	})
	if err == nil {
		p.done.Edition = newest.ID
	}
	return newest, err
}

// followFiles notes that the working state is that of the files.
func (p *reprocessing) followFiles(ctx context.Context, tx *db.Tx) error {
	p.distrust()
	return errors.Join(tx.Follow(ctx, p.followed(true)), tx.SetSeen(ctx, p.seen))
}

// distrust has the next run look into the files that could not be read: who may read them,
// or whether a disk answers, is in neither their size nor their time.
func (p *reprocessing) distrust() {
	for _, path := range p.unread {
		for i := range p.seen {
			if s := &p.seen[i]; path == s.Path || strings.HasPrefix(path, archive.Join(s.Path, "")) {
				s.ModifiedNS = -1
			}
		}
	}
}

// errBarren says that nothing is left to publish.
var errBarren = errors.New("the recipe can be carried out on none of the components: nothing is published")

// refuseFollowed keeps other runs out of a store that a study keeps, and says what to do instead.
func refuseFollowed(ctx context.Context, tx *db.Tx, instead string) error {
	f, ok, err := tx.Followed(ctx)
	if err != nil || !ok {
		return err
	}
	return fmt.Errorf("the store is kept by the study %s (%s): %s", f.Name, f.File, instead)
}
