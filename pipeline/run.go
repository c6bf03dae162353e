package pipeline

import (
	"context"
	"errors"
	"runtime"
	"time"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/pipeline/condition"
)

// Store is what a run needs of the store; *db.Store is one.
type Store interface {
	Held(ctx context.Context, sha256 string) (path string, ok bool, err error)
	Unsolved(ctx context.Context, generationID int64) ([]db.Unsolved, error)
	ReadUnsolved(ctx context.Context, u db.Unsolved) (db.StoredMotion, error)
	Unrotated(ctx context.Context, generationID int64) ([]db.Pair, error)
	ReadPair(ctx context.Context, g db.Generation, p db.Pair) (first, second db.StoredMotion, err error)
	Update(ctx context.Context, f func(*db.Tx) error) error
}

// Options say what a run shall do. The zero value of a field asks for its
// default.
type Options struct {
	Paths []string
	// Catalogue joins or overrides metadata; nil for none.
	Catalogue *ingest.Catalogue
	// Own are the run's own files, which are skipped where they lie among the
	// records: path to reason.
	Own map[string]string
	// Hints are what the user states for files that are silent. The run adds to
	// their Metadata the StationXML and QuakeML documents among the files
	// and in archives.
	Hints ingest.Hints
	// Grid is the grid asked for. An empty list asks for the store's own, or
	// for the default in a new store.
	Grid db.Grid
	// Recipe conditions the components; nil asks for the store's own, or for
	// condition.Standard in a new store. Another than the store's begins a generation of
	// its own, which is published when it is complete.
	Recipe *condition.Recipe
	// Takes says of a file or member by its path below the path that was named, and of an
	// archive, whether it is read; nil for all.
	Takes func(rel string, isArchive bool) bool
	// Shard is the part of the records that the run takes, in a store that is for that; the
	// zero value takes all.
	Shard db.Shard
	// Decided is a digest of all that decides, beside the files and the program, how these are
	// read: the catalogue, the hints. It is compared where shards are combined.
	Decided string
	Workers int       // files in work at the same time; default GOMAXPROCS
	Program string    // name and version, kept with the run
	Started time.Time // when the run began
	// Clock returns the time; it paces batches and dates the run's end.
	Clock func() time.Time
	// Progress is called by the writer after each file, in path order; may be
	// nil.
	Progress func(Progress)
	// SkipRotation leaves the last stage to a later run.
	SkipRotation bool
	// Gathered is called as shards are taken over; may be nil.
	Gathered func(GatherProgress)
	// Recomputed is called by the writer after each held component of the second stage;
	// may be nil.
	Recomputed func(Recomputed)
	// Rotated is called by the writer after each record of the last stage, in
	// the order in which they were stored; may be nil.
	Rotated func(Rotated)
	// Doubted is called at the end of the run, in the order of the files, for what
	// metadata leave open of records of which nobody else says when their earthquake was;
	// may be nil.
	Doubted func(Doubt)
}

// Progress is one file done, or one member of an archive.
type Progress struct {
	Done  int
	Total int // found so far: it grows as archives are read
	File  FileReport
}

// Run ingests the files under opts.Paths into the store, computes the spectra of held
// components that the generation lacks, and then rotates the horizontals of every record
// that has two and lacks that. The summary tells what
// happened to every file and record; it is valid beside an error too, for what had
// been committed by then. A cancelled context ends the run after the batch in
// hand; the error is then the context's.
func Run(ctx context.Context, store Store, opts Options) (Summary, error) {
	opts = withDefaults(opts)
	files, err := ingest.Discover(opts.Paths)
	if err != nil {
		return Summary{}, err
	}
	src := newSource(files, opts)
	src.readMetadata(ctx, opts.Hints.Metadata)
	run, err := begin(ctx, store, opts)
	if err != nil {
		return Summary{}, err
	}
	w := newWriter(store, run, opts, src)
	err = w.files(ctx)
	if err == nil {
		err = w.complete(ctx)
	}
	if err == nil {
		err = w.rotate(ctx)
	}
	if err == nil {
		err = store.Update(ctx, func(tx *db.Tx) error { return w.publish(ctx, tx) })
	}
	return w.finish(ctx, err)
}

func withDefaults(opts Options) Options {
	if opts.Workers <= 0 {
		opts.Workers = runtime.GOMAXPROCS(0)
	}
	if opts.Hints.Metadata == nil {
		opts.Hints.Metadata = &ingest.Metadata{}
	}
	if opts.Takes == nil {
		opts.Takes = func(string, bool) bool { return true }
	}
	if opts.Progress == nil {
		opts.Progress = func(Progress) {}
	}
	if opts.Gathered == nil {
		opts.Gathered = func(GatherProgress) {}
	}
	if opts.Recomputed == nil {
		opts.Recomputed = func(Recomputed) {}
	}
	if opts.Rotated == nil {
		opts.Rotated = func(Rotated) {}
	}
	if opts.Doubted == nil {
		opts.Doubted = func(Doubt) {}
	}
	return opts
}

// state is what a run keeps from its beginning to its end.
type state struct {
	id         int64
	generation db.Generation
	reader     *reader
}

// begin opens the run's entry in the store and settles the generation.
func begin(ctx context.Context, store Store, opts Options) (state, error) {
	var s state
	err := store.Update(ctx, func(tx *db.Tx) error {
		var err error
		if err = errors.Join(refuseFollowed(ctx, tx, "add the files to its sources and reprocess it, or name another store with --store"), claim(ctx, tx, opts.Shard)); err != nil {
			return err
		}
		if s.generation, err = settleGeneration(ctx, tx, opts.Grid, opts.Recipe); err != nil {
			return err
		}
		if err = shareWithdrawn(ctx, tx, opts.Hints.Metadata); err != nil {
			return err
		}
		if s.id, err = tx.StartRun(ctx, "ingest", opts.Program, opts.Started); err != nil {
			return err
		}
		return keepEvents(ctx, tx, opts)
	})
	if err != nil {
		return state{}, err
	}
	computer, err := newComputer(s.generation)
	if err != nil {
		return state{}, err
	}
	s.reader = newReader(store, opts, computer)
	return s, nil
}

// interrupted reports whether a run ended because somebody stopped it.
func interrupted(err error) bool {
	return errors.Is(err, context.Canceled) || errors.Is(err, context.DeadlineExceeded)
}
