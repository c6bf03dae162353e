package pipeline

import (
	"context"
	"errors"
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
		for _, c := range components {
			if u, changed := r.compare(file, c); changed {
				res.updates = append(res.updates, u)
			}
		}
		return nil
	})
	if errors.Is(err, db.ErrEmpty) {
		err = nil
	}
	return res, err
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
