package ingest

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"sync"
	"time"

	"swaybook/ingest/fdsnxml"
)

// Metadata is what StationXML and QuakeML documents say of channels, stations
// and events. Its methods may be called from several goroutines at once, those
// that add excepted.
type Metadata struct {
	inventory fdsnxml.Inventory
	notes     []MetadataNote

	ordering sync.Mutex // guards what follows
	events   []CatalogueEvent
	known    map[string]int // their positions by public identifier
	ordered  bool
}

// MetadataNote is what of a document was not taken, or is doubtful, and the line
// of the element.
type MetadataNote struct {
	Path string
	Line int
	Text string
}

// CatalogueEvent is an event of a QuakeML document.
type CatalogueEvent struct {
	Event
	// PublicID is the document's own identifier, unique in the world, or made of time
	// and place where it states none.
	PublicID string
	// Created is when this version of it came about, zero where the document does not say.
	Created time.Time
}

// The reasons for which a file is no record but was put to use.
const (
	StationMetadataUsed = "station metadata, used"
	EventMetadataUsed   = "events, used"
)

// ReadMetadata reads StationXML and QuakeML documents: those named, and those
// among the *.xml of folders named, in the order of the paths' names. What
// several say alike counts once. An error is a *ParseError, the context's, or says
// that a path cannot be listed.
func ReadMetadata(ctx context.Context, paths []string) (*Metadata, error) {
	m := &Metadata{}
	for _, path := range slices.Sorted(slices.Values(paths)) {
		if err := m.addPath(ctx, path); err != nil {
			return nil, err
		}
	}
	return m, nil
}

func (m *Metadata) addPath(ctx context.Context, path string) error {
	info, err := os.Stat(path)
	if err != nil {
		return fmt.Errorf("read metadata: %w", err)
	}
	if !info.IsDir() {
		used, err := m.AddFile(ctx, path)
		if err == nil && used == "" {
			err = &ParseError{Path: path, Err: errors.New("neither StationXML nor QuakeML")}
		}
		return err
	}
	entries, err := os.ReadDir(path)
	if err != nil {
		return fmt.Errorf("read metadata: %w", err)
	}
	for _, e := range entries {
		if !e.IsDir() && MayBeMetadata(e.Name()) {
			if _, err := m.AddFile(ctx, filepath.Join(path, e.Name())); err != nil {
				return err
			}
		}
	}
	return nil
}

// MayBeMetadata reports whether a file's base name is that of an XML document.
func MayBeMetadata(base string) bool {
	return strings.EqualFold(filepath.Ext(base), ".xml") && SkipByName(base) == ""
}

// AddFile is Add of the file at path.
func (m *Metadata) AddFile(ctx context.Context, path string) (used string, err error) {
	data, _, err := Read(path)
	if err != nil {
		return "", err
	}
	return m.Add(ctx, path, data)
}

// Add reads one more document, which lies at path, and says how it is used, ""
// where it is neither StationXML nor QuakeML. What of it is left out is noted. An
// error is a *ParseError, or the context's; nothing is added with it. The data are
// not kept.
func (m *Metadata) Add(ctx context.Context, path string, data []byte) (used string, err error) {
	switch fdsnxml.Kind(data) {
	case fdsnxml.Stations:
		v, err := fdsnxml.ReadStations(ctx, data)
		if err != nil {
			return "", metadataFault(ctx, path, err)
		}
		m.note(path, v.Notes)
		m.inventory.Merge(v)
		return StationMetadataUsed, nil
	case fdsnxml.Events:
		events, left, err := fdsnxml.ReadEvents(ctx, data)
		if err != nil {
			return "", metadataFault(ctx, path, err)
		}
		m.note(path, left)
		m.addEvents(path, events)
		return EventMetadataUsed, nil
	}
	return "", nil
}

func metadataFault(ctx context.Context, path string, err error) error {
	if stopped := ctx.Err(); stopped != nil {
		return stopped
	}
	if e, ok := errors.AsType[*fdsnxml.Error](err); ok {
		return &ParseError{Path: path, Line: e.Line, Err: e.Err}
	}
	return &ParseError{Path: path, Err: err}
}

func (m *Metadata) note(path string, notes []fdsnxml.Note) {
	for _, n := range notes {
		m.notes = append(m.notes, MetadataNote{path, n.Line, n.Text})
	}
}

// Notes returns what was noted, in the order of the documents.
func (m *Metadata) Notes() []MetadataNote {
	if m == nil {
		return nil
	}
	return m.notes
}

// addEvents keeps the events of a document. Of an event that is there already the later
// version stays.
func (m *Metadata) addEvents(path string, events []fdsnxml.Event) {
	m.ordering.Lock()
	defer m.ordering.Unlock()
	if m.known == nil {
		m.known = map[string]int{}
	}
	for i := range events {
		e, doubts := catalogueEvent(&events[i])
		for _, d := range doubts {
			m.notes = append(m.notes, MetadataNote{path, events[i].Line, fmt.Sprintf("event %.80s: %s", e.PublicID, d)})
		}
		at, ok := m.known[e.PublicID]
		switch {
		case !ok:
			m.known[e.PublicID] = len(m.events)
			m.events = append(m.events, e)
		case !m.events[at].Supersedes(&e):
			m.events[at] = e
		}
		m.ordered = false
	}
}

// Supersedes reports whether e is a later version than another of the same event that
// was read after it: where both say when they came about. Else the last read is taken.
func (e *CatalogueEvent) Supersedes(next *CatalogueEvent) bool {
	return !next.Created.IsZero() && e.Created.After(next.Created)
}

// IsEmpty reports whether no document has been read.
func (m *Metadata) IsEmpty() bool {
	return m == nil || len(m.Events())+len(m.inventory.Stations)+len(m.inventory.Channels) == 0
}

// Events returns the events in the order of their origin times. The caller must
// not change them.
func (m *Metadata) Events() []CatalogueEvent {
	if m == nil {
		return nil
	}
	m.ordering.Lock()
	defer m.ordering.Unlock()
	m.order()
	return m.events
}

// Event returns the event with this public identifier.
func (m *Metadata) Event(publicID string) (e CatalogueEvent, ok bool) {
	if m == nil {
		return e, false
	}
	m.ordering.Lock()
	defer m.ordering.Unlock()
	m.order()
	at, ok := m.known[publicID]
	if ok {
		e = m.events[at]
	}
	return e, ok
}

// order sorts the events by origin time, with the lock held.
func (m *Metadata) order() {
	if !m.ordered {
		slices.SortFunc(m.events, func(a, b CatalogueEvent) int {
			return cmp.Or(a.Origin.Compare(b.Origin), cmp.Compare(a.PublicID, b.PublicID))
		})
		for i := range m.events {
			m.known[m.events[i].PublicID] = i
		}
		m.ordered = true
	}
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

// Station returns what StationXML says of the channel's station, by network and
// code: name, coordinates and elevation. ok is false where that is nothing.
func (m *Metadata) Station(c *Channel) (s Station, ok bool) {
	if m == nil || c.Station.Network == "" || c.Station.Code == "" {
		return Station{}, false
	}
	site, ok := m.inventory.Site(c.Station.Network, c.Station.Code, c.Start)
	if !ok {
		return Station{}, false
	}
	return Station{
		Network: c.Station.Network, Code: c.Station.Code, Name: site.Name,
		Latitude: Number(site.Latitude), Longitude: Number(site.Longitude), ElevationM: Number(site.ElevationM),
	}, true
}

// epoch returns the epoch of a channel that covers the times.
func (m *Metadata) epoch(network, station, location, code string, from, to time.Time) (*fdsnxml.Channel, error) {
	if m == nil {
		return nil, fdsnxml.ErrUnknown
	}
	return m.inventory.Lookup(network, station, location, code, from, to)
}
