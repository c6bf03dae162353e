package pipeline

import (
	"context"
	"errors"
	"fmt"
	"math"
	"reflect"

	"swaybook/db"
	"swaybook/ingest"
)

// update is what the catalogue changes of one held component.
type update struct {
	componentID int64
	recordID    int64
	record      db.Record
	orientation ingest.Orientation
	turned      bool // the orientation changed
}

// held answers for a file whose content is in the store: nothing is read
// again, but what the catalogue says of it counts.
func (r *reader) held(ctx context.Context, file ingest.Found, res result, first string) (result, error) {
	res.outcome, res.reason = Held, "same content as "+first
	if r.catalogue == nil {
		return res, ctx.Err()
	}
	err := r.store.View(ctx, func(s *db.Snapshot) error {
		components, err := s.ComponentsOf(ctx, res.source.SHA256)
		if err != nil {
			return err
		}
		hints := r.catalogue.Hints(file.Rel, ingest.Hints{})
		for _, c := range components {
			if u, changed := r.compare(file, c); changed {
				res.updates = append(res.updates, u)
			}
			res.warnings = append(res.warnings, tooLate(hints, c)...)
		}
		return nil
	})
	if errors.Is(err, db.ErrEmpty) {
		err = nil
	}
	return res, err
}

// tooLate says where the catalogue gives a held file another unit or time step
// than the one with which it was read: its samples are not read again.
func tooLate(hints ingest.Hints, c db.HeldComponent) []string {
	var out []string
	if unit, err := ingest.ParseUnit(hints.Unit); err == nil && unit.Name != c.Unit {
		out = append(out, fmt.Sprintf("%s says unit %s, but the file is held as %s: ingest it into a new store (--store) to change that", hints.UnitFrom, unit.Name, c.Unit))
	}
	if hints.StepS != 0 && math.Abs(hints.StepS-c.StepS) > 1e-3*c.StepS {
		out = append(out, fmt.Sprintf("%s says a time step of %g s, but the file is held with %g s: ingest it into a new store (--store) to change that", hints.StepFrom, hints.StepS, c.StepS))
	}
	return out
}

// compare applies the catalogue to a held component's description.
func (r *reader) compare(file ingest.Found, held db.HeldComponent) (update, bool) {
	c := channelOf(held)
	before := recordOf(c, held.Record.Code)
	turned := c.Orientation
	r.catalogue.Apply(file.Rel, &c)
	u := update{componentID: held.ID, recordID: held.RecordID, record: recordOf(c, held.Record.Code), orientation: c.Orientation}
	u.turned = c.Orientation != turned
	return u, u.turned || !reflect.DeepEqual(before, u.record)
}
