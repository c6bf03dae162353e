package query

import (
	"context"
	"math"

	"swaybook/db"
)

// walks are the ways through the stored spectra of who asks for motions part by part, in the
// order of their records' ids. Without them each part reads all that the store has of its
// roles.
type walks struct {
	byRole map[walkKey]*db.SpectraWalk
}

type walkKey struct {
	role    string
	damping int
	span    db.Span
}

func newWalks() *walks { return &walks{byRole: map[walkKey]*db.SpectraWalk{}} }

// spectra reads the stored spectra among which those wanted are.
func (r *reader) spectra(snapshot *db.Snapshot, role string, damping int, wanted []part) func(context.Context, func(int64, db.Ordinates) error) error {
	if r.walks == nil {
		return func(ctx context.Context, f func(int64, db.Ordinates) error) error {
			return snapshot.Spectra(ctx, role, damping, r.span, f)
		}
	}
	last := int64(math.MinInt64)
	if len(wanted) > 0 {
		last = wanted[len(wanted)-1].recordID
	}
	key := walkKey{role, damping, r.span}
	walk := r.walks.byRole[key]
	if walk == nil {
		walk = snapshot.WalkSpectra(role, damping, r.span)
		r.walks.byRole[key] = walk
	}
	return func(ctx context.Context, f func(int64, db.Ordinates) error) error { return walk.To(ctx, last, f) }
}

// end compares what was read with what was stored; see db.SpectraWalk.
func (w *walks) end(ctx context.Context) error {
	for _, walk := range w.byRole {
		if err := walk.End(ctx); err != nil {
			return err
		}
	}
	return nil
}
