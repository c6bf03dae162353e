package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"

	"golang.org/x/sync/errgroup"
	sqlite3 "modernc.org/sqlite/lib"
)

// Gathered counts what came from a shard.
type Gathered struct {
	Files        int // of which reading made something new, or something else
	Gone         int // of which there is nothing any more
	Computations int // that came
	Damaged      int // that are not what was stored, and stayed
}

// Add adds what came from another.
func (g *Gathered) Add(more Gathered) {
	g.Files += more.Files
	g.Gone += more.Gone
	g.Computations += more.Computations
	g.Damaged += more.Damaged
}

// gatherBatch is how many files, or computations, come in one transaction: as many as a tile has.
const gatherBatch = TileMotions

// gatherBytes bounds the files of a transaction, however long they are.
const gatherBytes = 8 << 20

// gathering takes over a shard.
type gathering struct {
	store *Store
	part  *Part
	// generation is of the store that takes.
	generation int64
	looked     intakeSum // the shard's files that were looked at
	done       Gathered
	tell       func(done, total int)
	steps      int
	total      int
}

// Gather makes what the store has of a shard that which the shard has: what reading made of
// its files, their samples, and what was computed of its generation, which is the store's of
// this number. What is there is left alone, so that a store that was stopped in the middle
// goes on. tell is told after each batch how far it is. What is damaged is told by its
// checksums: of samples that is an error, a computation is left behind. Which samples a file has
// to have only who reads what was said of it can tell; see Part.Check.
func (s *Store) Gather(ctx context.Context, part *Part, generationID int64, tell func(done, total int)) (Gathered, error) {
	g := &gathering{store: s, part: part, generation: generationID, tell: tell}
	err := g.count(ctx)
	for _, step := range []func(context.Context) error{g.events, g.files, g.allLooked, g.gone, g.computations, g.end} {
		if err == nil {
			err = step(ctx)
		}
	}
	if err != nil {
		err = fmt.Errorf("take over %s: %w", part.Shard, s.whichIs(err))
	}
	return g.done, err
}

// whichIs has an error of taking over name the store where that is damaged, as the shard has
// named itself where it is.
func (s *Store) whichIs(err error) error {
	if _, isOfShard := errors.AsType[*unreadError](err); isOfShard {
		return err
	}
	if codeOf(err) == sqlite3.SQLITE_CORRUPT {
		return fmt.Errorf("%s: %w", s.path, explain(err))
	}
	return explain(err)
}

func (g *gathering) count(ctx context.Context) error {
	err := g.part.tx.QueryRowContext(ctx, `SELECT (SELECT count(*) FROM intake WHERE shard = ?) + (SELECT count(*) FROM computation WHERE generation_id = ?)`,
		g.part.Number, g.part.Generation.ID).Scan(&g.total)
	return g.part.unread(ctx, err)
}

// update is one batch of so many files or computations.
func (g *gathering) update(ctx context.Context, n int, f func(*Tx) error) error {
	if err := ctx.Err(); err != nil {
		return err
	}
	if err := g.store.Update(context.WithoutCancel(ctx), f); err != nil {
		return err
	}
	g.steps += n
	g.tell(g.steps, g.total)
	return nil
}

func (t *Tx) noteChange(ctx context.Context) error {
	return t.SetRebuild(ctx, Rebuild{State: RebuildChanged, Reached: BeforeIntake})
}

// events takes over what documents said of earthquakes.
func (g *gathering) events(ctx context.Context) error {
	var s sealedSaying
	err := g.part.tx.QueryRowContext(ctx, `SELECT said, sha256 FROM intake_events WHERE shard = ?`, g.part.Number).Scan(&s.said, &s.sum)
	if errors.Is(err, sql.ErrNoRows) { // which every run writes
		return g.part.damaged("events of documents", fmt.Errorf("%w: there are none", ErrDamaged))
	}
	if err != nil {
		return g.part.unread(ctx, err)
	}
	said, err := s.open()
	if err != nil {
		return g.part.damaged("events of documents", err)
	}
	return g.update(ctx, 0, func(t *Tx) error {
		same, err := t.idOf(ctx, `SELECT count(*) FROM intake_events WHERE shard = ? AND sha256 = ?`, g.part.Number, s.sum)
		if err != nil || same > 0 {
			return err
		}
		return errors.Join(t.PutIntakeEvents(ctx, g.part.Number, said), t.noteChange(ctx))
	})
}

// intakeRow is what a store keeps of a file, without what was said.
type intakeRow struct {
	id     int64
	key    IntakeKey
	sum    []byte
	series int
}

// intakeRows lists what a store keeps of files of a shard behind key.
func intakeRows(ctx context.Context, q queryer, shard int, key IntakeKey) ([]intakeRow, error) {
	rows, err := q.QueryContext(ctx, `SELECT id, path, member, sha256, (SELECT count(*) FROM intake_series n WHERE n.intake_id = intake.id) FROM intake WHERE shard = ? AND (path, member) > (?, ?) ORDER BY path, member LIMIT ?`,
		shard, key.Path, key.Member, gatherBatch)
	if err != nil {
		return nil, err
	}
	return collect(rows, func(r *intakeRow) []any { return []any{&r.id, &r.key.Path, &r.key.Member, &r.sum, &r.series} })
}

// files takes over what reading made of files, and their samples.
func (g *gathering) files(ctx context.Context) error {
	return ahead(ctx, g.readFiles, func(batch filesComing) error {
		return g.update(ctx, batch.looked, func(t *Tx) error {
			for _, in := range batch.files {
				if err := t.PutIntake(ctx, in); err != nil {
					return err
				}
			}
			if len(batch.files) == 0 {
				return nil
			}
			g.done.Files += len(batch.files)
			return t.noteChange(ctx)
		})
	})
}

// filesComing are those of so many files that were looked at of which the store has not what
// the shard has.
type filesComing struct {
	looked int
	files  []Intake
	bytes  int
}

func (g *gathering) readFiles(ctx context.Context, pass func(filesComing) error) error {
	for key := BeforeIntake; ; {
		rows, err := intakeRows(ctx, g.part.tx, g.part.Number, key)
		if err != nil || len(rows) == 0 {
			return g.part.unread(ctx, err)
		}
		key = rows[len(rows)-1].key
		batch := filesComing{looked: len(rows)}
		for _, row := range rows {
			g.looked.add(row.key)
			same, err := idOf(ctx, g.store.read, `SELECT count(*) FROM intake WHERE path = ? AND member = ? AND shard = ? AND sha256 = ?
				AND (SELECT count(*) FROM intake_series n WHERE n.intake_id = intake.id) = ?`, row.key.Path, row.key.Member, g.part.Number, row.sum, row.series)
			if err != nil {
				return err
			}
			if same > 0 {
				continue
			}
			in, err := g.part.intake(ctx, row)
			if err != nil {
				return err
			}
			batch.files = append(batch.files, in)
			if batch.bytes += in.size(); batch.bytes < gatherBytes {
				continue
			}
			if err := pass(batch); err != nil {
				return err
			}
			batch = filesComing{}
		}
		if err := pass(batch); err != nil {
			return err
		}
	}
}

// size is how many bytes it takes.
func (in *Intake) size() int {
	n := len(in.Said)
	for _, s := range in.Series {
		n += len(s.Data)
	}
	return n
}

// intake reads what reading made of a file.
func (p *Part) intake(ctx context.Context, row intakeRow) (Intake, error) {
	in := Intake{IntakeKey: row.key, Shard: p.Number}
	s := sealedSaying{sum: row.sum}
	if err := p.tx.QueryRowContext(ctx, `SELECT said FROM intake WHERE id = ?`, row.id).Scan(&s.said); err != nil {
		return in, p.unread(ctx, err)
	}
	var err error
	if in.Said, err = s.open(); err != nil {
		return in, p.damaged("intake of "+row.key.Path, err)
	}
	rows, err := p.tx.QueryContext(ctx, `SELECT i.channel, i.samples, coalesce(s.sha256, ''), s.data FROM intake_series i LEFT JOIN series s ON s.id = i.series_id WHERE i.intake_id = ? ORDER BY i.channel`, row.id)
	if err != nil {
		return in, p.unread(ctx, err)
	}
	in.Series, err = collect(rows, func(s *IntakeSeries) []any { return []any{&s.Channel, &s.Samples, &s.Digest, &s.Data} })
	if err != nil {
		return in, p.unread(ctx, err)
	}
	for _, s := range in.Series {
		if _, err := DecodeSamples(s.Data, s.Samples, s.Digest); err != nil {
			return in, p.damaged("samples of "+row.key.Path, err)
		}
	}
	return in, nil
}

// Check looks whether the shard has what check asks for of a file.
func (p *Part) Check(ctx context.Context, key IntakeKey, check CheckIntake) error {
	row := intakeRow{key: key}
	if err := p.tx.QueryRowContext(ctx, `SELECT id, sha256 FROM intake WHERE path = ? AND member = ? AND shard = ?`, key.Path, key.Member, p.Number).Scan(&row.id, &row.sum); err != nil {
		return p.unread(ctx, err)
	}
	in, err := p.intake(ctx, row)
	if err != nil {
		return err
	}
	if err := check(in); err != nil {
		return p.damaged("samples of "+key.Path, err)
	}
	return nil
}

// ahead reads one batch while the one before is written.
func ahead[T any](ctx context.Context, read func(context.Context, func(T) error) error, write func(T) error) error {
	group, ctx := errgroup.WithContext(ctx)
	batches := make(chan T)
	group.Go(func() error {
		defer close(batches)
		return read(ctx, func(batch T) error {
			select {
			case batches <- batch:
				return nil
			case <-ctx.Done():
				return ctx.Err()
			}
		})
	})
	group.Go(func() error {
		for batch := range batches {
			if err := write(batch); err != nil {
				return err
			}
		}
		return nil
	})
	return group.Wait()
}

// allLooked says whether all files of the shard were looked at, which an index has found: as many
// stand in the table without it, and as many were there when its last run had ended.
func (g *gathering) allLooked(ctx context.Context) error {
	has, err := intakeSums(ctx, g.part.tx)
	if err != nil {
		return g.part.unread(ctx, err)
	}
	noted, err := notedSums(ctx, g.part.tx)
	if err != nil {
		return g.part.unread(ctx, err)
	}
	want := noted[g.part.Number]
	for _, is := range []intakeSum{has[g.part.Number], g.looked} {
		if is != want {
			return g.part.damaged("intake", fmt.Errorf("%w: of %d files there are %d", ErrDamaged, want.files, is.files))
		}
	}
	return nil
}

func (g *gathering) end(ctx context.Context) error {
	return g.update(ctx, 0, func(t *Tx) error { return t.endGathering(ctx, g.part, g.looked) })
}

// gone forgets what the shard does not have any more.
func (g *gathering) gone(ctx context.Context) error {
	for key := BeforeIntake; ; {
		rows, err := intakeRows(ctx, g.store.read, g.part.Number, key)
		if err != nil || len(rows) == 0 {
			return err
		}
		var gone []IntakeKey
		for _, row := range rows {
			held, err := idOf(ctx, g.part.tx, `SELECT count(*) FROM intake WHERE path = ? AND member = ? AND shard = ?`, row.key.Path, row.key.Member, g.part.Number)
			if err != nil {
				return g.part.unread(ctx, err)
			}
			if held == 0 {
				gone = append(gone, row.key)
			}
		}
		key = rows[len(rows)-1].key
		if len(gone) == 0 {
			continue
		}
		g.done.Gone += len(gone)
		err = g.update(ctx, 0, func(t *Tx) error {
			for _, key := range gone {
				if err := t.ForgetIntake(ctx, g.part.Number, key); err != nil {
					return err
				}
			}
			return t.noteChange(ctx)
		})
		if err != nil {
			return err
		}
	}
}
