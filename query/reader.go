package query

import (
	"cmp"
	"context"
	"fmt"
	"maps"
	"math"
	"runtime"
	"slices"
	"sync"

	"golang.org/x/sync/errgroup"

	"swaybook/db"
)

// reader fills in stored periods of ordinates from stored spectra.
type reader struct {
	walks   *walks // nil: of all of the store at once
	o       *ordinates
	motions []motion
	unfit   *unfit  // those whose spectrum is damaged
	stored  []int   // positions in the periods of o
	columns []int   // of each stored one, counted from span.From
	span    db.Span // of the grid's periods: no more is read
	batches sync.Pool
}

// part is one stored spectrum that is wanted, and the motion that it is of.
type part struct {
	recordID int64
	motion   int
	isFirst  bool // of the motion's spectra
}

// batch is some stored spectra on their way from the store to those who decode
// them.
type batch struct {
	parts []part
	sd    []byte
}

// batchBytes is about the size of a batch in bytes: large against the cost of
// handing it over, small against the processor's cache.
const batchBytes = 256 << 10

// newReader takes the positions of the stored periods in those of o, and the
// grid's positions of all periods of o.
func newReader(o *ordinates, motions []motion, unfit *unfit, stored, columns []int) *reader {
	r := &reader{o: o, motions: motions, unfit: unfit, stored: stored}
	r.batches.New = func() any { return &batch{} }
	for _, p := range stored {
		r.columns = append(r.columns, columns[p])
	}
	r.span = db.Span{From: slices.Min(r.columns), To: slices.Max(r.columns) + 1}
	for k := range r.columns {
		r.columns[k] -= r.span.From
	}
	return r
}

// readAll reads role by role, since that is how spectra lie in the store. It
// returns the rotated motions whose spectrum is not stored.
func (r *reader) readAll(ctx context.Context, snapshot *db.Snapshot, position int) (lacking []int, err error) {
	parts := partsByRole(r.motions)
	for _, role := range slices.Sorted(maps.Keys(parts)) {
		found, err := r.readRole(ctx, snapshot, position, role, parts[role])
		if err != nil {
			return nil, err
		}
		if Component(role).IsRotated() {
			lacking = append(lacking, found...)
			continue
		}
		for _, motion := range found {
			r.unfit.add(motion, reasonDamaged) // a component has its spectrum
		}
	}
	return lacking, nil
}

// partsByRole lists what is wanted of each role, in the order of the records'
// ids.
func partsByRole(motions []motion) map[string][]part {
	out := map[string][]part{}
	for i := range motions {
		m := &motions[i]
		if m.isRotated() {
			out[m.role] = append(out[m.role], part{recordID: m.members[0].RecordID, motion: i, isFirst: true})
			continue
		}
		for k, c := range m.members {
			out[c.Role] = append(out[c.Role], part{recordID: c.RecordID, motion: i, isFirst: k == 0})
		}
	}
	for _, parts := range out {
		slices.SortFunc(parts, func(a, b part) int { return cmp.Compare(a.recordID, b.recordID) })
	}
	return out
}

// readRole reads the wanted spectra of a role, which are decoded by other
// goroutines meanwhile, and returns the motions whose spectrum is not stored.
func (r *reader) readRole(ctx context.Context, snapshot *db.Snapshot, position int, role string, wanted []part) (lacking []int, err error) {
	group, ctx := errgroup.WithContext(ctx)
	full := make(chan *batch, runtime.GOMAXPROCS(0))
	for range runtime.GOMAXPROCS(0) {
		group.Go(func() error {
			r.decodeAll(full)
			return nil
		})
	}
	group.Go(func() error {
		defer close(full)
		lacking, err = r.fetch(ctx, snapshot, position, role, wanted, full)
		return err
	})
	if err := group.Wait(); err != nil {
		return nil, fmt.Errorf("read spectra of %s: %w", role, err)
	}
	return lacking, nil
}

// fetch hands over what is wanted in batches.
func (r *reader) fetch(ctx context.Context, snapshot *db.Snapshot, position int, role string, wanted []part, full chan<- *batch) (lacking []int, err error) {
	b := r.batches.Get().(*batch)
	send := func() error {
		select {
		case full <- b:
			b = r.batches.Get().(*batch)
			return nil
		case <-ctx.Done():
			return ctx.Err()
		}
	}
	next := 0
	spectra := r.spectra(snapshot, role, position, wanted)
	skipTo := func(id int64) {
		for ; next < len(wanted) && wanted[next].recordID < id; next++ {
			lacking = append(lacking, wanted[next].motion)
		}
	}
	err = spectra(ctx, func(id int64, sd db.Ordinates) error {
		skipTo(id)
		if next == len(wanted) || wanted[next].recordID != id {
			return nil
		}
		if len(sd) != r.width() {
			r.unfit.add(wanted[next].motion, reasonDamaged)
			next++
			return nil
		}
		b.parts, b.sd = append(b.parts, wanted[next]), append(b.sd, sd...)
		next++
		if len(b.sd) < batchBytes {
			return nil
		}
		return send()
	})
	if err != nil {
		return nil, err
	}
	skipTo(math.MaxInt64)
	return lacking, send()
}

// width is the length of one stored spectrum in bytes.
func (r *reader) width() int { return db.OrdinateWidth * (r.span.To - r.span.From) }

// decodeAll empties the channel.
func (r *reader) decodeAll(full <-chan *batch) {
	sd := make([]float64, r.span.To-r.span.From)
	picked := make([]float64, len(r.columns))
	for b := range full {
		r.decode(b, sd, picked)
		b.parts, b.sd = b.parts[:0], b.sd[:0]
		r.batches.Put(b)
	}
}

// decode needs space for all values of a spectrum and for those that are picked.
func (r *reader) decode(b *batch, sd, picked []float64) {
	width := r.width()
	for k, p := range b.parts {
		if err := db.Ordinates(b.sd[k*width : (k+1)*width]).Decode(sd); err != nil {
			r.unfit.add(p.motion, reasonDamaged)
			continue
		}
		for j, column := range r.columns {
			picked[j] = sd[column]
		}
		r.o.put(p.motion, &r.motions[p.motion], p.isFirst, r.stored, picked)
	}
}
