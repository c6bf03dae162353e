package ingest

import (
	"cmp"
	"fmt"
	"maps"
	"slices"
	"strconv"
	"strings"
	"time"

	"swaybook/ingest/fdsnxml"
)

// CatalogueEvent is an event of a QuakeML document.
type CatalogueEvent struct {
	Event
	// PublicID is the document's own identifier, unique in the world, or made of time
	// and place where it states none.
	PublicID string
	// Created is when this version of it came about, zero where the document does not say.
	Created time.Time
}

// Supersedes reports whether e is a later version than another of the same event that
// was read after it: where both say when they came about. Else the last read is taken.
func (e *CatalogueEvent) Supersedes(next *CatalogueEvent) bool {
	return isLater(e.Created, next.Created)
}

// isLater reports whether both instants are known and a is the later one.
func isLater(a, b time.Time) bool { return !b.IsZero() && a.After(b) }

// quakes are the events of the documents, by public identifier.
type quakes struct {
	versions map[string]CatalogueEvent
	// withdrawn is when it was said last that there was no such event, or zero where one
	// who said so did not say when.
	withdrawn map[string]time.Time
	ordered   []CatalogueEvent // those that stand, nil after a change
}

// put keeps the later version.
func (q *quakes) put(e CatalogueEvent) {
	if q.versions == nil {
		q.versions = map[string]CatalogueEvent{}
	}
	if held, ok := q.versions[e.PublicID]; !ok || !held.Supersedes(&e) {
		q.versions[e.PublicID] = e
	}
}

func (q *quakes) withdraw(publicID string, at time.Time) {
	if q.withdrawn == nil {
		q.withdrawn = map[string]time.Time{}
	}
	if held, ok := q.withdrawn[publicID]; !ok || at.IsZero() || isLater(at, held) {
		q.withdrawn[publicID] = at
	}
}

// withdraws reports whether a version of that time does not stand: it was said that there
// was no such event, and this one does not say that it is later. So the order in which the
// two are read does not matter.
func (q *quakes) withdraws(publicID string, created time.Time) bool {
	at, ok := q.withdrawn[publicID]
	return ok && !isLater(created, at)
}

// addEvents keeps the events of a document. Of an event that is there already the later
// version stays.
func (m *Metadata) addEvents(path string, events []fdsnxml.Event) {
	m.ordering.Lock()
	defer m.ordering.Unlock()
	for i := range events {
		if events[i].Withdrawn {
			m.quakes.withdraw(events[i].PublicID, events[i].Created)
			continue
		}
		e, doubts := catalogueEvent(&events[i])
		for _, d := range doubts {
			m.notes = append(m.notes, MetadataNote{path, events[i].Line, fmt.Sprintf("event %.80s: %s", e.PublicID, d)})
		}
		m.quakes.put(e)
	}
	m.quakes.ordered = nil
}

// Tell adds events as Events returned them. Of one that is there already the later version
// stays.
func (m *Metadata) Tell(events []CatalogueEvent) {
	m.ordering.Lock()
	defer m.ordering.Unlock()
	for _, e := range events {
		m.quakes.put(e)
	}
	m.quakes.ordered = nil
}

// saysNoEvents reports whether there are none, nor any that were withdrawn.
func (m *Metadata) saysNoEvents() bool {
	m.ordering.Lock()
	defer m.ordering.Unlock()
	return len(m.quakes.versions)+len(m.quakes.withdrawn) == 0
}

// Events returns the events in the order of their origin times, without those that
// were withdrawn. The caller must not change them.
func (m *Metadata) Events() []CatalogueEvent {
	if m == nil {
		return nil
	}
	m.ordering.Lock()
	defer m.ordering.Unlock()
	q := &m.quakes
	if q.ordered != nil {
		return q.ordered
	}
	q.ordered = make([]CatalogueEvent, 0, len(q.versions))
	for id, e := range q.versions {
		if !q.withdraws(id, e.Created) {
			q.ordered = append(q.ordered, e)
		}
	}
	slices.SortFunc(q.ordered, func(a, b CatalogueEvent) int {
		return cmp.Or(a.Origin.Compare(b.Origin), cmp.Compare(a.PublicID, b.PublicID))
	})
	return q.ordered
}

// Event returns the event with this public identifier, unless it was withdrawn.
func (m *Metadata) Event(publicID string) (e CatalogueEvent, ok bool) {
	if m == nil {
		return e, false
	}
	m.ordering.Lock()
	defer m.ordering.Unlock()
	e, ok = m.quakes.versions[publicID]
	if !ok || m.quakes.withdraws(publicID, e.Created) {
		return CatalogueEvent{}, false
	}
	return e, true
}

// Withdraws reports whether a document says that there was no such event, of which
// somebody had a version that came about at created, zero where that is not known.
func (m *Metadata) Withdraws(publicID string, created time.Time) bool {
	if m == nil {
		return false
	}
	m.ordering.Lock()
	defer m.ordering.Unlock()
	return m.quakes.withdraws(publicID, created)
}

// Withdrawn returns the public identifiers of the events that were withdrawn, and when it
// was said last, zero where that is not known.
func (m *Metadata) Withdrawn() map[string]time.Time {
	m.ordering.Lock()
	defer m.ordering.Unlock()
	return maps.Clone(m.quakes.withdrawn)
}

// Withdraw notes that an event was withdrawn, as documents of a former run said.
func (m *Metadata) Withdraw(publicID string, at time.Time) {
	m.ordering.Lock()
	defer m.ordering.Unlock()
	m.quakes.withdraw(publicID, at)
	m.quakes.ordered = nil
}

// catalogueEvent returns the event as it is used, and what is doubtful of it: it is
// held to the limits that headers are.
func catalogueEvent(e *fdsnxml.Event) (out CatalogueEvent, doubts []string) {
	out.PublicID, out.Created = orElse(e.PublicID, placeID(e)), e.Created
	c := Channel{Event: Event{
		ID: orElse(e.Code, lastOfID(out.PublicID)), Name: e.Name, Origin: e.Origin,
		Latitude: Known(e.Latitude), Longitude: Known(e.Longitude), MagnitudeType: e.MagnitudeType, Magnitude: Number(e.Magnitude),
	}}
	if e.DepthM.Known {
		c.Event.DepthKM = Known(e.DepthM.Value / 1000)
	}
	dropImplausible(&c)
	out.Event = c.Event
	return out, append(slices.Clip(e.Warnings), c.Warnings...)
}

// placeID is the identifier of an event that states none: time and place, so that
// it is the same in every document.
func placeID(e *fdsnxml.Event) string {
	degrees := func(v float64) string { return strconv.FormatFloat(v, 'f', -1, 64) }
	return e.Origin.Format("20060102T150405.999Z") + "_" + degrees(e.Latitude) + "_" + degrees(e.Longitude)
}

// lastOfID is the part of a public identifier that names the event: the value of
// eventid where it is a query, else what follows the last slash or number sign.
func lastOfID(id string) string {
	if _, query, ok := strings.Cut(id, "eventid="); ok {
		code, _, _ := strings.Cut(query, "&")
		return code
	}
	return id[strings.LastIndexAny(id, "/#")+1:]
}
