package db

import (
	"context"
	"database/sql"
	"fmt"
	"math"
)

// Span is the positions From … To-1 of the grid's periods.
type Span struct{ From, To int }

// Spectra reads the SD spectra of a role at the grid's damping of this position,
// at the periods of the span only, and calls f with each in the order of the
// record's id. Each has one value a period, unless it is damaged: none where it is not what
// its checksum, which is of all periods, was taken of. f must not keep it.
func (s *Snapshot) Spectra(ctx context.Context, role string, dampingPosition int, periods Span, f func(recordID int64, sd Ordinates) error) error {
	w := s.WalkSpectra(role, dampingPosition, periods)
	if err := w.To(ctx, math.MaxInt64, f); err != nil {
		return err
	}
	return w.End(ctx)
}

// SpectraWalk reads what Spectra reads, a piece at a time.
type SpectraWalk struct {
	snapshot *Snapshot
	role     string
	damping  int
	periods  Span
	at       int64 // the last record's id that was read
	seen     *tally
}

// WalkSpectra begins to read spectra. What they are is known to be right when End says so.
func (s *Snapshot) WalkSpectra(role string, dampingPosition int, periods Span) *SpectraWalk {
	return &SpectraWalk{
		snapshot: s, role: role, damping: dampingPosition, periods: periods, at: math.MinInt64,
		seen: s.tally("computed", role, "record_id", "role", "computation_id", "", ""),
	}
}

// To goes on to the record of this id, and calls f as Spectra does.
func (w *SpectraWalk) To(ctx context.Context, last int64, f func(recordID int64, sd Ordinates) error) error {
	s := w.snapshot
	rows, err := s.tx.QueryContext(ctx, `SELECT k.record_id, k.role, k.computation_id, s.crc32c, s.sd_m FROM `+s.shown("computed")+` k LEFT JOIN spectrum s ON s.id = `+firstSpectrum+` + ?1
		WHERE k.role = ?2 AND k.record_id > ?3 AND k.record_id <= ?4 ORDER BY k.record_id`, w.damping, w.role, w.at, last)
	if err != nil {
		return fmt.Errorf("read spectra: %w", err)
	}
	defer rows.Close()
	w.at = max(w.at, last)
	var id, computation int64
	var of string
	var seal sql.NullInt64
	var raw sql.RawBytes
	into := []any{&id, &of, &computation, &seal, &raw}
	for rows.Next() {
		if err := rows.Scan(into...); err != nil {
			return s.unread("computed", err)
		}
		w.seen.add(into)
		if !seal.Valid {
			continue
		}
		sd := sealedSpectrum{raw, seal.Int64}.open()
		if len(sd) >= w.periods.To*OrdinateWidth {
			sd = sd[w.periods.From*OrdinateWidth : w.periods.To*OrdinateWidth]
		}
		if err := f(id, Ordinates(sd)); err != nil {
			return err
		}
	}
	return s.unread("computed", rows.Err())
}

// End reads what is left of the role and compares all with the edition's seal.
func (w *SpectraWalk) End(ctx context.Context) error {
	if w.at < math.MaxInt64 {
		if err := w.To(ctx, math.MaxInt64, func(int64, Ordinates) error { return nil }); err != nil {
			return err
		}
	}
	return w.snapshot.unread("computed", w.seen.check())
}
