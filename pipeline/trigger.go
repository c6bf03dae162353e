package pipeline

import (
	"context"
	"fmt"
	"slices"
	"time"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/pipeline/spectrum"
)

// startTolerance is how far apart the first samples of one record's components
// may be. Recorders start all channels together, headers round to a second.
const startTolerance = time.Second

// findRecord returns the record to which a channel of so many samples belongs by what it
// states, which may be a new one: that of its code, unless that is of another trigger, or
// the one that overlaps it.
func findRecord(ctx context.Context, tx *db.Tx, res result, c *ingest.Channel, samples int) (db.StoredRecord, error) {
	code, stated := ingest.RecordID(c, res.stem)
	if !stated {
		return findInFolder(ctx, tx, res, code)
	}
	r, err := recordOfCode(ctx, tx, code)
	if err == nil && r.ID == 0 && isWithoutEvent(c) {
		return findOfSecond(ctx, tx, res, c, samples)
	}
	if err != nil || !startsApart(r.Start, c.Start) {
		return r, err
	}
	later, ok, err := tx.FindTrigger(ctx, code, c.Start, startTolerance)
	if ok || err != nil {
		return later, err
	}
	if ok, err = isBeside(ctx, tx, r, res, c, samples); ok || err != nil {
		return r, err
	}
	if later, ok, err = tx.FindTrigger(ctx, code, c.Start, spectrum.FurthestApart); err == nil && ok {
		ok, err = isBeside(ctx, tx, later, res, c, samples)
	}
	if ok || err != nil {
		return later, err
	}
	return db.StoredRecord{Code: code + c.Start.UTC().Format("_T150405")}, nil
}

// findOfSecond returns the record of a channel that says nothing of its earthquake, whose
// code is made of the second in which it starts: another channel may have started in another
// one. The channel is given that record's code of the event.
func findOfSecond(ctx context.Context, tx *db.Tx, res result, c *ingest.Channel, samples int) (db.StoredRecord, error) {
	code, _ := ingest.RecordID(c, res.stem)
	for n := range 2 * int(spectrum.FurthestApart/time.Second) {
		shift := n/2 + 1 // 1, -1, 2, -2 …
		if n%2 == 1 {
			shift = -shift
		}
		other := *c
		other.Start = c.Start.Add(time.Duration(shift) * time.Second)
		otherCode, _ := ingest.RecordID(&other, res.stem)
		r, err := recordOfCode(ctx, tx, otherCode)
		same := r.ID != 0 && !startsApart(r.Start, c.Start)
		if err == nil && r.ID != 0 && !same {
			same, err = isBeside(ctx, tx, r, res, c, samples)
		}
		if err != nil {
			return r, err
		}
		if same {
			c.Event.ID = ingest.EventCode(&other)
			return r, nil
		}
	}
	return db.StoredRecord{Code: code}, nil
}

func startsApart(a, b time.Time) bool {
	return !a.IsZero() && !b.IsZero() && a.Sub(b).Abs() > startTolerance
}

// isBeside reports whether the channel, which starts at another time than the record, is
// of the same motion: it overlaps the record, starts no farther from it than horizontals may
// to be rotated, and either came with what a version of the record holds, or is delivered
// with the record or as a lone one like it and finds its direction free.
func isBeside(ctx context.Context, tx *db.Tx, r db.StoredRecord, res result, c *ingest.Channel, samples int) (bool, error) {
	if !overlaps(r, c, samples) || !isSameVersion(r, res, c) {
		return false, nil
	}
	if _, rival := join(r, res, c); rival == nil && (nearness(r.Components, res) > elsewhere || areLone(&r, res, c)) {
		return true, nil
	}
	code := r.Code
	for n := 2; r.ID != 0; n++ {
		for i := range r.Components {
			if held := &r.Components[i]; nearnessOf(held, res) > elsewhere && !held.Start.IsZero() && !startsApart(held.Start, c.Start) {
				return true, nil
			}
		}
		var err error
		if r, err = recordOfCode(ctx, tx, fmt.Sprintf("%s_v%d", code, n)); err != nil {
			return false, err
		}
	}
	return false, nil
}

// overlaps reports whether the channel runs while each of the record's components does,
// and starts no farther from the record than the components of a pair may.
func overlaps(r db.StoredRecord, c *ingest.Channel, samples int) bool {
	if c.Start.IsZero() || r.Start.IsZero() || c.Start.Sub(r.Start).Abs() > spectrum.FurthestApart {
		return false
	}
	ends := c.Start.Add(seconds(float64(samples) * c.StepS))
	return !slices.ContainsFunc(r.Components, func(held db.Component) bool {
		return !r.Start.Add(seconds(float64(held.Samples)*held.StepS)).After(c.Start) || !ends.After(r.Start)
	})
}
