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
	quakes   []ingest.CatalogueEvent // of the documents of this run, by time
	seen     map[int64]bool          // events of which files were seen
	touched  map[db.Subject]bool
	settled  map[db.Subject]bool // together with others
	comparer likeness.Comparer
}

func newSettler(tx *db.Tx, known map[db.Statement]string, quakes []ingest.CatalogueEvent) *settler {
	return &settler{tx: tx, known: known, quakes: quakes, seen: map[int64]bool{}, touched: map[db.Subject]bool{}, settled: map[db.Subject]bool{}}
}

// state keeps what the accounts say of a record, its event and its station.
func (s *settler) state(ctx context.Context, k db.RecordKey, accounts []account) error {
	if k.EventID != 0 {
		s.seen[k.EventID] = true
	}
	for _, a := range accounts {
		if a.quake != nil && k.EventID != 0 {
			q := quakeOf(*a.quake)
			q.Came = true
			if err := s.tx.PutQuake(ctx, k.EventID, q); err != nil {
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
	}
	return nil
}

// distinguish gives a channel whose event has no code but its origin time another
// one where that is held by an earthquake of another place or size: its time with a
// number.
func (s *settler) distinguish(ctx context.Context, c *ingest.Channel) error {
	code := ingest.EventCode(c)
	if c.Event.ID != "" || c.Event.Origin.IsZero() {
		return nil
	}
	mine := statedOf(c.Event)
	for n := 2; ; n++ {
		held, ok, err := s.tx.FindEvent(ctx, code)
		if err != nil || !ok {
			return err
		}
		own, err := s.tx.Statements(ctx, db.Subject{Kind: db.SubjectEvent, ID: held.ID})
		if err != nil {
			return err
		}
		if other := stated(held, own); !contradict(&mine, &other) {
			return nil
		}
		code = fmt.Sprintf("%s-%d", ingest.EventCode(&ingest.Channel{Event: ingest.Event{Origin: c.Event.Origin}}), n)
		c.Event.ID = code
	}
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
		}
		if err := s.tx.CopyStatements(ctx, db.Subject{Kind: m.kind, ID: m.from}, subject); err != nil {
			return err
		}
		s.touched[subject] = true
		s.touched[db.Subject{Kind: m.kind, ID: m.from}] = true
	}
	return nil
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
	events, statements, err := s.neighbours(ctx, id)
	if err != nil {
		return err
	}
	stands := associate(events)
	for i := range events {
		var all []db.Statement
		for j := range events {
			if stands[j] == stands[i] {
				all = append(all, statements[j]...)
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

// neighbours returns the event and all that are connected with it: by an
// identifier, by having stood for one another, or by own origin times within the
// tolerance of one another; each by its own statements.
func (s *settler) neighbours(ctx context.Context, id int64) (events []statedEvent, statements [][]db.Statement, err error) {
	seen := map[int64]bool{}
	add := func(keys []db.EventKey, err error) error {
		for _, k := range keys {
			if err != nil || seen[k.ID] {
				continue
			}
			seen[k.ID] = true
			var own []db.Statement
			if own, err = s.tx.Statements(ctx, db.Subject{Kind: db.SubjectEvent, ID: k.ID}); err == nil {
				events, statements = append(events, stated(k, own)), append(statements, own)
			}
		}
		return err
	}
	if err := add(s.tx.EventsAlike(ctx, id)); err != nil {
		return nil, nil, err
	}
	for i := 0; i < len(events); i++ { // add appends
		if at := events[i].Origin; !at.IsZero() {
			if err := add(s.tx.EventsWithin(ctx, at.Add(-minuteTolerance), at.Add(minuteTolerance))); err != nil {
				return nil, nil, err
			}
		}
		if err := add(s.tx.EventsAlike(ctx, events[i].ID)); err != nil {
			return nil, nil, err
		}
	}
	return events, statements, nil
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
