package pipeline

import (
	"context"
	"math"
	"slices"
	"time"

	"swaybook/db"
	"swaybook/ingest"
)

// asStated is what catalogue and headers state of an event, without what metadata do.
func asStated(own []db.Statement) db.Event { return takenOf(withoutMetadata(own)).event() }

func withoutMetadata(own []db.Statement) []db.Statement {
	return slices.DeleteFunc(slices.Clone(own), func(st db.Statement) bool { return st.By == db.ByMetadata })
}

// putQuakes stores that the waves of these came while a record of the event ran.
func (s *settler) putQuakes(ctx context.Context, eventID int64, quakes []ingest.CatalogueEvent) error {
	for _, e := range quakes {
		q := quakeOf(e)
		q.Came = true
		if err := s.putQuake(ctx, eventID, q); err != nil {
			return err
		}
	}
	return nil
}

// putQuake stores that q may be the event, or what is the later version of it.
func (s *settler) putQuake(ctx context.Context, eventID int64, q db.Quake) error {
	held, err := s.tx.Quakes(ctx, eventID)
	if err != nil {
		return err
	}
	for _, h := range held {
		if h.PublicID == q.PublicID {
			q, _ = laterVersion(h, q)
		}
	}
	delete(s.held, eventID)
	return s.tx.PutQuake(ctx, eventID, q)
}

// laterVersion returns the later one of two versions of a QuakeML event, q the one read
// last, and whether they lie too far apart to be one solution with some change. If they
// do not, the waves of one came as those of the other did.
func laterVersion(held, q db.Quake) (later db.Quake, moved bool) {
	later, earlier := q, held
	if !q.Created.IsZero() && held.Created.After(q.Created) {
		later, earlier = held, q
	}
	_, same := difference(&statedEvent{Event: held.Event}, &statedEvent{Event: q.Event})
	later.Code = held.Code
	later.Came = later.Came || earlier.Came && same
	return later, !same
}

// quake settles which QuakeML event an event of the store is, and states what that
// one says. The documents at hand are looked through for those that may be it; what may
// be it is kept, so that it does not matter which document comes first, or in another
// run.
func (s *settler) quake(ctx context.Context, id int64) error {
	held, err := s.tx.Quakes(ctx, id)
	if err != nil || len(held) == 0 && len(s.metadata.Events()) == 0 {
		return err
	}
	subject := db.Subject{Kind: db.SubjectEvent, ID: id}
	own, err := s.tx.Statements(ctx, subject)
	if err != nil {
		return err
	}
	as := statedEvent{Event: asStated(own)}
	if held, err = s.renewQuakes(ctx, id, held, &as); err != nil {
		return err
	}
	for _, e := range around(s.metadata.Events(), as.Origin, minuteTolerance, minuteTolerance) {
		q := quakeOf(e)
		_, same := difference(&as, &statedEvent{Event: q.Event})
		if !same || slices.ContainsFunc(held, func(h db.Quake) bool { return h.PublicID == q.PublicID }) {
			continue
		}
		if err := s.tx.PutQuake(ctx, id, q); err != nil {
			return err
		}
		held = append(held, q)
	}
	if as.EventKey, err = s.tx.EventKey(ctx, id); err != nil {
		return err
	}
	return s.stateQuake(ctx, subject, own, chosen(held, &as))
}

// shareWithdrawn tells the documents at hand of the QuakeML events that those of former
// runs withdrew, and the store of those that they withdraw.
func shareWithdrawn(ctx context.Context, tx *db.Tx, m *ingest.Metadata) error {
	held, err := tx.Withdrawn(ctx)
	if err != nil {
		return err
	}
	for id, at := range held {
		m.Withdraw(id, at)
	}
	for id, at := range m.Withdrawn() {
		if before, ok := held[id]; ok && before.Equal(at) {
			continue
		}
		if err := tx.PutWithdrawn(ctx, id, at); err != nil {
			return err
		}
	}
	return nil
}

// renewQuakes brings what may be the event up to the versions of the documents at hand,
// and forgets what was withdrawn or moved away from it.
func (s *settler) renewQuakes(ctx context.Context, id int64, held []db.Quake, as *statedEvent) ([]db.Quake, error) {
	var out []db.Quake
	for _, h := range held {
		if s.metadata.Withdraws(h.PublicID, h.Created) {
			if err := s.tx.ForgetQuake(ctx, id, h.PublicID); err != nil {
				return nil, err
			}
			continue
		}
		e, ok := s.metadata.Event(h.PublicID)
		if !ok {
			out = append(out, h)
			continue
		}
		q, moved := laterVersion(h, quakeOf(e))
		_, fits := difference(as, &statedEvent{Event: q.Event})
		if moved && !fits && !q.Came {
			if err := s.tx.ForgetQuake(ctx, id, q.PublicID); err != nil {
				return nil, err
			}
			continue
		}
		if err := s.tx.PutQuake(ctx, id, q); err != nil {
			return nil, err
		}
		out = append(out, q)
	}
	return out, nil
}

// quakeOf is a QuakeML event, which always has a time, as it is stored.
func quakeOf(e ingest.CatalogueEvent) db.Quake {
	return db.Quake{PublicID: e.PublicID, Created: e.Created, Event: *eventOf(&ingest.Channel{Event: e.Event})}
}

// chosen returns the QuakeML event that an event of the store is: the nearest to what
// is stated of it; where no time is, the first account of the earthquake whose waves came.
// It is nil where there is none.
func chosen(quakes []db.Quake, as *statedEvent) *db.Quake {
	if as.Origin.IsZero() {
		return chosenOfCame(quakes, as.EventKey.Code)
	}
	var best *db.Quake
	least := math.Inf(1)
	for i := range quakes {
		q := &quakes[i]
		if d, same := difference(as, &statedEvent{Event: q.Event}); same && (d < least || d == least && q.PublicID < best.PublicID) {
			best, least = q, d
		}
	}
	return best
}

// chosenOfCame is chosen among those whose waves came. Of several earthquakes it is the one
// that gave the event its code, else the one that is larger than the others, else the first.
func chosenOfCame(quakes []db.Quake, code string) *db.Quake {
	var came []db.Quake
	for _, q := range quakes {
		if q.Came {
			came = append(came, q)
		}
	}
	all := earthquakes(came)
	if len(all) == 0 {
		return nil
	}
	at := slices.IndexFunc(all, func(one []int) bool {
		return slices.ContainsFunc(one, func(i int) bool { return came[i].Code == code })
	})
	if at < 0 {
		at = max(0, largest(all, func(i int) *float64 { return came[i].Magnitude }))
	}
	return &came[all[at][0]]
}

// stateQuake makes the statements of metadata those of q, nil for none.
func (s *settler) stateQuake(ctx context.Context, of db.Subject, own []db.Statement, q *db.Quake) error {
	var say []db.Statement
	if q != nil {
		say = quakeAccount(q).statements(db.RecordKey{EventID: of.ID})
	}
	for _, st := range own {
		isSaid := func(other db.Statement) bool { return other.Attribute == st.Attribute }
		if st.By != db.ByMetadata || slices.ContainsFunc(say, isSaid) {
			continue
		}
		if _, err := s.tx.Unstate(ctx, of, st.Attribute, db.ByMetadata); err != nil {
			return err
		}
		s.touched[of] = true
	}
	for _, st := range say {
		if slices.Contains(own, st) {
			continue
		}
		if _, err := s.tx.State(ctx, st); err != nil {
			return err
		}
		s.touched[of] = true
	}
	return nil
}

// quakeAccount is what a QuakeML event says.
func quakeAccount(q *db.Quake) account {
	return account{by: db.ByMetadata, source: q.PublicID, scheme: schemeOfQuakes(q.PublicID), channel: ingest.Channel{Event: ingest.Event{
		ID: q.PublicID, Name: q.Name, Origin: q.Origin, Latitude: number(q.LatitudeDeg), Longitude: number(q.LongitudeDeg),
		DepthKM: number(q.DepthKM), Magnitude: number(q.Magnitude), MagnitudeType: q.MagnitudeType,
	}}}
}

// around returns the events from before at to after it.
func around(events []ingest.CatalogueEvent, at time.Time, before, after time.Duration) []ingest.CatalogueEvent {
	from, _ := slices.BinarySearchFunc(events, at.Add(-before), func(e ingest.CatalogueEvent, t time.Time) int { return e.Origin.Compare(t) })
	to := from
	for to < len(events) && !events[to].Origin.After(at.Add(after)) {
		to++
	}
	return events[from:to]
}

func statedOf(e ingest.Event) statedEvent {
	return statedEvent{Event: db.Event{
		Origin: e.Origin, LatitudeDeg: pointer(e.Latitude), LongitudeDeg: pointer(e.Longitude), Magnitude: pointer(e.Magnitude),
	}}
}
