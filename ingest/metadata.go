package ingest

import (
	"cmp"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"time"

	"swaybook/ingest/fdsnxml"
)

// Metadata is what StationXML and QuakeML documents say of channels, stations
// and events. Its methods may be called from several goroutines at once, those
// that add excepted.
type Metadata struct {
	inventory fdsnxml.Inventory
	events    []CatalogueEvent
	known     map[string]bool // public identifiers of events
}

// CatalogueEvent is an event of a QuakeML document.
type CatalogueEvent struct {
	Event
	PublicID string // the document's own identifier, unique in the world
	Kind     string // "earthquake", "quarry blast" …, "" where not stated
	Warnings []string
}

// The reasons for which a file is no record but was put to use.
const (
	StationMetadataUsed = "station metadata, used"
	EventMetadataUsed   = "events, used"
)

// ReadMetadata reads StationXML and QuakeML documents: those named, and those
// among the *.xml of folders named, in the order of the paths' names. What
// several say alike counts once. An error
// is a *ParseError, or says that a path cannot be listed.
func ReadMetadata(paths []string) (*Metadata, error) {
	m := &Metadata{}
	for _, path := range slices.Sorted(slices.Values(paths)) {
		if err := m.addPath(path); err != nil {
			return nil, err
		}
	}
	return m, nil
}

func (m *Metadata) addPath(path string) error {
	info, err := os.Stat(path)
	if err != nil {
		return fmt.Errorf("read metadata: %w", err)
	}
	if !info.IsDir() {
		used, err := m.AddFile(path)
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
			if _, err := m.AddFile(filepath.Join(path, e.Name())); err != nil {
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
func (m *Metadata) AddFile(path string) (used string, err error) {
	data, _, err := Read(path)
	if err != nil {
		return "", err
	}
	return m.Add(path, data)
}

// Add reads one more document, which lies at path, and says how it is used, ""
// where it is neither StationXML nor QuakeML. An error is a *ParseError; nothing
// is added with it. The data are not kept.
func (m *Metadata) Add(path string, data []byte) (used string, err error) {
	switch fdsnxml.Kind(data) {
	case fdsnxml.Stations:
		v, err := fdsnxml.ReadStations(data)
		if err != nil {
			return "", metadataFault(path, err)
		}
		m.inventory.Merge(v)
		return StationMetadataUsed, nil
	case fdsnxml.Events:
		events, err := fdsnxml.ReadEvents(data)
		if err != nil {
			return "", metadataFault(path, err)
		}
		m.addEvents(events)
		return EventMetadataUsed, nil
	}
	return "", nil
}

func metadataFault(path string, err error) error {
	if e, ok := errors.AsType[*fdsnxml.Error](err); ok {
		return &ParseError{Path: path, Line: e.Line, Err: e.Err}
	}
	return &ParseError{Path: path, Err: err}
}

// addEvents keeps the events in the order of Events. Of an event that is there
// already the first stays.
func (m *Metadata) addEvents(events []fdsnxml.Event) {
	if m.known == nil {
		m.known = map[string]bool{}
	}
	var fresh []CatalogueEvent
	for i := range events {
		if e := catalogueEvent(&events[i]); !m.known[e.PublicID] {
			m.known[e.PublicID] = true
			fresh = append(fresh, e)
		}
	}
	slices.SortFunc(fresh, byOrigin)
	m.events = merged(m.events, fresh)
}

func byOrigin(a, b CatalogueEvent) int {
	return cmp.Or(a.Origin.Compare(b.Origin), cmp.Compare(a.PublicID, b.PublicID))
}

// merged puts more events among others, both in order, and returns all. It moves
// no event that comes before the first of them.
func merged(events, more []CatalogueEvent) []CatalogueEvent {
	i, j := len(events), len(more)
	events = append(events, more...)
	for at := len(events) - 1; j > 0; at-- {
		if i > 0 && byOrigin(events[i-1], more[j-1]) > 0 {
			i--
			events[at] = events[i]
		} else {
			j--
			events[at] = more[j]
		}
	}
	return events
}

// IsEmpty reports whether no document has been read.
func (m *Metadata) IsEmpty() bool {
	return m == nil || len(m.events)+len(m.inventory.Stations)+len(m.inventory.Channels) == 0
}

// Events returns the events in the order of their origin times. The caller must
// not change them.
func (m *Metadata) Events() []CatalogueEvent {
	if m == nil {
		return nil
	}
	return m.events
}

func catalogueEvent(e *fdsnxml.Event) CatalogueEvent {
	out := CatalogueEvent{
		Event: Event{
			ID: orElse(e.Code, lastOfID(e.PublicID)), Name: e.Name, Origin: e.Origin,
			Latitude: Known(e.Latitude), Longitude: Known(e.Longitude), MagnitudeType: e.MagnitudeType,
		},
		PublicID: e.PublicID, Kind: e.Type, Warnings: e.Warnings,
	}
	if e.DepthM != nil {
		out.DepthKM = Known(*e.DepthM / 1000)
	}
	if e.Magnitude != nil {
		out.Magnitude = Known(*e.Magnitude)
	}
	return out
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
		Latitude: Known(site.Latitude), Longitude: Known(site.Longitude), ElevationM: Known(site.ElevationM),
	}, true
}

// epoch returns the epoch of a channel that covers the times.
func (m *Metadata) epoch(network, station, location, code string, from, to time.Time) (*fdsnxml.Channel, error) {
	if m == nil {
		return nil, fdsnxml.ErrUnknown
	}
	return m.inventory.Lookup(network, station, location, code, from, to)
}
