package pipeline

import (
	"context"
	"fmt"
	"math"
	"slices"
	"time"

	"swaybook/db"
	"swaybook/ingest"
)

// The velocities between which the strong part of a ground motion travels, in km/s:
// that of P waves in the crust and upper mantle is below the first, surface waves are
// slower than S waves, but not than the second.
//
// No source defines them; they are common practice.
const (
	fastestKMS = 8.0
	slowestKMS = 2.5
)

// metadataAccounts are what StationXML and QuakeML say of a channel of so many
// samples. A channel that states no origin time may be of the QuakeML event whose waves
// came while it recorded. Of any other, the QuakeML event is found by what all its files
// state (settler.quake). doubt says why none of several was taken.
func metadataAccounts(m *ingest.Metadata, c *ingest.Channel, samples int) (accounts []account, doubt string) {
	if m.IsEmpty() {
		return nil, ""
	}
	said := account{by: db.ByMetadata, source: "metadata"}
	station, ok := m.Station(c)
	said.channel.Station = station
	if c.Event.Origin.IsZero() {
		came := arriving(m.Events(), c, samples, station)
		switch {
		case len(came) == 1:
			ok, said.quake = true, &came[0]
		case len(came) > 1:
			doubt = fmt.Sprintf("the waves of %d QuakeML events came while it recorded, none of which is taken: %s", len(came), namesOf(came))
		}
	}
	if !ok {
		return nil, doubt
	}
	return []account{said}, doubt
}

// quakeIn returns the QuakeML event whose waves came, nil for none.
func quakeIn(accounts []account) *ingest.CatalogueEvent {
	for _, a := range accounts {
		if a.quake != nil {
			return a.quake
		}
	}
	return nil
}

// namesOf names the first of several events.
func namesOf(events []ingest.CatalogueEvent) string {
	const most = 4
	var out string
	for i, e := range events {
		if i == most {
			return out + ", …"
		}
		if i > 0 {
			out += ", "
		}
		out += fmt.Sprintf("%.80s (%s)", e.PublicID, e.Origin.UTC().Format("2006-01-02T15:04:05Z"))
	}
	return out
}

// isWithoutEvent reports whether a channel says nothing of its earthquake.
func isWithoutEvent(c *ingest.Channel) bool {
	return c.Event.ID == "" && c.Event.Name == "" && c.Event.Origin.IsZero()
}

// asStated is what catalogue and headers state of an event, without what metadata do.
func asStated(own []db.Statement) db.Event { return takenOf(withoutMetadata(own)).event() }

func withoutMetadata(own []db.Statement) []db.Statement {
	return slices.DeleteFunc(slices.Clone(own), func(st db.Statement) bool { return st.By == db.ByMetadata })
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
// is stated of it; where no time is, of those whose waves came the one that gave the
// event its code, or else the first. It is nil where there is none.
func chosen(quakes []db.Quake, as *statedEvent) *db.Quake {
	var best *db.Quake
	least := math.Inf(1)
	for i := range quakes {
		q := &quakes[i]
		d, same := difference(as, &statedEvent{Event: q.Event})
		if as.Origin.IsZero() {
			d, same = 1, q.Came
			if q.Code == as.EventKey.Code {
				d = 0
			}
		}
		if same && (d < least || d == least && q.PublicID < best.PublicID) {
			best, least = q, d
		}
	}
	return best
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
	return account{by: db.ByMetadata, source: q.PublicID, scheme: "metadata", channel: ingest.Channel{Event: ingest.Event{
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

// furthestKM is how far an earthquake is looked for: beyond, strong-motion
// instruments record few, and their waves take longer than the windows of records.
const furthestKM = 1000

// arriving returns the events the waves of which came between the first and the last
// sample of the channel, by time. Of several, nothing says which.
func arriving(events []ingest.CatalogueEvent, c *ingest.Channel, samples int, station ingest.Station) []ingest.CatalogueEvent {
	lat, lon := c.Station.Latitude.Or(station.Latitude), c.Station.Longitude.Or(station.Longitude)
	if c.Start.IsZero() || !lat.Known || !lon.Known {
		return nil
	}
	end := c.Start.Add(seconds(float64(samples-1) * c.StepS))
	var came []ingest.CatalogueEvent
	for _, e := range around(events, c.Start, seconds(furthestKM/slowestKMS), end.Sub(c.Start)) {
		depth := e.DepthKM.Value
		km := math.Hypot(epicentralKM(lat.Value, lon.Value, e.Latitude.Value, e.Longitude.Value), depth)
		first, last := e.Origin.Add(seconds(km/fastestKMS)), e.Origin.Add(seconds(km/slowestKMS))
		if km <= furthestKM && !last.Before(c.Start) && !first.After(end) {
			came = append(came, e)
		}
	}
	return came
}

func seconds(s float64) time.Duration { return time.Duration(s * float64(time.Second)) }
