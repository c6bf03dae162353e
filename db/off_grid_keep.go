package db

import (
	"context"
	"errors"
	"fmt"

	sqlite3 "modernc.org/sqlite/lib"
)

// OffGridRow is the SD in m of one record and role, of all oscillators of some blocks one
// after another.
type OffGridRow struct {
	RecordID int64
	Role     string
	SD       []float64
}

// What is kept is bounded: a thousand records beside more than a hundred thousand
// oscillators. A row takes some 32 bytes beside its values.
const (
	offGridBytes   = 1 << 30
	offGridRowCost = 4 // in values
)

// Unkept says why something that was computed could not be kept for later questions; nil
// where all was.
func (s *Store) Unkept() error {
	s.mutex.Lock()
	defer s.mutex.Unlock()
	return s.unkept
}

// keep is Update of a store that may be open for reading, for what spares later questions
// work and can as well not be stored. It reports whether it is.
func (s *Store) keep(ctx context.Context, f func(*Tx) error) bool {
	if s.Unkept() != nil {
		return false // it would wait in vain again
	}
	err := errors.New("the store may not be written to")
	if s.aside != nil {
		err = transact(ctx, s.aside, f)
	}
	s.mutex.Lock()
	defer s.mutex.Unlock()
	s.unkept = err
	return err == nil
}

// ReserveOffGrid makes room for so many values of the snapshot's generation, and blocks of
// these lists of oscillators. Where there is no room everything that is kept makes place;
// the known blocks remain. It reports whether that can be kept: see Store.Unkept. It is not
// for concurrent use.
func (s *Snapshot) ReserveOffGrid(ctx context.Context, known []OffGridBlock, lists [][]Oscillator, values int) (blocks []OffGridBlock, ok bool) {
	ok = s.store.keep(ctx, func(t *Tx) (err error) {
		blocks, err = t.reserveOffGrid(ctx, s.Generation.ID, known, lists, values, offGridBytes/8)
		return err
	})
	if ok {
		s.reserved = append(s.reserved, blocks...)
	}
	return blocks, ok
}

func (t *Tx) reserveOffGrid(ctx context.Context, generationID int64, known []OffGridBlock, lists [][]Oscillator, values, most int) ([]OffGridBlock, error) {
	if values > most {
		return nil, fmt.Errorf("%d ordinates, at most %d are kept", values, most)
	}
	if err := t.makeRoom(ctx, most-values); err != nil {
		return nil, err
	}
	for _, b := range known {
		if err := t.exec(ctx, `INSERT OR IGNORE INTO off_grid_block (id, generation_id, oscillators) VALUES (?, ?, ?)`, b.ID, generationID, b.encode()); err != nil {
			return nil, fmt.Errorf("keep block of oscillators: %w", err)
		}
	}
	out := make([]OffGridBlock, len(lists))
	for i, list := range lists {
		out[i].Oscillators = list
		var err error
		if out[i].ID, err = t.insert(ctx, `INSERT INTO off_grid_block (generation_id, oscillators) VALUES (?, ?)`, generationID, out[i].encode()); err != nil {
			return nil, fmt.Errorf("keep block of oscillators: %w", err)
		}
	}
	return out, nil
}

// makeRoom forgets all that is kept, which is quick, where that is more than so many
// values.
func (t *Tx) makeRoom(ctx context.Context, most int) error {
	var kept int
	if err := t.tx.QueryRowContext(ctx, `SELECT coalesce(sum(kept), 0) FROM off_grid_block`).Scan(&kept); err != nil {
		return fmt.Errorf("count kept ordinates: %w", err)
	}
	if kept <= most {
		return nil
	}
	for _, table := range []string{"off_grid", "off_grid_block"} {
		if err := t.exec(ctx, `DELETE FROM `+table); err != nil {
			return fmt.Errorf("forget kept ordinates: %w", err)
		}
	}
	return nil
}

// encode writes the oscillators as they are stored.
func (b *OffGridBlock) encode() []byte {
	values := make([]float64, 0, 2*len(b.Oscillators))
	for _, o := range b.Oscillators {
		values = append(values, o.PeriodS, o.Damping)
	}
	return sealDoubles(nil, values)
}

// KeepOffGrid stores ordinates off the grid for later questions, beside the computations
// that the records' roles have in the snapshot: of pairs that are not rotated there is
// none, and nothing is kept. It reports whether it could: see Store.Unkept.
func (s *Snapshot) KeepOffGrid(ctx context.Context, blocks []OffGridBlock, rows []OffGridRow) bool {
	return s.store.keep(ctx, func(t *Tx) error {
		kept := map[int64]int{}
		for i := range rows {
			computed, err := s.computations(ctx, rows[i].Role)
			if of, ok := computed[rows[i].RecordID]; err == nil && ok {
				err = t.keepOffGrid(ctx, of, blocks, rows[i].SD, kept)
			}
			if err != nil {
				return err
			}
		}
		for id, n := range kept {
			if err := t.exec(ctx, `UPDATE off_grid_block SET kept = kept + ? WHERE id = ?`, n, id); err != nil {
				return fmt.Errorf("count kept ordinates: %w", err)
			}
		}
		return nil
	})
}

// keepOffGrid adds to kept, by block, the values and what their row costs.
func (t *Tx) keepOffGrid(ctx context.Context, computationID int64, blocks []OffGridBlock, sd []float64, kept map[int64]int) error {
	var data []byte
	for i := range blocks {
		b := &blocks[i]
		data = sealDoubles(data[:0], sd[:len(b.Oscillators)])
		sd = sd[len(b.Oscillators):]
		r, err := t.tx.ExecContext(ctx, `INSERT INTO off_grid (computation_id, block_id, sd_m) VALUES (?, ?, ?)
			ON CONFLICT DO UPDATE SET sd_m = excluded.sd_m WHERE sd_m <> excluded.sd_m`, computationID, b.ID, data)
		if codeOf(err) == sqlite3.SQLITE_CONSTRAINT {
			return errors.New("another process has made room for other ordinates")
		}
		if err != nil {
			return fmt.Errorf("keep ordinates: %w", err)
		}
		if n, err := r.RowsAffected(); err == nil && n > 0 {
			kept[b.ID] += len(b.Oscillators) + offGridRowCost
		}
	}
	return nil
}
