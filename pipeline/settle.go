package pipeline

import (
	"context"
	"fmt"
	"maps"
	"slices"

	"swaybook/db"
	"swaybook/ingest"
	"swaybook/pipeline/likeness"
)

// settler keeps what is stated and brings what is taken of it up to date, within
// one transaction. What it takes depends on the statements alone, not on the order
// in which they came.
type settler struct {
	tx       *db.Tx
	known    map[db.Statement]string // what was stated before, without its source: the least of those
	metadata *ingest.Metadata        // of this run
	seen     map[int64]bool          // events of which files were seen
	touched  map[db.Subject]bool
	settled  map[db.Subject]bool  // together with others
	held     map[int64]*heldEvent // events to which channels may belong
	read     map[int64]*ownEvent  // events as they are settled
	comparer likeness.Comparer
}

func newSettler(tx *db.Tx, known map[db.Statement]string, metadata *ingest.Metadata) *settler {
	return &settler{tx: tx, known: known, metadata: metadata, seen: map[int64]bool{}, touched: map[db.Subject]bool{}, settled: map[db.Subject]bool{},
		held: map[int64]*heldEvent{}, read: map[int64]*ownEvent{}}
}

// state keeps what the accounts say of a record, its event and its station.
func (s *settler) state(ctx context.Context, k db.RecordKey, accounts []account) error {
	if k.EventID != 0 {
		s.seen[k.EventID] = true
	}
	for _, a := range accounts {
		if k.EventID != 0 {
			if err := s.putQuakes(ctx, k.EventID, a.quakes); err != nil {
				return err
			}
		}
		for _, st := range a.statements(k) {
			if err := s.stateOne(ctx, st); err != nil {
				return err
			}
		}
	}
	s.touched[db.Subject{Kind: db.SubjectRecord, ID: k.ID}] = true
	return nil
}

// stateOne keeps one statement. Most files of an event or a station repeat what
// another one said; of equal statements the source first by name stays.
func (s *settler) stateOne(ctx context.Context, st db.Statement) error {
	key := st
	key.Source = ""
	shared := st.Kind != db.SubjectRecord
	if source, ok := s.known[key]; shared && ok && source <= st.Source {
		return nil
	}
	isNew, err := s.tx.State(ctx, st)
	if err != nil {
		return err
	}
	if shared {
		s.known[key] = st.Source
	}
	if isNew {
		s.touched[st.Subject] = true
		if st.Kind == db.SubjectEvent {
			delete(s.held, st.ID)
		}
	}
	return nil
}

// distinguish gives a channel another code of its event, the code with a number, where
// that is held by another earthquake: where it is made of the origin time, where it is
// that of the QuakeML event q, nil for none, and where a QuakeML event gave it to what is
// held. Authorities number their events alike, and earthquakes share a second.
func (s *settler) distinguish(ctx context.Context, c *ingest.Channel, q *ingest.CatalogueEvent) error {
	mine := statedOf(c.Event)
	switch {
	case q != nil:
		return s.number(ctx, c, func(held *heldEvent) bool { return held.isQuake(q.PublicID, &mine) })
	case c.Event.ID != "":
		first := ingest.EventCode(c)
		return s.number(ctx, c, func(held *heldEvent) bool { return !held.isCodeOfQuake(first) || agree(&held.statedEvent, &mine) })
	case !c.Event.Origin.IsZero():
		return s.number(ctx, c, func(held *heldEvent) bool { return !contradict(&held.statedEvent, &mine) })
	}
	return nil
}

// number gives the channel the first code, its own or that with a number, which no
// event has or one that is its.
func (s *settler) number(ctx context.Context, c *ingest.Channel, isIts func(*heldEvent) bool) error {
	first := ingest.EventCode(c)
	for n := 2; ; n++ {
		held, err := s.ofCode(ctx, ingest.EventCode(c))
		if err != nil || held == nil || isIts(held) {
			return err
		}
		c.Event.ID = fmt.Sprintf("%s-%d", first, n)
	}
}

// heldEvent is an event by what catalogue and headers state of it or, where they state
// no time, by the QuakeML event that it is.
type heldEvent struct {
	statedEvent
	came []db.Quake // the QuakeML events it may be, where neither catalogue nor headers state a time
}

// isQuake reports whether the event is that QuakeML event, of which mine is stated.
func (e *heldEvent) isQuake(publicID string, mine *statedEvent) bool {
	if len(e.came) > 0 {
		return slices.ContainsFunc(e.came, func(q db.Quake) bool { return q.PublicID == publicID })
	}
	return agree(&e.statedEvent, mine)
}

// isCodeOfQuake reports whether the event has its code, which was this one before it got
// a number, of a QuakeML event alone.
func (e *heldEvent) isCodeOfQuake(first string) bool {
	return len(e.identifiers) == 0 && slices.ContainsFunc(e.came, func(q db.Quake) bool { return q.Code == first })
}

// agree reports whether two events of one code are the same: by time, place and
// magnitude, or by the latter as far as both are stated where one has no time.
func agree(a, b *statedEvent) bool {
	if a.Origin.IsZero() || b.Origin.IsZero() {
		return !contradict(a, b)
	}
	_, same := difference(a, b)
	return same
}

// ofCode returns the event of this code, nil where there is none. What is stated of it
// is read once until more is.
func (s *settler) ofCode(ctx context.Context, code string) (*heldEvent, error) {
	key, ok, err := s.tx.FindEvent(ctx, code)
	if err != nil || !ok {
		return nil, err
	}
	if e := s.held[key.ID]; e != nil {
		return e, nil
	}
	own, err := s.tx.Statements(ctx, db.Subject{Kind: db.SubjectEvent, ID: key.ID})
	if err != nil {
		return nil, err
	}
	e := &heldEvent{statedEvent: stated(key, withoutMetadata(own))}
	if e.Origin.IsZero() {
		if e.came, err = s.tx.Quakes(ctx, key.ID); err != nil {
			return nil, err
		}
		if q := chosen(e.came, &e.statedEvent); q != nil {
			e.Origin = q.Origin
			e.complete(&q.Event)
		}
	}
	s.held[key.ID] = e
	return e, nil
}

// complete takes the place and the magnitude of q where e has none.
func (e *statedEvent) complete(q *db.Event) {
	if e.LatitudeDeg == nil {
		e.LatitudeDeg, e.LongitudeDeg = q.LatitudeDeg, q.LongitudeDeg
	}
	if e.Magnitude == nil {
		e.Magnitude = q.Magnitude
	}
}

// settle brings events, then stations, then records up to date.
func (s *settler) settle(ctx context.Context) error {
	for _, id := range slices.Sorted(maps.Keys(s.seen)) {
		if err := s.quake(ctx, id); err != nil {
			return err
		}
	}
	steps := []struct {
		kind string
		do   func(context.Context, int64) error
	}{{db.SubjectEvent, s.event}, {db.SubjectStation, s.station}, {db.SubjectRecord, s.record}, {db.SubjectRecord, s.versions}}
	for _, step := range steps {
		for _, id := range s.ofKind(step.kind) {
			if s.settled[db.Subject{Kind: step.kind, ID: id}] {
				continue
			}
			if err := step.do(ctx, id); err != nil {
				return err
			}
		}
	}
	return nil
}

// ofKind returns the ids of the touched subjects of a kind, in order.
func (s *settler) ofKind(kind string) []int64 {
	var ids []int64
	for t := range s.touched {
		if t.Kind == kind {
			ids = append(ids, t.ID)
		}
	}
	slices.Sort(ids)
	return ids
}

// event settles the event and all that may be the same earthquake.
func (s *settler) event(ctx context.Context, id int64) error {
	found, err := s.neighbours(ctx, id)
	if err != nil {
		return err
	}
	events := make([]statedEvent, len(found))
	for i, e := range found {
		events[i] = e.statedEvent
	}
	stands := associate(events)
	for i := range events {
		var all []db.Statement
		for j := range events {
			if stands[j] == stands[i] {
				all = append(all, found[j].statements...)
			}
		}
		db.SortStatements(all)
		s.settled[db.Subject{Kind: db.SubjectEvent, ID: events[i].ID}] = true
		changed, err := s.tx.SetEvent(ctx, events[i].ID, events[stands[i]].ID, events[i].Origin, takenOf(all).event())
		if err != nil {
			return err
		}
		if err := s.touchRecords(ctx, db.Subject{Kind: db.SubjectEvent, ID: events[i].ID}, changed); err != nil {
			return err
		}
	}
	return nil
}

// ownEvent is an event with its own statements.
type ownEvent struct {
	statedEvent
	statements []db.Statement
}

// neighbours returns the event and all that are connected with it, each by its own
// statements: by having stood for one another, or by being the same earthquake by what
// both state. What associate says of an event depends on no others.
func (s *settler) neighbours(ctx context.Context, id int64) ([]*ownEvent, error) {
	var out []*ownEvent
	seen := map[int64]bool{}
	add := func(keys []db.EventKey, beside *ownEvent) error {
		for _, k := range keys {
			if seen[k.ID] {
				continue
			}
			e, err := s.own(ctx, k)
			if err != nil {
				return err
			}
			if beside != nil {
				if _, same := difference(&beside.statedEvent, &e.statedEvent); !same {
					continue
				}
			}
			seen[k.ID] = true
			out = append(out, e)
		}
		return nil
	}
	alike, err := s.tx.EventsAlike(ctx, id)
	if err == nil {
		err = add(alike, nil)
	}
	for i := 0; err == nil && i < len(out); i++ { // add appends
		if at := out[i].Origin; !at.IsZero() {
			var near []db.EventKey
			if near, err = s.tx.EventsWithin(ctx, at.Add(-minuteTolerance), at.Add(minuteTolerance)); err == nil {
				err = add(near, out[i])
			}
		}
		if err == nil {
			if alike, err = s.tx.EventsAlike(ctx, out[i].ID); err == nil {
				err = add(alike, nil)
			}
		}
	}
	return out, err
}

// own reads an event by its own statements, once: none comes while events are settled.
func (s *settler) own(ctx context.Context, k db.EventKey) (*ownEvent, error) {
	if e, ok := s.read[k.ID]; ok {
		return e, nil
	}
	statements, err := s.tx.Statements(ctx, db.Subject{Kind: db.SubjectEvent, ID: k.ID})
	if err != nil {
		return nil, err
	}
	s.read[k.ID] = &ownEvent{stated(k, statements), statements}
	return s.read[k.ID], nil
}

// stated is an event by its own statements.
func stated(k db.EventKey, own []db.Statement) statedEvent {
	e := statedEvent{EventKey: k, Event: takenOf(own).event()}
	for _, st := range own {
		if st.Attribute == db.AttributeIdentifier {
			e.identifiers = append(e.identifiers, st.Value)
		}
	}
	return e
}

func (s *settler) station(ctx context.Context, id int64) error {
	subject := db.Subject{Kind: db.SubjectStation, ID: id}
	statements, err := s.tx.Statements(ctx, subject)
	if err != nil {
		return err
	}
	changed, err := s.tx.SetStation(ctx, id, takenOf(statements).station())
	if err != nil {
		return err
	}
	return s.touchRecords(ctx, subject, changed)
}

// touchRecords marks the records of a subject that changed.
func (s *settler) touchRecords(ctx context.Context, of db.Subject, changed bool) error {
	if !changed {
		return nil
	}
	places, err := s.tx.Places(ctx, of)
	for _, p := range places {
		s.touched[db.Subject{Kind: db.SubjectRecord, ID: p.RecordID}] = true
	}
	return err
}

// record computes the distances that follow from coordinates, and takes the best.
func (s *settler) record(ctx context.Context, id int64) error {
	subject := db.Subject{Kind: db.SubjectRecord, ID: id}
	places, err := s.tx.Places(ctx, subject)
	if err != nil {
		return err
	}
	for _, p := range places {
		if err := s.compute(ctx, subject, computedDistances(p)); err != nil {
			return err
		}
	}
	statements, err := s.tx.Statements(ctx, subject)
	if err != nil {
		return err
	}
	return s.tx.SetDistances(ctx, id, distancesOf(statements))
}

// compute states the distances that follow and forgets those that no longer do.
func (s *settler) compute(ctx context.Context, record db.Subject, follow []db.Statement) error {
	for _, attribute := range []string{db.AttributeEpicentral, db.AttributeHypocentral} {
		at := slices.IndexFunc(follow, func(st db.Statement) bool { return st.Attribute == attribute })
		var err error
		if at < 0 {
			_, err = s.tx.Unstate(ctx, record, attribute, db.ByComputed)
		} else {
			st := follow[at]
			st.Subject, st.By, st.Source = record, db.ByComputed, "coordinates"
			_, err = s.tx.State(ctx, st)
		}
		if err != nil {
			return err
		}
	}
	return nil
}
