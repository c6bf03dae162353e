package query

import (
	"context"
	"fmt"
	"iter"
	"slices"

	"swaybook/db"
)

// reader fills in stored periods of ordinates from stored spectra.
type reader struct {
	o       *ordinates
	motions []motion
	unfit   *unfit  // those whose spectrum is damaged
	stored  []int   // positions in the periods of o
	columns []int   // of each stored one, counted from span.From
	span    db.Span // of the grid's periods: no more is read
}

// newReader takes the positions of the stored periods in those of o, and the
// grid's positions of all periods of o.
func newReader(o *ordinates, motions []motion, unfit *unfit, stored, columns []int) *reader {
	r := &reader{o: o, motions: motions, unfit: unfit, stored: stored}
	for _, p := range stored {
		r.columns = append(r.columns, columns[p])
	}
	r.span = db.Span{From: slices.Min(r.columns), To: slices.Max(r.columns) + 1}
	for k := range r.columns {
		r.columns[k] -= r.span.From
	}
	return r
}

// readAll reads at the damping of this position in the grid. It returns the rotated motions whose
// spectrum is not stored.
func (r *reader) readAll(ctx context.Context, snapshot *db.Snapshot, position int) (lacking []int, err error) {
	wanted, of := r.wanted()
	isRead, hasOne := make([]bool, len(wanted)), make([]bool, len(r.motions))
	picked := make([]float64, len(r.columns))
	err = snapshot.SpectraOf(ctx, wanted, position, r.span, func(i int, sd []float64) error {
		isRead[i] = true
		m := of[i]
		if sd == nil {
			r.unfit.add(m, reasonDamaged)
			return nil
		}
		for k, column := range r.columns {
			picked[k] = sd[column]
		}
		r.o.put(m, &r.motions[m], !hasOne[m], r.stored, picked)
		hasOne[m] = true
		return nil
	})
	if err != nil {
		return nil, fmt.Errorf("read spectra: %w", err)
	}
	for i, ok := range isRead {
		switch m := of[i]; {
		case ok:
		case r.motions[m].isRotated():
			lacking = append(lacking, m)
		default:
			r.unfit.add(m, reasonDamaged) // a component has its spectrum
		}
	}
	return lacking, nil
}

// stored yields the spectra of the store that the motion's is made of, one after another.
func (m *motion) stored() iter.Seq[db.RoleSpectrum] {
	return func(yield func(db.RoleSpectrum) bool) {
		if m.isRotated() {
			yield(db.RoleSpectrum{RecordID: m.members[0].RecordID, Role: m.role})
			return
		}
		for _, c := range m.members {
			if !yield(db.RoleSpectrum{RecordID: c.RecordID, Role: c.Role}) {
				return
			}
		}
	}
}

// wanted lists the spectra of all motions, and the motion that each is of.
func (r *reader) wanted() (wanted []db.RoleSpectrum, of []int) {
	for i := range r.motions {
		for s := range r.motions[i].stored() {
			wanted, of = append(wanted, s), append(of, i)
		}
	}
	return wanted, of
}
