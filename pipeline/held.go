package pipeline

import (
	"context"
	"fmt"
	"math"

	"swaybook/db"
	"swaybook/ingest"
)

// describeHeld applies metadata and catalogue to what the store holds of a file's
// content: nothing is read again, but what they say of it counts. It warns of what
// can no longer be changed.
func (w *writer) describeHeld(ctx context.Context, tx *db.Tx, res result, report *FileReport) error {
	if w.opts.Catalogue == nil && w.opts.Hints.Metadata.IsEmpty() {
		return nil
	}
	components, err := tx.ComponentsOf(ctx, w.run.generation, res.source.SHA256)
	if err != nil {
		return err
	}
	for _, held := range components {
		c := channelOf(held)
		if err := w.describeByMetadata(ctx, tx, held, c, res.source.Path); err != nil {
			return err
		}
		if w.opts.Catalogue == nil {
			continue
		}
		hints := w.opts.Catalogue.Hints(res.rel, ingest.Hints{})
		stated, matched := w.opts.Catalogue.Apply(res.rel, &c)
		if matched {
			// A code that the catalogue gives may be another earthquake's.
			if e := held.Record.Event; e == nil || e.OwnCode != c.Event.ID {
				if err := w.settler.distinguish(ctx, &c, nil); err != nil {
					return err
				}
				stated.Event.ID = ingest.EventCode(&c)
			}
			if err := w.redescribe(ctx, tx, held, c.Orientation, stated); err != nil {
				return err
			}
		}
		report.Warnings = append(report.Warnings, tooLate(hints, held)...)
	}
	return nil
}

// describeByMetadata stores what metadata state of a held component, which is c. What
// they have stated of its earthquake before is no reason to take it for known.
func (w *writer) describeByMetadata(ctx context.Context, tx *db.Tx, held db.HeldComponent, c ingest.Channel, path string) error {
	key := db.RecordKey{ID: held.RecordID, EventID: held.Record.EventID, StationID: held.Record.StationID}
	own, err := tx.Statements(ctx, db.Subject{Kind: db.SubjectEvent, ID: key.EventID})
	if err != nil {
		return err
	}
	c.Event.Origin = asStated(own).Origin
	accounts, doubt := metadataAccounts(w.opts.Hints.Metadata, &c, held.Samples)
	w.doubt(path, doubt, held.RecordID)
	return w.settler.state(ctx, key, accounts)
}

// redescribe stores what the catalogue states of a held component.
func (w *writer) redescribe(ctx context.Context, tx *db.Tx, held db.HeldComponent, o ingest.Orientation, stated ingest.Channel) error {
	record, err := tx.PutRecord(ctx, recordOf(stated, held.Record.Code), true)
	if err != nil {
		return err
	}
	if err := w.settler.move(ctx, held.Record, record); err != nil {
		return err
	}
	if err := w.settler.state(ctx, record, []account{catalogueAccount(stated)}); err != nil {
		return err
	}
	stated.Orientation = o
	if err := tx.DescribeComponent(ctx, held.ID, componentOf(solved{channel: stated}, held.Role)); err != nil {
		return err
	}
	if o == orientationOf(held.Component) {
		return nil
	}
	return renewRoles(ctx, tx, held.Record.Code)
}

// renewRoles gives the components of a record the roles of their directions.
func renewRoles(ctx context.Context, tx *db.Tx, code string) error {
	r, _, err := tx.FindRecord(ctx, code)
	if err != nil {
		return err
	}
	renamed := map[string]string{}
	for i, role := range ingest.AssignRoles(orientationsOf(r.Components)) {
		// A direction given twice keeps the roles as they are.
		if role == "" {
			return nil
		}
		if held := r.Components[i].Role; held != role {
			renamed[held] = role
		}
	}
	return tx.SetRoles(ctx, r.ID, renamed)
}

// tooLate says where the catalogue gives a held file another unit or time step
// than the one with which it was read: its samples are not read again.
func tooLate(hints ingest.Hints, c db.HeldComponent) []string {
	const way = "ingest it into a new store (--store) to change that"
	var out []string
	if unit, err := ingest.ParseUnit(hints.Unit); err == nil && unit.Name != c.Unit {
		out = append(out, fmt.Sprintf("%s says unit %s, but the file is held as %s: %s", hints.UnitFrom, unit.Name, c.Unit, way))
	}
	if hints.StepS != 0 && math.Abs(hints.StepS-c.StepS) > 1e-3*c.StepS {
		out = append(out, fmt.Sprintf("%s says a time step of %g s, but the file is held with %g s: %s", hints.StepFrom, hints.StepS, c.StepS, way))
	}
	return out
}
