package pipeline

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"slices"

	"swaybook/db"
	"swaybook/ingest"
)

// describeHeld applies metadata and catalogue to what the store holds of a file's
// content: nothing is read again, but what they say of it counts. It warns of what
// can no longer be changed.
func (w *writer) describeHeld(ctx context.Context, tx *db.Tx, res result, report *FileReport) error {
	if w.opts.Catalogue == nil && w.opts.Hints.Metadata.IsEmpty() && len(res.channels) == 0 {
		return nil
	}
	components, err := tx.ComponentsOf(ctx, res.source.SHA256)
	if err != nil {
		return err
	}
	for _, held := range components {
		c := channelOf(held)
		if err := w.describeByMetadata(ctx, tx, held, c, res.source.Path); err != nil {
			return err
		}
		stated, matched := w.catalogueOf(res, held, &c)
		if matched {
			// A code that the catalogue gives may be another earthquake's.
			if e := held.Record.Event; e == nil || e.OwnCode != c.Event.ID {
				if err := w.settler.distinguish(ctx, &c, nil); err != nil {
					return err
				}
				stated.Event.ID = ingest.EventCode(&c)
			}
			if err := w.redescribe(ctx, tx, held, c.Orientation, stated, res.source.Path); err != nil {
				return err
			}
		}
		if w.opts.Catalogue != nil {
			report.Warnings = append(report.Warnings, tooLate(w.opts.Catalogue.Hints(res.rel, ingest.Hints{}), held)...)
		}
	}
	return nil
}

// catalogueOf is what the catalogue says of a held component of the file, which is c. Of
// shards it is written down with the file.
func (w *writer) catalogueOf(res result, held db.HeldComponent, c *ingest.Channel) (stated ingest.Stated, matched bool) {
	if w.opts.Catalogue != nil {
		return w.opts.Catalogue.Apply(res.rel, c)
	}
	for _, s := range res.channels {
		if s.channel.Line == held.SourceLine && s.channel.ChannelCode == held.Channel {
			c.Event, c.Orientation = s.channel.Event, s.channel.Orientation
			return s.stated, s.matched
		}
	}
	return stated, false
}

// describeByMetadata stores what metadata state of a held component, which is c. What
// they have stated of its earthquake before is no reason to take it for known.
func (w *writer) describeByMetadata(ctx context.Context, tx *db.Tx, held db.HeldComponent, c ingest.Channel, path string) error {
	key := db.RecordKey{ID: held.RecordID, EventID: held.Record.EventID, StationID: held.Record.StationID}
	if w.opts.Hints.Metadata.IsEmpty() {
		return w.settler.state(ctx, key, nil)
	}
	own, err := tx.Statements(ctx, db.Subject{Kind: db.SubjectEvent, ID: key.EventID})
	if err != nil {
		return err
	}
	c.Event.Origin = asStated(own).Origin
	quakes, err := tx.Quakes(ctx, key.EventID)
	if err != nil {
		return err
	}
	accounts, _, doubt := metadataAccounts(w.opts.Hints.Metadata, withHeld(w.opts.Hints.Metadata, quakes), &c, held.Samples)
	w.doubt(path, doubt, held.RecordID)
	if q := quakeIn(accounts); q != nil && len(withoutMetadata(own)) == 0 && isOfAnother(c.Event.ID, quakes, accounts) {
		if key, err = w.moveToQuake(ctx, tx, held, c, q); err != nil {
			return err
		}
	}
	return w.settler.state(ctx, key, accounts)
}

// withHeld are the events of the documents at hand and those whose waves came by documents
// of former runs, by time.
func withHeld(m *ingest.Metadata, held []db.Quake) []ingest.CatalogueEvent {
	out := slices.Clip(m.Events())
	for i, h := range held {
		if _, ok := m.Event(h.PublicID); ok || !h.Came || m.Withdraws(h.PublicID, h.Created) {
			continue
		}
		e := ingest.CatalogueEvent{PublicID: h.PublicID, Created: h.Created, Event: quakeAccount(&held[i]).channel.Event}
		e.ID = h.Code
		out = append(out, e)
	}
	if len(out) == len(m.Events()) {
		return out
	}
	slices.SortFunc(out, func(a, b ingest.CatalogueEvent) int {
		return cmp.Or(a.Origin.Compare(b.Origin), cmp.Compare(a.PublicID, b.PublicID))
	})
	return out
}

// isOfAnother reports whether an event has its code of a QuakeML event that is not among
// those of the accounts: of another earthquake.
func isOfAnother(code string, held []db.Quake, accounts []account) bool {
	return slices.ContainsFunc(held, func(h db.Quake) bool {
		return h.Code == code && !slices.ContainsFunc(accounts, func(a account) bool {
			return slices.ContainsFunc(a.quakes, func(q ingest.CatalogueEvent) bool { return q.PublicID == h.PublicID })
		})
	})
}

// moveToQuake gives a held record, of channel c, the QuakeML event q for its event.
func (w *writer) moveToQuake(ctx context.Context, tx *db.Tx, held db.HeldComponent, c ingest.Channel, q *ingest.CatalogueEvent) (db.RecordKey, error) {
	c.Event = q.Event
	if err := w.settler.distinguish(ctx, &c, q); err != nil {
		return db.RecordKey{}, err
	}
	w.settler.touched[db.Subject{Kind: db.SubjectEvent, ID: held.Record.EventID}] = true
	return tx.PutRecord(ctx, recordOf(c, held.Record.Code), true)
}

// redescribe stores what the catalogue states of a held component of a file.
func (w *writer) redescribe(ctx context.Context, tx *db.Tx, held db.HeldComponent, o ingest.Orientation, stated ingest.Stated, path string) error {
	record, err := tx.PutRecord(ctx, recordOf(stated.Channel, held.Record.Code), true)
	if err != nil {
		return err
	}
	if err := w.settler.move(ctx, held.Record, record); err != nil {
		return err
	}
	if err := w.settler.restate(ctx, record, catalogueAccounts(stated, path), path); err != nil {
		return err
	}
	stated.Orientation = o
	if err := tx.DescribeComponent(ctx, held.ID, componentOf(solved{channel: stated.Channel}, held.Role)); err != nil {
		return err
	}
	if o == orientationOf(held.Component) {
		return nil
	}
	return renewRoles(ctx, tx, held.Record.Code)
}

// move takes what headers and metadata said of a held record's event and station
// along to those that the catalogue gives it instead.
func (s *settler) move(ctx context.Context, held *db.Record, to db.RecordKey) error {
	for _, m := range []struct {
		kind     string
		from, to int64
	}{{db.SubjectEvent, held.EventID, to.EventID}, {db.SubjectStation, held.StationID, to.StationID}} {
		if m.from == m.to || m.from == 0 || m.to == 0 {
			continue
		}
		subject := db.Subject{Kind: m.kind, ID: m.to}
		if m.kind == db.SubjectEvent {
			if err := s.tx.CopyQuakes(ctx, m.from, m.to); err != nil {
				return err
			}
			s.seen[m.to] = true
			delete(s.held, m.to)
		}
		if err := s.tx.CopyStatements(ctx, db.Subject{Kind: m.kind, ID: m.from}, subject); err != nil {
			return err
		}
		s.touched[subject] = true
		s.touched[db.Subject{Kind: m.kind, ID: m.from}] = true
	}
	return nil
}

// restate keeps what the accounts of a catalogue say of a record of a file that is
// held, in place of what a catalogue said of that file before.
func (s *settler) restate(ctx context.Context, k db.RecordKey, accounts []account, file string) error {
	if err := s.state(ctx, k, accounts); err != nil {
		return err
	}
	var now []db.Statement
	for _, a := range accounts {
		now = append(now, a.statements(k)...)
	}
	superseded, err := s.tx.Supersede(ctx, file, now)
	for _, st := range superseded {
		s.touched[st.Subject] = true
		st.Source = ""
		delete(s.known, st)
		if st.Kind == db.SubjectEvent {
			delete(s.held, st.ID)
		}
	}
	return err
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
